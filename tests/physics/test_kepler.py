"""Keplerian orbits against published mass functions, textbook orbits and their own inverses."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from vetter.physics import kepler

masses = st.floats(1e-3, 150.0)
eccentricities = st.floats(0.0, 0.99)


@pytest.mark.parametrize(
    ("name", "k_km_s", "period_d", "published_msun", "error_msun"),
    [
        # Inputs K and P from memory; published mass functions as cited.
        ("V404 Cyg: Casares & Charles 1994, MNRAS 271, L5", 208.5, 6.4714, 6.08, 0.06),
        ("GRO J1655-40: Orosz & Bailyn 1997, ApJ 477, 876", 228.2, 2.62157, 3.24, 0.09),
        ("GRS 1915+105: Greiner et al. 2001, Nature 414, 522", 140.0, 33.5, 9.5, 3.0),
    ],
)
def test_mass_functions_of_x_ray_binaries(
    name: str, k_km_s: float, period_d: float, published_msun: float, error_msun: float
) -> None:
    assert kepler.mass_function_msun(period_d, k_km_s) == pytest.approx(published_msun, abs=error_msun), name


@pytest.mark.parametrize(
    ("k_km_s", "period_d", "expected"),
    [(74.9, 5.5998, 0.2438), (208.5, 6.4714, 6.078), (228.2, 2.62157, 3.228), (140.0, 33.5, 9.525)],
)
def test_mass_function_worked_by_hand(k_km_s: float, period_d: float, expected: float) -> None:
    # 1.036149e-7 K^3 P, the factor of the standard textbooks; expected to the digits given.
    assert kepler.mass_function_msun(period_d, k_km_s) == pytest.approx(expected, rel=3e-4)
    assert kepler.mass_function_msun(1.0, 1.0) == pytest.approx(1.036149e-7, rel=1e-6)


def test_two_suns_at_one_year() -> None:
    # Kepler's third law: a = 2^(1/3) au; K = 18.763 km/s (from memory, hand-checked). The year is the Gaussian one,
    # 365.2569 d, so the Julian year is right to 2e-5.
    assert kepler.separation_au(2.0, 365.25) == pytest.approx(1.25992, rel=3e-5)
    assert kepler.semi_amplitude_km_s(1.0, 1.0, 365.25) == pytest.approx(18.763, rel=5e-5)


def test_sun_and_jupiter() -> None:
    # Jupiter: 9.5458e-4 Msun, 4332.59 d, e 0.0489 -> 12.46 m/s for a circular orbit (from memory).
    assert kepler.semi_amplitude_km_s(1.0, 9.5458e-4, 4332.59) == pytest.approx(0.01246, rel=1e-3)


def test_earth_in_solar_radii() -> None:
    # One au is 215.03 solar radii (IAU nominal values).
    assert kepler.separation_rsun(1.0, 365.2569) == pytest.approx(215.03, rel=2e-5)


@given(m1=masses, m2=masses, sin_i=st.floats(0.01, 1.0))
def test_companion_mass_solves_its_equation(m1: float, m2: float, sin_i: float) -> None:
    f = (m2 * sin_i) ** 3 / (m1 + m2) ** 2
    assert kepler.companion_mass_msun(f, m1, sin_i) == pytest.approx(m2, rel=1e-12)
    assert kepler.sin_inclination(f, m1, m2) == pytest.approx(sin_i, rel=1e-12)


@given(m1=masses, m2=masses, period_d=st.floats(0.1, 1e5), e=eccentricities, sin_i=st.floats(0.05, 1.0))
def test_velocity_and_mass_are_inverse(m1: float, m2: float, period_d: float, e: float, sin_i: float) -> None:
    k1 = kepler.semi_amplitude_km_s(m1, m2, period_d, sin_i, e)
    f = kepler.mass_function_msun(period_d, k1, e)
    assert kepler.companion_mass_msun(f, m1, sin_i) == pytest.approx(m2, rel=1e-11)
    assert kepler.companion_mass_min_msun(f, m1) <= m2 * (1.0 + 1e-11)


@pytest.mark.parametrize(("f_msun", "m1_msun", "expected"), [(0.0, 1.0, 0.0), (0.0, 0.0, 0.0), (2.0, 0.0, 2.0)])
def test_companion_mass_at_the_ends(f_msun: float, m1_msun: float, expected: float) -> None:
    assert kepler.companion_mass_msun(f_msun, m1_msun) == pytest.approx(expected)


def test_companion_mass_of_a_planet_keeps_its_digits() -> None:
    # For m2 << m1, m2 = f^(1/3) m1^(2/3) (1 + 2/3 m2/m1 + ...).
    small = kepler.companion_mass_msun(1e-27, 1.0)
    assert small == pytest.approx(1e-9 * (1.0 + 2e-9 / 3.0), rel=1e-14)


def test_companion_mass_is_an_array_function() -> None:
    f = np.geomspace(1e-6, 50.0, 7)[:, None]
    m2 = kepler.companion_mass_msun(f, np.array([0.5, 1.0, 20.0]))
    assert m2.shape == (7, 3)
    assert np.all(np.diff(m2, axis=0) > 0.0)
    assert np.all(np.diff(m2, axis=1) > 0.0)


@given(total=masses, period_d=st.floats(0.05, 1e6))
def test_period_and_separation_are_inverse(total: float, period_d: float) -> None:
    assert kepler.orbital_period_d(total, kepler.separation_rsun(total, period_d)) == pytest.approx(period_d, rel=1e-12)


def test_separations_agree_between_units() -> None:
    ratio = kepler.separation_rsun(3.0, 77.0) / kepler.separation_au(3.0, 77.0)
    assert ratio == pytest.approx(149597870.7 / 695700.0, rel=1e-12)


def test_photocentre_of_a_dark_companion_is_the_orbit_of_the_seen_star() -> None:
    # Equal masses, 1 au apart, parallax 10 mas: the star moves on half of 10 mas.
    assert kepler.photocentre_mas(10.0, 1.0, 1.0, 1.0) == pytest.approx(5.0)


def test_photocentre_of_twins_stands_still() -> None:
    assert kepler.photocentre_mas(10.0, 1.0, 1.0, 1.0, 1.0) == pytest.approx(0.0, abs=1e-15)


def test_photocentre_moves_with_a_bright_companion() -> None:
    # All the light from the companion of one third of the mass: it moves on three quarters of the orbit.
    assert kepler.photocentre_mas(10.0, 1.0, 3.0, 1.0, 1e12) == pytest.approx(7.5)


@given(m1=st.floats(0.1, 30), m2=st.floats(0.1, 30), ratio=st.floats(0, 10), period_d=st.floats(1, 5e3))
def test_mass_ratio_function_is_what_astrometry_measures(m1: float, m2: float, ratio: float, period_d: float) -> None:
    photocentre = kepler.photocentre_mas(2.5, kepler.separation_au(m1 + m2, period_d), m1, m2, ratio)
    measured = kepler.measured_mass_ratio_function(photocentre, 2.5, m1, period_d)
    assert measured == pytest.approx(kepler.photocentre_mass_ratio_function(m2 / m1, ratio), rel=1e-9, abs=1e-12)


def test_mass_ratio_function_of_dark_companions() -> None:
    # S = 0 gives q (1 + q)^(-2/3); q = 1: 2^(-2/3) = 0.62996 (Shahaf et al. 2019, MNRAS 487, 5610).
    assert kepler.photocentre_mass_ratio_function(1.0) == pytest.approx(0.629960525)


@given(mean=st.floats(-50.0, 50.0), e=eccentricities)
def test_kepler_equation_holds(mean: float, e: float) -> None:
    anomaly = kepler.eccentric_anomaly(mean, e)
    assert anomaly - e * np.sin(anomaly) == pytest.approx(mean, abs=2e-14 * max(1.0, abs(mean)))
    assert abs(anomaly - mean) <= e + 1e-12


def test_kepler_equation_to_twelve_digits() -> None:
    # Truth by construction: choose E, compute M. Rounding of M alone costs eps pi / (1 - e) in E.
    truth, e = np.meshgrid(np.linspace(-np.pi, np.pi, 801), np.array([0.0, 0.1, 0.5, 0.9, 0.99]))
    found = kepler.eccentric_anomaly(truth - e * np.sin(truth), e)
    assert np.max(np.abs(found - truth)) < 1e-12


def test_kepler_equation_near_the_parabola() -> None:
    truth, e = np.meshgrid(np.geomspace(1e-6, 3.0, 400), np.array([0.999, 0.999999]))
    mean = truth - e * np.sin(truth)
    found = kepler.eccentric_anomaly(mean, e)
    assert np.max(np.abs(found - e * np.sin(found) - mean)) < 1e-14


@given(anomaly=st.floats(-20.0, 20.0), e=eccentricities)
def test_true_anomaly_by_the_half_angle_formula(anomaly: float, e: float) -> None:
    nu = kepler.true_anomaly(anomaly, e)
    # cos nu = (cos E - e) / (1 - e cos E), every celestial mechanics textbook.
    expected = (np.cos(anomaly) - e) / (1.0 - e * np.cos(anomaly))
    assert np.cos(nu) == pytest.approx(expected, abs=1e-11)
    assert abs(nu - anomaly) < np.pi


@given(e=st.floats(0.0, 0.95), omega=st.floats(0.0, 6.28))
def test_velocity_curve_has_its_semi_amplitude_and_no_mean(e: float, omega: float) -> None:
    time = np.linspace(3.0, 15.0, 20001)
    velocity = kepler.radial_velocity_km_s(time, 12.0, 4.0, e, omega, 50.0)
    assert 0.5 * np.ptp(velocity) == pytest.approx(50.0, rel=2e-3)
    # The time average over a turn vanishes: the star comes back to where it was.
    assert np.trapezoid(velocity, time) / 12.0 == pytest.approx(0.0, abs=2e-2)


def test_velocity_at_periastron() -> None:
    velocity = kepler.radial_velocity_km_s(np.array([4.0, 16.0]), 12.0, 4.0, 0.3, 0.0, 50.0)
    assert velocity == pytest.approx([65.0, 65.0])
