"""British words and their American spelling; the words are written in British English."""

from __future__ import annotations

import re

AMERICAN = {
    "disfavour": "disfavor",
    "favour": "favor",
    "colour": "color",
    "grey": "gray",
    "centred": "centered",
    "centre": "center",
    "analyse": "analyze",
    "normalise": "normalize",
    "marginalise": "marginalize",
    "parametrise": "parametrize",
    "catalogued": "cataloged",
    "catalogue": "catalog",
    "neighbour": "neighbor",
    "behaviour": "behavior",
    "metre": "meter",
    "modelled": "modeled",
    "modelling": "modeling",
    "labelled": "labeled",
    "judgement": "judgment",
    "ageing": "aging",
}
"""Stems by British spelling; endings follow (favourable, centres, analysed)."""

SPELLINGS = ("british", "american")

_STEMS = re.compile("|".join(sorted(AMERICAN, key=len, reverse=True)), re.IGNORECASE)


def spelled(words: str, spelling: str) -> str:
    """Return words in the asked spelling. Raises ValueError for a spelling that is neither british nor american."""
    if spelling not in SPELLINGS:
        raise ValueError(f"spelling {spelling!r}: expected one of {', '.join(SPELLINGS)}")
    if spelling == "british":
        return words
    return _STEMS.sub(_american, words)


def _american(match: re.Match[str]) -> str:
    word = AMERICAN[match[0].lower()]
    return word[0].upper() + word[1:] if match[0][0].isupper() else word
