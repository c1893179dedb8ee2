"""Companion mass against second light in the deciding window: where explanations live, what the orbit asks for."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import TYPE_CHECKING, NamedTuple

import numpy as np
from numpy.typing import NDArray

from vetter.observations.astrometry import measured_inclination
from vetter.physics import kepler
from vetter.results.best_details import window_name
from vetter.results.figures import style
from vetter.results.figures.best_light import seen_star
from vetter.results.figures.placing import Placer
from vetter.results.verdicts import BestFit, ScenarioVerdict, Verdicts
from vetter.scenarios.base import registered
from vetter.scenarios.context import OPTICAL_WINDOW_NM, Context

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

FloatArray = NDArray[np.float64]

HEIGHT_INCH = 3.3

CURVES = {
    "main_sequence": "main sequence",
    "evolved_star": "evolved",
    "inner_pair": "two stars",
    "inner_pair_with_white_dwarf": "star + white dwarf",
    "stripped_companion": "helium star",
    "white_dwarf": "white dwarf",
}
"""Explanations with light of their own, as written on their curves."""

MARKS = {
    "stripped_primary": "stripped seen star",
    "neutron_star": "neutron star",
    "black_hole": "black hole",
    "compact_pair": "two remnants",
    "unrelated_light": "unrelated star",
}
"""Explanations without a curve, as written beside their best case."""

LIMIT = "limit on a second spectrum"

MASSES, DRAWS = 48, 256

FAINTEST, BRIGHTEST = 1e-5, 5.0

DARK = 2.2e-5
"""Where a dark companion is drawn."""

CENTRAL = (0.05, 0.95)
"""Share of the prior draws at a given mass that a band holds."""


class Band(NamedTuple):
    """Light ratio at masses (n,): lower end, median, upper end of the prior draws."""

    mass_msun: FloatArray
    low: FloatArray
    middle: FloatArray
    high: FloatArray


def mass_and_light(rows: Sequence[ScenarioVerdict], verdicts: Verdicts, context: Context) -> Figure | None:
    """Return the figure, or None where nothing was fitted."""
    best = verdicts.best
    if best is None or best.best_fit is None:
        return None
    window, limit = deciding_window(context)
    reach = mass_range(rows, verdicts)
    found = {row.name: light_band(row.name, best.best_fit, context, reach) for row in rows if row.name in CURVES}
    bands = {name: band for name, band in found.items() if band is not None}
    marks = {row.name: mark(row, window) for row in rows if row.best_fit is not None}
    with style.drawn(style.COLUMN_INCH, HEIGHT_INCH) as figure:
        axes = figure.subplots()
        axes.set_xscale("log")
        axes.set_yscale("log")
        axes.set_xlim(*reach)
        axes.set_ylim(FAINTEST, BRIGHTEST)
        _limit(axes, limit)
        _orbit(axes, verdicts, context)
        _curves(axes, bands)
        _marks(axes, rows, marks)
        axes.set_xlabel("companion mass ($M_\\odot$)")
        axes.set_ylabel(f"light of the companion / seen star, {window[0]:g}–{window[1]:g} nm")
        style.plain_ticks(axes, "x", style.decades(*reach))
        figure.draw_without_rendering()
        _names(axes, bands, {row.name: row.title for row in rows}, marks, limit)
    return figure


def deciding_window(context: Context) -> tuple[tuple[float, float], float | None]:
    """Return the window (nm) with the deepest limit, and that limit; the optical one where none was given."""
    limits = context.system.light_limits
    if not limits:
        return OPTICAL_WINDOW_NM, None
    deepest = min(limits, key=lambda limit: limit.ratio_max)
    return deepest.wavelength_nm, deepest.ratio_max


def mass_range(rows: Sequence[ScenarioVerdict], verdicts: Verdicts) -> tuple[float, float]:
    """Return the masses (Msun) shown: all best cases and what the orbit asks for, with room on both sides."""
    masses = [row.best_fit.values["m2_msun"] for row in rows if row.best_fit is not None]
    if verdicts.orbit.companion_min_msun is not None:
        masses.append(verdicts.orbit.companion_min_msun)
    return max(min(masses) / 3.0, 0.08), max(masses) * 3.0


def required_mass(verdicts: Verdicts, context: Context) -> tuple[float, float | None] | None:
    """Return the companion mass (Msun) the orbit asks for: one sigma of the inclination wide, or a lower limit."""
    orbit = verdicts.orbit
    if orbit.mass_function_msun is None or orbit.seen_star_msun is None or orbit.companion_min_msun is None:
        return None
    measured = measured_inclination(context.system.orbit)
    if measured is None:
        return orbit.companion_min_msun, None
    angles = np.clip(np.array([measured.value - measured.error, measured.value + measured.error]), 1.0, 179.0)
    sines = np.sin(np.radians(angles))
    if angles[0] < 90.0 < angles[1]:
        sines = np.append(sines, 1.0)
    masses = kepler.companion_mass_msun(orbit.mass_function_msun, orbit.seen_star_msun, sines)
    return float(masses.min()), float(masses.max())


def _limit(axes: Axes, limit: float | None) -> None:
    """The region that the limit on a second light excludes, hatched."""
    if limit is not None:
        axes.axhspan(limit, BRIGHTEST, facecolor="none", edgecolor="0.85", hatch="////", linewidth=0, zorder=0)
        axes.axhline(limit, color=style.INK, linewidth=0.8, zorder=1)


def _orbit(axes: Axes, verdicts: Verdicts, context: Context) -> None:
    """The masses that the orbit asks for, as a grey band or as everything right of a line."""
    wanted = required_mass(verdicts, context)
    if wanted is None:
        return
    low, high = wanted
    if high is None:
        axes.axvspan(low, axes.get_xlim()[1], color="0.93", linewidth=0, zorder=-1)
        axes.axvline(low, color=style.GREY, linewidth=0.8, zorder=0)
        said = "orbit: at least"
    else:
        axes.axvspan(low, high, color=style.PALE, linewidth=0, zorder=-1)
        for edge in (low, high):
            axes.axvline(edge, color=style.GREY, linewidth=0.5, zorder=0)
        said = "orbit"
    axes.text(
        low,
        1.01,
        said,
        transform=axes.get_xaxis_transform(),
        ha="left",
        va="bottom",
        fontsize=style.SMALL,
        color=style.GREY,
    )


def _curves(axes: Axes, bands: Mapping[str, Band]) -> None:
    """The band of each explanation with light, each in its own hue and dash."""
    for name, band in bands.items():
        hue, dash = _look(name)
        axes.fill_between(band.mass_msun, band.low, band.high, color=hue, alpha=0.10, linewidth=0, zorder=1)
        axes.plot(band.mass_msun, band.middle, color=hue, linestyle=dash, linewidth=1.1, zorder=2)


def _look(name: str) -> tuple[str, object]:
    """Hue and dash of an explanation, the same in every figure; ink where it has no curve."""
    place = list(CURVES).index(name) if name in CURVES else None
    return (style.INK, "-") if place is None else (style.HUES[place], style.DASHES[place])


def mark(row: ScenarioVerdict, window: tuple[float, float]) -> tuple[float, float]:
    """Return mass and light ratio of a best case; a dark one is put at the bottom of the frame."""
    if row.best_fit is None:
        raise ValueError("an explanation that is closed by a wall has no best case")
    return row.best_fit.values["m2_msun"], max(row.best_fit.light_ratio.get(window_name(window), 0.0), DARK)


def _marks(axes: Axes, rows: Sequence[ScenarioVerdict], marks: Mapping[str, tuple[float, float]]) -> None:
    """The best case of each explanation: full where it stands, open where it is excluded, a triangle where dark."""
    for row in rows:
        if row.name not in marks:
            continue
        mass, light = marks[row.name]
        hue = _look(row.name)[0]
        face = "white" if row.verdict == "excluded" else hue
        shape = "v" if light <= DARK else "o"
        axes.plot(mass, light, marker=shape, color=hue, markerfacecolor=face, markersize=4, zorder=5)


def _names(
    axes: Axes,
    bands: Mapping[str, Band],
    titles: Mapping[str, str],
    marks: Mapping[str, tuple[float, float]],
    limit: float | None,
) -> None:
    """Names of the limit, of the marks without a curve, and on the curves, clear of each other."""
    placer = Placer(axes)
    across = np.geomspace(*axes.get_xlim(), 90)
    for mass, light in marks.values():
        placer.avoid_mark(mass, light)
    for name, band in bands.items():
        placer.avoid(band.mass_msun, band.middle, owner=CURVES[name])
    if limit is not None:
        placer.avoid(across, limit, owner=LIMIT)
        placer.along(LIMIT, across, limit, style.INK)
    for name, (mass, light) in marks.items():
        if name not in CURVES:
            placer.beside(MARKS.get(name, titles[name]), mass, light, style.INK)
    for name, band in bands.items():
        inside = (band.middle > FAINTEST) & (band.middle < BRIGHTEST)
        if inside.any():
            placer.along(CURVES[name], band.mass_msun[inside], band.middle[inside], _look(name)[0])


def light_band(name: str, best: BestFit, context: Context, reach: tuple[float, float]) -> Band | None:
    """Return where one explanation lives for prior draws of its own parameters, beside the seen star of ``best``."""
    scenario = registered(on_request=True)[name]
    prior = scenario.mass_prior(context.system.assumptions)
    low, high = max(reach[0], prior.low * 1.001), min(reach[1], prior.high * 0.999)
    if low >= high:
        return None
    masses = np.geomspace(low, high, MASSES)
    mass = np.repeat(masses, DRAWS)
    # The same draws at every mass, or the curves would be ragged.
    generator = np.random.default_rng(0)
    draws = {p.name: np.tile(p.draw(generator.normal(size=DRAWS))[0], MASSES) for p in scenario.companion_parameters()}
    feh = np.full(mass.size, best.values["feh"])
    with np.errstate(all="ignore"):
        companion = scenario.companion(mass, feh, draws)
        light = _ratio(companion.components, best, context)
        for wall in companion.walls:
            light = np.where(wall.excess > 0.0, np.nan, light)
    table = light.reshape(MASSES, DRAWS)
    known = np.isfinite(table).sum(axis=1) >= DRAWS // 2
    if not known.any():
        return None
    ends = np.nanquantile(table[known], (CENTRAL[0], 0.5, CENTRAL[1]), axis=1)
    return Band(masses[known], *np.maximum(ends, 1e-12))


def _ratio(components: Sequence[object], best: BestFit, context: Context) -> FloatArray:
    """Light of the components over the seen star's in the deciding window, at the distance and dust of ``best``."""
    from vetter.light.engine import Component

    engine = context.engine
    window, _ = deciding_window(context)
    column = len(engine.bands) + engine.windows_nm.index(window)
    place = (best.values["distance_pc"], engine.r_v * best.values["ebv_mag"])
    seen = engine.magnitudes(seen_star(best), *place)[0, column]
    total: FloatArray = np.zeros(1)
    for component in components:
        if isinstance(component, Component):
            total = total + 10.0 ** (0.4 * (seen - engine.magnitudes(component, *place)[:, column]))
    return total
