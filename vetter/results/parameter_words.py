"""Fitted parameters as a sentence names them."""

from __future__ import annotations

PARAMETER_WORDS = {
    "companion_life_fraction": "the age of the companion",
    "companion_rise": "the evolutionary state of the companion",
    "companion_warmth": "the temperature of the companion",
    "companion_inflation": "the envelope left on the companion",
    "companion_teff_k": "the temperature of the companion",
    "companion_mass_msun": "the mass of the companion",
    "inner_mass_ratio": "the mass ratio of the pair",
    "inner_period_share": "the period of the pair",
    "white_dwarf_mass_msun": "the mass of the white dwarf",
    "white_dwarf_teff_k": "the temperature of the white dwarf",
    "second_white_dwarf_teff_k": "the temperature of the second white dwarf",
    "heavier_share": "the mass ratio of the pair",
    "ebv_mag": "the reddening",
    "distance_pc": "the distance",
    "mass_msun": "the mass of the seen star",
    "unrelated_teff_k": "the temperature of the unrelated star",
    "unrelated_radius_rsun": "the radius of the unrelated star",
}


def parameter_words(name: str) -> str:
    """Return a parameter in words; an unknown one, of somebody's own scenario, by its name."""
    return PARAMETER_WORDS.get(name, name.replace("_", " "))
