"""The linear velocity model against the plain velocity curve, and its integrals against brute force."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from vetter.physics import kepler
from vetter.physics.velocity_model import EpochData, basis, draw_linear, epoch_data, ln_marginal, solve


def _data(seed: int = 0, count: int = 15) -> EpochData:
    rng = np.random.default_rng(seed)
    time = np.sort(rng.uniform(0.0, 300.0, count)) + 2455000.0
    velocity = kepler.radial_velocity_km_s(time, 60.0, 2455010.0, 0.3, 1.0, 20.0) + rng.normal(0.0, 1.0, count)
    return epoch_data(time, velocity, rng.uniform(0.5, 1.5, count), ["a" if k % 2 else "b" for k in range(count)])


@settings(max_examples=40, deadline=None)
@given(e=st.floats(1e-6, 0.95), omega=st.floats(0.0, 6.28), phase=st.floats(-3.1, 3.1), period=st.floats(3.0, 1000.0))
def test_columns_make_the_velocity_curve(e: float, omega: float, phase: float, period: float) -> None:
    data = _data()
    point = np.array([[np.log(period), np.sqrt(e) * np.cos(phase), np.sqrt(e) * np.sin(phase), 0.0]])
    # The mean anomaly is ``phase`` at the reference time.
    periastron = -phase / (2.0 * np.pi) * period
    expected = kepler.radial_velocity_km_s(data.time_d, period, periastron, e, omega, 30.0)
    columns = basis(data, point)[0]
    found = columns[:, 0] * 30.0 * np.cos(omega) - columns[:, 1] * 30.0 * np.sin(omega)
    assert found == pytest.approx(expected, abs=1e-7)
    assert np.array_equal(columns[:, 2:], data.offsets)


def test_solution_is_that_of_plain_least_squares() -> None:
    data = _data()
    points = np.array([[np.log(60.0), 0.3, 0.4, 0.0], [np.log(57.0), 0.0, 0.0, 0.0]])
    columns = basis(data, points)
    solved = solve(data, columns, data.error_km_s**2)
    for place in range(2):
        # The wide prior of A and B as two more rows.
        rows = np.vstack([columns[place] / data.error_km_s[:, None], np.eye(2, 4) / (5.0 * data.half_range_km_s)])
        target = np.concatenate([data.rv_km_s / data.error_km_s, np.zeros(2)])
        expected, misfit, *_ = np.linalg.lstsq(rows, target)
        assert solved.mean[place] == pytest.approx(expected, rel=1e-8)
        assert solved.misfit[place] == pytest.approx(misfit[0], rel=1e-8)
        assert solved.precision[place] == pytest.approx(rows.T @ rows, rel=1e-10)


def test_integral_over_amplitude_and_offset() -> None:
    # One instrument, so three linear parameters: the same integral on a grid, uniform in K (1/K in A, B).
    rng = np.random.default_rng(4)
    time = np.linspace(0.0, 100.0, 12)
    velocity = kepler.radial_velocity_km_s(time, 40.0, 5.0, 0.2, 0.5, 10.0) + rng.normal(0.0, 1.0, 12)
    data = epoch_data(time, velocity, np.ones(12))
    points = np.array([[np.log(40.0), 0.2, 0.4, np.log(0.3)], [np.log(41.0), -0.1, 0.45, np.log(1.5)]])
    found = ln_marginal(data, points)
    axis, shifts = np.linspace(-16.0, 16.0, 129), np.linspace(-8.0, 8.0, 65)
    a, b, gamma = (grid.ravel() for grid in np.meshgrid(axis, axis, shifts, indexing="ij"))
    brute = []
    for point in points:
        variance = 1.0 + np.exp(2.0 * point[3])
        model = np.column_stack([a, b, gamma]) @ basis(data, point[None])[0].T
        misfit = ((data.rv_km_s - model) ** 2).sum(axis=1) / variance
        prior = (a * a + b * b) / (5.0 * data.half_range_km_s) ** 2
        ln_value = -0.5 * (misfit + prior) - 0.5 * 12 * np.log(variance) - np.log(np.hypot(a, b) + 1e-3)
        brute.append(ln_value.max() + np.log(np.exp(ln_value - ln_value.max()).sum()))
    # 1/K at the middle of the Gaussian stands for its mean: good to (error of K / K)^2, about 1 %.
    assert found[1] - found[0] == pytest.approx(brute[1] - brute[0], abs=0.03)


def test_points_outside_the_disc_have_no_likelihood() -> None:
    assert ln_marginal(_data(), np.array([[4.0, 0.9, 0.9, 0.0]]))[0] == -np.inf


@settings(deadline=None, max_examples=5)
@given(seed=st.integers(0, 100))
def test_draws_have_the_mean_and_covariance_of_the_solution(seed: int) -> None:
    data = _data()
    point = np.array([[np.log(60.0), 0.3, 0.4, np.log(0.5)]])
    solved = solve(data, basis(data, point), data.error_km_s**2 + 0.25)
    drawn = draw_linear(data, np.repeat(point, 4000, axis=0), np.random.default_rng(seed))
    expected = solved.mean[0] + np.concatenate([np.zeros(2), data.mean_km_s])
    covariance = np.linalg.inv(solved.precision[0])
    # Mean of 4000 draws to five of its standard errors, spread to five of its own (1/sqrt(2 n)).
    assert np.all(np.abs(drawn.mean(axis=0) - expected) < 5.0 * np.sqrt(np.diagonal(covariance) / 4000))
    assert drawn.std(axis=0) == pytest.approx(np.sqrt(np.diagonal(covariance)), rel=5.0 / np.sqrt(8000))


@pytest.mark.parametrize(
    ("time", "velocity", "error", "words"),
    [
        ([1.0, 2.0], [1.0], [1.0, 1.0], "one time, velocity"),
        ([1.0, np.nan], [1.0, 2.0], [1.0, 1.0], "finite"),
        ([1.0, 2.0], [1.0, 2.0], [1.0, 0.0], "above zero"),
        ([], [], [], "there must be epochs"),
    ],
)
def test_senseless_epochs(time: list[float], velocity: list[float], error: list[float], words: str) -> None:
    with pytest.raises(ValueError, match=words):
        epoch_data(time, velocity, error)
