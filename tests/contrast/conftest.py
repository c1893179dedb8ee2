"""Triples integrated step by step under Newton's law, and synthetic systems made from them.

Nothing here uses the formulas under test but the signal-to-noise ratio of what was injected. The integrator is of
fourth order and symplectic (Yoshida 1990, Phys. Lett. A 150, 262), many triples at once, one step length per triple.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path
from typing import Any, NamedTuple

import numpy as np
import pytest

from vetter import read_system
from vetter.light.engine import Component, LightEngine
from vetter.pairs.contrast import contrast
from vetter.pairs.result import Contrast
from vetter.physics import inner_wave, kepler, triples
from vetter.stars.main_sequence import main_sequence
from vetter.system.model import Distance, Extinction, Magnitude, Measurement, Orbit, Primary, System, Velocities

EXAMPLE = Path(__file__).parent.parent.parent / "examples" / "hidden_pair.toml"

STEPS_PER_TURN = 64
_CUBE = 2.0 ** (1.0 / 3.0)
_A = 1.0 / (2.0 - _CUBE)
WEIGHTS = (_A, -_CUBE * _A, _A)
BANDS = (
    "Generic/Johnson.B",
    "Generic/Johnson.V",
    "GAIA/GAIA3.G",
    "GAIA/GAIA3.Gbp",
    "GAIA/GAIA3.Grp",
    "2MASS/2MASS.J",
    "2MASS/2MASS.H",
    "2MASS/2MASS.Ks",
    "WISE/WISE.W1",
    "WISE/WISE.W2",
)
EPOCHS, DISTANCE_PC, MAG_ERROR = 40, 200.0, 0.03
START_BJD = 2458000.0


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


def watched(bodies: Triples, time_d: np.ndarray, settled: bool = False) -> Watched:
    """Return the velocities of the seen stars at times (n, N) from 0 on.

    ``settled`` first lets a radial drag between the members, fading away over 15 outer turns, circularise the pair as
    tides would: started on a circle the inner orbit would keep the eccentricity that the seen star then stirs up.
    """
    step_d = bodies.p_in / STEPS_PER_TURN
    nearest = np.rint(time_d / step_d[:, None]).astype(int)
    place, speed = _start(bodies)
    masses = np.stack([bodies.m_a, bodies.m_b, bodies.m], axis=1)[..., None]
    step_s = (step_d * kepler.DAY_S)[:, None, None]
    out = np.empty(time_d.shape)
    if settled:
        place, speed = _settled(bodies, place, speed, masses, step_s)
    turned, angle = np.zeros(len(place)), _angle(place)
    last = int(nearest.max())
    for count in range(last + 1):
        for row, column in zip(*np.nonzero(nearest == count), strict=True):
            # The epoch lies within half a step: the acceleration carries the velocity there.
            gap = (time_d[row, column] - count * step_d[row]) * kepler.DAY_S
            one = slice(row, row + 1)
            half = _push(place[one] + 0.5 * gap * speed[one], masses[one])
            out[row, column] = speed[row, 2, 1] + gap * half[0, 2, 1]
        place, speed = _stepped(place, speed, masses, step_s)
        now = _angle(place)
        turned += (now - angle + np.pi) % (2.0 * np.pi) - np.pi
        angle = now
    return Watched(out, 2.0 * np.pi * (last + 1) * step_d / turned)


def _angle(place: np.ndarray) -> np.ndarray:
    """Direction (n,) of the second member as seen from the first."""
    apart = place[:, 1] - place[:, 0]
    return np.arctan2(apart[:, 1], apart[:, 0])


def _stepped(
    place: np.ndarray, speed: np.ndarray, masses: np.ndarray, step_s: np.ndarray
) -> tuple[np.ndarray, np.ndarray]:
    """One step of the integrator."""
    for weight in WEIGHTS:
        place = place + 0.5 * weight * step_s * speed
        speed = speed + weight * step_s * _push(place, masses)
        place = place + 0.5 * weight * step_s * speed
    return place, speed


def _settled(
    bodies: Triples, place: np.ndarray, speed: np.ndarray, masses: np.ndarray, step_s: np.ndarray
) -> tuple[np.ndarray, np.ndarray]:
    """The pairs after a radial drag that damps an eccentricity in three outer turns and fades away over fifteen."""
    steps = np.rint(15.0 * bodies.p_out / bodies.p_in * STEPS_PER_TURN)[:, None]
    # The radial velocity is damped at twice the rate of the eccentricity.
    rate = 2.0 * bodies.p_in[:, None] / (3.0 * bodies.p_out[:, None] * STEPS_PER_TURN)
    share = masses[:, :2] / masses[:, :2].sum(axis=1, keepdims=True)
    for count in range(int(steps.max())):
        running = (count < steps)[..., None]
        fading = np.maximum(1.0 - count / steps, 0.0)
        new_place, new_speed = _stepped(place, speed, masses, step_s)
        apart, drift = new_place[:, 1] - new_place[:, 0], new_speed[:, 1] - new_speed[:, 0]
        unit = apart / np.linalg.norm(apart, axis=1, keepdims=True)
        lost = rate * fading * (drift * unit).sum(axis=1, keepdims=True) * unit
        new_speed[:, 0] += lost * share[:, 1]
        new_speed[:, 1] -= lost * share[:, 0]
        place, speed = np.where(running, new_place, place), np.where(running, new_speed, speed)
    return place, speed


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


@dataclass(frozen=True)
class Injected:
    """A system, whether it holds a pair, its mean inner period, and the signal-to-noise ratio of the wave."""

    system: System
    pair: bool
    inner_period_d: float
    signal_to_noise: float


def injected(count: int, seed: int, turns: float = 5.0) -> list[Injected]:
    """Return ``count`` pairs and as many single companions of the same masses and orbits."""
    rng = np.random.default_rng(seed)
    bodies = _drawn(count, rng)
    days = np.sort(np.floor(rng.uniform(1.0, turns * bodies.p_out[:, None], (count, EPOCHS))), axis=1)
    days = days + rng.uniform(0.0, 0.3, days.shape)
    seen = watched(bodies, days, settled=True)
    error = 10.0 ** rng.uniform(np.log10(0.005), np.log10(0.5), count)
    sine = np.sin(np.arccos(rng.uniform(0.0, 0.7, count)))
    strength = inner_wave.wave_strength_km_s(bodies.m_a, bodies.m_b, bodies.m, bodies.p_in, bodies.p_out, sine)
    out = []
    for row in range(count):
        noise = rng.normal(0.0, error[row], EPOCHS)
        orbit = inner_wave.SeenOrbit(bodies.p_out[row], bodies.e_out[row], bodies.omega[row])
        wave = strength[row] * inner_wave.inner_wave(days[row], bodies.p_in[row : row + 1], orbit)[0]
        signal = float(np.sqrt(0.5 * np.sum(np.abs(wave) ** 2)) / error[row])
        velocity = sine[row] * seen.velocity[row] + noise
        system = _system(bodies, row, days[row], velocity, error[row], sine[row], True, rng)
        out.append(Injected(system, True, float(seen.mean_period_d[row]), signal))
        k1 = kepler.semi_amplitude_km_s(
            bodies.m[row], bodies.m_a[row] + bodies.m_b[row], bodies.p_out[row], sine[row], bodies.e_out[row]
        )
        alone = kepler.radial_velocity_km_s(
            days[row], bodies.p_out[row], 0.0, bodies.e_out[row], bodies.omega[row], float(k1)
        )
        system = _system(bodies, row, days[row], alone + noise, error[row], sine[row], False, rng)
        out.append(Injected(system, False, np.nan, 0.0))
    return out


def _drawn(count: int, rng: np.random.Generator) -> Triples:
    """Inner periods of 2-40 d, pairs that an F or G star outshines, 1.25-1.7 times the least separation that lasts."""
    m, pair = rng.uniform(1.05, 1.6, count), rng.uniform(0.6, 1.2, count)
    q, e = rng.uniform(0.4, 1.0, count), rng.uniform(0.0, 0.35, count)
    p_in = np.exp(rng.uniform(np.log(2.0), np.log(40.0), count))
    least = p_in / triples.longest_inner_period_d(1.0, m, pair, e)
    p_out = least * rng.uniform(1.25, 1.7, count) ** 1.5
    phases = rng.uniform(0.0, 2.0 * np.pi, (3, count))
    return Triples(pair / (1.0 + q), pair * q / (1.0 + q), m, p_in, p_out, e, *phases)


def _system(
    bodies: Triples,
    row: int,
    days: np.ndarray,
    velocity: np.ndarray,
    error: float,
    sine: float,
    pair: bool,
    rng: np.random.Generator,
) -> System:
    """The system file's content: ten magnitudes, parallax, spectrum, period, inclination, 40 epochs."""
    masses = [bodies.m[row], *([bodies.m_a[row], bodies.m_b[row]] if pair else [])]
    zero = np.zeros(1)
    stars = [main_sequence(np.array([mass]), np.array([0.4]), zero, zero, zero) for mass in masses]
    engine = LightEngine.build(BANDS)
    light = [
        engine.magnitudes(Component("star", s.teff_k, s.logg, zero, s.radius_rsun), DISTANCE_PC, 0.0) for s in stars
    ]
    mags = engine.total_magnitudes(light)[0] + rng.normal(0.0, MAG_ERROR, len(BANDS))
    measured: Any = [Magnitude(b, float(m), MAG_ERROR, s) for b, m, s in zip(BANDS, mags, engine.systems, strict=True)]
    seen = stars[0]
    return System(
        name="Injected",
        source="injected.toml",
        distance=Distance(parallax_mas=Measurement(1000.0 / DISTANCE_PC, 0.02)),
        orbit=Orbit(
            Measurement(float(bodies.p_out[row]), 0.0),
            Measurement(0.0, 0.0),
            eccentricity_given=False,
            inclination_deg=Measurement(float(np.degrees(np.arcsin(sine))), 2.0),
        ),
        magnitudes=tuple(measured),
        extinction=Extinction(ebv_mag=Measurement(0.005, 0.01)),
        primary=Primary(
            Measurement(float(seen.teff_k[0]), 80.0), Measurement(float(seen.logg[0]), 0.06), Measurement(0.0, 0.06)
        ),
        velocities=Velocities(
            "epochs", tuple(START_BJD + days), tuple(velocity), (float(error),) * EPOCHS, ("",) * EPOCHS
        ),
    )


@pytest.fixture(scope="session")
def three_bodies() -> Callable[..., Watched]:
    """Integrate triples and return the seen stars' velocities at given times."""
    return watched


@pytest.fixture(scope="session")
def triple_type() -> type[Triples]:
    return Triples


@pytest.fixture(scope="session")
def injection() -> Callable[..., list[Injected]]:
    """Make synthetic systems with and without a pair."""
    return injected


@pytest.fixture(scope="session")
def lindow() -> System:
    """The shipped example with a pair."""
    return read_system(EXAMPLE)


@pytest.fixture(scope="session")
def lindow_contrast(lindow: System) -> Contrast:
    """A white dwarf against a pair of stars in the shipped example."""
    return contrast(lindow, ("white_dwarf", "inner_pair"))
