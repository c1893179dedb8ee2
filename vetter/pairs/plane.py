"""Which inner periods and mass ratios are left: walls, light and velocities, cell by cell."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from vetter.inference import optimise
from vetter.inference.problem import Evaluation
from vetter.pairs.evidence import WaveEvidence
from vetter.pairs.fits import FittedBranch
from vetter.pairs.members import Members, Values, members
from vetter.physics.eclipses import BoolArray
from vetter.scenarios.fit import Fit

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int_]

PERIODS, RATIOS = 60, 16

EXCLUDED_CHI2 = 9.0
"""A cell is excluded when its best case is 3 sigma worse than the best explanation."""

REACH = np.array([0.025, 0.16, 0.34, 0.5, 0.66, 0.84, 0.975])
"""Quantiles of the strength that a cell's velocities are tried with."""

PIN = 300.0
"""Stiffness with which a fit is held to a mass ratio."""

STEPS = 16

ALIKE_LN = 0.5
"""Cells within this of the best ln likelihood count as equally good."""

FOUND_PENALTY_LN = 100.0
"""Where a wave is found, the most favourable pair has its period."""

REASONS = ("allowed", "contact", "unstable", "light", "velocities", "light curve")
"""Why a cell is closed; the first that applies, in the order contact, unstable, light, light curve, velocities."""


@dataclass(frozen=True)
class Rows:
    """The most favourable pair at each mass ratio (m,): points, sums of squares (inf where none), and members.

    ``reach`` (r,) are strengths at 1 d over mu = m_a m_b / (m_a + m_b)^2 that light and orbit leave open: masses and
    inclination are not those of the best fit alone.
    """

    mass_ratio: FloatArray
    x: FloatArray
    chi2: FloatArray
    pairs: Members
    reach: FloatArray


@dataclass(frozen=True)
class Plane:
    """The plane of inner period and mass ratio (lighter over heavier member).

    Attributes
    ----------
    period_edge_d : (k + 1,) edges of the cells, d
    mass_ratio : (m,) middles of the cells
    reason : (m, k) index into ``REASONS``; 0 is allowed
    shortest_d, stable_d : (m,) contact (or merger) and the middle of the stability limit
    best_period_d, best_mass_ratio : the most favourable allowed cell, None where none is left
    best_worth : its ln likelihood, up to a constant
    """

    period_edge_d: FloatArray
    mass_ratio: FloatArray
    reason: IntArray
    shortest_d: FloatArray
    stable_d: FloatArray
    best_period_d: float | None
    best_mass_ratio: float | None
    best_worth: float = -np.inf

    @property
    def period_d(self) -> FloatArray:
        """Middles of the cells (k,)."""
        return np.asarray(np.sqrt(self.period_edge_d[1:] * self.period_edge_d[:-1]))

    @property
    def allowed_share(self) -> float:
        """Share of the cells between the walls that is allowed; 0 where the walls leave none."""
        between = np.isin(self.reason, (1, 2), invert=True)
        return float(np.mean(self.reason[between] == 0)) if between.any() else 0.0

    def allowed_range(self) -> tuple[float, float, float, float] | None:
        """Return least and largest inner period (d) and mass ratio among the allowed cells."""
        row, column = np.nonzero(self.reason == 0)
        if row.size == 0:
            return None
        half = 0.5 / self.mass_ratio.size
        edge, ratio = self.period_edge_d, self.mass_ratio
        low, high = edge[column.min()], edge[column.max() + 1]
        return float(low), float(high), float(ratio[row.min()] - half), float(ratio[row.max()] + half)


@dataclass(frozen=True)
class _Pinned:
    """A fit with one more residual per wanted mass ratio; ``use`` of the optimiser picks one for each start."""

    fit: Fit
    wanted: FloatArray
    outer: tuple[float, float, float]

    @property
    def dimension(self) -> int:
        return self.fit.dimension

    @property
    def ln_norm(self) -> float:
        return self.fit.ln_norm

    def evaluate(self, x: FloatArray) -> Evaluation:
        found = self.fit.evaluate(x)
        ratio = members_of(self.fit, x, self.outer).mass_ratio
        held = PIN * (ratio[:, None] - self.wanted)
        return found._replace(residuals=np.concatenate([found.residuals, held], axis=1))


def members_of(
    fit: Fit, x: FloatArray, outer: tuple[float, float, float], dark_ratio: FloatArray | None = None
) -> Members:
    """Return the pairs at points ``x`` (n, dimension); ``outer`` is outer period (d), eccentricity, least dark mass."""
    values = fit.sample(x).values
    share = np.full(len(x), 0.5) if dark_ratio is None else dark_ratio
    with np.errstate(all="ignore"):
        return members(values, *outer, share)


def rows_of(branch: FittedBranch, outer: tuple[float, float, float], rng: np.random.Generator) -> Rows:
    """Return the best pair at each mass ratio, of a branch that was sampled."""
    wanted = (np.arange(RATIOS) + 0.5) / RATIOS
    known = branch.draws(rng)
    drawn = members_of(branch.fit, known, outer, rng.random(len(known)))
    reach = np.quantile(drawn.strength_at_1_d(outer[0]) / _reduced(drawn.mass_ratio), REACH)
    if _dark(branch.fit.sample(branch.best_x[None]).values):
        return _dark_rows(branch, outer, wanted, reach)
    starts = known[np.argmin(np.abs(drawn.mass_ratio[None, :] - wanted[:, None]), axis=1)]
    x, chi2 = _pinned(branch.fit, outer, wanted, starts)
    lost = np.flatnonzero(~np.isfinite(chi2))
    kept = np.flatnonzero(np.isfinite(chi2))
    if lost.size and kept.size:
        # Where a fit strayed it is tried again from its nearest neighbour.
        nearest = kept[np.argmin(np.abs(lost[:, None] - kept), axis=1)]
        x[lost], chi2[lost] = _pinned(branch.fit, outer, wanted[lost], x[nearest])
    return Rows(wanted, x, chi2, members_of(branch.fit, x, outer), reach)


def _pinned(
    fit: Fit, outer: tuple[float, float, float], wanted: FloatArray, starts: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """Best points (m, dimension) at these mass ratios (m,) and their sums of squares (m,), inf where none was found."""
    width = fit.evaluate(starts[:1]).residuals.shape[1]
    use = np.concatenate([np.ones((wanted.size, width)), np.eye(wanted.size)], axis=1)
    found = optimise.minimise(_Pinned(fit, wanted, outer), starts, use, False, STEPS)
    missed = np.abs(members_of(fit, found.x, outer).mass_ratio - wanted) > 0.25 / RATIOS
    return found.x, np.where(missed, np.inf, found.chi2)


def _reduced(mass_ratio: FloatArray) -> FloatArray:
    """Return mu = q / (1 + q)^2, to which the strength of the wave is proportional."""
    return np.asarray(mass_ratio / (1.0 + mass_ratio) ** 2)


def _dark(values: Values) -> bool:
    """Whether neither member shines, so that nothing but the masses tells the mass ratio."""
    return not {"inner_mass_ratio", "heavier_share", "white_dwarf_mass_msun"} & set(values)


def _dark_rows(branch: FittedBranch, outer: tuple[float, float, float], wanted: FloatArray, reach: FloatArray) -> Rows:
    x = np.tile(branch.best_x, (wanted.size, 1))
    total = branch.fit.sample(branch.best_x[None]).values["m2_msun"][0]
    least = outer[2] / max(total - outer[2], 1e-3)
    share = (wanted - least) / max(1.0 - least, 1e-9)
    pairs = members_of(branch.fit, x, outer, np.clip(share, 0.0, 1.0))
    return Rows(wanted, x, np.where(share < 0.0, np.inf, branch.chi2), pairs, reach)


def plane(
    rows: Rows,
    best_chi2: float,
    wave: WaveEvidence | None,
    variable: BoolArray | None,
    period_edge_d: FloatArray,
) -> Plane:
    """Return the plane; ``best_chi2`` that of the best explanation, ``variable`` (m, k) what the light curve excludes.

    A cell counts by its middle; velocities exclude it when the mean likelihood over its periods lies 4.5 in ln below a
    single companion, or below the best cell where a pair is found.
    """
    period = np.sqrt(period_edge_d[1:] * period_edge_d[:-1])
    shape = (rows.mass_ratio.size, period.size)
    ln_value = np.zeros(shape) if wave is None else _cell_ln_likelihood(rows, wave, period_edge_d)
    least = 0.5 * EXCLUDED_CHI2
    summit = 0.0 if wave is None or wave.ln_ratio < least else float(ln_value.max())
    reason = np.where(ln_value < summit - least, REASONS.index("velocities"), 0)
    if variable is not None:
        reason = np.where(variable, REASONS.index("light curve"), reason)
    reason[rows.chi2 > best_chi2 + EXCLUDED_CHI2] = REASONS.index("light")
    reason = np.where(period > rows.pairs.longest_d[:, None], REASONS.index("unstable"), reason)
    reason = np.where(period < rows.pairs.shortest_d[:, None], REASONS.index("contact"), reason)
    best, worth = _best_cell(rows, reason, ln_value, period, wave if summit > 0.0 else None, period_edge_d)
    return Plane(
        period_edge_d,
        rows.mass_ratio,
        reason,
        rows.pairs.shortest_d,
        rows.pairs.stable_d,
        None if best is None else float(period[best[1]]),
        None if best is None else float(rows.mass_ratio[best[0]]),
        worth,
    )


def _best_cell(
    rows: Rows,
    reason: IntArray,
    ln_value: FloatArray,
    period: FloatArray,
    wave: WaveEvidence | None,
    period_edge_d: FloatArray,
) -> tuple[tuple[int, int] | None, float]:
    """Row and column of the most favourable allowed cell and its ln likelihood.

    Where a wave is found it has its period, which replaces the middle of the cell in ``period``.
    """
    if not np.any(reason == 0):
        return None, -np.inf
    worth = np.where(reason == 0, ln_value - 0.5 * rows.chi2[:, None], -np.inf)
    if wave is not None:
        column = int(np.clip(np.digitize(wave.best_period_d, period_edge_d) - 1, 0, period.size - 1))
        period[column] = wave.best_period_d
        worth = np.where(np.arange(period.size) == column, worth, worth - FOUND_PENALTY_LN)
    # Of cells that do about as well the one with the longest inner period, which shows most; best inside the limit.
    worth = np.where(period < rows.pairs.stable_d[:, None], worth, worth - ALIKE_LN)
    alike = worth > worth.max() - ALIKE_LN
    best = divmod(int(np.argmax(np.where(alike, period, 0.0))), period.size)
    return best, float(worth[best])


def merged(planes: Sequence[Plane]) -> Plane:
    """Return the plane of an explanation with several branches: open where any is, else closed by a wall if by any."""
    first = max(planes, key=lambda one: one.best_worth)
    reason = first.reason.copy()
    for other in planes:
        walls = np.isin(other.reason, (1, 2))
        reason[walls] = other.reason[walls]
    for other in planes:
        reason[other.reason == 0] = 0
    return replace(first, reason=reason)


def _cell_ln_likelihood(rows: Rows, wave: WaveEvidence, period_edge_d: FloatArray) -> FloatArray:
    """Ln of the mean likelihood ratio (m, k) over the trial periods of each cell, at each row's best strength."""
    strength = _reduced(rows.mass_ratio)[:, None] * rows.reach
    place = np.digitize(wave.period_d, period_edge_d) - 1
    out = np.zeros((rows.mass_ratio.size, period_edge_d.size - 1))
    for cell in range(out.shape[1]):
        inside = wave.bin_ln_likelihood[place == cell]
        if inside.size:
            largest = inside.max(axis=0)
            mean = largest + np.log(np.exp(inside - largest).mean(axis=0))
            # A weaker pair than any drawn says less: no strength is no wave.
            known = np.concatenate([[0.0], wave.bin_strength_km_s])
            out[:, cell] = np.interp(strength, known, np.concatenate([[0.0], mean])).max(axis=1)
    return out
