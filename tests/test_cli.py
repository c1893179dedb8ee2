"""The command as a user meets it: what it prints where, its exit codes, and that bad input writes nothing."""

from __future__ import annotations

import json
import os
import signal
import subprocess
import sys
import time
from collections.abc import Callable
from pathlib import Path

import pytest
from click.testing import CliRunner, Result

from vetter.cli import main

ROOT = Path(__file__).parent.parent
HIDDEN = ROOT / "examples" / "hidden_star.toml"
GOOD = HIDDEN.read_text()
RUN = "from vetter.cli import main; main()"


def run(*arguments: str | Path) -> Result:
    return CliRunner().invoke(main, [str(argument) for argument in arguments])


def swapped(old: str, new: str) -> str:
    assert GOOD.count(old) == 1, old
    return GOOD.replace(old, new)


def without(key: str) -> str:
    kept = [line for line in GOOD.splitlines() if not line.startswith(f"{key} ")]
    assert len(kept) == len(GOOD.splitlines()) - 1
    return "\n".join(kept)


BAD = {
    "missing key": (without("name"), "name", "missing"),
    "error without its value": (without("period_d"), "orbit.period_error_d", "Add period_d"),
    "wrong type": (swapped("k1_km_s = 27.65", 'k1_km_s = "fast"'), "orbit.k1_km_s", "'fast'"),
    "not a number": (swapped("k1_km_s = 27.65", "k1_km_s = nan"), "orbit.k1_km_s", "nan"),
    "negative error": (swapped("k1_error_km_s = 0.12", "k1_error_km_s = -0.12"), "orbit.k1_error_km_s", "-0.12"),
    "open orbit": (swapped("eccentricity = 0.223", "eccentricity = 1.2"), "orbit.eccentricity", "1.2"),
    "unknown band": (swapped('"Generic/Johnson.B"', '"Generic/Jonson.B"'), "photometry", "Generic/Johnson.B"),
    "unknown key": (swapped("k1_km_s = 27.65", "k1_kms = 27.65"), "orbit.k1_kms", "k1_km_s"),
    "empty file": ("", "the file is empty", ""),
    "not TOML": ("P = = 3\n", "TOML", "line 1"),
    "not text": (b"\xff\xfe\x00\x01", "UTF-8", ""),
}


@pytest.fixture(params=["inspect", "evaluate"])
def command(request: pytest.FixtureRequest) -> str:
    return str(request.param)


@pytest.mark.parametrize("case", BAD)
def test_bad_input_is_one_message_and_nothing_written(case: str, command: str, tmp_path: Path) -> None:
    content, key, value = BAD[case]
    path, out = tmp_path / "bad.toml", tmp_path / "out"
    path.write_bytes(content if isinstance(content, bytes) else content.encode())
    result = run(command, path, *(["--out", out] if command == "evaluate" else []))
    assert result.exit_code == 2
    assert result.stdout == ""
    assert isinstance(result.exception, SystemExit)
    assert result.stderr.startswith("vetter: ")
    assert "bad.toml" in result.stderr
    assert key in result.stderr
    assert value in result.stderr
    assert "Traceback" not in result.stderr
    assert sorted(p.name for p in tmp_path.iterdir()) == ["bad.toml"]


@pytest.mark.parametrize("target", ["a_folder", "no_such.toml"])
def test_what_is_not_a_file(target: str, command: str, tmp_path: Path) -> None:
    (tmp_path / "a_folder").mkdir()
    result = run(command, tmp_path / target)
    assert result.exit_code == 2
    assert result.stdout == ""
    assert target in result.stderr


@pytest.mark.skipif(os.geteuid() == 0, reason="the superuser may read everything")
def test_a_file_without_permission(command: str, tmp_path: Path) -> None:
    path = tmp_path / "locked.toml"
    path.write_text(GOOD)
    path.chmod(0)
    result = run(command, path)
    assert result.exit_code == 2
    assert "locked.toml" in result.stderr


def test_a_file_that_the_system_refuses(command: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """The superuser of a build machine may read everything, so the refusal is acted."""
    path = tmp_path / "locked.toml"
    path.write_text(GOOD)

    def refused(self: Path, *_: object, **__: object) -> None:
        raise PermissionError(13, "Permission denied", str(self))

    for method in ("read_text", "read_bytes", "open"):
        monkeypatch.setattr(Path, method, refused)
    result = run(command, path)
    assert result.exit_code == 2
    assert "locked.toml" in result.stderr
    assert "ermission" in result.stderr


def test_all_faults_are_told_together(tmp_path: Path) -> None:
    path = tmp_path / "bad.toml"
    path.write_text(swapped("k1_km_s = 27.65", "k1_km_s = nan").replace("eccentricity = 0.223", "eccentricity = 1.2"))
    result = run("inspect", path)
    assert "orbit.k1_km_s" in result.stderr
    assert "orbit.eccentricity" in result.stderr


def test_an_unknown_scenario_is_named_with_the_known_ones() -> None:
    result = run("evaluate", HIDDEN, "--scenario", "planet")
    assert result.exit_code == 2
    assert "planet" in result.stderr
    assert "main_sequence" in result.stderr


def test_a_folder_that_cannot_be_one_is_refused_before_work(tmp_path: Path) -> None:
    (tmp_path / "taken").write_text("mine")
    started = time.monotonic()
    result = run("evaluate", HIDDEN, "--out", tmp_path / "taken")
    assert result.exit_code == 2
    assert "taken" in result.stderr
    assert (tmp_path / "taken").read_text() == "mine"
    assert time.monotonic() - started < 3.0


@pytest.mark.parametrize("arguments", [("--no-such-option",), ("frobnicate",), ("light",), ("star", "main_sequence")])
def test_a_wrong_command_line_is_exit_code_2(arguments: tuple[str, ...]) -> None:
    result = run(*arguments)
    assert result.exit_code == 2
    assert result.stdout == ""


def test_json_is_all_that_stands_on_stdout() -> None:
    result = run("evaluate", HIDDEN, "--json", "--scenario", "neutron_star")
    assert result.exit_code == 0
    found = json.loads(result.stdout)
    assert [scenario["name"] for scenario in found["scenarios"]] == ["neutron_star"]
    assert result.stderr == ""


def test_results_are_written_whole(tmp_path: Path) -> None:
    out = tmp_path / "new" / "folder"
    result = run("evaluate", HIDDEN, "--scenario", "black_hole", "--scenario", "neutron_star", "--out", out)
    assert result.exit_code == 0
    names = {"verdicts.json", "verdicts.csv", "verdicts.ecsv", "magnitudes.png", "magnitudes.pdf"}
    assert names <= {path.name for path in out.iterdir()}
    assert "Black hole" in result.stdout
    assert "written: " in result.stderr
    assert json.loads((out / "verdicts.json").read_text())["system"] == "Fenwick 3"


@pytest.mark.parametrize("name", main.commands)
def test_every_command_explains_itself(name: str) -> None:
    result = run(name, "--help")
    assert result.exit_code == 0
    assert len(result.stdout.splitlines()) > 5


def fastest(*command: str, times: int = 5) -> float:
    """Seconds of the quickest of some runs: the others waited for something else."""
    found = []
    for _ in range(times):
        started = time.perf_counter()
        subprocess.run([sys.executable, *command], check=True, capture_output=True)
        found.append(time.perf_counter() - started)
    return min(found)


def test_help_is_quick() -> None:
    assert fastest("-c", RUN, "--help") < 0.25


def test_import_is_quick() -> None:
    assert fastest("-c", "import vetter") - fastest("-c", "pass") < 0.06


def test_an_interruption_is_130_and_leaves_nothing(tmp_path: Path) -> None:
    arguments = ["evaluate", str(HIDDEN), "--out", str(tmp_path / "out")]
    process = subprocess.Popen([sys.executable, "-c", RUN, *arguments], stderr=subprocess.PIPE, text=True)
    time.sleep(3.0)
    process.send_signal(signal.SIGINT)
    _, said = process.communicate(timeout=30)
    assert process.returncode == 130
    assert "nothing was written" in said
    assert not (tmp_path / "out").exists()


@pytest.fixture(scope="session")
def output_of() -> Callable[..., bytes]:
    def output(*arguments: str) -> bytes:
        return subprocess.run([sys.executable, "-c", RUN, *arguments], check=True, capture_output=True).stdout

    return output


def test_same_seed_same_bytes(output_of: Callable[..., bytes]) -> None:
    """Two processes, a closed, an open and a many-branched scenario."""
    arguments = ["evaluate", str(ROOT / "examples" / "dark_companion.toml"), "--json"]
    arguments += [f"--scenario={name}" for name in ("white_dwarf", "black_hole", "compact_pair")]
    first = output_of(*arguments)
    assert first == output_of(*arguments)
    assert first != output_of(*arguments, "--seed=1")
