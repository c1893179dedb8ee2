"""The batched least-squares fit against scipy's, one start at a time."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.optimize import least_squares

from vetter.inference.optimise import minimise
from vetter.inference.problem import LARGEST_COORDINATE, Evaluation, open_ground


class _Curve:
    """A decaying wave through noisy points: four coordinates, twenty residuals."""

    dimension, ln_norm = 4, 0.0

    def __init__(self) -> None:
        self.t = np.linspace(0.0, 4.0, 20)
        noise = np.random.default_rng(0).normal(size=20) * 0.02
        self.y = 1.3 * np.exp(-0.4 * self.t) * np.cos(2.0 * self.t + 0.3) + 0.1 + noise

    def evaluate(self, x: np.ndarray) -> Evaluation:
        wave = x[:, :1] * np.exp(-0.4 * self.t) * np.cos(x[:, 1:2] * self.t + x[:, 2:3]) + x[:, 3:4]
        free = open_ground((wave - self.y) / 0.02)
        closed = x[:, 0] < 0.0
        return free._replace(
            nuisances=x[:, 3:4], ln_prior_ratio=np.where(closed, -np.inf, 0.0), excess=np.where(closed, 1.0, -1.0)
        )


def _scipy(problem: _Curve, start: np.ndarray, pull: np.ndarray, keep: np.ndarray) -> float:
    def residuals(x: np.ndarray) -> np.ndarray:
        return np.concatenate([problem.evaluate(x[None]).residuals[0] * keep, x * pull])

    return 2.0 * least_squares(residuals, start, xtol=1e-12, ftol=1e-12).cost


def test_every_start_ends_where_scipy_does() -> None:
    problem = _Curve()
    pull = np.array([0.0, 0.0, 0.0, 1.0])
    starts = np.array([[1.0, 1.9, 0.2, 0.0], [1.5, 2.1, 0.5, 0.2], [0.8, 2.0, 0.0, -0.2]])
    keep = np.ones((3, 20))
    keep[1, 5:9] = 0.0
    found = minimise(problem, starts, keep, prior=False)
    for row, start in enumerate(starts):
        assert found.chi2[row] == pytest.approx(_scipy(problem, start, pull, keep[row]), rel=1e-5)


def test_a_smooth_wall_is_leant_on(gaussian) -> None:
    """The best point beyond a wall is the point of the wall itself."""
    found = minimise(gaussian(3, 0.1, 1.0, wall=0.5), np.zeros((1, 3)), np.ones((1, 3)), prior=False)
    np.testing.assert_allclose(found.x[0], [0.5, 1.0, 1.0], atol=1e-4)
    assert found.chi2[0] == pytest.approx(25.0, rel=1e-4)
    assert found.gradient[0] == pytest.approx([-50.0, 0.0, 0.0], abs=1e-2)


class _Closed:
    """No open ground at all, and no hint where it might be."""

    dimension, ln_norm = 2, 0.0

    def evaluate(self, x: np.ndarray) -> Evaluation:
        n = len(x)
        return open_ground(x)._replace(ln_prior_ratio=np.full(n, -np.inf), excess=np.ones(n))


def test_closed_ground_has_no_best_fit() -> None:
    assert minimise(_Closed(), np.zeros((3, 2)), np.ones((3, 2)), prior=False).chi2.tolist() == [np.inf] * 3


class _Runaway:
    """The best point lies far outside the box."""

    dimension, ln_norm = 2, 0.0

    def evaluate(self, x: np.ndarray) -> Evaluation:
        return open_ground(x - np.array([100.0, 1.0]))


def test_the_box_holds_and_the_other_coordinate_still_converges() -> None:
    found = minimise(_Runaway(), np.zeros((1, 2)), np.ones((1, 2)), prior=False)
    np.testing.assert_allclose(found.x[0], [LARGEST_COORDINATE, 1.0], atol=1e-3)
