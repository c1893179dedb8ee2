"""The opening: what was measured, and what the orbit alone asks for."""

from __future__ import annotations

from vetter.results.prose.bibliography import passband_works
from vetter.results.prose.document import Citation, Inline, Name, Number, Sentence, Text, joined, say
from vetter.results.prose.material import Material
from vetter.results.prose.numbers import counted, given, given_percent, measured, plain
from vetter.results.prose.symbols import band_label
from vetter.system.model import LightLimit, Measurement, System


def opening(material: Material) -> tuple[Sentence, ...]:
    """Return the sentences that open the section."""
    name = Name(material.system.name)
    first = say("We ask which configurations could produce everything that has been measured of {name}.", name=name)
    return (first, data_sentence(material.system), *orbit_sentences(material), *absent_sentence(material))


def value_of(key: str, measurement: Measurement, unit: str = "") -> Number:
    """Return a measurement as a number; one without an error as it was given."""
    if measurement.error > 0.0:
        return measured(key, measurement.value, measurement.error, unit)
    return given(key, measurement.value, unit)


def data_sentence(system: System) -> Sentence:
    """Return the list of everything that was used."""
    parts = [_photometry(system), _distance(system), *_reddening(system), *_seen_star(system), _orbit(system)]
    parts += [*_sky(system), *_limits(system), *_others(system)]
    return say("The data are {parts}.", parts=joined(parts, last=", and "))


def _photometry(system: System) -> Sentence:
    bands = [m.band for m in system.magnitudes] + [m.band for m in system.magnitude_limits]
    works = passband_works(bands)
    cite: Sentence = (Text(" "), Citation(works)) if works else ()
    found = say(
        "{count} magnitudes ({bands}){cite}",
        count=count_of("data.magnitudes", len(system.magnitudes)),
        bands=joined([Name(band_label(m.band)) for m in system.magnitudes]),
        cite=cite,
    )
    if not system.magnitude_limits:
        return found
    limits = joined([Name(band_label(m.band)) for m in system.magnitude_limits])
    return say("{found} with upper limits on the brightness in {limits}", found=found, limits=limits)


def count_of(key: str, number: int) -> Inline:
    """Return a count as a word up to twelve, then in digits."""
    word = counted(number)
    return Text(word) if word is not None else given(key, float(number))


def _distance(system: System) -> Sentence:
    if system.distance.parallax_mas is not None:
        return say("a parallax of {value}", value=value_of("data.parallax_mas", system.distance.parallax_mas, "mas"))
    if system.distance.distance_pc is None:
        raise ValueError("a system has a parallax or a distance")
    return say("a distance of {value}", value=value_of("data.distance_pc", system.distance.distance_pc, "pc"))


def _reddening(system: System) -> list[Sentence]:
    dust = system.extinction
    if dust is None or dust.ebv_mag is None:
        return []
    return [say("a reddening {EBV} of {value}", value=value_of("data.ebv_mag", dust.ebv_mag, "mag"))]


def _seen_star(system: System) -> list[Sentence]:
    seen = system.primary
    parts = []
    if seen.teff_k is not None:
        parts.append(say("{Teff} of {value}", value=value_of("data.teff_k", seen.teff_k, "K")))
    if seen.logg is not None:
        parts.append(say("{logg} of {value}", value=value_of("data.logg", seen.logg)))
    if seen.feh is not None:
        parts.append(say("{FeH} of {value}", value=value_of("data.feh", seen.feh)))
    found = []
    if parts:
        found.append(say("the spectroscopic parameters of the seen star ({parts})", parts=joined(parts)))
    if seen.mass_msun is not None:
        value = value_of("data.mass_msun", seen.mass_msun, "Msun")
        found.append(say("an outside estimate of its mass, {value}", value=value))
    return found


def _orbit(system: System) -> Sentence:
    orbit = system.orbit
    period = value_of("data.period_d", orbit.period_d, "d")
    if orbit.eccentricity_given:
        shape = say("eccentricity {value}", value=value_of("data.eccentricity", orbit.eccentricity))
    else:
        shape = say("no eccentricity given")
    where = say("(period {period}, {shape})", period=period, shape=shape)
    if orbit.k1_km_s is None:
        return say("the period of the orbit {where}", where=where)
    k1 = value_of("data.k1_km_s", orbit.k1_km_s, "km_s")
    return say("a velocity semi-amplitude {K1} of {k1} {where}", k1=k1, where=where)


def _sky(system: System) -> list[Sentence]:
    orbit, found = system.orbit, []
    if orbit.inclination_deg is not None:
        value = value_of("data.inclination_deg", orbit.inclination_deg, "deg")
        found.append(say("an inclination of {value}", value=value))
    if orbit.photocentre_mas is not None:
        band = Name(band_label(orbit.photocentre_band or "GAIA/GAIA3.G"))
        value = value_of("data.photocentre_mas", orbit.photocentre_mas, "mas")
        found.append(say("a semi-major axis of the photocentre of {value} in {band}", value=value, band=band))
    if orbit.thiele_innes is not None:
        found.append(say("the Thiele--Innes elements of the astrometric orbit"))
    return found


def window(key: str, limit: LightLimit) -> Sentence:
    """Return the wavelengths of a light limit in words."""
    low, high = limit.wavelength_nm
    parts = {"low": given(f"{key}.low_nm", low), "high": given(f"{key}.high_nm", high, "nm")}
    return say("{low}{dash}{high}", **parts)


def _limits(system: System) -> list[Sentence]:
    found = []
    for place, limit in enumerate(system.light_limits):
        key = f"data.light_limit.{place}"
        found.append(
            say(
                "a limit of {ratio} ({confidence} confidence) on the light of a second star, relative to the seen one, "
                "at {window}",
                ratio=given_percent(f"{key}.ratio_max", limit.ratio_max),
                confidence=given_percent(f"{key}.confidence", limit.confidence),
                window=window(key, limit),
            )
        )
    return found


def _others(system: System) -> list[Sentence]:
    found: list[Sentence] = []
    if system.velocities is not None:
        count = count_of("data.velocities", len(system.velocities.time_bjd))
        found.append(say("{count} epoch velocities", count=count))
    if system.variability is not None:
        found.append(say("a light curve in {band}", band=Name(band_label(system.variability.band))))
    if system.imaging is not None:
        found.append(say("limits from imaging in {band}", band=Name(band_label(system.imaging.band))))
    if system.x_ray is not None:
        value = plain("data.x_ray", system.x_ray.luminosity_max_erg_s / 1e30, 2)
        unit = say("{value} times {unit}", value=value, unit=Name("10^30 erg/s"))
        found.append(say("an upper limit of {value} on the X-ray luminosity", value=unit))
    return found


def orbit_sentences(material: Material) -> tuple[Sentence, ...]:
    """Return what the orbit asks for: mass function and least companion mass."""
    orbit = material.verdicts.orbit
    if orbit.mass_function_msun is None:
        return ()
    mass_function = plain("orbit.mass_function_msun", orbit.mass_function_msun, 3, "Msun")
    if orbit.companion_min_msun is None or orbit.seen_star_msun is None:
        return (say("The mass function is {f}.", f=mass_function),)
    return (
        say(
            "The mass function of {f} asks for a companion of at least {least} if the seen star has {seen}, its mass "
            "in the best fit.",
            f=mass_function,
            least=plain("orbit.companion_min_msun", orbit.companion_min_msun, 3, "Msun"),
            seen=plain("orbit.seen_star_msun", orbit.seen_star_msun, 3, "Msun"),
        ),
    )


ABSENT_WORDS = {
    "dust": "measure of the reddening",
    "light_limit": "limit on a second spectrum",
    "velocities": "epoch velocities",
    "variability": "light curve",
    "imaging": "high-resolution images",
    "x_ray": "X-ray data",
    "spectroscopy": "spectroscopic parameters",
    "inclination": "inclination",
    "photocentre": "astrometric orbit",
}
"""What a reader would miss, as after "no"; others are not worth a word."""


def absent_sentence(material: Material) -> tuple[Sentence, ...]:
    """Return the kinds of observation that did not enter."""
    absent = set(material.verdicts.observations_absent)
    if "astrometry" not in absent:
        absent.discard("photocentre")
        absent.discard("inclination")
    words = [words for name, words in ABSENT_WORDS.items() if name in absent]
    if not words:
        return ()
    return (say("We had no {words}.", words=joined(words, last=" or ")),)
