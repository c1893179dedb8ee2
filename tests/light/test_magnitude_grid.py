"""The fast kernel against a loop that reads like the definition."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from vetter.light.magnitude_grid import CHUNK, MagnitudeGrid

LN_TEFF = np.log([3000.0, 4000.0, 7000.0, 20000.0])
LOGG = np.array([0.0, 2.0, 3.0, 5.0])
GRID = MagnitudeGrid(LN_TEFF, LOGG, np.random.default_rng(3).normal(size=(4, 4, 3, 2)))


def one_by_one(grid: MagnitudeGrid, teff_k: float, logg: float, a_v_mag: float) -> list[float]:
    """Interpolate every column and power on its own, then sum the powers."""
    result = []
    for column in range(grid.coefficients.shape[3]):
        total = 0.0
        for power in range(grid.coefficients.shape[2]):
            plane = grid.coefficients[:, :, power, column]
            along = [np.interp(logg, grid.logg, plane[i]) for i in range(len(grid.ln_teff))]
            total += float(np.interp(np.log(teff_k), grid.ln_teff, along)) * a_v_mag**power
        result.append(total)
    return result


@given(st.floats(1000.0, 60000.0), st.floats(-1.0, 7.0), st.floats(0.0, 5.0))
def test_agrees_with_the_loop_inside_and_beyond(teff_k: float, logg: float, a_v_mag: float) -> None:
    fast = GRID.evaluate(np.array([teff_k]), np.array([logg]), np.array([a_v_mag]))[0]
    assert fast == pytest.approx(one_by_one(GRID, teff_k, logg, a_v_mag), abs=1e-10)


def test_at_the_nodes_the_nodes_own_values() -> None:
    teff, logg = np.meshgrid(np.exp(LN_TEFF), LOGG, indexing="ij")
    values = GRID.evaluate(teff.ravel(), logg.ravel(), np.zeros(16))
    assert values.reshape(4, 4, 2) == pytest.approx(GRID.coefficients[:, :, 0], abs=1e-10)


def test_many_samples_are_the_same_as_few() -> None:
    """More than one chunk, and a remainder."""
    generator = np.random.default_rng(0)
    n = 2 * CHUNK + 7
    teff, logg, a_v = generator.uniform(2500, 25000, n), generator.uniform(-1, 6, n), generator.uniform(0, 3, n)
    whole = GRID.evaluate(teff, logg, a_v)
    for i in (0, CHUNK - 1, CHUNK, 2 * CHUNK, n - 1):
        assert whole[i] == pytest.approx(one_by_one(GRID, teff[i], logg[i], a_v[i]), abs=1e-10)


def test_no_samples_no_magnitudes() -> None:
    assert GRID.evaluate(np.empty(0), np.empty(0), np.empty(0)).shape == (0, 2)


def test_nan_stays_nan_and_alone() -> None:
    nan = float("nan")
    values = GRID.evaluate(
        np.array([nan, 5000.0, 5000.0, 5000.0]), np.array([4.0, nan, 4.0, 4.0]), np.array([0.0, 0.0, nan, 0.0])
    )
    assert np.isnan(values[:3]).all()
    assert np.isfinite(values[3]).all()


def test_inputs_are_left_alone() -> None:
    teff, logg, a_v = np.array([5000.0]), np.array([4.0]), np.array([1.0])
    before = GRID.coefficients.copy()
    GRID.evaluate(teff, logg, a_v)
    assert (teff, logg, a_v) == (5000.0, 4.0, 1.0)
    assert (GRID.coefficients == before).all()
