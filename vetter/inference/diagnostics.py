"""How far importance weights can be trusted."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]


def normalised_weights(ln_weights: FloatArray) -> FloatArray:
    """Return weights (n,) that sum to one from ln weights (n,); all -inf gives all zero."""
    largest = np.max(ln_weights)
    if not np.isfinite(largest):
        return np.zeros_like(ln_weights)
    weights = np.exp(ln_weights - largest)
    return np.asarray(weights / weights.sum())


def effective_sample_size(ln_weights: FloatArray) -> float:
    """Return Kish's effective sample size of ln weights (n,), between 0 and n (Kish 1965, Survey Sampling)."""
    weights = normalised_weights(ln_weights)
    total = float(np.sum(weights**2))
    return 1.0 / total if total > 0.0 else 0.0


def ln_evidence_and_error(ln_weights: FloatArray) -> tuple[float, float]:
    """Return ln of the mean weight and its standard error from ln weights (n,) of independent draws.

    The error is the relative standard error of the mean weight, which is the error of its logarithm while small.
    """
    count = ln_weights.size
    largest = float(np.max(ln_weights))
    if not np.isfinite(largest):
        return -np.inf, np.inf
    weights = np.exp(ln_weights - largest)
    mean = float(weights.mean())
    return largest + float(np.log(mean)), float(weights.std(ddof=1) / mean / np.sqrt(count))


def pareto_shape(ln_weights: FloatArray) -> float:
    """Return the shape k of a generalised Pareto tail fitted to the largest weights.

    Below 0.7 the weighted mean converges at the usual rate; the tail holds min(n / 5, 3 sqrt(n)) weights
    (Vehtari et al. 2024, JMLR 25, 72, section 2 and appendix); the estimator is that of Zhang & Stephens 2009
    (Technometrics 51, 316) with the weak prior towards 0.5 of the first paper. Infinite when fewer than 25 weights
    are positive.
    """
    weights = np.sort(normalised_weights(ln_weights))
    tail = int(min(weights.size / 5, 3.0 * np.sqrt(weights.size)))
    if np.count_nonzero(weights) < 25 or tail < 5:
        return float("inf")
    excess = weights[-tail:] - weights[-tail - 1]
    excess = excess[excess > 0.0]
    if excess.size < 5:
        return -float("inf") if weights[-1] > 0.0 else float("inf")
    return _generalised_pareto_shape(excess)


def _generalised_pareto_shape(excess: FloatArray) -> float:
    """Zhang & Stephens 2009, eqs. 7-9, for ascending positive excesses; then shrunk as in Vehtari et al. 2024."""
    count = excess.size
    grid = 30 + int(np.sqrt(count))
    quartile = excess[int(count / 4 + 0.5) - 1]
    theta = 1.0 / excess[-1] + (1.0 - np.sqrt(grid / (np.arange(1, grid + 1) - 0.5))) / (3.0 * quartile)
    shape = np.log1p(-theta[:, None] * excess).mean(axis=1)
    profile = count * (np.log(-theta / shape) - shape - 1.0)
    weights = 1.0 / np.exp(np.minimum(profile - profile[:, None], 700.0)).sum(axis=1)
    best = float(np.sum(theta * weights) / np.sum(weights))
    k = float(np.log1p(-best * excess).mean())
    return (count * k + 10 * 0.5) / (count + 10)
