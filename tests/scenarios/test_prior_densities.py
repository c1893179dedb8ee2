"""Priors and guides: they integrate to one, and draws follow the density they claim."""

from __future__ import annotations

from itertools import pairwise

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy import integrate, stats

from vetter.scenarios.priors import Guide, LogUniform, Normal, Parameter, Prior, SpaceDensity, Uniform, score, to_unit

# prior, range to integrate over, the same distribution from scipy
PRIORS = [
    (Uniform(0.15, 1.38), (0.15, 1.38), stats.uniform(0.15, 1.23)),
    (Uniform(-3.0, 0.6), (-3.0, 0.6), stats.uniform(-3.0, 3.6)),
    (LogUniform(0.08, 60.0), (0.08, 60.0), stats.loguniform(0.08, 60.0)),
    (LogUniform(4000.0, 1e5), (4000.0, 1e5), stats.loguniform(4000.0, 1e5)),
    (Normal(0.0, 1.0), (-9.0, 9.0), stats.norm()),
    (Normal(5.0, 0.3), (2.0, 8.0), stats.norm(5.0, 0.3)),
    (SpaceDensity(), (0.0, 60000.0), stats.gamma(3.0, scale=1350.0)),
    (SpaceDensity(300.0), (0.0, 15000.0), stats.gamma(3.0, scale=300.0)),
]
by_name = pytest.mark.parametrize(("prior", "span", "known"), PRIORS, ids=[p.describe("") for p, _, _ in PRIORS])

GUIDES = [
    Guide(5.0, 0.3),
    Guide(0.12, 0.02, 0.0, 1.0),
    Guide(0.0, 0.02, 0.0, 1.0),
    Guide(0.95, 0.4, 0.0, 1.0),
    Guide(5960.0, 80.0, 2300.0, 60000.0),
]


def grid(n: int = 20_000) -> np.ndarray:
    """Standard normal deviates at the middles of n equal shares: a mean over them is an integral."""
    return stats.norm.ppf((np.arange(n) + 0.5) / n)


@by_name
def test_a_prior_integrates_to_one(prior: Prior, span: tuple[float, float], known: object) -> None:
    total, _ = integrate.quad(lambda v: float(np.exp(prior.ln_density(np.array(v)))), *span, limit=200)
    assert total == pytest.approx(1.0, abs=1e-6)


@by_name
def test_a_prior_has_the_density_of_scipy(prior: Prior, span: tuple[float, float], known: object) -> None:
    values = np.linspace(*span, 50)[1:-1]
    np.testing.assert_allclose(prior.ln_density(values), known.logpdf(values), rtol=1e-9, atol=1e-9)


@by_name
def test_draws_follow_the_density(prior: Prior, span: tuple[float, float], known: object) -> None:
    """Kolmogorov-Smirnov at a fixed seed: a p-value below 0.001 would be one in a thousand."""
    draws = prior.from_normal(np.random.default_rng(11).standard_normal(20_000))
    assert stats.kstest(draws, known.cdf).pvalue > 1e-3


@by_name
def test_quantiles_are_exact(prior: Prior, span: tuple[float, float], known: object) -> None:
    x = np.array([-3.0, -1.0, 0.0, 0.5, 2.5])
    np.testing.assert_allclose(known.cdf(prior.from_normal(x)), stats.norm.cdf(x), rtol=1e-9)


@by_name
def test_the_farthest_coordinates_stay_finite(prior: Prior, span: tuple[float, float], known: object) -> None:
    draws = prior.from_normal(np.array([-35.0, 35.0]))
    assert np.isfinite(draws).all()
    assert draws[0] < draws[1]
    assert np.isfinite(prior.ln_density(draws)).all()


@pytest.mark.parametrize(
    ("prior", "outside"),
    [
        (Uniform(0.15, 1.38), [0.149, 1.381, -1.0]),
        (LogUniform(0.08, 60.0), [0.0, -1.0, 60.1, 0.079]),
        (SpaceDensity(), [0.0, -5.0]),
    ],
)
def test_nothing_is_outside_the_range(prior: Prior, outside: list[float]) -> None:
    np.testing.assert_array_equal(prior.ln_density(np.array(outside)), -np.inf)


@pytest.mark.parametrize(
    ("prior", "unit", "words"),
    [
        (Uniform(0.15, 1.38), "Msun", "uniform 0.15 to 1.38 Msun"),
        (LogUniform(4000.0, 1e5), "K", "log-uniform 4000 to 100000 K"),
        (Normal(0.0, 1.0), "", "normal 0 +- 1"),
        (SpaceDensity(), "pc", "d^2 exp(-d/L), L = 1350 pc"),
    ],
)
def test_a_prior_says_what_it_is(prior: Prior, unit: str, words: str) -> None:
    assert prior.describe(unit) == words


@given(st.floats(-40.0, 40.0))
def test_unit_deviates_never_reach_their_ends(x: float) -> None:
    assert 0.0 < to_unit(np.array([x]))[0] < 1.0


@pytest.mark.parametrize("guide", GUIDES, ids=str)
def test_a_guide_integrates_to_one(guide: Guide) -> None:
    low, high = max(guide.low, guide.centre - 3e4 * guide.scale), min(guide.high, guide.centre + 3e4 * guide.scale)
    near = [guide.centre - 5.0 * guide.scale, guide.centre, guide.centre + 5.0 * guide.scale]
    edges = [low, *(min(max(edge, low), high) for edge in near), high]
    pieces = [integrate.quad(lambda v: float(np.exp(guide.ln_density(v))), a, b, limit=400) for a, b in pairwise(edges)]
    total = sum(value for value, _ in pieces)
    assert total == pytest.approx(1.0, abs=1e-5)


@pytest.mark.parametrize("guide", GUIDES, ids=str)
def test_draws_of_a_guide_follow_its_density(guide: Guide) -> None:
    """Against scipy's Student t with two degrees of freedom, cut to the range."""
    student = stats.t(2, guide.centre, guide.scale)
    first, last = student.cdf(guide.low), student.cdf(guide.high)
    draws = guide.from_normal(np.random.default_rng(5).standard_normal(20_000))
    assert (draws >= guide.low).all()
    assert (draws <= guide.high).all()
    assert stats.kstest(draws, lambda v: (student.cdf(v) - first) / (last - first)).pvalue > 1e-3
    np.testing.assert_allclose(
        guide.ln_density(draws[:100]), student.logpdf(draws[:100]) - np.log(last - first), rtol=1e-9, atol=1e-9
    )


def test_a_guide_within_bounds_of_each_sample() -> None:
    """Every sample has its own range: the draws fill it, and the density in it integrates to one."""
    guide = Guide(0.5, 0.1, 0.0, 1.0)
    student = stats.t(2, 0.5, 0.1)
    for low, high in ((0.0, 0.2), (0.45, 0.47), (0.3, 1.0), (0.9, 0.9001)):
        x = grid(4000)
        draws = guide.from_normal_within(x, np.full(4000, low), np.full(4000, high))
        shares = (student.cdf(draws) - student.cdf(low)) / (student.cdf(high) - student.cdf(low))
        np.testing.assert_allclose(shares, stats.norm.cdf(x), atol=1e-9)
        middle = low + (high - low) * (np.arange(4000) + 0.5) / 4000
        density = np.exp(guide.ln_density_within(middle, np.full(4000, low), np.full(4000, high)))
        assert density.mean() * (high - low) == pytest.approx(1.0, abs=1e-4)


@given(st.floats(0.0, 0.98), st.floats(1e-6, 1.0), st.floats(-35.0, 35.0))
def test_a_guide_never_leaves_its_bounds(low: float, width: float, x: float) -> None:
    high = min(low + width, 1.0)
    value = Guide(0.4, 0.01, 0.0, 1.0).from_normal_within(np.array([x]), np.array([low]), np.array([high]))[0]
    assert low <= value <= high


@pytest.mark.parametrize("guide", [None, Guide(0.12, 0.02, 0.0, 1.0), Guide(0.9, 0.2, 0.0, 1.0)])
def test_the_mean_weight_of_draws_is_the_mass_of_the_prior(guide: Guide | None) -> None:
    parameter = Parameter("ebv_mag", "mag", Uniform(0.0, 1.0), guide)
    value, ln_ratio = parameter.draw(grid())
    assert np.exp(ln_ratio).mean() == pytest.approx(1.0, abs=2e-3)
    assert np.mean(np.exp(ln_ratio) * value) == pytest.approx(0.5, abs=2e-3)


def test_a_guide_beyond_the_prior_reaches_only_part_of_it() -> None:
    """A range half outside the prior: the weights carry the half that is inside."""
    _, ln_ratio = Parameter("x", "", Uniform(0.0, 1.0), Guide(0.7, 0.3, 0.5, 2.0)).draw(grid())
    assert np.exp(ln_ratio).mean() == pytest.approx(0.5, abs=2e-3)


def test_a_score_counts_as_a_datum() -> None:
    found = score("mass_score")
    assert found.counts
    assert (found.prior, found.guide) == (Normal(0.0, 1.0), None)
    value, ln_ratio = found.draw(np.array([-2.0, 30.0]))
    np.testing.assert_array_equal(value, [-2.0, 30.0])
    np.testing.assert_array_equal(ln_ratio, 0.0)
