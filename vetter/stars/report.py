"""One star in plain numbers, as ``vetter star`` prints it."""

from __future__ import annotations

from collections.abc import Callable

from vetter.errors import Fault, InputError
from vetter.stars import helium as stripped
from vetter.stars import main_sequence as ordinary
from vetter.stars import white_dwarf as degenerate
from vetter.stars.properties import StarProperties

StarReport = dict[str, float | None]

WHITE_DWARF_TEFF_K = 10000.0
"""Temperature of a reported white dwarf: its mass does not tell it, and its cooling is not modelled."""

SOURCE = "vetter star"


def star_report(
    kind: str,
    mass_msun: float,
    life_fraction: float = 0.5,
    feh: float = 0.0,
    white_dwarf_teff_k: float = WHITE_DWARF_TEFF_K,
) -> StarReport:
    """Return teff_k, radius_rsun, luminosity_lsun, logg, mass_msun and lifetime_myr of one star.

    Parameters
    ----------
    kind : a name in ``KINDS``
    mass_msun : solar masses; the range depends on the kind
    life_fraction : 0-1, share of its hydrogen-burning (helium star: helium-burning) life that the star has lived
    feh : [Fe/H], dex
    white_dwarf_teff_k : used for a white dwarf only, whose ``lifetime_myr`` is None

    Raises InputError, with every fault found, for an unknown kind or a value out of range.
    """
    if kind not in KINDS:
        raise InputError.single(SOURCE, "kind", kind, "one of " + ", ".join(KINDS), "Choose one of these.")
    return KINDS[kind](mass_msun, life_fraction, feh, white_dwarf_teff_k)


def render_star(report: StarReport) -> str:
    """Return a report of :func:`star_report` as lines for the screen, one quantity with its unit on each."""
    lines = []
    for key, (words, unit, digits) in _WORDS.items():
        value = report[key]
        shown = "-" if value is None else f"{value:.{digits}g} {unit}".rstrip()
        lines.append(f"{words:<12}{shown}")
    return "\n".join(lines)


_WORDS = {
    "mass_msun": ("mass", "Msun", 5),
    "teff_k": ("Teff", "K", 5),
    "radius_rsun": ("radius", "Rsun", 4),
    "luminosity_lsun": ("luminosity", "Lsun", 4),
    "logg": ("log g", "", 4),
    "lifetime_myr": ("lifetime", "Myr", 5),
}


def _main_sequence(mass_msun: float, life_fraction: float, feh: float, _teff_k: float) -> StarReport:
    _check(
        ("--mass", mass_msun, ordinary.MASS_RANGE_MSUN, "solar masses"),
        ("--life-fraction", life_fraction, (0.0, 1.0), "(0 is birth, 1 the end of the main sequence)"),
        ("--feh", feh, ordinary.FEH_RANGE, "dex"),
    )
    star = ordinary.main_sequence(mass_msun, life_fraction, feh)
    return _columns(star, float(ordinary.lifetime_myr(mass_msun, feh)))


def _helium(mass_msun: float, life_fraction: float, _feh: float, _teff_k: float) -> StarReport:
    _check(
        ("--mass", mass_msun, stripped.MASS_RANGE_MSUN, "solar masses"),
        ("--life-fraction", life_fraction, (0.0, 1.0), "(0 is the start of helium burning, 1 its end)"),
    )
    star = stripped.helium_star(mass_msun, life_fraction)
    return _columns(star, float(stripped.pure_helium(mass_msun, life_fraction).lifetime_myr))


def _white_dwarf(mass_msun: float, _life_fraction: float, _feh: float, teff_k: float) -> StarReport:
    _check(
        ("--mass", mass_msun, degenerate.MASS_RANGE_MSUN, "solar masses"),
        ("--teff", teff_k, degenerate.TEFF_RANGE_K, "K"),
    )
    return _columns(degenerate.white_dwarf(mass_msun, teff_k), None)


KINDS: dict[str, Callable[[float, float, float, float], StarReport]] = {
    "main_sequence": _main_sequence,
    "helium": _helium,
    "white_dwarf": _white_dwarf,
}
"""Kinds of star that can be reported."""


def _columns(star: StarProperties, lifetime_myr: float | None) -> StarReport:
    return {
        "teff_k": float(star.teff_k),
        "radius_rsun": float(star.radius_rsun),
        "luminosity_lsun": float(star.luminosity_lsun),
        "logg": float(star.logg),
        "mass_msun": float(star.mass_msun),
        "lifetime_myr": lifetime_myr,
    }


def _check(*values: tuple[str, float, tuple[float, float], str]) -> None:
    """Raise one InputError for all values (name, value, range, unit) that lie outside their range; nan does."""
    faults = [
        Fault(name, repr(value), f"{low:g} to {high:g} {unit}", "Give a value in that range.")
        for name, value, (low, high), unit in values
        if not low <= value <= high
    ]
    if faults:
        raise InputError(SOURCE, faults)
