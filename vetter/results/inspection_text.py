"""The quick look as text: what each number is, in words that need no legend."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from textwrap import wrap
from typing import Any, Final

WIDTH: Final = 100
LABEL: Final = 52

Row = tuple[str, str, str]
"""Words, key of the quantity, unit."""

SEEN_STAR: Final[Sequence[Row]] = (
    ("mass", "seen_star_mass_msun", "Msun"),
    ("radius", "seen_star_radius_rsun", "Rsun"),
)
ORBIT: Final[Sequence[Row]] = (
    ("velocity semi-amplitude K1", "k1_km_s", "km/s"),
    ("mass function: less than the companion's mass", "mass_function_msun", "Msun"),
    ("least mass of the companion (orbit seen edge on)", "companion_mass_min_msun", "Msun"),
    ("mass of the companion with the inclination measured", "companion_mass_msun", "Msun"),
)
PHOTOCENTRE: Final[Sequence[Row]] = (
    ("mass-ratio function (axis in au / M1^1/3 P^2/3)", "mass_ratio_function", ""),
    ("  the most that one main-sequence companion gives", "mass_ratio_function_single_max", ""),
    ("  the most that a pair of such stars gives", "mass_ratio_function_pair_max", ""),
    ("mass of the companion if it gives no light", "companion_mass_if_dark_msun", "Msun"),
    ("  K1 that it would give the seen star", "k1_from_astrometry_km_s", "km/s"),
)
AROUND: Final[Sequence[Row]] = (
    ("separation (semi-major axis)", "separation_au", "au"),
    ("seen star's Roche lobe at periastron", "roche_lobe_rsun", "Rsun"),
    ("seen star's radius over its Roche lobe", "roche_filling", ""),
)
FOR_MASS: Final = {
    "inclination": "for the companion's mass with the inclination measured",
    "least": "for the companion's least mass, orbit seen edge on",
    "dark": "for a companion that gives no light",
}


def render_inspection(found: Mapping[str, Any]) -> str:
    """Return the quick look of :func:`vetter.results.inspection.inspect` as text for a terminal."""
    period, eccentricity, source = found["period_d"], found["eccentricity"], found["orbit_from"]
    lines = [str(found["system"]), "", *_paragraph(f"The seen star: {found['seen_star']}"), *_rows(SEEN_STAR, found)]
    lines += ["", f"The orbit: P {period:.6g} d, e {eccentricity:.3g}, from {source}", *_rows(ORBIT, found)]
    if found["mass_ratio_function"] is not None:
        lines += ["", "The photocentre's orbit", *_rows(PHOTOCENTRE, found), *_above(found)]
    if found["companion_mass_from"] is None:
        return "\n".join([*lines, "", "Nothing here weighs the companion."]) + "\n"
    lines += ["", f"The two together, {FOR_MASS[found['companion_mass_from']]}", *_rows(AROUND, found)]
    words = f"ellipsoidal semi-amplitude at {found['ellipsoidal_wavelength_nm']:.0f} nm"
    lines += [_row(words, [1000.0 * value for value in found["ellipsoidal_amplitude_mag"]], "mmag")]
    lines += _light(found["added_light"])
    return "\n".join([*lines, "", "In brackets: 68 % ranges, from the errors of the input."]) + "\n"


def _rows(rows: Sequence[Row], found: Mapping[str, Any]) -> list[str]:
    return [_row(words, found[key], unit) for words, key, unit in rows if found[key] is not None]


def _row(words: str, values: Sequence[float], unit: str) -> str:
    low, median, high = values
    return f"  {words:<{LABEL}}{_number(median, 4):>8} {unit:<5}[{_number(low, 4)} to {_number(high, 4)}]"


def _number(value: float, digits: int) -> str:
    """Return a number without an exponent where that is still readable."""
    return f"{value:.{digits}g}" if abs(value) < 10.0**digits or abs(value) >= 1e6 else f"{value:.0f}"


def _above(found: Mapping[str, Any]) -> list[str]:
    """Say how often the measured value is above what ordinary companions give."""
    single, pair = found["share_above_single_max"], found["share_above_pair_max"]
    if single is None or pair is None:
        return []
    said = (
        f"It is above that of any one star in {100.0 * single:.0f} %, of any pair in {100.0 * pair:.0f} % of the draws."
    )
    return _paragraph(said, "  ")


def _light(added: Mapping[str, Sequence[float] | None]) -> list[str]:
    """Say what share of the seen star's light an ordinary companion would add in each band."""
    if not any(added.values()):
        return ["", "No main-sequence star has that mass."]
    lines = ["", "Light that a main-sequence star of that mass, of any age, would add to the seen star's"]
    shares = {band: [100.0 * value for value in values] for band, values in added.items() if values is not None}
    return lines + [_row(band, values, "%") for band, values in shares.items()]


def _paragraph(text: str, indent: str = "") -> list[str]:
    return wrap(text, WIDTH, initial_indent=indent, subsequent_indent=indent + ("" if indent else "  "))
