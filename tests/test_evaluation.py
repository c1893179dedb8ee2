"""The run from a system to verdicts: repeatable, independent of what else is run, honest about what it leaves out."""

from __future__ import annotations

from types import SimpleNamespace

import numpy as np
import pytest

from vetter import InputError, Verdicts, evaluate
from vetter.evaluation import chosen_scenarios, prepare, run_scenario
from vetter.inference import optimise
from vetter.inference.importance import Settings
from vetter.results.export import to_json

QUICK = ("neutron_star", "black_hole")


@pytest.fixture(scope="module")
def quick(hidden: SimpleNamespace, cheap: Settings) -> Verdicts:
    return evaluate(hidden.system, QUICK, settings=cheap)


def test_same_seed_same_bytes(hidden: SimpleNamespace, quick: Verdicts, cheap: Settings) -> None:
    assert to_json(evaluate(hidden.system, QUICK, settings=cheap)) == to_json(quick)


def test_another_seed_moves_the_evidence_within_its_error(
    hidden: SimpleNamespace, quick: Verdicts, cheap: Settings
) -> None:
    other = evaluate(hidden.system, QUICK, seed=1, settings=cheap)
    for name in QUICK:
        one, two = quick.scenario(name), other.scenario(name)
        assert one.ln_evidence != two.ln_evidence
        error = np.hypot(one.ln_evidence_error, two.ln_evidence_error)
        assert one.ln_evidence == pytest.approx(two.ln_evidence, abs=5.0 * error)
        # The best fit is polished, so the seed must not show.
        assert one.chi2_min == pytest.approx(two.chi2_min, abs=0.02)


def test_what_else_is_run_changes_nothing_but_the_comparison(quick: Verdicts, hidden: SimpleNamespace) -> None:
    """`hidden` ran four scenarios, `quick` two of them."""
    for name in QUICK:
        alone, among = quick.scenario(name), hidden.verdicts.scenario(name)
        for field in ("ln_likelihood_max", "chi2_min", "ln_evidence", "ln_evidence_error", "companion_mass_msun"):
            assert getattr(alone, field) == getattr(among, field), field
    assert hidden.verdicts.best.name == "main_sequence"


def test_rows_stand_in_the_table_s_order_whatever_was_asked(hidden: SimpleNamespace, cheap: Settings) -> None:
    found = evaluate(hidden.system, QUICK[::-1], settings=cheap)
    assert [row.name for row in found.scenarios] == list(QUICK)


@pytest.mark.parametrize("name", ["inclination", "photometry"])
def test_leaving_out_an_observation_is_a_fit_without_it(name: str, hidden: SimpleNamespace, cheap: Settings) -> None:
    """The drop-one refit starts from the posterior with everything; a run that never had the datum must agree."""
    context, observations = prepare(hidden.system)
    (scenario,) = chosen_scenarios(hidden.system, ["neutron_star"])
    with_it = run_scenario(scenario, context, observations, 0, cheap)
    kept = [observation for observation in observations if observation.name != name]
    never = run_scenario(scenario, context, kept, 0, cheap)
    assert with_it.best.chi2_without[name] == pytest.approx(never.best.chi2, abs=0.05)
    assert never.best.chi2 < with_it.best.chi2


def test_the_best_fit_is_a_minimum(hidden: SimpleNamespace, cheap: Settings) -> None:
    """A hundred random nudges never find a better one."""
    context, observations = prepare(hidden.system)
    (scenario,) = chosen_scenarios(hidden.system, ["main_sequence"])
    best = run_scenario(scenario, context, observations, 0, cheap).best
    rng = np.random.default_rng(5)
    nudged = best.best_x + rng.normal(scale=0.02, size=(100, best.fit.dimension))
    found = best.fit.evaluate(nudged)
    chi2 = np.sum(found.residuals**2, axis=1) + np.sum(found.nuisances**2, axis=1)
    assert np.all(chi2[found.excess <= 0.0] > best.chi2 - 1e-3)
    use = np.ones((1, found.residuals.shape[1]))
    assert optimise.minimise(best.fit, best.best_x[None], use, prior=False).chi2[0] == pytest.approx(
        best.chi2, abs=1e-3
    )


def test_progress_names_every_scenario(hidden: SimpleNamespace, cheap: Settings) -> None:
    said: list[str] = []
    evaluate(hidden.system, ["black_hole"], settings=cheap, progress=said.append)
    assert said == ["Black hole"]


def test_an_unknown_scenario_is_an_input_error(hidden: SimpleNamespace) -> None:
    with pytest.raises(InputError, match="planet"):
        evaluate(hidden.system, ["planet"])


def test_a_closed_scenario_says_why_and_has_no_numbers(dark: SimpleNamespace) -> None:
    closed = dark.verdicts.scenario("white_dwarf")
    assert closed.verdict == "excluded"
    assert "1.38 Msun" in str(closed.closed_because)
    assert closed.sigma is None
    assert closed.ln_evidence is None
    assert closed.posterior_odds_to_best == 0.0


def test_the_truths_of_the_examples(dark: SimpleNamespace, hidden: SimpleNamespace) -> None:
    """Masses written beside the examples (examples/README.md): 3.7 Msun dark, 0.68 Msun K dwarf."""
    assert dark.verdicts.best.name == "black_hole"
    low, _, high = dark.verdicts.best.companion_mass_msun
    assert low - 0.2 < 3.7 < high + 0.2
    low, _, high = hidden.verdicts.scenario("main_sequence").companion_mass_msun
    assert low - 0.02 < 0.68 < high + 0.02
