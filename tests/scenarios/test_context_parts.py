"""What all scenarios of a system share: columns of light, range of dust, prior and guide of the distance."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import numpy as np
import pytest

from vetter.scenarios.context import (
    ASTROMETRY_BAND,
    OPTICAL_WINDOW_NM,
    build_context,
    distance_parameter,
    dust_parameter,
    ebv_max_mag,
    guided,
    optional_guide,
    photocentre_band,
)
from vetter.scenarios.priors import LogUniform, SpaceDensity, Uniform
from vetter.system.model import Distance, Extinction, LightLimit, MagnitudeLimit, Measurement, System, ThieleInnes


def test_columns_hold_every_band_and_window_once(with_orbit: Callable[..., System]) -> None:
    system = replace(
        with_orbit(photocentre_mas=Measurement(2.0, 0.1), photocentre_band="TESS/TESS.Red"),
        magnitude_limits=(MagnitudeLimit("GALEX/GALEX.NUV", 21.0, 0.95, "AB"),),
        light_limits=(LightLimit((480.0, 520.0), 0.03, 0.95), LightLimit((480.0, 520.0), 0.05, 0.99)),
    )
    context = build_context(system)
    assert context.engine.bands == (
        "Generic/Johnson.V",
        "GAIA/GAIA3.G",
        "2MASS/2MASS.Ks",
        "GALEX/GALEX.NUV",
        "TESS/TESS.Red",
    )
    assert context.engine.windows_nm == ((480.0, 520.0), OPTICAL_WINDOW_NM)
    assert context.engine.columns[context.optical_column] == OPTICAL_WINDOW_NM
    assert context.engine.columns[context.photocentre_column] == "TESS/TESS.Red"


def test_a_band_of_the_astrometry_that_was_also_measured_is_not_doubled(with_orbit: Callable[..., System]) -> None:
    context = build_context(with_orbit(photocentre_mas=Measurement(2.0, 0.1), photocentre_band="GAIA/GAIA3.G"))
    assert context.engine.bands.count("GAIA/GAIA3.G") == 1
    assert context.photocentre_column == 1


def test_the_band_of_thiele_innes_elements(with_orbit: Callable[..., System]) -> None:
    elements = ThieleInnes(1.0, 0.5, -0.5, 1.0, ((1e-4, 0.0, 0.0, 0.0),) * 4)
    assert photocentre_band(with_orbit()) is None
    assert build_context(with_orbit()).photocentre_column is None
    assert photocentre_band(with_orbit(thiele_innes=elements)) == ASTROMETRY_BAND
    assert photocentre_band(with_orbit(thiele_innes=elements, photocentre_band="TESS/TESS.Red")) == "TESS/TESS.Red"


@pytest.mark.parametrize(
    ("dust", "expected"),
    [
        (None, 3.0),
        (Extinction(), 3.0),
        (Extinction(ebv_max_mag=0.5), 0.5),
        (Extinction(ebv_mag=Measurement(0.1, 0.02)), 1.0),
        (Extinction(ebv_mag=Measurement(1.2, 0.1)), 2.0),
    ],
)
def test_range_of_dust(dust: Extinction | None, expected: float, plain: System) -> None:
    system = replace(plain, extinction=dust)
    assert ebv_max_mag(system) == pytest.approx(expected)
    parameter = dust_parameter(system)
    assert parameter.prior == Uniform(0.0, ebv_max_mag(system))
    assert (parameter.guide is not None) == (dust is not None and dust.ebv_mag is not None)


def test_the_engine_is_built_for_all_dust_that_can_be_drawn(plain: System) -> None:
    for r_v in (3.1, 5.0):
        context = build_context(replace(plain, extinction=Extinction(ebv_max_mag=0.7, r_v=r_v)))
        assert context.engine.r_v == r_v
        assert context.engine.a_v_max_mag >= r_v * 0.7


@pytest.mark.parametrize(
    ("given", "prior", "centre", "scale"),
    [
        (Distance(parallax_mas=Measurement(5.0, 0.1)), SpaceDensity, 200.0, 4.0),
        (Distance(distance_pc=Measurement(578.0, 7.0)), SpaceDensity, 578.0, 7.0),
        (Distance(distance_pc=Measurement(50000.0, 900.0)), LogUniform, 50000.0, 900.0),
        (Distance(parallax_mas=Measurement(0.02, 0.002)), LogUniform, 50000.0, 5000.0),
        (Distance(parallax_mas=Measurement(0.2, 0.1)), SpaceDensity, None, None),
        (Distance(parallax_mas=Measurement(-0.3, 0.1)), SpaceDensity, None, None),
    ],
)
def test_distance(
    given: Distance, prior: type[object], centre: float | None, scale: float | None, plain: System
) -> None:
    """Guided where the parallax is worth five sigma; beyond the disc's reach log-uniform."""
    parameter = distance_parameter(replace(plain, distance=given))
    assert isinstance(parameter.prior, prior)
    if centre is None:
        assert parameter.guide is None
    else:
        assert (parameter.guide.centre, parameter.guide.scale) == pytest.approx((centre, scale))
        value, ln_ratio = parameter.draw(np.linspace(-3.0, 3.0, 101))
        assert (value > 0.0).all()
        assert np.isfinite(ln_ratio).all()


def test_a_guide_is_centred_inside_its_range() -> None:
    assert guided(Measurement(-0.02, 0.01), 0.0, 1.0).centre == 0.0
    assert guided(Measurement(7.0, 0.1), 0.0, 5.6).centre == 5.6
    assert optional_guide(None, 0.0, 1.0, 0.01) is None
    assert optional_guide(Measurement(0.3, 0.1), 0.0, 1.0, 0.01) == guided(Measurement(0.3, 0.1), 0.0, 1.0)
    assert optional_guide(Measurement(0.3, 0.1), 0.0, 1.0, 0.2) == guided(Measurement(0.3, 0.2), 0.0, 1.0)


def test_shared_parameters_are_distance_and_dust(plain: System) -> None:
    assert [p.name for p in build_context(plain).shared_parameters()] == ["distance_pc", "ebv_mag"]
