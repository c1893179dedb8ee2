"""Epoch velocities set against the wave of an inner pair, the phase, the orbit and the jitter integrated out."""

from __future__ import annotations

from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from vetter.pairs.phase_average import ln_phase_average
from vetter.physics.inner_wave import SeenOrbit, inner_wave
from vetter.physics.keplerian_search import Mode
from vetter.physics.velocity_model import EpochData, basis, solve
from vetter.physics.velocity_residuals import ResidualSearch, residual_search

FloatArray = NDArray[np.float64]

JITTERS = (0.05, 0.2, 0.35, 0.5, 0.7, 1.0, 1.4, 2.0, 2.8, 4.0, 5.7, 8.0, 11.0, 16.0)
"""First trial jitters over the typical error; from there they double up to the range of the velocities."""

NEGLIGIBLE_LN = -15.0
"""A jitter that even a perfect wave would leave this far below what was found already is not tried for pairs."""


@dataclass(frozen=True)
class Epochs:
    """The epochs and their best Keplerian orbit, with the jitter left open.

    Attributes
    ----------
    data : the epochs
    orbit : the best orbit of a single companion; times count from ``data.reference_bjd``
    searches : residuals of that orbit for each trial jitter
    ln_weights : (j,) ln of prior times likelihood of each jitter without a wave, summing to one
    apsidal_slope : (N,) change of the velocities per rad/d of apsidal motion, km/s
    """

    data: EpochData
    orbit: SeenOrbit
    searches: tuple[ResidualSearch, ...]
    ln_weights: FloatArray
    apsidal_slope: FloatArray

    @property
    def information(self) -> float:
        """Sum of the inverse variances without jitter, s2/km2."""
        return float(np.sum(1.0 / self.data.error_km_s**2))

    @property
    def ln_gain_max(self) -> float:
        """Ln of the most that a wave could gain, were it to leave nothing unexplained."""
        return float(np.max(self.ln_weights + np.array([0.5 * search.chi2 for search in self.searches])))

    @property
    def no_wave(self) -> ResidualSearch:
        """The residuals at the jitter that suits a single companion best."""
        return self.searches[int(np.argmax(self.ln_weights))]

    def ln_ratio(
        self,
        inner_period_d: FloatArray,
        strength_km_s: FloatArray,
        apsidal_rad_d: FloatArray,
        apsidal_error_rad_d: FloatArray,
    ) -> FloatArray:
        """Return ln of the likelihood (n, b) with a pair over that of a single companion.

        ``inner_period_d`` is (n,), strength and apsidal rate of the pairs with its Gaussian error (n, b). Flat in the
        phase; the orbit's shifts are profiled and the jitter is averaged.
        """
        wave = inner_wave(self.data.time_d, inner_period_d, self.orbit)
        total = np.full(strength_km_s.shape, -np.inf)
        for search, ln_weight in zip(self.searches, self.ln_weights, strict=True):
            if ln_weight + 0.5 * search.chi2 < max(float(total.max()), 0.0) + NEGLIGIBLE_LN:
                continue
            projected = _projected(search, wave, self.apsidal_slope)
            np.logaddexp(
                total, ln_weight + _ln_one(projected, strength_km_s, apsidal_rad_d, apsidal_error_rad_d), out=total
            )
        return total

    def fitted_wave(self, inner_period_d: float) -> FittedWave:
        """Return the best wave and apsidal motion at one inner period, and the residuals with the wave left in."""
        search = self.no_wave
        wave = inner_wave(self.data.time_d, np.array([inner_period_d]), self.orbit)[0]
        columns = np.stack([wave.real, -wave.imag, self.apsidal_slope]) * search.sqrt_weight
        columns = columns - (columns @ search.orbit_basis) @ search.orbit_basis.T
        solved = np.linalg.lstsq(columns.T, search.residual, rcond=1e-6)[0]
        # What orbit and apsidal motion take is left out, the wave's own part of it put back.
        left = (search.residual - solved @ columns) / search.sqrt_weight
        model = np.real((solved[0] + 1j * solved[1]) * wave)
        return FittedWave(complex(solved[0], solved[1]), np.asarray(left + model))


class FittedWave(NamedTuple):
    """Complex amplitude (km/s) that multiplies the unit wave, and the velocities (N,) without orbit, km/s."""

    amplitude: complex
    residual_km_s: FloatArray


class _Projected(NamedTuple):
    """Scalar products, orbit's directions taken out: wave (2 columns) and apsidal slope with themselves and the data.

    ``gram`` (n, 3) is cos-cos, cos-sin, sin-sin; ``wave_data`` and ``wave_slope`` (n, 2); the rest are numbers.
    """

    gram: FloatArray
    wave_data: FloatArray
    wave_slope: FloatArray
    slope_data: float
    slope_slope: float


def _projected(search: ResidualSearch, wave: NDArray[np.complex128], slope: FloatArray) -> _Projected:
    kept, weight = search.orbit_basis, search.sqrt_weight
    whitened = wave * weight
    # The velocity is Re[exp(i phase) wave]: its columns are the real part and minus the imaginary part.
    columns = np.stack([whitened.real, -whitened.imag], axis=1)
    along = columns @ kept
    tilt = slope * weight
    tilt = tilt - kept @ (kept.T @ tilt)
    gram = columns @ np.swapaxes(columns, 1, 2) - along @ np.swapaxes(along, 1, 2)
    entries = np.stack([gram[:, 0, 0], gram[:, 0, 1], gram[:, 1, 1]], axis=1)
    return _Projected(
        entries, columns @ search.residual, columns @ tilt, float(tilt @ search.residual), float(tilt @ tilt)
    )


def _ln_one(seen: _Projected, strength: FloatArray, apsidal: FloatArray, error: FloatArray) -> FloatArray:
    """Ln likelihood ratio (n, b) at one jitter; the apsidal rate is Gaussian about its prediction."""
    spread = error**2
    widened = 1.0 + spread * seen.slope_slope
    soak = spread / widened
    left = seen.slope_data - apsidal * seen.slope_slope
    flat = apsidal * seen.slope_data - 0.5 * apsidal**2 * seen.slope_slope
    flat = flat + 0.5 * soak * left**2 - 0.5 * np.log(widened)
    drift = (apsidal + soak * left)[..., None]
    pull = strength[..., None] * (seen.wave_data[:, None, :] - drift * seen.wave_slope[:, None, :])
    cross = np.stack(
        [seen.wave_slope[:, 0] ** 2, seen.wave_slope[:, 0] * seen.wave_slope[:, 1], seen.wave_slope[:, 1] ** 2], axis=1
    )
    curvature = strength[..., None] ** 2 * (seen.gram[:, None, :] - soak[..., None] * cross[:, None, :])
    return flat + ln_phase_average(pull, curvature)


def epochs_about(data: EpochData, mode: Mode) -> Epochs:
    """Return the epochs about one best orbit."""
    jitters = _trial_jitters_km_s(data)
    points = [np.array([*mode.point[:3], np.log(jitter)]) for jitter in jitters]
    searches = tuple(residual_search(data, Mode(point, mode.ln_value, mode.covariance)) for point in points)
    columns = basis(data, mode.point[None])[0]
    linear = solve(data, columns[None], data.error_km_s**2 + np.exp(2.0 * mode.point[3])).mean[0]
    x, y = mode.point[1:3]
    period = float(np.exp(mode.point[0]))
    orbit = SeenOrbit(
        period,
        float(x * x + y * y),
        float(np.arctan2(-linear[1], linear[0])),
        float(-np.arctan2(y, x) / (2.0 * np.pi) * period),
    )
    slope = data.time_d * (linear[1] * columns[:, 0] - linear[0] * columns[:, 1])
    return Epochs(data, orbit, searches, _ln_jitter_weights(searches, jitters), slope)


def _trial_jitters_km_s(data: EpochData) -> FloatArray:
    """Trial jitters (j,), rising."""
    trial = list(JITTERS)
    error = float(np.median(data.error_km_s))
    while trial[-1] < 2.0 * data.half_range_km_s / error:
        trial.append(2.0 * trial[-1])
    return error * np.array(trial)


def _ln_jitter_weights(searches: tuple[ResidualSearch, ...], jitters_km_s: FloatArray) -> FloatArray:
    """Ln of prior (flat in ln jitter) times likelihood (j,), normalised; the orbit's parameters are integrated out."""
    ln_values = []
    for search in searches:
        ln_weight = np.log(search.sqrt_weight)
        typical = 0.5 * np.log(np.mean(search.sqrt_weight**2))
        ln_values.append(-0.5 * search.chi2 + ln_weight.sum() - search.orbit_basis.shape[1] * typical)
    steps = np.gradient(np.log(jitters_km_s))
    total = np.array(ln_values) + np.log(steps)
    return np.asarray(total - np.logaddexp.reduce(total))
