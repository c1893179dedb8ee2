"""The periodogram against astropy's, and the search against known orbits."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from vetter.physics import kepler
from vetter.physics.period_search import candidate_periods, frequency_grid, periodogram
from vetter.physics.velocity_model import EpochData, epoch_data


def _data(seed: int, period_d: float, e: float, count: int = 30, instruments: int = 1) -> EpochData:
    rng = np.random.default_rng(seed)
    time = np.sort(rng.uniform(0.0, 8.0 * period_d, count))
    omega, start = rng.uniform(0.0, 2.0 * np.pi), rng.uniform(0.0, period_d)
    velocity = kepler.radial_velocity_km_s(time, period_d, start, e, omega, 30.0) + rng.normal(0.0, 1.0, count)
    names = [str(k % instruments) for k in range(count)]
    return epoch_data(time, velocity + 25.0 * (np.arange(count) % instruments), rng.uniform(0.7, 1.3, count), names)


@pytest.mark.parametrize("harmonics", [1, 2, 3])
def test_one_instrument_is_the_floating_mean_periodogram(harmonics: int) -> None:
    from astropy.timeseries import LombScargle

    data = _data(1, 50.0, 0.4)
    frequencies = np.linspace(0.003, 0.3, 200)
    # astropy's chi-square method with a floating mean is the same quantity by another route.
    reference = LombScargle(data.time_d, data.rv_km_s, data.error_km_s, nterms=harmonics)
    expected = reference.power(frequencies, method="chi2")
    assert periodogram(data, frequencies, harmonics) == pytest.approx(expected, abs=1e-6)


def test_offsets_between_instruments_do_not_hide_the_period() -> None:
    data = _data(2, 40.0, 0.1, instruments=3)
    frequencies = frequency_grid(data.baseline_d)
    best = frequencies[np.argmax(periodogram(data, frequencies))]
    assert best == pytest.approx(1.0 / 40.0, abs=0.3 / data.baseline_d)


@settings(max_examples=12, deadline=None)
@given(seed=st.integers(0, 10**6), e=st.floats(0.0, 0.8), period=st.floats(5.0, 500.0))
def test_the_period_is_among_the_candidates(seed: int, e: float, period: float) -> None:
    data = _data(seed, period, e, count=40)
    found = candidate_periods(data)
    assert np.min(np.abs(1.0 / found - 1.0 / period)) * data.baseline_d < 0.4
    frequencies = np.sort(1.0 / found)
    assert np.all(np.diff(frequencies) > 0.5 / data.baseline_d)


def test_grid_covers_its_range() -> None:
    grid = frequency_grid(100.0)
    assert grid[0] == pytest.approx(1.0 / 200.0)
    assert grid[-1] >= 2.0
    assert np.all(np.diff(grid) == pytest.approx(0.002))
    narrow = frequency_grid(100.0, (9.0, 11.0))
    assert 1.0 / narrow[0] == pytest.approx(11.0)
    assert narrow[-1] == pytest.approx(1.0 / 9.0, abs=0.0021)
    assert frequency_grid(1e6).size == 200_000


def test_share_taken_is_a_share() -> None:
    power = periodogram(_data(5, 30.0, 0.6), np.linspace(0.001, 1.0, 500), 2)
    assert np.all((power >= 0.0) & (power <= 1.0 + 1e-9))
