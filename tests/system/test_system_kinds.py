"""Kinds of value: what they accept, and that they never fail on anything that TOML can hold."""

from __future__ import annotations

import datetime
import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from vetter.errors import InputError
from vetter.system.covariance import is_covariance, is_symmetric
from vetter.system.faults import LONGEST_SHOWN, FaultLog, show
from vetter.system.keys import TABLES, TOP
from vetter.system.kinds import Choice, Covariance, Flag, Kind, Number, Numbers, OneTable, Text, as_number

ANYTHING = st.recursive(
    st.one_of(
        st.booleans(),
        st.integers(),
        st.integers(16000, 20000).map(lambda power: 2**power),
        st.floats(),
        st.text(max_size=20),
        st.datetimes(),
        st.dates(),
        st.times(),
    ),
    lambda inner: st.one_of(st.lists(inner, max_size=5), st.dictionaries(st.text(max_size=5), inner, max_size=3)),
    max_leaves=8,
)
KINDS = {repr(kind): kind for table in (TOP, *TABLES) for kind in table.kinds().values()}


@given(value=ANYTHING, kind=st.sampled_from(sorted(KINDS)))
def test_no_value_makes_a_kind_fail(value: object, kind: str) -> None:
    chosen: Kind = KINDS[kind]
    if chosen.accept(value) is None:
        assert isinstance(chosen.mend(value), str)
    assert len(show(value)) <= LONGEST_SHOWN + 60
    assert "\n" not in show(value)


@given(st.floats(allow_nan=False, allow_infinity=False))
def test_a_finite_float_is_kept_exactly(value: float) -> None:
    assert as_number(value) == value


@given(st.integers(-(2**53), 2**53))
def test_an_integer_becomes_the_same_float(value: int) -> None:
    number = as_number(value)
    assert number == value
    assert type(number) is float


@pytest.mark.parametrize("value", [True, False, "1", math.inf, -math.inf, math.nan, 10**400, None, [], {}])
def test_what_is_not_a_finite_number_is_refused(value: object) -> None:
    assert as_number(value) is None


def test_negative_zero_loses_its_sign() -> None:
    assert math.copysign(1.0, as_number(-0.0) or 0.0) == 1.0


@pytest.mark.parametrize(
    ("kind", "inside", "outside"),
    [
        (Number(0.0, 1.0), [0.0, 0.5, 1.0], [-1e-300, 1.0000001]),
        (Number(0.0, 1.0, open_low=True), [1e-300, 1.0], [0.0, -0.0]),
        (Number(0.0, 1.0, open_high=True), [0.0, 0.9999999], [1.0]),
        (Number(0.5, 1.0, open_low=True, open_high=True), [0.51], [0.5, 1.0]),
    ],
)
def test_ends_belong_to_a_range_unless_open(kind: Number, inside: list[float], outside: list[float]) -> None:
    assert [kind.accept(value) for value in inside] == inside
    assert [kind.accept(value) for value in outside] == [None] * len(outside)


def test_words_of_a_range() -> None:
    assert Number(0.0, 1.0, open_high=True).expected == "a number at least 0 and below 1"
    assert Number(0.0, 1e7, "d", open_low=True).expected == "a number above 0 and at most 1e+07 d"
    numbers = Numbers(Number(1.0, 2.0, "nm"), 2, ascending=True)
    assert numbers.expected == "a list of 2 rising numbers, each at least 1 and at most 2 nm"


def test_a_choice_keeps_the_listed_spelling() -> None:
    assert Choice(("Vega", "AB")).accept(" ab ") == "AB"
    assert Choice(("Vega", "AB")).accept("ST") is None


@pytest.mark.parametrize("value", [True, False])
def test_a_flag_is_true_or_false(value: bool) -> None:
    assert Flag().accept(value) is value
    assert [Flag().accept(other) for other in (0, 1, "true", None, [])] == [None] * 5


def test_text_is_kept_as_written() -> None:
    assert Text().accept(" β Lyr ") == " β Lyr "
    assert Text(longest=3).accept("four") is None


def test_lists_are_kept_in_order_or_refused() -> None:
    kind = Numbers(Number(0.0, 10.0))
    assert kind.accept([3, 1.5, 2]) == (3.0, 1.5, 2.0)
    assert Numbers(Number(0.0, 10.0), ascending=True).accept([3, 1.5]) is None
    assert Numbers(Number(0.0, 10.0), ascending=True).mend([1, 1]) == ""
    assert Numbers(Number(0.0, 10.0), 2, ascending=True).mend([1, 1]) == "Put the numbers in rising order."


def test_a_table_is_not_a_list() -> None:
    assert OneTable("x").accept([{}]) is None


@pytest.mark.parametrize(
    ("value", "text"),
    [
        (True, "true"),
        (-3, "-3"),
        (0.1, "0.1"),
        ("a", "'a'"),
        ("x" * 99, "'" + "x" * 56 + "..."),
        ([1, "a"], "[1, 'a']"),
        ([1, [2]], "a list of 2 values, some of them lists or tables"),
        ([{}, {}], "a list of 2 tables"),
        ({"a": 1}, "a table"),
        (10**100, "an integer of more than 60 digits"),
        (datetime.date(2020, 1, 2), "the date or time 2020-01-02"),
    ],
)
def test_values_are_shown_as_the_user_wrote_them(value: object, text: str) -> None:
    assert show(value) == text


def _eigenvalues(matrix: list[list[float]]) -> np.ndarray:
    """Return the eigenvalues of the correlation matrix: an independent test of positive definiteness."""
    array = np.array(matrix)
    sigma = np.sqrt(np.diag(array))
    return np.linalg.eigvalsh(array / np.outer(sigma, sigma))


@given(st.lists(st.floats(-1.0, 1.0), min_size=6, max_size=6), st.lists(st.floats(-4.0, 4.0), min_size=4, max_size=4))
def test_a_covariance_is_one_where_the_eigenvalues_are_positive(off: list[float], log_sigma: list[float]) -> None:
    matrix = np.eye(4)
    matrix[np.triu_indices(4, 1)] = off
    matrix = np.triu(matrix) + np.triu(matrix, 1).T
    sigma = 10.0 ** np.array(log_sigma)
    rows = (matrix * np.outer(sigma, sigma)).tolist()
    lowest = float(_eigenvalues(rows).min())
    if abs(lowest) > 1e-9:  # nearer to singular than this rounding decides
        assert is_covariance(rows) == (lowest > 0.0)


@given(st.lists(st.floats(-2.0, 2.0), min_size=16, max_size=16))
def test_a_square_of_a_matrix_plus_the_unit_is_a_covariance(numbers: list[float]) -> None:
    root = np.array(numbers).reshape(4, 4)
    rows = (root @ root.T + np.eye(4)).tolist()
    assert Covariance(4, Number(-1e10, 1e10)).accept(rows) == tuple(map(tuple, rows))


def test_rounding_in_print_is_not_asymmetry() -> None:
    assert is_symmetric([[1.0, 0.1234567], [0.1234568, 1.0]])
    assert not is_symmetric([[1.0, 0.123], [0.124, 1.0]])
    assert not is_symmetric([[1.0, 0.1], [0.2, 1e-30]])


def test_an_empty_log_raises_nothing() -> None:
    log = FaultLog("x.toml")
    log.raise_if_any()
    assert len(log) == 0


def test_faults_of_a_second_file_say_where_they_are() -> None:
    log = FaultLog("x.toml")
    log.absorb("velocities.file", "rv.csv", InputError.single("/a/rv.csv", "row 3", 0.0, "more"))
    log.absorb("velocities.file", "rv.csv", InputError.single("/a/rv.csv", "", None, "a file that exists"))
    with pytest.raises(InputError) as caught:
        log.raise_if_any()
    assert [(fault.key, fault.value) for fault in caught.value.faults] == [
        ("rv.csv, row 3", "0.0"),
        ("velocities.file", "'rv.csv'"),
    ]
