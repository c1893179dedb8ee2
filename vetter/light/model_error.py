"""How wrong a synthetic magnitude may be (one sigma, mag), from the measured residuals of the shipped tables.

Take it once, at the seen star's measured temperature and gravity: an error that moves with the fitted parameters
biases the comparison of explanations.
"""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from vetter.light.tables import FloatArray, ModelErrorTable, Passband

FLOOR_MAG = 0.01

PER_DEX_MAG = ((4000.0, 0.40), (5000.0, 0.15), (10000.0, 0.07), (np.inf, 0.04))
"""Pivot wavelength (angstrom) below which, and error per dex of [Fe/H] where the light is that of solar atmospheres.

Measured on the CALSPEC stars C26202, SF1615+001A and BD+17 4708 ([Fe/H] -0.39, -0.61, -1.69; Bohlin et al. 2017, AJ
153, 234): what their residuals need beyond the error of solar stars, rounded up.
"""

KNOWN_PER_DEX_MAG = (np.log([3500.0, 4500.0]), (0.20, 0.03))
"""The same, over ln Teff, where the effect of [Fe/H] is in the light: measured on those stars; below 4500 K half of the
published effect itself, a judgement, because model atmospheres fail there."""


def metallicity_error_mag(pivot_angstrom: float, teff_k: FloatArray, feh: FloatArray, known: bool) -> FloatArray:
    """Return the error (mag) that [Fe/H] (dex) adds; ``known`` says whether the light follows [Fe/H] in this band."""
    if known:
        return np.asarray(np.interp(np.log(teff_k), *KNOWN_PER_DEX_MAG) * np.abs(feh))
    return next(per_dex for below, per_dex in PER_DEX_MAG if pivot_angstrom < below) * np.abs(feh)


def nearest_band(table: ModelErrorTable, band: Passband, passbands: Mapping[str, Passband]) -> str:
    """Return the tabulated band itself, or the one whose pivot wavelength is nearest in the logarithm."""
    if band.id in table.bands:
        return band.id
    return min(table.bands, key=lambda name: abs(np.log(passbands[name].pivot_angstrom / band.pivot_angstrom)))


def model_error_mag(
    table: ModelErrorTable,
    band: Passband,
    passbands: Mapping[str, Passband],
    teff_k: FloatArray,
    logg: FloatArray,
    feh: FloatArray,
    *,
    metallicity_known: bool = False,
) -> FloatArray:
    """Return the one-sigma error (mag, >= 0.01) of a synthetic magnitude; the inputs broadcast.

    Linear in log Teff between the table's nodes, held beyond them; giants have their own column; metallicity adds in
    quadrature (see :func:`metallicity_error_mag`).
    """
    column = table.bands.index(nearest_band(table, band, passbands))
    ln_nodes, ln_teff = np.log(table.teff_k), np.log(teff_k)
    dwarf = np.interp(ln_teff, ln_nodes, table.dwarf_mag[:, column])
    giant = np.interp(ln_teff, ln_nodes, table.giant_mag[:, column])
    surface = np.maximum(np.where(np.asarray(logg) < table.logg_giant_below, giant, dwarf), FLOOR_MAG)
    return np.asarray(np.hypot(surface, metallicity_error_mag(band.pivot_angstrom, teff_k, feh, metallicity_known)))
