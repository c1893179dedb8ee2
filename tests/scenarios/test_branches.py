"""A branch from coordinates to predictions: light, orbit, prior mass and the walls, each against a direct sum."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import numpy as np
import pytest
from scipy import stats

from vetter.evaluation import prepare
from vetter.inference.importance import prior_points
from vetter.light.engine import Component
from vetter.physics import kepler, roche
from vetter.scenarios.base import Branch, Scenario, registered
from vetter.scenarios.context import build_context
from vetter.scenarios.fit import Fit
from vetter.scenarios.orbit import K1_REACH_SIGMA
from vetter.system.model import Assumptions, Distance, Measurement, Primary, System

N = 4096

WithOrbit = Callable[..., System]


def branch_of(name: str, system: System, place: int = 0) -> Branch:
    return registered()[name].branches(build_context(system))[place]


def points(branch: Branch, n: int = N) -> np.ndarray:
    return prior_points(len(branch.parameters), n, np.random.default_rng(3))


def closed(name: str, system: System, share: float = 1.0) -> str:
    """The wall that closes a scenario, in words; fails when less than this share of the points is closed."""
    context, observations = prepare(system)
    fit = Fit(registered()[name].branches(context)[0], tuple(observations))
    x = prior_points(fit.dimension, N, np.random.default_rng(3))
    assert np.mean(fit.evaluate(x).ln_prior_ratio == -np.inf) >= share
    return fit.closed_because(x)


@pytest.fixture(scope="module")
def every_branch(plain: System) -> list[Branch]:
    context = build_context(plain)
    return [branch for scenario in registered().values() for branch in scenario.branches(context)]


def test_every_branch_predicts_for_every_point(every_branch: list[Branch]) -> None:
    for branch in every_branch:
        sampled = branch.sample(points(branch, 256))
        found = sampled.prediction
        assert found.magnitudes.shape == (256, 3), branch.scenario.name
        assert sampled.ln_ratio.shape == found.k1_km_s.shape == (256,)
        assert np.isfinite(found.k1_km_s).all()
        assert (found.optical_ratio >= 0.0).all()
        assert sampled.nuisances.shape == (256, sum(parameter.counts for parameter in branch.parameters))


def test_a_point_is_closed_exactly_where_some_wall_is(every_branch: list[Branch]) -> None:
    for branch in every_branch:
        sampled = branch.sample(points(branch, 1024))
        behind = np.any([wall.excess > 0.0 for wall in sampled.walls], axis=0)
        np.testing.assert_array_equal(sampled.ln_ratio == -np.inf, behind)
        assert not np.isnan(sampled.ln_ratio).any()
        assert all(wall.words for wall in sampled.walls)


def test_points_are_independent_of_their_neighbours(every_branch: list[Branch]) -> None:
    """The same point alone and in a crowd: nothing leaks between samples."""
    for branch in every_branch:
        x = points(branch, 64)
        crowd, alone = branch.sample(x).prediction, branch.sample(x[7:8]).prediction
        np.testing.assert_allclose(crowd.magnitudes[7], alone.magnitudes[0], rtol=1e-12)
        np.testing.assert_allclose(crowd.k1_km_s[7], alone.k1_km_s[0], rtol=1e-12)


def test_parameters_have_names_of_their_own_and_printed_priors(every_branch: list[Branch]) -> None:
    for branch in every_branch:
        names = [parameter.name for parameter in branch.parameters]
        assert len(set(names)) == len(names)
        assert names[-2:] == ["companion_mass_msun", "cos_inclination"]
        assert names[-3] == branch.seen.mass_parameter.name
        assert all(parameter.prior.describe(parameter.unit) for parameter in branch.parameters)


@pytest.mark.parametrize("name", ["white_dwarf", "main_sequence", "black_hole"])
def test_light_adds_up(name: str, with_orbit: WithOrbit) -> None:
    """The total is the sum of fluxes of the seen star and the companion, each computed here."""
    branch = branch_of(name, with_orbit(photocentre_mas=Measurement(2.0, 0.1), photocentre_band="GAIA/GAIA3.G"))
    engine = branch.context.engine
    x = points(branch, 512)
    sampled = branch.sample(x)
    v = sampled.values
    dust, distance, feh = 3.1 * v["ebv_mag"], v["distance_pc"], v["feh"]
    seen = engine.magnitudes(Component("star", v["teff1_k"], v["logg1"], feh, v["r1_rsun"]), distance, dust)
    ratio = np.zeros(seen.shape)
    if name != "black_hole":
        kind = "white_dwarf" if name == "white_dwarf" else "star"
        logg = 4.438067 + np.log10(v["m2_msun"] / v["r2_rsun"] ** 2)
        other = engine.magnitudes(Component(kind, v["teff2_k"], logg, feh, v["r2_rsun"]), distance, dust)
        ratio = 10.0 ** (0.4 * (seen - other))
    total = seen - 2.5 * np.log10(1.0 + ratio)
    found = sampled.prediction
    np.testing.assert_allclose(found.magnitudes, total[:, :3], atol=1e-4)
    np.testing.assert_allclose(found.optical_ratio, ratio[:, branch.context.optical_column], rtol=1e-3)
    # The photocentre swings by the mass lever less the light lever (Shahaf et al. 2019, MNRAS 487, 5610).
    m1, m2, s = v["m1_msun"], v["m2_msun"], ratio[:, engine.bands.index("GAIA/GAIA3.G")]
    axis_au = np.cbrt((m1 + m2) * (100.0 / 365.25) ** 2)
    lever = np.abs(m2 / (m1 + m2) - s / (1.0 + s))
    np.testing.assert_allclose(found.photocentre_mas, 1000.0 / distance * axis_au * lever, rtol=2e-3, atol=1e-5)


def test_a_dark_companion_has_no_temperature(plain: System) -> None:
    branch = branch_of("black_hole", plain)
    found = branch.sample(points(branch, 64)).prediction
    assert np.isnan(found.companion_teff_k).all()
    np.testing.assert_array_equal(found.window_ratio, 0.0)


def test_the_brighter_of_a_pair_gives_the_companion_its_temperature(plain: System) -> None:
    """Brighter between 500 and 600 nm: not always the hotter one, where one is about to leave the main sequence."""
    branch = branch_of("inner_pair", plain)
    sampled = branch.sample(points(branch, 512))
    v, engine, column = sampled.values, branch.context.engine, branch.context.optical_column

    def optical_mag(name: str) -> np.ndarray:
        star = Component("star", v[f"teff{name}_k"], np.full(512, 4.3), np.zeros(512), v[f"r{name}_rsun"])
        return engine.magnitudes(star, 10.0, 0.0)[:, column]

    first, second = optical_mag("2a"), optical_mag("2b")
    # The gravity was not reported: stars nearly as bright as each other decide nothing.
    clear = np.abs(first - second) > 0.1
    brighter = np.where(first < second, v["teff2a_k"], v["teff2b_k"])
    np.testing.assert_allclose(sampled.prediction.companion_teff_k[clear], brighter[clear])
    assert clear.sum() > 300


def test_of_a_star_and_a_white_dwarf_either_may_be_the_brighter(plain: System) -> None:
    branch = branch_of("inner_pair_with_white_dwarf", plain)
    sampled = branch.sample(points(branch))
    v, found = sampled.values, sampled.prediction.companion_teff_k
    first, second = found == v["teff2a_k"], found == v["teff2b_k"]
    assert (first | second).all()
    assert first.any()
    assert second.any()
    assert v["teff2b_k"][second].mean() > v["teff2b_k"].mean(), "a white dwarf outshines a star only when it is hot"


def test_inclination_mass_and_velocity_agree(every_branch: list[Branch]) -> None:
    """Kepler's third law by another road: from the semi-major axis, not from the mass function."""
    for branch in every_branch:
        v = branch.sample(points(branch, 256)).values
        axis_km = kepler.separation_au(v["m1_msun"] + v["m2_msun"], 100.0) * 149597870.7
        share = v["m2_msun"] / (v["m1_msun"] + v["m2_msun"])
        expected = 2.0 * np.pi * axis_km * share * np.sin(np.radians(v["inclination_deg"])) / (100.0 * 86400.0)
        np.testing.assert_allclose(v["k1_km_s"], expected, rtol=1e-6)


def bare_giant(with_orbit: WithOrbit, k1: Measurement | None) -> System:
    """A system whose spectrum and distance are unknown: nothing but K1 guides the draws."""
    system = with_orbit(k1_km_s=k1, photocentre_mas=Measurement(2.0, 0.1), photocentre_band="GAIA/GAIA3.G")
    return replace(system, primary=Primary(), distance=Distance(parallax_mas=Measurement(0.1, 0.1)), extinction=None)


@pytest.mark.parametrize("k1", [None, Measurement(30.0, 3.0), Measurement(5.0, 1.0)], ids=str)
@pytest.mark.parametrize("name", ["black_hole", "neutron_star"])
def test_the_mean_weight_is_the_prior_mass(name: str, k1: Measurement | None, with_orbit: WithOrbit) -> None:
    """Share of plain prior draws on open ground with K1 within reach, against the mean of exp(ln_ratio)."""
    branch = branch_of(name, bare_giant(with_orbit, k1), place=2)
    assert branch.seen.name == "giant"
    n = 60_000
    rng = np.random.default_rng(9)
    weights = np.exp(Fit(branch, ()).sample(rng.standard_normal((n, len(branch.parameters)))).ln_ratio)

    logg = dict(zip([p.name for p in branch.free_parameters], branch.free_parameters, strict=True))["logg"]
    gravity = 10.0 ** (logg.prior.from_normal(rng.standard_normal(n)) - 4.438067)
    m1 = stats.loguniform(0.7, 16.0).rvs(n, random_state=rng)
    m2 = branch.orbit_draws.prior.from_normal(rng.standard_normal(n))
    k1_drawn = kepler.semi_amplitude_km_s(m1, m2, 100.0, np.sqrt(1.0 - rng.uniform(size=n) ** 2))
    open_ground = np.sqrt(m1 / gravity) < roche.roche_lobe_rsun(m1, m2, kepler.separation_rsun(m1 + m2, 100.0))
    if k1 is not None:
        relative = branch.orbit_draws.k1_error_km_s / k1.value
        open_ground &= np.abs(np.log(k1_drawn / k1.value)) < K1_REACH_SIGMA * relative
    error = np.hypot(weights.std(), open_ground.std()) / np.sqrt(n)
    assert weights.mean() == pytest.approx(open_ground.mean(), abs=4.0 * error)
    assert error < 0.1 * open_ground.mean(), "the comparison would say nothing"


@pytest.mark.parametrize(
    ("k1_km_s", "words"),
    [
        (60.0, "the orbit needs more than 1.38 Msun at any inclination, whatever the mass of the seen star"),
        (46.0, "the orbit needs more than 1.38 Msun at any inclination, for any ordinary mass of the seen star"),
    ],
)
def test_a_large_mass_function_closes_the_white_dwarf(k1_km_s: float, words: str, with_orbit: WithOrbit) -> None:
    """Above 1.38 Msun alone; above 1.38^3 / (1.38 + 0.3)^2 = 0.93 Msun with any star of 0.3 Msun or more."""
    system = with_orbit(k1_km_s=Measurement(k1_km_s, 0.1))
    f_msun = float(kepler.mass_function_msun(100.0, k1_km_s))
    assert (f_msun > 1.38) == ("whatever" in words)
    assert closed("white_dwarf", system) == words


def test_the_wall_moves_with_the_assumption(with_orbit: WithOrbit) -> None:
    system = replace(
        with_orbit(k1_km_s=Measurement(60.0, 0.1)),
        assumptions=Assumptions(white_dwarf_max_msun=1.30, neutron_star_max_msun=2.0, neutron_star_min_msun=1.2),
    )
    assert closed("white_dwarf", system).startswith("the orbit needs more than 1.3 Msun at any inclination")
    assert closed("neutron_star", system).startswith("the orbit needs more than 2 Msun at any inclination")


def test_a_seen_star_too_large_for_its_orbit(with_orbit: WithOrbit) -> None:
    """A giant of 27 solar radii cannot turn around anything in two days."""
    giant = Primary(Measurement(4500.0, 50.0), Measurement(1.5, 0.05))
    system = replace(with_orbit(period_d=Measurement(2.0, 0.0), k1_km_s=Measurement(80.0, 0.5)), primary=giant)
    assert closed("black_hole", system, 0.98) == "the seen star would overflow its Roche lobe"


def test_a_companion_too_large_for_its_orbit(with_orbit: WithOrbit) -> None:
    """A red dwarf in a quarter of a day around a main-sequence star of at least nine solar masses."""
    system = replace(
        with_orbit(period_d=Measurement(0.25, 0.0), k1_km_s=Measurement(800.0, 1.0)),
        primary=Primary(Measurement(4600.0, 50.0), Measurement(4.7, 0.02)),
        assumptions=Assumptions(companion_to_seen_light_max=1e9),
    )
    assert closed("main_sequence", system, 0.98) == "the companion would overflow its Roche lobe"


def test_a_companion_that_outshines_the_seen_star(with_orbit: WithOrbit) -> None:
    system = replace(
        with_orbit(k1_km_s=Measurement(90.0, 0.5)), primary=Primary(Measurement(4600.0, 50.0), Measurement(4.65, 0.02))
    )
    words = "the companion would outshine the seen star more than 3 times in the optical"
    assert closed("main_sequence", system) == words


@pytest.mark.parametrize("largest", [0.5, 3.0])
def test_the_outshining_wall_stands_where_it_was_asked_for(largest: float, plain: System) -> None:
    branch = branch_of("main_sequence", replace(plain, assumptions=Assumptions(companion_to_seen_light_max=largest)))
    sampled = branch.sample(points(branch))
    (wall,) = (wall for wall in sampled.walls if "outshine" in wall.words)
    np.testing.assert_array_equal(wall.excess > 0.0, sampled.prediction.optical_ratio > largest)
    assert (wall.excess > 0.0).any()
    assert (wall.excess < 0.0).any()


def test_the_roche_walls_are_those_at_periastron(with_orbit: WithOrbit) -> None:
    """Eggleton 1983 (ApJ 268, 368), a (1 - e), for both stars."""
    system = with_orbit(period_d=Measurement(1.0, 0.0), eccentricity=Measurement(0.3, 0.0), k1_km_s=Measurement(150, 2))
    branch = branch_of("main_sequence", system)
    sampled = branch.sample(points(branch))
    v = sampled.values
    axis = kepler.separation_rsun(v["m1_msun"] + v["m2_msun"], 1.0) * 0.7
    for words, mass, other, radius in (
        ("the seen star would overflow its Roche lobe", "m1_msun", "m2_msun", "r1_rsun"),
        ("the companion would overflow its Roche lobe", "m2_msun", "m1_msun", "r2_rsun"),
    ):
        (wall,) = (wall for wall in sampled.walls if wall.words == words)
        third = np.cbrt(v[mass] / v[other])
        lobe = axis * 0.49 * third**2 / (0.6 * third**2 + np.log1p(third))
        np.testing.assert_allclose(wall.excess, np.log(v[radius] / lobe), atol=1e-9)
        assert (wall.excess > 0.0).any(), words


@pytest.mark.parametrize("scenario", registered().values(), ids=registered())
def test_the_mass_prior_is_a_proper_range(scenario: Scenario) -> None:
    prior = scenario.mass_prior(Assumptions())
    assert 0.0 < prior.low < prior.high <= 150.0


def test_residual_columns_belong_to_one_observation_each(dark: object) -> None:
    branch = registered()["black_hole"].branches(dark.context)[0]
    fit = Fit(branch, tuple(dark.observations))
    x = prior_points(fit.dimension, 32, np.random.default_rng(1))
    slices, found = fit.columns_of(x[:1]), fit.evaluate(x)
    assert list(slices) == [observation.name for observation in dark.observations]
    stops = [0, *(part.stop for part in slices.values())]
    assert [part.start for part in slices.values()] == stops[:-1]
    assert found.residuals.shape == (32, stops[-1])
    prediction = branch.sample(x).prediction
    for observation in dark.observations:
        np.testing.assert_array_equal(found.residuals[:, slices[observation.name]], observation.residuals(prediction))
    assert fit.ln_norm == pytest.approx(sum(observation.ln_norm for observation in dark.observations))
    assert (found.excess > 0.0).tolist() == (found.ln_prior_ratio == -np.inf).tolist()


def test_the_first_wall_met_is_the_reason(with_orbit: WithOrbit) -> None:
    """Points behind several walls count for the first, so the reasons add up to the closed points."""
    branch = branch_of("white_dwarf", with_orbit(k1_km_s=Measurement(50.0, 1.0)))
    fit = Fit(branch, ())
    x = points(branch)
    walls = fit.sample(x).walls
    behind = np.stack([wall.excess > 0.0 for wall in walls])
    first = np.where(behind.any(axis=0), behind.argmax(axis=0), -1)
    counts = {wall.words: np.count_nonzero(first == place) for place, wall in enumerate(walls)}
    assert fit.closed_because(x) == max(counts, key=counts.__getitem__)
    assert sum(count > 0 for count in counts.values()) > 1, "one reason only would prove nothing"
