"""The one-number observations against scipy's normal distribution, and where each comes from in a system."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy import stats

from vetter.light.engine import LightEngine
from vetter.observations.base import GaussianObservation, gaussian_ln_norm, residual_from_ln
from vetter.observations.distance import DistanceObservation
from vetter.observations.dust import DustObservation
from vetter.observations.inclination import InclinationObservation
from vetter.observations.orbit import OrbitObservation, k1_error_km_s
from vetter.observations.photocentre import PhotocentreObservation
from vetter.observations.prediction import Prediction
from vetter.observations.seen_mass import SeenMassObservation
from vetter.system.model import Distance, Extinction, Measurement, Orbit, Primary, System

Predict = Callable[..., Prediction]

# observation, field of the prediction, predicted values, the same in the unit of the measurement
CASES = [
    (DistanceObservation(5.0, 0.1, True), "distance_pc", [200.0, 190.0, 400.0], [5.0, 1000.0 / 190.0, 2.5]),
    (DistanceObservation(200.0, 7.0, False), "distance_pc", [200.0, 190.0], [200.0, 190.0]),
    (DustObservation(0.12, 0.02), "ebv_mag", [0.0, 0.12, 0.5], [0.0, 0.12, 0.5]),
    (InclinationObservation(58.0, 0.5), "inclination_deg", [58.0, 60.0], [58.0, 60.0]),
    (OrbitObservation(53.2, 0.6), "k1_km_s", [53.2, 50.0], [53.2, 50.0]),
    (PhotocentreObservation(2.02, 0.03), "photocentre_mas", [2.02, 1.9], [2.02, 1.9]),
    (SeenMassObservation(1.02, 0.05), "mass_msun", [1.02, 0.9], [1.02, 0.9]),
]


@pytest.mark.parametrize(("observation", "field", "values", "measured"), CASES, ids=lambda case: type(case).__name__)
def test_ln_likelihood_is_the_normal_log_density(
    observation: GaussianObservation, field: str, values: list[float], measured: list[float], predict: Predict
) -> None:
    predicted = predict(**{field: values})
    expected = stats.norm.logpdf(measured, observation.value, observation.error)
    np.testing.assert_allclose(observation.ln_likelihood(predicted), expected, rtol=1e-12)
    assert observation.residuals(predicted).shape == (len(values), observation.count)


# field of the system, the part that holds the measurement, the observation expected from it
GIVEN = [
    (DistanceObservation, {"distance": Distance(parallax_mas=Measurement(1.7, 0.02))}, (1.7, 0.02)),
    (DistanceObservation, {"distance": Distance(distance_pc=Measurement(578.0, 7.0))}, (578.0, 7.0)),
    (DustObservation, {"extinction": Extinction(ebv_mag=Measurement(0.12, 0.02))}, (0.12, 0.02)),
    (SeenMassObservation, {"primary": Primary(mass_msun=Measurement(1.02, 0.05))}, (1.02, 0.05)),
]


@pytest.mark.parametrize(("kind", "fields", "expected"), GIVEN)
def test_from_system_takes_value_and_error(
    kind: type[GaussianObservation],
    fields: dict[str, object],
    expected: tuple[float, float],
    plain: System,
    engine: LightEngine,
) -> None:
    found = kind.from_system(replace(plain, **fields), engine)
    assert (found.value, found.error) == expected


ABSENT = [
    (DistanceObservation, {"distance": Distance()}),
    (DustObservation, {"extinction": None}),
    (DustObservation, {"extinction": Extinction(ebv_max_mag=0.5)}),
    (SeenMassObservation, {"primary": Primary()}),
    (InclinationObservation, {}),
    (PhotocentreObservation, {}),
    (OrbitObservation, {"orbit": Orbit(Measurement(3.0, 0.0), Measurement(0.0, 0.0))}),
]


@pytest.mark.parametrize(("kind", "fields"), ABSENT)
def test_from_system_is_none_when_absent(
    kind: type[GaussianObservation], fields: dict[str, object], plain: System, engine: LightEngine
) -> None:
    assert kind.from_system(replace(plain, **fields), engine) is None


def test_distance_says_which_kind_it_is() -> None:
    assert DistanceObservation(5.0, 0.1, True).describe() == "parallax"
    assert DistanceObservation(200.0, 7.0, False).describe() == "distance"
    assert SeenMassObservation(1.0, 0.1).describe() == "mass estimate of the seen star"


@pytest.mark.parametrize(("given_deg", "folded_deg"), [(58.0, 58.0), (122.0, 58.0), (90.0, 90.0), (180.0, 0.0)])
def test_inclination_is_folded(
    given_deg: float, folded_deg: float, with_orbit: Callable[..., System], engine: LightEngine
) -> None:
    found = InclinationObservation.from_system(with_orbit(inclination_deg=Measurement(given_deg, 0.5)), engine)
    assert (found.value, found.error) == (folded_deg, 0.5)


def test_photocentre_is_taken_as_given(with_orbit: Callable[..., System], engine: LightEngine) -> None:
    system = with_orbit(photocentre_mas=Measurement(2.02, 0.03), photocentre_band="GAIA/GAIA3.G")
    found = PhotocentreObservation.from_system(system, engine)
    assert (found.value, found.error) == (2.02, 0.03)


def test_mass_estimate_says_nothing_of_a_star_that_is_not_what_it_looks_like(predict: Predict) -> None:
    observation = SeenMassObservation(1.02, 0.05)
    np.testing.assert_array_equal(observation.residuals(predict(mass_msun=[0.2, 0.5], ordinary=False)), 0.0)


def test_orbit_is_the_one_term_that_is_never_left_out() -> None:
    assert not OrbitObservation.droppable
    assert all(kind.droppable for kind in (DistanceObservation, DustObservation, InclinationObservation))


def test_error_of_k1_carries_those_of_period_and_eccentricity(
    with_orbit: Callable[..., System], engine: LightEngine
) -> None:
    """Against numerical derivatives of K1 ~ P^(-1/3) (1 - e^2)^(-1/2)."""
    period, e, k1 = 20.0, 0.6, 45.0
    system = with_orbit(
        period_d=Measurement(period, 0.8), eccentricity=Measurement(e, 0.03), k1_km_s=Measurement(k1, 0.7)
    )

    def amplitude(p: float, ecc: float) -> float:
        return k1 * (p / period) ** (-1.0 / 3.0) * np.sqrt((1.0 - e * e) / (1.0 - ecc * ecc))

    by_period = (amplitude(period + 1e-4, e) - amplitude(period - 1e-4, e)) / 2e-4 * 0.8
    by_eccentricity = (amplitude(period, e + 1e-5) - amplitude(period, e - 1e-5)) / 2e-5 * 0.03
    expected = np.sqrt(0.7**2 + by_period**2 + by_eccentricity**2)
    assert k1_error_km_s(system.orbit) == pytest.approx(expected, rel=1e-6)
    assert OrbitObservation.from_system(system, engine).error == pytest.approx(expected, rel=1e-6)


def test_error_of_k1_without_other_errors_is_its_own(plain: System) -> None:
    orbit = replace(plain.orbit, period_d=Measurement(100.0, 0.0))
    assert k1_error_km_s(orbit) == 0.3


def test_error_of_an_amplitude_that_was_not_measured(with_orbit: Callable[..., System]) -> None:
    with pytest.raises(ValueError, match="no K1"):
        k1_error_km_s(with_orbit(k1_km_s=None).orbit)


@given(st.lists(st.floats(1e-6, 1e6), min_size=1, max_size=8))
def test_normalisation_is_that_of_independent_gaussians(errors: list[float]) -> None:
    expected = stats.norm.logpdf(0.0, 0.0, errors).sum()
    # Terms of opposite sign may cancel: an absolute error of rounding size beside the relative one.
    assert gaussian_ln_norm(errors) == pytest.approx(expected, rel=1e-12, abs=1e-10)


@given(st.floats(-1e8, 0.0))
def test_any_likelihood_can_be_written_as_a_residual(ln_value: float) -> None:
    residual = residual_from_ln(np.array([ln_value]))[0]
    assert -0.5 * residual**2 == pytest.approx(ln_value, rel=1e-12, abs=1e-300)


def test_rounding_above_zero_is_no_residual() -> None:
    assert residual_from_ln(np.array([1e-17]))[0] == 0.0
