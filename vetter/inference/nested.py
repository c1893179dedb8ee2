"""Nested sampling of the same problem with dynesty: slow, independent, for checks and as a last resort."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from vetter.inference.problem import LARGEST_COORDINATE, Problem, ln_likelihood

FloatArray = NDArray[np.float64]

IMPOSSIBLE = -1e300
"""What stands for ln 0: the sampler cannot take minus infinity everywhere."""


class NestedEvidence(NamedTuple):
    """Logarithm of the evidence, its error, and how often the likelihood was evaluated."""

    ln_evidence: float
    ln_evidence_error: float
    evaluations: int


def nested_evidence(problem: Problem, seed: int, live_points: int = 400, walks: int = 40) -> NestedEvidence:
    """Return the evidence by static nested sampling (Skilling 2006; dynesty: Speagle 2020, MNRAS 493, 3132).

    One point at a time, as that sampler works. Raises ImportError, naming the extra, when dynesty is not installed.
    """
    try:
        from dynesty import NestedSampler
    except ImportError as error:
        raise ImportError("nested sampling needs dynesty: install companion-vetter[reference]") from error
    from scipy.special import ndtri

    def to_normal(unit: FloatArray) -> FloatArray:
        return np.asarray(np.clip(ndtri(unit), -LARGEST_COORDINATE, LARGEST_COORDINATE))

    def ln_target(x: FloatArray) -> float:
        found = problem.evaluate(x[None])
        value = float((ln_likelihood(problem, found.residuals) + found.ln_prior_ratio)[0])
        return value if np.isfinite(value) else IMPOSSIBLE

    sampler = NestedSampler(
        ln_target,
        to_normal,
        problem.dimension,
        nlive=live_points,
        rstate=np.random.default_rng(seed),
        sample="rwalk",
        walks=walks,
    )
    sampler.run_nested(dlogz=0.02, print_progress=False)
    results = sampler.results
    return NestedEvidence(float(results.logz[-1]), float(results.logzerr[-1]), int(np.sum(results.ncall)))
