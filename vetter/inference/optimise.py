"""Many least-squares problems at once: Levenberg-Marquardt with every start advanced in the same vectorised call.

A published library solves one start at a time; here all starts, and all variants in which some observation is left
out, share each evaluation of the model, which is what makes the drop-one column affordable.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from vetter.inference.problem import LARGEST_COORDINATE, Problem

FloatArray = NDArray[np.float64]

STEP = 1e-5
"""Finite-difference step in normal coordinates; residuals are smooth on this scale and far above rounding."""


class Minimum(NamedTuple):
    """Where each start ended.

    Attributes
    ----------
    x : (b, d) end points
    chi2 : (b,) sum of squares there, +inf where a start never left a wall
    jacobian : (b, m, d) derivative of the residuals there, prior rows included
    """

    x: FloatArray
    chi2: FloatArray
    jacobian: FloatArray


def minimise(
    problem: Problem, starts: FloatArray, use: FloatArray, pull: FloatArray, iterations: int = 40
) -> Minimum:
    """Minimise the sum of squared residuals from every start (Marquardt 1963, SIAM J. Appl. Math. 11, 431).

    Parameters
    ----------
    problem : model to fit
    starts : (b, d) starting points in normal coordinates
    use : (b, m) factor on each residual for each start: 1 keeps it, 0 leaves it out
    pull : (d,) or (b, d) factor on each coordinate as a residual of its own (1 where a normal prior counts as data)
    iterations : most steps taken
    """
    pull = np.broadcast_to(pull, starts.shape)
    x = np.clip(starts, -LARGEST_COORDINATE, LARGEST_COORDINATE)
    residuals, jacobian, chi2 = _linearise(problem, x, use, pull)
    damping = np.full(x.shape[0], 1e-2)
    active = np.isfinite(chi2)
    for _ in range(iterations):
        rows = np.flatnonzero(active)
        if rows.size == 0:
            break
        trial = _step(x[rows], residuals[rows], jacobian[rows], damping[rows])
        new_residuals, new_jacobian, new_chi2 = _linearise(problem, trial, use[rows], pull[rows])
        gain = chi2[rows] - new_chi2
        better = gain > 0.0
        accepted = rows[better]
        x[accepted], residuals[accepted] = trial[better], new_residuals[better]
        jacobian[accepted], chi2[accepted] = new_jacobian[better], new_chi2[better]
        damping[rows] = np.clip(np.where(better, damping[rows] / 5.0, damping[rows] * 6.0), 1e-9, 1e9)
        finished = (better & (gain < 1e-5)) | (~better & (damping[rows] > 1e7))
        active[rows[finished]] = False
    return Minimum(x, chi2, jacobian)


def _step(x: FloatArray, residuals: FloatArray, jacobian: FloatArray, damping: FloatArray) -> FloatArray:
    """Return damped Gauss-Newton steps from ``x`` (b, d), clipped to the box."""
    gradient = np.einsum("bmd,bm->bd", jacobian, residuals)
    # A coordinate already on its bound and pushed outwards would spoil the step of the others: hold it.
    held = (np.abs(x) >= LARGEST_COORDINATE) & (np.sign(x) == -np.sign(gradient))
    jacobian = np.where(held[:, None, :], 0.0, jacobian)
    curvature = np.einsum("bmd,bme->bde", jacobian, jacobian)
    diagonal = np.maximum(np.einsum("bdd->bd", curvature), 1e-3)
    curvature = curvature + (damping[:, None] * diagonal)[:, :, None] * np.eye(x.shape[1]) + 1e-9 * np.eye(x.shape[1])
    move = -np.linalg.solve(curvature, np.where(held, 0.0, gradient)[..., None])[..., 0]
    move /= np.maximum(1.0, np.abs(move).max(axis=1, keepdims=True) / 2.0)
    return np.clip(x + move, -LARGEST_COORDINATE, LARGEST_COORDINATE)


def _linearise(
    problem: Problem, x: FloatArray, use: FloatArray, pull: FloatArray
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Return residuals (b, m + d), their Jacobian (b, m + d, d) and the sum of squares (b,), +inf behind a wall.

    The differences reach over walls: only an accepted step must land on allowed ground.
    """
    starts, dimension = x.shape
    # Differences point inwards so that they stay inside the box.
    step = np.where(x > 0.0, -STEP, STEP)
    points = np.repeat(x[:, None, :], dimension + 1, axis=1)
    points[:, np.arange(1, dimension + 1), np.arange(dimension)] += step
    evaluation = problem.evaluate(points.reshape(-1, dimension))
    values = evaluation.residuals.reshape(starts, dimension + 1, -1) * use[:, None, :]
    values = np.concatenate([values, points * pull[:, None, :]], axis=2)
    base = values[:, 0]
    jacobian = ((values[:, 1:] - base[:, None]) / step[:, :, None]).transpose(0, 2, 1)
    open_ground = np.isfinite(evaluation.ln_prior_ratio.reshape(starts, dimension + 1)[:, 0])
    chi2 = np.einsum("bm,bm->b", base, base)
    chi2 = np.where(open_ground & np.isfinite(chi2), chi2, np.inf)
    return np.nan_to_num(base), np.nan_to_num(jacobian, posinf=0.0, neginf=0.0), chi2
