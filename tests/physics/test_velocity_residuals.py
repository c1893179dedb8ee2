"""Waves in velocity residuals: limits against brute-force integrals, and waves that were put in."""

from __future__ import annotations

import numpy as np
import pytest

from vetter.physics import kepler
from vetter.physics.keplerian_fit import fit_velocities
from vetter.physics.keplerian_search import find_modes, search_periods
from vetter.physics.velocity_model import EpochData, epoch_data
from vetter.physics.velocity_residuals import ResidualSearch, k1_at_fixed_shape, residual_search


def _data(wave_km_s: float, count: int = 40, seed: int = 1, e: float = 0.2) -> EpochData:
    rng = np.random.default_rng(seed)
    time = np.sort(rng.uniform(0.0, 900.0, count))
    velocity = kepler.radial_velocity_km_s(time, 200.0, 10.0, e, 1.0, 60.0)
    velocity = velocity + wave_km_s * np.cos(2.0 * np.pi * time / 9.7 + 1.0) + rng.normal(0.0, 0.1, count)
    return epoch_data(time, velocity, np.full(count, 0.1))


def _search(data: EpochData) -> ResidualSearch:
    return residual_search(data, find_modes(data, search_periods(data, 200.0, None))[0])


def test_a_wave_that_is_there_is_found_and_not_excluded() -> None:
    search = _search(_data(0.5))
    mean = search.wave(np.array([1.0 / 9.7])).mean[0]
    assert np.hypot(*mean) == pytest.approx(0.5, abs=0.15)
    assert search.amplitude_limit_km_s(1.0 / 9.7)[0] > 0.5
    assert search.ln_likelihood_ratio(np.array([0.5]), np.array([1.0 / 9.7]))[0] > 5.0


def test_a_wave_that_is_not_there_is_limited_to_the_noise() -> None:
    frequencies = np.linspace(0.05, 0.5, 200)
    limits = _search(_data(0.0)).amplitude_limit_km_s(frequencies)
    # The error of an amplitude is 0.1 sqrt(2/40) = 0.022 km/s; limits lie at two to four of these.
    assert 0.03 < np.median(limits) < 0.09
    assert np.all(np.isfinite(limits))


def test_limits_hold_for_nineteen_of_twenty_waves() -> None:
    amplitude, below = 0.06, 0
    for seed in range(12):
        below += _search(_data(amplitude, seed=seed)).amplitude_limit_km_s(1.0 / 9.7)[0] < amplitude
    # 12 x 5 % = 0.6 expected; 4 or more in 0.2 % of runs. The jitter of the best orbit makes limits a little tight.
    assert below < 4


def test_likelihood_and_limit_against_brute_force() -> None:
    search = _search(_data(0.1))
    frequency = np.array([0.123])
    turns = 2.0 * np.pi * frequency * search.time_d
    amplitudes = np.linspace(0.0, 0.6, 601)
    phases = np.linspace(0.0, 2.0 * np.pi, 181)[:-1]
    ln_values = np.empty((601, 180))
    for column, phase in enumerate(phases):
        wave = np.cos(turns + phase) * search.sqrt_weight
        wave = wave - search.orbit_basis @ (search.orbit_basis.T @ wave)
        left = search.residual - amplitudes[:, None] * wave
        ln_values[:, column] = -0.5 * (left**2).sum(axis=1)
    density = np.exp(ln_values + 0.5 * search.chi2).mean(axis=1)
    found = search.ln_likelihood_ratio(amplitudes, np.full(601, 0.123))
    # The sum over 36 phases is exact to rounding for waves within a few sigma.
    assert found[density > 1e-6] == pytest.approx(np.log(density[density > 1e-6]), abs=1e-4)
    cumulative = np.cumsum(density) / density.sum()
    limit = amplitudes[np.searchsorted(cumulative, 0.95)]
    assert search.amplitude_limit_km_s(frequency)[0] == pytest.approx(limit, abs=0.002)
    assert search.amplitude_limit_km_s(frequency, 0.99)[0] > limit


def test_few_epochs_limit_nothing() -> None:
    search = _search(_data(0.0, count=7))
    assert search.degrees_of_freedom < 2
    assert np.all(np.isinf(search.amplitude_limit_km_s([0.1, 0.2])))


def test_the_orbit_swallows_its_own_period() -> None:
    own, other = _search(_data(0.0, e=0.0)).amplitude_limit_km_s([1.0 / 200.0, 1.0 / 33.0])
    assert own > 10.0 * other


def test_chi_square_is_that_of_the_epochs() -> None:
    search = _search(_data(0.0))
    assert search.degrees_of_freedom == 40 - 6
    # Mean 34, standard deviation 8; jitter can only lower it.
    assert 5.0 < search.chi2 < 34.0 + 4.0 * 8.0


@pytest.mark.parametrize("e", [0.0, 0.6])
def test_quick_k1_agrees_with_the_sampled_one(e: float) -> None:
    data = _data(0.0, e=e)
    velocity = data.rv_km_s + data.mean_km_s[0]
    fit = fit_velocities(data.time_d, velocity, data.error_km_s, period=200.0)
    sampled, sampled_error = fit.k1_at_fixed_shape()
    quick, quick_error = k1_at_fixed_shape(data, find_modes(data, search_periods(data, 200.0, None))[0])
    # The sampled one also has the spread of the jitter: errors agree to a fifth.
    assert quick == pytest.approx(sampled, abs=sampled_error)
    assert quick_error == pytest.approx(sampled_error, rel=0.25)
