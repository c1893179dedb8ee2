"""Interstellar dust: A(lambda)/A(V) after Gordon et al. 2023 (ApJ 950, 86), for any wavelength of the tables.

The law is linear in 1/R_V, so two stored columns give every R_V without importing ``dust_extinction`` at run time.
"""

from __future__ import annotations

import numpy as np

from vetter.errors import InputError
from vetter.light.tables import DustTable, FloatArray

R_V_RANGE = (2.3, 5.6)
"""Range of R_V over which the law was measured."""


def extinction_curve(dust: DustTable, wavelength_angstrom: FloatArray, r_v: float = 3.1) -> FloatArray:
    """Return A(lambda)/A(V), same shape as ``wavelength_angstrom`` (> 0).

    The published range is 912 A to 32 um. Below it the last value is held (no passband reaches there, and the gas,
    not the dust, decides); above it the curve falls as a power law with the slope of the last tenth of the range.
    Raises InputError when ``r_v`` is outside 2.3 to 5.6.
    """
    if not R_V_RANGE[0] <= r_v <= R_V_RANGE[1]:
        raise InputError.single(
            "extinction", "r_v", r_v, "2.3 to 5.6 (range of Gordon et al. 2023)", "Use 3.1 unless it was measured."
        )
    curve = dust.a + dust.b * (1.0 / r_v - 1.0 / 3.1)
    ln_table, ln_wave = np.log(dust.wavelength_angstrom), np.log(wavelength_angstrom)
    inside = np.interp(ln_wave, ln_table, curve)
    reference = np.searchsorted(ln_table, ln_table[-1] - 0.1)
    slope = np.log(curve[-1] / curve[reference]) / (ln_table[-1] - ln_table[reference])
    return np.where(ln_wave > ln_table[-1], curve[-1] * np.exp(slope * (ln_wave - ln_table[-1])), inside)
