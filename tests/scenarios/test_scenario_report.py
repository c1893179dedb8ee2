"""`vetter scenarios`: read off the scenarios themselves, so that it cannot lag behind them."""

from __future__ import annotations

import json

import pytest
from click.testing import CliRunner

from vetter.cli import main
from vetter.scenarios.base import registered
from vetter.scenarios.report import render_scenario, scenario_report, scenarios_report
from vetter.system.model import Assumptions

EVERY = registered(on_request=True)


def run(*arguments: str) -> object:
    return CliRunner().invoke(main, ["scenarios", *arguments])


def test_the_list_has_one_line_for_each() -> None:
    lines = run().stdout.splitlines()
    assert [line.split()[0] for line in lines] == list(EVERY)
    assert [line.endswith("(only when asked for)") for line in lines] == [s.on_request for s in EVERY.values()]
    found = json.loads(run("--json").stdout)
    assert found == scenarios_report()
    assert all(row["description"].endswith(".") for row in found["scenarios"])


@pytest.mark.parametrize("name", EVERY)
def test_each_shows_its_parameters_priors_walls_and_light(name: str) -> None:
    found = scenario_report(name)
    text = render_scenario(found)
    for variant in found["variants"]:
        names = [parameter["name"] for parameter in variant["parameters"]]
        assert len(set(names)) == len(names)
        assert {"distance_pc", "ebv_mag", "companion_mass_msun", "cos_inclination"} <= set(names)
        assert [p["name"] for p in variant["parameters"] if p["shared"]] == ["distance_pc", "ebv_mag"]
        assert "the seen star would overflow its Roche lobe" in variant["walls"]
        for words in (*variant["walls"], variant["light"], *(p["prior"] for p in variant["parameters"])):
            assert words
            assert words in text


def test_what_it_says_of_some() -> None:
    (pair,) = scenario_report("inner_pair")["variants"]
    assert pair["light"] == "2 x stellar atmosphere"
    assert "no stable inner orbit fits inside the outer one" in pair["walls"]
    (hole,) = scenario_report("black_hole")["variants"]
    assert hole["light"] == "none: dark"
    prior = EVERY["black_hole"].mass_prior(Assumptions()).describe("Msun")
    assert prior in [p["prior"] for p in hole["parameters"]]
    two = scenario_report("stripped_primary")["variants"]
    assert [variant["companion"] for variant in two] == ["Luminous main-sequence companion", "Evolved companion"]
    assert all("0.8 of the mass" in variant["seen_star"] for variant in two)


def test_the_command_shows_one_and_refuses_none_such() -> None:
    assert run("black_hole").stdout == render_scenario(scenario_report("black_hole"))
    assert json.loads(run("black_hole", "--json").stdout)["name"] == "black_hole"
    refused = run("planet")
    assert refused.exit_code == 2
    assert "one of main_sequence" in refused.stderr
