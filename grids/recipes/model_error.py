"""One-sigma error of a synthetic magnitude per band and temperature, measured on the mean dwarf sequence and the Sun.

A magnitude's error is the larger of two: the root mean square difference of our tables from the mean dwarf sequence
within a Gaussian window of temperature, and the largest difference, relative to V, from the CALSPEC spectra of dwarfs
of nearly solar metallicity within 8 % in temperature, at their published Teff, log g and dust. Bands that neither
covers take the range of errors found when the recipe was first tried.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

import numpy as np

from .blue_correction import interpolate
from .extinction import dust_columns
from .passbands import Curve, hat_weights
from .sequence import CHAINS, chain_minus, sequence_stars
from .sources import Sources
from .spectra import Array
from .standard_stars import STANDARDS, Standard, standard_spectrum
from .write import rounded

NODES_K = np.array(
    [
        2000,
        2250,
        2500,
        2750,
        3000,
        3250,
        3500,
        3750,
        4000,
        4250,
        4500,
        4750,
        5000,
        5500,
        6000,
        6500,
        7000,
        7500,
        8000,
        9000,
        10000,
        12500,
        15000,
        20000,
        30000,
        50000.0,
    ]
)
FLOOR_MAG = 0.01
WINDOW_LN_TEFF = ((8000.0, 14000.0), (0.06, 0.20))  # the sequence has few rows among hot stars
STANDARD_WITHIN_LN_TEFF = 0.08
STANDARD_WITHIN_DEX = 0.25
STANDARD_PER_DEX_MAG = 0.4  # below 4000 A: what [Fe/H] explains of a standard's residual (vetter.light.model_error)
STANDARDS_FLOOR_MAG = 0.02  # three of the stars shaped the blue correction
ANCHORS = ("Generic/Johnson.V", "2MASS/2MASS.J")  # the magnitudes that fix the angular diameter, first one measured
R_V = 3.1
LOGG_GIANT_BELOW = 3.0
COOL_GIANT_MAG = 0.15
COOL_GIANT_BELOW_K = 4200.0
GIANT_EXTRA_MAG = 0.03  # no measured correction reaches giants; blueward of 5000 A twice this
COOL_DWARF_BELOW_K = 4500.0
COOL_SHARE = 0.5  # the sequence also shaped these spectra: at least half of what bands left out of the fit miss
MIN_STARS = 1.5  # effective number of sequence rows below which a band counts as not measured
# Errors found when the recipe was first tried: upper temperature of the range, then U, optical, near and mid infrared.
_FIRST_FOUND = (
    (2700.0, 0.30, 0.27, 0.05, 0.05),
    (3300.0, 0.05, 0.07, 0.03, 0.03),
    (4500.0, 0.03, 0.05, 0.03, 0.05),
    (7500.0, 0.09, 0.03, 0.03, 0.05),
    (15000.0, 0.10, 0.05, 0.06, 0.07),
    (np.inf, 0.12, 0.08, 0.14, 0.07),
)
_CLASS_ENDS_ANGSTROM = (4000.0, 10000.0, 28000.0, np.inf)
_NUV = (3000.0, 0.2)
_FUV = (1800.0, (5000.0, 6000.0, 7500.0), (2.0, 1.0, 0.3))  # below 7000 K it is the chromosphere


def first_found_mag(pivot_angstrom: float, teff_k: float) -> float:
    """Return the starting error of a band that nothing measures."""
    if pivot_angstrom < _FUV[0]:
        return float(np.interp(teff_k, _FUV[1], _FUV[2]))
    if pivot_angstrom < _NUV[0]:
        return _NUV[1]
    row = next(row for row in _FIRST_FOUND if teff_k <= row[0])
    column = next(i for i, end in enumerate(_CLASS_ENDS_ANGSTROM) if pivot_angstrom < end)
    return row[1 + column]


class Photometer:
    """Synthetic absolute magnitudes of our own tables, straight from the arrays that are about to be written.

    Parameters
    ----------
    nodes, teff_k, logg, ln_flux : the surface-flux table, as in Atmospheres
    weights : (n_bands, nw) quadrature weights
    entries : the entries of passbands.json, same order
    """

    def __init__(  # noqa: D107 - the class docstring lists the parameters
        self,
        nodes: Array,
        teff_k: Array,
        logg: Array,
        ln_flux: Array,
        weights: Array,
        entries: Sequence[Mapping[str, Any]],
    ) -> None:
        self.nodes, self.teff_k, self.logg, self.ln_flux, self.weights = nodes, teff_k, logg, ln_flux, weights
        self.ids = [entry["id"] for entry in entries]
        self.zero = np.array([e["zero_flux_vega" if e["usual_system"] == "Vega" else "zero_flux_ab"] for e in entries])

    def surface_flux(self, teff_k: float, logg: float) -> Array:
        """Return the surface flux (nw,); the gravity is held to the table's range."""
        inside = float(np.clip(logg, self.logg[0], self.logg[-1]))
        return interpolate(self.teff_k, self.logg, self.ln_flux, teff_k, inside)

    def absolute_mag(self, teff_k: float, logg: float, radius_rsun: float) -> Array:
        """Return the magnitudes at 10 pc, (n_bands,), usual systems."""
        dilution = (radius_rsun * 6.957e10 / 3.0856775814913673e19) ** 2
        return np.asarray(-2.5 * np.log10(self.weights @ self.surface_flux(teff_k, logg) * dilution / self.zero))


def sequence_residuals(photometer: Photometer, stars: Sequence[Mapping[str, float]]) -> Array:
    """Return (n_stars, n_bands) synthetic minus published absolute magnitude, NaN where not published."""
    out = np.full((len(stars), len(photometer.ids)), np.nan)
    for i, star in enumerate(stars):
        synthetic = photometer.absolute_mag(star["teff_k"], star["logg"], star["radius"])
        for j, band in enumerate(photometer.ids):
            if band in CHAINS:
                out[i, j] = synthetic[j] - star["M_V"] - chain_minus(star, band, "Generic/Johnson.V")
    return out


def standard_difference(
    photometer: Photometer, curves: Sequence[Curve], standard: Standard, spectrum: tuple[Array, Array], law: Array
) -> Array:
    """Return (n_bands,) model minus observed magnitude relative to the anchor, NaN where the spectrum does not reach.

    ``law`` (nw,) is A(lambda)/A(V) on the photometer's wavelengths.
    """
    wavelength, flux = spectrum
    observed = np.array(
        [
            -2.5 * np.log10(hat_weights(c, wavelength) @ flux)
            if c.wavelength[0] >= wavelength[0] and c.wavelength[-1] <= wavelength[-1]
            else np.nan
            for c in curves
        ]
    )
    dust = 10 ** (-0.4 * R_V * standard.ebv_mag * law)
    surface = photometer.surface_flux(standard.teff_k, standard.logg)
    difference = -2.5 * np.log10(photometer.weights @ (surface * dust)) - observed
    anchors = difference[[photometer.ids.index(name) for name in ANCHORS]]
    return np.asarray(difference - anchors[np.isfinite(anchors)][0])


def standard_residuals(
    sources: Sources, photometer: Photometer, curves: Sequence[Curve], pivots_angstrom: Sequence[float]
) -> tuple[Array, Array]:
    """Return temperatures (n,) and residuals (n, n_bands) of the dwarf standards of nearly solar metallicity.

    Of a residual below 4000 A what the star's [Fe/H] explains is taken out in quadrature.
    """
    columns = dust_columns()
    law = np.interp(np.log(photometer.nodes), np.log(columns["wavelength_angstrom"]), columns["a"])
    used = [
        s
        for s in STANDARDS.values()
        if s.kind == "star" and s.logg >= LOGG_GIANT_BELOW and abs(s.feh) <= STANDARD_WITHIN_DEX
    ]
    blue = np.array(pivots_angstrom) < _CLASS_ENDS_ANGSTROM[0]
    rows = []
    for standard in used:
        spectrum = standard_spectrum(sources, standard)
        difference = standard_difference(photometer, curves, standard, spectrum, law)
        explained = np.where(blue, STANDARD_PER_DEX_MAG * standard.feh, 0.0)
        rows.append(np.sqrt(np.maximum(difference**2 - explained**2, 0.0)))
    return np.array([standard.teff_k for standard in used]), np.array(rows)


def largest_near(teff_k: Array, residuals: Array, node_k: float) -> Array:
    """Return (n_bands,) the largest residual of stars near one temperature, NaN where there is none."""
    near = residuals[np.abs(np.log(teff_k / node_k)) <= STANDARD_WITHIN_LN_TEFF]
    known = np.isfinite(near).any(axis=0)
    return np.where(known, np.nanmax(np.vstack([near, np.where(known, -np.inf, 0.0)]), axis=0), np.nan)


def windowed_rms(teff_k: Array, residuals: Array, node_k: float) -> Array:
    """Return (n_bands,) weighted rms of the residuals around one temperature, NaN where too few."""
    width = np.interp(node_k, *WINDOW_LN_TEFF)
    weight = np.exp(-0.5 * (np.log(teff_k / node_k) / width) ** 2)
    known = np.isfinite(residuals)
    total = (weight[:, None] * known).sum(axis=0)
    square = (weight[:, None] * np.where(known, residuals, 0.0) ** 2).sum(axis=0)
    return np.where(total >= MIN_STARS, np.sqrt(square / np.maximum(total, 1e-9)), np.nan)


def build_model_error(
    sources: Sources,
    photometer: Photometer,
    curves: Sequence[Curve],
    sequence_csv: str,
    pivots_angstrom: Sequence[float],
) -> dict[str, Any]:
    """Return the content of model_error.json."""
    rows = sequence_stars(sequence_csv, float(photometer.teff_k[0]), float(photometer.teff_k[-1]))
    stars = [star for star in rows if np.isfinite(star["logg"] + star["M_V"])]
    star_teff = np.array([star["teff_k"] for star in stars])
    residuals = sequence_residuals(photometer, stars)
    standard_teff, standard = standard_residuals(sources, photometer, curves, pivots_angstrom)
    dwarf = np.empty((NODES_K.size, len(pivots_angstrom)))
    for i, node in enumerate(NODES_K):
        by_standards = np.maximum(largest_near(standard_teff, standard, node), STANDARDS_FLOOR_MAG)
        by_sequence = windowed_rms(star_teff, residuals, node)
        both = np.fmax(by_sequence, by_standards)
        start = np.array([first_found_mag(pivot, node) for pivot in pivots_angstrom])
        # One M dwarf does not measure how much M dwarfs scatter: alone it may raise an error, not lower it.
        alone = np.isnan(by_sequence) & (node < COOL_DWARF_BELOW_K)
        both = np.where(alone & np.isfinite(both), np.fmax(both, start), both)
        if node < COOL_DWARF_BELOW_K:
            both = np.maximum(both, COOL_SHARE * start)
        ultraviolet = np.array(pivots_angstrom) < _NUV[0]
        dwarf[i] = np.maximum(np.where(np.isfinite(both) & ~ultraviolet, both, start), FLOOR_MAG)
    extra = GIANT_EXTRA_MAG * np.where(np.array(pivots_angstrom) < 5000.0, 2.0, 1.0)
    giant = np.hypot(dwarf, extra)
    giant = np.where((NODES_K < COOL_GIANT_BELOW_K)[:, None], np.maximum(giant, COOL_GIANT_MAG), giant)
    return {
        "bands": photometer.ids,
        "teff_k": NODES_K.tolist(),
        "logg_giant_below": LOGG_GIANT_BELOW,
        "dwarf_mag": [[rounded(value, 3) for value in row] for row in dwarf],
        "giant_mag": [[rounded(value, 3) for value in row] for row in giant],
    }
