"""Quick look at a system before any fit: what the orbit needs, and what an ordinary companion would show."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from vetter.light.engine import Component
from vetter.observations.velocities import orbit_with_velocities
from vetter.physics import kepler, roche, thiele_innes, tides
from vetter.results.inspection_text import render_inspection
from vetter.results.mass_ratio_limits import ordinary_maxima
from vetter.scenarios.context import Context, build_context
from vetter.scenarios.priors import LogUniform
from vetter.scenarios.seen_star import GIANT_MASS_RANGE_MSUN, SeenStarState, ordinary_seen_stars
from vetter.stars.main_sequence import main_sequence
from vetter.stars.properties import radius_from_gravity_rsun
from vetter.system.model import Measurement, Orbit, System

__all__ = ["inspect", "render_inspection"]

FloatArray = NDArray[np.float64]

DRAWS = 4000
THINNED = 20
"""One draw in so many is used for the astrometric maxima, which look at a hundred companions each."""

HEAVIEST_MAIN_SEQUENCE_MSUN = 60.0
LIGHT_CURVE_NM = 800.0
"""Wavelength of the ellipsoidal amplitude where the file names no light curve: the red light of the space surveys."""

LEAST_SINE = 1e-3

QUANTITIES = (
    "seen_star_mass_msun",
    "seen_star_radius_rsun",
    "k1_km_s",
    "mass_function_msun",
    "companion_mass_min_msun",
    "companion_mass_msun",
    "separation_au",
    "roche_lobe_rsun",
    "roche_filling",
    "ellipsoidal_amplitude_mag",
    "mass_ratio_function",
    "mass_ratio_function_single_max",
    "mass_ratio_function_pair_max",
    "companion_mass_if_dark_msun",
    "k1_from_astrometry_km_s",
)
"""Keys of the result that hold [16th, 50th, 84th percentile], or null where something they need was not measured."""


class OrbitDraws(NamedTuple):
    """The measured orbit, all (n,); None where it was not measured. ``photocentre_au`` is a0 over the parallax."""

    period_d: FloatArray
    eccentricity: FloatArray
    k1_km_s: FloatArray | None
    sin_inclination: FloatArray | None
    photocentre_au: FloatArray | None


def inspect(system: System, seed: int = 0) -> dict[str, Any]:
    """Return derived quantities as [16th, 50th, 84th percentile] by Monte Carlo over the input errors.

    Keys beside ``QUANTITIES``: ``system``; ``seen_star``, how its mass was taken; ``period_d`` and ``eccentricity``
    used, and ``orbit_from`` ("the file" or "the epoch velocities"); ``ellipsoidal_wavelength_nm``;
    ``share_above_single_max`` and ``share_above_pair_max``, of the draws whose mass-ratio function is above that of any
    ordinary star or pair; ``companion_mass_from``, which of the masses below the separation is for ("inclination",
    "dark" or "least"); ``added_light``: band -> flux of a main-sequence star of that mass over the seen star's (any
    age, with the scatter of real stars; null where no such star exists).

    The separation, the Roche lobe (of the seen star, at periastron), its filling and the ellipsoidal amplitude are for
    the companion's mass with the measured inclination; else, without K1, for a dark companion of the photocentre; else
    for the least mass, seen edge on, where the amplitude is largest. InputError as
    :func:`vetter.observations.velocities.orbit_with_velocities`.
    """
    fitted = orbit_with_velocities(system)
    rng = np.random.default_rng(seed)
    star, words = _seen_star(fitted, rng)
    draws, context = _draw_orbit(fitted, rng), build_context(fitted)
    out: dict[str, Any] = {
        "system": system.name,
        "seen_star": words,
        "period_d": fitted.orbit.period_d.value,
        "eccentricity": fitted.orbit.eccentricity.value,
        "orbit_from": "the file" if fitted is system else "the epoch velocities",
        **dict.fromkeys(QUANTITIES),
        **dict.fromkeys(("share_above_single_max", "share_above_pair_max", "companion_mass_from", "added_light")),
        "ellipsoidal_wavelength_nm": _light_curve_nm(context),
        "seen_star_mass_msun": _spread(star.mass_msun),
        "seen_star_radius_rsun": _spread(star.radius_rsun),
    }
    velocities, astrometry = _from_velocities(draws, star), _from_photocentre(draws, star)
    out |= {name: _spread(values) for name, values in (velocities | astrometry).items()}
    if draws.photocentre_au is not None:
        out |= _against_ordinary(astrometry["mass_ratio_function"], star, context)
    for source, mass in (
        ("inclination", velocities.get("companion_mass_msun")),
        ("least", velocities.get("companion_mass_min_msun")),
        ("dark", astrometry.get("companion_mass_if_dark_msun")),
    ):
        if mass is not None:
            sine = np.ones(DRAWS) if source == "least" or draws.sin_inclination is None else draws.sin_inclination
            found = _around_the_seen_star(draws, star, mass, sine, out["ellipsoidal_wavelength_nm"])
            out |= {name: _spread(values) for name, values in found.items()}
            return out | {"companion_mass_from": source, "added_light": _added_light(context, star, mass, rng)}
    return out


def _drawn(measured: Measurement, rng: np.random.Generator) -> FloatArray:
    return np.asarray(measured.value + measured.error * rng.standard_normal(DRAWS))


def _spread(values: FloatArray) -> list[float]:
    return [float(v) for v in np.percentile(values, [16.0, 50.0, 84.0])]


def _draw_orbit(system: System, rng: np.random.Generator) -> OrbitDraws:
    """Draw period, eccentricity and K1, each with its own error, and the photocentre with its inclination."""
    orbit = system.orbit
    period_d = np.abs(_drawn(orbit.period_d, rng))
    eccentricity = np.clip(np.abs(_drawn(orbit.eccentricity, rng)), 0.0, 0.999)
    k1 = None if orbit.k1_km_s is None else np.abs(_drawn(orbit.k1_km_s, rng))
    axis_mas, inclination_deg = _draw_photocentre(orbit, rng)
    sine = None
    if inclination_deg is not None:
        sine = np.maximum(np.abs(np.sin(np.radians(inclination_deg))), LEAST_SINE)
    return OrbitDraws(period_d, eccentricity, k1, sine, _in_au(axis_mas, system, rng))


def _draw_photocentre(orbit: Orbit, rng: np.random.Generator) -> tuple[FloatArray | None, FloatArray | None]:
    """Draw the semi-major axis (mas) and the inclination (degrees); the elements with their full covariance."""
    elements = orbit.thiele_innes
    if elements is not None:
        root = np.linalg.cholesky(np.array(elements.covariance))
        means = np.array([elements.a_mas, elements.b_mas, elements.f_mas, elements.g_mas])
        geometric = thiele_innes.to_geometric(*(means[:, None] + root @ rng.standard_normal((4, DRAWS))))
        return geometric.a_mas, geometric.inclination_deg
    axis = None if orbit.photocentre_mas is None else np.abs(_drawn(orbit.photocentre_mas, rng))
    return axis, None if orbit.inclination_deg is None else _drawn(orbit.inclination_deg, rng)


def _in_au(axis_mas: FloatArray | None, system: System, rng: np.random.Generator) -> FloatArray | None:
    """Return the semi-major axis (au); None without one, and where the parallax is not above zero."""
    given = system.distance
    if axis_mas is None:
        return None
    if given.distance_pc is not None:
        return np.asarray(axis_mas * 1e-3 * np.abs(_drawn(given.distance_pc, rng)))
    parallax = given.parallax_mas
    if parallax is None or parallax.value <= 0.0:
        return None
    return np.asarray(axis_mas / np.maximum(_drawn(parallax, rng), 0.01 * parallax.value))


def _from_velocities(draws: OrbitDraws, star: SeenStarState) -> dict[str, FloatArray]:
    """Return the mass function and the companion's mass, least and with the inclination; empty without K1."""
    if draws.k1_km_s is None:
        return {}
    f_msun = kepler.mass_function_msun(draws.period_d, draws.k1_km_s, draws.eccentricity)
    found = {
        "k1_km_s": draws.k1_km_s,
        "mass_function_msun": f_msun,
        "companion_mass_min_msun": kepler.companion_mass_min_msun(f_msun, star.mass_msun),
    }
    if draws.sin_inclination is not None:
        found["companion_mass_msun"] = kepler.companion_mass_msun(f_msun, star.mass_msun, draws.sin_inclination)
    return found


def _from_photocentre(draws: OrbitDraws, star: SeenStarState) -> dict[str, FloatArray]:
    """Return the mass-ratio function and what follows for a dark companion; empty without a photocentre."""
    if draws.photocentre_au is None:
        return {}
    value = kepler.measured_mass_ratio_function(draws.photocentre_au, 1.0, star.mass_msun, draws.period_d)
    # A^3 = q^3 / (1 + q)^2 for a dark companion: the cubic of the velocities, with A^3 M1 as mass function.
    dark = kepler.companion_mass_min_msun(value**3 * star.mass_msun, star.mass_msun)
    found = {"mass_ratio_function": value, "companion_mass_if_dark_msun": dark}
    if draws.sin_inclination is not None:
        found["k1_from_astrometry_km_s"] = kepler.semi_amplitude_km_s(
            star.mass_msun, dark, draws.period_d, draws.sin_inclination, draws.eccentricity
        )
    return found


def _against_ordinary(value: FloatArray, star: SeenStarState, context: Context) -> dict[str, Any]:
    """Return the largest mass-ratio functions of ordinary companions, and how often the measured one is above."""
    column = context.photocentre_column
    if column is None:
        return {}
    few = SeenStarState(*(values[::THINNED] for values in star))
    single, pair = ordinary_maxima(few, context.engine, column)
    return {
        "mass_ratio_function_single_max": _spread(single),
        "mass_ratio_function_pair_max": _spread(pair),
        "share_above_single_max": float(np.mean(value[::THINNED] > single)),
        "share_above_pair_max": float(np.mean(value[::THINNED] > pair)),
    }


def _around_the_seen_star(
    draws: OrbitDraws, star: SeenStarState, mass: FloatArray, sine: FloatArray, wavelength_nm: float
) -> dict[str, FloatArray]:
    """Return the orbit's size, the seen star in its Roche lobe, and how its light waves beside a dark companion."""
    total = star.mass_msun + mass
    separation_rsun = kepler.separation_rsun(total, draws.period_d)
    lobe = roche.roche_lobe_rsun(star.mass_msun, mass, separation_rsun, draws.eccentricity)
    darkening = tides.gravity_darkening(star.teff_k, wavelength_nm)
    amplitude = tides.ellipsoidal_amplitude_mag(
        mass / star.mass_msun, star.radius_rsun / separation_rsun, sine, darkening
    )
    return {
        "separation_au": kepler.separation_au(total, draws.period_d),
        "roche_lobe_rsun": lobe,
        "roche_filling": star.radius_rsun / lobe,
        "ellipsoidal_amplitude_mag": amplitude * tides.eccentric_share(float(np.median(draws.eccentricity)), sine),
    }


def _light_curve_nm(context: Context) -> float:
    """Return the wavelength (nm) of the light curve's band."""
    given = context.system.variability
    if given is None:
        return LIGHT_CURVE_NM
    return 0.1 * context.engine.pivots_angstrom[context.engine.bands.index(given.band)]


def _seen_star(system: System, rng: np.random.Generator) -> tuple[SeenStarState, str]:
    """Draw the seen star from its measurements; a quantity that was not measured comes from its prior."""
    kind, *others = ordinary_seen_stars(system)
    given = {"teff_k": system.primary.teff_k, "logg": system.primary.logg, "feh": system.primary.feh}
    draws: dict[str, FloatArray] = {}
    for parameter in kind.parameters(system.primary):
        measured = given.get(parameter.name)
        from_prior = parameter.prior.from_normal(rng.standard_normal(DRAWS))
        draws[parameter.name] = from_prior if measured is None else _drawn(measured, rng)
    star = kind.star(draws, rng.standard_normal(DRAWS), np.full(DRAWS, np.inf))
    mass = system.primary.mass_msun
    if mass is not None:
        drawn = np.maximum(_drawn(mass, rng), 0.01)
        return star._replace(mass_msun=drawn, radius_rsun=radius_from_gravity_rsun(drawn, star.logg)), "the mass given"
    if system.primary.teff_k is None or system.primary.logg is None:
        drawn = LogUniform(*GIANT_MASS_RANGE_MSUN).from_normal(rng.standard_normal(DRAWS))
        radius = radius_from_gravity_rsun(drawn, star.logg)
        return star._replace(mass_msun=drawn, radius_rsun=radius), "unknown: give teff_k and logg, or mass_msun"
    return star, "; it may also be ".join([kind.words, *(other.words for other in others)])


def _added_light(
    context: Context, star: SeenStarState, mass: FloatArray, rng: np.random.Generator
) -> Mapping[str, list[float] | None]:
    """Return the flux ratio of main-sequence stars of these masses to the seen star, per band."""
    engine = context.engine
    companion = main_sequence(mass, rng.uniform(size=DRAWS), star.feh, *rng.standard_normal((2, DRAWS)))
    exists = companion.valid & (mass <= HEAVIEST_MAIN_SEQUENCE_MSUN)
    if np.mean(exists) < 0.5:
        return dict.fromkeys(engine.bands)
    seen = Component("star", star.teff_k, star.logg, star.feh, star.radius_rsun)
    other = Component("star", companion.teff_k, companion.logg, star.feh, companion.radius_rsun)
    ratio = 10.0 ** (0.4 * (engine.magnitudes(seen, 10.0, 0.0) - engine.magnitudes(other, 10.0, 0.0)))[exists]
    return {band: _spread(ratio[:, column]) for column, band in enumerate(engine.bands)}
