"""Neutron stars and black holes: mass alone, and no light."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from vetter.stars.properties import StarProperties, surface_gravity

FloatArray = NDArray[np.float64]

NEUTRON_STAR_RANGE_MSUN = (1.1, 2.3)
"""Lightest that a supernova leaves, and about the heaviest that is stable (heaviest measured: Fonseca et al. 2021,
ApJ 915, L12, 2.08 Msun; limit from the merger of 2017: Rezzolla, Most & Weih 2018, ApJ 852, L25, 2.16 + 0.17)."""

BLACK_HOLE_RANGE_MSUN = (2.3, 150.0)

NEUTRON_STAR_RADIUS_KM = 12.0
"""Radius of a neutron star, right to about 1 km (Miller et al. 2021, ApJ 918, L28)."""

_GRAVITATIONAL_RADIUS_KM = 2.95325
"""2 G Msun / c^2."""

_R_SUN_KM = 6.957e5


def neutron_star(mass_msun: ArrayLike) -> StarProperties:
    """Return neutron stars of given mass (1.1-2.3 Msun); outside, ``valid`` is False. They are taken to be dark."""
    mass = np.asarray(mass_msun, dtype=float)
    return _dark(mass, np.full(mass.shape, NEUTRON_STAR_RADIUS_KM / _R_SUN_KM), NEUTRON_STAR_RANGE_MSUN)


def black_hole(mass_msun: ArrayLike) -> StarProperties:
    """Return black holes of given mass (2.3-150 Msun); outside, ``valid`` is False. The radius is the horizon's."""
    mass = np.asarray(mass_msun, dtype=float)
    return _dark(mass, mass * _GRAVITATIONAL_RADIUS_KM / _R_SUN_KM, BLACK_HOLE_RANGE_MSUN)


def _dark(mass: FloatArray, radius_rsun: FloatArray, mass_range: tuple[float, float]) -> StarProperties:
    valid = np.asarray((mass >= mass_range[0]) & (mass <= mass_range[1]))
    m = np.where(valid, mass, mass_range[0])
    radius = np.where(valid, radius_rsun, 1e-5)
    zero = np.zeros(m.shape)
    return StarProperties(zero, radius, surface_gravity(m, radius), zero, m, valid)
