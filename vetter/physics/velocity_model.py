"""The Keplerian velocity curve as a linear model with three parameters that are not linear.

For a trial period, eccentricity and phase the velocities are linear in the rest: A [cos nu + e] + B sin nu + gamma,
with A = K cos omega, B = -K sin omega and one gamma per instrument. These are therefore solved for, or integrated
over, exactly. Trial points come as arrays (n, 4) of ln P (d), x, y and ln jitter (km/s), where e = x^2 + y^2 and
(x, y) points to the mean anomaly at the reference time: a uniform density in the disc is uniform in e and in phase.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

from vetter.physics.kepler import eccentric_anomaly

FloatArray = NDArray[np.float64]

ECCENTRICITY_MAX = 0.98
"""Higher eccentricities are not tried."""

AMPLITUDE_REACH = 5.0
"""Width of the prior of A and B in units of half the range of the velocities: a passage may have been missed."""


@dataclass(frozen=True)
class EpochData:
    """Velocities ready for fitting.

    Attributes
    ----------
    time_d : (N,) from ``reference_bjd``, which lies amid the epochs
    rv_km_s, error_km_s : (N,); the velocities have each instrument's mean taken off
    mean_km_s : (k,) those means
    offsets : (N, k) 1 where the epoch is of the instrument
    instruments : names, in the order of the columns
    reference_bjd : time that ``time_d`` counts from
    half_range_km_s : half the range of the velocities so shifted; at least the typical error
    """

    time_d: FloatArray
    rv_km_s: FloatArray
    error_km_s: FloatArray
    mean_km_s: FloatArray
    offsets: FloatArray
    instruments: tuple[str, ...]
    reference_bjd: float
    half_range_km_s: float

    @property
    def count(self) -> int:
        """Number of epochs."""
        return self.time_d.size

    @property
    def baseline_d(self) -> float:
        """Time from the first epoch to the last."""
        return float(np.ptp(self.time_d))


def epoch_data(
    time_bjd: ArrayLike, rv_km_s: ArrayLike, error_km_s: ArrayLike, instrument: Sequence[str] | None = None
) -> EpochData:
    """Return checked epochs. ValueError for unequal lengths, values that are not finite, or errors not above zero."""
    time, rv, error = (np.asarray(x, dtype=float) for x in (time_bjd, rv_km_s, error_km_s))
    names = [""] * time.size if instrument is None else list(instrument)
    if time.ndim != 1 or not time.shape == rv.shape == error.shape == (len(names),):
        shapes = f"{time.shape}, {rv.shape}, {error.shape} and {len(names)} names"
        raise ValueError(f"epochs need one time, velocity, error and instrument each, got {shapes}")
    if not (np.isfinite(time).all() and np.isfinite(rv).all() and np.isfinite(error).all()):
        raise ValueError("times, velocities and errors must be finite")
    if time.size == 0 or error.min() <= 0.0:
        raise ValueError(f"there must be epochs, and errors above zero; got {error.tolist()}")
    known = tuple(dict.fromkeys(names))
    offsets = np.array([[float(name == other) for other in known] for name in names])
    weight = offsets / error[:, None] ** 2
    mean = weight.T @ rv / weight.sum(axis=0)
    reference = float(np.average(time, weights=1.0 / error**2))
    shifted = rv - offsets @ mean
    half_range = float(max(0.5 * np.ptp(shifted), np.median(error)))
    return EpochData(time - reference, shifted, error, mean, offsets, known, reference, half_range)


def basis(data: EpochData, points: FloatArray) -> FloatArray:
    """Return the columns cos nu + e, sin nu and the offsets at each epoch, (n, N, 2 + k)."""
    x, y = points[:, 1, None], points[:, 2, None]
    e = np.minimum(x * x + y * y, ECCENTRICITY_MAX)
    turns = data.time_d / np.exp(points[:, 0, None]) + np.arctan2(y, x) / (2.0 * np.pi)
    anomaly = eccentric_anomaly(2.0 * np.pi * (turns - np.round(turns)), e)
    cosine = np.cos(anomaly)
    short = 1.0 - e * cosine
    out = np.empty((*turns.shape, 2 + data.offsets.shape[1]))
    out[..., 0] = (cosine - e) / short + e
    out[..., 1] = np.sqrt(1.0 - e * e) * np.sin(anomaly) / short
    out[..., 2:] = data.offsets
    return out


class Solved(NamedTuple):
    """Linear parameters at each trial point: mean (n, p), inverse covariance (n, p, p), and the quadratic misfit (n,).

    The misfit is the weighted sum of squares at the mean, the prior of A and B included.
    """

    mean: FloatArray
    precision: FloatArray
    misfit: FloatArray


def solve(data: EpochData, columns: FloatArray, variance: FloatArray) -> Solved:
    """Return the linear parameters for columns (n, N, p) and variances (n, N) or (N,), in km/s."""
    weighted = columns / variance[..., None]
    precision = np.swapaxes(weighted, -1, -2) @ columns
    reach = (AMPLITUDE_REACH * data.half_range_km_s) ** -2
    precision[..., 0, 0] += reach
    precision[..., 1, 1] += reach
    right = np.einsum("nip,i->np", weighted, data.rv_km_s)
    mean = np.linalg.solve(precision, right[..., None])[..., 0]
    total = (data.rv_km_s**2 / variance).sum(axis=-1)
    return Solved(mean, precision, np.maximum(total - np.einsum("np,np->n", right, mean), 1e-300))


def ln_marginal(data: EpochData, points: FloatArray) -> FloatArray:
    """Return ln of the likelihood (n,) integrated over A, B and the offsets, uniform in K; -inf outside the ranges."""
    inside = points[:, 1] ** 2 + points[:, 2] ** 2 < ECCENTRICITY_MAX
    safe = np.where(inside[:, None], points, np.array([0.0, 0.0, 0.0, 0.0]))
    variance = data.error_km_s**2 + np.exp(2.0 * points[:, 3, None])
    solved = solve(data, basis(data, safe), variance)
    _, ln_det = np.linalg.slogdet(solved.precision)
    # A and B flat would be K dK d omega: dividing by K makes it uniform in K. The variance keeps K = 0 harmless.
    corner = np.linalg.inv(solved.precision[:, :2, :2])
    k2 = solved.mean[:, 0] ** 2 + solved.mean[:, 1] ** 2 + corner[:, 0, 0] + corner[:, 1, 1]
    ln_value = -0.5 * (solved.misfit + np.log(variance).sum(axis=1) + ln_det + np.log(k2))
    return np.asarray(np.where(inside, ln_value, -np.inf))


def draw_linear(data: EpochData, points: FloatArray, rng: np.random.Generator) -> FloatArray:
    """Return one draw of (A, B, offsets) at each trial point, (n, 2 + k), in km/s; instruments' means are added."""
    variance = data.error_km_s**2 + np.exp(2.0 * points[:, 3, None])
    solved = solve(data, basis(data, points), variance)
    root = np.linalg.cholesky(solved.precision)
    noise = rng.standard_normal(solved.mean.shape)
    drawn = solved.mean + np.linalg.solve(np.swapaxes(root, -1, -2), noise[..., None])[..., 0]
    drawn[:, 2:] += data.mean_km_s
    return np.asarray(drawn)
