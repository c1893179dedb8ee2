"""The command, its files and its figure."""

from __future__ import annotations

import json
from pathlib import Path

from click.testing import CliRunner

from vetter.cli import main
from vetter.pairs.figures import contrast_figure
from vetter.pairs.result import Contrast

EXAMPLE = Path(__file__).parent.parent.parent / "examples" / "dark_companion.toml"
BETWEEN = ["--between", "black_hole", "compact_pair", "--quiet"]


def test_the_command_prints_json_and_writes_files(tmp_path: Path) -> None:
    done = CliRunner().invoke(main, ["contrast", str(EXAMPLE), *BETWEEN, "--json", "--out", str(tmp_path / "out")])
    assert done.exit_code == 0, done.output
    found = json.loads(done.stdout)
    assert found["system"] == "Corrie 12"
    assert [row["name"] for row in found["explanations"]] == ["black_hole", "compact_pair"]
    assert {path.name for path in (tmp_path / "out").iterdir()} == {
        "contrast.json",
        "contrast.txt",
        "contrast.png",
        "contrast.pdf",
    }
    assert json.loads((tmp_path / "out" / "contrast.json").read_text()) == found


def test_two_single_companions_are_refused() -> None:
    done = CliRunner().invoke(main, ["contrast", str(EXAMPLE), "--between", "black_hole", "white_dwarf"])
    assert done.exit_code == 2
    assert "--between" in done.stderr


def test_the_figure_shows_plane_and_epochs(lindow_contrast: Contrast) -> None:
    figure = contrast_figure(lindow_contrast)
    plane, folded = figure.axes
    assert plane.get_xlabel() == "inner period (d)"
    assert {text.get_text() for text in plane.texts} >= {"contact", "unstable", "light", "velocities"}
    # Forty epochs as points, beside the model and the zero line.
    assert max(len(line.get_xdata()) for line in folded.lines if line.get_marker() == "o") == 40
