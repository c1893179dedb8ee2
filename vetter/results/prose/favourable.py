"""The most favourable case of an explanation: masses, temperatures, and its light where that matters most."""

from __future__ import annotations

from collections.abc import Mapping
from typing import NamedTuple

from vetter.observations.photometry import PhotometryObservation
from vetter.results.best_details import window_name
from vetter.results.prose.data_words import window
from vetter.results.prose.document import Inline, Name, Sentence, joined, say
from vetter.results.prose.material import Material
from vetter.results.prose.numbers import percent, plain, temperature
from vetter.results.prose.symbols import band_label
from vetter.results.verdicts import BestFit, HiddenLight, ScenarioVerdict

LEADS = ("In its most favourable case {seen} has", "At its best, {seen} has", "The most favourable case gives {seen}")
"""How the numbers of the most favourable case begin, in turn."""

TRACE_OF_LIGHT = 5e-4
"""Less light than this share of the seen star's is called none."""


def favourable(material: Material, row: ScenarioVerdict) -> tuple[Sentence, ...]:
    """Return the numbers of the most favourable case; nothing where there is none."""
    if row.best_fit is None or "m2_msun" not in row.best_fit.values:
        return ()
    key = f"scenarios.{row.name}.best_fit"
    values = row.best_fit.values
    parts: dict[str, Inline | Sentence] = {"m2": plain(f"{key}.m2_msun", values["m2_msun"], 3, "Msun")}
    lead = LEADS[material.verdicts.scenarios.index(row) % len(LEADS)]
    seen = "the seen star"
    if "m1_msun" in values:
        seen, parts["m1"] = "a seen star of {m1}", plain(f"{key}.m1_msun", values["m1_msun"], 3, "Msun")
    stars = row.best_fit.hidden_stars
    if row.name == "unrelated_light" or not stars:
        body = "a dark companion of {m2}"
    elif len(stars) == 1 and row.name != "compact_pair":
        body, parts["star"] = "a companion of {m2} ({star})", surface(f"{key}.star", stars[0])
    else:
        body = "a companion of {m2} in all, {stars}"
        parts["stars"] = pair_words(key, stars)
    return (
        say(f"{lead.format(seen=seen)} {body}{{light}}.", **parts, light=light_words(material, row.name, row.best_fit)),
    )


def surface(key: str, star: HiddenLight) -> Sentence:
    """Return temperature and radius of a star."""
    teff = temperature(f"{key}.teff_k", star.teff_k)
    return say("{teff}, {radius}", teff=teff, radius=plain(f"{key}.radius_rsun", star.radius_rsun, 2, "Rsun"))


def pair_words(key: str, stars: tuple[HiddenLight, ...]) -> Sentence:
    """Return the shining stars of a pair; twins are named once."""
    if len(stars) == 1:
        return say(f"part of it {_kind(stars[0])} ({{surface}})", surface=surface(f"{key}.star", stars[0]))
    words = [_member(f"{key}.star.{place}", star) for place, star in enumerate(stars)]
    if _alike(*stars[:2]) and stars[0].mass_msun is not None:
        mass = plain(f"{key}.star.0.mass_msun", stars[0].mass_msun, 3, "Msun")
        return say("two like stars of {mass} ({surface})", mass=mass, surface=surface(f"{key}.star.0", stars[0]))
    return joined(words)


def _member(key: str, star: HiddenLight) -> Sentence:
    if star.mass_msun is None:
        return say(f"{_kind(star)} ({{surface}})", surface=surface(key, star))
    mass = plain(f"{key}.mass_msun", star.mass_msun, 3, "Msun")
    return say(f"{_kind(star)} of {{mass}} ({{surface}})", mass=mass, surface=surface(key, star))


def _kind(star: HiddenLight) -> str:
    return "a white dwarf" if "white_dwarf" in star.kind else "a star"


def _alike(first: HiddenLight, second: HiddenLight) -> bool:
    """Whether two stars would be printed the same."""
    same = [(first.mass_msun, second.mass_msun), (first.teff_k, second.teff_k), (first.radius_rsun, second.radius_rsun)]
    return first.kind == second.kind and all(
        a is not None and b is not None and abs(a - b) <= 0.002 * a for a, b in same
    )


class Place(NamedTuple):
    """Where the second light matters: its ratio to the seen star's, and the place in words."""

    ratio: float
    key: str
    words: Sentence


def light_words(material: Material, name: str, best: BestFit) -> Sentence:
    """Return how much light the case adds where that matters most: in the band, and in the deciding window."""
    places = [*strongest_band(material, best), *deciding_window(material, best)]
    places = [place for place in places if place.ratio >= TRACE_OF_LIGHT]
    if not places:
        return () if not best.hidden_stars else say(", with next to no light of its own")
    key = f"scenarios.{name}.best_fit.light_ratio"
    first, *others = places
    light = (
        "{share} the seen star's light {where}" if first.ratio >= 1.0 else "{share} of the seen star's light {where}"
    )
    parts = [say(light, share=share_words(f"{key}.{first.key}", first.ratio), where=first.words)]
    for place in others:
        share = share_words(f"{key}.{place.key}", place.ratio)
        parts.append(say("{share} {where}", share=share, where=place.words))
    whose = "an unrelated star that adds" if name == "unrelated_light" else "adding"
    return say(f", {whose} {{parts}}", parts=joined(parts))


def share_words(key: str, ratio: float) -> Sentence:
    """Return a light ratio as a percentage, or from one on as so many times."""
    if ratio < 1.0:
        return (percent(key, ratio),)
    return say("{ratio} times", ratio=plain(key, ratio, 2))


def strongest_band(material: Material, best: BestFit) -> list[Place]:
    """Return the measured band in which the added light is largest against the error there."""
    engine = material.context.engine
    photometry = PhotometryObservation.from_system(material.system, engine)
    if photometry is None:
        return []
    errors: Mapping[str, float] = {
        engine.bands[place]: error for place, error in zip(photometry.index, photometry.sigma_mag, strict=True)
    }
    seen = [band for band in errors if band in best.light_ratio]
    if not seen:
        return []
    band = max(seen, key=lambda band: best.light_ratio[band] / errors[band])
    return [Place(best.light_ratio[band], band, say("in {band}", band=Name(band_label(band))))]


def deciding_window(material: Material, best: BestFit) -> list[Place]:
    """Return the window of the light limit that the added light strains most."""
    limits = [
        (place, limit)
        for place, limit in enumerate(material.system.light_limits)
        if window_name(limit.wavelength_nm) in best.light_ratio
    ]
    if not limits:
        return []
    place, limit = max(
        limits, key=lambda item: best.light_ratio[window_name(item[1].wavelength_nm)] / item[1].ratio_max
    )
    name = window_name(limit.wavelength_nm)
    words = say("at {window}", window=window(f"data.light_limit.{place}", limit))
    return [Place(best.light_ratio[name], name, words)]
