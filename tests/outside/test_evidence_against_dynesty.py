"""ln evidence of every scenario of four systems against nested sampling of the same likelihood by dynesty.

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
from vetter.system.keys import SCENARIO_NAMES

pytest.importorskip("dynesty")
ROOT = Path(__file__).parent.parent.parent
SYSTEMS = sorted([*(ROOT / "examples").glob("*.toml"), *(ROOT / "tests" / "outside" / "systems").glob("*.toml")])
PAIRS = [(path, name) for path in SYSTEMS for name in SCENARIO_NAMES]


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
@pytest.mark.parametrize(("path", "scenario"), PAIRS, ids=[f"{path.stem}-{name}" for path, name in PAIRS])
def test_evidence_agrees(path: Path, scenario: str) -> None:
    """Forty pairs: two invented systems and two published ones, one with a subgiant, allowed and excluded."""
    measured = read_system(path)
    context, observations = prepare(measured)
    (chosen,) = chosen_scenarios(measured, [scenario])
    for branch in chosen.branches(context):
        fit = Fit(branch, tuple(observations))
        ours = sample(fit, Settings(), 0)
        if ours is None:
            # Every point is walled off: the evidence is zero for either sampler.
            points = np.random.default_rng(1).normal(size=(20000, fit.dimension))
            assert not np.isfinite(fit.evaluate(points).ln_prior_ratio).any()
            continue
        theirs = nested_evidence(fit, seed=0, frame=posterior_frame(ours.x, ours.weights))
        error = np.hypot(ours.ln_evidence_error, theirs.ln_evidence_error)
        print(f"{path.stem} {scenario}: {ours.ln_evidence:.3f} +- {ours.ln_evidence_error:.3f}", *theirs)
        assert ours.ln_evidence == pytest.approx(theirs.ln_evidence, abs=3.0 * error)
