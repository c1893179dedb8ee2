"""Verdicts read back from verdicts.json, so that words and figures need no second evaluation."""

from __future__ import annotations

import json
from collections.abc import Mapping, Sequence
from pathlib import Path
from typing import Any

from vetter.errors import InputError
from vetter.observations.base import Observation
from vetter.observations.base import registered as registered_observations
from vetter.results.verdicts import (
    BestFit,
    Diagnostics,
    Driver,
    HiddenLight,
    MassDensity,
    OrbitSummary,
    ScenarioVerdict,
    Verdicts,
)
from vetter.scenarios.base import registered as registered_scenarios

REMAKE = "Run vetter evaluate SYSTEM.toml --out DIR again and use its verdicts.json."


def read_verdicts(path: Path, system: str, observations: Sequence[Observation]) -> Verdicts:
    """Return the verdicts saved in ``path`` for the named system.

    Raises InputError when the file cannot be read, is no verdicts.json of this version, or is that of another system.
    """
    try:
        found = json.loads(path.read_text())
    except OSError as error:
        raise InputError.single(
            "--from", "", str(path), f"a file that can be read ({error.strerror})", REMAKE
        ) from error
    except (UnicodeDecodeError, json.JSONDecodeError) as error:
        raise InputError.single(str(path), "", None, "JSON as written by vetter evaluate", REMAKE) from error
    name = found.get("system") if isinstance(found, dict) else None
    if name != system:
        raise InputError.single(str(path), "system", name, f"{system!r}, the name in the system file", REMAKE)
    try:
        return verdicts_from(found, observations)
    except (KeyError, TypeError, ValueError) as error:
        expected = "the keys that this version of vetter evaluate writes"
        raise InputError.single(str(path), str(error).strip("'"), None, expected, REMAKE) from error


def verdicts_from(found: Mapping[str, Any], observations: Sequence[Observation]) -> Verdicts:
    """Return verdicts from the content of verdicts.json. Raises KeyError or TypeError where it is not that."""
    return Verdicts(
        found["system"],
        found["version"],
        found["seed"],
        OrbitSummary(**found["orbit"]),
        tuple(found["observations_used"]),
        tuple(observation.describe() for observation in observations),
        tuple(found["observations_absent"]),
        tuple(_row(row) for row in found["scenarios"]),
        dict(found["prior_odds"]),
        tuple(found["cautions"]),
    )


def _row(row: Mapping[str, Any]) -> ScenarioVerdict:
    labels = {kind.name: kind.label for kind in registered_observations()}
    same = ("name", "title", "verdict", "sigma", "ln_likelihood_max", "chi2_min", "n_data", "n_free", "fit_p_value")
    more = ("ln_evidence", "ln_evidence_error", "posterior_odds_to_best", "closed_because", "priors", "seen_star")
    mass, density, diagnostics = row["companion_mass_msun"], row["companion_mass_density"], row["diagnostics"]
    drivers = [(driver["observation"], driver["sigma_without"]) for driver in row["driven_by"]]
    return ScenarioVerdict(
        **{name: row[name] for name in (*same, *more)},
        ordinary=registered_scenarios(on_request=True)[row["name"]].ordinary,
        companion_mass_msun=None if mass is None else (mass[0], mass[1], mass[2]),
        driven_by=tuple(Driver(name, labels[name], sigma) for name, sigma in drivers),
        diagnostics=None if diagnostics is None else Diagnostics(**diagnostics),
        best_fit=_best_fit(row),
        mass_density=None if density is None else MassDensity(tuple(density["edges_msun"]), tuple(density["per_msun"])),
    )


def _best_fit(row: Mapping[str, Any]) -> BestFit | None:
    if row["best_fit"] is None:
        return None
    return BestFit(
        row["best_fit"],
        row["best_fit_magnitudes"],
        tuple(row["at_prior_edge"]),
        row["best_fit_light_ratio"],
        row["best_fit_residuals"],
        tuple(HiddenLight(**star) for star in row["best_fit_hidden_stars"]),
    )
