"""Thiele-Innes elements as a Gaussian in axis and inclination, against draws of the elements themselves."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
import pytest
from scipy import stats

from vetter.light.engine import LightEngine
from vetter.observations.astrometry import AstrometryObservation, axis_and_inclination, measured_inclination
from vetter.observations.prediction import Prediction
from vetter.physics.thiele_innes import to_geometric, to_thiele_innes
from vetter.system.model import Measurement, System, ThieleInnes

Predict = Callable[..., Prediction]

ROOT = np.array([[9e-3, 0, 0, 0], [4e-3, 8e-3, 0, 0], [-3e-3, 2e-3, 7e-3, 0], [1e-3, -4e-3, 2e-3, 9e-3]])
COVARIANCE = ROOT @ ROOT.T


def elements(inclination_deg: float) -> ThieleInnes:
    found = to_thiele_innes(2.5, inclination_deg, 40.0, 120.0)
    return ThieleInnes(*(float(value) for value in found), tuple(tuple(row) for row in COVARIANCE.tolist()))


@pytest.fixture
def measured(with_orbit: Callable[..., System]) -> Callable[[float], System]:
    return lambda inclination_deg: with_orbit(thiele_innes=elements(inclination_deg))


@pytest.mark.parametrize("inclination_deg", [60.0, 125.0])
def test_centre_and_covariance_are_those_of_drawn_elements(
    inclination_deg: float, measured: Callable[[float], System]
) -> None:
    """2e5 draws of A, B, F, G; first order is good to a few per cent at errors of 0.4 %."""
    orbit = measured(inclination_deg).orbit
    centre, covariance = axis_and_inclination(orbit)
    found = orbit.thiele_innes
    mean = [found.a_mas, found.b_mas, found.f_mas, found.g_mas]
    drawn = np.random.default_rng(3).multivariate_normal(mean, COVARIANCE, size=200_000)
    geometric = to_geometric(*drawn.T)
    inclination = np.minimum(geometric.inclination_deg, 180.0 - geometric.inclination_deg)
    sample = np.stack([geometric.a_mas, inclination])
    error = np.sqrt(np.diag(covariance))
    np.testing.assert_allclose(centre, [2.5, min(inclination_deg, 180.0 - inclination_deg)], rtol=1e-12)
    np.testing.assert_allclose(sample.mean(axis=1) / error, centre / error, atol=0.03)
    assert np.abs(np.corrcoef(sample)[0, 1]) > 0.05, "the sign of the correlation would not be tested"
    np.testing.assert_allclose(np.cov(sample) / np.outer(error, error), covariance / np.outer(error, error), atol=0.03)


def test_ln_likelihood_is_that_of_the_two_dimensional_gaussian(
    measured: Callable[[float], System], engine: LightEngine, predict: Predict
) -> None:
    observation = AstrometryObservation.from_system(measured(60.0), engine)
    axis, inclination = np.array([2.5, 2.52, 2.4]), np.array([60.0, 59.0, 62.0])
    found = observation.ln_likelihood(predict(photocentre_mas=axis, inclination_deg=inclination))
    direct = stats.multivariate_normal(observation.centre, observation.covariance)
    np.testing.assert_allclose(found, direct.logpdf(np.stack([axis, inclination], axis=1)), rtol=1e-9)
    assert observation.count == 2


def test_inclination_is_found_however_it_was_measured(
    measured: Callable[[float], System], with_orbit: Callable[..., System]
) -> None:
    direct = Measurement(58.0, 0.5)
    assert measured_inclination(with_orbit(inclination_deg=direct).orbit) is direct
    from_elements = measured_inclination(measured(120.0).orbit)
    assert from_elements.value == pytest.approx(60.0)
    assert from_elements.error == pytest.approx(np.sqrt(axis_and_inclination(measured(120.0).orbit)[1][1, 1]))
    assert measured_inclination(with_orbit().orbit) is None


def test_none_without_elements(plain: System, engine: LightEngine) -> None:
    assert AstrometryObservation.from_system(plain, engine) is None
    assert axis_and_inclination(plain.orbit) is None
