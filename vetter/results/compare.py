"""From the runs of all scenarios to the verdicts: sigmas, odds, drivers and cautions."""

from __future__ import annotations

from collections.abc import Sequence
from importlib.metadata import version
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from vetter.observations.base import Observation
from vetter.physics import kepler
from vetter.results.best_cases import predicted_signals
from vetter.results.best_details import hidden_lights, light_ratios, mass_density, residuals_by_datum
from vetter.results.cautions import cautions
from vetter.results.verdicts import (
    BestFit,
    Diagnostics,
    Driver,
    OrbitSummary,
    ScenarioVerdict,
    Verdicts,
    verdict_word,
)
from vetter.scenarios.context import Context

if TYPE_CHECKING:
    from vetter.evaluation import BranchRun, ScenarioRun

FloatArray = NDArray[np.float64]

EDGE_MASS = 0.002
"""A best companion mass this close to the end of its range, as a fraction, sits on its edge."""

EDGE_COORDINATE = 3.1
"""A best fit beyond this normal coordinate (outer thousandth of the prior) is said to sit on the prior's edge."""


def compare(context: Context, observations: Sequence[Observation], runs: Sequence[ScenarioRun], seed: int) -> Verdicts:
    """Return the verdicts of all ``runs`` on one system."""
    best_chi2 = min(run.best.chi2 for run in runs)
    names = [observation.name for observation in observations if observation.droppable]
    best_without = {
        name: min(branch.chi2_without.get(name, np.inf) for run in runs for branch in run.branches) for name in names
    }
    labels = {observation.name: observation.label for observation in observations}
    weights = {run.scenario.name: context.system.prior_odds.get(run.scenario.name, 1.0) for run in runs}
    ln_odds = {
        run.scenario.name: -np.inf if run.ln_evidence is None else run.ln_evidence + _ln(weights[run.scenario.name])
        for run in runs
    }
    largest = max(ln_odds.values())
    rows = []
    for run in runs:
        sigma = _sigma(run.best.chi2, best_chi2)
        drivers = [
            Driver(name, labels[name], sigma_without)
            for name in names
            if (sigma_without := _sigma(_least_without(run, name), best_without[name])) is not None
        ]
        odds = float(np.exp(ln_odds[run.scenario.name] - largest)) if np.isfinite(largest) else 0.0
        rows.append(_row(run, context, observations, sigma, tuple(drivers), odds))
    absent = absent_observations(context, observations)
    summary = orbit_summary(context, runs)
    said = cautions(context, observations, runs, rows)
    return Verdicts(
        context.system.name,
        version("companion-vetter"),
        seed,
        summary,
        tuple(observation.name for observation in observations),
        tuple(observation.describe() for observation in observations),
        absent,
        tuple(rows),
        weights,
        tuple(said),
    )


def _ln(weight: float) -> float:
    return float(np.log(weight)) if weight > 0.0 else -np.inf


def _sigma(chi2: float, best_chi2: float) -> float | None:
    """Sqrt of twice the drop of ln likelihood; None for a scenario with no point on allowed ground."""
    return float(np.sqrt(max(chi2 - best_chi2, 0.0))) if np.isfinite(chi2) else None


def _least_without(run: ScenarioRun, name: str) -> float:
    return min(branch.chi2_without.get(name, np.inf) for branch in run.branches)


def _row(
    run: ScenarioRun,
    context: Context,
    observations: Sequence[Observation],
    sigma: float | None,
    drivers: tuple[Driver, ...],
    odds: float,
) -> ScenarioVerdict:
    best = run.best
    n_data = sum(observation.count for observation in observations)
    n_scores = sum(parameter.counts for parameter in best.fit.branch.parameters)
    closed = sigma is None
    evidence = run.ln_evidence
    return ScenarioVerdict(
        name=run.scenario.name,
        title=run.scenario.title,
        ordinary=run.scenario.ordinary,
        verdict=verdict_word(sigma),
        sigma=sigma,
        ln_likelihood_max=None if closed else best.fit.ln_norm - 0.5 * best.chi2,
        chi2_min=None if closed else best.chi2,
        n_data=n_data,
        n_free=best.fit.dimension,
        # Each score of a relation counts as a datum and as a parameter.
        fit_p_value=None if closed else _p_value(best.chi2, max(n_data + n_scores - best.fit.dimension, 1)),
        ln_evidence=evidence,
        ln_evidence_error=None if evidence is None else _evidence_error(run),
        posterior_odds_to_best=odds,
        companion_mass_msun=None if evidence is None else _mass_interval(run),
        driven_by=drivers,
        diagnostics=None if evidence is None else _diagnostics(run),
        best_fit=None if closed else _best_fit(best, context),
        closed_because=best.closed_because if closed else None,
        priors={p.name: p.prior.describe(p.unit) for p in best.fit.branch.parameters},
        seen_star=best.fit.branch.seen.words,
        mass_density=None if evidence is None else mass_density(run),
    )


def _p_value(chi2: float, degrees: int) -> float:
    from scipy.special import chdtrc

    return float(chdtrc(degrees, chi2))


def _evidence_error(run: ScenarioRun) -> float:
    """Error of the ln of the mean evidence of the branches."""
    errors = [0.0 if branch.posterior is None else branch.posterior.ln_evidence_error for branch in run.branches]
    return float(np.sqrt(np.sum((run.branch_weights() * np.array(errors)) ** 2)))


def _mass_interval(run: ScenarioRun) -> tuple[float, float, float]:
    """16th, 50th and 84th percentile of the companion's mass over all branches."""
    masses, weights = [], []
    for branch, share in zip(run.branches, run.branch_weights(), strict=True):
        if branch.posterior is not None:
            masses.append(branch.fit.sample(branch.posterior.x).values["m2_msun"])
            weights.append(share * branch.posterior.weights)
    low, middle, high = weighted_quantiles(np.concatenate(masses), np.concatenate(weights), np.array([0.16, 0.5, 0.84]))
    return float(low), float(middle), float(high)


def weighted_quantiles(values: FloatArray, weights: FloatArray, levels: FloatArray) -> FloatArray:
    """Return quantiles (k,) at ``levels`` in (0, 1) of values (n,) with weights (n,) >= 0."""
    order = np.argsort(values, kind="stable")
    below = np.cumsum(weights[order]) - 0.5 * weights[order]
    return np.asarray(np.interp(levels, below / weights.sum(), values[order]))


def _diagnostics(run: ScenarioRun) -> Diagnostics:
    """Diagnostics of the branch that carries the evidence."""
    posterior = run.branches[int(np.argmax(run.branch_weights()))].posterior
    if posterior is None:
        raise RuntimeError("a closed branch cannot carry the evidence")
    evaluations = sum(branch.posterior.evaluations for branch in run.branches if branch.posterior is not None)
    return Diagnostics(
        round(posterior.effective_sample_size, 1),
        round(posterior.pareto_k, 3) if np.isfinite(posterior.pareto_k) else None,
        evaluations,
        "adaptive importance sampling" + (", second effort" if posterior.efforts > 1 else ""),
        posterior.converged,
    )


def _best_fit(branch: BranchRun, context: Context) -> BestFit:
    """Values and magnitudes at the largest likelihood."""
    sampled = branch.fit.sample(branch.best_x[None])
    values = {name: float(value[0]) for name, value in sampled.values.items()}
    values["optical_light_ratio"] = float(sampled.prediction.optical_ratio[0])
    if context.photocentre_column is not None:
        values["photocentre_mas"] = float(sampled.prediction.photocentre_mas[0])
    values |= predicted_signals(sampled.prediction, context)
    magnitudes = dict(zip(context.engine.bands, sampled.prediction.magnitudes[0].tolist(), strict=True))
    parameters = branch.fit.branch.free_parameters
    edges = [
        parameter.name
        for parameter, x in zip(parameters, branch.best_x, strict=False)
        if abs(x) > EDGE_COORDINATE and parameter.guide is None and not parameter.counts
    ]
    prior = branch.fit.branch.orbit_draws.prior
    if not prior.low * (1.0 + EDGE_MASS) < values["m2_msun"] < prior.high * (1.0 - EDGE_MASS):
        edges.append("companion_mass_msun")
    return BestFit(
        values,
        magnitudes,
        tuple(edges),
        light_ratios(sampled.prediction, context),
        residuals_by_datum(branch, context, sampled.prediction),
        hidden_lights(sampled.prediction, context),
    )


def absent_observations(context: Context, observations: Sequence[Observation]) -> tuple[str, ...]:
    """Return the kinds of observation that were not given."""
    from vetter.observations.base import registered

    used = {observation.name for observation in observations}
    return tuple(kind.name for kind in registered() if kind.name not in used)


def orbit_summary(context: Context, runs: Sequence[ScenarioRun]) -> OrbitSummary:
    """Return the numbers of the header; the seen star's mass is that of its relation at the measured values."""
    orbit = context.system.orbit
    k1 = None if orbit.k1_km_s is None else orbit.k1_km_s.value
    period_d, e = orbit.period_d.value, orbit.eccentricity.value
    if k1 is None:
        return OrbitSummary(period_d, e, None, None, None, None)
    f_msun = float(kepler.mass_function_msun(period_d, k1, e))
    mass = seen_star_mass_msun(runs)
    least = None if mass is None else float(kepler.companion_mass_min_msun(f_msun, mass))
    return OrbitSummary(period_d, e, k1, f_msun, mass, least)


def seen_star_mass_msun(runs: Sequence[ScenarioRun]) -> float | None:
    """Return the seen star's mass at the best fit of the best scenario, or None when nothing fits."""
    best = min(runs, key=lambda run: run.best.chi2).best
    if best.posterior is None:
        return None
    return float(best.fit.sample(best.best_x[None]).values["m1_msun"][0])
