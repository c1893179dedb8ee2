"""From a system to its verdicts: every scenario fitted to every observation, then compared."""

from __future__ import annotations

import zlib
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from vetter.inference import importance, optimise
from vetter.inference.importance import Posterior, Settings
from vetter.scenarios.fit import Fit

if TYPE_CHECKING:
    from vetter.observations.base import Observation
    from vetter.results.verdicts import Verdicts
    from vetter.scenarios.base import Scenario
    from vetter.scenarios.context import Context
    from vetter.system.model import System

FloatArray = NDArray[np.float64]

POLISH_STARTS = 5
"""Posterior samples polished into the largest likelihood, beside the modes and the prior points that fit best."""

NEGLIGIBLE_LN = 20.0
"""A branch with so much less ln evidence than another of its scenario need not be sampled well."""

BEST_ENDS = 2
"""Ends of the fits with everything that start the fits without one observation."""

SECOND_LOOK = 8
"""How many times more prior points are tried before a scenario is called closed."""


@dataclass(frozen=True)
class BranchRun:
    """One branch after sampling and polishing.

    Attributes
    ----------
    fit : the problem
    posterior : weighted samples, None when every point is walled off
    best_x : (dimension,) point of the largest likelihood
    chi2 : least sum of squares with every observation
    chi2_without : the same with one observation left out, by name
    closed_because : the wall in words where the branch is closed
    """

    fit: Fit
    posterior: Posterior | None
    best_x: FloatArray
    chi2: float
    chi2_without: Mapping[str, float]
    closed_because: str | None = None


@dataclass(frozen=True)
class ScenarioRun:
    """All branches of one scenario, in order."""

    scenario: Scenario
    branches: tuple[BranchRun, ...]

    @property
    def best(self) -> BranchRun:
        """The branch with the largest likelihood; the first where all are closed."""
        return min(self.branches, key=lambda run: run.chi2)

    @property
    def ln_evidence(self) -> float | None:
        """Logarithm of the mean evidence of the branches, or None when all are closed."""
        values = [-np.inf if run.posterior is None else run.posterior.ln_evidence for run in self.branches]
        total = float(np.logaddexp.reduce(values) - np.log(len(values)))
        return total if np.isfinite(total) else None

    def branch_weights(self) -> FloatArray:
        """Return the share (branches,) of each branch in the evidence."""
        values = np.array([-np.inf if r.posterior is None else r.posterior.ln_evidence for r in self.branches])
        weights = np.exp(values - values.max())
        return np.asarray(weights / weights.sum())


def evaluate(
    system: System,
    scenarios: Sequence[str] | None = None,
    seed: int = 0,
    settings: Settings | None = None,
    progress: Callable[[str], None] | None = None,
    grid: str | None = None,
) -> Verdicts:
    """Fit every scenario to everything that was measured and return the verdicts.

    Parameters
    ----------
    system : the measurements
    scenarios : names to evaluate, all registered ones by default
    seed : the same seed gives the same result, bit for bit
    settings : precision of the sampler
    progress : called with the title of each scenario before it runs
    grid : atmospheres of the user's own (``vetter grids add``); the shipped ones by default

    Raises InputError for an unknown scenario or grid, or when too few epoch velocities are all that weighs the
    companion.
    """
    from vetter.results.compare import compare

    context, observations = prepare(system, grid)
    runs = []
    for scenario in chosen_scenarios(system, scenarios):
        if progress is not None:
            progress(scenario.title)
        runs.append(run_scenario(scenario, context, observations, seed, settings or Settings()))
    return compare(context, observations, runs, seed)


def prepare(system: System, grid: str | None = None) -> tuple[Context, list[Observation]]:
    """Return the context and the observations of a system; K1 comes from its epoch velocities where it was not given.

    Raises InputError when too few epoch velocities are all that weighs the companion.
    """
    from vetter.observations.base import registered
    from vetter.observations.velocities import orbit_with_velocities
    from vetter.scenarios.context import build_context

    context = build_context(orbit_with_velocities(system), grid)
    made = [kind.from_system(context.system, context.engine) for kind in registered()]
    return context, [observation for observation in made if observation is not None]


def chosen_scenarios(system: System, names: Sequence[str] | None) -> list[Scenario]:
    """Return the scenarios of these names in the table's order, by default all but those that run only on request.

    Raises InputError for an unknown one.
    """
    from vetter.errors import InputError
    from vetter.scenarios.base import registered

    known = registered(on_request=True)
    for name in names or ():
        if name not in known:
            raise InputError.single(system.source, "scenario", name, f"one of {', '.join(known)}")
    wanted = names or list(registered())
    return [scenario for name, scenario in known.items() if name in wanted]


def run_scenario(
    scenario: Scenario, context: Context, observations: Sequence[Observation], seed: int, settings: Settings
) -> ScenarioRun:
    """Sample and polish every branch of a scenario; each has its own random stream, whatever else is run."""
    fits, seeds = [], []
    for place, branch in enumerate(scenario.branches(context)):
        stream = zlib.crc32(f"{scenario.name}/{branch.seen.name}".encode()) + place
        fits.append(Fit(branch, tuple(observations)))
        seeds.append(int(np.random.SeedSequence([seed, stream]).generate_state(1)[0]))
    looks = [_sample(fit, own, settings) for fit, own in zip(fits, seeds, strict=True)]
    weightiest = max((look.ln_evidence for look in looks if isinstance(look, Posterior)), default=-np.inf)
    runs = []
    for fit, own, look in zip(fits, seeds, looks, strict=True):
        if isinstance(look, str):
            runs.append(BranchRun(fit, None, np.zeros(fit.dimension), np.inf, {}, look))
            continue
        matters = settings.second_effort and look.ln_evidence > weightiest - NEGLIGIBLE_LN
        again = matters and not look.converged
        runs.append(_polished(fit, importance.try_harder(fit, look, settings, own) if again else look))
    return ScenarioRun(scenario, tuple(runs))


def _sample(fit: Fit, seed: int, settings: Settings) -> Posterior | str:
    """Return the posterior of a branch, or in words the wall that closes it everywhere."""
    posterior = importance.sample(fit, settings, seed)
    if posterior is not None:
        return posterior
    points = importance.prior_points(fit.dimension, SECOND_LOOK * settings.start_points, np.random.default_rng(seed))
    if not np.isfinite(fit.evaluate(points).ln_prior_ratio).any():
        return fit.closed_because(points)
    posterior = importance.sample(fit, settings, seed, points)
    if posterior is None:
        raise RuntimeError("open ground vanished between two looks at the same points")
    return posterior


def _polished(fit: Fit, posterior: Posterior) -> BranchRun:
    """Return the branch with its best fit, with everything and without each observation."""
    best_x, chi2 = _best_fits(fit, np.vstack([_spread(posterior), posterior.modes, posterior.likeliest]))
    starts = np.vstack([best_x[:BEST_ENDS], _spread(posterior)])
    return BranchRun(fit, posterior, best_x[0], float(chi2[0]), _without_each(fit, starts, float(chi2[0])))


def _best_fits(fit: Fit, starts: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return where the fits from these starts end (b, dimension) and their sums of squares (b,), best first."""
    use = np.ones((len(starts), fit.evaluate(starts[:1]).residuals.shape[1]))
    found = optimise.minimise(fit, starts, use, prior=False)
    order = np.argsort(found.chi2, kind="stable")
    return found.x[order], found.chi2[order]


def _without_each(fit: Fit, starts: FloatArray, chi2: float) -> dict[str, float]:
    """Return the least sum of squares without each observation that may be left out, all fitted side by side."""
    slices = fit.columns_of(starts[:1])
    names = [observation.name for observation in fit.observations if observation.droppable]
    if not names:
        return {}
    use = np.ones((len(names), max(part.stop for part in slices.values())))
    for row, name in enumerate(names):
        use[row, slices[name]] = 0.0
    every = np.repeat(use, len(starts), axis=0)
    found = optimise.minimise(fit, np.tile(starts, (len(names), 1)), every, prior=False)
    least = found.chi2.reshape(len(names), len(starts)).min(axis=1)
    # A fit without an observation can never be worse than the fit with it.
    return {name: float(min(value, chi2)) for name, value in zip(names, least, strict=True)}


def _spread(posterior: Posterior) -> FloatArray:
    """Return some of the heaviest samples, spread over the posterior, as starting points (b, dimension)."""
    order = np.argsort(-posterior.ln_weights, kind="stable")
    return np.asarray(posterior.x[order[np.linspace(0, min(200, len(order) - 1), POLISH_STARTS).astype(int)]])
