"""Observations are found by themselves, keep apart, and can be added from outside."""

from __future__ import annotations

import pkgutil
from dataclasses import dataclass
from typing import ClassVar, Self

import numpy as np
import pytest

import vetter.observations
from vetter.evaluation import prepare
from vetter.light.engine import LightEngine
from vetter.observations import base
from vetter.observations.base import GaussianObservation, Observation, register, registered
from vetter.observations.prediction import Prediction
from vetter.system.model import System


@pytest.fixture
def registry(monkeypatch: pytest.MonkeyPatch) -> None:
    """Let a test register what it likes; the registry is as before afterwards."""
    registered()
    monkeypatch.setattr(base, "_REGISTRY", dict(base._REGISTRY))


def test_every_module_of_the_package_offers_one() -> None:
    modules = {module.name for module in pkgutil.iter_modules(vetter.observations.__path__)} - {"base", "prediction"}
    assert {kind.__module__.rsplit(".", 1)[1] for kind in registered()} == modules


def test_names_are_distinct_and_in_order_of_rank() -> None:
    kinds = registered()
    assert len({kind.name for kind in kinds}) == len(kinds)
    assert [kind.rank for kind in kinds] == sorted(kind.rank for kind in kinds)
    assert kinds[0].name == "photometry"
    assert [kind.name for kind in kinds if not kind.droppable] == ["orbit", "x_ray"]


def test_each_says_what_it_is() -> None:
    for kind in registered():
        assert kind.label.strip()
        assert kind.__doc__
        assert kind.from_system.__doc__
        assert kind.name.isidentifier()


def test_all_of_a_full_system_stand_up(dark: object) -> None:
    """Every observation of a real system describes itself, counts its columns and has a finite normalisation."""
    for observation in dark.observations:
        assert observation.describe()
        assert observation.count >= 1
        assert np.isfinite(observation.ln_norm)
        assert isinstance(observation.cautions(dark.system), list)


@pytest.mark.usefixtures("registry")
def test_a_second_class_of_the_same_name_is_refused() -> None:
    class Impostor(Observation):
        name: ClassVar[str] = "photometry"

    with pytest.raises(ValueError, match=r"'photometry' is already registered by vetter\.observations\.photometry"):
        register(Impostor)


@pytest.mark.usefixtures("registry")
def test_the_same_class_may_come_again() -> None:
    """A module that is loaded twice is no conflict."""
    before = registered()
    for kind in before:
        assert register(kind) is kind
    assert registered() == before


@pytest.mark.usefixtures("registry")
def test_one_from_outside_is_found_and_used(plain: System, engine: LightEngine) -> None:
    @register
    @dataclass(frozen=True)
    class AgeObservation(GaussianObservation):
        """A toy."""

        name: ClassVar[str] = "toy"
        label: ClassVar[str] = "toy"
        rank: ClassVar[int] = 15

        @classmethod
        def from_system(cls, system: System, engine: LightEngine) -> Self | None:
            return cls(0.0, 1.0)

        def predicted_value(self, predicted: Prediction) -> np.ndarray:
            return predicted.feh

    kinds = registered()
    assert kinds[1] is AgeObservation
    _, observations = prepare(plain)
    assert [observation.name for observation in observations][:2] == ["photometry", "toy"]


def test_the_toy_is_gone_again() -> None:
    assert "toy" not in [kind.name for kind in registered()]
