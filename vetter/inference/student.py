"""Mixtures of multivariate Student t densities: draw, evaluate, refit to weighted points."""

from __future__ import annotations

from dataclasses import dataclass
from math import lgamma

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]

DEGREES_OF_FREEDOM = 5.0
WIDE_SHARE = 0.15
"""Share of draws from one component twice as wide as everything found so far: insurance against a missed tail."""


MOST_POINTS = 2048
"""Points that shape a mixture; more are thinned by systematic resampling, which is what makes a fit quick."""

EM_STEPS = 12
"""Enough for a proposal; the next rung refits anyway."""


@dataclass(frozen=True)
class StudentMixture:
    """A mixture of t densities with five degrees of freedom.

    Attributes
    ----------
    share : (k,) positive, sum 1
    mean : (k, d)
    factor : (k, d, d) lower Cholesky factors of the scale matrices
    """

    share: FloatArray
    mean: FloatArray
    factor: FloatArray

    @property
    def dimension(self) -> int:
        """Number of coordinates."""
        return int(self.mean.shape[1])

    def draw(self, count: int, rng: np.random.Generator) -> FloatArray:
        """Return ``count`` independent points (count, d).

        Components are drawn at random, not in exact shares: the error of a mean is then the plain standard error.
        """
        edges = np.searchsorted(np.cumsum(self.share), rng.random(count))
        component = np.minimum(edges, self.share.size - 1)
        normal = rng.standard_normal((count, self.dimension))
        stretch = np.sqrt(DEGREES_OF_FREEDOM / rng.chisquare(DEGREES_OF_FREEDOM, count))
        points = np.empty_like(normal)
        for k in range(self.share.size):
            rows = component == k
            points[rows] = self.mean[k] + stretch[rows, None] * (normal[rows] @ self.factor[k].T)
        return points

    def ln_components(self, distance2: FloatArray) -> FloatArray:
        """Return ln(share_k * density_k) (n, k) at points of these squared distances (n, k) from each component."""
        d, nu = self.dimension, DEGREES_OF_FREEDOM
        constant = lgamma((nu + d) / 2) - lgamma(nu / 2) - 0.5 * d * np.log(nu * np.pi)
        ln_scale = np.log(np.einsum("kdd->kd", self.factor)).sum(axis=1)
        return np.asarray(np.log(self.share) + constant - ln_scale - 0.5 * (nu + d) * np.log1p(distance2 / nu))

    def distance2(self, x: FloatArray) -> FloatArray:
        """Return squared Mahalanobis distances (n, k) of points ``x`` (n, d) from each component."""
        unfactor = np.linalg.inv(self.factor)
        distance2 = np.empty((x.shape[0], self.share.size))
        for k, (mean, matrix) in enumerate(zip(self.mean, unfactor, strict=True)):
            white = (x - mean) @ matrix.T
            np.einsum("ij,ij->i", white, white, out=distance2[:, k])
        return distance2

    def ln_density(self, x: FloatArray) -> FloatArray:
        """Return ln density (n,) at points ``x`` (n, d)."""
        parts = self.ln_components(self.distance2(x))
        top = parts.max(axis=1)
        return np.asarray(top + np.log(np.exp(parts - top[:, None]).sum(axis=1)))


def from_moments(share: FloatArray, mean: FloatArray, covariance: FloatArray) -> StudentMixture:
    """Return a mixture from shares (k,), means (k, d) and positive-definite scale matrices (k, d, d)."""
    return StudentMixture(share / share.sum(), mean, np.asarray(np.linalg.cholesky(covariance), dtype=np.float64))


def joined(first: StudentMixture, second: StudentMixture, share: float) -> StudentMixture:
    """Return both mixtures together, the second with this share of the whole."""
    return StudentMixture(
        np.concatenate([first.share * (1.0 - share), second.share * share]),
        np.vstack([first.mean, second.mean]),
        np.concatenate([first.factor, second.factor]),
    )


def with_wide_component(mixture: StudentMixture, x: FloatArray, weights: FloatArray) -> StudentMixture:
    """Return the mixture with one component added that covers all weighted points twice as wide."""
    mean, covariance = _weighted_moments(x, weights)
    return joined(mixture, from_moments(np.ones(1), mean[None], 4.0 * covariance[None]), WIDE_SHARE)


def fit(x: FloatArray, weights: FloatArray, components: int, rng: np.random.Generator) -> StudentMixture:
    """Fit a mixture to points ``x`` (n, d) with weights (n,) that sum to one.

    Starts from the points that are farthest apart among the weighty ones and runs expectation-maximisation for
    the t mixture with fixed degrees of freedom (Peel & McLachlan 2000, Statistics and Computing 10, 339, eqs. 16-20),
    in coordinates in which the points as a whole have unit covariance.
    """
    if np.count_nonzero(weights) > MOST_POINTS:
        x, weights = _thinned(x, weights, rng)
    keep = weights > 0.0
    x, weights = x[keep], weights[keep] / weights[keep].sum()
    middle, covariance = _weighted_moments(x, weights)
    factor = np.linalg.cholesky(covariance)
    white = np.linalg.solve(factor, (x - middle).T).T
    effective = 1.0 / np.sum(weights**2)
    components = max(1, min(components, int(effective / (3 * x.shape[1]))))
    centres = _spread_out_points(white, weights, components, rng)
    unit = np.eye(x.shape[1])
    mixture = from_moments(np.full(components, 1.0 / components), centres, np.stack([0.3 * unit] * components))
    products = _products(white)
    for _ in range(EM_STEPS if components > 1 else 2):
        mixture = _em_step(mixture, products, weights)
    return StudentMixture(mixture.share, middle + mixture.mean @ factor.T, factor @ mixture.factor)


def _thinned(x: FloatArray, weights: FloatArray, rng: np.random.Generator) -> tuple[FloatArray, FloatArray]:
    """Return ``MOST_POINTS`` systematic draws by weight (Kitagawa 1996, J. Comp. Graph. Stat. 5, 1), repeats merged."""
    places = (np.arange(MOST_POINTS) + rng.random()) / MOST_POINTS
    chosen = np.minimum(np.searchsorted(np.cumsum(weights) / weights.sum(), places), weights.size - 1)
    rows, counts = np.unique(chosen, return_counts=True)
    return x[rows], counts / MOST_POINTS


def _products(white: FloatArray) -> FloatArray:
    """Return 1, the coordinates and their products (n, 1 + d + d(d+1)/2) of points (n, d).

    Squared distances from any ellipsoid are linear in them, and so are second moments: each is one matrix product.
    """
    first, second = np.triu_indices(white.shape[1])
    return np.concatenate([np.ones((white.shape[0], 1)), white, white[:, first] * white[:, second]], axis=1)


def _em_step(mixture: StudentMixture, products: FloatArray, weights: FloatArray) -> StudentMixture:
    """One expectation-maximisation step; a component that starves is dropped."""
    d = mixture.dimension
    distance2 = np.maximum(products @ _quadratic_forms(mixture), 0.0)
    parts = mixture.ln_components(distance2)
    responsibility = np.exp(parts - parts.max(axis=1, keepdims=True))
    responsibility *= (weights / responsibility.sum(axis=1))[:, None]
    share = responsibility.sum(axis=0)
    effective = share**2 / np.maximum((responsibility**2).sum(axis=0), 1e-300)
    alive = (share > 1e-3) & (effective > 1.5 * d)
    if not alive.any():
        return from_moments(np.ones(1), np.zeros((1, d)), np.eye(d)[None])
    pull = responsibility * (DEGREES_OF_FREEDOM + d) / (DEGREES_OF_FREEDOM + distance2)
    moments = (pull.T @ products)[alive]
    total = moments[:, :1]
    centre = moments[:, 1 : d + 1] / total
    scatter = _symmetric(moments[:, d + 1 :], d) - np.einsum("ki,kj->kij", total * centre, centre)
    scatter /= share[alive, None, None]
    scatter[:, np.arange(d), np.arange(d)] *= 1.0 + 1e-3
    return from_moments(share[alive], centre, scatter + 1e-8 * np.eye(d))


def _quadratic_forms(mixture: StudentMixture) -> FloatArray:
    """Return the coefficients (1 + d + d(d+1)/2, k) of each component's squared distance over :func:`_products`."""
    unfactor = np.linalg.inv(mixture.factor)
    precision = np.einsum("kij,kil->kjl", unfactor, unfactor)
    first, second = np.triu_indices(mixture.dimension)
    twice = np.where(first == second, 1.0, 2.0)
    towards = np.einsum("kij,kj->ki", precision, mixture.mean)
    constant = np.einsum("ki,ki->k", towards, mixture.mean)
    return np.concatenate([constant[:, None], -2.0 * towards, twice * precision[:, first, second]], axis=1).T


def _symmetric(upper: FloatArray, d: int) -> FloatArray:
    """Return symmetric matrices (k, d, d) from their upper triangles (k, d(d+1)/2)."""
    matrices = np.zeros((upper.shape[0], d, d))
    first, second = np.triu_indices(d)
    matrices[:, first, second] = upper
    matrices[:, second, first] = upper
    return matrices


def _weighted_moments(x: FloatArray, weights: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Mean (d,) and covariance (d, d) of weighted points, the latter made safely positive definite."""
    mean = weights @ x
    offset = x - mean
    covariance = (offset * weights[:, None]).T @ offset
    return mean, covariance + 1e-3 * np.diag(np.diagonal(covariance)) + 1e-12 * np.eye(x.shape[1])


def _spread_out_points(white: FloatArray, weights: FloatArray, count: int, rng: np.random.Generator) -> FloatArray:
    """Choose starting centres by weight times squared distance to the nearest one (Arthur & Vassilvitskii 2007)."""
    chosen = [int(np.argmax(weights))]
    nearest2 = np.full(white.shape[0], np.inf)
    while len(chosen) < count:
        nearest2 = np.minimum(nearest2, np.sum((white - white[chosen[-1]]) ** 2, axis=1))
        probability = weights * np.minimum(nearest2, 50.0)
        if probability.sum() <= 0.0:
            break
        chosen.append(int(rng.choice(white.shape[0], p=probability / probability.sum())))
    centres = white[chosen]
    missing = count - len(chosen)
    return np.vstack([centres, np.repeat(centres[:1], missing, axis=0)])
