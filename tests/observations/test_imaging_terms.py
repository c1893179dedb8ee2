"""Images: a source counts where it is resolved and brighter than the contrast."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import numpy as np
import pytest
from scipy import stats

from vetter.observations.imaging import ImagingObservation
from vetter.observations.prediction import Prediction
from vetter.physics import kepler
from vetter.scenarios.context import build_context
from vetter.system.model import Imaging, System

Predict = Callable[..., Prediction]

IMAGES = ImagingObservation(0, np.array([50.0, 100.0, 200.0]), np.array([3.0, 4.5, 6.0]), 0.0)
AU_RSUN = kepler.AU_KM / kepler.R_SUN_KM


def face_on(predict: Predict, separation_mas: object, ratio: float, n: int = 1) -> Prediction:
    """A circular orbit seen face on at 200 pc: its separation is the same at every moment."""
    au = np.asarray(separation_mas) * 1e-3 * 200.0
    return predict(separation_rsun=au * AU_RSUN, inclination_deg=0.0, band_ratio=np.full((n, 3), ratio))


@pytest.mark.parametrize(("separation_mas", "contrast_mag"), [(50.0, 3.0), (75.0, 3.75), (200.0, 6.0)])
def test_it_is_a_half_gaussian_at_the_contrast_there(
    separation_mas: float, contrast_mag: float, predict: Predict
) -> None:
    ratio = 0.02
    found = IMAGES.ln_likelihood(face_on(predict, separation_mas + 1e-9, ratio))
    if separation_mas == 200.0:
        found = IMAGES.ln_likelihood(face_on(predict, separation_mas - 1e-9, ratio))
    width = 10.0 ** (-0.4 * contrast_mag) / stats.norm.ppf(0.975)
    assert found[0] == pytest.approx(-0.5 * (ratio / width) ** 2, rel=1e-6)


def test_closer_or_farther_is_not_looked_for(predict: Predict) -> None:
    predicted = face_on(predict, np.array([1.0, 49.0, 201.0, 5000.0]), 1.0, n=4)
    np.testing.assert_array_equal(IMAGES.residuals(predicted), 0.0)


def test_a_dark_companion_is_never_seen(predict: Predict) -> None:
    np.testing.assert_array_equal(IMAGES.residuals(face_on(predict, 100.0, 0.0)), 0.0)


def test_an_edge_on_orbit_hides_at_some_moments(predict: Predict) -> None:
    """Circular, 100 mas edge on: |cos| > 1/2 for two thirds of the time, so a third of the moments escapes."""
    wide = predict(separation_rsun=20.0 * AU_RSUN, inclination_deg=90.0, band_ratio=np.full((1, 3), 10.0))
    assert np.exp(IMAGES.ln_likelihood(wide))[0] == pytest.approx(1.0 / 3.0, abs=1.0 / 16.0)


def test_an_eccentric_orbit_is_longest_far_out(predict: Predict) -> None:
    """Face on, a = 100 mas, e = 0.5: nearer than 100 mas for E < 90 degrees, M = pi/2 - 0.5, 34.1 % of the time."""
    images = replace(IMAGES, separation_mas=np.array([100.0, 200.0]), contrast_mag=np.array([4.0, 4.0]))
    images = replace(images, eccentricity=0.5)
    predicted = predict(separation_rsun=20.0 * AU_RSUN, inclination_deg=0.0, band_ratio=np.full((1, 3), 10.0))
    assert np.exp(images.ln_likelihood(predicted))[0] == pytest.approx(0.341, abs=1.0 / 16.0)


def test_a_star_free_of_the_orbit_is_where_it_is(predict: Predict) -> None:
    found = IMAGES.residuals(predict(band_ratio=np.full((3, 3), 0.02), unrelated_mas=np.array([10.0, 100.0, 1000.0])))[
        :, 0
    ]
    expected = 0.02 * 10.0 ** (0.4 * 4.5) * stats.norm.ppf(0.975)
    np.testing.assert_allclose(found, [0.0, expected, 0.0], rtol=1e-6)


def test_an_impossible_brightness_stays_finite(predict: Predict) -> None:
    assert np.isfinite(IMAGES.residuals(face_on(predict, 100.0, 1e6))).all()


def test_it_is_made_from_the_file(plain: System, predict: Predict) -> None:
    system = replace(plain, imaging=Imaging("2MASS/2MASS.H", (50.0, 100.0), (3.0, 4.5)))
    engine = build_context(system).engine
    found = ImagingObservation.from_system(system, engine)
    assert found is not None
    assert (engine.bands[found.column], found.count, found.ln_norm) == ("2MASS/2MASS.H", 1, 0.0)
    assert ImagingObservation.from_system(plain, engine) is None
    # 100 Rsun at 200 pc are 2.3 mas.
    close = predict(band_ratio=np.full((1, len(engine.bands)), 1.0))
    np.testing.assert_array_equal(found.residuals(close), 0.0)
