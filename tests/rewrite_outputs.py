"""Write what the tool prints today into the README's tour and beside the published systems.

Run `python tests/rewrite_outputs.py` after a change of tables or words, then read the difference before committing it:
a verdict that moved is a finding, not a formality.
"""

from __future__ import annotations

import os
import re
import shlex
from pathlib import Path

from click.testing import CliRunner

from vetter import evaluate, read_system
from vetter.cli import main
from vetter.results.table import render
from vetter.system.documentation import key_table

ROOT = Path(__file__).parent.parent
COMMAND = re.compile(r"^    \$ (vetter .*)\n(?:(?:    (?!\$ ).*)?\n)*", re.MULTILINE)
KEYS = re.compile(r"(?<=<!-- keys -->).*(?=<!-- end of keys -->)", re.DOTALL)


def shown(command: re.Match[str]) -> str:
    """Return the command with its output, indented as Markdown wants."""
    result = CliRunner().invoke(main, shlex.split(command[1])[1:], env={"COLUMNS": "116"}, catch_exceptions=False)
    lines = [f"    {line}".rstrip() for line in result.stdout.splitlines()]
    blank = "\n" if command[0].endswith("\n\n") else ""
    return "\n".join([f"    $ {command[1]}", *lines]) + f"\n{blank}"


def rewrite() -> None:
    """Rewrite the README in place and the kept tables of `tests/outside/systems`."""
    readme = ROOT / "README.md"
    text = COMMAND.sub(shown, readme.read_text())
    keys = key_table().strip().replace("### ", "#### ")
    readme.write_text(KEYS.sub(lambda _: f"\n\n{keys}\n\n", text))
    for path in sorted((ROOT / "tests" / "outside" / "systems").glob("*.toml")):
        path.with_suffix(".txt").write_text(render(evaluate(read_system(path))))


if __name__ == "__main__":
    os.chdir(ROOT)
    rewrite()
