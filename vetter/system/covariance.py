"""Whether a small matrix can be a covariance, in plain Python so that reading a file needs no numerical library."""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import Final

_ROUNDING: Final = 1e-6
"""Asymmetry allowed, relative to the geometric mean of the two variances: tables are printed with few digits."""

_LEAST_PIVOT: Final = 1e-12
"""Smallest conditional variance, relative to the full one, that double precision still tells from zero."""

Matrix = Sequence[Sequence[float]]


def is_symmetric(matrix: Matrix) -> bool:
    """Return whether a square matrix (n, n) equals its transpose but for rounding in print."""
    for i, row in enumerate(matrix):
        for j in range(i):
            scale = math.sqrt(abs(matrix[i][i])) * math.sqrt(abs(matrix[j][j]))
            if abs(row[j] - matrix[j][i]) > _ROUNDING * scale:
                return False
    return True


def is_covariance(matrix: Matrix) -> bool:
    """Return whether a square matrix (n, n) is symmetric and positive definite.

    Cholesky factorisation of the matrix scaled to unit diagonal: it exists just when the matrix is positive
    definite (Golub & Van Loan 2013, Matrix Computations, section 4.2).
    """
    if any(matrix[i][i] <= 0.0 for i in range(len(matrix))) or not is_symmetric(matrix):
        return False
    sigma = [math.sqrt(matrix[i][i]) for i in range(len(matrix))]
    factor: list[list[float]] = []
    for i, row in enumerate(matrix):
        new: list[float] = []
        for j in range(i):
            explained = sum(a * b for a, b in zip(new, factor[j], strict=False))
            new.append((row[j] / sigma[i] / sigma[j] - explained) / factor[j][j])
        pivot = 1.0 - sum(a * a for a in new)
        if pivot < _LEAST_PIVOT:
            return False
        factor.append([*new, math.sqrt(pivot)])
    return True
