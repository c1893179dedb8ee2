"""The README says what is true: its key table is the reader's, its commands exist, its tour is what the tool prints."""

from __future__ import annotations

import shlex
from collections.abc import Callable
from pathlib import Path

import pytest
from click.testing import CliRunner

from vetter import Verdicts
from vetter.cli import main
from vetter.results.table import render
from vetter.system.documentation import key_table

ROOT = Path(__file__).parent.parent
README = (ROOT / "README.md").read_text()


def tour() -> list[tuple[str, list[str]]]:
    """Every `$ vetter ...` line of the README with the indented lines below it."""
    found: list[tuple[str, list[str]]] = []
    for line in README.split("\n"):
        if line.startswith("    $ vetter "):
            found.append((line.removeprefix("    $ vetter "), []))
        elif found and (line.startswith("    ") or not line):
            found[-1][1].append(line.removeprefix("    "))
        elif found and found[-1][1] and line:
            found.append(("", []))
    return [(command, lines) for command, lines in found if command]


@pytest.mark.parametrize(("command", "lines"), tour(), ids=[command[:40] for command, _ in tour()])
def test_the_tour_is_what_the_tool_prints(
    command: str, lines: list[str], monkeypatch: pytest.MonkeyPatch, full: Callable[[str], Verdicts]
) -> None:
    """Words and verdicts to the letter; the last digits of a Monte Carlo may differ between numpy builds.

    A whole evaluation is taken from the shared one and printed as the command prints it (`test_cli.py` runs it).
    """
    monkeypatch.chdir(ROOT)
    monkeypatch.setenv("COLUMNS", "116")
    name = command.removeprefix("evaluate examples/").removesuffix(".toml")
    if command == f"evaluate examples/{name}.toml":
        shown = render(full(name), 116)
    else:
        result = CliRunner().invoke(main, shlex.split(command))
        assert result.exit_code == 0, result.output
        shown = result.stdout

    def words(text: str) -> list[str]:
        return [word for word in text.split() if not any(c.isdigit() for c in word)]

    assert words(shown) == words("\n".join(lines))


def test_the_key_table_is_that_of_the_reader() -> None:
    shown = README.split("<!-- keys -->")[1].split("<!-- end of keys -->")[0].strip()
    assert shown.replace("#### ", "### ") == key_table().strip()


def test_every_command_is_mentioned() -> None:
    for name in main.commands:
        assert f"vetter {name}" in README, name
