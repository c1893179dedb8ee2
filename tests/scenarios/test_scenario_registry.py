"""Scenarios are found by themselves, keep apart, and one from outside runs from end to end."""

from __future__ import annotations

from collections.abc import Mapping
from typing import ClassVar

import numpy as np
import pytest

from vetter import evaluate
from vetter.inference.importance import Settings
from vetter.results.table import render
from vetter.scenarios import base
from vetter.scenarios.base import Companion, Scenario, register, registered
from vetter.scenarios.priors import LogUniform, Parameter, Uniform
from vetter.system.keys import SCENARIO_NAMES
from vetter.system.model import Assumptions, System


@pytest.fixture
def registry(monkeypatch: pytest.MonkeyPatch) -> None:
    """Let a test register what it likes; the registry is as before afterwards."""
    registered()
    monkeypatch.setattr(base, "_REGISTRY", dict(base._REGISTRY))


def test_the_names_are_those_of_the_system_file() -> None:
    assert set(registered()) <= set(SCENARIO_NAMES)
    assert all(name == scenario.name for name, scenario in registered().items())


def test_ordinary_explanations_come_first() -> None:
    scenarios = list(registered().values())
    assert [s.rank for s in scenarios] == sorted(s.rank for s in scenarios)
    ordinary = [s.ordinary for s in scenarios]
    assert ordinary == sorted(ordinary, reverse=True)
    assert [s.name for s in scenarios if not s.ordinary] == ["neutron_star", "black_hole", "compact_pair"]


@pytest.mark.parametrize("scenario", registered().values(), ids=registered())
def test_each_explains_itself(scenario: Scenario) -> None:
    assert scenario.__doc__
    assert scenario.title[0].isupper()
    assert len(scenario.title) <= 36, "it would not fit its column"
    assert "_" not in scenario.title


@pytest.mark.parametrize(
    ("name", "low", "high"),
    [
        ("main_sequence", 0.08, 60.0),
        ("white_dwarf", 0.15, 1.5),
        ("neutron_star", 1.2, 2.1),
        ("black_hole", 2.6, 150.0),
    ],
)
def test_mass_ranges_follow_the_assumptions(name: str, low: float, high: float) -> None:
    assumed = Assumptions(1.5, 1.2, 2.1, 2.6)
    prior = registered()[name].mass_prior(assumed)
    assert (prior.low, prior.high) == (low, high)


def test_a_star_on_the_main_sequence_ends_at_its_walls() -> None:
    scenario = registered()["main_sequence"]
    zero = np.zeros(3)
    draws = {"companion_life_fraction": zero, "companion_luminosity_score": zero, "companion_radius_score": zero}
    made = scenario.companion(np.array([0.03, 1.0, 200.0]), zero, draws)
    (wall,) = made.walls
    assert (wall.excess > 0.0).tolist() == [True, False, True]
    assert wall.words == "no main-sequence star has that mass"


def test_a_white_dwarf_is_small_and_a_point_for_the_roche_wall() -> None:
    made = registered()["white_dwarf"].companion(
        np.array([0.6, 1.0]), np.zeros(2), {"companion_teff_k": np.array([1e4, 2e4])}
    )
    (light,) = made.components
    assert (light.kind, made.radius_rsun) == ("white_dwarf", None)
    # Hurley, Pols & Tout 2000, eq. 91: 0.01278 and 0.00806 Rsun.
    np.testing.assert_allclose(light.radius_rsun, [0.01278, 0.00806], rtol=2e-3)


@pytest.mark.usefixtures("registry")
def test_a_second_class_of_the_same_name_is_refused() -> None:
    class Impostor(Scenario):
        name: ClassVar[str] = "black_hole"

    with pytest.raises(ValueError, match=r"'black_hole' is already registered by vetter\.scenarios\.compact_remnant"):
        register(Impostor)


@pytest.mark.usefixtures("registry")
def test_the_same_class_may_come_again() -> None:
    before = list(registered())
    assert register(base._REGISTRY["black_hole"]) is base._REGISTRY["black_hole"]
    assert list(registered()) == before


@pytest.mark.usefixtures("registry")
def test_one_from_outside_runs_from_end_to_end(plain: System, cheap: Settings) -> None:
    @register
    class Cinder(Scenario):
        """A toy: a lump of cold matter with a colour that nothing depends on."""

        name: ClassVar[str] = "toy"
        title: ClassVar[str] = "Lump of cold matter"
        rank: ClassVar[int] = 5
        ordinary: ClassVar[bool] = True

        def mass_prior(self, assumptions: Assumptions) -> LogUniform:
            return LogUniform(0.5, 5.0)

        def companion_parameters(self) -> list[Parameter]:
            return [Parameter("colour", "", Uniform(0.0, 1.0))]

        def companion(self, mass_msun: np.ndarray, feh: np.ndarray, draws: Mapping[str, np.ndarray]) -> Companion:
            return Companion()

    assert next(iter(registered())) == "toy"
    verdicts = evaluate(plain, ["toy", "neutron_star"], settings=cheap)
    assert [s.name for s in verdicts.scenarios] == ["toy", "neutron_star"]
    toy = verdicts.scenario("toy")
    assert toy.verdict == "allowed"
    assert toy.priors["colour"] == "uniform 0 to 1"
    assert 0.0 < toy.best_fit.values["colour"] < 1.0
    assert "Lump of cold matter" in render(verdicts)
    assert "lump of cold matter (allowed)" in verdicts.to_dict()["headline"]


def test_the_toy_is_gone_again() -> None:
    assert "toy" not in registered()
