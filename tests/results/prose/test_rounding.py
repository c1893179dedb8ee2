"""Rounding: errors to two digits, values to match, and no number of sigma that rounds across a verdict."""

from __future__ import annotations

import math

import pytest
from hypothesis import given, strategies

from vetter.results.prose import numbers
from vetter.results.verdicts import verdict_word


@pytest.mark.parametrize(
    ("value", "error", "shown", "shown_error"),
    [
        (53.2, 0.6, "53.20", "0.60"),
        (8190.0, 110.0, "8190", "110"),
        (12345.0, 1234.0, "12300", "1200"),
        (0.5481, 0.0123, "0.548", "0.012"),
        (1.0, 0.0996, "1.00", "0.10"),
        (-0.001, 0.12, "0.00", "0.12"),
        (99.96, 9.96, "100", "10"),
    ],
)  # by hand
def test_measured_values(value: float, error: float, shown: str, shown_error: str) -> None:
    number = numbers.measured("k", value, error)
    assert (number.shown, number.plus, number.minus) == (shown, shown_error, shown_error)
    assert number.value == value


@given(strategies.floats(-1e6, 1e6), strategies.floats(1e-6, 1e5))
def test_an_error_has_two_significant_digits_and_its_value_the_same_decimals(value: float, error: float) -> None:
    number = numbers.measured("k", value, error)
    assert number.plus is not None
    assert float(number.plus) == pytest.approx(error, rel=0.051)
    assert abs(float(number.shown) - value) <= 0.051 * error + 1e-9
    assert number.shown.partition(".")[2].__len__() == number.plus.partition(".")[2].__len__()
    digits = number.plus.replace(".", "").lstrip("0")
    assert len(digits.rstrip("0") or "0") <= 2


def test_an_interval_shows_both_errors() -> None:
    number = numbers.interval("m", 3.65, 3.75, 3.86, "Msun")
    assert (number.shown, number.minus, number.plus) == ("3.75", "0.10", "0.11")
    assert number.printed == ("3.75", "0.11", "0.10")
    lopsided = numbers.interval("m", 2.395, 2.4, 3.6)
    assert float(lopsided.minus or 0.0) > 0.0


@given(strategies.floats(0.0, 500.0))
def test_a_number_of_sigma_never_rounds_across_a_verdict(value: float) -> None:
    shown = numbers.sigma("s", value).shown
    assert verdict_word(float(shown)) == verdict_word(value)
    assert float(shown) == pytest.approx(value, abs=0.5 if value >= 100.0 else 0.1)


@pytest.mark.parametrize(
    ("value", "shown"), [(2.94, "2.9"), (2.994, "2.99"), (2.9999, "2.99"), (3.0, "3.0"), (4.96, "4.96"), (5.04, "5.0")]
)
def test_sigmas_near_a_border(value: float, shown: str) -> None:
    assert numbers.sigma("s", value).shown == shown


@given(strategies.floats(1e-9, 1e9), strategies.integers(1, 5))
def test_significant_digits(value: float, digits: int) -> None:
    shown = numbers.significant(value, digits)
    assert "e" not in shown
    assert float(shown) == pytest.approx(value, rel=0.51 * 10.0 ** (1 - digits))


def test_what_a_person_gave_is_not_rounded() -> None:
    assert numbers.given("p", 1.38).shown == "1.38"
    assert numbers.given("p", 100000.0).shown == "100000"
    assert numbers.given_percent("p", 0.03).shown == "3"


def test_temperatures_and_shares() -> None:
    assert numbers.temperature("t", 5772.4).shown == "5770"
    assert numbers.temperature("t", 61849.0).shown == "61800"
    assert numbers.percent("p", 0.1915).shown == "19"
    assert numbers.percent("p", 0.0057).shown == "0.6"
    assert math.isclose(numbers.percent("p", 0.1915).value, 19.15)
