"""What the samplers ask of a model: points in, residuals and prior weights out."""

from __future__ import annotations

from typing import NamedTuple, Protocol

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]

LARGEST_COORDINATE = 7.5
"""Normal coordinates are kept within this bound; beyond it the unit-cube map has no digits left."""


class Evaluation(NamedTuple):
    """A model evaluated at n points.

    Attributes
    ----------
    residuals : (n, m) standardised residuals; ln likelihood = ln_norm - half their sum of squares
    ln_prior_ratio : (n,) ln(prior density / density implied by standard normal coordinates), -inf behind a wall
    """

    residuals: FloatArray
    ln_prior_ratio: FloatArray


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

    @property
    def constrained(self) -> NDArray[np.bool_]:
        """(dimension,) True for nuisances whose standard-normal prior counts as data in the best fit."""
        ...

    def evaluate(self, x: FloatArray) -> Evaluation:
        """Return the evaluation at points ``x`` (n, dimension)."""
        ...


def ln_likelihood(problem: Problem, residuals: FloatArray) -> FloatArray:
    """Return ln likelihood (n,) from standardised residuals (n, m); not-a-number counts as impossible."""
    value = problem.ln_norm - 0.5 * np.einsum("ij,ij->i", residuals, residuals)
    return np.where(np.isnan(value), -np.inf, value)
