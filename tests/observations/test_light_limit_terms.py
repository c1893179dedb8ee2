"""Limits on a second set of lines: the half-Gaussian, and the chance that the search would have seen the star."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy import stats

from vetter.light.engine import LightEngine
from vetter.observations.light_limit import (
    HOT_STAR_MEAN_ROTATION_KM_S,
    KRAFT_BREAK_K,
    LightLimitObservation,
    search_applied,
    slow_fraction,
)
from vetter.observations.prediction import Prediction
from vetter.scenarios.context import build_context
from vetter.system.model import LightLimit, System

Predict = Callable[..., Prediction]

WINDOW = (480.0, 520.0)
PLAIN = LightLimit(WINDOW, 0.03, 0.95)


def one(limit: LightLimit) -> LightLimitObservation:
    return LightLimitObservation((limit,), (0,))


@pytest.mark.parametrize("confidence", [0.68, 0.95, 0.997])
def test_it_is_a_half_gaussian_with_the_two_sided_width(confidence: float, predict: Predict) -> None:
    """The limit holds the stated share of the half-Gaussian."""
    limit = replace(PLAIN, confidence=confidence)
    ratios = np.array([0.0, 0.01, 0.03, 0.3])
    found = one(limit).ln_likelihood(predict(window_ratio=ratios[:, None], companion_teff_k=5000.0))
    width = 0.03 / stats.norm.ppf(0.5 * (1.0 + confidence))
    np.testing.assert_allclose(found, stats.halfnorm.logpdf(ratios, scale=width) - stats.halfnorm.logpdf(0, 0, width))
    assert stats.halfnorm.cdf(0.03, scale=width) == pytest.approx(confidence)


def test_a_star_outside_the_templates_escapes(predict: Predict) -> None:
    limit = replace(PLAIN, teff_range_k=(4000.0, 9000.0))
    teff = [3999.0, 4000.0, 6000.0, 9000.0, 9001.0]
    found = one(limit).residuals(predict(window_ratio=np.full((5, 1), 0.5), companion_teff_k=teff))[:, 0]
    np.testing.assert_allclose(found[[0, 4]], 0.0)
    assert (found[1:4] > 30.0).all()


def test_a_dark_companion_satisfies_every_limit(predict: Predict) -> None:
    limit = replace(PLAIN, vsini_max_km_s=50.0, teff_range_k=(4000.0, 9000.0))
    found = one(limit).residuals(predict(window_ratio=np.zeros((2, 1))))
    np.testing.assert_array_equal(found, 0.0)


def test_a_search_that_may_have_missed_is_a_mixture(predict: Predict) -> None:
    """Looked for with probability p: p exp(-r2 / 2 s2) + 1 - p."""
    limit = replace(PLAIN, vsini_max_km_s=100.0)
    ratio, share = np.array([[0.02], [0.05], [2.0]]), 1.0 - 0.5 * (1.0 - slow_fraction(100.0))
    found = one(limit).ln_likelihood(predict(window_ratio=ratio, companion_teff_k=KRAFT_BREAK_K))
    seen = np.exp(-0.5 * (ratio[:, 0] / (0.03 / stats.norm.ppf(0.975))) ** 2)
    np.testing.assert_allclose(found, np.log(share * seen + 1.0 - share), rtol=1e-10)


def test_the_search_applies_to_cool_stars_and_to_few_hot_ones() -> None:
    limit = replace(PLAIN, vsini_max_km_s=20.0)
    found = search_applied(limit, np.array([4000.0, 5500.0, KRAFT_BREAK_K, 12000.0]))
    slow = slow_fraction(20.0)
    np.testing.assert_allclose(found, [1.0, 1.0, 0.5 * (1.0 + slow), slow], atol=0.01)
    assert (np.diff(found) <= 0.0).all()


def test_without_bounds_the_search_always_applies() -> None:
    np.testing.assert_array_equal(search_applied(PLAIN, np.array([3000.0, 30000.0, np.nan])), 1.0)


@pytest.mark.parametrize("vsini_max_km_s", [10.0, 60.0, 100.0, 250.0])
def test_slow_fraction_is_that_of_maxwellian_stars_at_random_angles(vsini_max_km_s: float) -> None:
    """4e5 stars drawn; the tolerance is four standard errors of the fraction."""
    rng = np.random.default_rng(7)
    n = 400_000
    scale = HOT_STAR_MEAN_ROTATION_KM_S / stats.maxwell.mean()
    velocity = stats.maxwell.rvs(scale=scale, size=n, random_state=rng)
    projected = velocity * np.sqrt(1.0 - rng.uniform(size=n) ** 2)
    fraction = np.mean(projected < vsini_max_km_s)
    expected = slow_fraction(vsini_max_km_s)
    assert fraction == pytest.approx(expected, abs=4.0 * np.sqrt(expected * (1.0 - expected) / n))


@given(st.floats(1e-4, 5.0), st.floats(2000.0, 60000.0), st.floats(5.0, 400.0))
def test_a_search_that_may_have_missed_never_says_more_than_one_that_could_not(
    ratio: float, teff_k: float, vsini_max_km_s: float
) -> None:
    from types import SimpleNamespace

    predicted = SimpleNamespace(window_ratio=np.array([[ratio]]), companion_teff_k=np.array([teff_k]))
    sure = one(PLAIN).residuals(predicted)[0, 0]
    unsure = one(replace(PLAIN, vsini_max_km_s=vsini_max_km_s)).residuals(predicted)[0, 0]
    assert 0.0 <= unsure <= sure * (1.0 + 1e-12)


def test_an_impossible_ratio_stays_finite(predict: Predict) -> None:
    found = one(PLAIN).residuals(predict(window_ratio=[[1e6]], companion_teff_k=5000.0))
    assert np.isfinite(found).all()


def test_each_limit_looks_at_its_own_window(plain: System, predict: Predict) -> None:
    limits = (LightLimit((850.0, 870.0), 0.05, 0.95), LightLimit(WINDOW, 0.03, 0.95))
    system = replace(plain, light_limits=limits)
    engine = build_context(system).engine
    observation = LightLimitObservation.from_system(system, engine)
    assert [engine.windows_nm[place] for place in observation.index] == [(850.0, 870.0), WINDOW]
    ratio = np.zeros((1, len(engine.windows_nm)))
    ratio[0, observation.index[1]] = 0.03
    found = observation.residuals(predict(window_ratio=ratio, companion_teff_k=5000.0))
    np.testing.assert_allclose(found, [[0.0, stats.norm.ppf(0.975)]], rtol=1e-12)
    assert (observation.count, observation.describe(), observation.ln_norm) == (2, "2 light limits", 0.0)
    assert one(PLAIN).describe() == "1 light limit"


def test_none_when_no_limit_was_given(plain: System, engine: LightEngine) -> None:
    assert LightLimitObservation.from_system(plain, engine) is None
