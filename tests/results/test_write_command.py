"""`vetter write`: every file or none, from saved verdicts, with the options that change it."""

from __future__ import annotations

import json
import shutil
from pathlib import Path

import pytest
from click.testing import CliRunner, Result

from vetter.cli import main

ROOT = Path(__file__).parents[2]
SYSTEM = ROOT / "examples" / "dark_companion.toml"
SAVED = Path(__file__).parent / "prose" / "golden" / "dark_companion.json"
WORDS = {
    "alternatives.tex",
    "alternatives.md",
    "table.tex",
    "wrapper.tex",
    "references.bib",
    "report.html",
    "machine.json",
    "verdicts.json",
}


def write(out: Path, *options: str) -> Result:
    command = ["write", str(SYSTEM), "--out", str(out), "--from", str(SAVED), "--figure", "3", *options]
    return CliRunner().invoke(main, command)


def test_all_files_of_the_section(tmp_path: Path) -> None:
    result = write(tmp_path / "section")
    assert result.exit_code == 0, result.output
    assert result.stdout == ""
    names = {path.name for path in (tmp_path / "section").iterdir()}
    assert names == WORDS | {"figure_what_carries.pdf", "figure_what_carries.png"}
    numbers = json.loads((tmp_path / "section" / "machine.json").read_text())["numbers"]
    assert {"key", "value", "printed", "unit", "errors"} == set(numbers[0])
    assert json.loads((tmp_path / "section" / "verdicts.json").read_text()) == json.loads(SAVED.read_text())


def test_the_same_words_twice(tmp_path: Path) -> None:
    first, second = tmp_path / "a", tmp_path / "b"
    assert write(first).exit_code == write(second).exit_code == 0
    for path in first.iterdir():
        assert path.read_bytes() == (second / path.name).read_bytes(), path.name


def test_options_change_the_words(tmp_path: Path) -> None:
    options = ("--title", "Is it dark?", "--spelling", "american", "--only", "black_hole", "--journal-table")
    assert write(tmp_path, *options).exit_code == 0
    text = (tmp_path / "alternatives.tex").read_text()
    assert r"\section{Is it dark?}" in text
    assert "favour" not in text
    assert r"\paragraph{Black hole.}" in text
    assert r"\paragraph{White dwarf.}" not in text
    assert "deluxetable" in (tmp_path / "table.tex").read_text()
    assert "aastex" in (tmp_path / "wrapper.tex").read_text()


@pytest.mark.parametrize(
    ("options", "said"),
    [
        (("--only", "nonsense"), "main_sequence, evolved_star"),
        (("--figure", "9"), "1, 2, 3, 4, 5"),
        (("--from", "none.json"), "a file that can be read"),
    ],
)
def test_bad_wishes_are_one_clear_error(options: tuple[str, ...], said: str, tmp_path: Path) -> None:
    result = write(tmp_path / "section", *options)
    assert result.exit_code == 2
    assert said in result.stderr
    assert "Traceback" not in result.output
    assert not (tmp_path / "section").exists()


def test_verdicts_of_another_system_are_refused(tmp_path: Path) -> None:
    other = SAVED.with_name("hidden_star.json")
    result = write(tmp_path / "section", "--from", str(other))
    assert result.exit_code == 2
    assert "the name in the system file" in result.stderr


def test_a_file_in_place_of_the_folder(tmp_path: Path) -> None:
    taken = tmp_path / "taken"
    shutil.copy(SAVED, taken)
    result = write(taken)
    assert result.exit_code == 2
    assert "a folder, but it is a file" in result.stderr
