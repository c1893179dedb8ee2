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
"""Posterior samples polished into the largest likelihood, beside the modes that the sampler found."""

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
) -> Verdicts:
    """Fit every scenario to everything that was measured and return the verdicts.

    Parameters
    ----------
    system : the measurements
    scenarios : names to evaluate, all registered ones by default
    seed : the same seed gives the same result, bit for bit
    settings : precision of the sampler
    progress : called with the title of each scenario before it runs

    Raises InputError for an unknown scenario, or when too few epoch velocities are all that weighs the companion.
    """
    from vetter.results.compare import compare

    context, observations = prepare(system)
    runs = []
    for scenario in chosen_scenarios(system, scenarios):
        if progress is not None:
            progress(scenario.title)
        runs.append(run_scenario(scenario, context, observations, seed, settings or Settings()))
    return compare(context, observations, runs, seed)


def prepare(system: System) -> tuple[Context, list[Observation]]:
    """Return the context and the observations of a system; K1 comes from its epoch velocities where it was not given.

    Raises InputError when too few epoch velocities are all that weighs the companion.
    """
    from vetter.observations.base import registered
    from vetter.observations.velocities import orbit_with_velocities
    from vetter.scenarios.context import build_context

    context = build_context(orbit_with_velocities(system))
    made = [kind.from_system(context.system, context.engine) for kind in registered()]
    return context, [observation for observation in made if observation is not None]


def chosen_scenarios(system: System, names: Sequence[str] | None) -> list[Scenario]:
    """Return the scenarios of these names in the table's order. Raises InputError for an unknown one."""
    from vetter.errors import InputError
    from vetter.scenarios.base import registered

    known = registered()
    for name in names or ():
        if name not in known:
            raise InputError.single(system.source, "scenario", name, f"one of {', '.join(known)}")
    return [scenario for name, scenario in known.items() if not names or name in names]


def run_scenario(
    scenario: Scenario, context: Context, observations: Sequence[Observation], seed: int, settings: Settings
) -> ScenarioRun:
    """Sample and polish every branch of a scenario; each has its own random stream, whatever else is run."""
    runs = []
    for place, branch in enumerate(scenario.branches(context)):
        stream = zlib.crc32(f"{scenario.name}/{branch.seen.name}".encode()) + place
        fit = Fit(branch, tuple(observations))
        runs.append(_run_branch(fit, int(np.random.SeedSequence([seed, stream]).generate_state(1)[0]), settings))
    return ScenarioRun(scenario, tuple(runs))


def _run_branch(fit: Fit, seed: int, settings: Settings) -> BranchRun:
    posterior = importance.sample(fit, settings, seed)
    if posterior is None:
        many = SECOND_LOOK * settings.start_points
        points = importance.prior_points(fit.dimension, many, np.random.default_rng(seed))
        if not np.isfinite(fit.evaluate(points).ln_prior_ratio).any():
            return BranchRun(fit, None, np.zeros(fit.dimension), np.inf, {}, fit.closed_because(points))
        posterior = importance.sample(fit, settings, seed, points)
    if posterior is None:
        raise RuntimeError("open ground vanished between two looks at the same points")
    starts = _polish_starts(posterior)
    slices = fit.columns_of(starts[:1])
    droppable = [observation.name for observation in fit.observations if observation.droppable]
    use = np.ones((1 + len(droppable), max(part.stop for part in slices.values())))
    for row, name in enumerate(droppable, start=1):
        use[row, slices[name]] = 0.0
    count = len(starts)
    found = optimise.minimise(fit, np.tile(starts, (len(use), 1)), np.repeat(use, count, axis=0), prior=False)
    chi2 = found.chi2.reshape(len(use), count)
    best = int(np.argmin(chi2[0]))
    # A fit without an observation can never be worse than the fit with it.
    without = {name: float(min(chi2[row].min(), chi2[0, best])) for row, name in enumerate(droppable, start=1)}
    return BranchRun(fit, posterior, found.x[best], float(chi2[0, best]), without)


def _polish_starts(posterior: Posterior) -> FloatArray:
    """Return the modes and the heaviest samples, spread over the posterior, as starting points (b, dimension)."""
    order = np.argsort(-posterior.ln_weights, kind="stable")
    spread = order[np.linspace(0, min(200, len(order) - 1), POLISH_STARTS).astype(int)]
    return np.vstack([posterior.modes, posterior.x[spread]])
