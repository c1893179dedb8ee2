"""The t mixture against scipy's multivariate t, and its fit against known components."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.stats import multivariate_t

from vetter.inference import student


def _mixture() -> student.StudentMixture:
    covariance = np.array([[[1.0, 0.3], [0.3, 0.5]], [[0.2, 0.0], [0.0, 2.0]]])
    return student.from_moments(np.array([0.7, 0.3]), np.array([[0.0, 0.0], [5.0, -3.0]]), covariance)


def test_density_equals_scipy() -> None:
    mixture = _mixture()
    x = np.random.default_rng(0).normal(size=(50, 2)) * 3.0
    parts = [
        share * multivariate_t(mean, factor @ factor.T, df=5).pdf(x)
        for share, mean, factor in zip(mixture.share, mixture.mean, mixture.factor, strict=True)
    ]
    np.testing.assert_allclose(mixture.ln_density(x), np.log(np.sum(parts, axis=0)), rtol=1e-10)


def test_draws_follow_the_density() -> None:
    """The mean of (another density / density) over draws is one: the t with wider scale as that other density."""
    mixture = _mixture()
    x = mixture.draw(200000, np.random.default_rng(1))
    other = multivariate_t([1.0, -1.0], [[4.0, 0.0], [0.0, 4.0]], df=8)
    ratio = np.exp(other.logpdf(x) - mixture.ln_density(x))
    assert ratio.mean() == pytest.approx(1.0, abs=4.0 * ratio.std() / np.sqrt(ratio.size))


def test_fit_recovers_components() -> None:
    """The fit sees MOST_POINTS of the points: tolerances are four standard errors for the points in each component."""
    rng = np.random.default_rng(2)
    x = _mixture().draw(20000, rng)
    fitted = student.fit(x, np.full(len(x), 1.0 / len(x)), 2, rng)
    order = np.argsort(-fitted.share)
    seen = student.MOST_POINTS * np.array([0.7, 0.3])
    np.testing.assert_allclose(fitted.share[order], [0.7, 0.3], atol=4.0 * np.sqrt(0.21 / student.MOST_POINTS))
    scale = [np.array([[1.0, 0.3], [0.3, 0.5]]), np.array([[0.2, 0.0], [0.0, 2.0]])]
    for place, (count, truth, centre) in enumerate(zip(seen, scale, [[0.0, 0.0], [5.0, -3.0]], strict=True)):
        # The variance of a t density with five degrees of freedom is 5/3 of its scale, its kurtosis excess is 6.
        error = 4.0 * np.sqrt(np.diagonal(truth) * 5.0 / 3.0 / count)
        assert np.all(np.abs(fitted.mean[order[place]] - centre) < error)
        found = fitted.factor[order[place]] @ fitted.factor[order[place]].T
        largest = np.sqrt(np.outer(np.diagonal(truth), np.diagonal(truth)))
        assert np.all(np.abs(found - truth) < 4.0 * largest * np.sqrt(8.0 / count))


def test_wide_component_is_twice_as_wide() -> None:
    rng = np.random.default_rng(3)
    x = rng.normal(size=(5000, 3))
    weights = np.full(5000, 1.0 / 5000)
    wide = student.with_wide_component(student.fit(x, weights, 1, rng), x, weights)
    assert wide.share[-1] == pytest.approx(student.WIDE_SHARE)
    np.testing.assert_allclose(np.diagonal(wide.factor[-1]), 2.0, rtol=0.05)
