"""Adaptive tempered importance sampling: ln evidence, posterior samples and the modes of a likelihood.

The order of work: scrambled Sobol points over the prior; the best of them are polished; a mixture of t densities
around the polished points proposes; where it fits badly the weights are flattened until a tenth of the points still
count, the mixture is refitted, and so step by step until it fits.
The numbers that are reported come from the last, fresh set of draws only, so that adapting cannot bias them.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from vetter.inference import diagnostics, optimise, student
from vetter.inference.problem import LARGEST_COORDINATE, Evaluation, Problem, ln_likelihood

FloatArray = NDArray[np.float64]


MODE_SHARE = 0.4
"""Share of the first draws around polished points; the rest follows the prior points."""

MODE_STRETCH = 4.0
"""Variance of the first draws around a polished point over its Gaussian variance: too wide is safer than too narrow."""

LIKELIEST = 12
"""Prior points kept as starts for the best fit."""

POOLED_RUNGS = 4
"""How many rungs shape the next proposal."""

ENOUGH_SHARE = 0.1
"""Share of the draws that must be effective for a refit to be safe."""


@dataclass(frozen=True)
class Settings:
    """How hard to try.

    Attributes
    ----------
    start_points : prior points, a power of two
    polish_starts : how many of them are polished into modes
    rung_points : draws per adaptation round
    rungs : most adaptation rounds
    patience : rounds without a better proposal before the best one is taken
    components : most t components of the proposal
    effective : effective sample size to aim at
    error : largest error of ln evidence to accept
    pareto_k : largest Pareto k to accept
    last_points : most draws in the last round
    second_effort : whether a run that misses the error or Pareto k, and matters, is repeated with harder settings
    """

    start_points: int = 8192
    polish_starts: int = 12
    rung_points: int = 3072
    rungs: int = 40
    patience: int = 15
    components: int = 8
    effective: float = 2000.0
    error: float = 0.05
    pareto_k: float = 0.7
    last_points: int = 32768
    second_effort: bool = True

    def harder(self) -> Settings:
        """Return the settings of a second effort: three times the components, and the draws to shape them."""
        return replace(
            self,
            start_points=2 * self.start_points,
            rung_points=8 * self.rung_points // 3,
            components=3 * self.components,
            last_points=4 * self.last_points,
        )


@dataclass(frozen=True)
class Posterior:
    """Weighted draws and what they say.

    Attributes
    ----------
    x : (n, d) draws in normal coordinates
    ln_weights : (n,) unnormalised ln posterior weights
    modes : (k, d) distinct polished points, most probable first
    likeliest : (m, d) prior points that fit best, whatever their prior: other modes of the likelihood may be near
    ln_evidence, ln_evidence_error : logarithm of the evidence and its standard error
    effective_sample_size, pareto_k : diagnostics of the weights
    evaluations : points at which the model was evaluated by the sampler (the polishing not counted)
    converged : whether the error and Pareto k are within the settings
    efforts : 2 where the first run was not good enough and a harder one was made
    """

    x: FloatArray
    ln_weights: FloatArray
    modes: FloatArray
    likeliest: FloatArray
    ln_evidence: float
    ln_evidence_error: float
    effective_sample_size: float
    pareto_k: float
    evaluations: int
    converged: bool
    efforts: int = 1

    @property
    def weights(self) -> FloatArray:
        """Weights (n,) that sum to one."""
        return diagnostics.normalised_weights(self.ln_weights)


def sample(problem: Problem, settings: Settings, seed: int, start: FloatArray | None = None) -> Posterior | None:
    """Return the posterior of ``problem``, or None when no starting point is on allowed ground.

    ``start`` (n, dimension) replaces the Sobol points over the prior that the search for modes begins with.
    Annealed path: Neal 2001 (Statistics and Computing 11, 125); truncated weights while adapting: Ionides 2008
    (J. Comp. Graph. Stat. 17, 295); the mixture proposal: Cappe et al. 2008 (Statistics and Computing 18, 447).
    """
    return _effort(problem, settings, np.random.default_rng(seed), start)


def try_harder(problem: Problem, first: Posterior, settings: Settings, seed: int) -> Posterior:
    """Return the better of a posterior that has not converged and that of a run with harder settings."""
    again = _effort(problem, settings.harder(), np.random.default_rng([seed, 2]), None)
    if again is None:
        return first
    better = max(first, again, key=lambda run: (run.converged, run.effective_sample_size))
    return replace(better, evaluations=first.evaluations + again.evaluations, efforts=2)


def _effort(
    problem: Problem, settings: Settings, rng: np.random.Generator, start: FloatArray | None
) -> Posterior | None:
    """One run from the prior to the last round; see :func:`sample`."""
    if start is None:
        start = prior_points(problem.dimension, settings.start_points, rng)
    found = problem.evaluate(np.clip(start, -LARGEST_COORDINATE, LARGEST_COORDINATE))
    first = _ln_target(problem, start, found)
    if not np.isfinite(first).any():
        return None
    likeliest = start[_likeliest(found, np.isfinite(first))]
    mixture, modes = _first_proposal(problem, start, first, settings, rng)
    mixture, evaluations = _adapt(problem, mixture, settings, rng)
    x, ln_weights, more = _last_round(problem, mixture, settings, rng)
    ln_evidence, error = diagnostics.ln_evidence_and_error(ln_weights)
    effective = diagnostics.effective_sample_size(ln_weights)
    shape = diagnostics.pareto_shape(ln_weights)
    return Posterior(
        x,
        ln_weights,
        modes,
        likeliest,
        ln_evidence,
        error,
        effective,
        shape,
        len(start) + evaluations + more,
        bool(error <= settings.error and shape < settings.pareto_k),
    )


def prior_points(dimension: int, count: int, rng: np.random.Generator) -> FloatArray:
    """Return ``count`` scrambled Sobol points (count, dimension) in normal coordinates (Owen 1998)."""
    from scipy.special import ndtri
    from scipy.stats import qmc

    engine = qmc.Sobol(dimension, scramble=True, rng=rng)
    unit = np.clip(engine.random(count), 1e-9, 1.0 - 1e-9)
    return np.asarray(ndtri(unit))


def _evaluate(problem: Problem, x: FloatArray) -> FloatArray:
    """Return ln likelihood plus ln prior ratio (n,); -inf outside the box or behind a wall."""
    return _ln_target(problem, x, problem.evaluate(np.clip(x, -LARGEST_COORDINATE, LARGEST_COORDINATE)))


def _ln_target(problem: Problem, x: FloatArray, found: Evaluation) -> FloatArray:
    """Return the same from what the problem says at ``x``."""
    inside = np.all(np.abs(x) <= LARGEST_COORDINATE, axis=1)
    value = ln_likelihood(problem, found.residuals) + found.ln_prior_ratio
    return np.where(inside & ~np.isnan(value), value, -np.inf)


def _likeliest(found: Evaluation, allowed: NDArray[np.bool_]) -> NDArray[np.intp]:
    """Return the indices of the ``LIKELIEST`` allowed points with the least sum of squares, nuisances included."""
    chi2 = np.einsum("ij,ij->i", found.residuals, found.residuals)
    chi2 += np.einsum("ij,ij->i", found.nuisances, found.nuisances)
    rows = np.flatnonzero(allowed)
    return rows[np.argsort(chi2[rows], kind="stable")[:LIKELIEST]]


def _ln_normal(x: FloatArray) -> FloatArray:
    """Ln density of the standard normal prior at ``x`` (n, d)."""
    return np.asarray(-0.5 * np.einsum("ij,ij->i", x, x) - 0.5 * x.shape[1] * np.log(2.0 * np.pi))


def _first_proposal(
    problem: Problem, x: FloatArray, ln_target: FloatArray, settings: Settings, rng: np.random.Generator
) -> tuple[student.StudentMixture, FloatArray]:
    """Return what the prior points suggest, with a t density around each distinct polished point, and those points.

    The prior points give the wide view that no mode can give, the polished points the narrow one that no point has hit.
    """
    weights = _truncated(_flattened(ln_target))
    mixture = student.with_wide_component(student.fit(x, weights, settings.components, rng), x, weights)
    best = np.argsort(-ln_target)[: settings.polish_starts]
    best = best[np.isfinite(ln_target[best])]
    use = np.ones((best.size, problem.evaluate(x[:1]).residuals.shape[1]))
    found = optimise.minimise(problem, x[best], use, prior=True)
    # Where a wall holds the point, the density falls off exponentially from it: its scale is one over the gradient.
    precision = found.curvature + np.einsum("bi,bj->bij", found.gradient, found.gradient)
    keep = _distinct(found.x, found.chi2, precision)
    if keep.size == 0:
        return mixture, x[best]
    covariance = np.linalg.inv(precision[keep])
    centre = found.x[keep] + np.einsum("bij,bj->bi", covariance, found.gradient[keep])
    height = np.exp(-0.5 * np.minimum(found.chi2[keep] - found.chi2[keep].min(), 40.0))
    narrow = student.from_moments(height / height.sum() + 0.05, centre, MODE_STRETCH * covariance)
    return student.joined(mixture, narrow, MODE_SHARE), found.x[keep]


def _distinct(x: FloatArray, chi2: FloatArray, precision: FloatArray, most: int = 6) -> NDArray[np.intp]:
    """Return indices of at most ``most`` end points that are not within one sigma of a better one."""
    kept: list[int] = []
    for index in np.argsort(chi2, kind="stable"):
        offsets = x[kept] - x[index]
        near = np.einsum("ki,ij,kj->k", offsets, precision[index], offsets) < 1.0
        if np.isfinite(chi2[index]) and not near.any() and chi2[index] < chi2.min() + 60.0:
            kept.append(int(index))
        if len(kept) == most:
            break
    return np.array(kept, dtype=np.intp)


def _adapt(
    problem: Problem, mixture: student.StudentMixture, settings: Settings, rng: np.random.Generator
) -> tuple[student.StudentMixture, int]:
    """Refit the mixture rung by rung until it proposes well, or the rungs are used up; return the best one seen.

    The last rungs are pooled under the mean of their proposals (Cornuet et al. 2012, Scand. J. Stat. 39, 798): one
    rung alone has too few effective points to shape many components in ten dimensions.
    """
    evaluations, previous, best, best_efficiency, best_rung = 0, 0.0, mixture, -1.0, 0
    rungs: list[_Rung] = []
    for number in range(settings.rungs):
        x = mixture.draw(settings.rung_points, rng)
        ln_target = _evaluate(problem, x) + _ln_normal(x)
        evaluations += x.shape[0]
        ln_proposed = mixture.ln_density(x)
        efficiency = diagnostics.effective_sample_size(ln_target - ln_proposed) / x.shape[0]
        if efficiency > best_efficiency:
            best, best_efficiency, best_rung = mixture, efficiency, number
        if efficiency > 0.5 or 0.15 < efficiency < 1.15 * previous or number > best_rung + settings.patience:
            break
        previous = efficiency
        rungs = _with_new_rung(rungs[1 - POOLED_RUNGS :], _Rung(x, ln_target, mixture, (ln_proposed,)))
        points = np.concatenate([rung.x for rung in rungs])
        weights = _truncated(_flattened(np.concatenate([rung.ln_weights for rung in rungs])))
        if np.count_nonzero(weights) <= x.shape[1]:
            continue
        mixture = student.with_wide_component(student.fit(points, weights, settings.components, rng), points, weights)
    return best, evaluations


class _Rung(NamedTuple):
    """Points (n, d), their ln target (n,), what proposed them, and their ln density (n,) under each pooled proposal."""

    x: FloatArray
    ln_target: FloatArray
    mixture: student.StudentMixture
    ln_densities: tuple[FloatArray, ...]

    @property
    def ln_weights(self) -> FloatArray:
        """Ln weights of the points under the mean of the pooled proposals."""
        mean = np.logaddexp.reduce(self.ln_densities) - np.log(len(self.ln_densities))
        return np.asarray(self.ln_target - mean)


def _with_new_rung(rungs: list[_Rung], new: _Rung) -> list[_Rung]:
    """Return the kept rungs and the new one, every point weighed under every proposal; known densities are kept."""
    kept = len(rungs)
    known = [r._replace(ln_densities=(*r.ln_densities[-kept:], new.mixture.ln_density(r.x))) for r in rungs]
    ln_densities = (*(rung.mixture.ln_density(new.x) for rung in rungs), *new.ln_densities)
    return [*known, new._replace(ln_densities=ln_densities)]


def _flattened(ln_weights: FloatArray) -> FloatArray:
    """Ln weights raised to the largest power <= 1 that leaves ``ENOUGH_SHARE`` of the points effective.

    It is a step on the geometric path from the proposal to the posterior: the path of annealed importance sampling
    (Neal 2001), but starting from what is known already instead of the prior. A wall stays a wall.
    """
    wanted = ENOUGH_SHARE * ln_weights.size
    if diagnostics.effective_sample_size(ln_weights) >= wanted:
        return ln_weights
    low, high = 0.0, 1.0
    for _ in range(30):
        middle = 0.5 * (low + high) if low > 0.0 else 0.1 * high
        enough = diagnostics.effective_sample_size(middle * ln_weights) >= wanted
        low, high = (middle, high) if enough else (low, middle)
    return low * ln_weights if low > 0.0 else np.where(np.isfinite(ln_weights), 0.0, -np.inf)


def _truncated(ln_weights: FloatArray) -> FloatArray:
    """Normalised weights with none above sqrt(n) times the mean (Ionides 2008)."""
    weights = diagnostics.normalised_weights(ln_weights)
    if weights.sum() == 0.0:
        return weights
    weights = np.minimum(weights, 1.0 / np.sqrt(weights.size))
    return np.asarray(weights / weights.sum())


def _last_round(
    problem: Problem, mixture: student.StudentMixture, settings: Settings, rng: np.random.Generator
) -> tuple[FloatArray, FloatArray, int]:
    """Draw fresh points from the frozen proposal, in growing blocks, until the diagnostics are met."""
    blocks_x: list[FloatArray] = []
    blocks_w: list[FloatArray] = []
    size, total = max(settings.rung_points, int(1.1 * settings.effective)), 0
    while True:
        x = mixture.draw(size, rng)
        blocks_x.append(x)
        blocks_w.append(_evaluate(problem, x) + _ln_normal(x) - mixture.ln_density(x))
        total += size
        ln_weights = np.concatenate(blocks_w)
        effective = diagnostics.effective_sample_size(ln_weights)
        enough = effective >= settings.effective and diagnostics.pareto_shape(ln_weights) < settings.pareto_k
        if enough or total >= settings.last_points:
            return np.concatenate(blocks_x), ln_weights, total
        wanted = 1.1 * total * settings.effective / max(effective, 1.0) - total
        size = int(np.clip(wanted, settings.rung_points, settings.last_points - total))
