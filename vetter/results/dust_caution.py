"""A companion behind its own dust: what of its light the infrared leaves room for."""

from __future__ import annotations

from collections.abc import Sequence
from typing import NamedTuple

import numpy as np

from vetter.observations.base import Observation
from vetter.observations.photometry import INFRARED_FROM_ANGSTROM, PhotometryObservation
from vetter.observations.x_ray import is_dark
from vetter.physics import kepler
from vetter.results.best_cases import BestCase
from vetter.results.plain_numbers import two_digits
from vetter.scenarios.context import Context
from vetter.stars.main_sequence import main_sequence
from vetter.stars.properties import TEFF_SUN_K

ONE_SIDED_95 = 1.644854

PEAK_MICRON_K = 3669.7
"""Wavelength times temperature where nu F_nu of a black body peaks, and there ..."""

PEAK_SHARE = 0.7357
"""... nu F_nu is this share of its whole flux (any textbook; both from Planck's law)."""

_SECOND_RADIATION_MICRON_K = 14387.77


GRAIN_K = 278.3
"""Temperature of a black grain 1 au from a star of 1 Lsun (any textbook, from the solar constant)."""


class DustRoom(NamedTuple):
    """Room for dust in one band: its temperature (K) and most light (Lsun) at 95 %."""

    band: str
    dust_k: float
    light_lsun: float


def dust_caution(context: Context, observations: Sequence[Observation], cases: Sequence[BestCase]) -> list[str]:
    """Return how much of an ordinary companion's light dust could hide, where a dark companion stands.

    Said where a single main-sequence companion was excluded, for the best case that is dark.
    """
    ordinary = next((case for case in cases if case.row.name == "main_sequence"), None)
    dark = [case for case in cases if case.stands and is_dark(case.prediction)]
    if not dark or (ordinary is not None and ordinary.stands):
        return []
    case = min(dark, key=lambda case: case.row.chi2_min or 0.0)
    photometry = next((o for o in observations if isinstance(o, PhotometryObservation)), None)
    mass = float(case.prediction.companion_mass_msun[0])
    star = main_sequence(mass, 0.5, float(case.prediction.feh[0]))
    if photometry is None or not bool(star.valid):
        return []
    light = float(star.luminosity_lsun)
    hidden = f"dust that hid a main-sequence star of {two_digits(mass)} Msun ({two_digits(light)} Lsun)"
    separation_au = float(case.prediction.separation_rsun[0]) * kepler.R_SUN_KM / kepler.AU_KM
    grain_k = GRAIN_K * light**0.25 / separation_au**0.5
    room = dust_room(context, photometry, case)
    if not room:
        return [f"No magnitude beyond 3 micron limits {hidden}: such a companion was not tried."]
    words = ", ".join(f"{two_digits(100.0 * r.light_lsun / light)} % at {r.dust_k:.0f} K ({r.band})" for r in room)
    return [
        f"No explanation hides the companion in dust. The light of {hidden} would come back in the infrared; the "
        f"magnitudes leave room for this share of it (95 %): {words}. Cooler dust would not show, but within the orbit "
        f"(of {two_digits(separation_au)} au) black grains are warmer than {grain_k:.0f} K."
    ]


def dust_room(context: Context, photometry: PhotometryObservation, case: BestCase) -> list[DustRoom]:
    """Return the room for dust at the temperature that shines most in each band beyond 3 micron, bluest first.

    The most excess is the residual of the best fit plus 1.64 sigma, no less than that of a perfect fit; the seen star
    shines there as a black body.
    """
    engine, predicted = context.engine, case.prediction
    teff = float(predicted.teff_k[0])
    luminosity = float(predicted.radius_rsun[0]) ** 2 * (teff / TEFF_SUN_K) ** 4
    found = []
    for place, column in enumerate(photometry.index):
        micron = engine.pivots_angstrom[column] * 1e-4
        if engine.pivots_angstrom[column] < INFRARED_FROM_ANGSTROM or photometry.with_excess[place]:
            continue
        brighter = float(predicted.magnitudes[0, column]) - float(photometry.mag[place])
        excess_mag = max(brighter, 0.0) + ONE_SIDED_95 * float(photometry.sigma_mag[place])
        excess = float(10.0 ** (0.4 * excess_mag)) - 1.0
        share = excess * black_body_share(micron, teff) * (1.0 + float(predicted.band_ratio[0, column]))
        found.append(DustRoom(engine.bands[column], PEAK_MICRON_K / micron, share * luminosity / PEAK_SHARE))
    return sorted(found, key=lambda room: -room.dust_k)


def black_body_share(wavelength_micron: float, teff_k: float) -> float:
    """Return nu F_nu over the whole flux of a black body at this wavelength: 15 x^4 / (pi^4 (e^x - 1))."""
    x = _SECOND_RADIATION_MICRON_K / (wavelength_micron * teff_k)
    return float(15.0 / np.pi**4 * x**4 / np.expm1(x))
