"""Magnitudes against scipy's normal distribution; limits and the one-sided ultraviolet against hand-made values."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy import stats

from vetter.light.engine import LightEngine
from vetter.observations.photometry import PhotometryObservation, model_errors_mag
from vetter.observations.prediction import Prediction
from vetter.scenarios.context import build_context
from vetter.system.model import Magnitude, MagnitudeLimit, Measurement, Primary, System

Predict = Callable[..., Prediction]

NUV = "GALEX/GALEX.NUV"


def of(system: System) -> PhotometryObservation:
    return PhotometryObservation.from_system(system, build_context(system).engine)


def limit_alone(confidence: float) -> PhotometryObservation:
    """A limit of magnitude 20 in column 0, with no model error."""
    none, nowhere = np.zeros(0), np.zeros(0, dtype=np.intp)
    width = np.array([1.0 / stats.norm.ppf(confidence)])
    never = none.astype(bool)
    return PhotometryObservation(nowhere, none, none, never, never, np.array([0]), np.array([20.0]), width)


def test_ln_likelihood_is_the_sum_of_normal_log_densities(plain: System, engine: LightEngine, predict: Predict) -> None:
    observation = PhotometryObservation.from_system(plain, engine)
    mag, error = np.array([11.35, 11.18, 9.80]), np.array([0.02, 0.01, 0.02])
    sigma = np.hypot(error, model_errors_mag(plain, engine))
    model = np.array([[11.35, 11.18, 9.80], [11.30, 11.25, 9.71], [14.0, 13.0, 12.0]])
    expected = stats.norm.logpdf(mag, model, sigma).sum(axis=1)
    np.testing.assert_allclose(observation.ln_likelihood(predict(magnitudes=model)), expected, rtol=1e-12)
    assert observation.count == 3


def test_each_magnitude_looks_at_its_own_band(plain: System, predict: Predict) -> None:
    """An engine with its bands in another order gives the same residuals."""
    engine = LightEngine.build(["2MASS/2MASS.Ks", "Generic/Johnson.V", "GAIA/GAIA3.G"])
    observation = PhotometryObservation.from_system(plain, engine)
    found = observation.residuals(predict(magnitudes=[[9.80, 11.35, 11.18]]))
    np.testing.assert_allclose(found, 0.0, atol=1e-12)


def test_a_fainter_model_has_a_positive_residual(plain: System, engine: LightEngine, predict: Predict) -> None:
    observation = PhotometryObservation.from_system(plain, engine)
    assert (observation.residuals(predict(magnitudes=[[12.0, 12.0, 10.0]])) > 0.0).all()


def test_model_error_is_that_of_the_measured_star(plain: System, engine: LightEngine) -> None:
    found = model_errors_mag(plain, engine)
    expected = [float(engine.model_error_mag(band, 5772.0, 4.44, 0.0)) for band in engine.bands]
    np.testing.assert_allclose(found, np.maximum(expected, 0.01))


def test_model_error_without_teff_is_the_largest_of_all(plain: System, engine: LightEngine) -> None:
    found = model_errors_mag(replace(plain, primary=Primary()), engine)
    for teff in np.linspace(4000.0, 10000.0, 13):
        measured = replace(plain, primary=Primary(teff_k=Measurement(float(teff), 50.0)))
        assert (found >= model_errors_mag(measured, engine) - 1e-12).all()


@pytest.mark.parametrize("teff_k", [3000.0, 5772.0, 9000.0, 30000.0])
def test_model_error_is_never_below_a_hundredth(teff_k: float, plain: System, engine: LightEngine) -> None:
    system = replace(plain, primary=Primary(Measurement(teff_k, 50.0), Measurement(4.4, 0.1)))
    assert (model_errors_mag(system, engine) >= 0.01).all()


def with_ultraviolet(plain: System, teff_k: float) -> System:
    magnitudes = (*plain.magnitudes, Magnitude(NUV, 16.0, 0.05, "AB"))
    return replace(plain, magnitudes=magnitudes, primary=replace(plain.primary, teff_k=Measurement(teff_k, 60.0)))


def test_ultraviolet_of_a_cool_star_counts_only_where_the_model_is_brighter(plain: System, predict: Predict) -> None:
    observation = of(with_ultraviolet(plain, 5772.0))
    model = np.tile([11.35, 11.18, 9.80, 16.0], (3, 1))
    model[:, 3] += [-1.0, 0.0, 1.0]
    found = observation.residuals(predict(magnitudes=model))[:, 3]
    np.testing.assert_allclose(found, [-1.0 / observation.sigma_mag[3], 0.0, 0.0], rtol=1e-12)
    (caution,) = observation.cautions(plain)
    assert "chromospheric" in caution


def test_ultraviolet_of_a_hot_star_counts_both_ways(plain: System, predict: Predict) -> None:
    observation = of(with_ultraviolet(plain, 7000.0))
    found = observation.residuals(predict(magnitudes=[[11.35, 11.18, 9.80, 17.0]]))[0, 3]
    assert found == pytest.approx(1.0 / observation.sigma_mag[3])
    assert observation.cautions(plain) == []


INFRARED = ("2MASS/2MASS.H", "WISE/WISE.W1", "WISE/WISE.W4", "Spitzer/IRAC.I2")


@pytest.mark.parametrize("emission_lines", [True, False])
def test_infrared_of_a_star_with_emission_lines_counts_on_one_side(
    emission_lines: bool, plain: System, predict: Predict
) -> None:
    """Beyond 3 micron only: not in H, and not at all without the flag."""
    magnitudes = (*plain.magnitudes, *(Magnitude(band, 9.7, 0.03, "Vega") for band in INFRARED))
    primary = replace(plain.primary, emission_lines=emission_lines)
    observation = of(replace(plain, magnitudes=magnitudes, primary=primary))
    model = np.tile([11.35, 11.18, 9.80, *[9.7] * len(INFRARED)], (3, 1))
    model[:, 3:] += np.array([-0.5, 0.0, 0.5])[:, None]
    found = observation.residuals(predict(magnitudes=model))[:, 3:] * observation.sigma_mag[3:]
    np.testing.assert_allclose(found[:2], [[-0.5] * 4, [0.0] * 4], atol=1e-12)
    excess = 0.0 if emission_lines else 0.5
    np.testing.assert_allclose(found[2], [0.5, excess, excess, excess], atol=1e-12)
    said = observation.cautions(plain)
    assert len(said) == emission_lines
    assert not said or "emission lines" in said[0]


@pytest.mark.parametrize("confidence", [0.9, 0.95, 0.9973])
def test_at_the_limiting_flux_half_of_the_sources_are_missed(confidence: float, predict: Predict) -> None:
    """Relative to no source at all, which is missed with the limit's confidence."""
    found = limit_alone(confidence).ln_likelihood(predict(magnitudes=[[20.0, 0.0, 0.0]]))
    assert np.exp(found[0]) == pytest.approx(0.5 / confidence, rel=1e-12)


def test_no_source_satisfies_a_limit(predict: Predict) -> None:
    found = limit_alone(0.95).ln_likelihood(predict(magnitudes=[[60.0, 0.0, 0.0]]))
    np.testing.assert_allclose(found, 0.0, atol=1e-12)


@given(st.floats(12.0, 40.0), st.floats(0.01, 3.0))
def test_a_brighter_source_satisfies_a_limit_less(mag: float, step: float) -> None:
    observation = limit_alone(0.95)
    brighter, fainter = observation._limit_residuals(np.array([[mag], [mag + step]]))[:, 0]
    assert np.isfinite([brighter, fainter]).all()
    assert brighter >= fainter >= 0.0


@given(st.floats(15.0, 30.0))
def test_a_limit_is_the_gaussian_integral_in_flux(mag: float) -> None:
    """Missed when flux plus noise stays below the limit."""
    residual = limit_alone(0.95)._limit_residuals(np.array([[mag]]))[0, 0]
    flux, z = 10.0 ** (0.4 * (20.0 - mag)), stats.norm.ppf(0.95)
    expected = stats.norm.logcdf((1.0 - flux) * z) - np.log(0.95)
    assert -0.5 * residual**2 == pytest.approx(expected, rel=1e-9, abs=1e-12)


def test_a_limit_is_blurred_by_the_model_error(plain: System) -> None:
    system = replace(plain, magnitude_limits=(MagnitudeLimit(NUV, 20.0, 0.95, "AB"),))
    engine = build_context(system).engine
    observation = PhotometryObservation.from_system(system, engine)
    model_error = 0.4 * np.log(10.0) * model_errors_mag(system, engine)[engine.bands.index(NUV)]
    expected = np.hypot(1.0 / stats.norm.ppf(0.95), model_error)
    np.testing.assert_allclose(observation.limit_width, [expected], rtol=1e-12)


def test_limits_stand_behind_the_magnitudes_and_are_counted(plain: System, predict: Predict) -> None:
    one = replace(plain, magnitude_limits=(MagnitudeLimit(NUV, 20.0, 0.95, "AB"),))
    observation = of(one)
    found = observation.residuals(predict(magnitudes=[[11.35, 11.18, 9.80, 19.0]]))
    assert found.shape == (1, 4)
    np.testing.assert_allclose(found[0, :3], 0.0, atol=1e-12)
    assert found[0, 3] > 1.0
    assert observation.count == 4
    assert observation.describe() == "3 magnitudes, 1 magnitude limit"
    two = of(replace(one, magnitude_limits=(*one.magnitude_limits, MagnitudeLimit("GALEX/GALEX.FUV", 21, 0.9, "AB"))))
    assert two.describe() == "3 magnitudes, 2 magnitude limits"
    assert of(plain).describe() == "3 magnitudes"


def test_a_limit_adds_no_normalisation(plain: System) -> None:
    limited = replace(plain, magnitude_limits=(MagnitudeLimit(NUV, 20.0, 0.95, "AB"),))
    assert of(limited).ln_norm == of(plain).ln_norm
