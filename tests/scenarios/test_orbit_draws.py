"""Masses drawn from the velocities, against masses drawn from the priors and kept when they give those velocities."""

from __future__ import annotations

import numpy as np
import pytest
from scipy import stats

from vetter.physics import kepler
from vetter.scenarios.orbit import K1_REACH_SIGMA, OrbitDraws
from vetter.scenarios.priors import LogUniform, Uniform
from vetter.system.model import Measurement, Orbit

N = 100_000
MASS_MSUN = 1.0
K1, K1_ERROR = 30.0, 3.0

# main sequence, white dwarf, neutron star
MASS_PRIORS = [LogUniform(0.08, 60.0), Uniform(0.15, 1.38), Uniform(1.1, 2.3)]
INCLINATIONS = [None, Measurement(70.0, 6.0), Measurement(140.0, 15.0)]


def orbit(inclination_deg: Measurement | None = None, k1: bool = True) -> Orbit:
    return Orbit(
        Measurement(100.0, 0.1),
        Measurement(0.2, 0.01),
        k1_km_s=Measurement(K1, K1_ERROR) if k1 else None,
        inclination_deg=inclination_deg,
    )


def draws(prior: LogUniform | Uniform, inclination_deg: Measurement | None, k1: bool = True) -> OrbitDraws:
    return OrbitDraws(orbit(inclination_deg, k1), K1_ERROR if k1 else 0.0, inclination_deg, prior)


def likelihood(mass_msun: np.ndarray, cos_i: np.ndarray, inclination_deg: Measurement | None) -> np.ndarray:
    """Gaussian in K1, and in the folded inclination where it was measured."""
    k1 = kepler.semi_amplitude_km_s(MASS_MSUN, mass_msun, 100.0, np.sqrt(1.0 - cos_i**2), 0.2)
    value = stats.norm.pdf(k1, K1, K1_ERROR)
    if inclination_deg is None:
        return value
    folded = min(inclination_deg.value, 180.0 - inclination_deg.value)
    return value * stats.norm.pdf(np.degrees(np.arccos(cos_i)), folded, inclination_deg.error)


def weighted_mean(values: np.ndarray, weights: np.ndarray) -> tuple[float, float]:
    """Mean of weighted draws and its standard error."""
    mean = np.average(values, weights=weights)
    return float(mean), float(np.sqrt(np.sum(weights**2 * (values - mean) ** 2)) / weights.sum())


@pytest.mark.parametrize("inclination_deg", INCLINATIONS, ids=str)
@pytest.mark.parametrize("prior", MASS_PRIORS, ids=str)
def test_draws_from_the_velocities_equal_rejection_from_the_priors(
    prior: LogUniform | Uniform, inclination_deg: Measurement | None
) -> None:
    """Same mean mass, same mean cos i and same evidence within four standard errors of both."""
    rng = np.random.default_rng(17)
    made = draws(prior, inclination_deg)
    velocity = made.velocity(rng.standard_normal(N))
    found = made.companion_from_velocity(velocity, rng.standard_normal(N), np.full(N, MASS_MSUN))
    reachable = velocity.mass_max_msun > MASS_MSUN
    ln_weights = np.where(reachable, found.ln_ratio + velocity.ln_ratio, -np.inf)
    weights = np.exp(ln_weights) * likelihood(found.mass_msun, found.cos_inclination, inclination_deg)

    mass, cos_i = prior.from_normal(rng.standard_normal(N)), rng.uniform(size=N)
    plain = likelihood(mass, cos_i, inclination_deg)
    kept = rng.uniform(size=N) < plain / plain.max()
    assert kept.sum() > 300

    for values, direct in ((found.mass_msun, mass), (found.cos_inclination, cos_i)):
        mean, error = weighted_mean(values, weights)
        rejected = direct[kept]
        assert mean == pytest.approx(rejected.mean(), abs=4.0 * np.hypot(error, rejected.std() / np.sqrt(kept.sum())))
    evidence_error = np.hypot(weights.std(), plain.std()) / np.sqrt(N)
    assert weights.mean() == pytest.approx(plain.mean(), abs=4.0 * evidence_error)


def test_draws_give_exactly_the_velocity_that_was_drawn() -> None:
    rng = np.random.default_rng(1)
    made = draws(LogUniform(0.08, 60.0), None)
    velocity = made.velocity(rng.standard_normal(1000))
    found = made.companion_from_velocity(velocity, rng.standard_normal(1000), np.full(1000, MASS_MSUN))
    sin_i = np.sqrt(1.0 - found.cos_inclination**2)
    k1 = kepler.semi_amplitude_km_s(MASS_MSUN, found.mass_msun, 100.0, sin_i, 0.2)
    np.testing.assert_allclose(k1, velocity.k1_km_s, rtol=1e-9)
    np.testing.assert_allclose(velocity.f_msun, kepler.mass_function_msun(100.0, velocity.k1_km_s, 0.2))


def test_masses_stay_in_the_range_of_the_prior() -> None:
    made = draws(Uniform(1.1, 2.3), None)
    x = np.linspace(-35.0, 35.0, 400)
    velocity = made.velocity(np.zeros(400))
    found = made.companion_from_velocity(velocity, x, np.full(400, MASS_MSUN))
    assert (found.mass_msun >= 1.1).all()
    assert (found.mass_msun <= 2.3).all()
    assert np.isfinite(found.ln_ratio).all()


def test_the_heaviest_seen_star_needs_the_heaviest_companion_edge_on() -> None:
    made = draws(Uniform(0.15, 1.38), None)
    velocity = made.velocity(np.array([0.0]))
    np.testing.assert_allclose(velocity.k1_km_s, K1)
    least = kepler.companion_mass_min_msun(velocity.f_msun, velocity.mass_max_msun)
    np.testing.assert_allclose(least, 1.38, rtol=1e-12)


def test_k1_is_explored_six_sigma_and_no_farther() -> None:
    velocity = draws(LogUniform(0.08, 60.0), None).velocity(np.array([-35.0, 35.0]))
    reach = K1_REACH_SIGMA * K1_ERROR / K1
    np.testing.assert_allclose(np.log(velocity.k1_km_s / K1), [-reach, reach], rtol=1e-6)


@pytest.mark.parametrize("inclination_deg", INCLINATIONS, ids=str)
def test_without_velocities_the_mass_is_that_of_the_prior(inclination_deg: Measurement | None) -> None:
    rng = np.random.default_rng(2)
    prior = LogUniform(0.08, 60.0)
    made = draws(prior, inclination_deg, k1=False)
    assert made.velocity(np.zeros(3)) is None
    found = made.companion_from_prior(rng.standard_normal(N), rng.standard_normal(N))
    assert stats.kstest(found.mass_msun, stats.loguniform(0.08, 60.0).cdf).pvalue > 1e-3
    weights = np.exp(found.ln_ratio)
    error = weights.std() / np.sqrt(N)
    assert weights.mean() == pytest.approx(1.0, abs=4.0 * error + 1e-12)
    mean, error = weighted_mean(found.cos_inclination, weights)
    assert mean == pytest.approx(0.5, abs=4.0 * error)


def test_the_inclination_is_guided_by_its_measurement() -> None:
    """Half of the draws within 0.816 scales: the median of |t| with two degrees of freedom."""
    made = draws(LogUniform(0.08, 60.0), Measurement(110.0, 2.0), k1=False)
    found = made.companion_from_prior(np.zeros(5001), np.linspace(-3.0, 3.0, 5001))
    centre, scale = np.cos(np.radians(70.0)), np.sin(np.radians(70.0)) * np.radians(2.0)
    inside = np.abs(found.cos_inclination - centre) < stats.t(2).ppf(0.75) * scale
    weights = stats.norm.pdf(np.linspace(-3.0, 3.0, 5001))
    assert np.average(inside, weights=weights) == pytest.approx(0.5, abs=0.01)


def test_parameters_are_printed_with_their_priors() -> None:
    mass, inclination = draws(LogUniform(2.3, 150.0), None).parameters()
    assert (mass.name, mass.prior.describe(mass.unit)) == ("companion_mass_msun", "log-uniform 2.3 to 150 Msun")
    assert (inclination.name, inclination.guide) == ("cos_inclination", None)
    _, guided = draws(LogUniform(2.3, 150.0), Measurement(60.0, 1.0)).parameters()
    assert guided.guide.centre == pytest.approx(0.5)


@pytest.mark.parametrize("inclination_deg", [0.0, 180.0])
def test_a_face_on_orbit_keeps_a_width(inclination_deg: float) -> None:
    """There cos i changes with the square of the error only."""
    _, inclination = draws(LogUniform(0.08, 60.0), Measurement(inclination_deg, 1.0)).parameters()
    assert inclination.guide.scale == pytest.approx(0.5 * np.radians(1.0) ** 2, rel=1e-6)
