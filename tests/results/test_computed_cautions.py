"""Cautions are computed: each appears where its numbers call for it, with these numbers, and is silent elsewhere."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from types import SimpleNamespace

import numpy as np
import pytest

from vetter import evaluate
from vetter.evaluation import prepare
from vetter.inference.importance import Settings
from vetter.light.engine import Component, LightEngine
from vetter.observations.distance import DistanceObservation
from vetter.observations.photometry import PhotometryObservation
from vetter.observations.prediction import HiddenStar, InnerOrbit
from vetter.results.age_cautions import age_cautions, age_range
from vetter.results.best_cases import BestCase, best_cases, predicted_signals
from vetter.results.dust_caution import black_body_share, dust_caution
from vetter.results.fit_cautions import (
    extrapolation_cautions,
    missed_cautions,
    parallax_cautions,
    significance_cautions,
)
from vetter.results.stripped_cautions import (
    core_mass_msun,
    largest_error,
    lifetime_caution,
    stripped_cautions,
    with_gravity,
)
from vetter.results.verdicts import ScenarioVerdict
from vetter.scenarios.base import registered
from vetter.scenarios.context import Context, build_context
from vetter.scenarios.fit import Fit
from vetter.stars.bloated import bloated_luminosity_lsun
from vetter.stars.hpt import lifetime_myr
from vetter.system.model import Distance, Measurement, System, ThieleInnes

Row = Callable[..., ScenarioVerdict]

SUN = {
    "teff_k": 5772.0,
    "logg": 4.44,
    "feh": 0.0,
    "mass_msun": 1.0,
    "companion_mass_msun": 1.5,
    "radius_rsun": 1.0,
    "separation_rsun": 100.0,
    "distance_pc": 200.0,
    "optical_ratio": 0.0,
}


def case(row: ScenarioVerdict, ordinary: bool = True, **fields: object) -> BestCase:
    values = {name: np.array([fields.pop(name, value)]) for name, value in SUN.items()}
    given = {"hidden_stars": (), "inner": None, "unrelated_mas": None, **fields}
    prediction = SimpleNamespace(**values, ordinary_seen_star=ordinary, **given)
    return BestCase(row, SimpleNamespace(), prediction)


def body(teff_k: float, radius_rsun: float, logg: float = 4.5, kind: str = "star") -> HiddenStar:
    one = np.ones(1)
    return HiddenStar(Component(kind, teff_k * one, logg * one, 0.0 * one, radius_rsun * one), np.full((1, 3), 0.1))


# Ages.


def test_the_sun_is_middle_aged_and_a_giant_past_its_life() -> None:
    sun = age_range(1.0, 1.0, 0.0, 0.005)
    assert sun.least_myr < 4600.0 < sun.most_myr
    life = float(lifetime_myr(1.0, 0.02))
    assert age_range(1.0, 10.0, 0.0, 0.05) == pytest.approx((life, 1.2 * life))
    assert age_range(1.0, 0.85, 0.0, 0.05).least_myr == 0.0


def test_a_heavy_companion_dies_before_an_old_star(row: Row, plain: System) -> None:
    old = case(row(), companion_mass_msun=3.0, radius_rsun=1.5, logg=4.09)
    (said,) = age_cautions(plain, [old])
    # 3 Msun: about 0.37 Gyr (Hurley, Pols & Tout 2000); a Sun of 1.5 Rsun is near the end of its 11 Gyr.
    assert "a star of 3 Msun lives 3" in said
    assert "Gyr old" in said
    assert age_cautions(plain, [case(row(), companion_mass_msun=0.7, radius_rsun=1.5)]) == []
    assert age_cautions(plain, [case(row(sigma=8.0), companion_mass_msun=3.0, radius_rsun=1.5)]) == []
    assert age_cautions(plain, [case(row(), ordinary=False, companion_mass_msun=3.0, radius_rsun=1.5)]) == []


def test_the_heavier_star_of_a_pair_counts(row: Row, plain: System) -> None:
    inner = InnerOrbit(np.array([2.5]), np.array([0.5]), np.array([3.0]))
    pair = row(name="inner_pair", title="Pair of main-sequence stars")
    (said,) = age_cautions(plain, [case(pair, inner=inner, companion_mass_msun=3.0, radius_rsun=1.5)])
    assert "a star of 2.5 Msun" in said
    assert age_cautions(plain, [case(row(name="black_hole"), companion_mass_msun=9.0, radius_rsun=1.5)]) == []


def test_an_evolved_companion_must_not_be_lighter_than_a_young_star(row: Row, plain: System) -> None:
    evolved = row(name="evolved_star", title="Evolved companion")
    (said,) = age_cautions(plain, [case(evolved, mass_msun=2.0, companion_mass_msun=0.9, radius_rsun=1.7)])
    assert "0.9 Msun leave the main sequence after 17 Gyr" in said
    assert age_cautions(plain, [case(evolved, mass_msun=1.0, companion_mass_msun=1.3, radius_rsun=1.0)]) == []


# Stripped stars.


@pytest.mark.parametrize("core", [0.15, 0.25, 0.4, 4.0])
def test_the_core_is_that_of_the_relation(core: float) -> None:
    assert core_mass_msun(float(bloated_luminosity_lsun(core, 0.0)), 0.0) == pytest.approx(core, rel=1e-6)


def stripped(row: Row, **fields: object) -> BestCase:
    return case(row(name="stripped_primary", title="Seen star stripped of its envelope"), ordinary=False, **fields)


def test_a_short_phase_is_said_with_its_length(row: Row) -> None:
    """A core of 0.25 Msun with 0.02 Msun of envelope: 0.7 x 6.4e18 erg/g x 0.02 Msun over 57 Lsun is 26 Myr."""
    luminosity = float(bloated_luminosity_lsun(0.25, 0.0))
    radius = np.sqrt(luminosity) * (5772.0 / 9000.0) ** 2
    logg = 4.438 + np.log10(0.27) - 2.0 * np.log10(radius)
    brief = stripped(row, mass_msun=0.27, teff_k=9000.0, radius_rsun=radius, logg=logg)
    (said,) = lifetime_caution(brief)
    years = 0.7 * 6.4e18 * 0.02 * 1.98841e33 / (luminosity * 3.828e33) / 3.15576e13
    assert f"lasts {years:.2g} Myr" in said
    (said,) = lifetime_caution(stripped(row, mass_msun=0.2, teff_k=9000.0, radius_rsun=radius, logg=logg))
    assert "a core that shines so much has 0.25 Msun" in said
    assert lifetime_caution(stripped(row, mass_msun=0.8)) == []


@pytest.mark.parametrize(("closes_at", "now", "found"), [(0.04, 0.1, 0.03), (0.5, 0.1, 0.05), (0.01, 0.3, 0.01)])
def test_the_largest_error_that_excludes_is_found(closes_at: float, now: float, found: float) -> None:
    """An explanation that does 5 sigma at ``closes_at`` and falls as one over the error."""
    assert largest_error(lambda error: 5.0 * closes_at / error * (1.0 + 1e-9), now) == found


def test_no_error_may_do() -> None:
    assert largest_error(lambda error: 3.0, 0.1) is None
    assert largest_error(lambda error: 9.0, 0.01) is None


def test_only_the_spectrum_changes_with_a_supposed_log_g(plain: System) -> None:
    context, observations = prepare(plain)
    fit = Fit(registered()["black_hole"].branches(context)[0], tuple(observations))
    supposed = with_gravity(fit, Measurement(4.2, 0.01))
    changed = [(a, b) for a, b in zip(fit.observations, supposed.observations, strict=True) if a is not b]
    ((old, new),) = changed
    assert (old.name, new.logg) == ("spectroscopy", Measurement(4.2, 0.01))
    assert (new.teff_k, new.feh) == (old.teff_k, old.feh)


@pytest.mark.slow
def test_what_is_said_of_log_g_is_what_a_new_evaluation_finds(plain: System, cheap: Settings) -> None:
    """The caution names a sigma for log g of 0.01 dex; a system with that log g is evaluated from the start."""
    system = replace(plain, orbit=replace(plain.orbit, k1_km_s=Measurement(3.0, 0.1)))
    names = ["main_sequence", "stripped_primary"]
    verdicts = evaluate(system, names, settings=cheap)
    (said,) = [c for c in verdicts.cautions if c.startswith("No better log g")]
    logg = Measurement(verdicts.scenario("main_sequence").best_fit.values["logg1"], 0.01)
    found = evaluate(replace(system, primary=replace(system.primary, logg=logg)), names).scenario("stripped_primary")
    # One decimal is printed.
    assert found.sigma == pytest.approx(float(said.split(" at ")[1].split(" sigma")[0]), abs=0.1)


def test_an_excluded_stripped_star_needs_no_words(row: Row) -> None:
    run = SimpleNamespace(scenario=registered()["stripped_primary"], branches=())
    out = stripped(lambda **fields: row(sigma=9.0, **fields))
    assert stripped_cautions([run], [out]) == []
    assert stripped_cautions([], [case(row())]) == []


# Orbit and distance.


def test_a_weak_orbit_is_said(plain: System, with_orbit: Callable[..., System]) -> None:
    assert significance_cautions(plain) == []
    (said,) = significance_cautions(with_orbit(k1_km_s=Measurement(1.2, 0.3)))
    assert said.startswith("K1 is only 4.0 times its error")
    (said,) = significance_cautions(with_orbit(photocentre_mas=Measurement(0.1, 0.04)))
    assert said.startswith("The photocentre is only 2.5 times")
    tilted = ThieleInnes(1.0, 0.0, 0.0, 0.5, tuple(tuple(row) for row in (0.09 * np.eye(4)).tolist()))
    (said,) = significance_cautions(with_orbit(thiele_innes=tilted))
    assert said.startswith("The photocentre is only")
    (said,) = significance_cautions(replace(plain, distance=Distance(parallax_mas=Measurement(0.4, 0.1))))
    assert said.startswith("The parallax is only 4.0 times")


def test_an_orbit_wider_than_the_parallax_error_is_said(
    row: Row, plain: System, with_orbit: Callable[..., System]
) -> None:
    """100 Rsun at 200 pc: 0.465 au, 2.33 mas; times 1.5 / 2.5 for a dark companion, 70 errors of 0.02 mas."""
    context = build_context(plain)
    (said,) = parallax_cautions(context, [case(row())])
    assert "by 1.4 mas on the sky, 70 times" in said
    balanced = case(row(), companion_mass_msun=1.0, optical_ratio=1.0)
    assert parallax_cautions(context, [balanced]) == []
    measured = with_orbit(photocentre_mas=Measurement(1.4, 0.1), photocentre_band="GAIA/GAIA3.G")
    assert parallax_cautions(Context(measured, context.engine), [case(row())]) == []


def test_a_datum_that_even_the_best_misses_is_said(row: Row) -> None:
    parallax = DistanceObservation(5.0, 0.1, True)
    better = case(row(chi2_min=5.0), distance_pc=250.0)
    (said,) = missed_cautions([parallax], [case(row(chi2_min=9.0)), better])
    assert "misses parallax (10.0 sigma)" in said
    assert missed_cautions([parallax], [case(row())]) == []
    assert missed_cautions([parallax], []) == []


def test_light_from_beyond_the_tables_is_said(row: Row, plain: System) -> None:
    context = build_context(plain)
    assert extrapolation_cautions(context, [case(row(), hidden_stars=(body(4000.0, 0.6),))]) == []
    hot = case(row(), hidden_stars=(body(9e5, 0.1),))
    (said,) = extrapolation_cautions(context, [hot])
    assert "companion of luminous main-sequence companion (900000 K" in said
    assert extrapolation_cautions(context, [hot._replace(row=row(sigma=7.0))]) == []


# Dust.


def test_black_body_share_integrates_to_one() -> None:
    ln_wave = np.linspace(np.log(0.1), np.log(1e5), 20001)
    values = [black_body_share(float(np.exp(w)), 1000.0) for w in ln_wave]
    assert np.trapezoid(values, ln_wave) == pytest.approx(1.0, rel=1e-4)
    peak = float(np.exp(ln_wave[int(np.argmax(values))]))
    assert peak * 1000.0 == pytest.approx(3669.7, rel=2e-3)
    assert max(values) == pytest.approx(0.7357, rel=1e-3)


@pytest.fixture
def infrared(plain: System) -> tuple[Context, PhotometryObservation]:
    extra = replace(plain.magnitudes[2], band="WISE/WISE.W1", mag=9.75)
    context = build_context(replace(plain, magnitudes=(*plain.magnitudes, extra)))
    return context, PhotometryObservation.from_system(context.system, context.engine)


def test_dust_is_limited_by_the_infrared(
    row: Row, infrared: tuple[Context, PhotometryObservation], plain: System
) -> None:
    context, photometry = infrared
    magnitudes = np.array([[m.mag for m in context.system.magnitudes]])
    perfect = {"magnitudes": magnitudes, "band_ratio": np.zeros((1, 4)), "companion_mass_msun": 3.0}
    hole = case(row(name="black_hole", title="Black hole", ordinary=False), **perfect)
    ordinary = case(row(sigma=20.0))
    (said,) = dust_caution(context, [photometry], [ordinary, hole])
    # The Sun's share at 3.37 micron is 0.0254: excess 10^(0.4 x 1.645 sigma) - 1 of it, over 0.7357 and some 90 Lsun.
    sigma = float(photometry.sigma_mag[3])
    room = (10.0 ** (0.4 * 1.644854 * sigma) - 1.0) * black_body_share(3.368, 5772.0) / 0.7357
    percent = float(said.split("(95 %): ")[1].split(" %")[0])
    light = float(said.split("(")[1].split(" Lsun")[0])
    assert percent == pytest.approx(100.0 * room / light, rel=0.06)
    assert "K (WISE/WISE.W1)" in said
    # Silent where an ordinary star stands, or nothing dark does.
    assert dust_caution(context, [photometry], [case(row()), hole]) == []
    assert dust_caution(context, [photometry], [ordinary]) == []


def test_without_infrared_dust_was_not_tried(row: Row, plain: System) -> None:
    context = build_context(plain)
    photometry = PhotometryObservation.from_system(plain, context.engine)
    fields = {"magnitudes": np.zeros((1, 3)), "band_ratio": np.zeros((1, 3)), "companion_mass_msun": 3.0}
    hole = case(row(name="black_hole", ordinary=False), **fields)
    (said,) = dust_caution(context, [photometry], [hole])
    assert said.startswith("No magnitude beyond 3 micron limits dust")


def test_no_star_no_dust(row: Row, infrared: tuple[Context, PhotometryObservation]) -> None:
    """No main-sequence star has 140 Msun."""
    context, photometry = infrared
    hole = case(row(name="black_hole", ordinary=False), companion_mass_msun=140.0)
    assert dust_caution(context, [photometry], [hole]) == []


# Predicted signals.


def test_signals_of_a_pair_are_in_its_best_case(plain: System) -> None:
    context = build_context(plain)
    names = {"ellipsoidal_mag", "eclipse_depth_mag"}
    inner = {f"inner_{name}" for name in ("signal_km_s", "signal_per_d", "ellipsoidal_mag", "eclipse_depth_mag")}
    for name, expected in (("black_hole", names), ("inner_pair", names | inner | {"inner_eclipse_probability"})):
        (branch,) = registered()[name].branches(context)
        found = predicted_signals(branch.sample(np.zeros((1, len(branch.parameters)))).prediction, context)
        assert set(found) == expected
        assert all(np.isfinite(value) and value >= 0.0 for value in found.values())


def test_closed_rows_have_no_best_case(row: Row) -> None:
    assert best_cases([SimpleNamespace()], [row(closed=True)]) == []


def test_the_engine_knows_its_ends() -> None:
    """What the extrapolation caution leans on."""
    engine = LightEngine.build(["GAIA/GAIA3.G"])
    one = np.ones(1)
    assert bool(engine.inside(Component("star", 6000.0 * one, 4.0 * one, 0.0 * one, one))[0])
