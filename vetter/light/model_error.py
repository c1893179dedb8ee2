"""How wrong a synthetic magnitude may be (one sigma, mag), from the measured residuals of the shipped tables.

Take it once, at the seen star's measured temperature and gravity: an error that moves with the fitted parameters
biases the comparison of explanations.
"""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from vetter.light.tables import FloatArray, ModelErrorTable, Passband

FLOOR_MAG = 0.01

ULTRAVIOLET_BELOW_ANGSTROM = 4000.0
INFRARED_ABOVE_ANGSTROM = 10000.0
PER_DEX_ULTRAVIOLET, PER_DEX_OPTICAL, PER_DEX_INFRARED = 0.3, 0.05, 0.02
"""Extra error per dex of [Fe/H], because the tables are solar: a judgement, not a measurement."""


def metallicity_error_mag(pivot_angstrom: float, feh: FloatArray) -> FloatArray:
    """Return the error (mag) of using solar atmospheres for a star of ``feh`` (dex); a judgement."""
    if pivot_angstrom < ULTRAVIOLET_BELOW_ANGSTROM:
        per_dex = PER_DEX_ULTRAVIOLET
    elif pivot_angstrom < INFRARED_ABOVE_ANGSTROM:
        per_dex = PER_DEX_OPTICAL
    else:
        per_dex = PER_DEX_INFRARED
    return per_dex * np.abs(feh)


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
) -> FloatArray:
    """Return the one-sigma error (mag, >= 0.01) of a synthetic magnitude; the inputs broadcast.

    Linear in log Teff between the table's nodes, held beyond them; giants have their own column; metallicity adds in
    quadrature.
    """
    column = table.bands.index(nearest_band(table, band, passbands))
    ln_nodes, ln_teff = np.log(table.teff_k), np.log(teff_k)
    dwarf = np.interp(ln_teff, ln_nodes, table.dwarf_mag[:, column])
    giant = np.interp(ln_teff, ln_nodes, table.giant_mag[:, column])
    surface = np.maximum(np.where(np.asarray(logg) < table.logg_giant_below, giant, dwarf), FLOOR_MAG)
    return np.asarray(np.hypot(surface, metallicity_error_mag(band.pivot_angstrom, feh)))
