"""Triples against N-body runs with the package rebound (integrator IAS15: Rein & Spiegel 2015, MNRAS 446, 1424)."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
import pytest

from vetter.physics import kepler, triples

pytestmark = pytest.mark.slow

OUTER_TURNS = 200
SYSTEMS = 120


class Triple(NamedTuple):
    """Masses (Msun) of the pair and of the seen star, periods (d), outer eccentricity, mean anomalies, tilt (rad)."""

    m_a: float
    m_b: float
    m: float
    p_in: float
    p_out: float
    e_out: float
    phase_in: float
    phase_out: float
    tilt: float = 0.0


def _simulation(triple: Triple):  # noqa: ANN202 - rebound need not be installed
    rebound = pytest.importorskip("rebound")
    sim = rebound.Simulation()
    # Solar masses, km and s.
    sim.G = kepler.GM_SUN_KM3_S2
    sim.integrator = "ias15"
    a_in = kepler.separation_rsun(triple.m_a + triple.m_b, triple.p_in) * kepler.R_SUN_KM
    a_out = kepler.separation_rsun(triple.m_a + triple.m_b + triple.m, triple.p_out) * kepler.R_SUN_KM
    sim.add(m=triple.m_a)
    sim.add(m=triple.m_b, a=float(a_in), M=triple.phase_in)
    pair = sim.com()
    sim.add(m=triple.m, a=float(a_out), e=triple.e_out, M=triple.phase_out, inc=triple.tilt, primary=pair)
    sim.move_to_com()
    return sim


def _lasts(triple: Triple) -> bool:
    """Whether both semi-major axes stay within a fifth of themselves for 200 turns of the outer orbit."""
    sim = _simulation(triple)
    first = _axes(sim)
    for turn in range(1, OUTER_TURNS + 1):
        sim.integrate(turn * triple.p_out * kepler.DAY_S)
        now = _axes(sim)
        if not np.all(np.abs(now / first - 1.0) < 0.2):
            return False
    return True


def _axes(sim) -> np.ndarray:
    """Semi-major axes of the inner pair and of the seen star about the pair's centre of mass."""
    inner = sim.particles[1].orbit(primary=sim.particles[0])
    outer = sim.particles[2].orbit(primary=sim.com(first=0, last=2))
    return np.array([inner.a, outer.a])


@pytest.mark.parametrize(("tilted", "least", "least_far"), [(False, 0.88, 0.97), (True, 0.88, 0.97)])
def test_stability_limit(tilted: bool, least: float, least_far: float) -> None:
    rng = np.random.default_rng(7)
    right, far_right, far = 0, 0, 0
    for _ in range(SYSTEMS):
        share, ratio = rng.uniform(0.2, 0.5), 10.0 ** rng.uniform(-0.7, 0.7)
        e_out, tilt = rng.uniform(0.0, 0.6), float(np.arccos(rng.uniform(-1.0, 1.0))) if tilted else 0.0
        # Separations from half to twice the limit.
        longest = float(triples.longest_inner_period_d(200.0, ratio, 1.0, e_out, tilt))
        p_in = longest * float(np.exp(1.5 * rng.uniform(-np.log(2.0), np.log(2.0))))
        phases = rng.uniform(0.0, 2.0 * np.pi, 2)
        triple = Triple(share, 1.0 - share, ratio, p_in, 200.0, e_out, *phases, tilt)
        margin = float(triples.ln_stability(p_in, 200.0, ratio, 1.0, e_out, tilt))
        agree = _lasts(triple) == (margin > 0.0)
        right += agree
        if abs(margin) > np.log(1.2):
            far += 1
            far_right += agree
    print(f"stability, tilted {tilted}: {right}/{SYSTEMS} right, {far_right}/{far} beyond 20 % of the limit")
    assert right >= least * SYSTEMS
    assert far_right >= least_far * far


CASES = [
    Triple(1.0, 1.0, 1.0, 10.0, 200.0, 0.0, 0.3, 0.0),
    Triple(1.0, 1.0, 1.0, 5.0, 200.0, 0.0, 1.0, 0.0),
    Triple(1.0, 1.0, 1.0, 6.0, 100.0, 0.0, 2.0, 0.0),
    Triple(2.0, 1.0, 1.0, 4.0, 100.0, 0.0, 0.7, 0.0),
    Triple(0.5, 0.5, 1.0, 8.0, 200.0, 0.0, 0.1, 0.0),
    Triple(5.0, 4.0, 1.0, 8.0, 300.0, 0.0, 0.5, 0.0),
    Triple(3.0, 1.0, 8.0, 3.0, 150.0, 0.0, 1.5, 0.0),
    Triple(1.4, 1.4, 0.8, 2.0, 60.0, 0.0, 0.9, 0.0),
    Triple(0.8, 0.4, 2.5, 5.0, 250.0, 0.0, 2.5, 0.0),
]


@pytest.mark.parametrize("triple", CASES)
def test_inner_pair_signal(triple: Triple) -> None:
    sim = _simulation(triple)
    turns = 12
    times = np.arange(0.0, turns * triple.p_out, triple.p_in / 24.0)
    velocity = np.empty(times.size)
    for place, time in enumerate(times):
        sim.integrate(time * kepler.DAY_S)
        velocity[place] = sim.particles[2].vx
    signal = triples.inner_pair_signal(triple.m_a, triple.m_b, triple.m, triple.p_in, triple.p_out)
    # The quadrupole shortens both periods a little, so the lines are looked for near where they are expected.
    first = _line(times, velocity, float(signal.first_per_d), triple.p_out)
    assert first == pytest.approx(float(signal.first_km_s), rel=0.03)


def _line(times: np.ndarray, velocity: np.ndarray, frequency: float, p_out: float) -> float:
    """Largest amplitude near a frequency (1/d), under a window that keeps the orbit itself out."""
    window = np.blackman(times.size)
    smooth = velocity * window
    grid = frequency + np.linspace(-0.35, 0.35, 1401) / p_out
    waves = np.exp(-2j * np.pi * grid[:, None] * times)
    return float(np.max(np.abs(waves @ smooth)) * 2.0 / window.sum())
