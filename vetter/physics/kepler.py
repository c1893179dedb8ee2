"""Keplerian orbits: what velocities and sky positions say about masses, and the reverse.

Which function answers which question:

- how heavy must the unseen companion be? :func:`mass_function_msun`, :func:`companion_mass_msun`,
  :func:`companion_mass_min_msun`
- what would this pair of masses show? :func:`semi_amplitude_km_s`, :func:`separation_au`,
  :func:`photocentre_mas`, :func:`photocentre_mass_ratio_function`
- where is the star at this time? :func:`eccentric_anomaly`, :func:`true_anomaly`, :func:`radial_velocity_km_s`

Every function takes numbers or arrays that broadcast together, in float64. Star 1 is the one that is seen.
Nothing is checked in these hot paths: an unphysical value (a mass below zero, an eccentricity of 1 or more) gives nan.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

FloatArray = NDArray[np.float64]

GM_SUN_KM3_S2 = 1.3271244e11
"""Nominal solar mass parameter (IAU 2015 resolution B3)."""

AU_KM = 1.495978707e8
"""Astronomical unit (IAU 2012 resolution B2)."""

R_SUN_KM = 6.957e5
"""Nominal solar radius (IAU 2015 resolution B3)."""

DAY_S = 86400.0
YEAR_D = 365.25

_MASS_FUNCTION_UNIT = DAY_S / (2.0 * np.pi * GM_SUN_KM3_S2)
_SEPARATION_UNIT_KM = float(np.cbrt(GM_SUN_KM3_S2 * (DAY_S / (2.0 * np.pi)) ** 2))


def mass_function_msun(period_d: ArrayLike, k1_km_s: ArrayLike, eccentricity: ArrayLike = 0.0) -> FloatArray:
    """Return f = P K1^3 (1 - e^2)^(3/2) / (2 pi G) = M2^3 sin^3 i / (M1 + M2)^2 in solar masses.

    ``k1_km_s`` is the velocity semi-amplitude of the seen star. Kepler's third law; the factor is 1.036149e-7.
    """
    e, k1 = np.asarray(eccentricity, dtype=float), np.asarray(k1_km_s, dtype=float)
    return np.asarray(_MASS_FUNCTION_UNIT * np.asarray(period_d) * k1**3 * (1.0 - e * e) ** 1.5)


def semi_amplitude_km_s(
    mass_msun: ArrayLike,
    companion_mass_msun: ArrayLike,
    period_d: ArrayLike,
    sin_inclination: ArrayLike = 1.0,
    eccentricity: ArrayLike = 0.0,
) -> FloatArray:
    """Return K1, the velocity semi-amplitude (km/s) of the star of ``mass_msun`` (both masses >= 0, sum > 0).

    The inverse of :func:`mass_function_msun`.
    """
    m1, m2, e = (np.asarray(x, dtype=float) for x in (mass_msun, companion_mass_msun, eccentricity))
    speed = np.cbrt((m1 + m2) / (_MASS_FUNCTION_UNIT * np.asarray(period_d)))
    return np.asarray(speed * m2 / (m1 + m2) * np.asarray(sin_inclination) / np.sqrt(1.0 - e * e))


def companion_mass_msun(mass_function: ArrayLike, mass_msun: ArrayLike, sin_inclination: ArrayLike = 1.0) -> FloatArray:
    """Return the companion's mass (Msun) that solves f = M2^3 sin^3 i / (M1 + M2)^2.

    ``mass_function`` >= 0 and ``mass_msun`` >= 0 in solar masses, 0 < ``sin_inclination`` <= 1. The cubic has exactly
    one positive root. Cardano's formula is written so that every term is positive: nothing cancels, and the relative
    error stays below 1e-14 from planets to black holes. The third root of f / sin^3 i is taken first, so that no
    square or cube of a tiny mass function underflows.
    """
    m1 = np.asarray(mass_msun, dtype=float)
    u = np.asarray(mass_function, dtype=float) / (3.0 * np.asarray(sin_inclination, dtype=float) ** 3)
    # With r = cbrt(u) the root is u + r w + r^2 (u + 2 M1) / w, w as below.
    r = np.cbrt(u)
    w = np.cbrt(u * u + 3.0 * u * m1 + 1.5 * m1 * m1 + m1 * np.sqrt(u * m1 + 2.25 * m1 * m1))
    quotient = np.divide(r * r * (u + 2.0 * m1), w, out=np.zeros(np.broadcast(r, w).shape), where=w > 0.0)
    return np.asarray(u + r * w + quotient)


def companion_mass_min_msun(mass_function: ArrayLike, mass_msun: ArrayLike) -> FloatArray:
    """Return the least mass (Msun) of the companion, which is that of an orbit seen edge on."""
    return companion_mass_msun(mass_function, mass_msun, 1.0)


def sin_inclination(mass_function: ArrayLike, mass_msun: ArrayLike, companion_mass_msun: ArrayLike) -> FloatArray:
    """Return sin i from the mass function and both masses (Msun, companion > 0); above 1 where no orbit fits."""
    m1, m2 = np.asarray(mass_msun, dtype=float), np.asarray(companion_mass_msun, dtype=float)
    return np.asarray(np.cbrt(np.asarray(mass_function) * (m1 + m2) ** 2) / m2)


def separation_au(total_mass_msun: ArrayLike, period_d: ArrayLike) -> FloatArray:
    """Return the semi-major axis (au) of the relative orbit of two stars of this total mass (Kepler's third law)."""
    return np.asarray(_separation_km(total_mass_msun, period_d) / AU_KM)


def separation_rsun(total_mass_msun: ArrayLike, period_d: ArrayLike) -> FloatArray:
    """Return the semi-major axis in solar radii of the relative orbit of two stars of this total mass."""
    return np.asarray(_separation_km(total_mass_msun, period_d) / R_SUN_KM)


def _separation_km(total_mass_msun: ArrayLike, period_d: ArrayLike) -> FloatArray:
    mass, period = np.asarray(total_mass_msun, dtype=float), np.asarray(period_d, dtype=float)
    return np.asarray(_SEPARATION_UNIT_KM * np.cbrt(mass * period * period))


def orbital_period_d(total_mass_msun: ArrayLike, separation_rsun: ArrayLike) -> FloatArray:
    """Return the period (d) of an orbit of this semi-major axis (solar radii) and total mass (> 0)."""
    axis = np.asarray(separation_rsun, dtype=float) * (R_SUN_KM / _SEPARATION_UNIT_KM)
    return np.asarray(np.sqrt(axis**3 / np.asarray(total_mass_msun, dtype=float)))


def photocentre_mas(
    parallax_mas: ArrayLike,
    separation_au: ArrayLike,
    mass_msun: ArrayLike,
    companion_mass_msun: ArrayLike,
    flux_ratio: ArrayLike = 0.0,
) -> FloatArray:
    """Return the semi-major axis (mas) of the orbit of the centre of light about the centre of mass.

    ``flux_ratio`` is F2/F1 in the band of the astrometry, 0 for a dark companion. The size only: where the companion
    outweighs the light it gives, the centre of light moves with the seen star, else with the companion.
    """
    m1, m2, s = (np.asarray(x, dtype=float) for x in (mass_msun, companion_mass_msun, flux_ratio))
    lever = np.abs(m2 / (m1 + m2) - s / (1.0 + s))
    return np.asarray(np.asarray(parallax_mas) * np.asarray(separation_au) * lever)


def photocentre_mass_ratio_function(mass_ratio: ArrayLike, flux_ratio: ArrayLike = 0.0) -> FloatArray:
    """Return q (1 + q)^(-2/3) |1 - S (1 + q) / (q (1 + S))| for q = M2/M1 > 0 and S = F2/F1 >= 0.

    It says what a pair would show; :func:`measured_mass_ratio_function` says what was seen. Source: Shahaf et al.
    2019, MNRAS 487, 5610.
    """
    q, s = np.asarray(mass_ratio, dtype=float), np.asarray(flux_ratio, dtype=float)
    return np.asarray(np.abs(q - s * (1.0 + q) / (1.0 + s)) / np.cbrt((1.0 + q) ** 2))


def measured_mass_ratio_function(
    photocentre_mas: ArrayLike, parallax_mas: ArrayLike, mass_msun: ArrayLike, period_d: ArrayLike
) -> FloatArray:
    """Return (a0 / parallax) M1^(-1/3) (P / yr)^(-2/3), free of any assumption on the companion.

    Source: Shahaf et al. 2019, MNRAS 487, 5610. The nominal constants are used, so that it equals
    :func:`photocentre_mass_ratio_function` exactly.
    """
    unit = separation_au(mass_msun, period_d)
    return np.asarray(np.asarray(photocentre_mas) / (np.asarray(parallax_mas) * unit))


def eccentric_anomaly(mean_anomaly: ArrayLike, eccentricity: ArrayLike) -> FloatArray:
    """Return E (rad) with E - e sin E = M for any M (rad) and 0 <= e < 1, in the same turn as M.

    Markley 1995, Celest. Mech. Dyn. Astron. 63, 101: a cubic starter and one step of fifth order; then one Newton step
    to polish. No loop, so the cost is the same for every sample. The residual is below 1e-14 and E is right to 1e-12
    for e <= 0.99.
    """
    mean, e = np.broadcast_arrays(np.asarray(mean_anomaly, dtype=float), np.asarray(eccentricity, dtype=float))
    turns = np.round(mean / (2.0 * np.pi))
    m = mean - 2.0 * np.pi * turns
    sign, m = np.sign(m), np.abs(m)
    guess = _markley_step(_markley_start(m, e), m, e)
    guess = guess - (guess - e * np.sin(guess) - m) / (1.0 - e * np.cos(guess))
    return np.asarray(sign * guess + 2.0 * np.pi * turns)


def _markley_start(m: FloatArray, e: FloatArray) -> FloatArray:
    """Solve the cubic that replaces Kepler's equation, for 0 <= m <= pi (Markley 1995, eqs. 5, 14-21)."""
    alpha = (3.0 * np.pi**2 + 1.6 * np.pi * (np.pi - m) / (1.0 + e)) / (np.pi**2 - 6.0)
    d = 3.0 * (1.0 - e) + alpha * e
    r = 3.0 * alpha * d * (d - 1.0 + e) * m + m**3
    q = 2.0 * alpha * d * (1.0 - e) - m * m
    w = np.cbrt(r + np.sqrt(q**3 + r * r)) ** 2
    return np.asarray((2.0 * r * w / (w * w + w * q + q * q) + m) / d)


def _markley_step(guess: FloatArray, m: FloatArray, e: FloatArray) -> FloatArray:
    """Improve ``guess`` by the fifth-order step of Markley 1995, eqs. 22-26."""
    f2, f3 = e * np.sin(guess), e * np.cos(guess)
    f0, f1 = guess - f2 - m, 1.0 - f3
    d3 = -f0 / (f1 - 0.5 * f0 * f2 / f1)
    d4 = -f0 / (f1 + 0.5 * d3 * f2 + d3**2 * f3 / 6.0)
    d5 = -f0 / (f1 + 0.5 * d4 * f2 + d4**2 * f3 / 6.0 - d4**3 * f2 / 24.0)
    return np.asarray(guess + d5)


def true_anomaly(eccentric_anomaly: ArrayLike, eccentricity: ArrayLike) -> FloatArray:
    """Return the true anomaly (rad, in the same turn) from the eccentric anomaly (rad), 0 <= e < 1.

    The half-angle form of Broucke & Cefola 1973 (Celest. Mech. 7, 388) has no branch to choose.
    """
    anomaly, e = np.asarray(eccentric_anomaly, dtype=float), np.asarray(eccentricity, dtype=float)
    beta = e / (1.0 + np.sqrt(1.0 - e * e))
    return np.asarray(anomaly + 2.0 * np.arctan2(beta * np.sin(anomaly), 1.0 - beta * np.cos(anomaly)))


def radial_velocity_km_s(
    time_d: ArrayLike,
    period_d: ArrayLike,
    periastron_time_d: ArrayLike,
    eccentricity: ArrayLike,
    periastron_argument_rad: ArrayLike,
    k1_km_s: ArrayLike,
) -> FloatArray:
    """Return K1 [cos(nu + omega) + e cos omega] (km/s) of the seen star, without the velocity of the pair.

    Times are in days on one scale; omega is the argument of periastron of the seen star's own orbit.
    """
    phase = (np.asarray(time_d, dtype=float) - np.asarray(periastron_time_d)) / np.asarray(period_d)
    e, omega = np.asarray(eccentricity, dtype=float), np.asarray(periastron_argument_rad, dtype=float)
    nu = true_anomaly(eccentric_anomaly(2.0 * np.pi * (phase - np.round(phase)), e), e)
    return np.asarray(np.asarray(k1_km_s) * (np.cos(nu + omega) + e * np.cos(omega)))
