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

LONGEST_STEP = 2.0
"""No coordinate moves farther than this in one step."""

WALL_STIFFNESS = 3e3
"""A wall is a residual this steep in the excess: a fit leans into it by some 1e-4 at most."""

LARGEST_EXCESS = 1e-2
"""A fit that ends farther behind a wall than this has not found open ground."""


class Minimum(NamedTuple):
    """Where each start ended.

    Attributes
    ----------
    x : (b, d) end points
    chi2 : (b,) sum of squares there without the walls, +inf where a start never reached open ground
    gradient : (b, d) derivative of half the sum of squares without the walls; zero unless a wall or the box holds it
    curvature : (b, d, d) Gauss-Newton curvature of half the sum of squares without the walls
    """

    x: FloatArray
    chi2: FloatArray
    gradient: FloatArray
    curvature: FloatArray


class _State(NamedTuple):
    """Linearised problem at b points: residual rows, the excess over the nearest wall, and their derivatives."""

    residuals: FloatArray
    jacobian: FloatArray
    excess: FloatArray
    slope: FloatArray

    @property
    def total(self) -> FloatArray:
        """Sum of squares (b,), the wall included."""
        wall = WALL_STIFFNESS * np.maximum(self.excess, 0.0)
        return np.asarray(np.einsum("bm,bm->b", self.residuals, self.residuals) + wall**2)

    def at(self, rows: NDArray[np.intp]) -> _State:
        """Return the state of some rows."""
        return _State(*(part[rows] for part in self))

    def take(self, rows: NDArray[np.intp], other: _State) -> None:
        """Replace these rows by those of another state."""
        for part, new in zip(self, other, strict=True):
            part[rows] = new


def minimise(problem: Problem, starts: FloatArray, use: FloatArray, prior: bool, iterations: int = 50) -> Minimum:
    """Minimise the sum of squared residuals from every start (Marquardt 1963, SIAM J. Appl. Math. 11, 431).

    Parameters
    ----------
    problem : model to fit
    starts : (b, d) starting points in normal coordinates
    use : (b, m) factor on each residual for each start: 1 keeps it, 0 leaves it out
    prior : True adds every coordinate as a residual (most probable point), False only the nuisances (best fit)
    iterations : most steps taken
    """
    x = np.clip(starts, -LARGEST_COORDINATE, LARGEST_COORDINATE)
    state = _linearise(problem, x, use, prior)
    damping = np.full(x.shape[0], 1e-2)
    active = np.ones(x.shape[0], dtype=bool)
    for _ in range(iterations):
        rows = np.flatnonzero(active)
        if rows.size == 0:
            break
        now = state.at(rows)
        trial = _step(x[rows], now, damping[rows])
        new = _linearise(problem, trial, use[rows], prior)
        gain = now.total - new.total
        better = gain > 0.0
        x[rows[better]] = trial[better]
        state.take(rows[better], new.at(np.flatnonzero(better)))
        damping[rows] = np.clip(np.where(better, damping[rows] / 5.0, damping[rows] * 6.0), 1e-9, 1e9)
        finished = (better & (gain < 1e-5)) | (~better & (damping[rows] > 1e7))
        active[rows[finished]] = False
    return _minimum(x, state)


def _minimum(x: FloatArray, state: _State) -> Minimum:
    """The end state without the walls."""
    chi2 = np.einsum("bm,bm->b", state.residuals, state.residuals)
    gradient = np.einsum("bmd,bm->bd", state.jacobian, state.residuals)
    curvature = np.einsum("bmd,bme->bde", state.jacobian, state.jacobian)
    return Minimum(x, np.where(state.excess > LARGEST_EXCESS, np.inf, chi2), gradient, curvature)


def _step(x: FloatArray, state: _State, damping: FloatArray) -> FloatArray:
    """Return damped Gauss-Newton steps from ``x`` (b, d), clipped to the box.

    A step that would cross the wall, to first order, is taken again with the wall as one more residual, so that it
    lands on the wall and slides along it.
    """
    free = _solve(x, state.residuals, state.jacobian, damping)
    crosses = state.excess + np.einsum("bd,bd->b", state.slope, free) > 0.0
    wall = WALL_STIFFNESS * np.where(crosses, 1.0, 0.0)
    residuals = np.concatenate([state.residuals, (wall * state.excess)[:, None]], axis=1)
    jacobian = np.concatenate([state.jacobian, (wall[:, None] * state.slope)[:, None, :]], axis=1)
    move = np.where(crosses[:, None], _solve(x, residuals, jacobian, damping), free)
    move /= np.maximum(1.0, np.abs(move).max(axis=1, keepdims=True) / LONGEST_STEP)
    return np.clip(x + move, -LARGEST_COORDINATE, LARGEST_COORDINATE)


def _solve(x: FloatArray, residuals: FloatArray, jacobian: FloatArray, damping: FloatArray) -> FloatArray:
    """Return the damped Gauss-Newton move (b, d)."""
    gradient = np.einsum("bmd,bm->bd", jacobian, residuals)
    # A coordinate already on its bound and pushed outwards would spoil the step of the others: hold it.
    held = (np.abs(x) >= LARGEST_COORDINATE) & (np.sign(x) == -np.sign(gradient))
    jacobian = np.where(held[:, None, :], 0.0, jacobian)
    curvature = np.einsum("bmd,bme->bde", jacobian, jacobian)
    diagonal = np.maximum(np.einsum("bdd->bd", curvature), 1e-3)
    identity = np.eye(x.shape[1])
    curvature = curvature + (damping[:, None] * diagonal)[:, :, None] * identity + 1e-9 * identity
    return -np.linalg.solve(curvature, np.where(held, 0.0, gradient)[..., None])[..., 0]


def _linearise(problem: Problem, x: FloatArray, use: FloatArray, prior: bool) -> _State:
    """Return residuals, the excess and their derivatives by one-sided differences."""
    starts, dimension = x.shape
    # Differences point inwards so that they stay inside the box.
    step = np.where(x > 0.0, -STEP, STEP)
    points = np.repeat(x[:, None, :], dimension + 1, axis=1)
    points[:, np.arange(1, dimension + 1), np.arange(dimension)] += step
    found = problem.evaluate(points.reshape(-1, dimension))
    rows = found.residuals.reshape(starts, dimension + 1, -1) * use[:, None, :]
    extra = points if prior else found.nuisances.reshape(starts, dimension + 1, -1)
    # Not-a-number is a point where the model has nothing to say: as bad as a wall.
    rows = np.nan_to_num(np.concatenate([rows, extra], axis=2), nan=WALL_STIFFNESS, posinf=1e9, neginf=-1e9)
    excess = found.excess.reshape(starts, dimension + 1)
    jacobian = ((rows[:, 1:] - rows[:, :1]) / step[:, :, None]).transpose(0, 2, 1)
    slope = (excess[:, 1:] - excess[:, :1]) / step
    return _State(rows[:, 0].copy(), jacobian.copy(), excess[:, 0].copy(), slope)
