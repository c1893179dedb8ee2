"""The seen star's spectrum: Gaussian as it stands, less sure under a second star's light."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy import stats

from vetter.light.engine import LightEngine
from vetter.observations.prediction import Prediction
from vetter.observations.spectroscopy import SpectroscopyObservation, second_light_share
from vetter.system.model import Measurement, Primary, System

Predict = Callable[..., Prediction]

TEFF, LOGG, FEH = Measurement(5960.0, 80.0), Measurement(4.3, 0.1), Measurement(0.1, 0.05)
ALL = SpectroscopyObservation(TEFF, LOGG, FEH)


@pytest.mark.parametrize("ratio", [0.0, 0.05, 0.1])
def test_below_a_tenth_of_the_light_it_is_the_sum_of_normal_log_densities(ratio: float, predict: Predict) -> None:
    predicted = predict(
        teff_k=[5800.0, 6100.0], logg=[4.2, 4.5], feh=[0.0, 0.2], optical_ratio=ratio, companion_teff_k=4000.0
    )
    expected = (
        stats.norm.logpdf([5800.0, 6100.0], 5960.0, 80.0)
        + stats.norm.logpdf([4.2, 4.5], 4.3, 0.1)
        + stats.norm.logpdf([0.0, 0.2], 0.1, 0.05)
    )
    np.testing.assert_allclose(ALL.ln_likelihood(predicted), expected, rtol=1e-12)


@pytest.mark.parametrize(
    ("given_here", "count"),
    [((TEFF, None, None), 1), ((None, LOGG, None), 1), ((TEFF, None, FEH), 2), ((TEFF, LOGG, FEH), 3)],
)
def test_only_what_was_measured_counts(
    given_here: tuple[Measurement | None, ...], count: int, predict: Predict
) -> None:
    observation = SpectroscopyObservation(*given_here)
    assert observation.count == count
    assert observation.residuals(predict()).shape == (1, count)
    errors = [measured.error for measured in given_here if measured is not None]
    assert observation.ln_norm == pytest.approx(stats.norm.logpdf(0.0, 0.0, errors).sum())


def test_a_dark_companion_blurs_nothing(predict: Predict) -> None:
    """Its Teff is not a number; that must not spread."""
    found = ALL.residuals(predict(teff_k=6040.0, logg=4.3, feh=0.1))
    np.testing.assert_allclose(found, [[1.0, 0.0, 0.0]], atol=1e-12)


def test_the_error_grows_with_the_share_and_the_difference(predict: Predict) -> None:
    """Equal light: half of it is the second star's; a tenth of the seen star's light is one part in eleven."""
    predicted = predict(
        teff_k=6500.0, logg=4.0, feh=0.3, optical_ratio=1.0, companion_teff_k=5000.0, companion_logg=3.0
    )
    share = 0.5 - 1.0 / 11.0
    expected = [
        540.0 / np.hypot(80.0, share * 1500.0),
        -0.3 / np.hypot(0.1, share * 1.0),
        0.2 / 0.05,
    ]
    np.testing.assert_allclose(ALL.residuals(predicted), [expected], rtol=1e-9)


def test_the_grown_error_is_not_charged_its_normalisation(predict: Predict) -> None:
    """A perfect fit under a bright second star is as good as a perfect fit without one."""
    here = {"teff_k": 5960.0, "logg": 4.3, "feh": 0.1}
    alone = ALL.ln_likelihood(predict(**here))
    blended = ALL.ln_likelihood(predict(**here, optical_ratio=2.0, companion_teff_k=9000.0, companion_logg=4.0))
    np.testing.assert_array_equal(alone, blended)


@pytest.mark.parametrize("ratio", [0.0, 0.05, 0.3, 2.0])
def test_in_the_evidence_the_likelihood_is_a_density(ratio: float, predict: Predict) -> None:
    """Summed over everything that could have been measured it is one, however much the second light blurs."""
    predicted = predict(teff_k=6000.0, optical_ratio=ratio, companion_teff_k=30000.0, companion_logg=4.0)
    measured = np.linspace(-2e5, 2e5, 400001)
    narrowing = SpectroscopyObservation(Measurement(5960.0, 80.0), None, None).ln_narrowing(predicted)[0]
    width = 80.0 * np.exp(-narrowing)
    residual = SpectroscopyObservation(Measurement(6000.0 + width, 80.0), None, None).residuals(predicted)[0, 0]
    assert residual == pytest.approx(-1.0)
    density = stats.norm.pdf(0.0, 0.0, 80.0) * np.exp(-0.5 * ((6000.0 - measured) / width) ** 2 + narrowing)
    assert np.trapezoid(density, measured) == pytest.approx(1.0, rel=1e-6)


@given(st.floats(0.0, 1e6))
def test_share_is_the_light_beyond_a_tenth(ratio: float) -> None:
    found = second_light_share(np.array([ratio]))[0]
    assert 0.0 <= found < 1.0 - 1.0 / 11.0 + 1e-12
    assert (found > 0.0) == (ratio / (1.0 + ratio) > 0.1 / 1.1)


def test_share_of_a_companion_without_light() -> None:
    np.testing.assert_array_equal(second_light_share(np.array([np.nan, 0.0])), 0.0)


def test_from_system(plain: System, engine: LightEngine) -> None:
    found = SpectroscopyObservation.from_system(plain, engine)
    assert (found.teff_k, found.logg, found.feh) == (plain.primary.teff_k, plain.primary.logg, plain.primary.feh)
    assert found.describe() == "spectrum"
    bare = replace(plain, primary=Primary(vsini_km_s=4.0, mass_msun=Measurement(1.0, 0.1)))
    assert SpectroscopyObservation.from_system(bare, engine) is None
