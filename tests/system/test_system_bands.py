"""Band names: the contract's identifiers, the spellings people use, and what is offered for the rest."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from vetter.system import canonical_band, nearest_bands, usual_system
from vetter.system.bands import BANDS

# The list of the design, written out again; "|" separates members.
CONTRACT = (
    "Generic/Johnson.U|B|V Generic/Cousins.R|I TYCHO/TYCHO.B|V Hipparcos/Hipparcos.Hp SLOAN/SDSS.u|g|r|i|z "
    "PAN-STARRS/PS1.g|r|i|z|y SkyMapper/SkyMapper.u|v|g|r|i|z GAIA/GAIA3.G|Gbp|Grp 2MASS/2MASS.J|H|Ks "
    "WISE/WISE.W1|W2|W3|W4 Spitzer/IRAC.I1|I2 GALEX/GALEX.FUV|NUV Swift/UVOT.UVW2|UVM2|UVW1|U|B|V TESS/TESS.Red"
)
CONTRACT_IDS = [
    f"{family.split('.')[0]}.{member}" for family in CONTRACT.split() for member in family.split(".")[1].split("|")
]


def test_the_built_in_bands_are_those_of_the_contract() -> None:
    assert sorted(BANDS) == sorted(CONTRACT_IDS)


@pytest.mark.parametrize("band", CONTRACT_IDS)
def test_an_identifier_is_itself_in_any_case_and_spacing(band: str) -> None:
    spellings = [band, band.lower(), band.upper(), f"  {band} ", band.replace(".", " "), band.replace("/", " / ")]
    assert {canonical_band(text) for text in spellings} == {band}


@pytest.mark.parametrize("band", CONTRACT_IDS)
def test_the_usual_system_is_ab_for_four_surveys_and_vega_else(band: str) -> None:
    ab = band.startswith(("GALEX/", "SLOAN/", "PAN-STARRS/", "SkyMapper/"))
    assert usual_system(band) == ("AB" if ab else "Vega")


@pytest.mark.parametrize(
    ("text", "band"),
    [
        ("Generic/Bessell.U", "Generic/Johnson.U"),
        ("Generic/Bessell.V", "Generic/Johnson.V"),
        ("Generic/Bessell.R", "Generic/Cousins.R"),
        ("Generic/Bessell.I", "Generic/Cousins.I"),
        ("U", "Generic/Johnson.U"),
        ("B", "Generic/Johnson.B"),
        (" V ", "Generic/Johnson.V"),
        ("R", "Generic/Cousins.R"),
        ("Ic", "Generic/Cousins.I"),
        ("BT", "TYCHO/TYCHO.B"),
        ("VT", "TYCHO/TYCHO.V"),
        ("Hp", "Hipparcos/Hipparcos.Hp"),
        ("SDSS g", "SLOAN/SDSS.g"),
        ("sdss_u", "SLOAN/SDSS.u"),
        ("PS1.y", "PAN-STARRS/PS1.y"),
        ("Pan-STARRS i", "PAN-STARRS/PS1.i"),
        ("SkyMapper v", "SkyMapper/SkyMapper.v"),
        ("G", "GAIA/GAIA3.G"),
        ("Gaia G", "GAIA/GAIA3.G"),
        ("BP", "GAIA/GAIA3.Gbp"),
        ("G_BP", "GAIA/GAIA3.Gbp"),
        ("Gaia DR3 Grp", "GAIA/GAIA3.Grp"),
        ("phot_rp_mean_mag", "GAIA/GAIA3.Grp"),
        ("J", "2MASS/2MASS.J"),
        ("ks", "2MASS/2MASS.Ks"),
        ("2MASS K", "2MASS/2MASS.Ks"),
        ("W1", "WISE/WISE.W1"),
        ("AllWISE W4", "WISE/WISE.W4"),
        ("IRAC1", "Spitzer/IRAC.I1"),
        ("nuv", "GALEX/GALEX.NUV"),
        ("UVW2", "Swift/UVOT.UVW2"),
        ("UVOT M2", "Swift/UVOT.UVM2"),
        ("UVOT.b", "Swift/UVOT.B"),
        ("TESS", "TESS/TESS.Red"),
    ],
)
def test_the_spellings_of_the_trade(text: str, band: str) -> None:
    assert canonical_band(text) == band


@pytest.mark.parametrize("text", ["", " ", "g", "r", "i", "z", "u", "v", "y", "K", "Q", "GAIA/GAIA2.G", "SDSS", "W5"])
def test_what_is_unknown_or_could_be_several_bands_is_not_guessed(text: str) -> None:
    assert canonical_band(text) is None


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("GAIA/GAIA2.G", {"GAIA/GAIA3.G"}),
        ("g", {"SLOAN/SDSS.g", "PAN-STARRS/PS1.g", "SkyMapper/SkyMapper.g", "GAIA/GAIA3.G"}),
        ("W5", {"WISE/WISE.W1", "WISE/WISE.W2"}),
        ("TESS/TESS.Blue", {"TESS/TESS.Red"}),
        ("2MASS.L", {"2MASS/2MASS.J"}),
    ],
)
def test_the_nearest_bands_contain_what_was_likely_meant(text: str, expected: set[str]) -> None:
    assert expected <= set(nearest_bands(text, 4))


@given(st.text(max_size=40), st.integers(1, 60))
def test_any_text_gets_an_answer(text: str, n: int) -> None:
    near = nearest_bands(text, n)
    assert len(near) == len(set(near)) == min(n, len(BANDS))
    assert canonical_band(text) in {None, *BANDS}


@given(st.sampled_from(CONTRACT_IDS), st.data())
def test_one_lost_letter_still_finds_the_band_among_the_nearest(band: str, data: st.DataObject) -> None:
    # Losing the last letter loses the band itself, so letters are lost before the dot only.
    place = data.draw(st.integers(0, band.index(".") - 1))
    text = band[:place] + band[place + 1 :]
    assert canonical_band(text) == band or band in nearest_bands(text, 6)


def test_the_usual_system_of_an_unknown_band_is_a_misuse() -> None:
    with pytest.raises(ValueError, match=r"no built-in band 'GAIA/GAIA2.G'; nearest are GAIA/GAIA3.G"):
        usual_system("GAIA/GAIA2.G")
