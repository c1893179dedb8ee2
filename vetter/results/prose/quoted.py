"""Words that other parts of the program made as plain text, turned into sentences with their numbers kept."""

from __future__ import annotations

import re
from collections.abc import Mapping

from vetter.results.prose.document import Inline, Name, Number, Sentence, Symbol, Text
from vetter.results.prose.numbers import significant
from vetter.results.prose.symbols import GROUPS, band_label

WORDS: Mapping[str, str] = {
    "E(B-V)": "EBV",
    "[Fe/H]": "FeH",
    "log g": "logg",
    "g R^2 / G": "gR2G",
    "Teff": "Teff",
    "ln Z": "lnZ",
    "K1": "K1",
    "Msun": "Msun",
    "Rsun": "Rsun",
    "Lsun": "Lsun",
    "erg/s": "erg_s",
    "km/s": "km_s",
    "m/s": "m_s",
    "%": "percent",
}
"""Symbols by how they are written as plain text."""

_BANDS = "|".join(re.escape(group) for group in GROUPS)
_TOKEN = re.compile(
    rf"(?P<band>(?:{_BANDS})\.\w+)"
    rf"|(?P<symbol>{'|'.join(re.escape(word) for word in sorted(WORDS, key=len, reverse=True))})"
    r"|(?P<number>(?<![\w.])[+-]?\d+(?:\.\d+)?(?:e[+-]?\d+)?(?![A-Za-z]))"
    r"|(?P<name>[A-Za-z][\w/+-]*\d\w*(?:[./+-]\w+)*)"
)


def quoted(text: str, key: str) -> Sentence:
    """Return plain text as a sentence; its numbers get the keys ``key.0``, ``key.1`` ..."""
    found: list[Inline] = []
    place = count = 0
    for match in _TOKEN.finditer(text):
        before = text[place : match.start()]
        place = match.end()
        if match["symbol"] == "%":
            before = before.rstrip()
        if before:
            found.append(Text(before))
        if match["number"] is None:
            found.append(_other(match))
            continue
        found.append(_number(match["number"], f"{key}.{count}"))
        count += 1
    if text[place:]:
        found.append(Text(text[place:]))
    return tuple(found)


def _other(match: re.Match[str]) -> Inline:
    if match["band"] is not None:
        return Name(band_label(match["band"]))
    return Symbol(WORDS[match["symbol"]]) if match["symbol"] is not None else Name(match["name"])


def _number(word: str, key: str) -> Number:
    """A number as it was printed; exponents are written out where that is readable."""
    value = float(word)
    if "e" not in word:
        return Number(key, value, word)
    digits = len(word.split("e")[0].replace(".", "").lstrip("+-"))
    return Number(key, value, significant(value, digits))
