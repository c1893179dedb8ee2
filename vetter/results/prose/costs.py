"""What an explanation has to accept: the data and relations that its best case misses, and the best of all does not."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from typing import NamedTuple

from vetter.results.prose.data_words import value_of, window
from vetter.results.prose.document import Citation, Name, Number, Sentence, joined, say
from vetter.results.prose.material import Material, observation_words
from vetter.results.prose.numbers import given_percent, plain, significant, temperature
from vetter.results.prose.symbols import band_label
from vetter.results.verdicts import BestFit, ScenarioVerdict

WORTH_A_WORD = 2.0
"""A datum is named from this many sigma on ..."""

SHARE_WORTH_A_WORD = 0.04
"""... and from this share of the explanation's whole loss of chi^2 on."""

MOST_NAMED = 3

SCORES: Mapping[str, tuple[str, str]] = {
    "mass_score": ("a seen star", "the mass relation of {torres}"),
    "luminosity_score": ("a seen star", "the mass--luminosity relation of dwarfs"),
    "radius_score": ("a seen star", "the mass--radius relation of dwarfs"),
    "companion_luminosity_score": ("a companion", "its mass--luminosity relation"),
    "companion_radius_score": ("a companion", "its mass--radius relation"),
}
"""Scores of published relations: which star lies off which relation."""


class Cost(NamedTuple):
    """One misfit: observation (or ``relations``), datum, residual here, and how much chi^2 it loses to the best."""

    observation: str
    datum: str
    residual: float
    loss: float


def costs(material: Material, row: ScenarioVerdict) -> list[Cost]:
    """Return what a row misses more than the best explanation does, dearest first."""
    best = material.best
    if row.best_fit is None or best is None or best.best_fit is None:
        return []
    found = [
        Cost(observation, datum, residual, residual**2 - _residual(best.best_fit, observation, datum) ** 2)
        for observation, data in row.best_fit.residuals.items()
        for datum, residual in data.items()
    ]
    for name, value in row.best_fit.values.items():
        if name.endswith("_score"):
            found.append(Cost("relations", name, value, value**2 - best.best_fit.values.get(name, 0.0) ** 2))
    return sorted(found, key=lambda cost: -cost.loss)


def _residual(best: BestFit, observation: str, datum: str) -> float:
    return best.residuals.get(observation, {}).get(datum, 0.0)


def named_costs(material: Material, row: ScenarioVerdict) -> Sentence:
    """Return the dearest costs as a list in prose, the magnitudes together; empty where nothing is worth a word."""
    loss = (row.sigma or 0.0) ** 2
    found: list[Cost] = []
    for cost in costs(material, row):
        worth = abs(cost.residual) >= WORTH_A_WORD and cost.loss >= max(SHARE_WORTH_A_WORD * loss, 1.0)
        if worth and not (cost.observation == "photometry" and any(c.observation == "photometry" for c in found)):
            found.append(cost)
    return joined([cost_words(material, row, cost) for cost in found[:MOST_NAMED]])


def cost_words(material: Material, row: ScenarioVerdict, cost: Cost) -> Sentence:
    """Return one cost as a noun phrase."""
    if row.best_fit is None:
        raise ValueError("an explanation that is closed by a wall has no costs")
    writer = WRITERS.get(cost.observation)
    if writer is not None:
        return writer(material, row, row.best_fit, cost)
    words = observation_words(cost.observation, material.system)
    return say("{words} missed by {sigmas}", words=words, sigmas=_sigmas(row, cost))


def _key(row: ScenarioVerdict, cost: Cost) -> str:
    return f"scenarios.{row.name}.best_fit_residuals.{cost.observation}.{cost.datum}"


def _sigmas(row: ScenarioVerdict, cost: Cost) -> Number:
    return Number(_key(row, cost), abs(cost.residual), f"{abs(cost.residual):.1f}", unit="sigma")


def _above(residual: float) -> str:
    return "above" if residual > 0.0 else "below"


def _photometry(material: Material, row: ScenarioVerdict, best: BestFit, cost: Cost) -> Sentence:
    band = cost.datum.removeprefix("limit ")
    name = Name(band_label(band))
    if cost.datum.startswith("limit "):
        return say("a source too bright for the limit in {band} ({s})", band=name, s=_sigmas(row, cost))
    measured = next(m.mag for m in material.system.magnitudes if m.band == band)
    off = best.magnitudes[band] - measured
    return say(
        f"a total {{mag}} too {'bright' if off < 0.0 else 'faint'} in {{band}} ({{s}})",
        mag=plain(f"{_key(row, cost)}.mag", abs(off), 2, "mag"),
        band=name,
        s=_sigmas(row, cost),
    )


def _distance(material: Material, row: ScenarioVerdict, best: BestFit, cost: Cost) -> Sentence:
    value = plain(f"scenarios.{row.name}.best_fit.distance_pc", best.values["distance_pc"], 3, "pc")
    what = "the measured one" if material.system.distance.parallax_mas is None else "the parallax"
    return say(f"a distance of {{value}}, {{s}} off {what}", value=value, s=_sigmas(row, cost))


def _simple(template: str, parameter: str, unit: str) -> Callable[[Material, ScenarioVerdict, BestFit, Cost], Sentence]:
    """Return a writer for one measured quantity that is also a value of the best fit."""

    def write(material: Material, row: ScenarioVerdict, best: BestFit, cost: Cost) -> Sentence:
        value = plain(f"scenarios.{row.name}.best_fit.{parameter}", best.values[parameter], 3, unit)
        return say(template, value=value, s=_sigmas(row, cost), above=_above(cost.residual))

    return write


def _spectroscopy(material: Material, row: ScenarioVerdict, best: BestFit, cost: Cost) -> Sentence:
    key = f"scenarios.{row.name}.best_fit.{cost.datum}"
    value = best.values[cost.datum]
    shown: Number = temperature(key, value) if cost.datum == "teff_k" else Number(key, value, f"{value:.2f}")
    symbol = {"teff_k": "{Teff}", "logg": "{logg}", "feh": "{FeH}"}[cost.datum]
    return say(
        f"a seen star with {symbol} = {{value}}, {{s}} {_above(cost.residual)} the measured value",
        value=shown,
        s=_sigmas(row, cost),
    )


def _photocentre(material: Material, row: ScenarioVerdict, best: BestFit, cost: Cost) -> Sentence:
    measured = material.system.orbit.photocentre_mas
    if measured is None or "photocentre_mas" not in best.values:
        return say("the photocentre missed by {s}", s=_sigmas(row, cost))
    return say(
        "an orbit of the photocentre of {value} where {measured} was measured ({s})",
        value=plain(f"scenarios.{row.name}.best_fit.photocentre_mas", best.values["photocentre_mas"], 3, "mas"),
        measured=value_of("data.photocentre_mas", measured, "mas"),
        s=_sigmas(row, cost),
    )


def _light_limit(material: Material, row: ScenarioVerdict, best: BestFit, cost: Cost) -> Sentence:
    place = 0 if cost.datum == "light_limit" else int(cost.datum.rsplit(" ", 1)[1]) - 1
    limit = material.system.light_limits[place]
    key = f"data.light_limit.{place}"
    return say(
        "more light at {window} than the limit of {limit} allows ({s})",
        window=window(key, limit),
        limit=given_percent(f"{key}.ratio_max", limit.ratio_max),
        s=_sigmas(row, cost),
    )


def _relations(material: Material, row: ScenarioVerdict, best: BestFit, cost: Cost) -> Sentence:
    if cost.datum not in SCORES:
        return say("a published relation missed by {s}", s=_sigmas(row, cost))
    what, relation = SCORES[cost.datum]
    side = "below" if cost.residual < 0.0 else "above"
    return say(
        f"{what} {{n}} times the scatter {side} {relation}",
        n=Number(_key(row, cost), abs(cost.residual), significant(abs(cost.residual), 2)),
        torres=Citation(("torres2010",), in_text=True),
    )


WRITERS: Mapping[str, Callable[[Material, ScenarioVerdict, BestFit, Cost], Sentence]] = {
    "photometry": _photometry,
    "distance": _distance,
    "dust": _simple("a reddening {EBV} = {value}, {s} {above} the measured value", "ebv_mag", "mag"),
    "spectroscopy": _spectroscopy,
    "seen_mass": _simple("a seen star of {value}, {s} {above} the outside estimate", "m1_msun", "Msun"),
    "orbit": _simple("{K1} = {value}, {s} {above} the measured value", "k1_km_s", "km_s"),
    "inclination": _simple("an inclination of {value}, {s} {above} the measured one", "inclination_deg", "deg"),
    "photocentre": _photocentre,
    "light_limit": _light_limit,
    "relations": _relations,
}
"""Who writes which observation; one that is not here is named with its sigma."""
