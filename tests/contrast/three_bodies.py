"""Many triples at once, integrated step by step under Newton's law: nothing here uses the formulas under test.

A fourth-order symplectic integrator (Yoshida 1990, Phys. Lett. A 150, 262), one step length per triple.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from vetter.physics import kepler

STEPS_PER_TURN = 64
_CUBE = 2.0 ** (1.0 / 3.0)
_A = 1.0 / (2.0 - _CUBE)
WEIGHTS = (_A, -_CUBE * _A, _A)


class Triples(NamedTuple):
    """Masses (Msun) of the pairs and the seen stars, periods (d), outer orbits and inner phases; all (n,)."""

    m_a: np.ndarray
    m_b: np.ndarray
    m: np.ndarray
    p_in: np.ndarray
    p_out: np.ndarray
    e_out: np.ndarray
    omega: np.ndarray
    anomaly: np.ndarray
    phase: np.ndarray


class Watched(NamedTuple):
    """Velocity (n, N) in km/s along the line of sight, edge on, and the mean inner period (n,) in days."""

    velocity: np.ndarray
    mean_period_d: np.ndarray


def watched(triples: Triples, time_d: np.ndarray) -> Watched:
    """Return the velocities of the seen stars at times (n, N) from 0 on."""
    step_d = triples.p_in / STEPS_PER_TURN
    nearest = np.rint(time_d / step_d[:, None]).astype(int)
    place, speed = _start(triples)
    masses = np.stack([triples.m_a, triples.m_b, triples.m], axis=1)[..., None]
    out = np.empty(time_d.shape)
    turned, angle = np.zeros(len(place)), _angle(place)
    step_s = (step_d * kepler.DAY_S)[:, None, None]
    last = int(nearest.max())
    for count in range(last + 1):
        for row, column in zip(*np.nonzero(nearest == count), strict=True):
            # The epoch lies within half a step: the acceleration carries the velocity there.
            gap = (time_d[row, column] - count * step_d[row]) * kepler.DAY_S
            one = slice(row, row + 1)
            half = _push(place[one] + 0.5 * gap * speed[one], masses[one])
            out[row, column] = speed[row, 2, 1] + gap * half[0, 2, 1]
        for weight in WEIGHTS:
            place = place + 0.5 * weight * step_s * speed
            speed = speed + weight * step_s * _push(place, masses)
            place = place + 0.5 * weight * step_s * speed
        now = _angle(place)
        turned += (now - angle + np.pi) % (2.0 * np.pi) - np.pi
        angle = now
    return Watched(out, 2.0 * np.pi * (last + 1) * step_d / turned)


def _angle(place: np.ndarray) -> np.ndarray:
    """Direction (n,) of the second member as seen from the first."""
    apart = place[:, 1] - place[:, 0]
    return np.arctan2(apart[:, 1], apart[:, 0])


def _push(place: np.ndarray, masses: np.ndarray) -> np.ndarray:
    """Accelerations (n, 3, 2), km/s2."""
    apart = place[:, None, :, :] - place[:, :, None, :]
    cubed = (apart**2).sum(axis=-1) ** 1.5 + np.eye(3)
    return kepler.GM_SUN_KM3_S2 * (apart / cubed[..., None] * masses[:, None]).sum(axis=2)


def _start(triples: Triples) -> tuple[np.ndarray, np.ndarray]:
    """Places and velocities (n, 3, 2) in km and km/s; the second axis of the plane points along the line of sight."""
    pair, total = triples.m_a + triples.m_b, triples.m_a + triples.m_b + triples.m
    zero = np.zeros(triples.m.shape)
    inner, inner_speed = _relative(pair, triples.p_in, zero, zero, triples.phase)
    outer, outer_speed = _relative(total, triples.p_out, triples.e_out, triples.omega, triples.anomaly)
    star, centre = (pair / total)[:, None], (-triples.m / total)[:, None]
    first, second = (-triples.m_b / pair)[:, None], (triples.m_a / pair)[:, None]
    place = np.stack([centre * outer + first * inner, centre * outer + second * inner, star * outer], axis=1)
    speed = [centre * outer_speed + first * inner_speed, centre * outer_speed + second * inner_speed]
    return place, np.stack([*speed, star * outer_speed], axis=1)


def _relative(
    mass: np.ndarray, period: np.ndarray, e: np.ndarray, omega: np.ndarray, mean: np.ndarray
) -> tuple[np.ndarray, np.ndarray]:
    """Relative place and velocity (n, 2) of a Kepler orbit of this total mass."""
    axis = kepler.separation_au(mass, period) * kepler.AU_KM
    anomaly = kepler.eccentric_anomaly(mean, e)
    rate = 2.0 * np.pi / (period * kepler.DAY_S) / (1.0 - e * np.cos(anomaly))
    b = np.sqrt(1.0 - e * e)
    x, y = axis * (np.cos(anomaly) - e), axis * b * np.sin(anomaly)
    u, v = -axis * np.sin(anomaly) * rate, axis * b * np.cos(anomaly) * rate
    c, s = np.cos(omega), np.sin(omega)
    return np.stack([c * x - s * y, s * x + c * y], axis=1), np.stack([c * u - s * v, s * u + c * v], axis=1)
