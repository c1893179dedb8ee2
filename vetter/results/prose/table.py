"""The table of the section: one row per explanation."""

from __future__ import annotations

from vetter.results.prose.document import Name, Number, Sentence, Symbol, Table, say
from vetter.results.prose.material import Material
from vetter.results.prose.numbers import interval, measured, sigma
from vetter.results.verdicts import ScenarioVerdict

LABEL = "explanations"

BLANK: Sentence = (Symbol("none"),)


def table(material: Material, rows: tuple[ScenarioVerdict, ...]) -> Table:
    """Return the table of these rows."""
    heads = (
        say("Explanation"),
        say("Verdict"),
        (Symbol("sigma"),),
        say("{M2} ({Msun})"),
        (Symbol("lnZ"),),
        say("Weakest without"),
    )
    caption = (
        say("Explanations of the companion of {name}.", name=Name(material.system.name)),
        say(
            "The third column is {root_of_two_drop}, how much worse the most favourable case fits than the best of "
            "all; {M2} is the median of the posterior with its central one-sigma interval; {lnZ} is the evidence. The "
            "last column names the observation whose loss weakens a verdict most, with what is left.",
        ),
    )
    return Table(LABEL, heads, tuple(_row(material, row) for row in rows), caption)


def _row(material: Material, row: ScenarioVerdict) -> tuple[Sentence, ...]:
    return (
        say(row.title),
        BLANK if material.verdicts.nothing_fits else say(row.verdict),
        _sigma(row),
        _mass(row),
        _evidence(row),
        _weakest(row),
    )


def _sigma(row: ScenarioVerdict) -> Sentence:
    if row.sigma is None:
        return BLANK
    number = sigma(f"scenarios.{row.name}.sigma", row.sigma)
    # The unit stands in the head of the column.
    return (Number(number.key, number.value, number.shown),)


def _mass(row: ScenarioVerdict) -> Sentence:
    if row.companion_mass_msun is None:
        return BLANK
    return (interval(f"scenarios.{row.name}.companion_mass_msun", *row.companion_mass_msun),)


def _evidence(row: ScenarioVerdict) -> Sentence:
    if row.ln_evidence is None or row.ln_evidence_error is None:
        return BLANK
    return (measured(f"scenarios.{row.name}.ln_evidence", row.ln_evidence, max(row.ln_evidence_error, 0.01)),)


def _weakest(row: ScenarioVerdict) -> Sentence:
    if row.verdict == "allowed":
        return BLANK
    if row.sigma is None or not row.driven_by:
        return say("no case is possible") if row.closed_because else BLANK
    driver = min(row.driven_by, key=lambda driver: driver.sigma_without)
    number = sigma(f"scenarios.{row.name}.sigma_without.{driver.observation}", driver.sigma_without)
    return say(f"{driver.label} ({{left}})", left=number)
