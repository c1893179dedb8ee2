"""The average over the phase of a wave, exact for weak waves and by Laplace's method for strong ones."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]

PHASES = 16

SHARP = 16.0
"""Above this curvature the sum over phases is too coarse, and Laplace's method is right to a per cent."""

WEAK = 0.5
"""Below this trace of the curvature its direction does not matter, and the average is a Bessel function."""

NEWTON_STEPS = 4


def ln_phase_average(pull: FloatArray, curvature: FloatArray) -> FloatArray:
    """Return ln of the mean over the phase of exp(p . e - e . H e / 2), e = (cos, sin) of the phase.

    ``pull`` is p (..., 2), ``curvature`` the entries cos-cos, cos-sin, sin-sin of H (..., 3).
    """
    from scipy.special import i0e

    trace = curvature[..., 0] + curvature[..., 2]
    length = np.sqrt(pull[..., 0] ** 2 + pull[..., 1] ** 2)
    value = length + np.log(i0e(length))
    strong = trace > WEAK
    if strong.any():
        value[strong] = _ln_average(pull[strong], curvature[strong])
    return np.asarray(value - 0.25 * trace)


def _ln_average(pull: FloatArray, curvature: FloatArray) -> FloatArray:
    """The average (n,) without the part of the curvature that is the same for all phases."""
    terms = np.concatenate([pull, -0.25 * (curvature[..., :1] - curvature[..., 2:]), -0.5 * curvature[..., 1:2]], -1)
    phase = 2.0 * np.pi * np.arange(PHASES) / PHASES
    exponent = terms @ _harmonics(phase)
    largest = exponent.max(axis=1)
    value = largest + np.log(np.exp(exponent - largest[:, None]).mean(axis=1))
    at = exponent.argmax(axis=1)
    sharp = np.flatnonzero(_bend(terms, phase[at]) > SHARP)
    if sharp.size:
        value[sharp] = _laplace(terms[sharp], phase[at[sharp]])
    return np.asarray(value)


def _harmonics(phase: FloatArray) -> FloatArray:
    c, s = np.cos(phase), np.sin(phase)
    return np.stack([c, s, c * c - s * s, 2.0 * s * c])


def _bend(terms: FloatArray, phase: FloatArray) -> FloatArray:
    """Minus the second derivative (n,) of the exponent at these phases (n,)."""
    c, s, c2, s2 = _harmonics(phase)
    return np.asarray(terms[:, 0] * c + terms[:, 1] * s + 4.0 * (terms[:, 2] * c2 + terms[:, 3] * s2))


def _laplace(terms: FloatArray, phase: FloatArray) -> FloatArray:
    """Ln of the average (n,) around the peak nearest to these phases (n,), and around one half a turn away if any."""
    near, near_phase = _peak(terms, phase)
    far, far_phase = _peak(terms, phase + np.pi)
    apart = np.cos(near_phase - far_phase) < 0.0
    return np.where(apart, np.logaddexp(near, far), near)


def _peak(terms: FloatArray, phase: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Ln of the share (n,) of one peak in the average, -inf where there is none, and its phase (n,)."""
    for _ in range(NEWTON_STEPS):
        c, s, c2, s2 = _harmonics(phase)
        slope = terms[:, 1] * c - terms[:, 0] * s + 2.0 * (terms[:, 3] * c2 - terms[:, 2] * s2)
        step = slope / np.maximum(_bend(terms, phase), 0.5 * SHARP)
        phase = phase + np.clip(step, -0.1, 0.1)
    c, s, c2, s2 = _harmonics(phase)
    height = terms[:, 0] * c + terms[:, 1] * s + terms[:, 2] * c2 + terms[:, 3] * s2
    bend = _bend(terms, phase)
    share = height - 0.5 * np.log(2.0 * np.pi * np.maximum(bend, 0.5 * SHARP))
    return np.where(bend > 0.5 * SHARP, share, -np.inf), phase
