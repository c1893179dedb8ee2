"""Light of white dwarfs from the published magnitude tables, and the hot end of the star grid that leans on them.

The tables are those of the Montreal group (Bedard et al. 2020, ApJ 901, 93, and references there), for hydrogen (DA)
and helium (DB) surfaces.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence

import numpy as np

from vetter.light.magnitude_grid import MagnitudeGrid
from vetter.light.synthesis import Columns
from vetter.light.tables import FloatArray, Passband, WhiteDwarfTable

C2_CM_K = 1.438776877
TWO_PI_H_C2 = 2.0 * np.pi * 6.62607015e-27 * 2.99792458e10**2  # erg cm2 / s

STAND_IN_LOGG = 5.0
"""Gravity of the hot atmosphere whose dust dimming stands in for a white dwarf's of the same temperature."""


def surface_planck(wavelength_angstrom: FloatArray, teff_k: FloatArray) -> FloatArray:
    """Return pi B_lambda (erg s-1 cm-2 A-1) of black bodies, broadcast; Planck 1901, constants of CODATA 2018."""
    wavelength_cm = wavelength_angstrom * 1e-8
    exponent = np.minimum(C2_CM_K / (wavelength_cm * teff_k), 600.0)
    return np.asarray(TWO_PI_H_C2 / wavelength_cm**5 / np.expm1(exponent) * 1e-8)


def column_magnitudes(
    table: WhiteDwarfTable,
    bands: Sequence[str],
    columns: Columns,
    passbands: Mapping[str, Passband],
    wavelength_angstrom: FloatArray,
) -> FloatArray:
    """Return magnitudes at 10 pc for 1 solar radius, (nt, ng, k), in the columns' own zero points.

    ``bands`` names the first columns; the rest are windows. A column that the table has is taken as it is. For any
    other (and any gap in the table) ln of the flux over a black body's of the same Teff is interpolated, linear in ln
    wavelength, between the pivots of the nearest tabulated bands and held beyond the last ones. The black body takes
    care of the width of the band: left out one at a time, G comes back within 0.02 mag rms (0.12 without it), R 0.01
    (0.09), r of PS1 0.01 (0.07); bands at the Balmer jump 0.03, J H Ks 0.03 to 0.06.
    """
    tabulated = sorted((passbands[name] for name in table.bands), key=lambda band: band.pivot_angstrom)
    place = {band.id: position for position, band in enumerate(tabulated)}
    order = [table.bands.index(band.id) for band in tabulated]
    ln_zero = np.log([band.zero_flux[band.usual_system] for band in tabulated])
    ln_flux = ln_zero - 0.4 * np.log(10.0) * table.surface_mag[:, :, order]

    planck = surface_planck(wavelength_angstrom, table.teff_k[:, None])
    # Sums written out: as matrix products they would start threads, which cost more than they save.
    ln_planck, ln_column_planck = (
        np.log(np.einsum("tw,kw->tk", planck, weights))[:, None]
        for weights in (np.array([band.weights for band in tabulated]), columns.weights)
    )
    excess = ln_flux - ln_planck
    ln_pivot, ln_wanted = np.log([band.pivot_angstrom for band in tabulated]), np.log(columns.pivot_angstrom)
    ln_column = np.repeat(ln_column_planck, len(table.logg), axis=1)
    for index in np.ndindex(excess.shape[:2]):
        known = np.isfinite(excess[index])
        ln_column[index] += np.interp(ln_wanted, ln_pivot[known], excess[index][known])
    for column, name in enumerate(bands):
        if name in place:
            own = ln_flux[:, :, place[name]]
            ln_column[:, :, column] = np.where(np.isfinite(own), own, ln_column[:, :, column])
    return np.asarray(-2.5 / np.log(10.0) * (ln_column - np.log(columns.zero_flux)))


def white_dwarf_grid(table: WhiteDwarfTable, magnitudes: FloatArray, stars: MagnitudeGrid) -> MagnitudeGrid:
    """Return the white dwarfs' grid: the table's magnitudes, dimmed like the star grid at the same Teff, log g 5."""
    dust = stars.polynomials(table.teff_k, np.full(len(table.teff_k), STAND_IN_LOGG))
    coefficients = np.repeat(dust[:, None], len(table.logg), axis=1)
    coefficients[:, :, 0] = magnitudes
    return MagnitudeGrid(np.log(table.teff_k), np.asarray(table.logg, dtype=float), coefficients)


def with_hot_end(stars: MagnitudeGrid, white_dwarfs: MagnitudeGrid) -> MagnitudeGrid:
    """Return the star grid continued to the hottest white dwarf of the table (150 kK).

    Above the hottest atmosphere (50 kK) the surface brightens like a white dwarf's of the table's lowest gravity. A
    Planck function instead is 0.2 to 0.3 mag too bright in V at 80 to 100 kK. Dust dims as at the hottest atmosphere.
    """
    last = stars.ln_teff[-1]
    hot = white_dwarfs.ln_teff[white_dwarfs.ln_teff > last]
    nodes = np.exp(np.r_[last, hot])
    lowest = white_dwarfs.polynomials(nodes, np.full(len(nodes), white_dwarfs.logg[0]))[:, 0]
    rows = np.repeat(stars.coefficients[-1:], len(hot), axis=0)
    rows[:, :, 0] += (lowest[1:] - lowest[0])[:, None]
    return MagnitudeGrid(np.r_[stars.ln_teff, hot], stars.logg, np.concatenate([stars.coefficients, rows]))
