"""Adaptive tempered importance sampling: ln evidence, posterior samples and the modes of a likelihood.

The order of work: scrambled Sobol points over the prior; the best of them are polished; a mixture of t densities
around the polished points proposes; where it fits badly the likelihood is flattened to a temperature at which a
tenth of the points still count, the mixture is refitted, and the temperature is brought back to one step by step.
The numbers that are reported come from the last, fresh set of draws only, so that adapting cannot bias them.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from vetter.inference import diagnostics, optimise, student
from vetter.inference.problem import LARGEST_COORDINATE, Evaluation, Problem, ln_likelihood

FloatArray = NDArray[np.float64]


@dataclass(frozen=True)
class Settings:
    """How hard to try.

    Attributes
    ----------
    start_points : prior points, a power of two
    polish_starts : how many of them are polished into modes
    rung_points : draws per adaptation round
    rungs : most adaptation rounds
    components : most t components of the proposal
    effective : effective sample size to reach
    pareto_k : largest Pareto k to accept
    last_points : most draws in the last round
    """

    start_points: int = 8192
    polish_starts: int = 12
    rung_points: int = 3072
    rungs: int = 14
    components: int = 8
    effective: float = 2000.0
    pareto_k: float = 0.7
    last_points: int = 32768


@dataclass(frozen=True)
class Posterior:
    """Weighted draws and what they say.

    Attributes
    ----------
    x : (n, d) draws in normal coordinates
    ln_weights : (n,) unnormalised ln posterior weights
    modes : (k, d) distinct polished points, most probable first
    ln_evidence, ln_evidence_error : logarithm of the evidence and its standard error
    effective_sample_size, pareto_k : diagnostics of the weights
    evaluations : points at which the model was evaluated by the sampler (the polishing not counted)
    converged : whether both diagnostics reached the settings
    """

    x: FloatArray
    ln_weights: FloatArray
    modes: FloatArray
    ln_evidence: float
    ln_evidence_error: float
    effective_sample_size: float
    pareto_k: float
    evaluations: int
    converged: bool

    @property
    def weights(self) -> FloatArray:
        """Weights (n,) that sum to one."""
        return diagnostics.normalised_weights(self.ln_weights)


def sample(
    problem: Problem, settings: Settings, seed: int, start: FloatArray | None = None
) -> Posterior | None:
    """Return the posterior of ``problem``, or None when no starting point is on allowed ground.

    ``start`` (n, dimension) replaces the Sobol points over the prior that the search for modes begins with.
    Tempering: Neal 2001 (Statistics and Computing 11, 125); truncated weights while adapting: Ionides 2008
    (J. Comp. Graph. Stat. 17, 295); the mixture proposal: Cappe et al. 2008 (Statistics and Computing 18, 447).
    """
    rng = np.random.default_rng(seed)
    if start is None:
        start = prior_points(problem.dimension, settings.start_points, rng)
    first = _evaluate(problem, start)
    if not np.isfinite(first).any():
        return None
    mixture, modes = _first_proposal(problem, start, first, settings)
    mixture, evaluations = _adapt(problem, mixture, modes, settings, rng)
    x, ln_weights, more = _last_round(problem, mixture, settings, rng)
    ln_evidence, error = diagnostics.ln_evidence_and_error(ln_weights)
    effective = diagnostics.effective_sample_size(ln_weights)
    shape = diagnostics.pareto_shape(ln_weights)
    return Posterior(
        x, ln_weights, modes, ln_evidence, error, effective, shape, len(start) + evaluations + more,
        bool(effective >= settings.effective and shape < settings.pareto_k),
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
    evaluation: Evaluation = problem.evaluate(np.clip(x, -LARGEST_COORDINATE, LARGEST_COORDINATE))
    inside = np.all(np.abs(x) <= LARGEST_COORDINATE, axis=1)
    value = ln_likelihood(problem, evaluation.residuals) + evaluation.ln_prior_ratio
    return np.where(inside & ~np.isnan(value), value, -np.inf)


def _ln_normal(x: FloatArray) -> FloatArray:
    """Ln density of the standard normal prior at ``x`` (n, d)."""
    return np.asarray(-0.5 * np.einsum("ij,ij->i", x, x) - 0.5 * x.shape[1] * np.log(2.0 * np.pi))


def _first_proposal(
    problem: Problem, x: FloatArray, ln_target: FloatArray, settings: Settings
) -> tuple[student.StudentMixture, FloatArray]:
    """Polish the best prior points and put a t density around each distinct end point, plus one over the prior."""
    best = np.argsort(-ln_target)[: settings.polish_starts]
    best = best[np.isfinite(ln_target[best])]
    use = np.ones((best.size, problem.evaluate(x[:1]).residuals.shape[1]))
    found = optimise.minimise(problem, x[best], use, np.ones(problem.dimension))
    precision = np.einsum("bmi,bmj->bij", found.jacobian, found.jacobian)
    covariance = np.linalg.inv(precision)
    keep = _distinct(found.x, found.chi2, precision)
    height = np.exp(-0.5 * np.minimum(found.chi2[keep] - found.chi2[keep].min(), 40.0))
    share = np.append(height / height.sum() + 0.05, 0.15)
    identity = np.eye(problem.dimension)
    mixture = student.from_moments(
        share, np.vstack([found.x[keep], np.zeros((1, problem.dimension))]),
        np.concatenate([1.5 * covariance[keep] + 1e-14 * identity, identity[None]]),
    )
    return mixture, found.x[keep]


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
    problem: Problem, mixture: student.StudentMixture, modes: FloatArray, settings: Settings, rng: np.random.Generator
) -> tuple[student.StudentMixture, int]:
    """Refit the mixture rung by rung until it proposes well at temperature one, or the rungs are used up."""
    inverse_temperature, efficiency, evaluations = 0.0, 0.0, 0
    best, best_efficiency = mixture, -1.0
    for _ in range(settings.rungs):
        x = mixture.draw(settings.rung_points, rng)
        ln_target = _evaluate(problem, x)
        evaluations += x.shape[0]
        ln_base = _ln_normal(x) - mixture.ln_density(x)
        inverse_temperature = _next_temperature(ln_base, ln_target, inverse_temperature)
        ln_weights = _tempered(ln_base, ln_target, inverse_temperature)
        if inverse_temperature == 1.0:
            previous, efficiency = efficiency, diagnostics.effective_sample_size(ln_weights) / x.shape[0]
            if efficiency > best_efficiency:
                best, best_efficiency = mixture, efficiency
            if efficiency > 0.5 or (efficiency > 0.15 and efficiency < 1.15 * previous):
                break
        weights = _truncated(ln_weights)
        if np.count_nonzero(weights) <= x.shape[1]:
            continue
        mixture = student.with_wide_component(student.fit(x, weights, settings.components, rng), x, weights)
    return (best if best_efficiency > 0.0 else mixture), evaluations


def _tempered(ln_base: FloatArray, ln_target: FloatArray, inverse_temperature: float) -> FloatArray:
    """Ln weights with the target raised to a power; a wall stays a wall at every temperature."""
    finite = np.isfinite(ln_target)
    return np.where(finite, ln_base + inverse_temperature * np.where(finite, ln_target, 0.0), -np.inf)


def _truncated(ln_weights: FloatArray) -> FloatArray:
    """Normalised weights with none above sqrt(n) times the mean (Ionides 2008)."""
    weights = diagnostics.normalised_weights(ln_weights)
    if weights.sum() == 0.0:
        return weights
    weights = np.minimum(weights, 1.0 / np.sqrt(weights.size))
    return np.asarray(weights / weights.sum())


def _next_temperature(ln_base: FloatArray, ln_target: FloatArray, current: float) -> float:
    """Largest inverse temperature that leaves a tenth of the points effective; at least 15 % further than now."""
    def effective(value: float) -> float:
        return diagnostics.effective_sample_size(_tempered(ln_base, ln_target, value))

    wanted = 0.1 * ln_target.size
    if effective(1.0) >= wanted:
        return 1.0
    low, high = current, 1.0
    if effective(low) >= wanted:
        for _ in range(40):
            middle = 0.5 * (low + high) if low > 1e-3 * high else np.sqrt(max(low, 1e-9) * high)
            low, high = (middle, high) if effective(middle) >= wanted else (low, middle)
    return float(min(1.0, max(low, 1.15 * current, 1e-6)))


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
