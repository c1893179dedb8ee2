"""Every number in the prose is the number in machine.json: parsed from the rendered text, in reading order."""

from __future__ import annotations

import json
import re

import pytest

from vetter.results.prose import latex, markdown
from vetter.results.prose.bibliography import cited_as
from vetter.results.prose.document import Citation, Document, Name, Symbol, sentences_of
from vetter.results.prose.material import Material
from vetter.results.prose.section import write_document
from vetter.results.prose.symbols import SYMBOLS
from vetter.results.writing import machine

NUMERAL = re.compile(r"(?<![\w.])\d+(?:\.\d+)?")


def printed(document: Document, material: Material) -> list[str]:
    """The numerals of machine.json, signs taken off."""
    found = json.loads(machine(document, material))["numbers"]
    return [word.lstrip("-+") for record in found for word in record["printed"]]


def not_numbers(document: Document) -> list[str]:
    """Names, symbols and citations as Markdown shows them, where they hold digits; the longest first."""
    words = {"Table 1"}
    for sentence in sentences_of(document):
        for part in sentence:
            if isinstance(part, Name | Symbol | Citation):
                words.add(markdown.render_sentence((part,), "british"))
    return sorted((word for word in words if any(c.isdigit() for c in word)), key=len, reverse=True)


def test_every_numeral_of_the_markdown_is_in_machine_json(material: Material) -> None:
    document = write_document(material)
    paragraphs = [
        " ".join(markdown.render_sentence(sentence, "british") for sentence in paragraph.sentences)
        for paragraph in document.paragraphs
    ]
    cells = [
        markdown.render_sentence(cell, "british")
        for row in (document.table.heads, *document.table.rows)
        for cell in row
    ]
    caption = [markdown.render_sentence(sentence, "british") for sentence in document.table.caption]
    text = "\n".join([*paragraphs, *cells, *caption])
    for word in not_numbers(document):
        text = text.replace(word, " ")
    assert NUMERAL.findall(text) == printed(document, material)


def test_every_numeral_of_the_latex_is_in_machine_json(material: Material) -> None:
    document = write_document(material)
    text = "\n".join(latex.render_paragraph(paragraph, "british") for paragraph in document.paragraphs)
    text = re.sub(r"\\(citep|citet|ref)\{[^}]*\}", " ", text)
    names = {latex.escape(p.words) for s in sentences_of(document) for p in s if isinstance(p, Name)}
    symbols = {form.latex for form in SYMBOLS.values()}
    for word in sorted((w for w in names | symbols if any(c.isdigit() for c in w)), key=len, reverse=True):
        text = text.replace(word, " ")
    expected = printed(document, material)
    found = NUMERAL.findall(text)
    assert found == expected[: len(found)]
    in_table = len(expected) - len(found)
    assert 0 < in_table < len(found)


def test_what_is_printed_is_what_is_kept(material: Material) -> None:
    """Within half a unit of the last digit; sigmas next to a border of verdicts within one."""
    for record in json.loads(machine(write_document(material), material))["numbers"]:
        shown = record["printed"][0]
        decimals = len(shown.partition(".")[2])
        stripped = shown.lstrip("-+").replace(".", "")
        trailing = len(stripped) - len(stripped.rstrip("0")) if decimals == 0 else 0
        unit = 10.0 ** (trailing - decimals)
        slack = 1.0 if record["unit"] == "sigma" or record["key"].endswith(".sigma") else 0.5
        assert abs(float(shown) - record["value"]) <= slack * unit * 1.000001, record


def test_values_are_those_of_the_verdicts(materials: dict[str, Material]) -> None:
    """Keys that are paths of verdicts.json lead to the same value there."""
    for material in materials.values():
        rows = {row.name: row for row in material.verdicts.scenarios}
        records = json.loads(machine(write_document(material), material))["numbers"]
        checked = 0
        for record in records:
            match = re.fullmatch(r"scenarios\.(\w+)\.(sigma|ln_evidence|chi2_min|best_fit\.\w+)", record["key"])
            if match is None:
                continue
            row, _, name = rows[match[1]], *match[2].partition(".")[::2]
            row_value = row.best_fit.values[name] if name and row.best_fit else getattr(row, match[2], None)
            factor = 100.0 if record["unit"] == "percent" else 1.0
            assert record["value"] == pytest.approx(factor * row_value), record
            checked += 1
        assert checked > 20


def test_a_citation_is_not_a_number() -> None:
    assert cited_as(Citation(("torres2010",), in_text=True)) == "Torres et al. (2010)"
    assert cited_as(Citation(("tout1996", "hurley2000"))) == "(Tout et al. 1996; Hurley et al. 2000)"
