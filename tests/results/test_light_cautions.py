"""What the reader is told of the light: metallicity that some bands do not follow, atmospheres of the user's own."""

from __future__ import annotations

from dataclasses import replace

import pytest

from vetter.light.engine import LightEngine
from vetter.results.cautions import light_cautions
from vetter.scenarios.context import Context, build_context
from vetter.system.model import Measurement, System


def with_feh(system: System, feh: float) -> Context:
    return build_context(replace(system, primary=replace(system.primary, feh=Measurement(feh, 0.1))))


@pytest.mark.parametrize("feh", [-1.2, 0.45])
def test_bands_that_do_not_follow_the_metallicity_are_named(feh: float, plain: System) -> None:
    (said,) = light_cautions(with_feh(plain, feh))
    assert f"[Fe/H] {feh:+.2f}" in said
    # V and G lie between 470 and 1000 nm, Ks does not.
    assert said.endswith("enlarged in 2MASS/2MASS.Ks.")


def test_their_model_error_is_indeed_enlarged(plain: System) -> None:
    engine = with_feh(plain, -1.2).engine
    solar, poor = (float(engine.model_error_mag("2MASS/2MASS.Ks", 5772.0, 4.4, feh)) for feh in (0.0, -1.2))
    assert poor > 1.3 * solar


@pytest.mark.parametrize("feh", [-0.3, 0.0, 0.3])
def test_nothing_is_said_near_solar_metallicity(feh: float, plain: System) -> None:
    assert light_cautions(with_feh(plain, feh)) == []


def test_nothing_is_said_when_every_band_follows(plain: System) -> None:
    context = with_feh(plain, -1.2)
    assert light_cautions(replace(context, engine=LightEngine.build(["Generic/Johnson.V", "GAIA/GAIA3.G"]))) == []


def test_the_users_own_atmospheres_are_named(plain: System) -> None:
    context = build_context(plain)
    (said,) = light_cautions(replace(context, engine=replace(context.engine, grid="mine")))
    assert "your own atmospheres 'mine'" in said
