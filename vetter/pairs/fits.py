"""Light and orbit of each explanation, quickly: a look at all of them, and evidence for those that can still win."""

from __future__ import annotations

import zlib
from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from vetter.inference import importance, optimise
from vetter.inference.importance import Posterior, Settings
from vetter.inference.problem import ln_likelihood
from vetter.observations.base import Observation
from vetter.scenarios.base import Scenario
from vetter.scenarios.context import Context
from vetter.scenarios.fit import Fit

FloatArray = NDArray[np.float64]

QUICK = Settings(
    start_points=1024,
    polish_starts=4,
    rung_points=1024,
    rungs=25,
    patience=6,
    effective=200.0,
    error=0.2,
    last_points=4096,
)
"""Precision of the evidence: a ln Bayes factor good to about 0.1 is enough to tell 5 from 3."""

LOOK_POINTS = 1024
LOOK_STARTS = 5
LOOK_STEPS = 20

OUT_OF_THE_RACE = 100.0
"""An explanation whose least sum of squares is this much worse (10 sigma) is not sampled; its evidence is bounded."""

HARD_STARTS, HARD_STEPS = 16, 80
"""How hard the best case of an explanation is sought that is not sampled."""

DRAWS = 400

BEST_CASES = 2


@dataclass(frozen=True)
class FittedBranch:
    """One branch: best case, its sum of squares, and the posterior where it was worth sampling."""

    fit: Fit
    starts: FloatArray
    best_x: FloatArray
    chi2: float
    posterior: Posterior | None = None

    def draws(self, rng: np.random.Generator) -> FloatArray:
        """Return equally weighted posterior points (DRAWS, dimension); ValueError where nothing was sampled."""
        if self.posterior is None:
            raise ValueError("this branch was not sampled")
        places = (np.arange(DRAWS) + rng.random()) / DRAWS
        rows = np.searchsorted(np.cumsum(self.posterior.weights), places)
        return np.asarray(self.posterior.x[np.minimum(rows, len(self.posterior.x) - 1)])


@dataclass(frozen=True)
class Fitted:
    """One explanation after its fit to everything but the residuals of the velocities and the light curve."""

    scenario: Scenario
    branches: tuple[FittedBranch, ...]
    closed_because: str | None = None

    @property
    def best(self) -> FittedBranch:
        """The branch with the best fit."""
        return min(self.branches, key=lambda branch: branch.chi2)

    @property
    def ln_likelihood_max(self) -> float:
        """Ln likelihood of the best case; -inf where every point is walled off."""
        return self.best.fit.ln_norm - 0.5 * self.best.chi2

    @property
    def sampled(self) -> bool:
        """Whether any branch has an evidence."""
        return any(branch.posterior is not None for branch in self.branches)

    def branch_ln_evidences(self) -> FloatArray:
        """Return ln evidence (branches,), -inf where not sampled, less ln of the number of branches."""
        values = [-np.inf if b.posterior is None else b.posterior.ln_evidence for b in self.branches]
        return np.asarray(np.array(values) - np.log(len(values)))

    @property
    def ln_evidence(self) -> float:
        """Ln of the mean evidence of the branches; -inf where none was sampled."""
        return float(np.logaddexp.reduce(self.branch_ln_evidences()))

    @property
    def ln_evidence_error(self) -> float:
        """Its standard error."""
        values = self.branch_ln_evidences()
        share = np.exp(values - np.logaddexp.reduce(values))
        errors = [0.0 if b.posterior is None else b.posterior.ln_evidence_error for b in self.branches]
        return float(np.sqrt(np.sum((share * errors) ** 2)))


def look(scenario: Scenario, context: Context, observations: Sequence[Observation], seed: int) -> Fitted:
    """Return the best case of every branch of a scenario, unsampled."""
    branches, closed = [], None
    for place, branch in enumerate(scenario.branches(context)):
        fit = Fit(branch, tuple(observations))
        stream = np.random.SeedSequence([seed, zlib.crc32(f"{scenario.name}/{branch.seen.name}".encode()) + place])
        points = importance.prior_points(fit.dimension, LOOK_POINTS, np.random.default_rng(stream))
        found = fit.evaluate(points)
        value = ln_likelihood(fit, found.residuals) + found.ln_prior_ratio
        if not np.isfinite(value).any():
            closed = fit.closed_because(points)
            branches.append(FittedBranch(fit, points, points[0], np.inf))
            continue
        first = points[np.argsort(-value, kind="stable")[:LOOK_STARTS]]
        ended = optimise.minimise(fit, first, np.ones((len(first), found.residuals.shape[1])), False, LOOK_STEPS)
        best = int(np.argmin(ended.chi2))
        branches.append(FittedBranch(fit, np.concatenate([points, ended.x]), ended.x[best], float(ended.chi2[best])))
    return Fitted(scenario, tuple(branches), closed if all(b.chi2 == np.inf for b in branches) else None)


def sampled(fitted: Fitted, chi2_max: float, seed: int) -> Fitted:
    """Return the explanation with the evidence of every branch whose sum of squares is below ``chi2_max``."""
    branches = [
        _sampled(branch, seed + place) if branch.chi2 < chi2_max else branch
        for place, branch in enumerate(fitted.branches)
    ]
    return replace(fitted, branches=tuple(branches))


def polished(fitted: Fitted) -> Fitted:
    """Return an explanation that is not worth sampling with its best case sought harder, for a fair sigma."""
    return replace(fitted, branches=tuple(_polished(branch) for branch in fitted.branches))


def _polished(branch: FittedBranch) -> FittedBranch:
    if not np.isfinite(branch.chi2):
        return branch
    found = branch.fit.evaluate(branch.starts)
    value = ln_likelihood(branch.fit, found.residuals) + found.ln_prior_ratio
    first = branch.starts[np.argsort(-value, kind="stable")[:HARD_STARTS]]
    ended = optimise.minimise(branch.fit, first, np.ones((len(first), found.residuals.shape[1])), False, HARD_STEPS)
    best = int(np.argmin(ended.chi2))
    if ended.chi2[best] >= branch.chi2:
        return branch
    return replace(branch, best_x=ended.x[best], chi2=float(ended.chi2[best]))


def _sampled(branch: FittedBranch, seed: int) -> FittedBranch:
    posterior = importance.sample(branch.fit, QUICK, seed, branch.starts)
    if posterior is None:
        return branch
    likeliest = posterior.x[np.argsort(-posterior.ln_weights, kind="stable")[:BEST_CASES]]
    starts = np.vstack([branch.best_x, posterior.modes[:BEST_CASES], likeliest])
    width = branch.fit.evaluate(starts[:1]).residuals.shape[1]
    ended = optimise.minimise(branch.fit, starts, np.ones((len(starts), width)), False, LOOK_STEPS)
    best = int(np.argmin(ended.chi2))
    if ended.chi2[best] >= branch.chi2:
        return replace(branch, posterior=posterior)
    return replace(branch, posterior=posterior, best_x=ended.x[best], chi2=float(ended.chi2[best]))
