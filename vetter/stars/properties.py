"""The one result type of every relation in :mod:`vetter.stars`, and the surface laws that tie its columns together."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]
BoolArray = NDArray[np.bool_]

TEFF_SUN_K = 5772.0
"""Nominal solar effective temperature (IAU 2015 resolution B3)."""

LOGG_SUN = 4.438067
"""log10 of the nominal solar surface gravity, GM / R^2 = 1.3271244e26 cm3/s2 / (6.957e10 cm)^2."""


class StarProperties(NamedTuple):
    """What a star is, one value per sample; every array has the broadcast shape of the inputs.

    ``valid`` is False where the relation has no star to offer (outside its range); the other columns are then
    finite but meaningless.
    """

    teff_k: FloatArray
    radius_rsun: FloatArray
    logg: FloatArray
    luminosity_lsun: FloatArray
    mass_msun: FloatArray
    valid: BoolArray


def teff_from_luminosity_k(luminosity_lsun: FloatArray, radius_rsun: FloatArray) -> FloatArray:
    """Return the effective temperature (K) from luminosity and radius, both > 0 (Stefan-Boltzmann)."""
    return TEFF_SUN_K * luminosity_lsun**0.25 / np.sqrt(radius_rsun)


def surface_gravity(mass_msun: FloatArray, radius_rsun: FloatArray) -> FloatArray:
    """Return log10 of the surface gravity in cm/s2 from mass and radius, both > 0 (Newton)."""
    return LOGG_SUN + np.log10(mass_msun) - 2.0 * np.log10(radius_rsun)


def radius_from_gravity_rsun(mass_msun: FloatArray, logg: FloatArray) -> FloatArray:
    """Return the radius (solar) of a star of given mass (> 0) and log10 surface gravity (cm/s2)."""
    return np.sqrt(mass_msun * 10.0 ** (LOGG_SUN - logg))
