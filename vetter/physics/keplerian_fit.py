"""Keplerian orbits from epoch velocities: what the velocities leave open of P, e, omega, T0, K1 and the offsets.

:func:`fit_velocities` is the door. It looks for periods when none is given (:mod:`vetter.physics.period_search`),
climbs to the best orbits from many starts, and then samples what is left open, with A, B and the offsets integrated
out exactly (:mod:`vetter.physics.velocity_model`). One jitter for all instruments is added to the errors in
quadrature. The same input and seed give the same fit.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from vetter.physics import kepler
from vetter.physics.keplerian_sampler import cycle_window, sample_orbits
from vetter.physics.keplerian_search import Mode, Search, find_modes, search_periods
from vetter.physics.velocity_model import EpochData, basis, draw_linear, epoch_data, solve
from vetter.system.epochs import LEAST_EPOCHS
from vetter.system.model import Measurement

FloatArray = NDArray[np.float64]

SECURE_LN_RATIO = 5.0
"""A rival period this far below the best in ln likelihood no longer counts (a factor of 150)."""


ELEMENTS = ("period_d", "eccentricity", "periastron_argument_rad", "periastron_time_bjd", "k1_km_s", "jitter_km_s")
"""Parameters of every fit, before the offsets."""


@dataclass(frozen=True)
class Alias:
    """A period (d) that fits nearly as well, and how far below the best its ln likelihood lies."""

    period_d: float
    ln_ratio: float


@dataclass(frozen=True)
class KeplerianFit:
    """What the velocities say of the orbit, marginalised over everything else.

    Attributes
    ----------
    names : of the parameters: period_d, eccentricity, periastron_argument_rad, periastron_time_bjd, k1_km_s,
        jitter_km_s and gamma_km_s:INSTRUMENT for each instrument
    values : (p,) medians; angle and time about their circular mean
    covariance : (p, p)
    samples : (draws, p), equally weighted
    best : (p,) orbit of the highest likelihood among the samples
    residuals_km_s : (N,) velocities minus the best orbit
    rms_km_s : their root mean square
    chi2 : their sum of squares over the given errors, without jitter
    aliases : other periods within ln 5 of the best; empty when the period is secure
    halves_differ : largest shift between the halves of the sampling, in sigma, of P, e and K1; above 0.3 is suspect
    """

    names: tuple[str, ...]
    values: FloatArray
    covariance: FloatArray
    samples: FloatArray
    best: FloatArray
    residuals_km_s: FloatArray
    rms_km_s: float
    chi2: float
    aliases: tuple[Alias, ...]
    halves_differ: float

    def value(self, name: str) -> float:
        """Return the median of a parameter. ValueError for an unknown name."""
        return float(self.values[self._place(name)])

    def error(self, name: str) -> float:
        """Return half the width of the central 68 % of a parameter: unlike the covariance, safe from long tails."""
        low, high = self.interval(name, 0.6827)
        return 0.5 * (high - low)

    def interval(self, name: str, probability: float = 0.95) -> tuple[float, float]:
        """Return the central interval of a parameter with this probability."""
        low, high = np.quantile(self.samples[:, self._place(name)], [0.5 - 0.5 * probability, 0.5 + 0.5 * probability])
        return float(low), float(high)

    @property
    def jitter_km_s(self) -> float:
        """Median jitter."""
        return self.value("jitter_km_s")

    @property
    def mass_function_msun(self) -> FloatArray:
        """Mass function (draws,) with all covariances between P, e and K1."""
        period, e, k1 = (self.samples[:, self._place(name)] for name in ("period_d", "eccentricity", "k1_km_s"))
        return kepler.mass_function_msun(period, k1, e)

    def k1_at_fixed_shape(self) -> tuple[float, float]:
        """Return K1 and its error (km/s) that stand for the mass function at the median period and eccentricity.

        K1 and e are correlated, so their separate errors misstate that of the mass function. With these two, period
        and eccentricity held, its median and its 68 % width are right.
        """
        unit = float(kepler.mass_function_msun(self.value("period_d"), 1.0, self.value("eccentricity")))
        low, middle, high = np.cbrt(np.quantile(self.mass_function_msun, [0.15865, 0.5, 0.84135]) / unit)
        return float(middle), float(0.5 * (high - low))

    def _place(self, name: str) -> int:
        if name not in self.names:
            raise ValueError(f"no parameter {name!r}; there are {', '.join(self.names)}")
        return self.names.index(name)


def fit_velocities(
    time_bjd: ArrayLike,
    rv_km_s: ArrayLike,
    error_km_s: ArrayLike,
    instrument: Sequence[str] | None = None,
    period: Measurement | float | None = None,
    eccentricity: Measurement | None = None,
    seed: int = 0,
) -> KeplerianFit:
    """Return the Keplerian fit of epoch velocities.

    Parameters
    ----------
    time_bjd, rv_km_s, error_km_s : (N,) with N at least 5 plus one per further instrument
    instrument : N names; each gets its own offset. None: one instrument
    period : a :class:`Measurement` (d) counts as one; a bare number only says where to look, to within half
        a cycle over the baseline; None: searched from 0.5 d to twice the baseline
    eccentricity : a measurement of it, or None
    seed : of the sampling

    Raises ValueError for too few epochs or epochs that make no sense.
    """
    data = epoch_data(time_bjd, rv_km_s, error_km_s, instrument)
    needed = LEAST_EPOCHS - 1 + len(data.instruments)
    if data.count < needed or data.baseline_d <= 0.0:
        raise ValueError(f"a Keplerian fit needs {needed} epochs at different times, got {data.count}")
    search = search_periods(data, period, eccentricity)
    modes = find_modes(data, search)
    rng = np.random.default_rng(seed)
    points = sample_orbits(data, search, modes, rng)
    return _summary(data, points, draw_linear(data, points, rng), modes[0], _rivals(data, search, modes))


def _summary(
    data: EpochData, points: FloatArray, linear: FloatArray, best: Mode, aliases: tuple[Alias, ...]
) -> KeplerianFit:
    samples = _orbital_elements(data, points, linear)
    solved = _best_linear(data, best)
    residuals = data.rv_km_s + data.offsets @ data.mean_km_s - basis(data, best.point[None])[0] @ solved
    judged = samples[:, [0, 1, 4]]
    first, second = np.array_split(judged, 2)
    shift = np.abs(first.mean(axis=0) - second.mean(axis=0)) / np.maximum(judged.std(axis=0), 1e-300)
    return KeplerianFit(
        ELEMENTS + tuple(f"gamma_km_s:{name}" for name in data.instruments),
        np.median(samples, axis=0),
        np.cov(samples, rowvar=False),
        samples,
        _orbital_elements(data, best.point[None], solved[None])[0],
        residuals,
        float(np.sqrt(np.mean(residuals**2))),
        float(np.sum((residuals / data.error_km_s) ** 2)),
        aliases,
        float(shift.max()),
    )


def _best_linear(data: EpochData, mode: Mode) -> FloatArray:
    """Return A, B and the offsets (2 + k,) of the best orbit, instruments' means added."""
    variance = data.error_km_s**2 + np.exp(2.0 * mode.point[3])
    linear = solve(data, basis(data, mode.point[None]), variance).mean[0]
    linear[2:] += data.mean_km_s
    return np.asarray(linear)


def _orbital_elements(data: EpochData, points: FloatArray, linear: FloatArray) -> FloatArray:
    """Return the parameters (n, p) in the order of ``names``; angle and time are unwound about their circular mean."""
    period = np.exp(points[:, 0])
    omega = np.arctan2(-linear[:, 1], linear[:, 0])
    phase = np.arctan2(points[:, 2], points[:, 1])
    out = [
        period,
        points[:, 1] ** 2 + points[:, 2] ** 2,
        _unwound(omega),
        data.reference_bjd - _unwound(phase) / (2.0 * np.pi) * period,
        np.hypot(linear[:, 0], linear[:, 1]),
        np.exp(points[:, 3]),
    ]
    return np.column_stack([*out, linear[:, 2:]])


def _unwound(angle: FloatArray) -> FloatArray:
    """Return angles (n,) within half a turn of their circular mean, which lies in 0 to 2 pi."""
    mean = float(np.angle(np.exp(1j * angle).mean())) % (2.0 * np.pi)
    return np.asarray(mean + (angle - mean + np.pi) % (2.0 * np.pi) - np.pi)


def _rivals(data: EpochData, search: Search, modes: Sequence[Mode]) -> tuple[Alias, ...]:
    """Return other counts of cycles that fit nearly as well, best of each only."""
    low, high = cycle_window(data, search, modes[0]).bounds
    found: list[Alias] = []
    for mode in modes[1:]:
        period, below = float(np.exp(mode.point[0])), modes[0].ln_value - mode.ln_value
        known = any(abs(1.0 / period - 1.0 / other.period_d) * data.baseline_d < 1.0 for other in found)
        if below < SECURE_LN_RATIO and not low <= mode.point[0] <= high and not known:
            found.append(Alias(period, below))
    return tuple(found)
