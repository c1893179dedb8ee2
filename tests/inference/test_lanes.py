"""Calls that meet: right values, errors that reach everyone, no lane left waiting."""

from __future__ import annotations

import numpy as np
import pytest

from vetter.inference.lanes import Lanes


def test_values_are_those_of_the_function_and_calls_are_shared() -> None:
    sizes: list[int] = []

    def function(x: np.ndarray) -> np.ndarray:
        sizes.append(len(x))
        return x.sum(axis=1)

    lanes = Lanes(function, 8)

    def walk(start: float) -> float:
        return sum(lanes.value(np.array([start, step])) for step in range(5))

    assert lanes.map(walk, range(20)) == [5.0 * start + 10.0 for start in range(20)]
    assert sum(sizes) == 100
    assert len(sizes) == 3 * 5


def test_lanes_of_different_lengths_do_not_wait_for_those_that_are_done() -> None:
    lanes = Lanes(lambda x: x[:, 0], 4)

    def walk(steps: int) -> float:
        return sum(lanes.value(np.array([1.0])) for _ in range(steps))

    assert lanes.map(walk, [0, 1, 7, 3]) == [0.0, 1.0, 7.0, 3.0]


def test_outside_the_pool_it_is_a_plain_call() -> None:
    assert Lanes(lambda x: 2.0 * x[:, 0], 4).value(np.array([3.0])) == 6.0


def test_an_error_reaches_the_caller() -> None:
    def fails(x: np.ndarray) -> np.ndarray:
        raise ArithmeticError("no")

    lanes = Lanes(fails, 4)
    with pytest.raises(ArithmeticError, match="no"):
        lanes.map(lambda item: lanes.value(np.array([float(item)])), range(4))
