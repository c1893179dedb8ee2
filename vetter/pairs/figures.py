"""Figures of a contrast: the plane of inner period and mass ratio, and the residual velocities folded."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from vetter.pairs.plane import REASONS, Plane
from vetter.pairs.result import Contrast, PairDetail
from vetter.physics.inner_wave import inner_wave
from vetter.results.figures.style import COLUMN_INCH, PLATE, SMALL, drawn

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

SHADES = ("#ffffff", "#bdbdbd", "#8c8c8c", "#f0c75e", "#7db7dc", "#cfa5c8")
"""One per entry of ``REASONS``; each region also carries its name."""

NAMED_CELLS = 0.03
"""Regions smaller than this share of the plane are not named in it."""

PANEL_INCH = 2.1


def contrast_figure(found: Contrast) -> Figure:
    """Return one row per pair: its plane and, where there are epochs, the folded residuals."""
    rows = max(len(found.details), 1)
    columns = 1 if found.epochs is None else 2
    with drawn(COLUMN_INCH * columns, PANEL_INCH * rows) as figure:
        axes = figure.subplots(rows, columns, squeeze=False)
        if not found.details:
            axes[0, 0].set_axis_off()
            axes[0, 0].text(0.0, 0.5, found.headline, wrap=True)
        for place, detail in enumerate(found.details):
            draw_plane(axes[place, 0], found, detail)
            if columns == 2:
                draw_folded(axes[place, 1], found, detail)
    return figure


def draw_plane(axis: Axes, found: Contrast, detail: PairDetail) -> None:
    """Draw what is closed, and why, with the walls as lines and the most favourable pair as a star."""
    from matplotlib.colors import BoundaryNorm, ListedColormap

    plane = detail.plane
    edges = np.linspace(0.0, 1.0, plane.mass_ratio.size + 1)
    norm = BoundaryNorm(np.arange(len(REASONS) + 1) - 0.5, len(REASONS))
    axis.pcolormesh(plane.period_edge_d, edges, plane.reason, cmap=ListedColormap(SHADES), norm=norm, rasterized=True)
    for wall, dashes in ((plane.shortest_d, "-"), (plane.stable_d, "--")):
        axis.plot(wall, plane.mass_ratio, dashes, color="black", linewidth=0.8)
    if plane.best_period_d is not None and plane.best_mass_ratio is not None:
        axis.plot(plane.best_period_d, plane.best_mass_ratio, "*", color="#d55e00", markersize=8, markeredgecolor="k")
    axis.set_xscale("log")
    axis.set_xlim(plane.period_edge_d[0], plane.period_edge_d[-1])
    axis.set_ylim(0.0, 1.0)
    _name_regions(axis, plane)
    low = float(plane.stable_d[0])
    axis.text(low, 0.03, "stability limit ", rotation=90, ha="right", va="bottom", fontsize=SMALL, clip_on=True)
    axis.set_xlabel("inner period (d)")
    axis.set_ylabel("mass ratio (lighter / heavier)")
    axis.set_title(found.explanation(detail.name).title, loc="left", fontsize=7.5)


def _name_regions(axis: Axes, plane: Plane) -> None:
    """Write on each region of some size what it is."""
    for code, name in enumerate(REASONS):
        inside = plane.reason == code
        if inside.mean() < NAMED_CELLS:
            continue
        # The middle of a full row lies inside the region, whatever its shape.
        row = _fullest(inside.sum(axis=1))
        columns = np.flatnonzero(inside[row])
        x = plane.period_d[columns[columns.size // 2]]
        upright = columns.size < plane.period_d.size // 5
        axis.text(
            x,
            plane.mass_ratio[row],
            name,
            ha="center",
            va="center",
            fontsize=SMALL,
            rotation=90 if upright else 0,
            bbox=PLATE,
        )


def _fullest(count: np.ndarray) -> int:
    """The middle one of the rows with nearly the most cells."""
    most = np.flatnonzero(count >= 0.9 * count.max())
    return int(most[most.size // 2])


def draw_folded(axis: Axes, found: Contrast, detail: PairDetail) -> None:
    """Draw the residual velocities against the phase of the strongest line at the most telling inner period."""
    epochs, wave = found.epochs, detail.wave
    if epochs is None or wave is None:
        axis.set_axis_off()
        return
    period = wave.best_period_d
    line_per_d = 2.0 / period - 3.0 / epochs.orbit.period_d
    fitted = epochs.fitted_wave(period)
    scale = 1e3 if np.abs(fitted.residual_km_s).max() < 1.0 else 1.0
    axis.errorbar(
        (epochs.data.time_d * line_per_d) % 1.0,
        scale * fitted.residual_km_s,
        yerr=scale * epochs.data.error_km_s,
        fmt="o",
        color="black",
        markersize=2.5,
        linewidth=0.7,
    )
    time = epochs.data.time_d.min() + np.linspace(0.0, epochs.orbit.period_d, 2000)
    model = np.real(fitted.amplitude * inner_wave(time, np.array([period]), epochs.orbit)[0])
    axis.plot((time * line_per_d) % 1.0, scale * model, ".", color="#0072b2", markersize=1.0, zorder=0)
    axis.axhline(0.0, color="0.6", linewidth=0.6, zorder=0)
    axis.set_xlim(0.0, 1.0)
    axis.set_xlabel(f"phase of the strongest line, inner period {period:.5g} d")
    axis.set_ylabel(f"velocity - orbit ({'m/s' if scale > 1.0 else 'km/s'})")
