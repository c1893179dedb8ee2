"""What the epochs say for or against a pair: against a slow twin, and on velocities of known content."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.integrate import trapezoid

from vetter.pairs.epochs import Epochs, epochs_about
from vetter.pairs.evidence import wave_evidence
from vetter.pairs.members import Members
from vetter.physics import inner_wave, kepler, triples
from vetter.physics.keplerian_search import find_modes, search_periods
from vetter.physics.velocity_model import epoch_data

P_OUT, E, OMEGA, P_IN = 250.0, 0.2, 0.7, 17.3
MASSES = (0.7, 0.6, 1.0)
APSIDAL_ERROR = 0.1


def epochs_of(error_km_s: float, wave: bool, seed: int = 3, count: int = 40) -> Epochs:
    """Epochs over 1500 d with the wave and apsidal motion of a pair, or without."""
    rng = np.random.default_rng(seed)
    time = np.sort(np.floor(rng.uniform(0.0, 1500.0, count)) + rng.uniform(-0.2, 0.2, count))
    turning = float(inner_wave.apsidal_rate_rad_d(*MASSES, P_IN, P_OUT, E)) if wave else 0.0
    velocity = kepler.radial_velocity_km_s(time, P_OUT, 30.0, E, OMEGA + turning * time, 25.0)
    if wave:
        strength = float(inner_wave.wave_strength_km_s(*MASSES, P_IN, P_OUT, 0.9))
        unit = inner_wave.inner_wave(time, np.array([P_IN]), inner_wave.SeenOrbit(P_OUT, E, OMEGA, 30.0))[0]
        velocity = velocity + strength * np.real(unit * np.exp(1j))
    data = epoch_data(time, velocity + rng.normal(0.0, error_km_s, count), np.full(count, error_km_s))
    return epochs_about(data, find_modes(data, search_periods(data, P_OUT, None))[0])


def drawn(count: int = 300) -> Members:
    rng = np.random.default_rng(8)
    total, ratio, mass = rng.normal(1.3, 0.05, count), rng.uniform(0.15, 1.0, count), rng.normal(1.0, 0.05, count)
    stable = triples.longest_inner_period_d(P_OUT, mass, total, E)
    first = total / (1.0 + ratio)
    return Members(first, total - first, mass, np.full(count, 0.9), np.full(count, 0.3), stable)


def slow_ln_ratio(epochs: Epochs, period: float, strength: float, apsidal: float) -> float:
    """The same by brute force: every phase, apsidal rate and jitter in turn, orbit's directions taken out each time."""
    phases = np.arange(120) * 2.0 * np.pi / 120
    width = APSIDAL_ERROR * apsidal
    rates = apsidal + width * np.linspace(-15.0, 15.0, 601)
    density = np.exp(-0.5 * ((rates - apsidal) / width) ** 2) / (width * np.sqrt(2.0 * np.pi))
    unit = inner_wave.inner_wave(epochs.data.time_d, np.array([period]), epochs.orbit)[0]
    parts = []
    for search, ln_weight in zip(epochs.searches, epochs.ln_weights, strict=True):
        model = strength * np.real(np.exp(1j * phases)[:, None, None] * unit) + rates[:, None] * epochs.apsidal_slope
        model = model * search.sqrt_weight
        model -= (model @ search.orbit_basis) @ search.orbit_basis.T
        misfit = ((search.residual - model) ** 2).sum(axis=2) - search.chi2
        low = misfit.min()
        average = trapezoid(np.exp(-0.5 * (misfit - low)).mean(axis=0) * density, rates)
        parts.append(ln_weight - 0.5 * low + np.log(average))
    return float(np.logaddexp.reduce(parts))


@pytest.mark.parametrize("wave", [False, True])
@pytest.mark.parametrize("period", [P_IN, 6.0])
def test_against_the_slow_twin(wave: bool, period: float) -> None:
    epochs = epochs_of(0.02, wave)
    strength = float(inner_wave.wave_strength_km_s(*MASSES, period, P_OUT, 0.9))
    apsidal = float(inner_wave.apsidal_rate_rad_d(*MASSES, period, P_OUT, E))
    error = APSIDAL_ERROR * apsidal
    fast = epochs.ln_ratio(np.array([period]), np.array([[strength]]), np.array([[apsidal]]), np.array([[error]]))[0, 0]
    assert fast == pytest.approx(slow_ln_ratio(epochs, period, strength, apsidal), abs=0.1)


def test_a_pair_is_found_with_its_period() -> None:
    pairs = drawn()
    found = wave_evidence(epochs_of(0.002, True), pairs, np.ones(pairs.mass_msun.size), np.random.default_rng(0))
    assert found is not None
    assert found.ln_ratio > 20.0
    measured = found.measured_period()
    assert measured is not None
    assert measured[0] == pytest.approx(P_IN, rel=0.002)
    assert found.share.sum() == pytest.approx(1.0)
    assert 0.0 < found.error < 0.5


@pytest.mark.parametrize("seed", range(4))
def test_nothing_is_found_where_nothing_is(seed: int) -> None:
    pairs = drawn()
    found = wave_evidence(epochs_of(0.004, False, seed), pairs, np.ones(300), np.random.default_rng(0))
    assert found is not None
    assert found.ln_ratio < 2.0
    assert found.measured_period() is None


def test_coarse_velocities_are_silent() -> None:
    pairs = drawn()
    found = wave_evidence(epochs_of(3.0, True), pairs, np.ones(300), np.random.default_rng(0))
    assert found is not None
    assert abs(found.ln_ratio) < 0.3


def test_no_room_between_the_walls() -> None:
    pairs = drawn()
    closed = Members(*(getattr(pairs, name) for name in ("first_msun", "second_msun", "mass_msun", "sin_inclination")),
                     np.full(300, 500.0), pairs.stable_d)  # fmt: skip
    assert wave_evidence(epochs_of(0.01, False), closed, np.ones(300), np.random.default_rng(0)) is None
