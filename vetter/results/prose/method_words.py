"""How the explanations were compared: light, stars, priors, and what counts as excluded."""

from __future__ import annotations

import re

import numpy as np

from vetter.light.user_grids import SHIPPED
from vetter.observations.photometry import model_errors_mag
from vetter.results.prose.data_words import count_of
from vetter.results.prose.document import Citation, Name, Sentence, joined, say
from vetter.results.prose.material import Material
from vetter.results.prose.numbers import given, plain
from vetter.results.verdicts import DISFAVOURED_SIGMA, EXCLUDED_SIGMA, ScenarioVerdict

PRIOR = re.compile(r"^(log-uniform|uniform) (\S+) to (\S+)(?: (\w+))?$")


def method(material: Material) -> tuple[Sentence, ...]:
    """Return the paragraph on method, priors and criterion."""
    return (
        fit_sentence(material),
        light_sentence(material),
        *star_sentences(material),
        *prior_sentence(material),
        *criterion(),
    )


def fit_sentence(material: Material) -> Sentence:
    """Return how many explanations were fitted to what."""
    rows = material.verdicts.scenarios
    if len(rows) == 1:
        return say(
            "One explanation was fitted to all of these data at once; no other was tried, so its distance from the "
            "best fit says nothing."
        )
    return say(
        "Each of {count} explanations was fitted to all of these data at once, the seen star, its distance and its "
        "reddening being free parameters in every one of them.",
        count=count_of("method.explanations", len(rows)),
    )


def light_sentence(material: Material) -> Sentence:
    """Return where the light comes from, and how large the error of a synthetic magnitude was taken to be."""
    engine = material.context.engine
    errors = model_errors_mag(material.system, engine)
    measured = sorted({engine.bands.index(m.band) for m in material.system.magnitudes})
    low, high = float(np.min(errors[measured])), float(np.max(errors[measured]))
    grid = (
        say("the model atmospheres of {kurucz}", kurucz=Citation(("kurucz1993",), in_text=True))
        if engine.grid == SHIPPED
        else say("our own grid of model atmospheres ({name})", name=Name(engine.grid))
    )
    return say(
        "Synthetic magnitudes rest on {grid}, below {cool} on the spectra of {pickles}, and for white dwarfs on the "
        "tables of {bedard}, reddened by the law of {gordon} with {RV} = {r_v}; a model error of {errors}, according "
        "to band, was added in quadrature to the errors of the photometry.",
        grid=grid,
        cool=given("method.cool_stars_below_k", 4250.0, "K"),
        pickles=Citation(("pickles1998",), in_text=True),
        bedard=Citation(("bedard2020",), in_text=True),
        gordon=Citation(("gordon2023",), in_text=True),
        r_v=given("method.r_v", engine.r_v),
        errors=_range("method.model_error", low, high),
    )


def _range(key: str, low: float, high: float) -> Sentence:
    first, last = plain(f"{key}.low_mag", low, 1), plain(f"{key}.high_mag", high, 1, "mag")
    if first.shown == last.shown:
        return (last,)
    return say("{low}{dash}{high}", low=first, high=last)


MAIN_SEQUENCE_USERS = ("main_sequence", "inner_pair", "inner_pair_with_white_dwarf", "stripped_primary")


def star_sentences(material: Material) -> tuple[Sentence, ...]:
    """Return where the masses and radii come from: of the seen star, and of companions on the main sequence."""
    rows = material.verdicts.scenarios
    found = []
    kinds = dict.fromkeys(row.seen_star for row in rows if row.name != "stripped_primary")
    if any("Torres" in words for words in kinds):
        found.append(
            say(
                "As a dwarf or subgiant the seen star has the mass that its {Teff}, {logg} and {FeH} give by the "
                "relation of {torres}, with the scatter of that relation.",
                torres=Citation(("torres2010",), in_text=True),
            )
        )
    giants = [row for row in rows if row.seen_star.startswith("a giant") and "mass_msun" in row.priors]
    if giants:
        prior = prior_words(giants[0], "mass_msun")
        found.append(say("As a giant the seen star has any mass, {prior}.", prior=prior))
    largest = material.system.assumptions.companion_to_seen_light_max
    found.append(
        say(
            "A companion that outshines the seen star in the optical by more than a factor of {largest} is not "
            "allowed: it would be the star that is seen.",
            largest=given("assumptions.companion_to_seen_light_max", largest),
        )
    )
    if any(row.name in MAIN_SEQUENCE_USERS for row in rows):
        found.append(
            say(
                "Companions on the main sequence have the luminosity and radius of {tout}, at low mass those of "
                "{pecaut}, with the scatter of real stars about them as a free parameter.",
                tout=Citation(("tout1996", "hurley2000"), in_text=True),
                pecaut=Citation(("pecaut2013",), in_text=True),
            )
        )
    return tuple(found)


def prior_sentence(material: Material) -> tuple[Sentence, ...]:
    """Return the priors that all explanations share."""
    rows = [row for row in material.verdicts.scenarios if row.priors]
    if not rows:
        return ()
    priors = rows[0].priors
    parts = []
    if "L = " in priors.get("distance_pc", ""):
        length = float(priors["distance_pc"].split("L = ")[1].split()[0])
        parts.append(
            say(
                "a distance prior {space_density} with {scale_length} = {length} {cite}",
                length=given("priors.distance_scale_pc", length, "pc"),
                cite=Citation(("bailerjones2015",)),
            )
        )
    if "ebv_mag" in priors:
        parts.append(say("a prior on {EBV} that is {prior}", prior=prior_words(rows[0], "ebv_mag", "priors")))
    if "cos_inclination" in priors:
        parts.append(say("random orientations of the orbit"))
    return (say("All share {parts}.", parts=joined(parts, last=", and ")),) if parts else ()


def prior_words(row: ScenarioVerdict, parameter: str, prefix: str = "") -> Sentence:
    """Return a prior of a row in words: ``log-uniform between 0.08 and 60 Msun``."""
    words = row.priors[parameter]
    match = PRIOR.match(words)
    if match is None:
        return (Name(words),)
    key = f"{prefix or f'scenarios.{row.name}.priors'}.{parameter}"
    return say(
        "{kind} between {low} and {high}",
        kind=match[1],
        low=given(f"{key}.low", float(match[2])),
        high=given(f"{key}.high", float(match[3]), match[4] or ""),
    )


def criterion() -> tuple[Sentence, ...]:
    """Return what counts as excluded."""
    excluded, disfavoured = EXCLUDED_SIGMA, DISFAVOURED_SIGMA
    return (
        say(
            "For each we quote {root_of_two_drop} in units of {sigma}, by how much its most favourable case falls "
            "short of the best of all explanations. We call an explanation excluded at {excluded} or more, disfavoured "
            "between {low} and {high}, and allowed otherwise.",
            excluded=given("method.excluded_sigma", excluded, "sigma"),
            low=given("method.disfavoured_sigma", disfavoured),
            high=given("method.excluded_sigma", excluded, "sigma"),
        ),
        say(
            "Priors do not enter that number; they enter the evidence {lnZ}, computed by adaptive importance sampling "
            "and checked with the diagnostic of {vehtari}.",
            vehtari=Citation(("vehtari2024",), in_text=True),
        ),
    )
