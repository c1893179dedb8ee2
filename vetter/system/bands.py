"""Names of passbands: the identifiers of the IVOA photometry standard, their synonyms and their usual systems.

Use :func:`canonical_band` to turn what an observer wrote into an identifier, :func:`nearest_bands` to offer
alternatives for what could not be understood, and :func:`usual_system` for the system of its published magnitudes.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from difflib import SequenceMatcher
from functools import cache
from types import MappingProxyType
from typing import NamedTuple


class _Family(NamedTuple):
    """Bands of one instrument: prefix of the identifiers, members, usual system, other prefixes in use."""

    prefix: str
    members: str
    system: str
    synonyms: tuple[str, ...]


_FAMILIES = (
    _Family("Generic/Johnson", "U B V", "Vega", ("Generic/Bessell", "Johnson", "Bessell")),
    _Family("Generic/Cousins", "R I", "Vega", ("Generic/Bessell", "Cousins", "Bessell")),
    _Family("TYCHO/TYCHO", "B V", "Vega", ("TYCHO", "TYCHO2")),
    _Family("Hipparcos/Hipparcos", "Hp", "Vega", ("Hipparcos",)),
    _Family("SLOAN/SDSS", "u g r i z", "AB", ("SDSS", "SLOAN")),
    _Family("PAN-STARRS/PS1", "g r i z y", "AB", ("PS1", "PAN-STARRS", "PAN-STARRS1")),
    _Family("SkyMapper/SkyMapper", "u v g r i z", "AB", ("SkyMapper",)),
    _Family("GAIA/GAIA3", "G Gbp Grp", "Vega", ("GAIA3", "GAIA", "GAIA/GAIA3e", "GAIA EDR3", "GAIA DR3")),
    _Family("2MASS/2MASS", "J H Ks", "Vega", ("2MASS",)),
    _Family("WISE/WISE", "W1 W2 W3 W4", "Vega", ("WISE", "AllWISE")),
    _Family("Spitzer/IRAC", "I1 I2", "Vega", ("IRAC", "Spitzer")),
    _Family("GALEX/GALEX", "FUV NUV", "AB", ("GALEX",)),
    _Family("Swift/UVOT", "UVW2 UVM2 UVW1 U B V", "Vega", ("UVOT", "Swift")),
    _Family("TESS/TESS", "Red", "Vega", ("TESS",)),
)

BANDS: Mapping[str, str] = MappingProxyType(
    {f"{family.prefix}.{member}": family.system for family in _FAMILIES for member in family.members.split()}
)
"""Every built-in band identifier with the system in which its magnitudes are usually published."""

_SHORT: Mapping[str, str] = MappingProxyType(
    {
        **{letter: f"Generic/Johnson.{letter}" for letter in "UBV"},
        **{letter: f"Generic/Cousins.{letter}" for letter in "RI"},
        **dict.fromkeys(("G", "Gmag", "phot_g_mean_mag"), "GAIA/GAIA3.G"),
        **dict.fromkeys(("BP", "Gbp", "GAIA BP", "GAIA/GAIA3.BP", "phot_bp_mean_mag"), "GAIA/GAIA3.Gbp"),
        **dict.fromkeys(("RP", "Grp", "GAIA RP", "GAIA/GAIA3.RP", "phot_rp_mean_mag"), "GAIA/GAIA3.Grp"),
        **{name: f"2MASS/2MASS.{name}" for name in ("J", "H", "Ks")},
        **{f"W{n}": f"WISE/WISE.W{n}" for n in range(1, 5)},
        **{f"IRAC{n}": f"Spitzer/IRAC.I{n}" for n in (1, 2)},
        **{name: f"GALEX/GALEX.{name}" for name in ("FUV", "NUV")},
        **{name: f"Swift/UVOT.{name}" for name in ("UVW2", "UVM2", "UVW1")},
        **{f"UVOT {name[2:]}": f"Swift/UVOT.{name}" for name in ("UVW2", "UVM2", "UVW1")},
        "Rc": "Generic/Cousins.R",
        "Ic": "Generic/Cousins.I",
        "BT": "TYCHO/TYCHO.B",
        "VT": "TYCHO/TYCHO.V",
        "Hp": "Hipparcos/Hipparcos.Hp",
        "TESS": "TESS/TESS.Red",
        "2MASS K": "2MASS/2MASS.Ks",
    }
)


def _loose(text: str) -> str:
    """Return the text with case, spaces and punctuation removed: how people's spellings of one band differ."""
    return "".join(character for character in text.casefold() if character.isalnum())


def _spellings() -> Iterator[tuple[str, str]]:
    """Yield every known spelling with its band; one-letter names are kept apart, since g is not G."""
    for family in _FAMILIES:
        for member in family.members.split():
            for prefix in (family.prefix, *family.synonyms):
                yield f"{prefix}.{member}", f"{family.prefix}.{member}"
    yield from ((name, band) for name, band in _SHORT.items() if len(name) > 1)


@cache
def _by_loose_name() -> Mapping[str, str]:
    """Return the band of every known spelling in its loose form."""
    return MappingProxyType({_loose(name): band for name, band in _spellings()})


def canonical_band(text: str) -> str | None:
    """Return the built-in identifier for what an observer wrote, or None when it is not one of them.

    Case, spaces and punctuation do not matter, and the trade's short names are known (``BP``, ``Ks``, ``W1``,
    ``PS1 g``). A single letter counts as written: ``G`` is Gaia's, while ``g`` could be any of three surveys'.
    """
    name = text.strip()
    if len(name) == 1:
        return _SHORT.get(name)
    return _by_loose_name().get(_loose(name))


def nearest_bands(text: str, n: int = 3) -> tuple[str, ...]:
    """Return the ``n`` (>= 1) built-in identifiers most like the text, best first.

    A text that is exactly the last part of an identifier, such as ``g``, is taken to mean those bands first.
    """
    wanted = _loose(text)
    scores = dict.fromkeys(BANDS, 0.0)
    for name, band in _by_loose_name().items():
        scores[band] = max(scores[band], SequenceMatcher(None, wanted, name, autojunk=False).ratio())
    for band in BANDS:
        if _loose(band.rsplit(".", 1)[1]) == wanted:
            scores[band] += 1.0
    return tuple(sorted(BANDS, key=lambda band: -scores[band])[:n])


def usual_system(band: str) -> str:
    """Return "AB" or "Vega", the system in which magnitudes of this built-in identifier are usually given.

    Raises
    ------
    ValueError : the band is not a built-in identifier
    """
    if band not in BANDS:
        raise ValueError(f"no built-in band {band!r}; nearest are {', '.join(nearest_bands(band))}")
    return BANDS[band]
