"""ln evidence of every scenario of both examples against nested sampling of the same likelihood by dynesty.

dynesty (Speagle 2020, MNRAS 493, 3132) is a general-purpose library and shares nothing with our sampler but the
likelihood. Run with `python -m pytest -m slow tests/outside/test_evidence_against_dynesty.py`.
"""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from vetter import read_system
from vetter.evaluation import chosen_scenarios, prepare
from vetter.inference.importance import Settings, sample
from vetter.inference.nested import Frame, nested_evidence, posterior_frame
from vetter.inference.problem import Evaluation, open_ground
from vetter.scenarios.fit import Fit

pytest.importorskip("dynesty")
EXAMPLES = Path(__file__).parent.parent.parent / "examples"
PAIRS = [
    (path.stem, name)
    for path in sorted(EXAMPLES.glob("*.toml"))
    for name in ("main_sequence", "white_dwarf", "neutron_star", "black_hole")
]


class _Gaussian:
    """Three coordinates measured at 0.5 with error 0.2: the evidence is elementary."""

    dimension, ln_norm = 3, 0.0

    def evaluate(self, x: np.ndarray) -> Evaluation:
        return open_ground((x - 0.5) / 0.2)


def test_nested_sampling_knows_an_elementary_evidence() -> None:
    truth = 3 * (np.log(0.2 / np.sqrt(1.04)) - 0.5 * 0.25 / 1.04)
    found = nested_evidence(_Gaussian(), seed=1, live_points=150)
    assert found.ln_evidence == pytest.approx(truth, abs=4.0 * found.ln_evidence_error)


def test_the_frame_does_not_change_the_answer() -> None:
    truth = 3 * (np.log(0.2 / np.sqrt(1.04)) - 0.5 * 0.25 / 1.04)
    found = nested_evidence(_Gaussian(), seed=2, frame=Frame(np.full(3, 0.3), np.full(3, 0.7)), live_points=150)
    assert found.ln_evidence == pytest.approx(truth, abs=4.0 * found.ln_evidence_error)


@pytest.mark.slow
@pytest.mark.parametrize(("system", "scenario"), PAIRS)
def test_evidence_agrees(system: str, scenario: str) -> None:
    measured = read_system(EXAMPLES / f"{system}.toml")
    context, observations = prepare(measured)
    (chosen,) = chosen_scenarios(measured, [scenario])
    for branch in chosen.branches(context):
        fit = Fit(branch, tuple(observations))
        ours = sample(fit, Settings(), 0)
        if ours is None:
            # Every point is walled off: the evidence is zero for either sampler.
            assert not np.isfinite(fit.evaluate(np.random.default_rng(1).normal(size=(20000, fit.dimension)))[2]).any()
            continue
        theirs = nested_evidence(fit, seed=0, frame=posterior_frame(ours.x, ours.weights))
        error = np.hypot(ours.ln_evidence_error, theirs.ln_evidence_error)
        assert ours.ln_evidence == pytest.approx(theirs.ln_evidence, abs=3.0 * error)
