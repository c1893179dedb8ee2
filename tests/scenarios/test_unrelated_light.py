"""The eleventh row: only on request, free of the orbit, and it does what it is for."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from click.testing import CliRunner

from vetter import evaluate
from vetter.cli import main, with_third_light
from vetter.errors import InputError
from vetter.evaluation import chosen_scenarios
from vetter.inference.importance import Settings
from vetter.light.engine import Component, LightEngine, total_magnitudes
from vetter.physics import kepler
from vetter.scenarios.base import registered
from vetter.scenarios.context import build_context
from vetter.scenarios.unrelated_light import APERTURE_MAS
from vetter.system.model import Measurement, System


def test_it_is_tried_only_when_asked_for(plain: System) -> None:
    assert "unrelated_light" not in registered()
    assert list(registered(on_request=True)) == [*registered(), "unrelated_light"]
    assert "unrelated_light" not in [scenario.name for scenario in chosen_scenarios(plain, None)]
    asked = chosen_scenarios(plain, ["unrelated_light", "black_hole"])
    assert [scenario.name for scenario in asked] == ["black_hole", "unrelated_light"]
    with pytest.raises(InputError, match="unrelated_light"):
        chosen_scenarios(plain, ["planet"])


def test_the_option_adds_it_to_what_was_asked_for() -> None:
    assert with_third_light(()) == (*registered(), "unrelated_light")
    assert with_third_light(("black_hole",)) == ("black_hole", "unrelated_light")
    assert "--third-light" in CliRunner().invoke(main, ["evaluate", "--help"]).stdout


def test_its_light_dilutes_the_photocentre_and_does_not_pull_it(plain: System) -> None:
    orbit = replace(plain.orbit, photocentre_mas=Measurement(2.0, 0.1), photocentre_band="GAIA/GAIA3.G")
    (branch,) = registered(on_request=True)["unrelated_light"].branches(build_context(replace(plain, orbit=orbit)))
    predicted = branch.sample(np.random.default_rng(3).normal(size=(20, len(branch.parameters)))).prediction
    column = branch.context.photocentre_column
    dark = kepler.photocentre_mas(
        1000.0 / predicted.distance_pc,
        kepler.separation_au(predicted.mass_msun + predicted.companion_mass_msun, 100.0),
        predicted.mass_msun,
        predicted.companion_mass_msun,
    )
    np.testing.assert_allclose(predicted.photocentre_mas, dark / (1.0 + predicted.band_ratio[:, column]), rtol=1e-12)
    assert predicted.hidden_stars == ()
    assert ((predicted.unrelated_mas >= 0.0) & (predicted.unrelated_mas <= APERTURE_MAS)).all()


def test_other_scenarios_tell_which_stars_share_the_orbit(plain: System) -> None:
    (branch,) = registered()["inner_pair"].branches(build_context(plain))
    sampled = branch.sample(np.zeros((3, len(branch.parameters))))
    predicted = sampled.prediction
    first, second = predicted.hidden_stars
    np.testing.assert_allclose(first.band_ratio + second.band_ratio, predicted.band_ratio, rtol=1e-12)
    np.testing.assert_allclose(predicted.inner.first_msun + predicted.inner.second_msun, predicted.companion_mass_msun)
    np.testing.assert_array_equal(predicted.inner.period_d, sampled.values["inner_period_d"])
    assert (first.body.radius_rsun >= second.body.radius_rsun).all()
    (dark,) = registered()["black_hole"].branches(build_context(plain))
    predicted = dark.sample(np.zeros((3, len(dark.parameters)))).prediction
    assert (predicted.hidden_stars, predicted.inner, predicted.unrelated_mas) == ((), None, None)
    np.testing.assert_array_equal(predicted.band_ratio, 0.0)


def test_it_explains_the_light_of_a_cool_star_that_nothing_dark_can(plain: System, cheap: Settings) -> None:
    """A Sun and a black hole, with a 3800-K star of 0.9 Rsun added to every magnitude."""
    bands = ["Generic/Johnson.B", *(m.band for m in plain.magnitudes), "2MASS/2MASS.J", "WISE/WISE.W1"]
    engine = LightEngine.build(bands)
    one = np.ones(1)
    bodies = [
        Component("star", teff * one, logg * one, 0.0 * one, radius * one)
        for teff, logg, radius in ((5772.0, 4.44, 1.0), (3800.0, 4.5, 0.9))
    ]
    light = total_magnitudes([engine.magnitudes(body, 200.0, 0.031) for body in bodies])[0]
    magnitudes = tuple(
        replace(plain.magnitudes[0], band=band, mag=float(m)) for band, m in zip(bands, light, strict=True)
    )
    orbit = replace(plain.orbit, k1_km_s=Measurement(60.0, 0.3))
    system = replace(plain, magnitudes=magnitudes, orbit=orbit)
    verdicts = evaluate(system, ["black_hole", "unrelated_light"], settings=cheap)
    assert verdicts.scenario("unrelated_light").sigma == 0.0
    assert verdicts.scenario("black_hole").sigma > 3.0
    best = verdicts.scenario("unrelated_light").best_fit.values
    assert best["unrelated_teff_k"] == pytest.approx(3800.0, abs=400.0)
    assert verdicts.scenario("unrelated_light").ordinary is False
