"""The light curve: amplitude at half the period, eclipses seen or not, by hand."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy import stats

from vetter.light.engine import Component
from vetter.observations.prediction import HiddenStar, InnerOrbit, Prediction
from vetter.observations.variability import (
    ELLIPSOIDAL_MODEL_ERROR,
    VariabilityObservation,
    eclipse_depths_mag,
    ellipsoidal_mag,
    inner_eclipses,
    inner_ellipsoidal_mag,
)
from vetter.physics import tides
from vetter.scenarios.context import build_context
from vetter.system.model import Measurement, System, Variability

Predict = Callable[..., Prediction]

RED_NM = 600.0
CURVE = VariabilityObservation(0, RED_NM, 0.0, None, None, "unknown", 0.01)


def hidden(radius_rsun: float, ratio: float, n: int = 1, teff_k: float = 5000.0) -> HiddenStar:
    full = np.ones(n)
    body = Component("star", teff_k * full, 4.5 * full, 0.0 * full, radius_rsun * full)
    return HiddenStar(body, np.full((n, 3), ratio))


def test_a_dark_companion_raises_the_tide_of_the_books(predict: Predict) -> None:
    """Leading term by hand: 1.5 Msun at 10 radii, 60 degrees; the repair for near filling is below 1 % there."""
    found = ellipsoidal_mag(predict(separation_rsun=10.0), 0, RED_NM)
    g = float(tides.gravity_darkening(5772.0, RED_NM))
    leading = 0.15 * (15.5 * (1.0 + g)) / 2.5 * 1.5 * 1e-3 * 0.75
    assert found == pytest.approx([1.0857 * leading], rel=0.02)


def test_light_dilutes_and_the_companion_bulges_too(predict: Predict) -> None:
    alone = ellipsoidal_mag(predict(separation_rsun=10.0), 0, RED_NM)[0]
    ratio = np.full((1, 3), 0.5)
    point = predict(separation_rsun=10.0, band_ratio=ratio, hidden_stars=(hidden(1e-3, 0.5),))
    assert ellipsoidal_mag(point, 0, RED_NM)[0] == pytest.approx(alone / 1.5, rel=1e-6)
    twin = predict(
        separation_rsun=10.0, companion_mass_msun=1.0, band_ratio=np.ones((1, 3)),
        hidden_stars=(hidden(1.0, 1.0, teff_k=5772.0),),
    )  # fmt: skip
    one = ellipsoidal_mag(predict(separation_rsun=10.0, companion_mass_msun=1.0), 0, RED_NM)
    np.testing.assert_allclose(ellipsoidal_mag(twin, 0, RED_NM), one, rtol=1e-12)


def test_a_limit_is_a_half_gaussian(predict: Predict) -> None:
    predicted = predict(separation_rsun=np.array([5.0, 10.0, 1e4]))
    amplitude = ellipsoidal_mag(predicted, 0, RED_NM)
    found = replace(CURVE, limit_mag=0.002)
    width = 0.002 / stats.norm.ppf(0.975)
    expected = stats.halfnorm.logpdf(amplitude, scale=width) - stats.halfnorm.logpdf(0.0, 0.0, width)
    np.testing.assert_allclose(found.ln_likelihood(predicted), expected, rtol=1e-6, atol=1e-12)
    assert (found.count, found.ln_norm) == (1, 0.0)
    assert found.describe() == "limit on the ellipsoidal variation"


def test_a_measurement_is_a_gaussian_with_the_model_error(predict: Predict) -> None:
    predicted = predict(separation_rsun=np.array([5.0, 10.0]))
    found = replace(CURVE, measured_mag=Measurement(0.01, 0.0005))
    error = np.hypot(0.0005, ELLIPSOIDAL_MODEL_ERROR * 0.01)
    expected = stats.norm.logpdf(0.01, ellipsoidal_mag(predicted, 0, RED_NM), error)
    np.testing.assert_allclose(found.ln_likelihood(predicted), expected, rtol=1e-10)
    assert found.describe() == "ellipsoidal variation"


def test_depths_of_a_small_star_before_and_behind_a_large_one(predict: Predict) -> None:
    """Edge on: the small disc covers a quarter of the seen star, then is hidden with all its light."""
    predicted = predict(inclination_deg=90.0, band_ratio=np.full((1, 3), 0.1), hidden_stars=(hidden(0.5, 0.1),))
    found = eclipse_depths_mag(predicted, 0, 0.0, np.array([0]))
    assert found.companion_in_front[0, 0] == pytest.approx(-2.5 * np.log10(1.0 - 0.25 / 1.1))
    assert found.star_in_front[0, 0] == pytest.approx(-2.5 * np.log10(1.0 - 0.1 / 1.1))


def test_no_eclipses_exclude_those_that_would_have_been_noticed(predict: Predict) -> None:
    """Contact at cos i = 1.5/100: nothing is said below 89.14 degrees; edge on the depths count as in a limit."""
    angle = np.array([60.0, 89.13, 90.0])
    predicted = predict(inclination_deg=angle, band_ratio=np.full((3, 3), 0.1), hidden_stars=(hidden(0.5, 0.1, n=3),))
    found = replace(CURVE, eclipses="none", depth_mag=0.05)
    depths = np.array([-2.5 * np.log10(1.0 - 0.25 / 1.1), -2.5 * np.log10(1.0 - 0.1 / 1.1)])
    expected = np.sqrt(np.sum(depths**2)) * stats.norm.ppf(0.975) / 0.05
    np.testing.assert_allclose(found.residuals(predicted)[:, 0], [0.0, 0.0, expected], rtol=1e-6)


def test_a_dark_companion_never_eclipses(predict: Predict) -> None:
    none, seen = replace(CURVE, eclipses="none"), replace(CURVE, eclipses="seen")
    edge_on = predict(inclination_deg=90.0)
    np.testing.assert_array_equal(none.residuals(edge_on), 0.0)
    assert seen.residuals(edge_on)[0, 0] == pytest.approx(10.0)


def test_eclipses_that_are_seen_want_an_edge_on_orbit(predict: Predict) -> None:
    angle = np.array([90.0, 88.0, 60.0])
    predicted = predict(inclination_deg=angle, band_ratio=np.full((3, 3), 0.1), hidden_stars=(hidden(0.5, 0.1, n=3),))
    found = replace(CURVE, eclipses="seen").residuals(predicted)[:, 0]
    assert found[0] == pytest.approx(0.0, abs=1e-6)
    # Ten sigma, and a slope towards the edge-on orbit.
    assert 10.0 < found[1] < found[2]


def test_an_eccentric_orbit_eclipses_for_some_periastra_only(predict: Predict) -> None:
    """e = 0.5, point companion: the closest of both conjunctions spans 1.0 to 0.5 (1 - e^2) a cos i / (1 + e sin w)."""
    cosine = 1.2 / 75.0
    predicted = predict(
        inclination_deg=np.degrees(np.arccos(cosine)),
        separation_rsun=100.0,
        band_ratio=np.full((1, 3), 1.0),
        hidden_stars=(hidden(0.1, 1.0),),
    )
    found = replace(CURVE, eclipses="none", eccentricity=0.5, depth_mag=1e-4).residuals(predicted)[0, 0]
    # Apart by 1.2 / (1 + 0.5 |sin w|): nothing is missed beyond 1.1, where |sin w| < 0.1818: 11.6 % of all w.
    assert np.exp(-0.5 * found**2) == pytest.approx(2.0 * np.arcsin(2.0 * (1.2 / 1.1 - 1.0)) / np.pi, abs=1.0 / 16.0)


def pair(predict: Predict, period_d: float = 2.0) -> Prediction:
    star = hidden(0.6, 0.05)
    inner = InnerOrbit(np.array([0.6]), np.array([0.6]), np.array([period_d]))
    return predict(band_ratio=np.full((1, 3), 0.1), hidden_stars=(star, star), inner=inner)


def test_eclipses_of_a_hidden_pair_are_as_likely_as_its_plane_is(predict: Predict) -> None:
    """Two of 0.6 Rsun and 0.6 Msun in 2 d: a = 7.10 Rsun, so 16.9 % of planes; central: 0.05 of 1.1 of the light."""
    found = inner_eclipses(pair(predict), 0)
    assert found is not None
    assert found.probability[0] == pytest.approx(1.2 / (4.2083 * np.cbrt(1.2 * 4.0)), rel=1e-3)
    assert found.first_mag.max() < -2.5 * np.log10(1.0 - 0.05 / 1.1)
    np.testing.assert_allclose(found.first_mag, found.second_mag)
    deep = replace(CURVE, eclipses="none", depth_mag=1e-5).residuals(pair(predict))[0, 0]
    assert np.exp(-0.5 * deep**2) == pytest.approx(1.0 - found.probability[0], abs=0.01)
    shallow = replace(CURVE, eclipses="none", depth_mag=1.0).residuals(pair(predict))[0, 0]
    assert shallow == pytest.approx(0.0, abs=0.1)


def test_a_hidden_pair_waves_at_its_own_half_period(predict: Predict) -> None:
    found = inner_ellipsoidal_mag(pair(predict), 0, RED_NM)
    assert found is not None
    darkening = tides.gravity_darkening(5000.0, RED_NM)
    own = tides.ellipsoidal_amplitude_mag(1.0, 0.6 / (4.2083 * np.cbrt(4.8)), 1.0, darkening)
    assert found[0] == pytest.approx(float(own) * 0.1 / 1.1, rel=1e-3)
    assert inner_ellipsoidal_mag(predict(), 0, RED_NM) is None
    assert inner_eclipses(predict(), 0) is None


@given(st.floats(0.0, 90.0), st.floats(2.1, 300.0), st.floats(0.0, 0.9), st.floats(0.0, 3.0))
def test_every_residual_is_finite(angle: float, apart: float, e: float, ratio: float) -> None:
    from types import SimpleNamespace

    one = np.ones(1)
    predicted = SimpleNamespace(
        k1_km_s=one, inclination_deg=angle * one, separation_rsun=apart * one, radius_rsun=one, teff_k=6000.0 * one,
        mass_msun=one, companion_mass_msun=one, band_ratio=np.full((1, 1), ratio), hidden_stars=(hidden(1.0, ratio),),
        inner=None,
    )  # fmt: skip
    for eclipses in ("none", "seen"):
        curve = VariabilityObservation(0, RED_NM, e, 0.01, None, eclipses, 0.01)
        assert np.isfinite(curve.residuals(predicted)).all()


def test_it_is_made_from_the_file(plain: System) -> None:
    given = Variability("TESS/TESS.Red", 0.002, "none", 0.005)
    system = replace(plain, variability=given)
    engine = build_context(system).engine
    found = VariabilityObservation.from_system(system, engine)
    assert found is not None
    assert (engine.bands[found.column], found.count, found.depth_mag) == ("TESS/TESS.Red", 2, 0.005)
    assert found.wavelength_nm == pytest.approx(780.0, abs=20.0)
    assert found.describe() == "limit on the ellipsoidal variation and no eclipses"
    assert found.cautions(system) == []
    assert VariabilityObservation.from_system(plain, engine) is None
    silent = replace(plain, variability=Variability("TESS/TESS.Red"))
    assert VariabilityObservation.from_system(silent, engine) is None


def test_what_was_assumed_is_said(plain: System) -> None:
    system = replace(plain, variability=Variability("GAIA/GAIA3.G", 0.002, "none"))
    system = replace(system, orbit=replace(system.orbit, eccentricity=Measurement(0.4, 0.01)))
    found = VariabilityObservation.from_system(system, build_context(system).engine)
    assert found is not None
    depth, eccentric = found.cautions(system)
    assert "0.01 mag would have been noticed" in depth
    assert "eccentricity of 0.4" in eccentric
