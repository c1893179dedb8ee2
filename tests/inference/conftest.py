"""Toy problems with known answers."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.special import log_ndtr

from vetter.inference.problem import Evaluation


class GaussianProblem:
    """Independent Gaussian likelihoods of equal width about one centre; the evidence is elementary."""

    def __init__(self, dimension: int, width: float, centre: float, wall: float | None = None) -> None:
        self.dimension, self.width, self.centre, self.wall = dimension, width, centre, wall
        self.ln_norm = -dimension * np.log(width * np.sqrt(2.0 * np.pi))
        self.constrained = np.zeros(dimension, dtype=bool)

    def evaluate(self, x: np.ndarray) -> Evaluation:
        closed = np.zeros(len(x), dtype=bool) if self.wall is None else x[:, 0] > self.wall
        return Evaluation((x - self.centre) / self.width, np.where(closed, -np.inf, 0.0))

    @property
    def truth(self) -> float:
        variance = 1.0 + self.width**2
        value = self.dimension * (-0.5 * np.log(2.0 * np.pi * variance) - 0.5 * self.centre**2 / variance)
        if self.wall is not None:
            mean, sigma = self.centre / variance, self.width / np.sqrt(variance)
            value += log_ndtr((self.wall - mean) / sigma)
        return float(value)


class TwoModes:
    """Equal-width Gaussian modes far apart, the second e times lighter than the first."""

    def __init__(self, dimension: int, width: float = 0.1, centre: float = 1.5) -> None:
        self.dimension, self.width, self.centre = dimension, width, centre
        self.ln_norm = float(np.log1p(np.exp(-1.0)))
        self.constrained = np.zeros(dimension, dtype=bool)

    def evaluate(self, x: np.ndarray) -> Evaluation:
        first = -0.5 * np.sum(((x - self.centre) / self.width) ** 2, axis=1)
        second = -1.0 - 0.5 * np.sum(((x + self.centre) / self.width) ** 2, axis=1)
        below = np.logaddexp(first, second) - self.ln_norm
        return Evaluation(np.sqrt(np.maximum(-2.0 * below, 0.0))[:, None], np.zeros(len(x)))

    @property
    def truth(self) -> float:
        variance = 1.0 + self.width**2
        one = self.dimension * (np.log(self.width) - 0.5 * np.log(variance) - 0.5 * self.centre**2 / variance)
        return float(one + np.log1p(np.exp(-1.0)))


class Banana:
    """A curved valley: the second coordinate follows the square of the first."""

    dimension = 4
    ln_norm = 0.0

    def __init__(self) -> None:
        self.constrained = np.zeros(self.dimension, dtype=bool)

    def evaluate(self, x: np.ndarray) -> Evaluation:
        valley = (x[:, 1:] - x[:, :-1] ** 2 + 1.0) / 0.1
        return Evaluation(np.concatenate([valley, (x[:, :1] - 0.5) / 0.5], axis=1), np.zeros(len(x)))


@pytest.fixture
def gaussian() -> type[GaussianProblem]:
    return GaussianProblem


@pytest.fixture
def two_modes() -> type[TwoModes]:
    return TwoModes


@pytest.fixture
def banana() -> Banana:
    return Banana()
