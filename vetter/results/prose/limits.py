"""Limits and cautions: what every reader must know, and what this result in particular calls for."""

from __future__ import annotations

from vetter.results.cautions import about_fits, about_sampling
from vetter.results.parameter_words import parameter_words
from vetter.results.prose.document import Sentence, joined, say
from vetter.results.prose.favourable import share_words
from vetter.results.prose.material import Material, in_a_sentence, with_article
from vetter.results.prose.numbers import given_percent
from vetter.results.prose.quoted import quoted
from vetter.results.verdicts import ScenarioVerdict

COMMON = "A table of likelihoods is not a discovery"
"""How the caution begins that this module words itself."""

KEPT = "The seen star was taken as"
"""How a caution on the fits begins that is quoted as it is."""


def limits(material: Material) -> tuple[Sentence, ...]:
    """Return the paragraph of limits and cautions."""
    rows = material.verdicts.scenarios
    reworded = {*about_fits(rows), *about_sampling(rows)}
    found = [
        say(
            "A table of likelihoods is not a discovery. The verdicts hold only for the explanations tried, the priors "
            "and the data given here; an explanation that nobody tried is not excluded by them."
        ),
        *edges(rows),
        *blends(rows),
        *sampling(rows),
    ]
    for place, caution in enumerate(material.verdicts.cautions):
        if caution.startswith(COMMON) or (caution in reworded and not caution.startswith(KEPT)):
            continue
        found.append(quoted(caution, f"cautions.{place}"))
    return tuple(found)


def _standing(rows: tuple[ScenarioVerdict, ...]) -> list[ScenarioVerdict]:
    return [row for row in rows if row.best_fit is not None and row.verdict != "excluded"]


def edges(rows: tuple[ScenarioVerdict, ...]) -> tuple[Sentence, ...]:
    """Return the explanations that stand with a best fit on the edge of a prior."""
    at_edge: dict[str, list[str]] = {}
    for row in _standing(rows):
        for name in row.best_fit.at_edge if row.best_fit is not None else ():
            at_edge.setdefault(parameter_words(name), []).append(in_a_sentence(row))
    if not at_edge:
        return ()
    parts = joined([f"{what} ({', '.join(titles)})" for what, titles in at_edge.items()], between="; ", last="; and ")
    return (say("Some best fits lie on the edge of a prior, which a wider one would move: {parts}.", parts=parts),)


def blends(rows: tuple[ScenarioVerdict, ...]) -> tuple[Sentence, ...]:
    """Return the explanations whose second light would have blended the spectrum."""
    from vetter.observations.spectroscopy import DILUTION_FROM

    parts = []
    for row in _standing(rows):
        ratio = row.best_fit.values.get("optical_light_ratio", 0.0) if row.best_fit is not None else 0.0
        if ratio > DILUTION_FROM:
            share = share_words(f"scenarios.{row.name}.best_fit.optical_light_ratio", ratio)
            parts.append(say(f"{in_a_sentence(row)} ({{share}})", share=share))
    if not parts:
        return ()
    return (
        say(
            "Where the companion adds more than {from_} of the seen star's optical light, a spectrum analysed as that "
            "of one star may be off, and its errors were enlarged: {parts}.",
            from_=given_percent("method.dilution_from", DILUTION_FROM),
            parts=joined(parts),
        ),
    )


def sampling(rows: tuple[ScenarioVerdict, ...]) -> tuple[Sentence, ...]:
    """Return the explanations whose evidence did not reach the wanted precision."""
    poor = [row for row in rows if row.diagnostics is not None and not row.diagnostics.converged]
    if not poor:
        return ()
    names = joined([with_article(row) for row in poor], last=", and of ", between=", of ")
    return (say("The evidence is poorly sampled, and not to be quoted, in the case of {names}.", names=names),)
