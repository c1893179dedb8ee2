"""What a reader must know before quoting a table: computed from this result, not canned."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

from vetter.light.user_grids import SHIPPED
from vetter.observations.base import Observation
from vetter.observations.spectroscopy import DILUTION_FROM
from vetter.observations.velocities import epoch_cautions
from vetter.results.age_cautions import age_cautions
from vetter.results.best_cases import best_cases
from vetter.results.dust_caution import dust_caution
from vetter.results.fit_cautions import (
    extrapolation_cautions,
    missed_cautions,
    parallax_cautions,
    significance_cautions,
)
from vetter.results.parameter_words import parameter_words
from vetter.results.stripped_cautions import stripped_cautions
from vetter.results.verdicts import ScenarioVerdict
from vetter.scenarios.context import ASTROMETRY_BAND, Context, ebv_max_mag
from vetter.system.keys import SCENARIO_NAMES

if TYPE_CHECKING:
    from vetter.evaluation import ScenarioRun

SOLAR_TABLE_FEH = 0.3
"""Beyond this |[Fe/H]| what metallicity does to the light is worth a word."""


def cautions(
    context: Context, observations: Sequence[Observation], runs: Sequence[ScenarioRun], rows: Sequence[ScenarioVerdict]
) -> list[str]:
    """Return the cautions in the order of their weight."""
    said = [
        "A table of likelihoods is not a discovery: the verdicts hold only for the explanations, priors and data "
        "given here. Excluded means 5 sigma or more, disfavoured 3 to 5.",
    ]
    said += _not_tried(runs)
    said += _about_input(context)
    said += significance_cautions(context.system)
    for observation in observations:
        said += observation.cautions(context.system)
    cases = best_cases(runs, rows)
    said += parallax_cautions(context, cases) + missed_cautions(observations, cases)
    said += about_fits(rows) + extrapolation_cautions(context, cases)
    said += age_cautions(context.system, cases) + stripped_cautions(runs, cases)
    said += dust_caution(context, observations, cases)
    for observation in observations:
        said += observation.report({case.title: case.prediction for case in cases if case.stands})
    said += about_sampling(rows)
    return said


def _not_tried(runs: Sequence[ScenarioRun]) -> list[str]:
    """Explanations that exist but were not run."""
    tried = {run.scenario.name for run in runs}
    missing = [name.replace("_", " ") for name in SCENARIO_NAMES if name not in tried]
    if not missing:
        return []
    return [f"Not tried, and so not excluded: {', '.join(missing)}."]


def _about_input(context: Context) -> list[str]:
    """Things the input left open, or outside the range of the tables."""
    system = context.system
    said = epoch_cautions(system)
    if not system.orbit.eccentricity_given:
        said.append("No eccentricity was given: the orbit was taken as circular.")
    if system.orbit.thiele_innes is not None and system.orbit.photocentre_band is None:
        said.append(f"No band was given for the Thiele-Innes elements: {ASTROMETRY_BAND} was taken.")
    if system.extinction is None:
        said.append(f"Nothing was given on dust: E(B-V) was free between 0 and {ebv_max_mag(system):g} mag.")
    said += light_cautions(context)
    if system.primary.teff_k is None:
        said.append("No Teff was given: the seen star's kind was left to the magnitudes.")
    return said


def light_cautions(context: Context) -> list[str]:
    """Whose atmospheres were used, and which bands do not know of the seen star's metallicity."""
    engine, feh = context.engine, context.system.primary.feh
    said = []
    if engine.grid != SHIPPED:
        said.append(f"The light of stars is that of your own atmospheres {engine.grid!r} where they reach.")
    solar = [band for band in engine.bands if not engine.metallicity_known(band)]
    if feh is not None and abs(feh.value) > SOLAR_TABLE_FEH and solar:
        said.append(
            f"The seen star has [Fe/H] {feh.value:+.2f}, but outside 470-1000 nm the light is that of solar "
            f"composition; the model error was enlarged in {', '.join(solar)}."
        )
    return said


def about_fits(rows: Sequence[ScenarioVerdict]) -> list[str]:
    """Best fits on the edge of a prior, and spectra that a second star would have blended."""
    edges, blended = [], []
    for row in rows:
        if row.best_fit is None or row.verdict == "excluded":
            continue
        if row.best_fit.at_edge:
            names = ", ".join(map(parameter_words, row.best_fit.at_edge))
            edges.append(f"{row.title.lower()} ({names})")
        ratio = row.best_fit.values["optical_light_ratio"]
        if ratio > DILUTION_FROM:
            blended.append(f"{row.title.lower()} ({100 * ratio:.0f} %)")
    said = []
    if edges:
        said.append(f"The best fit sits on the edge of a prior for: {'; '.join(edges)}.")
    if blended:
        said.append(
            "Where the companion would add more than a tenth of the seen star's optical light, a spectrum analysed as "
            f"one star may be off, and its errors were enlarged: {'; '.join(blended)}."
        )
    giants = [row for row in rows if row.best_fit is not None and row.seen_star.startswith("a giant")]
    if giants:
        masses = ", ".join(f"{r.best_fit.values['m1_msun']:.2g} ({r.title.lower()})" for r in giants if r.best_fit)
        said.append(
            f"The seen star was taken as {giants[0].seen_star}: its mass decides which masses are closed. "
            f"Mass at the best fits, in Msun: {masses}."
        )
    return said


def about_sampling(rows: Sequence[ScenarioVerdict]) -> list[str]:
    """Evidences that did not reach the wanted precision."""
    poor = []
    for row in rows:
        if row.diagnostics is not None and not row.diagnostics.converged:
            k = row.diagnostics.pareto_k
            shape = "unknown" if k is None else f"{k:.2f}"
            effective = row.diagnostics.effective_sample_size
            poor.append(f"{row.title.lower()} (effective sample {effective:.0f}, Pareto k {shape})")
    return [f"The evidence is poorly sampled and not to be quoted for: {'; '.join(poor)}."] if poor else []
