"""Compact stripped stars: a helium core that has lost its envelope and burns helium.

Source: helium main sequence of Hurley, Pols & Tout 2000, MNRAS 315, 543, eqs. 77-81 (fitted to 0.32-10 Msun). Real
stripped stars keep a little hydrogen, so the radii are lower limits (Gotberg et al. 2018, A&A 615, A78): they are
blown up here by up to 2.5 times below 1 Msun and 1.5 times above (judgement).
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

from vetter.stars.properties import StarProperties, surface_gravity, teff_from_luminosity_k

FloatArray = NDArray[np.float64]

MASS_RANGE_MSUN = (0.3, 15.0)
"""Masses with a star to offer; helium does not burn below 0.32 Msun, and above 10 Msun the formulas are stretched."""

LUMINOSITY_SCATTER_DEX = 0.15
"""Standard deviation of log10 L about the relation (judgement)."""

_INFLATION_BELOW, _INFLATION_ABOVE = 2.5, 1.5
_INFLATION_RAMP_MSUN = (0.9, 1.1)


class PureHelium(NamedTuple):
    """Luminosity and radius (solar) of a pure helium star and its helium-burning lifetime (Myr)."""

    luminosity_lsun: FloatArray
    radius_rsun: FloatArray
    lifetime_myr: FloatArray


def pure_helium(mass_msun: ArrayLike, life_fraction: ArrayLike) -> PureHelium:
    """Return the helium main sequence at ``life_fraction`` (0-1) of helium burning, mass > 0; inputs broadcast.

    Hurley, Pols & Tout 2000, eqs. 77 (L at birth), 78 (R at birth), 79 (lifetime), 80 (L) and 81 (R).
    """
    m, tau = np.broadcast_arrays(np.asarray(mass_msun, dtype=float), np.asarray(life_fraction, dtype=float))
    m4 = m**4
    luminosity = 15262.0 * m**10.25 / (m**9 + 29.54 * m**7.5 + 31.18 * m**6 + 0.0469)
    luminosity = luminosity * (1.0 + 0.45 * tau + np.maximum(0.0, 0.85 - 0.08 * m) * tau**2)
    radius = 0.2391 * m**4.6 / (m4 + 0.162 * m**3 + 0.0065)
    beta = np.maximum(0.0, 0.4 - 0.22 * np.log10(m))
    radius = radius * (1.0 + beta * tau - beta * tau**6)
    lifetime = (0.4129 + 18.81 * m4 + 1.853 * m**6) / m**6.5
    return PureHelium(np.asarray(luminosity), np.asarray(radius), np.asarray(lifetime))


def inflation_max(mass_msun: ArrayLike) -> FloatArray:
    """Return how many times larger than pure helium a stripped star may be: 2.5 below 0.9 Msun, 1.5 above 1.1."""
    m = np.asarray(mass_msun, dtype=float)
    low, high = _INFLATION_RAMP_MSUN
    return np.asarray(np.exp(np.interp(m, [low, high], np.log([_INFLATION_BELOW, _INFLATION_ABOVE]))))


def helium_star(
    mass_msun: ArrayLike, life_fraction: ArrayLike, inflation: ArrayLike = 0.0, z_luminosity: ArrayLike = 0.0
) -> StarProperties:
    """Return compact stripped stars; all arguments broadcast together.

    Parameters
    ----------
    mass_msun : 0.3-15; outside, ``valid`` is False
    life_fraction : 0-1 of helium burning; outside, ``valid`` is False
    inflation : 0 (pure helium) to 1 (largest envelope), in ln R; uniform in a prior; outside, ``valid`` is False
    z_luminosity : standard-normal score of the scatter of log L, 0.15 dex
    """
    mass, tau, share, z = np.broadcast_arrays(
        *(np.asarray(x, dtype=float) for x in (mass_msun, life_fraction, inflation, z_luminosity))
    )
    valid = (mass >= MASS_RANGE_MSUN[0]) & (mass <= MASS_RANGE_MSUN[1])
    valid = valid & (tau >= 0.0) & (tau <= 1.0) & (share >= 0.0) & (share <= 1.0)
    m, tau, share = np.where(valid, mass, 1.0), np.where(valid, tau, 0.5), np.where(valid, share, 0.0)
    core = pure_helium(m, tau)
    luminosity = np.asarray(core.luminosity_lsun * 10.0 ** (LUMINOSITY_SCATTER_DEX * z))
    radius = np.asarray(core.radius_rsun * inflation_max(m) ** share)
    return StarProperties(
        teff_from_luminosity_k(luminosity, radius), radius, surface_gravity(m, radius), luminosity, m, np.asarray(valid)
    )
