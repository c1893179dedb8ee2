"""Systems that need no file, and one cheap evaluation of each shipped example, shared by all tests."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from functools import cache
from pathlib import Path
from typing import Any

import hypothesis
import pytest

from vetter import Verdicts, evaluate, read_system
from vetter.evaluation import prepare
from vetter.inference.importance import Settings
from vetter.observations.base import Observation
from vetter.scenarios.context import Context
from vetter.system.model import Distance, Extinction, Magnitude, Measurement, Orbit, Primary, System

# A busy machine is not a failing test.
hypothesis.settings.register_profile("patient", deadline=None)
hypothesis.settings.load_profile("patient")

EXAMPLES = Path(__file__).parent.parent / "examples"
FOUR = ("main_sequence", "white_dwarf", "neutron_star", "black_hole")
CHEAP = Settings(start_points=2048, rung_points=1024, effective=300, last_points=8192, second_effort=False)

PLAIN = System(
    name="Plain",
    source="plain.toml",
    distance=Distance(parallax_mas=Measurement(5.0, 0.02)),
    orbit=Orbit(Measurement(100.0, 0.1), Measurement(0.0, 0.0), k1_km_s=Measurement(30.0, 0.3)),
    magnitudes=(
        Magnitude("Generic/Johnson.V", 11.35, 0.02, "Vega"),
        Magnitude("GAIA/GAIA3.G", 11.18, 0.01, "Vega"),
        Magnitude("2MASS/2MASS.Ks", 9.80, 0.02, "Vega"),
    ),
    extinction=Extinction(ebv_mag=Measurement(0.01, 0.01)),
    primary=Primary(Measurement(5772.0, 60.0), Measurement(4.44, 0.05), Measurement(0.0, 0.05)),
)
"""A Sun at 200 pc with something of at least one solar mass around it."""


@dataclass(frozen=True)
class Evaluated:
    """One evaluation and what it was made from."""

    path: Path
    system: System
    context: Context
    observations: list[Observation]
    verdicts: Verdicts


def evaluated(name: str) -> Evaluated:
    path = EXAMPLES / f"{name}.toml"
    system = read_system(path)
    context, observations = prepare(system)
    return Evaluated(path, system, context, observations, evaluate(system, FOUR, settings=CHEAP))


@pytest.fixture(scope="session")
def cheap() -> Settings:
    return CHEAP


@pytest.fixture(scope="session")
def dark() -> Evaluated:
    """A black hole: every ordinary explanation is excluded, one of them by a wall."""
    return evaluated("dark_companion")


@pytest.fixture(scope="session")
def hidden() -> Evaluated:
    """A star lost in the glare of another: an ordinary explanation stands."""
    return evaluated("hidden_star")


@pytest.fixture(scope="session")
def plain() -> System:
    return PLAIN


@pytest.fixture(scope="session")
def with_orbit() -> Callable[..., System]:
    """Return the plain system with some fields of its orbit replaced."""

    def make(**fields: Any) -> System:  # noqa: ANN401
        return replace(PLAIN, orbit=replace(PLAIN.orbit, **fields))

    return make


@pytest.fixture(scope="session")
def full() -> Callable[[str], Verdicts]:
    """Return the whole evaluation of an example by its file's stem, made once: it takes half a minute."""
    return cache(lambda name: evaluate(read_system(EXAMPLES / f"{name}.toml")))
