"""The document model: words are written once and rendered as LaTeX, Markdown or HTML.

A sentence is a tuple of inlines. Plain text may hold no digit: a number can enter a sentence only as a :class:`Number`,
which remembers its unrounded value, so that every number of the words is also in machine.json.
"""

from __future__ import annotations

import re
from collections.abc import Iterable, Iterator
from dataclasses import dataclass

FIELD = re.compile(r"\{(\w+)\}")


@dataclass(frozen=True)
class Text:
    """Plain words in British spelling, without digits. Raises ValueError for a digit."""

    words: str

    def __post_init__(self) -> None:
        """Refuse digits."""
        if any(character.isdigit() for character in self.words):
            raise ValueError(f"a number in plain text, where its value would be lost: {self.words!r}")


@dataclass(frozen=True)
class Name:
    """A name that is typeset as it is written and may hold digits: a system, a band, a program's version."""

    words: str


@dataclass(frozen=True)
class Symbol:
    """A quantity or unit with its own typography; ``key`` is one of ``symbols.SYMBOLS``."""

    key: str


@dataclass(frozen=True)
class Number:
    """A rounded number and what it was rounded from.

    Attributes
    ----------
    key : where the value is found, as in machine.json
    value : unrounded
    shown : the digits that are printed
    minus, plus : printed errors, equal for a symmetric one; None where there is none
    unit : key of a symbol, or empty
    errors : unrounded errors, minus then plus
    """

    key: str
    value: float
    shown: str
    minus: str | None = None
    plus: str | None = None
    unit: str = ""
    errors: tuple[float, float] | None = None

    @property
    def printed(self) -> tuple[str, ...]:
        """The numerals a reader sees, in the order in which they are read."""
        if self.minus is None or self.plus is None:
            return (self.shown,)
        return (self.shown, self.plus) if self.minus == self.plus else (self.shown, self.plus, self.minus)


@dataclass(frozen=True)
class Citation:
    """Works by key of ``bibliography.WORKS``; ``in_text`` puts the authors into the sentence."""

    keys: tuple[str, ...]
    in_text: bool = False


@dataclass(frozen=True)
class Reference:
    """A pointer to a figure or to the table: ``kind`` is "Figure" or "Table", ``number`` its place in the section."""

    kind: str
    label: str
    number: int


Inline = Text | Name | Symbol | Number | Citation | Reference
Sentence = tuple[Inline, ...]


@dataclass(frozen=True)
class Paragraph:
    """Sentences under an optional run-in heading; ``about`` names the scenario it speaks of."""

    sentences: tuple[Sentence, ...]
    heading: str = ""
    about: str = ""


@dataclass(frozen=True)
class Table:
    """A table: heads, rows of cells (sentences), caption; the first column is words, numbers are centred."""

    label: str
    heads: tuple[Sentence, ...]
    rows: tuple[tuple[Sentence, ...], ...]
    caption: tuple[Sentence, ...]


@dataclass(frozen=True)
class Picture:
    """A figure: ``label`` is also the file's name without suffix; ``words`` describe it to those who cannot see it."""

    label: str
    caption: tuple[Sentence, ...]
    words: str


@dataclass(frozen=True)
class Document:
    """The section: title, paragraphs, one table and the figures."""

    title: str
    paragraphs: tuple[Paragraph, ...]
    table: Table
    pictures: tuple[Picture, ...] = ()


def say(template: str, **parts: Inline | Sentence | str) -> Sentence:
    """Return a sentence from a template such as ``"{star} needs {mass}"``.

    A field is one of ``parts`` (an inline, a sentence, or words), or else a symbol of that name.
    """
    found: list[Inline] = []
    place = 0
    for match in FIELD.finditer(template):
        found += _inlines(template[place : match.start()])
        found += _inlines(parts[match[1]] if match[1] in parts else Symbol(match[1]))
        place = match.end()
    return (*found, *_inlines(template[place:]))


def _inlines(part: Inline | Sentence | str) -> Sentence:
    if isinstance(part, str):
        return (Text(part),) if part else ()
    return part if isinstance(part, tuple) else (part,)


def joined(parts: Iterable[Inline | Sentence | str], last: str = " and ", between: str = ", ") -> Sentence:
    """Return parts as a list in prose: ``a, b and c``."""
    items = [_inlines(part) for part in parts]
    found: list[Inline] = []
    for place, item in enumerate(items):
        if place:
            found.append(Text(last if place == len(items) - 1 else between))
        found += item
    return tuple(found)


def sentences_of(document: Document) -> Iterator[Sentence]:
    """Yield every sentence of a document: paragraphs, table, captions."""
    for paragraph in document.paragraphs:
        yield from paragraph.sentences
    yield from document.table.heads
    for row in document.table.rows:
        yield from row
    yield from document.table.caption
    for picture in document.pictures:
        yield from picture.caption


def numbers_of(sentences: Iterable[Sentence]) -> list[Number]:
    """Return the numbers of sentences in reading order."""
    return [inline for sentence in sentences for inline in sentence if isinstance(inline, Number)]
