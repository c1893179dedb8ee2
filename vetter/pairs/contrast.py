"""Inner pair versus single companion: the fits, the epochs and the planes put together."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import replace
from importlib.metadata import version

import numpy as np

from vetter.errors import InputError
from vetter.evaluation import chosen_scenarios
from vetter.observations.base import registered
from vetter.observations.velocities import VelocitiesObservation, orbit_with_velocities
from vetter.pairs.cautions import cautions
from vetter.pairs.details import detail_of
from vetter.pairs.epochs import epochs_about
from vetter.pairs.members import PAIRS
from vetter.pairs.n_body import rebound_module
from vetter.pairs.result import Contrast, Explanation
from vetter.pairs.weigh import Task, Weighed, best_single, look_at, weigh_pair
from vetter.physics.velocity_residuals import k1_at_fixed_shape
from vetter.scenarios.context import build_context
from vetter.system.model import Measurement, System

SINGLES = ("main_sequence", "evolved_star", "stripped_companion", "white_dwarf", "neutron_star", "black_hole")
"""Explanations with one companion and the same seen star as the pairs have."""

DONE_HERE = ("velocities", "variability")
"""Observations that are not left to the fit of a scenario: here they are set against the inner orbit in full."""


def contrast(
    system: System,
    between: Sequence[str] | None = None,
    seed: int = 0,
    n_body: bool = False,
    progress: Callable[[str], None] | None = None,
    grid: str | None = None,
) -> Contrast:
    """Say whether the unseen mass is one body or a tight pair.

    Parameters
    ----------
    system : the measurements
    between : two explanations, at least one of them a pair; by default the best single companion against all pairs
    seed : the same seed gives the same result, bit for bit
    n_body : integrate the most favourable allowed pair of each kind (needs the package rebound)
    progress : called with what is being worked on
    grid : atmospheres of the user's own (``vetter grids add``); the shipped ones by default

    Both orbits are taken as lying in one plane and the inner one as circular. Raises InputError for unknown
    explanations, for two single ones, without rebound where it is asked for, or when too few epoch velocities are all
    that weighs the companion.
    """
    if n_body:
        rebound_module()
    singles, pairs = _sides(system, between)
    task = _task(system, seed, grid, progress or (lambda words: None))
    looked = {name: look_at(task, name) for name in (*singles, *pairs)}
    best_chi2 = min(fitted.best.chi2 for fitted in looked.values())
    weighed = [best_single(task, [looked[name] for name in singles])] if singles else []
    weighed += [weigh_pair(task, looked[name], best_chi2) for name in pairs]
    rows = _explanations(weighed, task.epochs is not None)
    details = [
        detail_of(task, one, best_chi2, n_body) for one in weighed if one.branches and one.fitted.scenario.name in PAIRS
    ]
    said = cautions(task.context.system, task.epochs, rows, details)
    return Contrast(
        system.name, version("companion-vetter"), seed, tuple(rows), tuple(details), task.epochs, tuple(said)
    )


def _sides(system: System, between: Sequence[str] | None) -> tuple[tuple[str, ...], tuple[str, ...]]:
    """Names of the single companions and of the pairs to contrast."""
    if between is None:
        return SINGLES, PAIRS
    names = [scenario.name for scenario in chosen_scenarios(system, between)]
    if len(names) != 2 or not set(names) & set(PAIRS):
        expected = f"two different explanations, at least one of {', '.join(PAIRS)}"
        raise InputError.single("command line", "--between", " ".join(between), expected)
    return tuple(n for n in names if n not in PAIRS), tuple(n for n in names if n in PAIRS)


def _task(system: System, seed: int, grid: str | None, say: Callable[[str], None]) -> Task:
    """The system prepared: its epochs apart, everything else to be fitted."""
    context = build_context(system, grid)
    seen = VelocitiesObservation.from_system(system, context.engine)
    # Raises InputError where nothing weighs the companion.
    fitted = orbit_with_velocities(system if seen is None else _with_k1(system, seen))
    made = [kind.from_system(fitted, context.engine) for kind in registered() if kind.name not in DONE_HERE]
    epochs = None if seen is None else epochs_about(seen.data, seen.modes[0])
    kept = tuple(observation for observation in made if observation is not None)
    return Task(replace(context, system=fitted), kept, epochs, seed, say)


def _with_k1(system: System, seen: VelocitiesObservation) -> System:
    """The system with the orbit of its epochs where it gives no K1, errors to first order: no sampling is needed."""
    if system.orbit.k1_km_s is not None:
        return system
    ln_period, x, y = seen.modes[0].point[:3]
    orbit = replace(
        system.orbit,
        period_d=Measurement(float(np.exp(ln_period)), 0.0),
        eccentricity=Measurement(float(x * x + y * y), 0.0),
        eccentricity_given=True,
        k1_km_s=Measurement(*k1_at_fixed_shape(seen.data, seen.modes[0])),
    )
    return replace(system, orbit=orbit)


def _explanations(weighed: Sequence[Weighed], epochs: bool) -> list[Explanation]:
    """Rows of the table: the first is what the others are weighed against."""
    best = max(one.ln_likelihood_max for one in weighed)
    return [_row(one, weighed[0], best, epochs) for one in weighed]


def _row(mine: Weighed, against: Weighed, best: float, epochs: bool) -> Explanation:
    fitted, top = mine.fitted, mine.ln_likelihood_max
    rival = mine is not against and bool(against.branches)
    value = mine.ln_evidence if mine.branches else None
    ln_bayes = bound = error = ln_velocities = None
    if value is not None and epochs:
        ln_velocities = value - fitted.ln_evidence
    if rival and value is not None:
        ln_bayes = value - against.ln_evidence
        error = float(np.hypot(mine.ln_evidence_error, against.ln_evidence_error))
    elif rival and np.isfinite(top):
        bound = top - against.ln_evidence
    return Explanation(
        name=fitted.scenario.name,
        title=fitted.scenario.title,
        sigma=float(np.sqrt(max(2.0 * (best - top), 0.0))) if np.isfinite(top) else None,
        ln_evidence=value,
        ln_evidence_error=None if value is None else mine.ln_evidence_error,
        ln_light=fitted.ln_evidence if fitted.sampled else None,
        ln_velocities=ln_velocities,
        ln_apsidal=mine.ln_apsidal,
        ln_bayes=ln_bayes,
        ln_bayes_error=error,
        ln_bayes_max=bound,
        closed_because=fitted.closed_because,
    )
