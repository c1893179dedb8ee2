"""Figures. Plain style: one hue-and-mark pair per scenario, names written beside the curves where there is room."""

from __future__ import annotations

import io
from typing import TYPE_CHECKING, Any

import numpy as np

from vetter.results.verdicts import ScenarioVerdict, Verdicts

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

    from vetter.observations.photometry import PhotometryObservation
    from vetter.scenarios.context import Context

HUES = ("#0072b2", "#d55e00", "#009e73", "#cc79a7", "#56b4e9", "#e69f00", "#7f7f7f", "#000000")
"""Okabe & Ito's colours, told apart by colour-blind readers (jfly.uni-koeln.de/color, 2008)."""

MARKS = ("o", "s", "^", "D", "v", "P", "X", "*")

STYLE: Any = {
    "font.size": 9,
    "axes.titlesize": 9,
    "axes.labelsize": 9,
    "legend.fontsize": 7.5,
    "xtick.labelsize": 8,
    "ytick.labelsize": 8,
    "axes.spines.top": False,
    "axes.spines.right": False,
    "axes.linewidth": 0.8,
    "pdf.fonttype": 42,
    "svg.fonttype": "path",
    "savefig.dpi": 200,
}


def magnitudes_figure(verdicts: Verdicts, context: Context, photometry: PhotometryObservation) -> Figure:
    """Return measured magnitudes with the best composite of each scenario, and the residuals beneath in sigma."""
    import matplotlib as mpl
    from matplotlib.figure import Figure

    with mpl.rc_context(rc=STYLE):
        figure = Figure(figsize=(6.8, 5.2), layout="constrained")
        top, bottom = figure.subplots(2, 1, sharex=True, height_ratios=(2.2, 1.0))
        micron = np.array(context.engine.pivots_angstrom[: len(context.engine.bands)]) / 1e4
        shown = [scenario for scenario in verdicts.scenarios if scenario.best_fit is not None]
        for place, scenario in enumerate(shown):
            _scenario_marks(top, bottom, scenario, place, len(shown), micron, context, photometry)
        _measured(top, context, photometry, micron)
        _limits(top, photometry, micron)
        _finish(top, bottom, verdicts, context, micron)
    return figure


def figure_bytes(figure: Figure, kind: str) -> bytes:
    """Return the figure as a file of ``kind`` ("png" or "pdf"), the same bytes for the same figure."""
    buffer = io.BytesIO()
    metadata = {"Software": None} if kind == "png" else {"CreationDate": None, "Creator": None, "Producer": None}
    figure.savefig(buffer, format=kind, metadata=metadata)
    return buffer.getvalue()


def _scenario_marks(
    top: Axes,
    bottom: Axes,
    scenario: ScenarioVerdict,
    place: int,
    count: int,
    micron: np.ndarray[Any, Any],
    context: Context,
    photometry: PhotometryObservation,
) -> None:
    """One scenario: open marks joined by a thin line above, its residuals below, nudged sideways to be told apart."""
    if scenario.best_fit is None:
        return
    hue, mark = HUES[place % len(HUES)], MARKS[place % len(MARKS)]
    model = np.array([scenario.best_fit.magnitudes[band] for band in context.engine.bands])
    order = np.argsort(micron)
    nudge = 1.0 + 0.02 * (place - (count - 1) / 2.0)
    sigma = "" if scenario.sigma is None else f", {scenario.sigma:.1f} sigma"
    top.plot(
        micron[order],
        model[order],
        "-",
        color=hue,
        marker=mark,
        markersize=5,
        markerfacecolor="none",
        linewidth=0.9,
        label=f"{scenario.title} ({scenario.verdict}{sigma})",
        zorder=2,
    )
    residual = (photometry.mag - model[photometry.index]) / photometry.sigma_mag
    bottom.plot(
        micron[photometry.index] * nudge,
        residual,
        linestyle="none",
        color=hue,
        marker=mark,
        markersize=5,
        markerfacecolor="none",
    )


def _measured(top: Axes, context: Context, photometry: PhotometryObservation, micron: np.ndarray[Any, Any]) -> None:
    """The measured magnitudes with measured and model error, in black."""
    top.errorbar(
        micron[photometry.index],
        photometry.mag,
        yerr=photometry.sigma_mag,
        fmt="o",
        color="black",
        markersize=3.5,
        capsize=2.5,
        linewidth=1.2,
        label="measured (error with model error)",
        zorder=3,
    )


def _limits(top: Axes, photometry: PhotometryObservation, micron: np.ndarray[Any, Any]) -> None:
    """Limits as arrows pointing to where the source may be: fainter."""
    if photometry.limit_mag.size == 0:
        return
    x = micron[photometry.limit_index]
    top.plot(x, photometry.limit_mag, "_", color="black", markersize=9, label="limit: fainter than this", zorder=3)
    for place, mag in zip(x, photometry.limit_mag, strict=True):
        top.annotate(
            "", (place, mag + 0.9), (place, mag), arrowprops={"arrowstyle": "->", "color": "black", "linewidth": 1.0}
        )


def _finish(top: Axes, bottom: Axes, verdicts: Verdicts, context: Context, micron: np.ndarray[Any, Any]) -> None:
    """Axes, labels, band names and legend."""
    top.set_xscale("log")
    top.invert_yaxis()
    top.set_ylabel("magnitude (own system of each band)")
    top.set_title(f"{verdicts.system}: best case of each explanation", loc="left")
    top.legend(frameon=False, loc="best")
    bottom.axhspan(-1, 1, color="0.92", zorder=0)
    bottom.axhline(0.0, color="0.5", linewidth=0.8, zorder=1)
    bottom.set_ylabel("measured - model\n(sigma)")
    bottom.set_xlabel("pivot wavelength (micron)")
    ticks = (0.15, 0.2, 0.3, 0.4, 0.5, 0.7, 1.0, 1.5, 2.0, 3.0, 5.0, 10.0, 20.0)
    low, high = micron.min() * 0.85, micron.max() * 1.18
    shown = [t for t in ticks if low <= t <= high]
    bottom.set_xlim(low, high)
    bottom.set_xticks(shown, [f"{t:g}" for t in shown])
    bottom.set_xticks([], minor=True)
    largest = max(3.0, *(abs(v) for line in bottom.lines for v in np.atleast_1d(line.get_ydata())))
    bottom.set_ylim(-1.15 * largest, 1.15 * largest)
