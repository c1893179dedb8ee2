"""Sine waves in what is left of the velocities after the orbit: how large may one be?

The wave and a shift of every orbital parameter are fitted together, to first order, so that a wave which the orbit
could have swallowed is not called excluded. For a wave of amplitude A the likelihood is integrated over its phase.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

from vetter.physics.keplerian_search import Mode
from vetter.physics.velocity_model import EpochData, basis, solve

FloatArray = NDArray[np.float64]

PHASES = 36
LEAST_INFORMATION = 1e-3
"""A wave whose worst phase keeps less than this share of its information beside the orbit is not limited at all."""

_STEP = 1e-5


class Wave(NamedTuple):
    """Cosine and sine amplitude (n, 2) in km/s that fit best, and their inverse covariance (n, 2, 2)."""

    mean: FloatArray
    precision: FloatArray


@dataclass(frozen=True)
class ResidualSearch:
    """Residuals of an orbit, whitened, with every direction that the orbit can follow taken out.

    Attributes
    ----------
    time_d : (N,) of the epochs
    sqrt_weight : (N,) 1 / error with jitter, s/km
    orbit_basis : (N, r) orthonormal directions of the orbit's parameters and offsets, whitened
    residual : (N,) whitened, without those directions
    """

    time_d: FloatArray
    sqrt_weight: FloatArray
    orbit_basis: FloatArray
    residual: FloatArray

    @property
    def degrees_of_freedom(self) -> int:
        """Epochs minus the directions that the orbit follows."""
        return int(self.time_d.size - self.orbit_basis.shape[1])

    @property
    def chi2(self) -> float:
        """Sum of squares with no wave."""
        return float(self.residual @ self.residual)

    def wave(self, frequency_per_d: FloatArray) -> Wave:
        """Return the best wave at each frequency (n,), in turns per day."""
        turns = np.exp(2j * np.pi * np.asarray(frequency_per_d, dtype=float)[:, None] * self.time_d)
        columns = np.stack([turns.real, turns.imag], axis=1) * self.sqrt_weight
        columns = columns - (columns @ self.orbit_basis) @ self.orbit_basis.T
        precision = columns @ np.swapaxes(columns, 1, 2)
        right = columns @ self.residual
        steady = precision + 1e-12 * float(np.sum(self.sqrt_weight**2)) * np.eye(2)
        return Wave(np.asarray(np.linalg.solve(steady, right[..., None])[..., 0]), np.asarray(precision))

    def ln_likelihood_ratio(self, amplitude_km_s: FloatArray, frequency_per_d: FloatArray) -> FloatArray:
        """Return ln of the likelihood (n,) of a wave of this amplitude at any phase, relative to none."""
        from scipy.special import logsumexp

        curvature, slope = _along_phases(self.wave(frequency_per_d))
        amplitude = np.asarray(amplitude_km_s, dtype=float)[:, None]
        exponent = amplitude * slope - 0.5 * curvature * amplitude**2
        return np.asarray(logsumexp(exponent, axis=1) - np.log(exponent.shape[1]))

    def amplitude_limit_km_s(self, frequency_per_d: ArrayLike, confidence: float = 0.95) -> FloatArray:
        """Return the amplitude (n,) that is not exceeded with this probability, for a prior uniform in amplitude.

        Infinite where the orbit could have swallowed the wave, or there are too few epochs.
        """
        from scipy.special import log_ndtr, ndtr

        wave = self.wave(np.atleast_1d(np.asarray(frequency_per_d, dtype=float)))
        curvature, slope = _along_phases(wave)
        weakest = np.linalg.eigvalsh(wave.precision)[:, 0]
        open_ended = weakest < LEAST_INFORMATION * 0.5 * float(np.sum(self.sqrt_weight**2))
        curvature = np.where(open_ended[:, None], 1.0, curvature)
        # At a given phase the amplitude is a Gaussian cut at zero.
        centre, width = slope / curvature, 1.0 / np.sqrt(curvature)
        ln_weight = 0.5 * slope * centre + np.log(width) + log_ndtr(centre / width)
        weight = np.exp(ln_weight - ln_weight.max(axis=1, keepdims=True)) / ndtr(centre / width)
        total = (weight * ndtr(centre / width)).sum(axis=1)
        low, high = np.zeros(weight.shape[0]), (np.maximum(centre, 0.0) + 6.0 * width).max(axis=1)
        for _ in range(40):
            middle = 0.5 * (low + high)
            below = (weight * (ndtr((middle[:, None] - centre) / width) - ndtr(-centre / width))).sum(axis=1)
            inside = below < confidence * total
            low, high = np.where(inside, middle, low), np.where(inside, high, middle)
        return np.asarray(np.where(open_ended | (self.degrees_of_freedom < 2), np.inf, high))


def _along_phases(wave: Wave) -> tuple[FloatArray, FloatArray]:
    """Return curvature and slope (n, phases) in amplitude of -ln likelihood at zero, for each phase."""
    phase = (np.arange(PHASES) + 0.5) * 2.0 * np.pi / PHASES
    way = np.stack([np.cos(phase), np.sin(phase)])
    pull = np.einsum("nij,nj->ni", wave.precision, wave.mean)
    return np.einsum("ip,nij,jp->np", way, wave.precision, way), pull @ way


def residual_search(data: EpochData, orbit: Mode) -> ResidualSearch:
    """Return the residuals of the orbit at a mode of :func:`vetter.physics.keplerian_search.find_modes`."""
    design, _, residual = _linearised(data, orbit)
    left, size, _ = np.linalg.svd(design / np.maximum(np.linalg.norm(design, axis=0), 1e-300), full_matrices=False)
    kept = left[:, size > 1e-6 * size[0]]
    sqrt_weight = 1.0 / np.sqrt(data.error_km_s**2 + np.exp(2.0 * orbit.point[3]))
    return ResidualSearch(data.time_d, sqrt_weight, kept, residual - kept @ (kept.T @ residual))


def k1_at_fixed_shape(data: EpochData, orbit: Mode) -> tuple[float, float]:
    """Return K1 of an orbit and its error (km/s) with period and eccentricity held, by error propagation.

    As :meth:`vetter.physics.keplerian_fit.KeplerianFit.k1_at_fixed_shape`, without its sampling: right where the
    errors are small.
    """
    design, linear, _ = _linearised(data, orbit)
    x, y = orbit.point[1:3]
    e, k1 = float(x * x + y * y), float(np.hypot(linear[0], linear[1]))
    # Slope of ln (K P^(1/3) (1 - e^2)^(1/2)), the cube root of the mass function, in A, B, the offsets, ln P, x, y.
    shape = -2.0 * e / (1.0 - e * e)
    slope = np.concatenate([linear[:2] / k1**2, np.zeros(linear.size - 2), [1.0 / 3.0, shape * x, shape * y]])
    return k1, k1 * float(np.sqrt(slope @ np.linalg.pinv(design.T @ design, hermitian=True) @ slope))


def _linearised(data: EpochData, orbit: Mode) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Return the whitened slopes of the velocities (N, 5 + k), A, B and offsets (2 + k,), and residuals (N,)."""
    variance = data.error_km_s**2 + np.exp(2.0 * orbit.point[3])
    nudge = np.zeros((7, 4))
    # The derivative in ln P is taken over a small share of a cycle, in the shape over a small share of the disc.
    steps = np.array([min(np.exp(orbit.point[0]) / data.baseline_d, 1.0), 1.0, 1.0]) * _STEP
    for axis, step in enumerate(steps):
        nudge[2 * axis + 1, axis], nudge[2 * axis + 2, axis] = step, -step
    columns = basis(data, orbit.point + nudge)
    linear = solve(data, columns[:1], variance).mean[0]
    curves = columns @ linear
    slopes = [(curves[2 * axis + 1] - curves[2 * axis + 2]) / (2.0 * step) for axis, step in enumerate(steps)]
    sqrt_weight = 1.0 / np.sqrt(variance)
    design = np.column_stack([columns[0], *slopes]) * sqrt_weight[:, None]
    return design, linear, (data.rv_km_s - curves[0]) * sqrt_weight
