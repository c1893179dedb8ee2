"""X-rays: no part of the likelihood, and the numbers beside the limit by hand."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import numpy as np
import pytest

from vetter.light.engine import Component
from vetter.observations.prediction import HiddenStar, Prediction
from vetter.observations.x_ray import XRayObservation, coronal_max_erg_s, wind_accretion
from vetter.physics import kepler
from vetter.scenarios.context import build_context
from vetter.system.model import System, XRay

Predict = Callable[..., Prediction]

LIMIT = XRayObservation(3e30, 0.95)


def hidden(teff_k: float, radius_rsun: float, kind: str = "star") -> HiddenStar:
    one = np.ones(1)
    return HiddenStar(Component(kind, teff_k * one, 4.5 * one, 0.0 * one, radius_rsun * one), np.full((1, 3), 0.01))


def giant(predict: Predict, **fields: object) -> Prediction:
    """A giant of 1 Msun and 10 Rsun, about 50 Lsun, and 10 dark Msun in 200 days."""
    separation = kepler.separation_rsun(11.0, 200.0)
    teff = 5772.0 * (50.0 / 100.0) ** 0.25
    return predict(
        companion_mass_msun=10.0, radius_rsun=10.0, teff_k=teff, separation_rsun=separation, **fields
    )  # fmt: skip


def test_nothing_of_it_is_multiplied_in(predict: Predict) -> None:
    predicted = predict(mass_msun=[1.0, 2.0])
    assert LIMIT.residuals(predicted).shape == (2, 0)
    np.testing.assert_array_equal(LIMIT.ln_likelihood(predicted), 0.0)
    assert (LIMIT.count, LIMIT.droppable, LIMIT.ln_norm) == (0, False, 0.0)
    assert "reported only" in LIMIT.describe()


def test_a_wind_fed_black_hole(predict: Predict) -> None:
    """The step by step sum: Reimers, escape speed, Bondi and Hoyle, ten per cent of rest energy."""
    found = wind_accretion(giant(predict))
    loss = 4e-13 * 0.5 * 50.0 * 10.0
    wind = 617.7 / np.sqrt(10.0)
    orbit_km_s = 29.785 * 11.0 ** (1.0 / 3.0) * (365.25 / 200.0) ** (1.0 / 3.0)
    pull = (10.0 / 11.0) * orbit_km_s**2
    caught = pull**2 / (wind * (wind**2 + orbit_km_s**2) ** 1.5)
    thin = 0.1 * caught * loss * 1.989e33 / 3.156e7 * 2.998e10**2
    assert found.thin_disc_erg_s[0] == pytest.approx(thin, rel=0.01)
    # Below a hundredth of Eddington the efficiency falls in proportion.
    assert found.starved_erg_s[0] == pytest.approx(thin * thin / (0.01 * 1.26e39), rel=0.02)


def test_coronae_saturate_at_their_share_of_the_light(predict: Predict) -> None:
    """A cool and a hot hidden star and a cool white dwarf beside a Sun: only the Sun and the cool star count."""
    others = (hidden(4000.0, 0.6), hidden(9000.0, 1.7), hidden(5000.0, 0.01, "white_dwarf"))
    found = coronal_max_erg_s(predict(hidden_stars=others))
    light = 1.0 + 0.36 * (4000.0 / 5772.0) ** 4
    assert found[0] == pytest.approx(10.0**-3.13 * 3.828e33 * light, rel=1e-6)


def test_the_report_says_what_each_would_emit(predict: Predict) -> None:
    dark, lit = LIMIT.report({"black hole": giant(predict), "star": predict(hidden_stars=(hidden(4000.0, 0.6),))})
    assert "3.0e+30 erg/s is no part of the table" in dark
    assert "black hole" in dark
    assert "does not exclude a black hole" in dark
    assert "star 3." in lit
    assert "factor of about 3" in lit


def test_there_is_nothing_to_say_of_hot_stars_or_of_none(predict: Predict) -> None:
    assert LIMIT.report({}) == []
    assert LIMIT.report({"star": predict(teff_k=9000.0, hidden_stars=(hidden(9000.0, 1.7),))}) == []


def test_it_is_made_from_the_file(plain: System) -> None:
    engine = build_context(plain).engine
    system = replace(plain, x_ray=XRay(3e30, 0.95))
    assert XRayObservation.from_system(system, engine) == LIMIT
    assert XRayObservation.from_system(plain, engine) is None
