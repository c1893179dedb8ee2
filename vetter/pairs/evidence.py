"""What the epochs say for or against a pair: the likelihood ratio averaged over inner periods and masses.

The wave's strength and the apsidal motion are powers of the inner period times one number each per pair. The drawn
pairs are sorted by that number into bins; the average over periods is a sum over trial periods, five per resolution
element of the wave and halved again wherever the likelihood peaks.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from vetter.pairs.epochs import Epochs
from vetter.pairs.members import Members
from vetter.physics.inner_wave import APSIDAL_EXPONENT, STRENGTH_EXPONENT
from vetter.results.compare import weighted_quantiles

FloatArray = NDArray[np.float64]

OVERSAMPLING = 5.0
NODES_MAX = 60_000
LEAST_SIGNAL = 0.3
"""Where even the strongest pair has a wave of a smaller signal-to-noise ratio, trial periods may lie far apart."""

FAR_APART = 96
"""Trial periods there, spread in the logarithm: the apsidal motion may still be felt."""

STRENGTH_ERROR = 0.08
"""Relative error of the predicted strength: N-body runs agree to 1-8 %."""

APSIDAL_ERROR_FAR, APSIDAL_ERROR_NEAR = 0.03, 1.2
"""Relative error of the predicted apsidal motion: the first, plus the second times (P_in / P_stable)^2.

Integrated triples agree to 1 % at a fifth of the longest stable inner period, to 5-8 % at two fifths, 8-38 % at a half.
"""

BINS = 10
SHAPE_PERIODS = 160

FOUND_LN = 5.0
"""Ln likelihood ratio from which a wave counts as found."""

SINGLED_OUT = 0.05
"""Relative width (68 %) below which the inner period counts as measured."""

NEAR_PEAK_LN = 12.0
SMOOTH_LN = 0.3
HALVINGS = 14
_CHUNK = 2048


@dataclass(frozen=True)
class WaveEvidence:
    """The epochs against one scenario's pairs.

    Attributes
    ----------
    ln_ratio : ln of the mean likelihood ratio to a single companion
    error : its standard error from the finite number of drawn pairs
    period_d : (n,) trial inner periods, rising
    ln_likelihood : (n,) ln likelihood ratio at each, averaged over the masses
    share : (n,) part of the posterior at each
    strength_km_s : (n,) mean strength of the wave at each
    best_period_d, best_ln_ratio : the most telling inner period
    ln_apsidal : ``ln_ratio`` were the apsidal motion there and the wave not
    bin_strength_km_s : (b,) strength at 1 d of pairs of equal shares, rising
    bin_ln_likelihood : (n, b) ln likelihood ratio of each
    """

    ln_ratio: float
    error: float
    period_d: FloatArray
    ln_likelihood: FloatArray
    share: FloatArray
    strength_km_s: FloatArray
    best_period_d: float
    best_ln_ratio: float
    ln_apsidal: float
    bin_strength_km_s: FloatArray
    bin_ln_likelihood: FloatArray

    def measured_period(self) -> tuple[float, float] | None:
        """Return inner period and its error (d) where the epochs single one out, else None."""
        low, middle, high = weighted_quantiles(self.period_d, self.share, np.array([0.16, 0.5, 0.84]))
        if self.ln_ratio < FOUND_LN or high - low > SINGLED_OUT * middle:
            return None
        return float(middle), float(0.5 * (high - low))


@dataclass(frozen=True)
class _Bins:
    """Drawn pairs sorted by strength: strength (km/s) and apsidal motion (rad/d) at 1 d, longest stable period (b,).

    ``density`` (b, k) is the share of the pairs in the bin times their prior per unit of ln period, at ``ln_period``.
    """

    strength: FloatArray
    apsidal: FloatArray
    stable_d: FloatArray
    ln_period: FloatArray
    density: FloatArray

    def prior(self, period_d: FloatArray) -> FloatArray:
        """Return the prior density per unit of ln period (n, b)."""
        found = [np.interp(np.log(period_d), self.ln_period, row, 0.0, 0.0) for row in self.density]
        return np.stack(found, axis=1)

    def ln_likelihood(self, epochs: Epochs, period_d: FloatArray, wave: float = 1.0) -> FloatArray:
        """Return ln of the likelihood ratio (n, b); ``wave`` 0 leaves the wave out."""
        parts = []
        for start in range(0, period_d.size, _CHUNK):
            period = period_d[start : start + _CHUNK, None]
            strength, apsidal = (
                wave * self.strength * period**STRENGTH_EXPONENT,
                self.apsidal * period**APSIDAL_EXPONENT,
            )
            error = apsidal * (APSIDAL_ERROR_FAR + APSIDAL_ERROR_NEAR * (period / self.stable_d) ** 2)
            parts.append(epochs.ln_ratio(period[:, 0], strength, apsidal, error))
        return np.concatenate(parts)


def wave_evidence(epochs: Epochs, pairs: Members, weights: FloatArray, rng: np.random.Generator) -> WaveEvidence | None:
    """Return what the epochs say of the drawn ``pairs`` with posterior ``weights`` (n,); None where no period is open.

    The prior of the inner period is log-uniform from contact to the stability limit, pair by pair.
    """
    possible = np.flatnonzero((pairs.longest_d > pairs.shortest_d) & (weights > 0.0))
    if possible.size == 0:
        return None
    pairs, weights = pairs.at(possible), weights[possible] / weights[possible].sum()
    bins = _sorted_into_bins(epochs, pairs, weights, rng)
    period = _trial_periods(epochs, pairs, float(bins.strength.max()))
    period, ln_value = _halved_at_peaks(epochs, bins, period, bins.ln_likelihood(epochs, period))
    few = np.geomspace(period[0], period[-1], FAR_APART)
    ln_apsidal = _ln_mean(bins, few, bins.ln_likelihood(epochs, few, 0.0))
    return _summary(bins, period, ln_value, 1.0 / float(np.sum(weights**2)), ln_apsidal)


def _sorted_into_bins(epochs: Epochs, pairs: Members, weights: FloatArray, rng: np.random.Generator) -> _Bins:
    """Equal shares of the pairs in the order of their strength, which is uncertain by its own error."""
    orbit = epochs.orbit
    strength = pairs.strength_at_1_d(orbit.period_d) * np.exp(STRENGTH_ERROR * rng.standard_normal(weights.size))
    apsidal = pairs.apsidal_at_1_d(orbit.period_d, orbit.eccentricity)
    order = np.argsort(strength, kind="stable")
    rank = np.empty(order.size, dtype=int)
    rank[order] = np.minimum(BINS * np.cumsum(weights[order]), BINS - 1e-9).astype(int)
    short, long = np.log(pairs.shortest_d), np.log(pairs.longest_d)
    ln_period = np.linspace(short.min(), long.max(), SHAPE_PERIODS)
    means, density = [], []
    for place in np.unique(rank):
        inside = rank == place
        mine = weights[inside]
        means.append([np.average(x[inside], weights=mine) for x in (strength, apsidal, pairs.stable_d)])
        covers = (ln_period >= short[inside, None]) & (ln_period <= long[inside, None])
        density.append((mine / (long - short)[inside]) @ covers)
    scaled = np.array(density)
    # The steps of the grid must not lose or add prior.
    scaled *= 1.0 / np.trapezoid(scaled.sum(axis=0), ln_period)
    middle = np.array(means)
    return _Bins(middle[:, 0], middle[:, 1], middle[:, 2], ln_period, scaled)


def _trial_periods(epochs: Epochs, pairs: Members, strength_at_1_d: float) -> FloatArray:
    """Return rising trial periods (n,): even in frequency where a wave could be felt, in the logarithm below."""
    short, long = float(pairs.shortest_d.min()), float(pairs.longest_d.max())
    felt = (LEAST_SIGNAL / (strength_at_1_d * np.sqrt(epochs.information))) ** (1.0 / STRENGTH_EXPONENT)
    step = 0.5 / (OVERSAMPLING * epochs.data.baseline_d)
    fastest = min(1.0 / np.clip(felt, short, 0.999 * long), 1.0 / long + NODES_MAX * step)
    fine = 1.0 / np.arange(fastest, 1.0 / long, -step)
    return np.concatenate([np.geomspace(short, fine[0], FAR_APART, endpoint=False), fine, [long]])


def _halved_at_peaks(
    epochs: Epochs, bins: _Bins, period: FloatArray, ln_value: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """Add trial periods in the middle of steps near the highest peaks until the likelihood is smooth there."""
    for _ in range(HALVINGS):
        peak = ln_value.max(axis=1)
        near = np.maximum(peak[1:], peak[:-1]) > max(float(peak.max()), 0.0) - NEAR_PEAK_LN
        rough = np.abs(np.diff(ln_value, axis=0)).max(axis=1) > SMOOTH_LN
        steps = np.flatnonzero(near & rough)
        if steps.size == 0:
            break
        middle = 2.0 / (1.0 / period[steps] + 1.0 / period[steps + 1])
        period = np.concatenate([period, middle])
        ln_value = np.concatenate([ln_value, bins.ln_likelihood(epochs, middle)])
        order = np.argsort(period, kind="stable")
        period, ln_value = period[order], ln_value[order]
    return period, ln_value


def _ln_mean(bins: _Bins, period: FloatArray, ln_value: FloatArray) -> float:
    """Ln of the mean likelihood over the prior of periods and pairs."""
    weight = bins.prior(period) * _widths(np.log(period))[:, None]
    largest = float(ln_value.max())
    return largest + float(np.log((weight * np.exp(ln_value - largest)).sum() / weight.sum()))


def _summary(
    bins: _Bins, period: FloatArray, ln_value: FloatArray, effective: float, ln_apsidal: float
) -> WaveEvidence:
    """Averages over the bins and the periods."""
    prior = bins.prior(period)
    largest = float(ln_value.max())
    likelihood = np.exp(ln_value - largest)
    width = _widths(np.log(period))
    weighted = prior * width[:, None]
    total = float((weighted * likelihood).sum() / weighted.sum())
    of_bin = (weighted * likelihood).sum(axis=0) / np.maximum(weighted.sum(axis=0), 1e-300)
    scatter = float(np.sqrt(np.average((of_bin - total) ** 2, weights=weighted.sum(axis=0))))
    at_period = prior.sum(axis=1)
    mean = (prior * likelihood).sum(axis=1) / np.maximum(at_period, 1e-300)
    with np.errstate(divide="ignore"):
        ln_likelihood = np.log(mean) + largest
    share = at_period * width * mean
    strength = (prior @ bins.strength) / np.maximum(at_period, 1e-300) * period**STRENGTH_EXPONENT
    best = int(np.argmax(np.where(at_period > 0.0, ln_value.max(axis=1), -np.inf)))
    return WaveEvidence(
        _ln_mean(bins, period, ln_value),
        scatter / total / float(np.sqrt(effective)),
        period,
        ln_likelihood,
        share / share.sum(),
        strength,
        float(period[best]),
        float(ln_value[best].max()),
        ln_apsidal,
        bins.strength,
        ln_value,
    )


def _widths(x: FloatArray) -> FloatArray:
    """Weights (n,) of the trapezoidal rule at rising places."""
    step = np.diff(x)
    return np.asarray(0.5 * (np.concatenate([step, [0.0]]) + np.concatenate([[0.0], step])))
