"""A branch of a scenario set against the observations: the problem that a sampler solves."""

from __future__ import annotations

from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from vetter.inference.problem import Evaluation
from vetter.observations.base import Observation
from vetter.scenarios.base import Branch, Sampled

FloatArray = NDArray[np.float64]


@dataclass(frozen=True)
class Fit:
    """One branch and the observations of one system.

    Attributes
    ----------
    branch : what predicts
    observations : what was measured, in order; their residuals stand side by side
    """

    branch: Branch
    observations: Sequence[Observation]

    @cached_property
    def dimension(self) -> int:
        """Number of coordinates."""
        return len(self.branch.parameters)

    @cached_property
    def ln_norm(self) -> float:
        """Constant part of the ln likelihood, the same for every scenario of one system."""
        return sum(observation.ln_norm for observation in self.observations)

    def sample(self, x: FloatArray) -> Sampled:
        """Return everything the branch says at points ``x`` (n, dimension) in normal coordinates."""
        # Far out in a tail a star may have no finite size or mass; such points are impossible, not worth a warning.
        with np.errstate(all="ignore"):
            return self.branch.sample(x)

    def evaluate(self, x: FloatArray) -> Evaluation:
        """Return residuals and prior weights at points ``x`` (n, dimension)."""
        sampled = self.sample(x)
        with np.errstate(all="ignore"):
            columns = [observation.residuals(sampled.prediction) for observation in self.observations]
            narrowing = sum(observation.ln_narrowing(sampled.prediction) for observation in self.observations)
        excess = np.max([wall.excess for wall in sampled.walls], axis=0)
        return Evaluation(np.concatenate(columns, axis=1), sampled.nuisances, sampled.ln_ratio + narrowing, excess)

    def columns_of(self, x: FloatArray) -> dict[str, slice]:
        """Return which residual columns belong to which observation; ``x`` (1, dimension) is any point."""
        prediction = self.sample(x).prediction
        slices, start = {}, 0
        for observation in self.observations:
            width = observation.residuals(prediction).shape[1]
            slices[observation.name] = slice(start, start + width)
            start += width
        return slices

    def closed_because(self, x: FloatArray) -> str:
        """Return in words the wall that most often stands in the way at points ``x`` (n, dimension)."""
        counts: Counter[str] = Counter()
        undecided = np.ones(x.shape[0], dtype=bool)
        # The first wall a point meets is the reason; later ones may only follow from it.
        for wall in self.sample(x).walls:
            counts[wall.words] += int(np.count_nonzero((wall.excess > 0.0) & undecided))
            undecided &= wall.excess <= 0.0
        words, _ = counts.most_common(1)[0]
        return words
