"""The sampler against evidences that are known exactly, and against numerical integration."""

from __future__ import annotations

import numpy as np
import pytest

from vetter.inference.importance import Settings, sample, try_harder
from vetter.inference.problem import Evaluation, open_ground

SETTINGS = Settings()


@pytest.mark.parametrize("dimension", [4, 7, 10])
@pytest.mark.parametrize(("width", "centre"), [(1e-3, 1.0), (0.3, 0.5), (3.0, -2.0)])
def test_gaussian_evidence_is_exact_within_its_error(gaussian, dimension, width, centre) -> None:
    problem = gaussian(dimension, width, centre)
    found = sample(problem, SETTINGS, 1)
    assert found.ln_evidence == pytest.approx(problem.truth, abs=4.0 * found.ln_evidence_error)
    assert found.ln_evidence_error < 0.05
    assert found.converged


@pytest.mark.parametrize("dimension", [4, 7, 10])
def test_both_modes_are_found_and_weighed(two_modes, dimension) -> None:
    problem = two_modes(dimension)
    found = sample(problem, SETTINGS, 2)
    assert found.ln_evidence == pytest.approx(problem.truth, abs=4.0 * found.ln_evidence_error)
    share = found.weights[found.x[:, 0] > 0.0].sum()
    assert share == pytest.approx(1.0 / (1.0 + np.exp(-1.0)), abs=0.04)


@pytest.mark.parametrize("wall", [0.0, -0.2])
def test_a_wall_through_the_posterior(gaussian, wall) -> None:
    problem = gaussian(7, 0.1, 0.0, wall)
    found = sample(problem, SETTINGS, 3)
    assert found.ln_evidence == pytest.approx(problem.truth, abs=4.0 * found.ln_evidence_error)
    assert np.all(found.x[found.weights > 0.0, 0] <= wall)


def test_a_curved_valley_agrees_with_quadrature(banana) -> None:
    """The chain of coordinates integrates one at a time: ln Z by nested quadrature on a fine grid."""
    grid = np.linspace(-7.0, 7.0, 1401)
    step = grid[1] - grid[0]
    prior = np.exp(-0.5 * grid**2) / np.sqrt(2.0 * np.pi)
    inner = np.ones_like(grid)
    for _ in range(3):
        # Each coordinate follows the square of the one before within 0.1.
        kernel = np.exp(-0.5 * ((grid[None, :] - grid[:, None] ** 2 + 1.0) / 0.1) ** 2)
        inner = kernel @ (prior * inner) * step
    truth = np.log(np.sum(prior * np.exp(-0.5 * ((grid - 0.5) / 0.5) ** 2) * inner) * step)
    found = sample(banana, SETTINGS, 4)
    assert found.ln_evidence == pytest.approx(truth, abs=4.0 * found.ln_evidence_error)


def test_quoted_error_is_the_scatter_over_seeds(two_modes) -> None:
    """With 24 seeds the scatter of a scatter is 15 %: 0.55-1.6 is a four-sigma band about one."""
    problem = two_modes(5)
    runs = [sample(problem, SETTINGS, seed) for seed in range(24)]
    scatter = np.std([run.ln_evidence for run in runs], ddof=1)
    quoted = np.mean([run.ln_evidence_error for run in runs])
    assert 0.55 < scatter / quoted < 1.6


def test_same_seed_same_bytes_and_another_seed_differs(two_modes) -> None:
    problem = two_modes(4)
    first, again, other = (sample(problem, SETTINGS, seed) for seed in (5, 5, 6))
    assert first.x.tobytes() == again.x.tobytes()
    assert first.ln_weights.tobytes() == again.ln_weights.tobytes()
    assert first.ln_evidence == again.ln_evidence != other.ln_evidence


class _Closed:
    """Every point is walled off."""

    dimension, ln_norm = 3, 0.0

    def evaluate(self, x: np.ndarray) -> Evaluation:
        return open_ground(x)._replace(ln_prior_ratio=np.full(len(x), -np.inf), excess=np.ones(len(x)))


def test_a_closed_prior_returns_nothing() -> None:
    assert sample(_Closed(), SETTINGS, 0) is None


class _Horseshoe:
    """Two bent ridges: the second coordinate follows the square of the first, the third its sign."""

    dimension, ln_norm = 6, 0.0

    def evaluate(self, x: np.ndarray) -> Evaluation:
        bend = (x[:, 1] - (x[:, 0] ** 2 - 1.0)) / 0.005
        side = (x[:, 2] - 1.5 * np.sign(x[:, 0])) / 0.05
        return open_ground(np.stack([bend, side], axis=1))


def test_a_second_effort_never_makes_it_worse_and_says_so() -> None:
    hopeless = Settings(start_points=512, rung_points=256, rungs=2, components=1, effective=100, last_points=512)
    first = sample(_Horseshoe(), hopeless, 3)
    assert first is not None
    assert not first.converged
    assert first.efforts == 1
    found = try_harder(_Horseshoe(), first, hopeless, 3)
    assert found.efforts == 2
    assert found.evaluations > 2 * first.evaluations
    assert found.effective_sample_size >= first.effective_sample_size
