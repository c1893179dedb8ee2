"""A fact of the trade (common practice, no source): a Sun-like star of V 13.77 at 1550 light-years and 9.6 dark Msun.

The star's light is the measured spectrum of the Sun at that distance, behind the dust that V asks for.
"""

from __future__ import annotations

from collections.abc import Callable

import pytest

from vetter import Verdicts, evaluate
from vetter.inference.importance import Settings
from vetter.results.table import render
from vetter.system.model import System

NAKED_EYE_LIMIT_MAG = 6.0
QUICK = Settings(start_points=1024, rung_points=512, rungs=3, effective=50, last_points=1024, second_effort=False)

Answers = Callable[..., Verdicts]


@pytest.fixture(scope="module")
def dark(verdicts_of: Answers) -> Verdicts:
    return verdicts_of("sun_like", "black_hole", "compact_pair")


def test_it_is_1300_times_fainter_than_the_eye_can_see(system_of: Callable[[str], System]) -> None:
    (v,) = (m.mag for m in system_of("sun_like").magnitudes if m.band == "Generic/Johnson.V")
    assert 10.0 ** (0.4 * (v - NAKED_EYE_LIMIT_MAG)) == pytest.approx(1300.0, rel=0.02)


def test_brightness_distance_and_a_sun_agree_with_a_few_tenths_of_dust(dark: Verdicts) -> None:
    hole = dark.scenario("black_hole")
    assert not dark.nothing_fits
    assert hole.fit_p_value > 0.05
    assert 0.2 < 3.1 * hole.best_fit.values["ebv_mag"] < 0.7
    assert hole.best_fit.values["m1_msun"] == pytest.approx(1.0, rel=0.13)  # two scatters of the mass relation
    low, _, high = hole.companion_mass_msun
    assert low < 9.6 * 1.04  # M2 goes as M1^(2/3) or less: one scatter of M1 is 4 %
    assert high > 9.6 / 1.04


def test_ordinary_stars_of_that_mass_are_excluded_beyond_doubt(
    system_of: Callable[[str], System],
) -> None:
    """Whatever is left out, except the magnitudes, which alone say how much light there is."""
    found = evaluate(system_of("sun_like"), ("main_sequence", "inner_pair", "black_hole"), settings=QUICK)
    for name in ("main_sequence", "inner_pair"):
        assert found.scenario(name).sigma > 20.0
        without = {driver.observation: driver.sigma_without for driver in found.scenario(name).driven_by}
        assert {"photometry", "distance", "spectroscopy", "inclination"} <= set(without)
        assert all(sigma > 5.0 for observation, sigma in without.items() if observation != "photometry")


def test_one_black_hole_and_two_cannot_be_told_apart(dark: Verdicts) -> None:
    one, two = dark.scenario("black_hole"), dark.scenario("compact_pair")
    assert (one.verdict, two.verdict) == ("allowed", "allowed")
    assert abs(one.ln_evidence - two.ln_evidence) < 1.0
    assert "cannot tell it" in " ".join(render(dark).split())


@pytest.mark.slow
def test_nothing_but_a_remnant_stands_among_all_ten(verdicts_of: Answers) -> None:
    found = verdicts_of("sun_like")
    print("\n" + render(found))
    assert [row.name for row in found.scenarios if row.verdict != "excluded"] == ["black_hole", "compact_pair"]
