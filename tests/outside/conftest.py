"""The systems of this folder, what is true of them, and cheap evaluations of them, shared by every test here.

`systems/`, `published/` and `binaries/` are real stars, `invented/` are not; the line `# Truth:` in each file names the
scenario that is true. Files with made light are written by `make_systems.py`.
"""

from __future__ import annotations

import re
from collections.abc import Callable
from functools import cache
from pathlib import Path

import pytest

from vetter import Verdicts, evaluate, read_system
from vetter.inference.importance import Settings
from vetter.system.model import System

HERE = Path(__file__).parent
FOLDERS = ("systems", "published", "binaries", "invented")
CHEAP = Settings(start_points=2048, rung_points=1024, effective=300, last_points=8192, second_effort=False)


@cache
def path_of(name: str) -> Path:
    (path,) = (path for folder in FOLDERS for path in (HERE / folder).glob(f"{name}.toml"))
    return path


@cache
def verdicts(name: str, scenarios: tuple[str, ...]) -> Verdicts:
    return evaluate(read_system(path_of(name)), scenarios or None, settings=CHEAP)


@pytest.fixture(scope="session")
def system_of() -> Callable[[str], System]:
    """Return the system of a name."""
    return lambda name: read_system(path_of(name))


@pytest.fixture(scope="session")
def truth_of() -> Callable[[str], str]:
    """Return the name of the true scenario."""
    return lambda name: re.search(r"^# Truth: (\w+)$", path_of(name).read_text(), re.MULTILINE)[1]


@pytest.fixture(scope="session")
def verdicts_of() -> Callable[..., Verdicts]:
    """Return the verdicts on a name, for these scenarios only or for all; the same question is answered once."""
    return lambda name, *scenarios: verdicts(name, scenarios)
