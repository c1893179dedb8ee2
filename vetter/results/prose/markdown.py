"""The section as Markdown, in plain Unicode."""

from __future__ import annotations

import textwrap

from vetter.results.prose.bibliography import WORKS, cited_as, plain_entry
from vetter.results.prose.document import (
    Citation,
    Document,
    Inline,
    Name,
    Number,
    Paragraph,
    Reference,
    Sentence,
    Symbol,
    Table,
    Text,
)
from vetter.results.prose.spelling import spelled
from vetter.results.prose.symbols import SYMBOLS, TIGHT_UNITS

WIDTH = 100

_SPECIAL = str.maketrans({character: f"\\{character}" for character in "\\`*_[]<>|#"})


def render_markdown(document: Document, spelling: str, keys: list[str]) -> str:
    """Return the whole section; ``keys`` are the works of its reference list."""
    blocks = [f"# {_escaped(spelled(document.title, spelling))}"]
    blocks += [render_paragraph(paragraph, spelling) for paragraph in document.paragraphs]
    blocks.append(render_table(document.table, spelling))
    for number, picture in enumerate(document.pictures, start=1):
        caption = f"**Figure {number}.** " + " ".join(
            render_sentence(sentence, spelling) for sentence in picture.caption
        )
        blocks.append(f"![{_escaped(spelled(picture.words, spelling))}]({picture.label}.png)\n\n{_wrapped(caption)}")
    blocks.append("## References\n\n" + "\n".join(f"- {_escaped(plain_entry(WORKS[key]))}" for key in keys))
    return "\n\n".join(blocks) + "\n"


def render_paragraph(paragraph: Paragraph, spelling: str) -> str:
    """Return one paragraph with its run-in heading."""
    text = " ".join(render_sentence(sentence, spelling) for sentence in paragraph.sentences)
    heading = f"**{_escaped(spelled(paragraph.heading, spelling))}.** " if paragraph.heading else ""
    return _wrapped(heading + text)


def render_sentence(sentence: Sentence, spelling: str) -> str:
    """Return one sentence."""
    return "".join(_inline(part, spelling) for part in sentence)


def _inline(part: Inline, spelling: str) -> str:
    match part:
        case Text(words):
            return _escaped(spelled(words, spelling)).replace("--", "–")
        case Name(words):
            return _escaped(words)
        case Symbol(key):
            return _escaped(SYMBOLS[key].text)
        case Number():
            return number_text(part)
        case Citation():
            return _escaped(cited_as(part))
        case Reference(kind, _, number):
            return f"{kind} {number}"


def number_text(number: Number) -> str:
    """Return a number with errors and unit in plain text."""
    text = number.shown.replace("-", "−")
    if number.minus is not None and number.plus is not None:
        text += f" ± {number.plus}" if number.plus == number.minus else f" (+{number.plus}, −{number.minus})"
    if not number.unit:
        return text
    # A no-break space keeps a number and its unit on one line.
    space = "" if number.unit in TIGHT_UNITS else "\N{NO-BREAK SPACE}"
    return f"{text}{space}{SYMBOLS[number.unit].text}"


def render_table(table: Table, spelling: str) -> str:
    """Return the table with its caption beneath."""
    rows = [table.heads, *table.rows]
    cells = [[render_sentence(cell, spelling) for cell in row] for row in rows]
    lines = ["| " + " | ".join(row) + " |" for row in cells]
    lines.insert(1, "|---|---|--:|--:|--:|---|")
    caption = "**Table 1.** " + " ".join(render_sentence(sentence, spelling) for sentence in table.caption)
    return "\n".join(lines) + "\n\n" + _wrapped(caption)


def _escaped(words: str) -> str:
    return words.translate(_SPECIAL)


def _wrapped(text: str) -> str:
    return "\n".join(textwrap.wrap(text, WIDTH, break_on_hyphens=False, break_long_words=False))
