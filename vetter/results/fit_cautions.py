"""What is wrong, or thin, in the orbit and the distance, and where the best cases leave the tables."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from vetter.light.engine import Component
from vetter.observations.astrometry import axis_and_inclination
from vetter.observations.base import GaussianObservation, Observation
from vetter.observations.orbit import k1_error_km_s
from vetter.physics import kepler
from vetter.results.best_cases import BestCase
from vetter.scenarios.context import Context
from vetter.system.model import System

SIGNIFICANT_SIGMA = 5.0
"""An amplitude or parallax below this many of its errors leaves the orbit itself in doubt (common practice)."""

MISSED_SIGMA = 3.0

WOBBLE_SIGMA = 3.0
"""An orbit on the sky larger than this many errors of the parallax can have bent the parallax."""


def significance_cautions(system: System) -> list[str]:
    """Return which of K1, photocentre and parallax are too weak to be sure of the orbit and its scale."""
    orbit, parallax = system.orbit, system.distance.parallax_mas
    measured: list[tuple[str, float, float]] = []
    if orbit.k1_km_s is not None:
        measured.append(("K1", orbit.k1_km_s.value, k1_error_km_s(orbit)))
    found = axis_and_inclination(orbit)
    if orbit.photocentre_mas is not None:
        measured.append(("The photocentre", orbit.photocentre_mas.value, orbit.photocentre_mas.error))
    elif found is not None:
        measured.append(("The photocentre", float(found[0][0]), float(np.sqrt(found[1][0, 0]))))
    said = [
        f"{name} is only {value / error:.1f} times its error: the orbit itself may be spurious, and no verdict is "
        "surer than the orbit."
        for name, value, error in measured
        if value < SIGNIFICANT_SIGMA * error
    ]
    if parallax is not None and parallax.value < SIGNIFICANT_SIGMA * parallax.error:
        said.append(
            f"The parallax is only {parallax.value / parallax.error:.1f} times its error: the distance leans on its "
            "prior."
        )
    return said


def parallax_cautions(context: Context, cases: Sequence[BestCase]) -> list[str]:
    """Return whether the orbit, not fitted on the sky, may have bent the parallax.

    For the best case: the photocentre's semi-major axis against the parallax error. Silent where the orbit on the sky
    was measured, since the parallax was then fitted along with it.
    """
    system = context.system
    orbit, parallax = system.orbit, system.distance.parallax_mas
    if parallax is None or orbit.photocentre_mas is not None or orbit.thiele_innes is not None or not cases:
        return []
    best = min(cases, key=lambda case: case.row.chi2_min or 0.0).prediction
    separation_au = best.separation_rsun * (kepler.R_SUN_KM / kepler.AU_KM)
    masses = (best.mass_msun, best.companion_mass_msun)
    light = 0.0 if best.unrelated_mas is not None else best.optical_ratio
    wobble = float(kepler.photocentre_mas(1000.0 / best.distance_pc, separation_au, *masses, light)[0])
    if wobble < WOBBLE_SIGMA * parallax.error:
        return []
    return [
        f"In the best case the orbit moves the light by {wobble:.2g} mas on the sky, {wobble / parallax.error:.0f} "
        "times the error of the parallax: a parallax fitted without the orbit may be off by more than that error."
    ]


def missed_cautions(observations: Sequence[Observation], cases: Sequence[BestCase]) -> list[str]:
    """Return which single measurements even the best case misses by three sigma: data at odds with each other."""
    if not cases:
        return []
    best = min(cases, key=lambda case: case.row.chi2_min or 0.0)
    missed = []
    for observation in observations:
        if isinstance(observation, GaussianObservation):
            sigma = float(observation.residuals(best.prediction)[0, 0])
            if abs(sigma) > MISSED_SIGMA:
                missed.append(f"{observation.describe()} ({abs(sigma):.1f} sigma)")
    if not missed:
        return []
    return [f"Even the best explanation, {best.title}, misses {', '.join(missed)}: these data are at odds."]


def extrapolation_cautions(context: Context, cases: Sequence[BestCase]) -> list[str]:
    """Return which best cases that stand take light from beyond the tables, where their end is held."""
    beyond = []
    for case in cases:
        if not case.stands:
            continue
        p = case.prediction
        seen = Component("star", p.teff_k, p.logg, p.feh, p.radius_rsun)
        bodies = [("seen star", seen), *(("companion", star.body) for star in p.hidden_stars)]
        for who, body in bodies:
            if not bool(context.engine.inside(body)[0]):
                beyond.append(f"{who} of {case.title} ({float(body.teff_k[0]):.0f} K, log g {float(body.logg[0]):.1f})")
    if not beyond:
        return []
    return [f"The light tables end before these stars, whose light is that of the tables' edge: {', '.join(beyond)}."]
