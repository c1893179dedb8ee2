"""What the samplers ask of a model: points in, residuals and prior weights out."""

from __future__ import annotations

from typing import NamedTuple, Protocol

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]

LARGEST_COORDINATE = 35.0
"""Normal coordinates are kept within this bound, where the prior density still is a number above zero."""


class Evaluation(NamedTuple):
    """A model evaluated at n points.

    Attributes
    ----------
    residuals : (n, m) standardised residuals; ln likelihood = ln_norm - half their sum of squares
    nuisances : (n, k) standard-normal scores that are part of the prior but count as data in the best fit
    ln_prior_ratio : (n,) ln(prior density / density implied by standard normal coordinates), -inf behind a wall
    excess : (n,) how far behind the nearest wall a point lies, <= 0 on open ground; smooth where the wall is
    """

    residuals: FloatArray
    nuisances: FloatArray
    ln_prior_ratio: FloatArray
    excess: FloatArray


class Problem(Protocol):
    """A likelihood and prior over ``dimension`` coordinates, each standard normal before any data."""

    @property
    def dimension(self) -> int:
        """Number of coordinates."""
        ...

    @property
    def ln_norm(self) -> float:
        """Constant part of the ln likelihood."""
        ...

    def evaluate(self, x: FloatArray) -> Evaluation:
        """Return the evaluation at points ``x`` (n, dimension)."""
        ...


def open_ground(residuals: FloatArray) -> Evaluation:
    """Return an evaluation with these residuals (n, m), no walls, no nuisances, and the prior as it is drawn."""
    n = residuals.shape[0]
    return Evaluation(residuals, np.zeros((n, 0)), np.zeros(n), np.full(n, -1.0))


def ln_likelihood(problem: Problem, residuals: FloatArray) -> FloatArray:
    """Return ln likelihood (n,) from standardised residuals (n, m); not-a-number counts as impossible."""
    value = problem.ln_norm - 0.5 * np.einsum("ij,ij->i", residuals, residuals)
    return np.where(np.isnan(value), -np.inf, value)
