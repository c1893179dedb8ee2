"""The section as files: words in three formats, table, references, figures, and every number that the words hold."""

from __future__ import annotations

import json
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

from vetter.errors import InputError
from vetter.observations.base import Observation
from vetter.results.figures.pictures import FIGURES, Drawn, draw
from vetter.results.prose import latex
from vetter.results.prose.bibliography import cited
from vetter.results.prose.document import Document, Number, numbers_of, sentences_of
from vetter.results.prose.html import render_html
from vetter.results.prose.markdown import render_markdown
from vetter.results.prose.material import Material
from vetter.results.prose.quoted import quoted
from vetter.results.prose.section import TITLE, chosen_rows, write_document
from vetter.results.prose.spelling import spelled
from vetter.results.verdicts import Verdicts, headline
from vetter.scenarios.context import Context


@dataclass(frozen=True)
class Wishes:
    """What the user asked for.

    Attributes
    ----------
    only : explanations to write about, all when empty
    figures : numbers of the figures, all when empty
    title : heading of the section
    journal_table : a deluxetable instead of booktabs
    spelling : "british" or "american"
    """

    only: tuple[str, ...] = ()
    figures: tuple[int, ...] = ()
    title: str = TITLE
    journal_table: bool = False
    spelling: str = "british"


def section_files(
    context: Context, observations: Sequence[Observation], verdicts: Verdicts, wishes: Wishes
) -> dict[str, str | bytes]:
    """Return every file of the section by name.

    Raises InputError for an explanation that was not evaluated, or a figure that does not exist.
    """
    check([row.name for row in verdicts.scenarios], wishes)
    material = Material(context, verdicts)
    drawn = draw(material, chosen_rows(material, wishes.only), observations, wishes.figures)
    document = write_document(material, wishes.only, wishes.title, tuple(one.picture for one in drawn))
    files = word_files(document, material, drawn, wishes)
    for one in drawn:
        files |= one.files
    return files


def check(known: Sequence[str], wishes: Wishes) -> None:
    """Raise InputError for an explanation that is not among the ``known`` names, or a figure that does not exist."""
    for name in wishes.only:
        if name not in known:
            raise InputError.single("command line", "--only", name, f"one of {', '.join(known)}")
    for number in wishes.figures:
        if number not in FIGURES:
            raise InputError.single("command line", "--figure", number, f"one of {', '.join(map(str, FIGURES))}")


def word_files(
    document: Document, material: Material, drawn: Sequence[Drawn], wishes: Wishes
) -> dict[str, str | bytes]:
    """Return the files made of words."""
    keys = cited(sentences_of(document))
    system, spelling = material.system.name, wishes.spelling
    pages = {one.picture.label: one.files[f"{one.picture.label}.png"] for one in drawn}
    summary = quoted(spelled(headline(material.verdicts), spelling), "headline")
    return {
        "alternatives.tex": latex.render_section(document, spelling),
        "table.tex": latex.render_table(document.table, spelling, wishes.journal_table),
        "wrapper.tex": latex.wrapper(system, wishes.journal_table),
        "references.bib": latex.render_bibliography(keys),
        "alternatives.md": render_markdown(document, spelling, keys),
        "report.html": render_html(document, system, summary, spelling, keys, pages),
        "machine.json": machine(document, material),
    }


def machine(document: Document, material: Material) -> str:
    """Return machine.json: the numbers of the words in reading order, unrounded, with the digits that are printed."""
    found = {
        "system": material.verdicts.system,
        "version": material.verdicts.version,
        "seed": material.verdicts.seed,
        "numbers": [_record(number) for number in numbers_of(sentences_of(document))],
    }
    return json.dumps(found, indent=1, ensure_ascii=False, allow_nan=False) + "\n"


def _record(number: Number) -> dict[str, Any]:
    return {
        "key": number.key,
        "value": number.value,
        "errors": None if number.errors is None else list(number.errors),
        "unit": number.unit,
        "printed": list(number.printed),
    }
