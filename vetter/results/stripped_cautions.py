"""What must be said while a stripped seen star is not excluded: how briefly it lasts, and what would close it."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import replace
from typing import TYPE_CHECKING

import numpy as np

from vetter.inference import importance, optimise
from vetter.inference.importance import Posterior
from vetter.observations.spectroscopy import SpectroscopyObservation
from vetter.results.best_cases import BestCase
from vetter.results.plain_numbers import two_digits
from vetter.results.verdicts import EXCLUDED_SIGMA
from vetter.scenarios.fit import Fit
from vetter.stars import bloated
from vetter.stars.empirical_mass import torres_mass_msun
from vetter.stars.main_sequence import lifetime_myr
from vetter.stars.properties import TEFF_SUN_K
from vetter.system.model import Measurement

if TYPE_CHECKING:
    from vetter.evaluation import BranchRun, ScenarioRun

NAME = "stripped_primary"

LOGG_ERRORS = (0.2, 0.1, 0.05, 0.03, 0.02, 0.01)
"""Errors (dex) that are tried; the best spectra of single stars reach about 0.02 (common practice, no source)."""

PRIOR_POINTS, STARTS = 8192, 16
"""Of so many prior points, so many of the best are polished for each supposed log g."""

_BISECTIONS = 40


def stripped_cautions(runs: Sequence[ScenarioRun], cases: Sequence[BestCase]) -> list[str]:
    """Return the cautions while ``stripped_primary`` stands."""
    case = next((case for case in cases if case.row.name == NAME), None)
    run = next((run for run in runs if run.scenario.name == NAME), None)
    if case is None or run is None or not case.stands:
        return []
    return [*lifetime_caution(case), *gravity_caution(run, cases)]


def lifetime_caution(case: BestCase) -> list[str]:
    """Return how short the stripped phase is, or that no core explains the luminosity; nothing where it is long."""
    seen = case.prediction
    mass, teff, logg, feh = (float(x[0]) for x in (seen.mass_msun, seen.teff_k, seen.logg, seen.feh))
    luminosity = float(seen.radius_rsun[0]) ** 2 * (teff / TEFF_SUN_K) ** 4
    core = core_mass_msun(luminosity, feh)
    best = f"The best {case.title} has {two_digits(mass)} Msun and {two_digits(luminosity)} Lsun"
    if core >= mass:
        return [f"{best}: a core that shines so much has {two_digits(core)} Msun, more than the whole star."]
    lasts = float(bloated.lifetime_myr(mass - core, luminosity))
    ordinary = float(lifetime_myr(float(torres_mass_msun(teff, logg, feh)), feh))
    if lasts >= ordinary:
        return []
    return [
        f"{best}: its envelope of {two_digits(mass - core)} Msun lasts {two_digits(lasts)} Myr, "
        f"{two_digits(100.0 * lasts / ordinary)} % of the life of an ordinary star of that look. "
        "Such a star must be met in passing; no prior here says so."
    ]


def core_mass_msun(luminosity_lsun: float, feh: float) -> float:
    """Return the lightest core (Msun, held inside its range) that shines so brightly, by bisection."""
    low, high = np.log(bloated.CORE_RANGE_MSUN)
    for _ in range(_BISECTIONS):
        middle = 0.5 * (low + high)
        fainter = float(bloated.bloated_luminosity_lsun(np.exp(middle), feh)) < luminosity_lsun
        low, high = (middle, high) if fainter else (low, middle)
    return float(np.exp(0.5 * (low + high)))


def gravity_caution(run: ScenarioRun, cases: Sequence[BestCase]) -> list[str]:
    """Return the error of log g that would exclude a stripped seen star, found by fitting it again.

    The value supposed is that of the best other explanation; everything else stays as it was measured. A tighter log g
    alone may not do: a companion that shines makes the spectrum, and so log g, less sure. Nothing is said where log g
    is known better than any error tried.
    """
    other = min(
        (c for c in cases if c.prediction.ordinary_seen_star), key=lambda c: c.row.chi2_min or 0.0, default=None
    )
    spectrum = None if other is None else _spectrum(other.branch)
    if other is None or spectrum is None or spectrum.logg is None or spectrum.logg.error <= LOGG_ERRORS[-1]:
        return []
    value = float(other.prediction.logg[0])

    def sigma(error: float) -> float:
        supposed = Measurement(value, error)
        least = min(_least_chi2(b, b.posterior, supposed) for b in run.branches if b.posterior is not None)
        fit = with_gravity(other.branch.fit, supposed)
        reference = fit.evaluate(other.branch.best_x[None])
        chi2 = float(np.sum(reference.residuals**2) + np.sum(reference.nuisances**2))
        return float(np.sqrt(max(least - chi2, 0.0)))

    found = largest_error(sigma, spectrum.logg.error)
    title = run.scenario.title[0].lower() + run.scenario.title[1:]
    if found is None:
        return [
            f"No better log g would exclude the {title}: known to {LOGG_ERRORS[-1]:g} dex it would still leave it at "
            f"{sigma(LOGG_ERRORS[-1]):.1f} sigma (tried at {value:.2f}, that of the {other.title})."
        ]
    return [
        f"The {title} would be excluded by log g {value:.2f}, that of the {other.title}, with an error of {found:g} "
        f"dex (now {spectrum.logg.error:g})."
    ]


def largest_error(sigma: Callable[[float], float], now: float) -> float | None:
    """Return the largest of ``LOGG_ERRORS`` below the present error that excludes, or None when none does.

    ``sigma`` maps an error to how badly the explanation would then do; it falls as the error grows.
    """
    smaller = [error for error in LOGG_ERRORS if error < now]
    if not smaller or sigma(smaller[-1]) < EXCLUDED_SIGMA:
        return None
    low, high = 0, len(smaller) - 1
    while low < high:
        middle = (low + high) // 2
        low, high = (low, middle) if sigma(smaller[middle]) >= EXCLUDED_SIGMA else (middle + 1, high)
    return smaller[high]


def with_gravity(fit: Fit, logg: Measurement) -> Fit:
    """Return the fit as it would be with another measurement of log g."""
    observations = tuple(
        replace(observation, logg=logg) if isinstance(observation, SpectroscopyObservation) else observation
        for observation in fit.observations
    )
    return replace(fit, observations=observations)


def _spectrum(branch: BranchRun) -> SpectroscopyObservation | None:
    return next((o for o in branch.fit.observations if isinstance(o, SpectroscopyObservation)), None)


def _least_chi2(branch: BranchRun, posterior: Posterior, logg: Measurement) -> float:
    """Least sum of squares of a branch with another log g.

    From its best fit, its modes, and the prior points that fit best then: these may belong to quite another case, such
    as a companion that outshines the seen star, which the present data leave no weight.
    """
    fit = with_gravity(branch.fit, logg)
    points = importance.prior_points(fit.dimension, PRIOR_POINTS, np.random.default_rng(0))
    found = fit.evaluate(points)
    chi2 = np.sum(found.residuals**2, axis=1) + np.sum(found.nuisances**2, axis=1)
    chi2 = np.where(np.isfinite(found.ln_prior_ratio) & np.isfinite(chi2), chi2, np.inf)
    starts = np.vstack([branch.best_x, posterior.modes, points[np.argsort(chi2)[:STARTS]]])
    use = np.ones((len(starts), found.residuals.shape[1]))
    return float(optimise.minimise(fit, starts, use, prior=False).chi2.min())
