"""The section: which paragraphs there are, in which order."""

from __future__ import annotations

from collections.abc import Sequence

from vetter.results.prose.configuration_words import configuration
from vetter.results.prose.data_words import opening
from vetter.results.prose.document import Document, Paragraph, Picture, Reference, Sentence, joined, say
from vetter.results.prose.favourable import favourable
from vetter.results.prose.limits import limits
from vetter.results.prose.material import Material
from vetter.results.prose.method_words import method
from vetter.results.prose.numbers import plain
from vetter.results.prose.remaining import remaining
from vetter.results.prose.table import LABEL, table
from vetter.results.prose.verdict_words import verdict
from vetter.results.verdicts import ScenarioVerdict

POINTED = {
    "figure_spectral_energy": "shows the spectral energy distribution with the residuals",
    "figure_mass_and_light": "sets mass against light",
    "figure_what_carries": "shows which observation carries which exclusion",
    "figure_inner_pairs": "shows where a pair could hide",
    "figure_mass_posterior": "gives the posterior mass of the companion",
}
"""What each figure shows, by label."""

TITLE = "Alternative explanations of the unseen companion"


def chosen_rows(material: Material, only: Sequence[str] = ()) -> tuple[ScenarioVerdict, ...]:
    """Return the rows to write about, in the order of the table; all of them when ``only`` is empty."""
    return tuple(row for row in material.verdicts.scenarios if not only or row.name in only)


def write_document(
    material: Material, only: Sequence[str] = (), title: str = TITLE, pictures: tuple[Picture, ...] = ()
) -> Document:
    """Return the section on one evaluated system.

    ``only`` names the explanations that get a paragraph and a row; what is said about the remainder counts all.
    """
    rows = chosen_rows(material, only)
    paragraphs = [
        Paragraph(opening(material), "Data"),
        Paragraph((*method(material), pointers(pictures)), "Method"),
        *warning(material),
        *(scenario(material, row) for row in rows),
        Paragraph(remaining(material), "What remains"),
        Paragraph(limits(material), "Limits"),
    ]
    return Document(title, tuple(paragraphs), table(material, rows), pictures)


def pointers(pictures: tuple[Picture, ...]) -> Sentence:
    """Return where the table and the figures are, each with what it shows."""
    shown = [
        say(f"{{figure}} {POINTED[picture.label]}", figure=Reference("Figure", picture.label, number))
        for number, picture in enumerate(pictures, start=1)
    ]
    first = say("{table} lists the verdicts", table=Reference("Table", LABEL, 1))
    return say("{parts}.", parts=joined([first, *shown]))


def scenario(material: Material, row: ScenarioVerdict) -> Paragraph:
    """Return the paragraph on one explanation: what was tried, its best case, its verdict and what carries it."""
    sentences = (configuration(row), *favourable(material, row), *verdict(material, row))
    return Paragraph(sentences, row.title, row.name)


def warning(material: Material) -> list[Paragraph]:
    """Return the paragraph that must come first when nothing fits."""
    best = material.best
    if not material.verdicts.nothing_fits:
        return []
    if best is None or best.chi2_min is None:
        return [Paragraph((say("No explanation tried has any case on open ground; the data must be checked."),))]
    chi2 = plain(f"scenarios.{best.name}.chi2_min", best.chi2_min, 3)
    found = say("No explanation fits these data: even the best leaves {chi2} = {value}.", value=chi2)
    return [Paragraph((found, say("They must be checked before anything is concluded.")))]
