"""The words of a verdict: where they begin, and the one sentence that sums the table up."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from vetter.results.table import strongest
from vetter.results.verdicts import ScenarioVerdict, Verdicts, headline, sigma_text, verdict_word, weakest_exclusion

Row = Callable[..., ScenarioVerdict]
Table = Callable[..., Verdicts]

BLACK_HOLE = {"name": "black_hole", "title": "Black hole", "ordinary": False}
WHITE_DWARF = {"name": "white_dwarf", "title": "White dwarf"}


@pytest.mark.parametrize(
    ("sigma", "word"),
    [
        (0.0, "allowed"),
        (2.999999, "allowed"),
        (3.0, "disfavoured"),
        (4.999999, "disfavoured"),
        (5.0, "excluded"),
        (40.0, "excluded"),
        (None, "excluded"),
    ],
)
def test_the_word_changes_at_three_and_at_five(sigma: float | None, word: str) -> None:
    assert verdict_word(sigma) == word


@given(st.floats(0.0, 1e6), st.floats(0.0, 1e6))
def test_more_sigma_is_never_a_milder_word(one: float, other: float) -> None:
    order = ("allowed", "disfavoured", "excluded")
    low, high = sorted((one, other))
    assert order.index(verdict_word(low)) <= order.index(verdict_word(high))


def test_nothing_fits(row: Row, table: Table) -> None:
    said = headline(table(row(fit_p_value=0.99e-4), row(**BLACK_HOLE, sigma=8.0, fit_p_value=1e-9)))
    assert said == "No scenario fits these data; check them before reading the table."


def test_a_poor_fit_that_is_not_hopeless_is_read(row: Row, table: Table) -> None:
    assert not table(row(fit_p_value=1.01e-4)).nothing_fits


def test_only_the_best_fit_says_whether_anything_fits(row: Row, table: Table) -> None:
    """A hopeless loser does not spoil the table."""
    found = table(row(sigma=20.0, fit_p_value=1e-40), row(**BLACK_HOLE, sigma=0.0))
    assert not found.nothing_fits
    assert found.best.name == "black_hole"


def test_all_walled_off_is_no_fit(row: Row, table: Table) -> None:
    found = table(row(closed=True))
    assert found.best is None
    assert found.nothing_fits
    assert headline(found).startswith("No scenario fits")


def test_one_ordinary_explanation_stands(row: Row, table: Table) -> None:
    said = headline(table(row(sigma=0.0), row(**WHITE_DWARF, sigma=7.0), row(**BLACK_HOLE, sigma=1.0)))
    assert said == ("Not excluded among the ordinary explanations tried: luminous main-sequence companion (allowed).")


def test_several_ordinary_explanations_stand(row: Row, table: Table) -> None:
    pair = row(name="inner_pair", title="Pair of main-sequence stars", sigma=3.5)
    said = headline(table(row(sigma=0.0), pair, row(**WHITE_DWARF, sigma=4.0), row(**BLACK_HOLE, sigma=1.0)))
    assert said.endswith(
        ": luminous main-sequence companion (allowed), pair of main-sequence stars (disfavoured) and "
        "white dwarf (disfavoured)."
    )


def test_all_excluded_robustly(row: Row, table: Table) -> None:
    rows = (
        row(sigma=38.0, without={"brightness": 8.2, "light limit": 37.0}),
        row(**WHITE_DWARF, sigma=21.0, without={"brightness": 6.3}),
        row(**BLACK_HOLE, sigma=0.0, without={"brightness": 0.0}),
    )
    assert headline(table(*rows)) == (
        "Every ordinary explanation tried is excluded; without any single observation the weakest exclusion is "
        "6.3 sigma."
    )


def test_all_excluded_but_one_observation_carries_it(row: Row, table: Table) -> None:
    rows = (
        row(sigma=38.0, without={"brightness": 8.2, "light limit": 4.96}),
        row(**WHITE_DWARF, closed=True),
        row(**BLACK_HOLE, sigma=0.0),
    )
    assert headline(table(*rows)) == (
        "Every ordinary explanation tried is excluded, but one observation carries it: without light limit the "
        "weakest exclusion is 4.96 sigma."
    )


@pytest.mark.parametrize(
    ("sigma", "shown"), [(4.96, "4.96"), (4.9999, "4.99"), (2.98, "2.98"), (5.04, "5.0"), (3.0, "3.0"), (24.46, "24.5")]
)
def test_rounding_never_crosses_the_border_of_a_verdict(sigma: float, shown: str) -> None:
    assert sigma_text(sigma) == shown
    assert verdict_word(float(shown)) == verdict_word(sigma)


def test_walls_alone_exclude(row: Row, table: Table) -> None:
    said = headline(table(row(**WHITE_DWARF, closed=True), row(**BLACK_HOLE, sigma=0.0)))
    assert said == "Every ordinary explanation tried is excluded, whatever single observation is left out."


def test_no_ordinary_explanation_was_tried(row: Row, table: Table) -> None:
    assert headline(table(row(**BLACK_HOLE, sigma=0.0))) == "No ordinary explanation was tried."


def test_weakest_exclusion_is_over_all_scenarios(row: Row) -> None:
    rows = [row(without={"a": 9.0, "b": 7.0}), row(without={"c": 6.0}), row(closed=True)]
    assert weakest_exclusion(rows) == (6.0, "c")
    assert weakest_exclusion([row(closed=True)]) is None


def test_what_carries_an_exclusion(row: Row) -> None:
    """At most two, the weightiest first; without a telling one the least sigma of all."""
    three = row(sigma=20.0, without={"brightness": 8.0, "spectrum": 6.0, "dust": 7.0, "orbit": 19.5})
    assert [driver.label for driver in strongest(three)] == ["spectrum", "dust"]
    none = row(sigma=20.0, without={"brightness": 19.9, "spectrum": 19.8})
    assert [driver.label for driver in strongest(none)] == ["spectrum"]
    assert strongest(row(sigma=20.0)) == []


def test_a_scenario_is_found_by_name(row: Row, table: Table) -> None:
    found = table(row(), row(**BLACK_HOLE))
    assert found.scenario("black_hole").title == "Black hole"
    with pytest.raises(KeyError, match="inner_pair"):
        found.scenario("inner_pair")


def test_best_is_the_least_chi_square(row: Row, table: Table) -> None:
    rows = [row(name=f"s{k}", sigma=float(s)) for k, s in enumerate(np.array([4.0, 0.0, 2.0]))]
    assert table(*rows).best.name == "s1"
