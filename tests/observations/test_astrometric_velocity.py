"""K1 that the astrometric orbit predicts, against published systems, Monte Carlo and the caution's words."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from vetter.observations.astrometry import predicted_k1_km_s, velocity_cautions
from vetter.physics import kepler
from vetter.physics.thiele_innes import to_geometric, to_thiele_innes
from vetter.system.model import Distance, Measurement, Orbit, System, ThieleInnes


def _system(orbit: Orbit, parallax: Measurement = Measurement(2.0, 0.02)) -> System:  # noqa: B008 - frozen
    return System("test", "test.toml", Distance(parallax), orbit, ())


def _orbit(**more: object) -> Orbit:
    values = {
        "period_d": Measurement(185.59, 0.05),
        "eccentricity": Measurement(0.451, 0.005),
        "photocentre_mas": Measurement(3.0, 0.06),
        "photocentre_band": "GAIA/GAIA3.G",
        "inclination_deg": Measurement(126.6, 0.4),
        **more,
    }
    return Orbit(**values)  # type: ignore[arg-type]


def test_a_dark_companion_worked_by_hand() -> None:
    # 1.1 + 5.0 Msun, 300 d, e 0.2, i 60 degrees at 3 mas: a = (6.1 x 0.82136^2)^(1/3) = 1.60252 au, so the photocentre
    # moves 3 x 1.60252 x 5.0 / 6.1 = 3.94064 mas; K1 = 29.7854 x 5.0 x 6.1^(-2/3) x 0.82136^(-1/3) x sin i /
    # sqrt(1 - e^2), where 29.7854 km/s is the speed of a circular orbit of 1 au about the Sun.
    orbit = _orbit(
        period_d=Measurement(300.0, 0.05),
        eccentricity=Measurement(0.2, 0.005),
        photocentre_mas=Measurement(3.94064, 0.05),
        inclination_deg=Measurement(60.0, 0.4),
    )
    predicted = predicted_k1_km_s(_system(orbit, Measurement(3.0, 0.02)))
    assert predicted is not None
    assert predicted.value == pytest.approx(42.10, abs=0.01)


@given(
    m1=st.floats(0.3, 5.0),
    m2=st.floats(0.3, 20.0),
    inclination=st.floats(5.0, 175.0),
    e=st.floats(0.0, 0.9),
    period=st.floats(20.0, 2000.0),
    parallax=st.floats(0.2, 20.0),
)
def test_it_is_the_k1_of_the_masses(
    m1: float, m2: float, inclination: float, e: float, period: float, parallax: float
) -> None:
    a_mas = float(kepler.photocentre_mas(parallax, kepler.separation_au(m1 + m2, period), m1, m2))
    orbit = _orbit(
        period_d=Measurement(period, 0.01),
        eccentricity=Measurement(e, 0.01),
        photocentre_mas=Measurement(a_mas, 0.01 * a_mas),
        inclination_deg=Measurement(inclination, 1.0),
    )
    predicted = predicted_k1_km_s(_system(orbit, Measurement(parallax, 0.01)))
    expected = kepler.semi_amplitude_km_s(m1, m2, period, np.sin(np.radians(inclination)), e)
    assert predicted is not None
    assert predicted.value == pytest.approx(float(expected), rel=1e-9)


def test_error_against_draws_with_the_full_covariance() -> None:
    # 1e5 draws of A, B, F, G and parallax; the spread of a standard deviation is 0.2 %, first order costs the rest.
    rng = np.random.default_rng(3)
    elements = np.array([float(x) for x in to_thiele_innes(3.0, 55.0, 40.0, 120.0)])
    root = rng.normal(0.0, 0.03, (4, 4))
    covariance = root @ root.T
    measured = ThieleInnes(*elements, tuple(map(tuple, covariance)))
    bare = _orbit(photocentre_mas=None, photocentre_band=None, inclination_deg=None, thiele_innes=measured)
    predicted = predicted_k1_km_s(_system(bare))
    drawn = to_geometric(*rng.multivariate_normal(elements, covariance, 100_000).T)
    parallax = 2.0 + 0.02 * rng.standard_normal(100_000)
    period, e = 185.59 + 0.05 * rng.standard_normal(100_000), 0.451 + 0.005 * rng.standard_normal(100_000)
    speed = 2.0 * np.pi * kepler.AU_KM / (period * kepler.DAY_S * np.sqrt(1.0 - e * e))
    k1 = drawn.a_mas / parallax * speed * np.sin(np.radians(drawn.inclination_deg))
    assert predicted is not None
    assert predicted.value == pytest.approx(k1.mean(), abs=0.1 * k1.std())
    assert predicted.error == pytest.approx(k1.std(), rel=0.03)


@pytest.mark.parametrize(
    ("factor", "words"), [(1.0, None), (0.7, "one of the two orbits is wrong"), (1.4, "the companion gives light")]
)
def test_caution_says_by_how_much(factor: float, words: str | None) -> None:
    predicted = predicted_k1_km_s(_system(_orbit()))
    assert predicted is not None
    measured = Measurement(factor * predicted.value, 0.5)
    said = velocity_cautions(_system(_orbit(k1_km_s=measured)))
    if words is None:
        assert said == []
        return
    sigma = abs(predicted.value - measured.value) / np.hypot(predicted.error, 0.5)
    assert len(said) == 1
    assert words in said[0]
    assert f"{sigma:.1f} sigma" in said[0]


def test_a_distance_serves_as_well() -> None:
    with_parallax = _system(_orbit())
    with_distance = replace(with_parallax, distance=Distance(distance_pc=Measurement(500.0, 5.0)))
    first, second = predicted_k1_km_s(with_parallax), predicted_k1_km_s(with_distance)
    assert first is not None
    assert second is not None
    assert second.value == pytest.approx(first.value)
    assert second.error == pytest.approx(first.error)


@pytest.mark.parametrize("missing", ["photocentre_mas", "inclination_deg"])
def test_nothing_is_said_without_an_astrometric_orbit(missing: str) -> None:
    system = _system(_orbit(**{missing: None, "k1_km_s": Measurement(10.0, 0.1)}))
    assert predicted_k1_km_s(system) is None
    assert velocity_cautions(system) == []


def test_nothing_is_said_without_a_parallax_above_zero() -> None:
    assert predicted_k1_km_s(_system(_orbit(), Measurement(-0.1, 0.02))) is None
