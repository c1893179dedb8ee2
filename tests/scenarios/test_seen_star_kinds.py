"""What the seen star may be: which kinds a measurement leaves open, and how each turns a spectrum into a star."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy import stats
from scipy.optimize import brentq

from vetter.scenarios.seen_star import (
    GIANT_MASS_RANGE_MSUN,
    CoolDwarf,
    Dwarf,
    Giant,
    SeenStar,
    log_uniform_below,
    ordinary_seen_stars,
)
from vetter.stars.empirical_mass import TORRES_MASS_SCATTER_DEX, torres_mass_msun
from vetter.stars.main_sequence import main_sequence
from vetter.stars.properties import LOGG_SUN
from vetter.system.model import Measurement, Primary, System

SUN = {"teff_k": 5772.0, "logg": 4.44, "feh": 0.0}


def kinds(plain: System, **measured: Measurement) -> list[str]:
    return [kind.name for kind in ordinary_seen_stars(replace(plain, primary=Primary(**measured)))]


def spectrum(n: int, **values: float) -> dict[str, np.ndarray]:
    return {name: np.full(n, value) for name, value in (SUN | values).items()}


@pytest.mark.parametrize(
    ("logg", "expected"),
    [
        (2.0, ["giant"]),
        (2.79, ["giant"]),
        (2.81, ["dwarf", "giant"]),
        (3.0, ["dwarf", "giant"]),
        (3.19, ["dwarf", "giant"]),
        (3.21, ["dwarf"]),
        (4.4, ["dwarf"]),
    ],
)
def test_within_two_sigma_of_log_g_3_both_are_run(logg: float, expected: list[str], plain: System) -> None:
    assert kinds(plain, teff_k=Measurement(6000.0, 100.0), logg=Measurement(logg, 0.1)) == expected


def test_the_error_of_log_g_decides_how_far_two_sigma_is(plain: System) -> None:
    teff = Measurement(6000.0, 100.0)
    assert kinds(plain, teff_k=teff, logg=Measurement(3.5, 0.2)) == ["dwarf"]
    assert kinds(plain, teff_k=teff, logg=Measurement(3.5, 0.3)) == ["dwarf", "giant"]


def teff_of_mass(mass_msun: float) -> float:
    return float(brentq(lambda t: float(torres_mass_msun(t, 4.6, 0.0)) - mass_msun, 3000.0, 6500.0))


@pytest.mark.parametrize(
    ("scatters", "expected"),
    [(-2.1, ["cool dwarf"]), (-1.9, ["dwarf", "cool dwarf"]), (1.9, ["dwarf", "cool dwarf"]), (2.1, ["dwarf"])],
)
def test_within_two_scatters_of_0_6_msun_both_dwarfs_are_run(
    scatters: float, expected: list[str], plain: System
) -> None:
    teff = teff_of_mass(0.6 * 10.0 ** (scatters * TORRES_MASS_SCATTER_DEX))
    assert kinds(plain, teff_k=Measurement(teff, 50.0), logg=Measurement(4.6, 0.05)) == expected


def test_what_was_not_measured_decides_nothing(plain: System) -> None:
    assert kinds(plain) == ["dwarf", "cool dwarf", "giant"]
    assert kinds(plain, logg=Measurement(4.4, 0.1)) == ["dwarf", "cool dwarf"]
    assert kinds(plain, teff_k=Measurement(9000.0, 100.0)) == ["dwarf", "giant"]


@pytest.mark.parametrize("kind", [Dwarf(), Giant(), CoolDwarf()], ids=lambda kind: kind.name)
def test_every_kind_explains_itself(kind: SeenStar, plain: System) -> None:
    assert kind.words.startswith("a ")
    assert kind.ordinary
    names = [parameter.name for parameter in kind.parameters(plain.primary)]
    assert len(set(names)) == len(names)
    assert kind.mass_parameter.name not in names


@pytest.mark.parametrize("mass_max_msun", [0.9, 1.0, 1.02, 1.3])
def test_the_cut_mass_score_equals_rejection(mass_max_msun: float) -> None:
    """Scores from a normal distribution, those of too heavy stars thrown away; two-sample Kolmogorov-Smirnov."""
    rng = np.random.default_rng(23)
    n = 20_000
    drawn = spectrum(n)
    state = Dwarf().star(drawn, rng.standard_normal(n), np.full(n, mass_max_msun))
    plain_scores = rng.standard_normal(20 * n)
    mean = float(torres_mass_msun(5772.0, 4.44, 0.0))
    kept = plain_scores[mean * 10.0 ** (TORRES_MASS_SCATTER_DEX * plain_scores) <= mass_max_msun]
    assert kept.size > 100
    assert stats.ks_2samp(drawn["mass_score"], kept).pvalue > 1e-3
    share = kept.size / plain_scores.size
    error = np.sqrt(share * (1.0 - share) / plain_scores.size)
    np.testing.assert_allclose(np.exp(state.ln_ratio), share, atol=4.0 * error)
    assert (state.mass_msun <= mass_max_msun * (1.0 + 1e-9)).all()


def test_without_a_bound_the_score_is_the_coordinate() -> None:
    drawn, x = spectrum(5), np.array([-6.0, -1.0, 0.0, 2.0, 6.0])
    state = Dwarf().star(drawn, x, np.full(5, np.inf))
    np.testing.assert_allclose(drawn["mass_score"], x, rtol=1e-9, atol=1e-12)
    np.testing.assert_array_equal(state.ln_ratio, 0.0)
    np.testing.assert_allclose(state.mass_msun, torres_mass_msun(5772.0, 4.44, 0.0) * 10.0 ** (0.027 * x), rtol=1e-9)


def test_far_below_the_relation_the_score_stays_finite() -> None:
    """Thirty scatters down: the probability underflows, its logarithm does not."""
    drawn = spectrum(3)
    mass_max = float(torres_mass_msun(5772.0, 4.44, 0.0)) * 10.0 ** (-30.0 * TORRES_MASS_SCATTER_DEX)
    state = Dwarf().star(drawn, np.array([-2.0, 0.0, 2.0]), np.full(3, mass_max))
    assert np.isfinite(drawn["mass_score"]).all()
    np.testing.assert_allclose(state.ln_ratio, stats.norm.logcdf(-30.0), rtol=1e-6)
    assert (state.excess > 0.0).all()


@pytest.mark.parametrize("kind", [Dwarf(), Giant()], ids=lambda kind: kind.name)
def test_mass_radius_and_gravity_belong_together(kind: SeenStar) -> None:
    state = kind.star(spectrum(7, logg=3.1), np.linspace(-3.0, 3.0, 7), np.full(7, 1e6))
    np.testing.assert_allclose(LOGG_SUN + np.log10(state.mass_msun / state.radius_rsun**2), 3.1, rtol=1e-12)


@pytest.mark.parametrize("mass_max_msun", [1.0, 4.0, 16.0, 1e6])
def test_a_giant_is_log_uniform_below_the_bound(mass_max_msun: float) -> None:
    n = 20_000
    drawn = spectrum(n, logg=2.0)
    x = np.random.default_rng(4).standard_normal(n)
    state = Giant().star(drawn, x, np.full(n, mass_max_msun))
    low, high = GIANT_MASS_RANGE_MSUN
    top = min(mass_max_msun, high)
    assert stats.kstest(state.mass_msun, stats.loguniform(low, top).cdf).pvalue > 1e-3
    np.testing.assert_allclose(np.exp(state.ln_ratio), stats.loguniform(low, high).cdf(top), rtol=1e-9)
    np.testing.assert_array_equal(drawn["mass_msun"], state.mass_msun)
    assert (state.excess <= 0.0).all()


def test_no_giant_is_light_enough() -> None:
    state = Giant().star(spectrum(2, logg=2.0), np.zeros(2), np.array([0.35, 0.69]))
    np.testing.assert_allclose(state.excess, np.log([0.7 / 0.35, 0.7 / 0.69]))


def test_a_cool_dwarf_is_the_main_sequence_star_of_its_mass() -> None:
    drawn = {
        "feh": np.array([-0.3, 0.0, 0.2]),
        "luminosity_score": np.array([0.0, 1.0, -1.0]),
        "radius_score": np.array([1.0, 0.0, 0.5]),
    }
    state = CoolDwarf().star(drawn, np.zeros(3), np.full(3, 1e6))
    middle = np.sqrt(0.08 * 0.8)
    np.testing.assert_allclose(state.mass_msun, middle)
    star = main_sequence(np.full(3, middle), 0.5, drawn["feh"], drawn["luminosity_score"], drawn["radius_score"])
    np.testing.assert_allclose(state.teff_k, star.teff_k, rtol=1e-12)
    np.testing.assert_allclose(state.radius_rsun, star.radius_rsun, rtol=1e-12)
    assert (state.excess <= 0.0).all()


@given(st.floats(-35.0, 35.0), st.floats(1e-3, 1e4))
def test_log_uniform_below_keeps_its_word(x: float, limit: float) -> None:
    value, ln_share, excess = (v[0] for v in log_uniform_below(np.array([x]), 0.7, 16.0, np.array([limit])))
    assert 0.7 <= value <= max(min(limit, 16.0), 0.7 * (1.0 + 1e-6)) * (1.0 + 1e-12)
    assert ln_share <= 1e-12
    assert (excess > 0.0) == (limit < 0.7)
