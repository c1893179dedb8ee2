"""What is left of a pair: its plane, the most favourable member of it, and what would reveal the rest."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from vetter.pairs.light_curve import inner_light_curve
from vetter.pairs.members import Members
from vetter.pairs.n_body import n_body_check
from vetter.pairs.plane import PERIODS, Plane, Rows, members_of, merged, plane, rows_of
from vetter.pairs.result import PairDetail
from vetter.pairs.reveal import Reveal, reveals
from vetter.pairs.weigh import Task, Weighed, WeighedBranch
from vetter.physics.inner_wave import APSIDAL_EXPONENT, STRENGTH_EXPONENT, strongest_line

FloatArray = NDArray[np.float64]

USUAL_EPOCHS, USUAL_TURNS = 40, 3
"""Epochs, and outer turns they are spread over, of a campaign that has not begun."""

ROWS_STREAM, REVEAL_STREAM = 99, 98


def detail_of(task: Task, pair: Weighed, best_chi2: float, n_body: bool) -> PairDetail:
    """Return the detail of one pair that was sampled; ``best_chi2`` is that of the best explanation."""
    task.say(f"plane: {pair.fitted.scenario.title}")
    best_chi2 = min(best_chi2, pair.fitted.best.chi2)
    rows = [rows_of(branch.branch, task.outer, task.generator(ROWS_STREAM)) for branch in pair.branches]
    edges = _period_edges(rows)
    planes = [_plane(task, *both, best_chi2, edges) for both in zip(pair.branches, rows, strict=True)]
    place = int(np.argmax([one.best_worth for one in planes]))
    found, heaviest = merged(planes), max(pair.branches, key=lambda branch: branch.ln_evidence)
    member, period, orbit = _best_member(rows[place], found), found.best_period_d, task.orbit
    amplitude = apsidal = masses = check = None
    if member is not None and period is not None:
        strength = float(member.strength_at_1_d(orbit.period_d)[0]) * period**STRENGTH_EXPONENT
        amplitude = strength * strongest_line(orbit)
        rate = float(member.apsidal_at_1_d(orbit.period_d, orbit.eccentricity)[0]) * period**APSIDAL_EXPONENT
        apsidal = None if task.epochs is None else float(np.degrees(rate * task.epochs.data.baseline_d))
        masses = float(member.mass_msun[0]), float(member.first_msun[0] + member.second_msun[0])
        check = n_body_check(member, period, orbit) if n_body else None
    measured = None if heaviest.wave is None else heaviest.wave.measured_period()
    return PairDetail(
        pair.fitted.scenario.name,
        found,
        heaviest.wave,
        measured,
        amplitude,
        apsidal,
        masses,
        () if measured else _reveals(task, heaviest),
        check,
    )


def _period_edges(rows: list[Rows]) -> FloatArray:
    """Edges of the cells (k + 1,): from below the least contact to beyond the last stable period."""
    short = np.concatenate([one.pairs.shortest_d for one in rows])
    long = np.concatenate([one.pairs.longest_d for one in rows])
    usable = np.isfinite(short) & np.isfinite(long) & (short > 0.0)
    low, high = float(short[usable].min()), float(long[usable].max())
    return np.geomspace(0.8 * low, 1.3 * max(high, 1.1 * low), PERIODS + 1)


def _plane(task: Task, branch: WeighedBranch, rows: Rows, best_chi2: float, edges: FloatArray) -> Plane:
    """The plane of one branch."""
    seen, variable = task.context.system.variability, None
    if seen is not None:
        light = inner_light_curve(branch.branch.fit, rows, np.sqrt(edges[1:] * edges[:-1]), seen.band)
        variable = None if light is None else light.ruled_out(seen)
    return plane(rows, best_chi2, branch.wave, variable, edges)


def _best_member(rows: Rows, found: Plane) -> Members | None:
    """The pair of the most favourable cell."""
    if found.best_mass_ratio is None:
        return None
    return rows.pairs.at(np.array([np.argmin(np.abs(rows.mass_ratio - found.best_mass_ratio))]))


def _reveals(task: Task, branch: WeighedBranch) -> tuple[Reveal, ...]:
    """What would reveal or exclude the pairs that are left; without epochs, all that walls and light leave."""
    orbit, wave = task.orbit, branch.wave
    line = strongest_line(orbit)
    if wave is not None and task.epochs is not None:
        data = task.epochs.data
        trials = 2.0 * data.baseline_d * float(np.ptp(1.0 / wave.period_d))
        error = float(np.median(data.error_km_s))
        return reveals(line * wave.strength_km_s, wave.share, trials, data.count, error)
    rng = task.generator(REVEAL_STREAM)
    x = branch.branch.draws(rng)
    pairs = members_of(branch.branch.fit, x, task.outer, rng.random(len(x)))
    pairs = pairs.at(np.flatnonzero(pairs.longest_d > pairs.shortest_d))
    count = pairs.mass_msun.size
    if count == 0:
        return ()
    period = pairs.shortest_d * (pairs.longest_d / pairs.shortest_d) ** rng.random(count)
    amplitude = line * pairs.strength_at_1_d(orbit.period_d) * period**STRENGTH_EXPONENT
    trials = 2.0 * USUAL_TURNS * orbit.period_d / float(np.median(period))
    return reveals(amplitude, np.ones(count), trials, USUAL_EPOCHS, None)
