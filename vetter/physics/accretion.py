"""X-rays that an unseen remnant would make from the seen star's wind, and those that ordinary stars make anyway.

These numbers stand beside an X-ray limit; they are no part of any likelihood. See :data:`CAUTION`.
Every function takes numbers or arrays that broadcast together, in solar units unless a name says otherwise.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

from vetter.physics import kepler

FloatArray = NDArray[np.float64]

CAUTION = (
    "The X-rays of a remnant fed by a wind this thin may be far below the thin-disc value, by orders of magnitude: "
    "a non-detection does not exclude a black hole."
)

ETA_REIMERS = 0.5
"""Usual coefficient of the Reimers law for giants."""

HOT_ABOVE_K = 10000.0
BISTABILITY_K = 21000.0
"""Hotter stars drive winds to 2.6 times the escape speed, cooler ones to 1.3 (Lamers, Snow & Lindholm 1995)."""

THIN_DISC_EFFICIENCY = 0.1
THIN_DISC_ABOVE = 0.01
"""Accretion above this fraction of the Eddington rate goes through a thin disc (Narayan & Yi 1995, ApJ 452, 710)."""

CORONA_BELOW_K = 6500.0
"""Hotter stars have no convective envelope deep enough for a corona (common practice, no source)."""

SATURATED_CORONA = 10.0**-3.13
"""Highest L_X / L of a cool star's corona (Wright et al. 2011, ApJ 743, 48)."""

_YEAR_S = 3.15576e7
_MSUN_G = 1.98841e33
_C_CM_S = 2.99792458e10
_LSUN_ERG_S = 3.828e33
_EDDINGTON_ERG_S = 1.26e38


class Wind(NamedTuple):
    """Mass loss (Msun/yr) and speed at the companion (km/s), taken as the final speed."""

    loss_msun_yr: FloatArray
    speed_km_s: FloatArray


def escape_speed_km_s(mass_msun: ArrayLike, radius_rsun: ArrayLike) -> FloatArray:
    """Return the escape speed (km/s) at the surface; the Sun's is 617.7."""
    ratio = np.asarray(mass_msun, dtype=float) / np.asarray(radius_rsun, dtype=float)
    return np.asarray(np.sqrt(2.0 * kepler.GM_SUN_KM3_S2 / kepler.R_SUN_KM * ratio))


def reimers_wind(
    mass_msun: ArrayLike, radius_rsun: ArrayLike, luminosity_lsun: ArrayLike, eta: float = ETA_REIMERS
) -> Wind:
    """Return the wind of a cool giant: 4e-13 eta L R / M Msun/yr, at the escape speed (judgement).

    Source: Reimers 1975, Mem. Soc. R. Sci. Liege 8, 369. Giants only: dwarfs lose less.
    """
    m, r, light = (np.asarray(x, dtype=float) for x in (mass_msun, radius_rsun, luminosity_lsun))
    return Wind(np.asarray(4e-13 * eta * light * r / m), escape_speed_km_s(m, r))


def hot_wind(mass_msun: ArrayLike, radius_rsun: ArrayLike, luminosity_lsun: ArrayLike, teff_k: ArrayLike) -> Wind:
    """Return the wind of a luminous hot star (above 10 kK and 4000 Lsun; it is extrapolated below).

    Loss: Nieuwenhuijzen & de Jager 1990, A&A 231, 134, 9.6e-15 L^1.24 M^0.16 R^0.81 (from memory; right to a factor of
    three). Speed: 2.6 times the escape speed above 21 kK, 1.3 below (Lamers, Snow & Lindholm 1995, ApJ 455, 269).
    """
    m, r, light, teff = (np.asarray(x, dtype=float) for x in (mass_msun, radius_rsun, luminosity_lsun, teff_k))
    factor = np.where(teff >= BISTABILITY_K, 2.6, 1.3)
    return Wind(np.asarray(9.6e-15 * light**1.24 * m**0.16 * r**0.81), factor * escape_speed_km_s(m, r))


def stellar_wind(mass_msun: ArrayLike, radius_rsun: ArrayLike, luminosity_lsun: ArrayLike, teff_k: ArrayLike) -> Wind:
    """Return :func:`hot_wind` above 10 kK and :func:`reimers_wind` below."""
    cool = reimers_wind(mass_msun, radius_rsun, luminosity_lsun)
    hot = hot_wind(mass_msun, radius_rsun, luminosity_lsun, teff_k)
    is_hot = np.asarray(teff_k, dtype=float) >= HOT_ABOVE_K
    return Wind(
        np.where(is_hot, hot.loss_msun_yr, cool.loss_msun_yr), np.where(is_hot, hot.speed_km_s, cool.speed_km_s)
    )


def captured_fraction(
    companion_mass_msun: ArrayLike, total_mass_msun: ArrayLike, period_d: ArrayLike, wind_speed_km_s: ArrayLike
) -> FloatArray:
    """Return the share of the wind that falls to the companion, at most 1, for a circular orbit.

    (G Mx)^2 / [a^2 v_w (v_w^2 + v_orb^2)^1.5]: Bondi & Hoyle 1944, MNRAS 104, 273. Winds slower than the orbit are
    funnelled, and then it is a lower limit.
    """
    wind = np.asarray(wind_speed_km_s, dtype=float)
    a = kepler.separation_rsun(total_mass_msun, period_d) * kepler.R_SUN_KM
    orbital = 2.0 * np.pi * a / (np.asarray(period_d, dtype=float) * kepler.DAY_S)
    pull = (kepler.GM_SUN_KM3_S2 * np.asarray(companion_mass_msun, dtype=float) / a) ** 2
    return np.asarray(np.minimum(pull / (wind * (wind**2 + orbital**2) ** 1.5), 1.0))


def accretion_luminosity_erg_s(rate_msun_yr: ArrayLike, efficiency: ArrayLike = THIN_DISC_EFFICIENCY) -> FloatArray:
    """Return efficiency x rate x c^2 (erg/s)."""
    grams = np.asarray(rate_msun_yr, dtype=float) * _MSUN_G / _YEAR_S
    return np.asarray(np.asarray(efficiency, dtype=float) * grams * _C_CM_S**2)


def faint_efficiency(rate_msun_yr: ArrayLike, companion_mass_msun: ArrayLike) -> FloatArray:
    """Return the efficiency of a starved black hole: 0.1, falling in proportion below 0.01 of the Eddington rate.

    The proportion is that of advection-dominated flow (Narayan & Yi 1995, ApJ 452, 710); measured flows scatter about
    it by a factor of ten or more.
    """
    thin = accretion_luminosity_erg_s(rate_msun_yr, THIN_DISC_EFFICIENCY)
    share = thin / eddington_luminosity_erg_s(companion_mass_msun)
    return np.asarray(THIN_DISC_EFFICIENCY * np.minimum(share / THIN_DISC_ABOVE, 1.0))


def eddington_luminosity_erg_s(mass_msun: ArrayLike) -> FloatArray:
    """Return 1.26e38 M erg/s, for hydrogen."""
    return np.asarray(_EDDINGTON_ERG_S * np.asarray(mass_msun, dtype=float))


def coronal_luminosity_max_erg_s(luminosity_lsun: ArrayLike) -> FloatArray:
    """Return the most (erg/s) that the corona of a star cooler than ``CORONA_BELOW_K`` shines in X-rays."""
    return np.asarray(SATURATED_CORONA * _LSUN_ERG_S * np.asarray(luminosity_lsun, dtype=float))
