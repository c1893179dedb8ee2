"""White dwarfs: radius from mass; the temperature is a free parameter, for their cooling age is not modelled."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from vetter.stars.properties import TEFF_SUN_K, StarProperties, surface_gravity

FloatArray = NDArray[np.float64]

CHANDRASEKHAR_MSUN = 1.44
"""Mass at which the radius of the relation vanishes."""

MASS_RANGE_MSUN = (0.1, 1.43)
"""Masses with a star to offer; above, the radius relation is in free fall."""

TEFF_RANGE_K = (1500.0, 200000.0)
"""Temperatures with a star to offer: coolest known to hottest pre-white dwarfs."""


def white_dwarf_radius_rsun(mass_msun: ArrayLike) -> FloatArray:
    """Return the radius (solar) of a cold white dwarf, 0 < mass < 1.44 Msun.

    0.0115 sqrt((1.44/M)^(2/3) - (M/1.44)^(2/3)): Hurley, Pols & Tout 2000, MNRAS 315, 543, eq. 91, after Tout et al.
    1997, MNRAS 291, 732. Hot ones are larger: by about 5 % at 0.6 Msun and 20 kK, by more below 0.4 Msun (judgement).
    """
    third = np.cbrt(np.asarray(mass_msun, dtype=float) / CHANDRASEKHAR_MSUN)
    square = third * third
    return np.asarray(0.0115 * np.sqrt(1.0 / square - square))


def white_dwarf(mass_msun: ArrayLike, teff_k: ArrayLike) -> StarProperties:
    """Return white dwarfs of given mass (0.1-1.43 Msun) and effective temperature (1500-200000 K), broadcast.

    Outside either range ``valid`` is False.
    """
    mass, teff = np.broadcast_arrays(np.asarray(mass_msun, dtype=float), np.asarray(teff_k, dtype=float))
    valid = (mass >= MASS_RANGE_MSUN[0]) & (mass <= MASS_RANGE_MSUN[1])
    valid &= (teff >= TEFF_RANGE_K[0]) & (teff <= TEFF_RANGE_K[1])
    m, t = np.where(valid, mass, 0.6), np.where(valid, teff, 1e4)
    radius = white_dwarf_radius_rsun(m)
    luminosity = np.asarray(radius * radius * (t / TEFF_SUN_K) ** 4)
    return StarProperties(np.asarray(t), radius, surface_gravity(m, radius), luminosity, m, np.asarray(valid))
