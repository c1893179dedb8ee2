"""Verdicts made by hand, so that every case of the words can be shown."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from typing import Any

import pytest

from vetter.results.verdicts import BestFit, Diagnostics, Driver, OrbitSummary, ScenarioVerdict, Verdicts, verdict_word

ROW = ScenarioVerdict(
    name="main_sequence",
    title="Luminous main-sequence companion",
    ordinary=True,
    verdict="allowed",
    sigma=0.0,
    ln_likelihood_max=12.5,
    chi2_min=10.0,
    n_data=14,
    n_free=8,
    fit_p_value=0.2,
    ln_evidence=-3.25,
    ln_evidence_error=0.02,
    posterior_odds_to_best=1.0,
    companion_mass_msun=(5.9, 6.2, 6.6),
    driven_by=(),
    diagnostics=Diagnostics(2100.0, 0.3, 50000, "adaptive importance sampling", True),
    best_fit=BestFit({"m2_msun": 6.2, "m1_msun": 1.0, "optical_light_ratio": 0.02}, {"GAIA/GAIA3.G": 12.9}),
    closed_because=None,
    priors={"companion_mass_msun": "log-uniform 0.08 to 60 Msun"},
    seen_star="a dwarf or subgiant",
)

CLOSED = {
    "sigma": None,
    "verdict": "excluded",
    "ln_likelihood_max": None,
    "chi2_min": None,
    "fit_p_value": None,
    "ln_evidence": None,
    "ln_evidence_error": None,
    "companion_mass_msun": None,
    "diagnostics": None,
    "best_fit": None,
    "posterior_odds_to_best": 0.0,
    "closed_because": "the orbit needs more than 1.38 Msun at any inclination",
}

Row = Callable[..., ScenarioVerdict]
Table = Callable[..., Verdicts]


@pytest.fixture
def row() -> Row:
    """Return one row; ``sigma`` sets the verdict, ``without`` (label -> sigma) the drivers, ``closed`` a wall."""

    def make(closed: bool = False, without: dict[str, float] | None = None, **fields: Any) -> ScenarioVerdict:  # noqa: ANN401
        base = {**CLOSED, **fields} if closed else fields
        if "sigma" in fields and "verdict" not in fields:
            base = {**base, "verdict": verdict_word(fields["sigma"]), "chi2_min": 10.0 + fields["sigma"] ** 2}
        drivers = tuple(Driver(label.replace(" ", "_"), label, sigma) for label, sigma in (without or {}).items())
        return replace(ROW, **base, driven_by=drivers)

    return make


@pytest.fixture
def table() -> Table:
    """Return verdicts with these rows."""

    def make(*rows: ScenarioVerdict, **fields: Any) -> Verdicts:  # noqa: ANN401
        whole = Verdicts(
            system="Marlow 7",
            version="0.1.0",
            seed=0,
            orbit=OrbitSummary(212.4, 0.31, 53.2, 3.08, 1.02, 5.1),
            observations_used=("photometry", "distance", "orbit", "light_limit"),
            observations_used_words=("9 magnitudes", "parallax", "orbit", "1 light limit"),
            observations_absent=("seen_mass", "x_ray"),
            scenarios=rows,
            prior_odds={scenario.name: 1.0 for scenario in rows},
            cautions=("A table of likelihoods is not a discovery.",),
        )
        return replace(whole, **fields)

    return make
