"""No explanation wins by elasticity, and no verdict hangs on the size of the model errors.

Over all systems of this folder, real and invented: how often each scenario fits best and has the largest evidence, and
that none beats the truth by more than ln B = 3. Then the same with the model errors of the magnitudes halved and
doubled. Slow: ten scenarios for every system; run with `-s` to read the lists.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable
from pathlib import Path

import pytest

from vetter import Verdicts, evaluate
from vetter.inference.importance import Settings
from vetter.observations import photometry
from vetter.system.model import System

HERE = Path(__file__).parent
NAMES = sorted(
    p.stem for folder in ("systems", "published", "binaries", "invented") for p in (HERE / folder).glob("*.toml")
)
DECISIVE = 3.0
QUICK = Settings(start_points=2048, rung_points=512, rungs=4, effective=50, last_points=1024, second_effort=False)
# For WASP 0639-32 a white dwarf beats the true K dwarf by ln B 3.17: 1.5 of it is the narrower prior of the white
# dwarf's mass; the rest comes from the mass relation of the seen star, 2.0 scatters (13 %) too heavy here. At a log g
# known to 0.01 that makes the seen star 0.13 mag brighter and leaves no room for the 7 % of V that the K dwarf gives.
BEATEN = pytest.mark.xfail(strict=True, reason="a white dwarf beats the truth by ln B 3.17")
CASES = [pytest.param(name, marks=BEATEN) if name == "wasp_0639_32" else name for name in NAMES]

Answers = Callable[..., Verdicts]


@pytest.mark.slow
@pytest.mark.parametrize("name", CASES)
def test_nothing_beats_the_truth(name: str, verdicts_of: Answers, truth_of: Callable[[str], str]) -> None:
    found, truth = verdicts_of(name), truth_of(name)
    reference = found.scenario(truth).ln_evidence
    for row in found.scenarios:
        if row.ln_evidence is not None:
            assert row.ln_evidence - reference < DECISIVE, row.name


@pytest.mark.slow
def test_how_often_each_fits_best(verdicts_of: Answers, truth_of: Callable[[str], str]) -> None:
    """Elastic is what fits best wherever it is tried: no scenario does so in half of the systems."""
    fits, weighs, true = Counter(), Counter(), Counter()
    for name in NAMES:
        found = verdicts_of(name)
        fits[found.best.name] += 1
        weighs[max(found.scenarios, key=lambda row: row.posterior_odds_to_best).name] += 1
        true[truth_of(name)] += 1
    print(f"\n{len(NAMES)} systems. Fits best: {dict(fits)}. Largest evidence: {dict(weighs)}. Truth: {dict(true)}")
    assert max(fits.values()) < len(NAMES) / 2


@pytest.mark.slow
@pytest.mark.parametrize("name", NAMES)
def test_model_errors_halved_and_doubled(
    name: str,
    monkeypatch: pytest.MonkeyPatch,
    system_of: Callable[[str], System],
    truth_of: Callable[[str], str],
) -> None:
    """Every verdict that changes is printed; the truth is never excluded."""
    usual, original = evaluate(system_of(name), settings=QUICK), photometry.model_errors_mag
    for factor in (0.5, 2.0):
        monkeypatch.setattr(photometry, "model_errors_mag", lambda *args, by=factor: by * original(*args))
        found = evaluate(system_of(name), settings=QUICK)
        for before, after in zip(usual.scenarios, found.scenarios, strict=True):
            if before.verdict != after.verdict:
                print(f"{name}, errors x {factor:g}, {after.name}: {_said(before)} -> {_said(after)}")
        assert found.scenario(truth_of(name)).verdict != "excluded"


def _said(row: object) -> str:
    return row.verdict if row.sigma is None else f"{row.verdict} ({row.sigma:.1f})"
