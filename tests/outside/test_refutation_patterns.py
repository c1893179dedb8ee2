"""Ways in which a dark companion has turned out to be something else, as invented systems whose truth is known.

Their light comes from published relations and measured spectra, not from our tables (`make_systems.py`). In each the
truth is not excluded, and nothing is said that the data cannot carry.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import numpy as np
import pytest

from vetter import Verdicts, evaluate
from vetter.inference.importance import Settings
from vetter.results.table import render
from vetter.results.verdicts import headline
from vetter.system.model import System

PATTERNS = ("stripped_giant", "stripped_b_star", "pair_of_k_dwarfs", "hot_white_dwarf", "o_star")
LN_B_DECISIVE = 3.0

Answers = Callable[..., Verdicts]


def test_a_stripped_giant_with_a_subgiant_is_no_black_hole(verdicts_of: Answers) -> None:
    """The subgiant gives half of the light; a dark companion leaves 7 sigma of it unexplained."""
    found = verdicts_of("stripped_giant", "stripped_primary", "black_hole")
    assert found.best.name == "stripped_primary"
    assert found.scenario("stripped_primary").verdict == "allowed"
    assert found.scenario("black_hole").ln_evidence < found.scenario("stripped_primary").ln_evidence
    assert "seen star stripped of its envelope (allowed)" in headline(found)


def test_a_fast_rotator_beside_a_stripped_b_star_is_not_seen(verdicts_of: Answers) -> None:
    """Nearly equal light, and a limit of 5 % from a search that would have missed 100 km/s and more."""
    found = verdicts_of("stripped_b_star", "stripped_primary", "black_hole")
    assert found.scenario("stripped_primary").verdict == "allowed"
    gain = found.scenario("black_hole").ln_evidence - found.scenario("stripped_primary").ln_evidence
    assert gain < LN_B_DECISIVE
    assert "seen star stripped of its envelope (allowed)" in headline(found)


def test_two_k_dwarfs_beside_a_red_giant_stay_unknown(verdicts_of: Answers) -> None:
    """They give half a per cent of the light: nothing tells them from a neutron star, and nothing says so."""
    found = verdicts_of("pair_of_k_dwarfs", "inner_pair", "white_dwarf", "neutron_star")
    assert [row.verdict for row in found.scenarios] == ["allowed"] * 3
    evidences = [row.ln_evidence for row in found.scenarios]
    assert np.ptp(evidences) < LN_B_DECISIVE
    assert "pair of main-sequence stars (allowed)" in headline(found)


def test_a_white_dwarf_in_the_far_ultraviolet_only(verdicts_of: Answers) -> None:
    """Below 7000 K a chromosphere could do the same: the excess neither proves the white dwarf nor excludes a star."""
    found = verdicts_of("hot_white_dwarf", "main_sequence", "white_dwarf", "neutron_star")
    assert found.scenario("white_dwarf").verdict == "allowed"
    assert found.scenario("main_sequence").verdict == "allowed"
    assert any("chromospheric" in caution for caution in found.cautions)
    # The white dwarf's own light must be enough: GD 71 has 32700 K.
    assert found.scenario("white_dwarf").best_fit.magnitudes["GALEX/GALEX.FUV"] > 13.0


def test_the_companion_of_an_o_star_hides_in_nine_per_cent(verdicts_of: Answers) -> None:
    found = verdicts_of("o_star", "main_sequence", "black_hole")
    assert found.scenario("main_sequence").verdict == "allowed"
    gain = found.scenario("black_hole").ln_evidence - found.scenario("main_sequence").ln_evidence
    assert gain < LN_B_DECISIVE
    assert "luminous main-sequence companion (allowed)" in headline(found)


@pytest.mark.slow
def test_what_saves_the_fast_rotator_is_its_rotation(system_of: Callable[[str], System]) -> None:
    """The same limit from a search that sees every rotation excludes the truth: it is the rotation that counts."""
    system = system_of("stripped_b_star")
    (limit,) = system.light_limits
    blind = replace(system, light_limits=(replace(limit, vsini_max_km_s=None),))
    found = evaluate(
        blind,
        ("stripped_primary", "black_hole"),
        settings=Settings(last_points=8192, effective=300, second_effort=False),
    )
    assert found.scenario("stripped_primary").sigma > 5.0


@pytest.mark.slow
@pytest.mark.parametrize("name", PATTERNS)
def test_the_truth_stands_among_all_ten(name: str, verdicts_of: Answers, truth_of: Callable[[str], str]) -> None:
    found = verdicts_of(name)
    print("\n" + render(found))
    assert not found.nothing_fits
    truth = found.scenario(truth_of(name))
    assert truth.verdict == "allowed"
    assert headline(found).startswith("Not excluded among the ordinary explanations tried")
    assert f"{truth.title.lower()} (allowed)" in headline(found)
