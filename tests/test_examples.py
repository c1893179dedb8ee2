"""The shipped examples give what their README promises."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import pytest

from vetter import Verdicts

EXAMPLES = Path(__file__).parent.parent / "examples"


def test_dark_companion_is_a_black_hole(full: Callable[[str], Verdicts]) -> None:
    verdicts = full("dark_companion")
    assert not verdicts.nothing_fits
    allowed = {s.name for s in verdicts.scenarios if s.verdict == "allowed"}
    excluded = {s.name for s in verdicts.scenarios if s.verdict == "excluded"}
    assert allowed == {"black_hole", "compact_pair"}
    assert allowed | excluded == {s.name for s in verdicts.scenarios}
    low, _, high = verdicts.scenario("black_hole").companion_mass_msun
    assert low < 3.7 < high
    assert "1.38 Msun at any inclination" in verdicts.scenario("white_dwarf").closed_because


def test_hidden_star_is_an_ordinary_star(full: Callable[[str], Verdicts]) -> None:
    verdicts = full("hidden_star")
    assert not verdicts.nothing_fits
    found = {s.name: s.verdict for s in verdicts.scenarios}
    assert found["main_sequence"] == found["inner_pair"] == "allowed"
    assert found["white_dwarf"] != "excluded"
    assert found["neutron_star"] == found["black_hole"] == "excluded"
    low, _, high = verdicts.scenario("main_sequence").companion_mass_msun
    assert low < 0.68 < high


@pytest.mark.parametrize("path", sorted(EXAMPLES.glob("*.toml")), ids=lambda path: path.stem)
def test_every_example_is_in_the_readme(path: Path) -> None:
    assert f"`{path.name}`" in (EXAMPLES / "README.md").read_text()
