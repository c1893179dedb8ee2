"""Toy problems with known answers."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.special import log_ndtr

from vetter.inference.problem import Evaluation, open_ground


class GaussianProblem:
    """Independent Gaussian likelihoods of equal width about one centre; the evidence is elementary."""

    def __init__(self, dimension: int, width: float, centre: float, wall: float | None = None) -> None:
        self.dimension, self.width, self.centre, self.wall = dimension, width, centre, wall
        self.ln_norm = -dimension * np.log(width * np.sqrt(2.0 * np.pi))

    def evaluate(self, x: np.ndarray) -> Evaluation:
        free = open_ground((x - self.centre) / self.width)
        if self.wall is None:
            return free
        excess = x[:, 0] - self.wall
        return free._replace(ln_prior_ratio=np.where(excess > 0.0, -np.inf, 0.0), excess=excess)

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

    def evaluate(self, x: np.ndarray) -> Evaluation:
        first = -0.5 * np.sum(((x - self.centre) / self.width) ** 2, axis=1)
        second = -1.0 - 0.5 * np.sum(((x + self.centre) / self.width) ** 2, axis=1)
        below = np.logaddexp(first, second) - self.ln_norm
        return open_ground(np.sqrt(np.maximum(-2.0 * below, 0.0))[:, None])

    @property
    def truth(self) -> float:
        variance = 1.0 + self.width**2
        one = self.dimension * (np.log(self.width) - 0.5 * np.log(variance) - 0.5 * self.centre**2 / variance)
        return float(one + np.log1p(np.exp(-1.0)))


class Banana:
    """A curved valley: the second coordinate follows the square of the first."""

    dimension = 4
    ln_norm = 0.0

    def evaluate(self, x: np.ndarray) -> Evaluation:
        valley = (x[:, 1:] - x[:, :-1] ** 2 + 1.0) / 0.1
        return open_ground(np.concatenate([valley, (x[:, :1] - 0.5) / 0.5], axis=1))


@pytest.fixture
def gaussian() -> type[GaussianProblem]:
    return GaussianProblem


@pytest.fixture
def two_modes() -> type[TwoModes]:
    return TwoModes


@pytest.fixture
def banana() -> Banana:
    return Banana()
