"""The companion's mass: one posterior per explanation that stands, each in its own strip."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING, NamedTuple

import numpy as np

from vetter.results.figures import style
from vetter.results.verdicts import MassDensity, OrbitSummary, ScenarioVerdict

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

STRIP_INCH, FOOT_INCH = 0.42, 0.55

LOG_FROM = 6.0
"""The axis is logarithmic from this ratio of its ends on."""


class Reach(NamedTuple):
    """The masses (Msun) that the figure must show."""

    low: float
    high: float

    @property
    def logarithmic(self) -> bool:
        """Whether the axis is logarithmic."""
        return self.high > LOG_FROM * self.low


def mass_posterior(rows: Sequence[ScenarioVerdict], orbit: OrbitSummary) -> Figure | None:
    """Return the figure, or None where no explanation has a posterior.

    Explanations that are excluded are left out, unless all are.
    """
    known = [row for row in rows if row.mass_density is not None]
    shown = [row for row in known if row.verdict != "excluded"] or known
    if not shown:
        return None
    reach = mass_reach([row.mass_density for row in shown if row.mass_density is not None], orbit)
    with style.drawn(style.COLUMN_INCH, FOOT_INCH + STRIP_INCH * len(shown)) as figure:
        panels = list(np.atleast_1d(figure.subplots(len(shown), 1, sharex=True)))
        for axes, row in zip(panels, shown, strict=True):
            _strip(axes, row, reach.logarithmic)
            axes.tick_params(axis="x", length=3 if axes is panels[-1] else 0)
            _least(axes, orbit)
        _finish(panels, reach, orbit)
    return figure


def mass_reach(densities: Sequence[MassDensity], orbit: OrbitSummary) -> Reach:
    """Return the masses of all posteriors, and the least mass that the orbit allows."""
    low = min(density.edges_msun[0] for density in densities)
    high = max(density.edges_msun[-1] for density in densities)
    return Reach(low if orbit.companion_min_msun is None else min(low, orbit.companion_min_msun), high)


def _strip(axes: Axes, row: ScenarioVerdict, logarithmic: bool) -> None:
    """One posterior, scaled to its own peak; the 68 % interval filled darker."""
    if row.mass_density is None:
        return
    edges, height = np.array(row.mass_density.edges_msun), np.array(row.mass_density.per_msun)
    middles = 0.5 * (edges[1:] + edges[:-1])
    if logarithmic:
        # What is drawn is the density per unit of the axis.
        height = height * middles
    scaled = height / height.max()
    axes.stairs(scaled, edges, fill=True, color=style.PALE, linewidth=0)
    if row.companion_mass_msun is not None:
        low, middle, high = row.companion_mass_msun
        inside = (edges[1:] > low) & (edges[:-1] < high)
        axes.stairs(np.where(inside, scaled, 0.0), edges, fill=True, color="0.68", linewidth=0)
        axes.plot([middle, middle], [0.0, float(np.interp(middle, middles, scaled))], color=style.INK)
    axes.stairs(scaled, edges, color=style.INK, linewidth=0.8)
    axes.set_ylim(0.0, 1.75)
    axes.set_yticks([])
    for side in ("left", "right", "top"):
        axes.spines[side].set_visible(False)
    axes.text(0.0, 0.97, row.title, transform=axes.transAxes, va="top", fontsize=style.SMALL)


def _least(axes: Axes, orbit: OrbitSummary) -> None:
    """The least mass that the orbit allows, for the seen star of the best fit."""
    if orbit.companion_min_msun is not None:
        place = [orbit.companion_min_msun] * 2
        axes.plot(place, [0.0, 1.1], color=style.GREY, linewidth=0.8, linestyle=style.DASHES[2])


def _finish(panels: Sequence[Axes], reach: Reach, orbit: OrbitSummary) -> None:
    """The common axis, wide enough for every posterior, and the name of the least mass."""
    last = panels[-1]
    if reach.logarithmic:
        last.set_xscale("log")
        last.set_xlim(reach.low / 1.15, reach.high * 1.15)
        style.plain_ticks(last, "x", style.decades(reach.low / 1.15, reach.high * 1.15))
    else:
        margin = 0.06 * (reach.high - reach.low)
        last.set_xlim(reach.low - margin, reach.high + margin)
    last.set_xlabel("companion mass ($M_\\odot$); each curve scaled to its peak")
    if orbit.companion_min_msun is None or orbit.seen_star_msun is None:
        return
    middle = np.sqrt(reach.low * reach.high) if reach.logarithmic else 0.5 * (reach.low + reach.high)
    panels[0].annotate(
        f"least for a seen star of {orbit.seen_star_msun:.3g} $M_\\odot$",
        (orbit.companion_min_msun, 1.0),
        (0, 2),
        xycoords=("data", "axes fraction"),
        textcoords="offset points",
        ha="left" if orbit.companion_min_msun < middle else "right",
        va="bottom",
        fontsize=style.SMALL,
        color=style.GREY,
        annotation_clip=False,
    )
