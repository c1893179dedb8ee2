"""Golden systems with saved verdicts, and made-up verdicts on a plain one."""

from __future__ import annotations

import importlib.util
from collections.abc import Callable
from pathlib import Path
from types import ModuleType

import pytest

from vetter.evaluation import prepare
from vetter.results.prose.material import Material
from vetter.results.verdicts import ScenarioVerdict, Verdicts
from vetter.scenarios.context import Context
from vetter.system.model import System

NAMES = ("dark_companion", "hidden_star", "ai_phe", "yz_cas", "v404_cyg")


@pytest.fixture(scope="session")
def golden() -> ModuleType:
    """Return the script that rewrites the golden files."""
    path = Path(__file__).parent / "rewrite_golden.py"
    spec = importlib.util.spec_from_file_location("rewrite_golden", path)
    assert spec is not None
    assert spec.loader is not None
    module = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    return module


@pytest.fixture(scope="session")
def materials(golden: ModuleType) -> dict[str, Material]:
    assert tuple(golden.SYSTEMS) == NAMES
    return {name: golden.material_of(name) for name in NAMES}


@pytest.fixture(params=NAMES)
def material(request: pytest.FixtureRequest, materials: dict[str, Material]) -> Material:
    """Each golden system in turn."""
    return materials[request.param]


@pytest.fixture(scope="session")
def plain_context(plain: System) -> Context:
    return prepare(plain)[0]


@pytest.fixture
def made_up(plain_context: Context, table: Callable[..., Verdicts]) -> Callable[..., Material]:
    """Return made-up verdicts of these rows on the plain system."""

    def make(*rows: ScenarioVerdict, **fields: object) -> Material:
        return Material(plain_context, table(*rows, **fields))

    return make
