"""The search for good orbits and the sampling of what they leave open, each against brute force."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from vetter.physics import kepler
from vetter.physics.keplerian_sampler import cycle_window, sample_orbits
from vetter.physics.keplerian_search import Mode, Search, find_modes, search_periods
from vetter.physics.velocity_model import EpochData, basis, epoch_data, solve
from vetter.system.model import Measurement


def _data(seed: int, count: int, e: float, period_d: float = 80.0, error: float = 1.0) -> EpochData:
    rng = np.random.default_rng(seed)
    time = np.sort(rng.uniform(0.0, 6.0 * period_d, count))
    omega, start = rng.uniform(0.0, 2.0 * np.pi), rng.uniform(0.0, period_d)
    velocity = kepler.radial_velocity_km_s(time, period_d, start, e, omega, 25.0) + rng.normal(0.0, error, count)
    return epoch_data(time, velocity, np.full(count, error))


def _chi2(data: EpochData, point: np.ndarray) -> float:
    return float(solve(data, basis(data, point[None]), data.error_km_s**2).misfit[0])


@settings(max_examples=8, deadline=None)
@given(seed=st.integers(0, 10**6), count=st.integers(12, 40), e=st.floats(0.0, 0.9))
def test_the_climb_ends_no_worse_than_a_fine_scan(seed: int, count: int, e: float) -> None:
    data = _data(seed, count, e)
    modes = find_modes(data, search_periods(data, 80.0, None))
    best = min(_chi2(data, mode.point) for mode in modes)
    rng = np.random.default_rng(seed)
    radius, angle = np.sqrt(0.97 * rng.random(20_000)), rng.uniform(0.0, 2.0 * np.pi, 20_000)
    periods = np.log(80.0 + rng.uniform(-3.0, 3.0, 20_000))
    points = np.column_stack([periods, radius * np.cos(angle), radius * np.sin(angle), np.zeros(20_000)])
    scan = solve(data, basis(data, points), data.error_km_s**2).misfit.min()
    assert best <= scan + 1e-6


def test_modes_come_best_first_and_are_distinct() -> None:
    data = _data(3, 9, 0.5)
    modes = find_modes(data, search_periods(data, 80.0, None))
    values = [mode.ln_value for mode in modes]
    assert values == sorted(values, reverse=True)
    for place, mode in enumerate(modes):
        for other in modes[:place]:
            cycles = abs(np.exp(-mode.point[0]) - np.exp(-other.point[0])) * data.baseline_d
            assert cycles > 0.05 or np.abs(mode.point[1:3] - other.point[1:3]).max() > 0.03
        assert np.all(np.linalg.eigvalsh(mode.covariance) > 0.0)


def test_measurements_pull_the_best_orbit() -> None:
    data = _data(5, 10, 0.5, error=6.0)
    held = find_modes(data, search_periods(data, Measurement(81.0, 0.02), Measurement(0.2, 0.01)))[0]
    assert np.exp(held.point[0]) == pytest.approx(81.0, abs=0.2)
    assert held.point[1] ** 2 + held.point[2] ** 2 == pytest.approx(0.2, abs=0.06)


def test_penalties_are_standardised_misfits() -> None:
    data = _data(5, 10, 0.5)
    search = search_periods(data, Measurement(80.0, 2.0), Measurement(0.3, 0.1))
    point = np.array([[np.log(84.0), 0.5, 0.5, 0.0]])
    assert search.penalties(point)[0] == pytest.approx([2.0, 2.0])
    outside = np.array([[search.bounds[1] + 0.1, 0.5, 0.5, 0.0], [np.log(80.0), 0.5, 0.5, 99.0], [*point[0]]])
    assert np.isfinite(search.ln_posterior(data, outside)).tolist() == [False, False, True]


def test_bounds_of_the_three_ways_to_give_a_period() -> None:
    data = _data(1, 30, 0.2)
    measured, bare, free = (search_periods(data, period, None) for period in (Measurement(80.0, 0.1), 80.0, None))
    assert np.exp(measured.bounds) == pytest.approx([79.5, 80.5])
    assert np.exp(bare.bounds) == pytest.approx(80.0 * (1.0 + 40.0 / data.baseline_d * np.array([-1.0, 1.0])))
    assert np.exp(free.bounds) == pytest.approx([0.5, 4.0 * data.baseline_d])
    assert free.centres.size > measured.centres.size == bare.centres.size == 1


def _fixed_period_search(data: EpochData) -> Search:
    """A search in which only shape and jitter are open."""
    return Search(
        np.array([np.log(80.0)]), np.array([1e-6]), (np.log(80.0) - 1e-6, np.log(80.0) + 1e-6), (-3.0, 2.0), None, None
    )


@pytest.mark.parametrize(("seed", "count"), [(2, 7), (4, 12)])
def test_sampling_against_weighted_prior_draws(seed: int, count: int) -> None:
    # Few epochs, so that the posterior is wide and of odd shape; half a million draws of the prior are its twin.
    data = _data(seed, count, 0.4, error=5.0)
    search = _fixed_period_search(data)
    points = sample_orbits(data, search, find_modes(data, search), np.random.default_rng(0))
    rng = np.random.default_rng(1)
    e, angle = 0.98 * rng.random(200_000), rng.uniform(0.0, 2.0 * np.pi, 200_000)
    jitter = rng.uniform(-3.0, 2.0, 200_000)
    ln_period = np.full(200_000, np.log(80.0))
    prior = np.column_stack([ln_period, np.sqrt(e) * np.cos(angle), np.sqrt(e) * np.sin(angle), jitter])
    ln_value = search.ln_posterior(data, prior)
    weight = np.exp(ln_value - ln_value.max())
    effective = weight.sum() ** 2 / (weight**2).sum()
    assert effective > 300.0
    found = points[:, 1] ** 2 + points[:, 2] ** 2
    mean = np.average(e, weights=weight)
    spread = np.sqrt(np.average((e - mean) ** 2, weights=weight))
    # Four errors of the twin's mean; the ensemble's own is about spread / sqrt(300).
    tolerance = 4.0 * spread * np.sqrt(1.0 / effective + 1.0 / 300.0)
    assert found.mean() == pytest.approx(mean, abs=tolerance)
    assert found.std() == pytest.approx(spread, rel=0.25)
    assert points[:, 3].mean() == pytest.approx(np.average(jitter, weights=weight), abs=0.4)


def test_samples_stay_within_one_count_of_cycles() -> None:
    data = _data(6, 20, 0.3)
    search = search_periods(data, 80.0, None)
    best = find_modes(data, search)[0]
    low, high = cycle_window(data, search, best).bounds
    assert low <= best.point[0] <= high
    points = sample_orbits(data, search, [best], np.random.default_rng(2))
    assert np.all((points[:, 0] >= low) & (points[:, 0] <= high))
    assert np.all(points[:, 1] ** 2 + points[:, 2] ** 2 < 0.98)


def test_window_of_an_orbit_longer_than_the_epochs() -> None:
    data = _data(1, 30, 0.2)
    search = search_periods(data, None, None)
    long = Mode(np.array([np.log(2.0 * data.baseline_d), 0.1, 0.1, 0.0]), 0.0, np.eye(4))
    assert cycle_window(data, search, long).bounds[1] == search.bounds[1]
