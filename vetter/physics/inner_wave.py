"""What a tight pair adds to the velocity of the star that orbits it, at any time, for outer orbits of any eccentricity.

:func:`vetter.physics.triples.inner_pair_signal` gives the two lines of a circular outer orbit. Here the same pull is
followed along the real orbit: it goes as the inverse fourth power of the distance, so near periastron it is stronger
and spreads over many lines. With one free phase, the pair's longitude, everything else is fixed by the orbit.

Inner orbit circular, both orbits in one plane and turning the same way.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

from vetter.physics import kepler, triples

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]

ANOMALIES = 512
"""Points around the outer orbit from which its Fourier series is made."""

LEAST_LINE = 1e-4
"""Lines weaker than this share of the strongest are left out."""

STRENGTH_EXPONENT = 7.0 / 3.0
"""The strength of the wave grows with this power of the inner period."""

APSIDAL_EXPONENT = 4.0 / 3.0
"""The apsidal motion grows with this power of the inner period."""


class SeenOrbit(NamedTuple):
    """The seen star's orbit: period (d), eccentricity, its own argument of periastron (rad), a time of periastron (d).

    Times count from the zero of the epochs' clock.
    """

    period_d: float
    eccentricity: float = 0.0
    periastron_argument_rad: float = 0.0
    periastron_time_d: float = 0.0


class OuterLines(NamedTuple):
    """Fourier series of the pair's pull along the outer orbit: harmonics (k,) and amplitudes (k,), complex."""

    harmonics: FloatArray
    amplitudes: ComplexArray


def outer_lines(orbit: SeenOrbit) -> OuterLines:
    """Return the lines of (a/r)^4 [3/16 exp(-i theta) - 15/16 exp(-3 i theta)], theta = nu + omega.

    The tangential and radial pull of the pair's quadrupole on the line of sight, derived from its potential
    -(3/4) G m mu a_in^2 / r^3 cos 2(lambda - theta) with mu = m_a m_b / m^2.
    """
    mean = 2.0 * np.pi * np.arange(ANOMALIES) / ANOMALIES
    anomaly = kepler.eccentric_anomaly(mean, orbit.eccentricity)
    distance = 1.0 - orbit.eccentricity * np.cos(anomaly)
    theta = kepler.true_anomaly(anomaly, orbit.eccentricity) + orbit.periastron_argument_rad
    pull = (3.0 * np.exp(-1j * theta) - 15.0 * np.exp(-3j * theta)) / (16.0 * distance**4)
    amplitudes = np.fft.fft(pull) / ANOMALIES
    kept = np.abs(amplitudes) > LEAST_LINE * np.abs(amplitudes).max()
    return OuterLines(np.fft.fftfreq(ANOMALIES, 1.0 / ANOMALIES)[kept], amplitudes[kept])


def strongest_line(orbit: SeenOrbit) -> float:
    """Return the semi-amplitude of the wave's strongest line over its strength; 15/16 for a circular orbit.

    To lowest order in the ratio of the periods.
    """
    return float(np.abs(outer_lines(orbit).amplitudes).max())


def inner_wave(time_d: ArrayLike, inner_period_d: ArrayLike, orbit: SeenOrbit) -> ComplexArray:
    """Return the unit wave (n, N): the velocity added is strength times the real part of exp(i phase) times this.

    ``time_d`` is (N,), ``inner_period_d`` (n,) well below the outer period; the phase is twice the pair's longitude
    at time zero. Strength from :func:`wave_strength_km_s`.
    """
    time, period = np.asarray(time_d, dtype=float), np.asarray(inner_period_d, dtype=float)
    lines = outer_lines(orbit)
    slow = 0.5 * period / orbit.period_d
    turns = (time - orbit.periastron_time_d) / orbit.period_d
    along = lines.amplitudes[:, None] * np.exp(2j * np.pi * lines.harmonics[:, None] * turns)
    # Each line is the integral of an acceleration: the slower it turns, the larger the velocity.
    response = 1.0 / (1.0 + slow[:, None] * lines.harmonics)
    fast = np.exp(4j * np.pi * (time / period[:, None] - np.round(time / period[:, None])))
    return np.asarray(fast * (response @ along))


def wave_strength_km_s(
    first_msun: ArrayLike,
    second_msun: ArrayLike,
    mass_msun: ArrayLike,
    inner_period_d: ArrayLike,
    outer_period_d: ArrayLike,
    sin_inclination: ArrayLike = 1.0,
) -> FloatArray:
    """Return mu n_in a_in (a_in/a_out)^4 sin i in km/s; it grows as the inner period to the power 7/3."""
    signal = triples.inner_pair_signal(
        first_msun, second_msun, mass_msun, inner_period_d, outer_period_d, sin_inclination
    )
    slow = np.asarray(inner_period_d, dtype=float) / np.asarray(outer_period_d, dtype=float)
    return np.asarray(16.0 / 15.0 * signal.first_km_s * np.abs(1.0 - 1.5 * slow))


def apsidal_rate_rad_d(
    first_msun: ArrayLike,
    second_msun: ArrayLike,
    mass_msun: ArrayLike,
    inner_period_d: ArrayLike,
    outer_period_d: ArrayLike,
    eccentricity: ArrayLike = 0.0,
) -> FloatArray:
    """Return the rate (rad/d) at which the pair turns the outer orbit's periastron forward.

    (3/4) n_out mu (a_in/a_out)^2 / (1 - e^2)^2, from the mean of the pair's quadrupole, the same as for an oblate
    body with J2 R^2 = mu a_in^2 / 2 (any textbook of celestial mechanics).
    """
    m_a, m_b, p_in, p_out = (
        np.asarray(x, dtype=float) for x in (first_msun, second_msun, inner_period_d, outer_period_d)
    )
    pair, e = m_a + m_b, np.asarray(eccentricity, dtype=float)
    ratio = kepler.separation_au(pair, p_in) / kepler.separation_au(pair + np.asarray(mass_msun, dtype=float), p_out)
    return np.asarray(1.5 * np.pi / p_out * m_a * m_b / pair**2 * ratio**2 / (1.0 - e * e) ** 2)
