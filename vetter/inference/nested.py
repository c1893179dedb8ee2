"""Nested sampling of the same problem with dynesty: slow, independent, for checks and as a last resort."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from vetter.inference.lanes import Lanes
from vetter.inference.problem import LARGEST_COORDINATE, Problem, ln_likelihood

FloatArray = NDArray[np.float64]

IMPOSSIBLE = -1e300
"""What stands for ln 0: the sampler cannot take minus infinity everywhere."""


FRAME_STRETCH = 4.0
"""The frame reaches this many standard deviations of the expected posterior: wide enough to hold all that matters."""


LANES = 50
"""Walks side by side: few enough beside the live points that hardly any is in vain."""


class Frame(NamedTuple):
    """Where nested sampling looks first: centre and width (d,) of a Gaussian that its unit cube is mapped to.

    It changes the work, not the answer, for the ratio to the prior is carried along. The prior itself is the default;
    an excluded scenario's posterior lies so far out in it that a unit cube has no digits left there.
    """

    centre: FloatArray
    width: FloatArray


class NestedEvidence(NamedTuple):
    """Logarithm of the evidence, its error, and how often the likelihood was evaluated."""

    ln_evidence: float
    ln_evidence_error: float
    evaluations: int


def posterior_frame(x: FloatArray, weights: FloatArray) -> Frame:
    """Return a frame around weighted points (n, d) with weights (n,) that sum to one."""
    centre = weights @ x
    return Frame(centre, FRAME_STRETCH * np.sqrt(weights @ (x - centre) ** 2) + 1e-12)


def nested_evidence(
    problem: Problem, seed: int, frame: Frame | None = None, live_points: int = 400, walks: int = 60
) -> NestedEvidence:
    """Return the evidence by static nested sampling (Skilling 2006; dynesty: Speagle 2020, MNRAS 493, 3132).

    dynesty walks one point at a time; ``LANES`` walks run side by side and their points are evaluated together, which
    is all that is ours. With 25 steps a walk still remembers where it began, and the evidence of our problems came out
    0.2 to 0.8 too large; 60 to 80 cured it. Raises ImportError, naming the extra, when dynesty is not installed.
    """
    try:
        from dynesty import NestedSampler
    except ImportError as error:
        raise ImportError("nested sampling needs dynesty: install companion-vetter[reference]") from error
    from scipy.special import ndtri

    chosen = frame or Frame(np.zeros(problem.dimension), np.ones(problem.dimension))

    def to_normal(unit: FloatArray) -> FloatArray:
        return np.asarray(chosen.centre + chosen.width * ndtri(unit))

    def ln_target(x: FloatArray) -> FloatArray:
        found = problem.evaluate(np.clip(x, -LARGEST_COORDINATE, LARGEST_COORDINATE))
        score = (x - chosen.centre) / chosen.width
        ln_prior_over_frame = 0.5 * np.sum(score**2 - x**2, axis=1) + np.sum(np.log(chosen.width))
        value = ln_likelihood(problem, found.residuals) + found.ln_prior_ratio + ln_prior_over_frame
        inside = np.abs(x).max(axis=1) <= LARGEST_COORDINATE
        return np.where(inside & np.isfinite(value), value, IMPOSSIBLE)

    lanes = Lanes(ln_target, LANES)
    sampler = NestedSampler(
        lanes.value,
        to_normal,
        problem.dimension,
        nlive=live_points,
        rstate=np.random.default_rng(seed),
        sample="rwalk",
        walks=walks,
        pool=lanes,
        queue_size=LANES,
        use_pool={"prior_transform": False, "update_bound": False},
    )
    sampler.run_nested(dlogz=0.02, print_progress=False)
    results = sampler.results
    return NestedEvidence(float(results.logz[-1]), float(results.logzerr[-1]), int(np.sum(results.ncall)))
