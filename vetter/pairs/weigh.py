"""Each side of a contrast weighed: the best single companion, and pairs by light, orbit and epochs together."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np

from vetter.evaluation import chosen_scenarios
from vetter.observations.base import Observation
from vetter.pairs import fits
from vetter.pairs.epochs import Epochs
from vetter.pairs.evidence import WaveEvidence, wave_evidence
from vetter.pairs.fits import Fitted, FittedBranch
from vetter.pairs.plane import members_of
from vetter.physics.inner_wave import SeenOrbit
from vetter.scenarios.context import Context

OCCAM_SPREAD = 6.0
"""A single companion is sampled when it could win with an Occam factor this much (ln) kinder than the best one's."""

BRANCH_SHARE_LN = 5.0
"""A branch this far behind in evidence is not set against the epochs."""

NO_ROOM = "no stable inner orbit fits inside the outer one"


@dataclass(frozen=True)
class Task:
    """What all steps need: the system, what it is fitted to, its epochs, the seed, and whom to tell of progress."""

    context: Context
    observations: tuple[Observation, ...]
    epochs: Epochs | None
    seed: int
    say: Callable[[str], None]

    @property
    def outer(self) -> tuple[float, float, float]:
        """Outer period (d), eccentricity, and the least mass of a dark member (Msun)."""
        system = self.context.system
        orbit = system.orbit
        return orbit.period_d.value, orbit.eccentricity.value, system.assumptions.neutron_star_min_msun

    @property
    def orbit(self) -> SeenOrbit:
        """The outer orbit, from the epochs where there are any."""
        return SeenOrbit(*self.outer[:2]) if self.epochs is None else self.epochs.orbit

    def generator(self, *stream: int) -> np.random.Generator:
        """Return a random stream of its own."""
        return np.random.default_rng([self.seed, *stream])


@dataclass(frozen=True)
class WeighedBranch:
    """A branch with its share of the explanation's ln evidence, epochs included, and the wave (None without epochs)."""

    branch: FittedBranch
    ln_evidence: float
    wave: WaveEvidence | None


@dataclass(frozen=True)
class Weighed:
    """An explanation after everything was taken into account.

    Attributes
    ----------
    fitted : its fit to light and orbit
    branches : those that count; none where it was not sampled or no inner orbit fits
    ln_evidence_error : standard error of :attr:`ln_evidence`
    """

    fitted: Fitted
    branches: tuple[WeighedBranch, ...]
    ln_evidence_error: float

    @property
    def ln_evidence(self) -> float:
        """Ln evidence; -inf where there is none."""
        return float(np.logaddexp.reduce([b.ln_evidence for b in self.branches])) if self.branches else -np.inf

    @property
    def ln_likelihood_max(self) -> float:
        """Ln likelihood of the best case, epochs relative to a single companion's orbit."""
        gains = [b.wave.best_ln_ratio for b in self.branches if b.wave is not None]
        return self.fitted.ln_likelihood_max + max([0.0, *gains])

    @property
    def ln_apsidal(self) -> float | None:
        """What the apsidal motion alone adds to the ln evidence; None without epochs."""
        parts = [b.ln_evidence - b.wave.ln_ratio + b.wave.ln_apsidal for b in self.branches if b.wave is not None]
        return float(np.logaddexp.reduce(parts)) - self.fitted.ln_evidence if parts else None


def look_at(task: Task, name: str) -> Fitted:
    """Return the best case of an explanation."""
    (scenario,) = chosen_scenarios(task.context.system, (name,))
    task.say(scenario.title)
    return fits.look(scenario, task.context, task.observations, task.seed)


def best_single(task: Task, looked: list[Fitted]) -> Weighed:
    """Return the single companion with the largest evidence; only those that could win are sampled."""
    ordered = sorted(looked, key=lambda fitted: fitted.best.chi2)
    best = ordered[0]
    for fitted in ordered:
        if not np.isfinite(fitted.best.chi2):
            break
        if best.sampled:
            kindest = best.ln_likelihood_max - best.ln_evidence - OCCAM_SPREAD
            if fitted.ln_likelihood_max - kindest < best.ln_evidence:
                break
        task.say(f"evidence: {fitted.scenario.title}")
        done = fits.sampled(fitted, ordered[0].best.chi2 + fits.OUT_OF_THE_RACE, task.seed)
        if not best.sampled or done.ln_evidence > best.ln_evidence:
            best = done
    return _without_epochs(best)


def _without_epochs(fitted: Fitted) -> Weighed:
    if not fitted.sampled:
        return Weighed(fitted, (), 0.0)
    branches = [
        WeighedBranch(branch, float(value), None)
        for branch, value in zip(fitted.branches, fitted.branch_ln_evidences(), strict=True)
        if np.isfinite(value)
    ]
    return Weighed(fitted, tuple(branches), fitted.ln_evidence_error)


def weigh_pair(task: Task, fitted: Fitted, best_chi2: float) -> Weighed:
    """Return a pair sampled, where it is still in the race, and set against the epochs."""
    gain = 0.0 if task.epochs is None else 2.0 * task.epochs.ln_gain_max
    task.say(f"evidence: {fitted.scenario.title}")
    fitted = fits.sampled(fitted, best_chi2 + fits.OUT_OF_THE_RACE + gain, task.seed)
    if not fitted.sampled:
        fitted = fits.polished(fitted)
    plain = _without_epochs(fitted)
    if task.epochs is None or not plain.branches:
        return plain
    highest = max(branch.ln_evidence for branch in plain.branches)
    found = []
    for place, branch in enumerate(plain.branches):
        if branch.ln_evidence < highest - BRANCH_SHARE_LN:
            continue
        wave = _wave_of(task, task.epochs, branch.branch, task.generator(place))
        if wave is not None:
            found.append(WeighedBranch(branch.branch, branch.ln_evidence + wave.ln_ratio, wave))
    if not found:
        return Weighed(replace(fitted, closed_because=NO_ROOM), (), 0.0)
    heaviest = max(found, key=lambda branch: branch.ln_evidence)
    spread = 0.0 if heaviest.wave is None else heaviest.wave.error
    return Weighed(fitted, tuple(found), float(np.hypot(fitted.ln_evidence_error, spread)))


def _wave_of(task: Task, epochs: Epochs, branch: FittedBranch, rng: np.random.Generator) -> WaveEvidence | None:
    """The epochs against the posterior of light and orbit; a dark pair's mass ratio is drawn evenly."""
    x = branch.draws(rng)
    pairs = members_of(branch.fit, x, task.outer, rng.random(len(x)))
    return wave_evidence(epochs, pairs, np.full(len(x), 1.0 / len(x)), rng)
