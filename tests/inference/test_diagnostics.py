"""Diagnostics of importance weights against cases with known answers."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from hypothesis.extra.numpy import arrays

from vetter.inference import diagnostics


@given(arrays(float, st.integers(2, 200), elements=st.floats(-700.0, 700.0)))
def test_effective_sample_size_lies_between_one_and_n(ln_weights) -> None:
    assert 1.0 - 1e-9 <= diagnostics.effective_sample_size(ln_weights) <= ln_weights.size * (1.0 + 1e-9)


@given(arrays(float, 50, elements=st.floats(-50.0, 50.0)), st.floats(-1e3, 1e3))
def test_a_common_factor_only_shifts_the_evidence(ln_weights, shift) -> None:
    base, error = diagnostics.ln_evidence_and_error(ln_weights)
    moved, same = diagnostics.ln_evidence_and_error(ln_weights + shift)
    assert moved == pytest.approx(base + shift, abs=1e-9)
    assert same == pytest.approx(error, rel=1e-6, abs=1e-9)


def test_equal_weights_are_all_effective() -> None:
    assert diagnostics.effective_sample_size(np.zeros(100)) == pytest.approx(100.0)
    assert diagnostics.ln_evidence_and_error(np.full(100, 3.0)) == (pytest.approx(3.0), pytest.approx(0.0, abs=1e-12))


def test_no_weight_at_all() -> None:
    nothing = np.full(10, -np.inf)
    assert diagnostics.effective_sample_size(nothing) == 0.0
    assert diagnostics.ln_evidence_and_error(nothing) == (-np.inf, np.inf)
    assert diagnostics.pareto_shape(nothing) == np.inf


@pytest.mark.parametrize("shape", [0.2, 0.5, 0.9])
def test_the_shape_of_a_pareto_tail_is_recovered(shape) -> None:
    """Weights drawn from a generalised Pareto law of known shape; scatter of the estimate is (1 + k) / sqrt(tail)."""
    unit = (np.arange(1, 20001) - 0.5) / 20000
    weights = 1.0 + ((1.0 - unit) ** (-shape) - 1.0) / shape
    tail = 3.0 * np.sqrt(20000)
    assert diagnostics.pareto_shape(np.log(weights)) == pytest.approx(shape, abs=3.0 * (1.0 + shape) / np.sqrt(tail))


def test_bounded_weights_have_a_short_tail() -> None:
    weights = np.random.default_rng(1).uniform(0.5, 1.0, 5000)
    assert diagnostics.pareto_shape(np.log(weights)) < 0.0
