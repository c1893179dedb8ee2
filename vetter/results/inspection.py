"""Quick look at a system before any fit: what the orbit needs, and how much light an ordinary companion would add."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np
from numpy.typing import NDArray

from vetter.light.engine import Component
from vetter.observations.astrometry import measured_inclination
from vetter.observations.orbit import k1_error_km_s
from vetter.observations.velocities import orbit_with_velocities
from vetter.physics import kepler, roche
from vetter.scenarios.context import build_context
from vetter.scenarios.priors import LogUniform
from vetter.scenarios.seen_star import GIANT_MASS_RANGE_MSUN, SeenStarState, ordinary_seen_stars
from vetter.stars.main_sequence import main_sequence
from vetter.stars.properties import radius_from_gravity_rsun
from vetter.system.model import Measurement, System

FloatArray = NDArray[np.float64]

DRAWS = 4000
HEAVIEST_MAIN_SEQUENCE_MSUN = 60.0


def inspect(system: System, seed: int = 0) -> dict[str, Any]:
    """Return derived quantities as [16th, 50th, 84th percentile] by Monte Carlo over the input errors.

    Keys: ``system``, ``seen_star`` (how its mass was taken), ``seen_star_mass_msun``, ``seen_star_radius_rsun``,
    ``mass_function_msun``, ``companion_mass_min_msun``, ``companion_mass_msun`` (null without an inclination),
    ``separation_au`` and ``roche_lobe_rsun`` (of the seen star at periastron) for the companion's mass, or its least
    mass, and ``added_light``: band -> flux of a main-sequence star of that mass over the seen star's (half way through
    its life; null where no such star exists). Quantities that need K1 are null when it was not measured.
    """
    system = orbit_with_velocities(system)
    rng = np.random.default_rng(seed)
    star, words = _seen_star(system, rng)
    orbit = system.orbit
    out: dict[str, Any] = {
        "system": system.name,
        "seen_star": words,
        "seen_star_mass_msun": _spread(star.mass_msun),
        "seen_star_radius_rsun": _spread(star.radius_rsun),
        "mass_function_msun": None,
        "companion_mass_min_msun": None,
        "companion_mass_msun": None,
        "separation_au": None,
        "roche_lobe_rsun": None,
        "added_light": None,
    }
    if orbit.k1_km_s is None:
        return out
    period_d, e = _drawn(orbit.period_d, rng), np.clip(_drawn(orbit.eccentricity, rng), 0.0, 0.999)
    k1 = np.abs(_drawn(Measurement(orbit.k1_km_s.value, k1_error_km_s(orbit)), rng))
    f_msun = kepler.mass_function_msun(period_d, k1, e)
    least = companion = kepler.companion_mass_min_msun(f_msun, star.mass_msun)
    inclination = measured_inclination(orbit)
    if inclination is not None:
        sin_i = np.maximum(np.abs(np.sin(np.radians(_drawn(inclination, rng)))), 1e-3)
        companion = kepler.companion_mass_msun(f_msun, star.mass_msun, sin_i)
        out["companion_mass_msun"] = _spread(companion)
    separation_rsun = kepler.separation_rsun(star.mass_msun + companion, period_d)
    out["mass_function_msun"], out["companion_mass_min_msun"] = _spread(f_msun), _spread(least)
    out["separation_au"] = _spread(kepler.separation_au(star.mass_msun + companion, period_d))
    out["roche_lobe_rsun"] = _spread(roche.roche_lobe_rsun(star.mass_msun, companion, separation_rsun, e))
    out["added_light"] = _added_light(system, star, float(np.median(companion)))
    return out


def _drawn(measured: Measurement, rng: np.random.Generator) -> FloatArray:
    return np.asarray(measured.value + measured.error * rng.standard_normal(DRAWS))


def _spread(values: FloatArray) -> list[float]:
    return [float(v) for v in np.percentile(values, [16.0, 50.0, 84.0])]


def _seen_star(system: System, rng: np.random.Generator) -> tuple[SeenStarState, str]:
    """Draw the seen star from its measurements; a quantity that was not measured comes from its prior."""
    kind = ordinary_seen_stars(system)[0]
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
    return star, kind.words


def _added_light(system: System, star: SeenStarState, companion_msun: float) -> Mapping[str, float | None]:
    """Flux ratio of a main-sequence star of this mass to the seen star, per photometric band."""
    context = build_context(system)
    bands = context.engine.bands
    one, feh = np.ones(1), np.array([float(np.median(star.feh))])
    mass = np.array([companion_msun])
    companion = main_sequence(mass, 0.5 * one, feh)
    if companion_msun > HEAVIEST_MAIN_SEQUENCE_MSUN or not bool(companion.valid[0]):
        return dict.fromkeys(bands)
    teff, logg, radius = (np.array([float(np.median(v))]) for v in (star.teff_k, star.logg, star.radius_rsun))
    seen = Component("star", teff, logg, feh, radius)
    other = Component("star", companion.teff_k, companion.logg, feh, companion.radius_rsun)
    difference = context.engine.magnitudes(seen, 10.0, 0.0) - context.engine.magnitudes(other, 10.0, 0.0)
    return dict(zip(bands, (10.0 ** (0.4 * difference[0, : len(bands)])).tolist(), strict=True))


def render_inspection(found: Mapping[str, Any]) -> str:
    """Return the quick look as text for a terminal."""
    lines = [str(found["system"]), ""]
    rows = (
        ("mass of the seen star", "seen_star_mass_msun", "Msun"),
        ("radius of the seen star", "seen_star_radius_rsun", "Rsun"),
        ("mass function", "mass_function_msun", "Msun"),
        ("least mass of the companion", "companion_mass_min_msun", "Msun"),
        ("mass of the companion", "companion_mass_msun", "Msun"),
        ("separation", "separation_au", "au"),
        ("seen star's Roche lobe at periastron", "roche_lobe_rsun", "Rsun"),
    )
    for words, key, unit in rows:
        value = found[key]
        if value is not None:
            low, median, high = value
            lines.append(f"{words:<38}{median:>10.4g} {unit:<5} (68 %: {low:.4g} to {high:.4g})")
    lines.append(f"(seen star: {found['seen_star']})")
    if found["added_light"]:
        lines += ["", "light an ordinary main-sequence star of that mass would add"]
        for band, ratio in found["added_light"].items():
            words = "no such star" if ratio is None else f"{100 * ratio:.3g} % of the seen star"
            lines.append(f"  {band:<24}{words}")
    return "\n".join(lines) + "\n"
