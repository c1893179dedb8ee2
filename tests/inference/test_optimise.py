"""The batched least-squares fit against scipy's, one start at a time."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.optimize import least_squares

from vetter.inference.optimise import minimise
from vetter.inference.problem import LARGEST_COORDINATE, Evaluation


class _Curve:
    """A decaying wave through noisy points: four coordinates, twenty residuals."""

    dimension, ln_norm = 4, 0.0
    constrained = np.array([False, False, False, True])

    def __init__(self) -> None:
        self.t = np.linspace(0.0, 4.0, 20)
        noise = np.random.default_rng(0).normal(size=20) * 0.02
        self.y = 1.3 * np.exp(-0.4 * self.t) * np.cos(2.0 * self.t + 0.3) + 0.1 + noise

    def evaluate(self, x: np.ndarray) -> Evaluation:
        wave = x[:, :1] * np.exp(-0.4 * self.t) * np.cos(x[:, 1:2] * self.t + x[:, 2:3]) + x[:, 3:4]
        return Evaluation((wave - self.y) / 0.02, np.where(x[:, 0] > 0.0, 0.0, -np.inf))


def _scipy(problem: _Curve, start: np.ndarray, pull: np.ndarray, keep: np.ndarray) -> float:
    def residuals(x: np.ndarray) -> np.ndarray:
        return np.concatenate([problem.evaluate(x[None]).residuals[0] * keep, x * pull])

    return 2.0 * least_squares(residuals, start, xtol=1e-12, ftol=1e-12).cost


def test_every_start_ends_where_scipy_does():
    problem = _Curve()
    pull = problem.constrained.astype(float)
    starts = np.array([[1.0, 1.9, 0.2, 0.0], [1.5, 2.1, 0.5, 0.2], [0.8, 2.0, 0.0, -0.2]])
    keep = np.ones((3, 20))
    keep[1, 5:9] = 0.0
    found = minimise(problem, starts, keep, pull)
    for row, start in enumerate(starts):
        assert found.chi2[row] == pytest.approx(_scipy(problem, start, pull, keep[row]), rel=1e-5)


def test_a_start_behind_a_wall_stays_out():
    found = minimise(_Curve(), np.array([[-1.0, 2.0, 0.3, 0.0]]), np.ones((1, 20)), np.zeros(4))
    assert found.chi2[0] == np.inf


class _Runaway:
    """The best point lies far outside the box."""

    dimension, ln_norm = 2, 0.0
    constrained = np.zeros(2, dtype=bool)

    def evaluate(self, x: np.ndarray) -> Evaluation:
        return Evaluation(x - np.array([100.0, 1.0]), np.zeros(len(x)))


def test_the_box_holds_and_the_other_coordinate_still_converges():
    found = minimise(_Runaway(), np.zeros((1, 2)), np.ones((1, 2)), np.zeros(2))
    np.testing.assert_allclose(found.x[0], [LARGEST_COORDINATE, 1.0], atol=1e-3)
