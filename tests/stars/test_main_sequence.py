"""The main-sequence relation: handovers, scatter, metallicity, validity."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from vetter.stars import hpt
from vetter.stars.dwarf_table import mean_dwarf
from vetter.stars.main_sequence import FEH_RANGE, MASS_RANGE_MSUN, lifetime_myr, main_sequence, scatter

masses = st.floats(*MASS_RANGE_MSUN)
fractions = st.floats(0.0, 1.0)
metallicities = st.floats(*FEH_RANGE)
scores = st.floats(-4.0, 4.0)

# PHYSICS of the scatter: mass inside each range, sigma log10 L, sigma ln R, sigma ln Teff.
SCATTER = [
    (0.4, 0.06, 0.05, 0.025),
    (0.72, 0.05, 0.04, 0.02),
    (1.2, 0.04, 0.04, 0.02),
    (2.0, 0.06, 0.06, 0.03),
    (8.0, 0.04, 0.05, 0.03),
    (35.0, 0.06, 0.12, 0.06),
]


def test_below_the_blend_it_is_the_table() -> None:
    mass = np.array([0.077, 0.1, 0.3, 0.65])
    star = main_sequence(mass, np.array([0.0, 0.3, 0.6, 1.0]), 0.0)
    ln_l, ln_r = mean_dwarf(np.log(mass))
    assert star.luminosity_lsun == pytest.approx(np.exp(ln_l))
    assert star.radius_rsun == pytest.approx(np.exp(ln_r))


def test_above_the_blend_it_is_the_formula() -> None:
    mass, tau = np.array([0.8, 1.0, 3.0, 40.0]), np.array([0.0, 0.4, 0.9, 1.0])
    star, formula = main_sequence(mass, tau, -0.3), hpt.main_sequence(mass, 0.02 * 10**-0.3, tau)
    assert star.luminosity_lsun == pytest.approx(formula.luminosity_lsun)
    assert star.radius_rsun == pytest.approx(formula.radius_rsun)


def test_half_way_through_the_blend() -> None:
    star, formula = main_sequence(0.725, 0.5, 0.0), hpt.main_sequence(0.725, 0.02, 0.5)
    ln_l, ln_r = mean_dwarf(np.log(0.725))
    assert star.luminosity_lsun == pytest.approx(np.sqrt(float(formula.luminosity_lsun) * np.exp(ln_l)))
    assert star.radius_rsun == pytest.approx(np.sqrt(float(formula.radius_rsun) * np.exp(ln_r)))


@given(mass=masses, tau=fractions, feh=metallicities, z1=scores, z2=scores)
def test_surface_laws_tie_the_columns(mass: float, tau: float, feh: float, z1: float, z2: float) -> None:
    star = main_sequence(mass, tau, feh, z1, z2)
    assert star.valid
    # Stefan-Boltzmann and Newton with solar values of IAU 2015 resolution B3.
    assert star.radius_rsun**2 * (star.teff_k / 5772.0) ** 4 == pytest.approx(float(star.luminosity_lsun), rel=1e-10)
    assert 10**star.logg == pytest.approx(27420.0 * mass / float(star.radius_rsun) ** 2, rel=3e-4)
    assert star.mass_msun == mass
    assert all(np.isfinite(column) for column in star)


@pytest.mark.parametrize(("mass", "log_l", "ln_r", "ln_teff"), SCATTER)
def test_scatter_reproduces_all_three_errors(mass: float, log_l: float, ln_r: float, ln_teff: float) -> None:
    z1, z2 = np.random.default_rng(1).standard_normal((2, 40_000))
    star = main_sequence(mass, 0.5, 0.0, z1, z2)
    # 4e4 draws give a standard deviation to 0.35 %.
    assert np.std(np.log10(star.luminosity_lsun)) == pytest.approx(log_l, rel=0.015)
    assert np.std(np.log(star.radius_rsun)) == pytest.approx(ln_r, rel=0.015)
    assert np.std(np.log(star.teff_k)) == pytest.approx(ln_teff, rel=0.015)


def test_scatter_is_a_proper_distribution_everywhere() -> None:
    mass, feh = np.meshgrid(np.geomspace(0.077, 100.0, 2000), np.linspace(-3.0, 0.7, 38))
    spread = scatter(mass, feh)
    assert np.all(np.abs(spread.correlation) < 0.75)
    assert np.all(spread.ln_luminosity > 0.09)
    assert np.all(spread.ln_radius >= 0.04)


@pytest.mark.parametrize("edge", [0.65, 0.8, 1.6, 2.5, 20.0])
def test_steps_of_the_scatter_are_ramps(edge: float) -> None:
    mass = edge * np.linspace(0.9, 1.1, 2001)
    spread = scatter(mass)
    for column in spread:
        assert np.max(np.abs(np.diff(column))) < 2e-3
    inside = np.abs(np.log(mass / edge)) < 0.03
    assert np.all(np.diff(spread.ln_luminosity)[~inside[1:] & ~inside[:-1]] == 0.0)


def test_extra_scatter_far_from_solar_metallicity() -> None:
    near, far = scatter(1.0, 0.0), scatter(1.0, -1.0)
    # 0.04 and 0.05 dex in quadrature; the covariance with the radius stays.
    assert far.ln_luminosity / np.log(10.0) == pytest.approx(np.hypot(0.04, 0.05))
    assert far.ln_radius == near.ln_radius
    assert far.correlation * far.ln_luminosity == pytest.approx(near.correlation * near.ln_luminosity)


@pytest.mark.parametrize(("mass", "log_l", "ln_r", "ln_teff"), [(0.4, -0.10, 0.02, -0.07), (0.6, -0.29, 0.0, -0.17)])
def test_metallicity_slopes_of_cool_dwarfs(mass: float, log_l: float, ln_r: float, ln_teff: float) -> None:
    poor, rich = main_sequence(mass, 0.5, -0.2), main_sequence(mass, 0.5, 0.2)
    assert np.log10(rich.luminosity_lsun / poor.luminosity_lsun) / 0.4 == pytest.approx(log_l, abs=1e-9)
    assert np.log(rich.radius_rsun / poor.radius_rsun) / 0.4 == pytest.approx(ln_r, abs=1e-9)
    # The Teff slope follows from the other two; tabulated to two digits.
    assert np.log(rich.teff_k / poor.teff_k) / 0.4 == pytest.approx(ln_teff, abs=0.006)


@pytest.mark.parametrize("edge", [-2.30103, 0.1760913])
def test_metallicity_goes_on_beyond_the_formulas(edge: float) -> None:
    # The formulas end at Z = 1e-4 and 0.03; the slopes of the relation at 1 Msun carry on without a jump.
    feh = edge + np.sign(edge) * np.array([-1e-6, 1e-6, 0.2, 0.4])
    star = main_sequence(1.0, 0.3, feh)
    log_l, ln_r = np.log10(star.luminosity_lsun), np.log(star.radius_rsun)
    assert log_l[1] == pytest.approx(log_l[0], abs=1e-5)
    assert (log_l[3] - log_l[2]) / (feh[3] - feh[2]) == pytest.approx(-0.41)
    assert (ln_r[3] - ln_r[2]) / (feh[3] - feh[2]) == pytest.approx(-0.11)


@pytest.mark.parametrize("feh", [-1.0, 0.0, 0.3])
@pytest.mark.parametrize("tau", [0.0, 0.5, 1.0])
def test_no_jump_with_mass(feh: float, tau: float) -> None:
    mass = np.geomspace(*MASS_RANGE_MSUN, 20_000)
    star = main_sequence(mass, tau, feh)
    # Steps of 0.036 % in mass: ln L moves by at most 11 times that (the table near 0.08 Msun is the steepest).
    assert np.max(np.abs(np.diff(np.log(star.luminosity_lsun)))) < 8e-3
    assert np.max(np.abs(np.diff(np.log(star.radius_rsun)))) < 8e-3


def test_brighter_with_mass_at_half_life() -> None:
    # At 1.017 Msun the hook of the published formulas sets in with a cusp that costs 0.1 % of L over 0.1 % of mass.
    mass = np.geomspace(0.077, 100.0, 4000)
    star = main_sequence(mass, 0.5, 0.0)
    away = np.abs(mass[1:] - 1.0185) > 0.003
    assert np.all(np.diff(star.luminosity_lsun)[away] > 0.0)


@pytest.mark.parametrize(
    ("mass", "tau", "feh"),
    [
        (0.0769, 0.5, 0.0),
        (101.0, 0.5, 0.0),
        (-1.0, 0.5, 0.0),
        (1.0, -0.01, 0.0),
        (1.0, 1.01, 0.0),
        (1.0, 0.5, -3.1),
        (1.0, 0.5, 0.71),
        (np.nan, 0.5, 0.0),
        (1.0, np.nan, 0.0),
        (1.0, 0.5, np.nan),
    ],
)
def test_no_star_outside_the_ranges(mass: float, tau: float, feh: float) -> None:
    star = main_sequence([mass, 1.0], [tau, 0.5], [feh, 0.0])
    assert star.valid.tolist() == [False, True]
    assert all(np.all(np.isfinite(column)) for column in star)


def test_lifetime() -> None:
    # Hurley, Pols & Tout 2000 at Z = 0.02: 11003.1 Myr for 1 Msun.
    assert lifetime_myr(1.0, 0.0) == pytest.approx(11003.1, abs=0.1)
    assert lifetime_myr(1.0, -0.5) < lifetime_myr(1.0, 0.0) < lifetime_myr(0.9, 0.0)


def test_empty_input_gives_empty_output() -> None:
    assert main_sequence(np.empty(0), 0.5, 0.0).teff_k.shape == (0,)
