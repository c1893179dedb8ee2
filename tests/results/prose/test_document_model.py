"""A sentence holds no number whose value would be lost; every symbol has a form in every format."""

from __future__ import annotations

import re

import pytest

from vetter.results.prose.document import Name, Number, Symbol, Text, joined, say
from vetter.results.prose.markdown import render_sentence
from vetter.results.prose.quoted import quoted
from vetter.results.prose.spelling import spelled
from vetter.results.prose.symbols import SYMBOLS, band_label
from vetter.system.bands import BANDS


def test_plain_text_refuses_digits() -> None:
    with pytest.raises(ValueError, match="its value would be lost"):
        say("a mass of 3 suns")


def test_fields_are_parts_or_symbols() -> None:
    number = Number("m", 3.14, "3.1", unit="Msun")
    assert say("{M2} is {mass}", mass=number) == (Symbol("M2"), Text(" is "), number)
    assert render_sentence(say("{a}, {b}", a="one", b=Name("W1")), "british") == "one, W1"


def test_lists_in_prose() -> None:
    assert render_sentence(joined(["a"]), "british") == "a"
    assert render_sentence(joined(["a", "b", "c"]), "british") == "a, b and c"


def test_symbols_are_ascii_in_latex() -> None:
    for key, form in SYMBOLS.items():
        assert form.latex.isascii(), key
        assert form.latex.count("$") % 2 == 0, key
        assert form.latex.count("{") == form.latex.count("}"), key


def test_bands_are_written_shortly_and_apart() -> None:
    labels = {band: band_label(band) for band in BANDS}
    assert labels["GAIA/GAIA3.Gbp"] == "Gaia BP"
    assert labels["2MASS/2MASS.Ks"] == "Ks"
    assert len(set(labels.values())) == len(labels)


def test_quoted_words_keep_their_numbers() -> None:
    sentence = quoted("log g 3.60 and 2.4e+02 Lsun (12 %) in GAIA/GAIA3.G, E(B-V) -0.1.", "c")
    numbers = [part for part in sentence if isinstance(part, Number)]
    assert [(part.shown, part.value) for part in numbers] == [
        ("3.60", 3.6),
        ("240", 240.0),
        ("12", 12.0),
        ("-0.1", -0.1),
    ]
    assert render_sentence(sentence, "british") == "log g 3.60 and 240 L☉ (12%) in Gaia G, E(B−V) −0.1."


@pytest.mark.parametrize(
    ("british", "american"),
    [
        ("Disfavoured", "Disfavored"),
        ("most favourable", "most favorable"),
        ("the photocentre", "the photocenter"),
        ("centred", "centered"),
        ("analysed", "analyzed"),
        ("a parameter in metres", "a parameter in meters"),
    ],
)
def test_spelling(british: str, american: str) -> None:
    assert spelled(british, "british") == british
    assert spelled(british, "american") == american


def test_an_unknown_spelling() -> None:
    with pytest.raises(ValueError, match="expected one of british, american"):
        spelled("x", "welsh")
    assert not re.search(r"\d", "".join(Text("abc").words))
