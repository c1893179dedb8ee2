"""The average over phases against a dense sum."""

from __future__ import annotations

import numpy as np
from hypothesis import given
from hypothesis import strategies as st

from vetter.pairs.phase_average import ln_phase_average

sizes = st.floats(0.0, 60.0)


def dense(pull: np.ndarray, curvature: np.ndarray) -> float:
    """The same by 20 000 phases."""
    phase = np.arange(20000) * 2.0 * np.pi / 20000
    e = np.stack([np.cos(phase), np.sin(phase)])
    matrix = np.array([[curvature[0], curvature[1]], [curvature[1], curvature[2]]])
    exponent = pull @ e - 0.5 * np.einsum("ip,ij,jp->p", e, matrix, e)
    return float(np.logaddexp.reduce(exponent) - np.log(phase.size))


@given(length=sizes, angle=st.floats(0.0, 6.3), first=sizes, stretch=st.floats(0.7, 1.4), tilt=st.floats(-0.2, 0.2))
def test_it_is_the_average(length: float, angle: float, first: float, stretch: float, tilt: float) -> None:
    pull = length * np.array([np.cos(angle), np.sin(angle)])
    curvature = np.array([first, tilt * first, stretch * first])
    # Direction of weak curvature left out, Laplace's method for strong waves: 0.1 and 1/(8 x 16) with room for both.
    assert abs(float(ln_phase_average(pull[None], curvature[None])[0]) - dense(pull, curvature)) < 0.1


def test_a_strong_wave() -> None:
    """Signal-to-noise 50 at its own amplitude: no number of phases in a plain sum would do."""
    pull, curvature = np.array([2500.0 * 0.6, 2500.0 * 0.8]), np.array([2600.0, 100.0, 2400.0])
    assert abs(float(ln_phase_average(pull[None], curvature[None])[0]) - dense(pull, curvature)) < 0.01


def test_no_wave_is_no_evidence() -> None:
    assert float(ln_phase_average(np.zeros((1, 2)), np.zeros((1, 3)))[0]) == 0.0


def test_shapes_are_kept() -> None:
    assert ln_phase_average(np.ones((3, 4, 2)), np.ones((3, 4, 3))).shape == (3, 4)
