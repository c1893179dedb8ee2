"""Sampling the orbits that epoch velocities leave open, around the best ones found.

An ensemble of walkers in (ln P, x, y, ln jitter). Each step moves half of them along differences or lines through
members of the other half, so that no step size has to be tuned: differential evolution (ter Braak 2006, Stat. Comput.
16, 239) in turns with the stretch move (Goodman & Weare 2010, Commun. Appl. Math. Comput. Sci. 5, 65).
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from vetter.physics.keplerian_search import Mode, Search
from vetter.physics.velocity_model import EpochData

FloatArray = NDArray[np.float64]

WALKERS = 96
GENERATIONS = 300
DISCARDED = 120
KEPT_EVERY = 4
SAME_ORBIT_LN = 15.0
"""Modes this far below the best start no walker."""


def sample_orbits(data: EpochData, search: Search, modes: Sequence[Mode], rng: np.random.Generator) -> FloatArray:
    """Return points (draws, 4) drawn from the posterior near the best mode's count of cycles."""
    window = cycle_window(data, search, modes[0])
    walkers, ln_value = _first_walkers(data, window, modes, rng)
    kept = []
    half = WALKERS // 2
    for generation in range(GENERATIONS):
        for movers, others in ((slice(0, half), slice(half, WALKERS)), (slice(half, WALKERS), slice(0, half))):
            move = _stretch if generation % 3 == 2 else _difference
            trial, ln_factor = move(walkers[movers], walkers[others], rng)
            trial_ln = window.ln_posterior(data, trial)
            taken = np.log(rng.random(half)) < trial_ln - ln_value[movers] + ln_factor
            walkers[movers] = np.where(taken[:, None], trial, walkers[movers])
            ln_value[movers] = np.where(taken, trial_ln, ln_value[movers])
        if generation >= DISCARDED and generation % KEPT_EVERY == 0:
            kept.append(walkers.copy())
    return np.concatenate(kept)


def cycle_window(data: EpochData, search: Search, best: Mode) -> Search:
    """Return the search with periods held within one cycle over the baseline of the best mode."""
    frequency, cycle = np.exp(-best.point[0]), 1.0 / data.baseline_d
    low = max(search.bounds[0], -float(np.log(frequency + cycle)))
    high = search.bounds[1] if frequency <= cycle else min(search.bounds[1], -float(np.log(frequency - cycle)))
    return Search(
        search.centres, search.half_widths, (low, high), search.jitter_bounds, search.period, search.eccentricity
    )


def _first_walkers(
    data: EpochData, window: Search, modes: Sequence[Mode], rng: np.random.Generator
) -> tuple[FloatArray, FloatArray]:
    """Return walkers (WALKERS, 4) about the modes, shared out by their evidence, and their ln posterior."""
    near = [m for m in modes if window.bounds[0] <= m.point[0] <= window.bounds[1]]
    near = [m for m in near if m.ln_value > modes[0].ln_value - SAME_ORBIT_LN]
    volume = np.array([0.5 * np.linalg.slogdet(m.covariance)[1] for m in near])
    ln_weight = np.array([m.ln_value for m in near]) + volume
    weight = np.exp(ln_weight - ln_weight.max())
    pick = rng.choice(len(near), size=WALKERS, p=weight / weight.sum())
    centres = np.array([m.point for m in near])[pick]
    roots = np.array([np.linalg.cholesky(m.covariance + 1e-14 * np.eye(4)) for m in near])[pick]
    walkers = centres.copy()
    ln_value = window.ln_posterior(data, walkers)
    for shrink in (1.0, 0.3, 0.1, 0.03, 0.003):
        # Points that fall far too low are drawn again closer in: walkers that all start alike could never move.
        poor = np.all(walkers == centres, axis=1)
        trial = centres + shrink * (roots @ rng.standard_normal((WALKERS, 4, 1)))[..., 0]
        trial[:, 0] = _folded(trial[:, 0], window.bounds)
        trial[:, 3] = _folded(trial[:, 3], window.jitter_bounds)
        trial_ln = window.ln_posterior(data, trial)
        better = poor & (trial_ln > ln_value - 12.0)
        walkers = np.where(better[:, None], trial, walkers)
    return walkers, window.ln_posterior(data, walkers)


def _folded(values: FloatArray, bounds: tuple[float, float]) -> FloatArray:
    """Return values folded back at both bounds until they lie between them."""
    width = bounds[1] - bounds[0]
    return np.asarray(bounds[0] + width - np.abs((values - bounds[0]) % (2.0 * width) - width))


def _difference(movers: FloatArray, others: FloatArray, rng: np.random.Generator) -> tuple[FloatArray, FloatArray]:
    """Move along the difference of two others; one time in ten by all of it, which jumps between modes."""
    count, dimension = movers.shape
    first = rng.integers(others.shape[0], size=count)
    second = (first + rng.integers(1, others.shape[0], size=count)) % others.shape[0]
    length = np.where(rng.random(count) < 0.1, 1.0, 2.38 / np.sqrt(2.0 * dimension) * rng.uniform(0.5, 1.1, count))
    return movers + length[:, None] * (others[first] - others[second]), np.zeros(count)


def _stretch(movers: FloatArray, others: FloatArray, rng: np.random.Generator) -> tuple[FloatArray, FloatArray]:
    """Move along the line through one other, by a factor between 1/2 and 2."""
    count, dimension = movers.shape
    factor = np.asarray(0.5 * (1.0 + rng.random(count)) ** 2)
    anchor = others[rng.integers(others.shape[0], size=count)]
    return anchor + factor[:, None] * (movers - anchor), (dimension - 1.0) * np.log(factor)
