"""Synthetic systems with and without an inner pair: the velocities come from integrating three bodies."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Any

import numpy as np
from three_bodies import Triples, watched

from vetter.light.engine import Component, LightEngine
from vetter.physics import inner_wave, kepler, triples
from vetter.stars.main_sequence import main_sequence
from vetter.system.model import Distance, Extinction, Magnitude, Measurement, Orbit, Primary, System, Velocities

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
    seen = watched(bodies, days)
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


def with_shorter_light(system: System) -> System:
    """Return the system with three magnitudes only: quicker."""
    return replace(system, magnitudes=system.magnitudes[1:8:3])
