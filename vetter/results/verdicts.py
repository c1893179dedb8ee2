"""The result of an evaluation as plain records, and its machine-readable form."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any

EXCLUDED_SIGMA = 5.0
DISFAVOURED_SIGMA = 3.0
NO_FIT_P_VALUE = 1e-4
"""When even the best scenario fits worse than this, the table cannot be read."""


@dataclass(frozen=True)
class Driver:
    """How badly a scenario does without one observation; sigma None where a wall needs no observation."""

    observation: str
    label: str
    sigma_without: float


@dataclass(frozen=True)
class Diagnostics:
    """How far the evidence can be trusted; ``pareto_k`` is None where too few weights are left to tell."""

    effective_sample_size: float
    pareto_k: float | None
    evaluations: int
    method: str
    converged: bool


@dataclass(frozen=True)
class HiddenLight:
    """A star that shines on the companion's orbit; ``band_ratio`` is its flux over the seen star's, by band."""

    kind: str
    teff_k: float
    logg: float
    radius_rsun: float
    mass_msun: float | None
    band_ratio: Mapping[str, float]


@dataclass(frozen=True)
class MassDensity:
    """A posterior of the companion's mass as a histogram: n + 1 edges (Msun) and n densities (per Msun)."""

    edges_msun: tuple[float, ...]
    per_msun: tuple[float, ...]


@dataclass(frozen=True)
class BestFit:
    """The most favourable case of a scenario.

    Attributes
    ----------
    values : parameters and derived quantities by name
    magnitudes : total magnitude per engine band
    at_edge : names of parameters that sit on the edge of their prior
    light_ratio : light beside the seen star over the seen star's, by band and by window
    residuals : observation -> datum -> (model - measured) / error
    hidden_stars : the stars that shine on the companion's orbit
    """

    values: Mapping[str, float]
    magnitudes: Mapping[str, float]
    at_edge: tuple[str, ...] = ()
    light_ratio: Mapping[str, float] = field(default_factory=dict)
    residuals: Mapping[str, Mapping[str, float]] = field(default_factory=dict)
    hidden_stars: tuple[HiddenLight, ...] = ()


@dataclass(frozen=True)
class ScenarioVerdict:
    """One row of the table; the fields are those of verdicts.json."""

    name: str
    title: str
    ordinary: bool
    verdict: str
    sigma: float | None
    ln_likelihood_max: float | None
    chi2_min: float | None
    n_data: int
    n_free: int
    fit_p_value: float | None
    ln_evidence: float | None
    ln_evidence_error: float | None
    posterior_odds_to_best: float
    companion_mass_msun: tuple[float, float, float] | None
    driven_by: tuple[Driver, ...]
    diagnostics: Diagnostics | None
    best_fit: BestFit | None
    closed_because: str | None
    priors: Mapping[str, str]
    seen_star: str
    mass_density: MassDensity | None = None

    def to_dict(self) -> dict[str, Any]:
        """Return the scenario's part of verdicts.json."""
        best = self.best_fit
        diagnostics = self.diagnostics
        return {
            "name": self.name,
            "title": self.title,
            "verdict": self.verdict,
            "sigma": self.sigma,
            "ln_likelihood_max": self.ln_likelihood_max,
            "chi2_min": self.chi2_min,
            "n_data": self.n_data,
            "n_free": self.n_free,
            "fit_p_value": self.fit_p_value,
            "ln_evidence": self.ln_evidence,
            "ln_evidence_error": self.ln_evidence_error,
            "posterior_odds_to_best": self.posterior_odds_to_best,
            "companion_mass_msun": None if self.companion_mass_msun is None else list(self.companion_mass_msun),
            "driven_by": [{"observation": d.observation, "sigma_without": d.sigma_without} for d in self.driven_by],
            "closed_because": self.closed_because,
            "diagnostics": None if diagnostics is None else vars(diagnostics),
            "best_fit": None if best is None else dict(best.values),
            "best_fit_magnitudes": None if best is None else dict(best.magnitudes),
            "at_prior_edge": [] if best is None else list(best.at_edge),
            "best_fit_light_ratio": None if best is None else dict(best.light_ratio),
            "best_fit_residuals": None if best is None else {name: dict(r) for name, r in best.residuals.items()},
            "best_fit_hidden_stars": [] if best is None else [vars(star) for star in best.hidden_stars],
            "companion_mass_density": None if self.mass_density is None else vars(self.mass_density),
            "priors": dict(self.priors),
            "seen_star": self.seen_star,
        }


@dataclass(frozen=True)
class OrbitSummary:
    """The header's numbers; None where the orbit does not give them."""

    period_d: float
    eccentricity: float
    k1_km_s: float | None
    mass_function_msun: float | None
    seen_star_msun: float | None
    companion_min_msun: float | None


@dataclass(frozen=True)
class Verdicts:
    """Everything an evaluation found out about one system.

    Attributes
    ----------
    system, version, seed : what was evaluated, by which version, from which seed
    orbit : the numbers of the printed header
    observations_used, observations_used_words : names as in the files, and as printed
    observations_absent : kinds of observation that were not given
    scenarios : one verdict each, ordinary explanations first
    prior_odds : weights of the scenarios that the posterior odds include
    cautions : what a reader must know, computed from this result
    """

    system: str
    version: str
    seed: int
    orbit: OrbitSummary
    observations_used: tuple[str, ...]
    observations_used_words: tuple[str, ...]
    observations_absent: tuple[str, ...]
    scenarios: tuple[ScenarioVerdict, ...]
    prior_odds: Mapping[str, float]
    cautions: tuple[str, ...]

    @property
    def best(self) -> ScenarioVerdict | None:
        """The scenario with the largest likelihood, or None when every one is walled off."""
        fitted = [s for s in self.scenarios if s.chi2_min is not None]
        return min(fitted, key=lambda s: s.chi2_min or 0.0) if fitted else None

    @property
    def nothing_fits(self) -> bool:
        """Whether the data fit no scenario, so that the table must not be read."""
        best = self.best
        return best is None or (best.fit_p_value is not None and best.fit_p_value < NO_FIT_P_VALUE)

    def scenario(self, name: str) -> ScenarioVerdict:
        """Return the verdict on one scenario. Raises KeyError when it was not evaluated."""
        for verdict in self.scenarios:
            if verdict.name == name:
                return verdict
        raise KeyError(name)

    def to_dict(self) -> dict[str, Any]:
        """Return the content of verdicts.json."""
        return {
            "system": self.system,
            "version": self.version,
            "seed": self.seed,
            "orbit": vars(self.orbit),
            "observations_used": list(self.observations_used),
            "observations_absent": list(self.observations_absent),
            "nothing_fits": self.nothing_fits,
            "headline": headline(self),
            "scenarios": [scenario.to_dict() for scenario in self.scenarios],
            "prior_odds": dict(self.prior_odds),
            "cautions": list(self.cautions),
        }


def verdict_word(sigma: float | None) -> str:
    """Return the verdict for a sigma; None means that every point is walled off."""
    if sigma is None or sigma >= EXCLUDED_SIGMA:
        return "excluded"
    return "disfavoured" if sigma >= DISFAVOURED_SIGMA else "allowed"


def sigma_text(sigma: float, decimals: int = 1) -> str:
    """Return a sigma rounded to ``decimals``; to one more, if need be downwards, where it would cross a border."""
    for shown in (f"{sigma:.{decimals}f}", f"{sigma:.{decimals + 1}f}"):
        if verdict_word(float(shown)) == verdict_word(sigma):
            return shown
    scale = 10.0 ** (decimals + 1)
    return f"{math.floor(sigma * scale) / scale:.{decimals + 1}f}"


def headline(verdicts: Verdicts) -> str:
    """Return the one sentence that sums the table up, never more than the table says."""
    if verdicts.nothing_fits:
        return "No scenario fits these data; check them before reading the table."
    ordinary = [s for s in verdicts.scenarios if s.ordinary]
    standing = [s for s in ordinary if s.verdict != "excluded"]
    if not ordinary:
        return "No ordinary explanation was tried."
    if standing:
        names = _joined([f"{s.title.lower()} ({s.verdict})" for s in standing])
        return f"Not excluded among the ordinary explanations tried: {names}."
    weakest = weakest_exclusion(ordinary)
    sentence = "Every ordinary explanation tried is excluded"
    if weakest is None:
        return f"{sentence}, whatever single observation is left out."
    sigma, label = weakest
    if sigma >= EXCLUDED_SIGMA:
        return f"{sentence}; without any single observation the weakest exclusion is {sigma_text(sigma)} sigma."
    left = f"the weakest exclusion is {sigma_text(sigma)} sigma."
    return f"{sentence}, but one observation carries it: without {label} {left}"


def weakest_exclusion(scenarios: list[ScenarioVerdict]) -> tuple[float, str] | None:
    """Return the smallest sigma_without over scenarios and what was left out; None when walls alone exclude all."""
    pairs = [(driver.sigma_without, driver.label) for scenario in scenarios for driver in scenario.driven_by]
    return min(pairs) if pairs else None


def _joined(items: list[str]) -> str:
    return items[0] if len(items) == 1 else ", ".join(items[:-1]) + " and " + items[-1]
