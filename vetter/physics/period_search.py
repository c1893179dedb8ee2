"""Which periods may epoch velocities have: a harmonic least-squares periodogram over several instruments."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from vetter.physics.velocity_model import EpochData

FloatArray = NDArray[np.float64]

SHORTEST_PERIOD_D = 0.5
OVERSAMPLING = 5.0
LONGEST_PERIOD_BASELINES = 2.0
FREQUENCIES_MAX = 200_000
_CHUNK = 8192

EPOCHS_PER_HARMONIC = {1: 0, 2: 12, 3: 16}
"""Harmonics that are tried, and the epochs each takes: an eccentric orbit is no sine wave."""


def frequency_grid(baseline_d: float, period_range_d: tuple[float, float] | None = None) -> FloatArray:
    """Return trial frequencies (1/d), five per resolution element, over the periods 0.5 d to twice the baseline.

    A ``period_range_d`` replaces those ends. At most 200 000: the shortest periods are then left out.
    """
    short, long = period_range_d or (SHORTEST_PERIOD_D, max(LONGEST_PERIOD_BASELINES * baseline_d, SHORTEST_PERIOD_D))
    step = 1.0 / (OVERSAMPLING * baseline_d)
    count = int(min(np.ceil((1.0 / short - 1.0 / long) / step) + 1, FREQUENCIES_MAX))
    return np.asarray(1.0 / long + step * np.arange(count))


def periodogram(data: EpochData, frequencies: FloatArray, harmonics: int = 1) -> FloatArray:
    """Return the share (frequencies,) of the weighted sum of squares that ``harmonics`` sine waves take away, 0-1.

    One offset per instrument is fitted along: Zechmeister & Kurster 2009, A&A 496, 577, with several offsets and
    harmonics.
    """
    sqrt_weight = 1.0 / data.error_km_s
    offsets = data.offsets * sqrt_weight[:, None]
    basis, _ = np.linalg.qr(offsets)
    target = data.rv_km_s * sqrt_weight
    target = target - basis @ (basis.T @ target)
    parts = [
        _taken(data.time_d, sqrt_weight, basis, target, frequencies[start : start + _CHUNK], harmonics)
        for start in range(0, frequencies.size, _CHUNK)
    ]
    return np.asarray(np.concatenate(parts) / (target @ target))


def _taken(
    time: FloatArray,
    sqrt_weight: FloatArray,
    basis: FloatArray,
    target: FloatArray,
    frequencies: FloatArray,
    terms: int,
) -> FloatArray:
    """Sum of squares taken by the waves at each frequency."""
    wave = np.exp(2j * np.pi * frequencies[:, None] * time)
    power, columns = wave, []
    for _ in range(terms):
        columns += [power.real * sqrt_weight, power.imag * sqrt_weight]
        power = power * wave
    stacked = np.stack(columns, axis=1)
    stacked = stacked - (stacked @ basis) @ basis.T
    gram = stacked @ np.swapaxes(stacked, 1, 2)
    # A whisper of the identity keeps frequencies solvable at which two columns coincide.
    gram += 1e-9 * np.trace(gram, axis1=1, axis2=2)[:, None, None] * np.eye(2 * terms)
    right = stacked @ target
    return np.asarray(np.einsum("np,np->n", right, np.linalg.solve(gram, right[..., None])[..., 0]))


def candidate_periods(
    data: EpochData, period_range_d: tuple[float, float] | None = None, peaks_each: int = 8
) -> FloatArray:
    """Return the periods (d) of the highest peaks with one, two and three harmonics, distinct, best of each first."""
    frequencies = frequency_grid(data.baseline_d, period_range_d)
    found: list[float] = []
    for harmonics, least in EPOCHS_PER_HARMONIC.items():
        if data.count < max(least, 2 * harmonics + data.offsets.shape[1] + 2) and harmonics > 1:
            continue
        found += _peaks(frequencies, periodogram(data, frequencies, harmonics), peaks_each)
    width = 0.5 / data.baseline_d
    distinct: list[float] = []
    for frequency in found:
        if all(abs(frequency - other) > width for other in distinct):
            distinct.append(frequency)
    return 1.0 / np.array(distinct)


def _peaks(frequencies: FloatArray, power: FloatArray, count: int) -> list[float]:
    padded = np.concatenate([[-np.inf], power, [-np.inf]])
    top = (power >= padded[:-2]) & (power >= padded[2:])
    place = np.flatnonzero(top)
    return [float(f) for f in frequencies[place[np.argsort(-power[place], kind="stable")][:count]]]
