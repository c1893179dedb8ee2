"""Measured magnitudes as fluxes, the stars of one most favourable case, and the residuals of all, strip by strip."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from vetter.observations.photometry import PhotometryObservation
from vetter.results.figures import style
from vetter.results.figures.best_light import narrow_engine, spectra
from vetter.results.figures.placing import Placer
from vetter.results.verdicts import ScenarioVerdict, sigma_text
from vetter.scenarios.context import Context

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

FloatArray = NDArray[np.float64]

TOP_INCH, STRIP_INCH, FOOT_INCH = 2.3, 0.36, 0.45

STRIP_SIGMA = 5.0
"""A strip ends here; what lies beyond is drawn at its edge as a triangle with its number."""

STAR = "star"
"""Label of the curves that are stars of the chosen case."""

MICRON_TICKS = (0.15, 0.2, 0.3, 0.5, 0.7, 1.0, 2.0, 3.0, 5.0, 10.0, 20.0)


def spectral_energy(
    rows: Sequence[ScenarioVerdict], chosen: ScenarioVerdict | None, context: Context, photometry: PhotometryObservation
) -> Figure:
    """Return the figure; ``chosen`` is the explanation whose stars are drawn one by one."""
    fitted = [row for row in rows if row.best_fit is not None]
    height = TOP_INCH + FOOT_INCH + STRIP_INCH * len(fitted)
    with style.drawn(style.COLUMN_INCH, height) as figure:
        ratios = (TOP_INCH, *([STRIP_INCH] * len(fitted)))
        panels = np.atleast_1d(figure.subplots(len(ratios), 1, sharex=True, height_ratios=ratios))
        top = panels[0]
        micron = np.array(context.engine.pivots_angstrom[: len(context.engine.bands)]) / 1e4
        used = micron[np.concatenate([photometry.index, photometry.limit_index])]
        low, high = float(used.min()) * 0.82, float(used.max()) * 1.25
        top.set_xscale("log")
        top.set_yscale("log")
        top.set_xlim(low, high)
        _curves(top, fitted, chosen, context, (low, high))
        _measured(top, context, photometry, micron)
        for axes, row in zip(panels[1:], fitted, strict=True):
            _strip(axes, row, context, photometry, micron)
        _finish(figure, panels)
        figure.draw_without_rendering()
        _name_stars(top, chosen)
    return figure


def _curves(
    top: Axes,
    rows: Sequence[ScenarioVerdict],
    chosen: ScenarioVerdict | None,
    context: Context,
    reach: tuple[float, float],
) -> None:
    """The sums of all explanations in pale grey; the chosen one's stars with their names."""
    narrow = narrow_engine(context, *reach)
    for row in rows:
        if row is not chosen and row.best_fit is not None and row.name != "unrelated_light":
            found = spectra(narrow, row.best_fit)
            top.plot(found.micron, found.total, color="0.75", linewidth=0.7, zorder=1)
    if chosen is None or chosen.best_fit is None:
        return
    found = spectra(narrow, chosen.best_fit)
    top.plot(found.micron, found.total, color=style.INK, linewidth=0.9, zorder=3)
    top.plot(
        found.micron, found.seen, color=style.HUES[0], linestyle=style.DASHES[1], linewidth=0.9, zorder=2, label=STAR
    )
    for flux in found.hidden:
        top.plot(
            found.micron, flux, color=style.HUES[1], linestyle=style.DASHES[3], linewidth=0.9, zorder=2, label=STAR
        )


def _name_stars(top: Axes, chosen: ScenarioVerdict | None) -> None:
    """Names of the chosen case's stars beside their curves, which have the label of stars."""
    if chosen is None or chosen.best_fit is None:
        return
    stars = chosen.best_fit.hidden_stars
    named = [("seen star", chosen.best_fit.values["teff1_k"], style.HUES[0])]
    named += [("white dwarf" if "white_dwarf" in s.kind else "hidden star", s.teff_k, style.HUES[1]) for s in stars]
    words = [f"{name}, {round(teff, -1 if teff < 2e4 else -2):.0f} K" for name, teff, _ in named]
    placer = Placer(top)
    curves: list[FloatArray] = []
    for line in top.lines:
        points = np.array(line.get_xydata(), dtype=float)
        own = line.get_label() == STAR
        placer.avoid(points[:, 0], points[:, 1], owner=words[len(curves)] if own else "")
        curves += [points] if own else []
    low, high = top.get_ylim()
    for curve, text, (_, _, hue) in zip(curves, words, named, strict=True):
        inside = (curve[:, 1] > low) & (curve[:, 1] < high)
        if inside.any():
            placer.along(text, curve[inside, 0], curve[inside, 1], hue)


def _flux(context: Context, band: str, mag: float | FloatArray) -> FloatArray:
    """lambda F_lambda (erg s-1 cm-2) of a magnitude."""
    engine = context.engine
    pivot = engine.pivots_angstrom[engine.bands.index(band)]
    return np.asarray(pivot * engine.zero_flux(band) * 10.0 ** (-0.4 * np.asarray(mag, dtype=float)))


def _measured(top: Axes, context: Context, photometry: PhotometryObservation, micron: FloatArray) -> None:
    """Measured fluxes in black, limits as arrows; the axis is set by them."""
    bands = context.engine.bands
    flux = np.array([float(_flux(context, bands[n], m)) for n, m in zip(photometry.index, photometry.mag, strict=True)])
    error = flux * 0.4 * np.log(10.0) * photometry.sigma_mag
    top.errorbar(
        micron[photometry.index], flux, yerr=error, fmt="o", color=style.INK, markersize=3.2, linewidth=0.8, zorder=4
    )
    lowest, highest = float(flux.min()), float(flux.max())
    for place, mag in zip(photometry.limit_index, photometry.limit_mag, strict=True):
        limit = float(_flux(context, bands[place], mag))
        lowest, highest = min(lowest, limit), max(highest, limit)
        top.errorbar(
            micron[place],
            limit,
            yerr=0.4 * limit,
            uplims=True,
            fmt="_",
            color=style.INK,
            markersize=6,
            linewidth=0.8,
            capsize=2,
            zorder=4,
        )
    faintest = min((float(np.min(line.get_ydata())) for line in top.lines if line.get_label() == STAR), default=lowest)
    top.set_ylim(max(min(faintest, lowest) / 1.8, lowest / 30.0), 2.2 * highest)


def _strip(
    axes: Axes, row: ScenarioVerdict, context: Context, photometry: PhotometryObservation, micron: FloatArray
) -> None:
    """Residuals of one explanation in sigma, its name above them."""
    if row.best_fit is None:
        return
    # Those of the likelihood: a magnitude that counts on one side only has none on the other.
    data = row.best_fit.residuals["photometry"]
    residual = np.array([data[context.engine.bands[place]] for place in photometry.index])
    place = micron[photometry.index]
    axes.axhspan(-1.0, 1.0, color=style.PALE, linewidth=0, zorder=0)
    axes.axhline(0.0, color=style.GREY, linewidth=0.5, zorder=1)
    inside = np.abs(residual) <= STRIP_SIGMA
    axes.plot(place[inside], residual[inside], "o", color=style.INK, markersize=2.4, zorder=3)
    for x, value in zip(place[~inside], residual[~inside], strict=True):
        side = float(np.sign(value))
        axes.plot(x, 0.82 * side * STRIP_SIGMA, "^" if side > 0 else "v", color=style.INK, markersize=3.2, zorder=3)
        axes.annotate(
            f"{abs(value):.0f}",
            (x, 0.82 * side * STRIP_SIGMA),
            (3, 0),
            textcoords="offset points",
            va="center",
            fontsize=5.5,
        )
    axes.set_ylim(-STRIP_SIGMA, STRIP_SIGMA * 2.0)
    axes.set_yticks([-3, 0, 3], ["−3", "0", "3"])
    axes.tick_params(axis="y", labelsize=5.5)
    said = row.title if row.sigma is None else f"{row.title} ({sigma_text(row.sigma)}σ)"
    axes.text(0.015, 0.96, said, transform=axes.transAxes, va="top", fontsize=style.SMALL)


def _finish(figure: Figure, panels: NDArray[np.object_]) -> None:
    """Axes of the whole figure."""
    top, last = panels[0], panels[-1]
    top.set_ylabel("$\\lambda F_\\lambda$  (erg s$^{-1}$ cm$^{-2}$)")
    style.plain_ticks(last, "x", MICRON_TICKS)
    last.set_xlabel("wavelength (µm)")
    middle = panels[len(panels) // 2] if len(panels) > 1 else None
    if middle is not None:
        middle.set_ylabel("model − measured (σ)")
    figure.align_ylabels(list(panels))
