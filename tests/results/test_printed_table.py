"""The table on the terminal: it fits, it says everything, and nothing twice."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from types import SimpleNamespace

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from vetter.results.table import render
from vetter.results.verdicts import OrbitSummary, ScenarioVerdict, Verdicts

Row = Callable[..., ScenarioVerdict]
Table = Callable[..., Verdicts]


@pytest.mark.parametrize("width", [120, 112, 111, 80, 60])
@pytest.mark.parametrize("example", ["dark", "hidden"])
def test_every_line_fits(example: str, width: int, request: pytest.FixtureRequest) -> None:
    verdicts = request.getfixturevalue(example).verdicts
    assert max(len(line) for line in render(verdicts, width).splitlines()) <= width


@pytest.mark.parametrize("width", [120, 80])
def test_it_holds_every_title_verdict_and_caution(dark: SimpleNamespace, width: int) -> None:
    text = render(dark.verdicts, width)
    flat = " ".join(text.split())
    for scenario in dark.verdicts.scenarios:
        assert scenario.title in text
        assert scenario.verdict in text
    for caution in dark.verdicts.cautions:
        assert " ".join(caution.split()) in flat
    assert dark.verdicts.to_dict()["headline"] in flat
    assert text.startswith("Corrie 12    P 88.42 d    e 0.145    K1 51.31 km/s\n")
    assert text.endswith("\n")
    assert not text.endswith("\n\n")


def test_a_wide_terminal_does_not_stretch_it(dark: SimpleNamespace) -> None:
    assert render(dark.verdicts, 400) == render(dark.verdicts, 120)


def test_a_narrow_terminal_gets_sixty_columns(dark: SimpleNamespace) -> None:
    assert render(dark.verdicts, 20) == render(dark.verdicts, 60)


def test_columns_line_up(row: Row, table: Table) -> None:
    text = render(table(row(sigma=38.4), row(name="black_hole", title="Black hole", sigma=0.0)))
    lines = text.splitlines()
    head = next(line for line in lines if line.startswith("explanation"))
    rows = [line for line in lines if line.startswith(("Luminous", "Black hole"))]
    ends = head.index("sigma") + len("sigma")
    assert [line[:ends].split()[-1] for line in rows] == ["38.4", "0.0"]
    assert [line[head.index("verdict") :].split()[0] for line in rows] == ["excluded", "allowed"]


def test_long_reasons_stay_under_their_heading(row: Row, table: Table) -> None:
    text = render(table(row(closed=True, closed_because="no word of this long reason may be lost " * 4)))
    lines = text.splitlines()
    start = next(line for line in lines if line.startswith("explanation")).index("(sigma without)")
    rows = lines[next(n for n, line in enumerate(lines) if line.startswith("---")) + 1 :]
    body = [line[start:] for line in rows[: rows.index("")]]
    assert " ".join(" ".join(body).split()) == ("no word of this long reason may be lost " * 4).strip()


def test_when_nothing_fits_that_is_said_first(row: Row, table: Table) -> None:
    text = render(table(row(fit_p_value=1e-9)))
    assert text.index("No scenario fits these data") < text.index("Luminous")
    assert text.count("No scenario fits these data") == 1


def test_when_something_fits_the_headline_stands_below(row: Row, table: Table) -> None:
    text = render(table(row()))
    assert text.index("Not excluded among") > text.index("Luminous")


@pytest.mark.parametrize(
    ("interval", "shown"),
    [
        ((5.9, 6.2, 6.6), "5.9 - 6.6"),
        ((2.417, 2.42, 2.431), "2.417 - 2.431"),
        ((0.645, 0.66, 0.678), "0.65 - 0.68"),
        ((2.295, 2.298, 2.3), "2.295 - 2.300"),
    ],
)
def test_masses_have_digits_enough_to_differ(
    interval: tuple[float, float, float], shown: str, row: Row, table: Table
) -> None:
    assert f" {shown} " in render(table(row(companion_mass_msun=interval)))


def test_an_evidence_error_is_never_shown_as_zero(row: Row, table: Table) -> None:
    assert "-3.2 +- 0.01" in render(table(row(ln_evidence_error=0.0003)))


def test_the_header_without_velocities(row: Row, table: Table) -> None:
    text = render(table(row(), orbit=OrbitSummary(212.4, 0.31, None, None, None, None)))
    assert text.splitlines()[0] == "Marlow 7    P 212.4 d    e 0.31"
    assert "mass function" not in text
    assert "used: 9 magnitudes, parallax, orbit, 1 light limit\n" in text
    assert "not given: seen mass, x ray\n" in text


def test_nothing_missing_needs_no_line(row: Row, table: Table) -> None:
    assert "not given" not in render(table(row(), observations_absent=()))


def test_what_allows_needs_no_carrier(row: Row, table: Table) -> None:
    text = render(table(row(sigma=1.0, without={"brightness": 0.3})))
    assert "brightness (0.3)" not in text


@settings(suppress_health_check=[HealthCheck.function_scoped_fixture], max_examples=60)
@given(
    sigma=st.floats(0.0, 999.0),
    mass=st.lists(st.floats(0.01, 150.0), min_size=3, max_size=3).map(sorted),
    evidence=st.floats(-99999.0, 9999.0),
    without=st.dictionaries(st.sampled_from(["brightness", "light limit", "mass estimate"]), st.floats(0.0, 999.0)),
    reason=st.text(st.sampled_from("abc "), max_size=200),
    width=st.integers(60, 130),
    closed=st.booleans(),
)
def test_whatever_the_numbers_it_fits(
    sigma: float,
    mass: list[float],
    evidence: float,
    without: dict[str, float],
    reason: str,
    width: int,
    closed: bool,
    row: Row,
    table: Table,
) -> None:
    one = row(sigma=sigma, companion_mass_msun=tuple(mass), ln_evidence=evidence, without=without)
    if closed:
        one = replace(row(closed=True), closed_because=" ".join(reason.split()) or "a wall")
    longest = max(reason.split(), key=len, default="")
    text = render(table(one, cautions=(reason or "none",)), width)
    assert max(len(line) for line in text.splitlines()) <= max(width, 60), longest
