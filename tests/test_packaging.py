"""The shipped tables are found from a wheel and from a source distribution, not only from a checkout."""

from __future__ import annotations

import os
import shutil
import subprocess
import sys
import tarfile
from pathlib import Path

import pytest

ROOT = Path(__file__).parent.parent
PARTS = ("vetter", "grids", "README.md", "LICENSE", "pyproject.toml")
PROBE = (
    "import vetter, vetter.light.tables as t, vetter.stars.dwarf_table as d;"
    "print(vetter.__file__, len(t.load_tables().passbands))"
)


@pytest.fixture(scope="module")
def source(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A copy of what a distribution is made of, so that building leaves nothing in the checkout."""
    folder = tmp_path_factory.mktemp("source")
    for part in PARTS:
        if (ROOT / part).is_dir():
            shutil.copytree(ROOT / part, folder / part, ignore=shutil.ignore_patterns("__pycache__"))
        else:
            shutil.copy(ROOT / part, folder / part)
    return folder


def build(source: Path, out: Path, kind: str) -> Path:
    """Build a wheel or an sdist with the tools that are installed, without the network."""
    command = [sys.executable, "-m", "build", "--no-isolation", f"--{kind}", "--outdir", str(out), str(source)]
    subprocess.run(command, check=True, capture_output=True)
    (made,) = out.iterdir()
    return made


def probe(wheel: Path, folder: Path) -> str:
    """Unpack a wheel alone and load the tables from it."""
    subprocess.run([sys.executable, "-m", "zipfile", "-e", str(wheel), str(folder)], check=True)
    environment = {**os.environ, "PYTHONPATH": str(folder)}
    done = subprocess.run(
        [sys.executable, "-c", PROBE], cwd=folder, env=environment, check=True, capture_output=True, text=True
    )
    return done.stdout


def test_wheel_holds_the_tables(source: Path, tmp_path: Path) -> None:
    said = probe(build(source, tmp_path / "dist", "wheel"), tmp_path / "site")
    assert said.startswith(str(tmp_path / "site"))
    assert int(said.split()[-1]) >= 40


def test_source_distribution_builds_the_same_wheel(source: Path, tmp_path: Path) -> None:
    archive = build(source, tmp_path / "dist", "sdist")
    with tarfile.open(archive) as tar:
        tar.extractall(tmp_path / "unpacked", filter="data")
    (unpacked,) = (tmp_path / "unpacked").iterdir()
    said = probe(build(unpacked, tmp_path / "wheel", "wheel"), tmp_path / "site")
    assert said.startswith(str(tmp_path / "site"))
    assert int(said.split()[-1]) >= 40
