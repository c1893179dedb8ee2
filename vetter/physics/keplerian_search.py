"""From epoch velocities to the few orbits worth a closer look: candidate periods, a scan, and a climb from each start.

The climb is Levenberg-Marquardt on ln P and the shape, all starts at once, with the linear parameters solved for.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from vetter.physics.period_search import SHORTEST_PERIOD_D, candidate_periods
from vetter.physics.velocity_model import AMPLITUDE_REACH, ECCENTRICITY_MAX, EpochData, basis, ln_marginal, solve
from vetter.system.model import Measurement

FloatArray = NDArray[np.float64]

SCAN_POINTS = 8192
STARTS = 48
CLIMB_STEPS = 40
_STEP = 1e-6


@dataclass(frozen=True)
class Search:
    """Where orbits are looked for.

    Attributes
    ----------
    centres, half_widths : (c,) ln periods (d) to scan about, and how far
    bounds : of ln P
    jitter_bounds : of ln jitter (km/s); flat between
    period, eccentricity : measurements from elsewhere, or None
    """

    centres: FloatArray
    half_widths: FloatArray
    bounds: tuple[float, float]
    jitter_bounds: tuple[float, float]
    period: Measurement | None
    eccentricity: Measurement | None

    def ln_posterior(self, data: EpochData, points: FloatArray) -> FloatArray:
        """Return ln of the posterior (n,) of points (n, 4), up to a constant."""
        inside = (points[:, 0] >= self.bounds[0]) & (points[:, 0] <= self.bounds[1])
        inside &= (points[:, 3] >= self.jitter_bounds[0]) & (points[:, 3] <= self.jitter_bounds[1])
        safe = np.where(inside[:, None], points, points[np.argmax(inside)])
        value = ln_marginal(data, safe) - 0.5 * (self.penalties(safe) ** 2).sum(axis=1)
        return np.asarray(np.where(inside, value, -np.inf))

    def penalties(self, points: FloatArray) -> FloatArray:
        """Return the standardised misfit (n, 2) to the measured period and eccentricity, 0 where there is none."""
        out = np.zeros((points.shape[0], 2))
        if self.period is not None:
            out[:, 0] = (np.exp(points[:, 0]) - self.period.value) / self.period.error
        if self.eccentricity is not None:
            e = points[:, 1] ** 2 + points[:, 2] ** 2
            out[:, 1] = (e - self.eccentricity.value) / self.eccentricity.error
        return out


class Mode(NamedTuple):
    """A local best orbit: its point (4,), ln posterior there, and a rough covariance (4, 4)."""

    point: FloatArray
    ln_value: float
    covariance: FloatArray


def search_periods(data: EpochData, period: Measurement | float | None, eccentricity: Measurement | None) -> Search:
    """Return where to look. See :func:`vetter.physics.keplerian_fit.fit_velocities` for the arguments."""
    cycle = 1.0 / data.baseline_d
    error = float(np.median(data.error_km_s))
    jitter = (float(np.log(0.02 * error)), float(np.log(max(20.0 * error, 2.0 * data.half_range_km_s))))
    measured = period if isinstance(period, Measurement) else None
    if period is None:
        centres = np.log(candidate_periods(data))
        bounds = float(np.log(SHORTEST_PERIOD_D)), float(np.log(max(4.0 * data.baseline_d, 2.0 * SHORTEST_PERIOD_D)))
        return Search(centres, _reach(centres, 0.3 * cycle), bounds, jitter, None, eccentricity)
    value = period.value if isinstance(period, Measurement) else float(period)
    reach = 5.0 * period.error / value if isinstance(period, Measurement) else 0.5 * cycle * value
    reach = min(reach, 0.5)
    bounds = float(np.log(value * (1.0 - reach))), float(np.log(value * (1.0 + reach)))
    if reach / value > cycle:
        # The measurement leaves several counts of cycles open.
        found = candidate_periods(data, (value * (1.0 - reach), value * (1.0 + reach)))
        centres = np.log(found)
        return Search(centres, _reach(centres, 0.3 * cycle), bounds, jitter, measured, eccentricity)
    centre = np.array([np.log(value)])
    width = np.array([0.6 * reach if isinstance(period, Measurement) else reach])
    return Search(centre, width, bounds, jitter, measured, eccentricity)


def _reach(centres: FloatArray, frequency_step: float) -> FloatArray:
    return np.minimum(frequency_step * np.exp(centres), 0.5)


def find_modes(data: EpochData, search: Search) -> list[Mode]:
    """Return the local best orbits, best first, distinct."""
    starts = _scan(data, search)
    points, curvature = _climb(data, search, starts)
    modes = []
    for point, hessian in zip(points, curvature, strict=True):
        full = np.repeat(_with_shape(point)[None], 24, axis=0)
        full[:, 3] = np.linspace(*search.jitter_bounds, 24)
        ln_values = search.ln_posterior(data, full)
        place = int(np.argmax(ln_values))
        if not np.isfinite(ln_values[place]):
            continue
        modes.append(Mode(full[place], float(ln_values[place]), _covariance(full[place], hessian, point)))
    modes.sort(key=lambda mode: -mode.ln_value)
    distinct: list[Mode] = []
    for mode in modes:
        if all(_apart(data, mode, other) for other in distinct):
            distinct.append(mode)
    return distinct


def _apart(data: EpochData, mode: Mode, other: Mode) -> bool:
    """Whether two modes differ by more than a twentieth of a cycle, or in shape by more than 0.03."""
    cycles = abs(np.exp(-mode.point[0]) - np.exp(-other.point[0])) * data.baseline_d
    return bool(cycles > 0.05 or np.abs(mode.point[1:3] - other.point[1:3]).max() > 0.03)


def _scan(data: EpochData, search: Search) -> FloatArray:
    """Return the starts (s, 3) of the climb in ln P and the stretched shape: the best of a scan, spread out."""
    from scipy.stats import qmc

    count = search.centres.size
    each = 2 ** int(np.ceil(np.log2(max(SCAN_POINTS / count, 256))))
    unit = qmc.Sobol(3, scramble=False).random(each)
    e, angle = ECCENTRICITY_MAX * unit[:, 1] * 0.99, 2.0 * np.pi * unit[:, 2]
    shape = np.sqrt(e)[:, None] * np.stack([np.cos(angle), np.sin(angle)], axis=1)
    starts = []
    for centre, width in zip(search.centres, search.half_widths, strict=True):
        ln_period = np.clip(centre + width * (2.0 * unit[:, 0] - 1.0), *search.bounds)
        points = np.column_stack([ln_period, shape, np.zeros(each)])
        misfit = solve(data, basis(data, points), data.error_km_s**2).misfit
        misfit += (search.penalties(points) ** 2).sum(axis=1)
        starts.append(_spread_out(points[np.argsort(misfit, kind="stable")], max(STARTS // count, 3)))
    return _stretched(np.concatenate(starts))


def _spread_out(points: FloatArray, count: int) -> FloatArray:
    """Return the first points (best first) that lie apart from each other in shape."""
    kept: list[FloatArray] = []
    for point in points[: 40 * count]:
        if all(np.hypot(*(point[1:3] - other[1:3])) > 0.12 for other in kept):
            kept.append(point)
        if len(kept) == count:
            break
    return np.array(kept)


def _stretched(points: FloatArray) -> FloatArray:
    """Return (ln P, X, Y) with the disc of shapes stretched to the whole plane, so that a climb needs no walls."""
    e = np.minimum((points[:, 1:3] ** 2).sum(axis=1), 0.999 * ECCENTRICITY_MAX)
    return np.column_stack([points[:, 0], points[:, 1:3] / np.sqrt(ECCENTRICITY_MAX - e)[:, None]])


def _with_shape(stretched: FloatArray) -> FloatArray:
    """Return points (..., 4) from stretched ones (..., 3), ln jitter 0."""
    length2 = (stretched[..., 1:3] ** 2).sum(axis=-1)
    shape = stretched[..., 1:3] * np.sqrt(ECCENTRICITY_MAX / (1.0 + length2))[..., None]
    return np.concatenate([stretched[..., :1], shape, np.zeros((*stretched.shape[:-1], 1))], axis=-1)


def _residuals(data: EpochData, search: Search, stretched: FloatArray) -> FloatArray:
    """Return standardised residuals (n, N + 4) of the best linear parameters at stretched points (n, 3)."""
    points = _with_shape(stretched)
    columns = basis(data, points)
    mean = solve(data, columns, data.error_km_s**2).mean
    epochs = (data.rv_km_s - np.einsum("nip,np->ni", columns, mean)) / data.error_km_s
    reach = AMPLITUDE_REACH * data.half_range_km_s
    return np.concatenate([epochs, mean[:, :2] / reach, search.penalties(points)], axis=1)


def _climb(data: EpochData, search: Search, starts: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return the end points (s, 3) and J^T J there (s, 3, 3) of Levenberg-Marquardt from every start at once."""
    point, count = starts.copy(), starts.shape[0]
    damping = np.full(count, 1e-2)
    residual = _residuals(data, search, point)
    cost = (residual**2).sum(axis=1)
    # One step in ln P must not skip a cycle.
    longest = 0.1 * np.exp(point[:, 0]) / data.baseline_d
    normal = np.zeros((count, 3, 3))
    for _ in range(CLIMB_STEPS):
        nudged = point[:, None, :] + _nudges(data, point)
        slopes = _residuals(data, search, nudged.reshape(-1, 3)).reshape(count, 3, -1)
        slopes = (slopes - residual[:, None, :]) / np.diagonal(_nudges(data, point), axis1=1, axis2=2)[..., None]
        normal = slopes @ np.swapaxes(slopes, 1, 2)
        scale = np.einsum("nii->ni", normal) + 1e-12
        damped = normal + np.eye(3) * (damping[:, None] * scale)[:, :, None]
        step = -np.linalg.solve(damped, (slopes @ residual[..., None]))[..., 0]
        step[:, 0] = np.clip(step[:, 0], -longest, longest)
        step[:, 1:] = np.clip(step[:, 1:], -0.5, 0.5)
        trial = point + step
        trial[:, 0] = np.clip(trial[:, 0], *search.bounds)
        trial_residual = _residuals(data, search, trial)
        trial_cost = (trial_residual**2).sum(axis=1)
        better = trial_cost < cost
        point = np.where(better[:, None], trial, point)
        residual = np.where(better[:, None], trial_residual, residual)
        cost = np.where(better, trial_cost, cost)
        damping = np.clip(np.where(better, 0.3 * damping, 5.0 * damping), 1e-9, 1e9)
    return point, normal


def _nudges(data: EpochData, point: FloatArray) -> FloatArray:
    """Return the steps (s, 3, 3) of the numerical derivative: a millionth of a cycle, and of the shape."""
    steps = np.full(point.shape, _STEP)
    steps[:, 0] = _STEP * np.minimum(np.exp(point[:, 0]) / data.baseline_d, 1.0)
    return np.asarray(steps[:, :, None] * np.eye(3))


def _covariance(point: FloatArray, normal: FloatArray, stretched: FloatArray) -> FloatArray:
    """Return a rough covariance (4, 4) of (ln P, x, y, ln jitter) from the curvature in stretched coordinates."""
    weight, axes = np.linalg.eigh(normal)
    largest = np.array([0.05, 0.5, 0.5])
    spread = axes @ np.diag(1.0 / np.maximum(weight, 1e-6)) @ axes.T
    length2 = float((stretched[1:] ** 2).sum())
    jacobian = np.eye(3)
    shrink = np.sqrt(ECCENTRICITY_MAX / (1.0 + length2))
    jacobian[1:, 1:] = shrink * (np.eye(2) - np.outer(stretched[1:], stretched[1:]) / (1.0 + length2))
    covariance = jacobian @ spread @ jacobian.T
    # Held to what is possible where the velocities say nothing.
    limit = np.minimum(largest / np.sqrt(np.maximum(np.diagonal(covariance), 1e-300)), 1.0)
    out = np.diag([0.0, 0.0, 0.0, 0.3])
    out[:3, :3] = covariance * np.outer(limit, limit)
    return out
