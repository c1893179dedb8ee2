"""Ellipsoidal light against a numerical Roche star, gravity darkening and synchronisation against known cases."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from vetter.physics import kepler
from vetter.physics.roche import roche_lobe_fraction
from vetter.physics.tides import (
    eccentric_share,
    ellipsoidal_amplitude_mag,
    gravity_darkening,
    synchronisation_time_myr,
)

MAG = 2.5 / np.log(10.0)


@pytest.mark.parametrize("mass_ratio", [0.05, 0.3, 1.0, 3.0, 10.0, 30.0])
@pytest.mark.parametrize(("limb", "gravity"), [(0.3, 0.3), (0.6, 0.3), (0.3, 1.0)])
def test_numerical_roche_star(
    mass_ratio: float, limb: float, gravity: float, roche_light: Callable[..., object]
) -> None:
    # Five per cent up to a filling of 0.9, edge on and well inclined; the numerical star is right to 0.5 %.
    for depth, inclination in [(0.45, 90.0), (0.74, 90.0), (0.74, 55.0), (0.74, 30.0)]:
        star = roche_light(mass_ratio, depth, limb, gravity, np.radians(inclination))
        assert star.filling < 0.905
        sine = np.sin(np.radians(inclination))
        found = ellipsoidal_amplitude_mag(mass_ratio, star.radius, sine, gravity, limb) / MAG
        assert found == pytest.approx(star.semi_amplitude, rel=0.05), (depth, inclination, star)


def test_nine_tenths_full_lies_inside_the_check(roche_light: Callable[..., object]) -> None:
    # The check above would be empty if its deepest star were far from full.
    assert roche_light(3.0, 0.74, 0.3, 0.3, 1.0).filling > 0.88
    assert roche_light(0.05, 0.74, 0.3, 0.3, 1.0).filling > 0.84


def test_leading_term_by_hand() -> None:
    # Morris 1985, ApJ 295, 143: 0.15 (15 + u)(1 + g) / (3 - u) q r^3 with u 0.6, g 0.3, q 1, r 0.05, edge on.
    by_hand = 0.15 * 15.6 * 1.3 / 2.4 * 0.05**3 * MAG
    assert ellipsoidal_amplitude_mag(1.0, 0.05, 1.0, 0.3, 0.6) == pytest.approx(by_hand, rel=3e-3)


@given(
    q=st.floats(0.05, 30.0),
    filling=st.floats(0.05, 0.9),
    sine=st.floats(0.2, 1.0),
    u=st.floats(0.3, 0.7),
    g=st.floats(0.2, 1.0),
)
def test_amplitude_is_positive_grows_with_size_and_is_diluted(
    q: float, filling: float, sine: float, u: float, g: float
) -> None:
    lobe = float(roche_lobe_fraction(1.0 / q))
    small, large = ellipsoidal_amplitude_mag(q, np.array([filling, 1.05 * filling]) * lobe, sine, g, u)
    assert 0.0 < small < large
    diluted = ellipsoidal_amplitude_mag(q, filling * lobe, sine, g, u, 1.0)
    assert diluted == pytest.approx(0.5 * small)


def test_a_star_beyond_its_lobe_is_held_at_it() -> None:
    lobe = float(roche_lobe_fraction(1.0))
    at_lobe, beyond = ellipsoidal_amplitude_mag(1.0, np.array([lobe, 2.0 * lobe]), 1.0, 0.3)
    assert beyond == at_lobe


def test_amplitudes_broadcast() -> None:
    found = ellipsoidal_amplitude_mag(np.ones((3, 1)), np.full(4, 0.1), 1.0, 0.3)
    assert found.shape == (3, 4)


def test_gravity_darkening_of_hot_and_cool_stars() -> None:
    # Far in the Rayleigh-Jeans tail flux goes as Teff: the exponent is that of Teff itself, 0.25 and 0.08.
    assert gravity_darkening(20000.0, 1e6) == pytest.approx(0.25, rel=1e-3)
    assert gravity_darkening(5000.0, 1e6) == pytest.approx(0.08, rel=2e-3)
    # By hand for 5800 K at 550 nm: x = 4.510, 0.08 x / (1 - exp(-x)) = 0.3648.
    assert gravity_darkening(5800.0, 550.0) == pytest.approx(0.3648, rel=1e-3)


@given(teff=st.floats(2500.0, 50000.0), blue=st.floats(200.0, 1000.0))
def test_gravity_darkening_is_stronger_in_the_blue(teff: float, blue: float) -> None:
    assert gravity_darkening(teff, blue) > gravity_darkening(teff, 2.0 * blue) > 0.0


def test_two_suns_at_one_day_lock_within_a_decade_of_the_published_estimate() -> None:
    # Zahn 1977, A&A 57, 383, eq. 6.1 (from memory): 1e4 ((1 + q)/2q)^2 P^4 yr for late types; P in days.
    for period_d, q in [(1.0, 1.0), (4.0, 1.0), (4.0, 0.3)]:
        a = kepler.separation_rsun(1.0 + q, period_d)
        found_yr = 1e6 * synchronisation_time_myr(1.0, q, 1.0, 1.0, 5772.0, a)
        published_yr = 1e4 * ((1.0 + q) / (2.0 * q)) ** 2 * period_d**4
        assert 0.1 < found_yr / published_yr < 10.0


def test_early_types_lock_when_close_only() -> None:
    # Zahn 1977: stars of 5-10 Msun are synchronised on the main sequence out to a/R of 6-7 (from memory).
    lifetime_myr = 60.0
    close, wide = (synchronisation_time_myr(7.0, 7.0, 3.5, 2000.0, 20000.0, 3.5 * x) for x in (4.0, 15.0))
    assert close < lifetime_myr < wide


@given(a=st.floats(3.0, 500.0), teff=st.sampled_from([4500.0, 12000.0]))
def test_wider_orbits_lock_later(a: float, teff: float) -> None:
    near, far = synchronisation_time_myr(1.5, 1.0, 1.4, 5.0, teff, np.array([a, 2.0 * a]))
    power = 6.0 if teff < 7000.0 else 8.5
    assert far / near == pytest.approx(2.0**power)


@pytest.mark.parametrize("eccentricity", [0.0, 0.05, 0.3, 0.7])
@pytest.mark.parametrize("sine", [1.0, 0.6])
def test_the_share_in_an_eccentric_orbit_is_that_of_its_light_curve(eccentricity: float, sine: float) -> None:
    """The equilibrium tide sampled in time by Kepler's equation, its second harmonic averaged over omega."""
    mean = 2.0 * np.pi * np.arange(4096) / 4096
    anomaly = kepler.eccentric_anomaly(mean, eccentricity)
    nu, radius = kepler.true_anomaly(anomaly, eccentricity), 1.0 - eccentricity * np.cos(anomaly)
    squares = []
    for omega in 2.0 * np.pi * np.arange(16) / 16:
        light = radius**-3.0 * (1.5 * sine**2 - 1.0 + 1.5 * sine**2 * np.cos(2.0 * (nu + omega)))
        squares.append((2.0 * np.abs(np.mean(light * np.exp(-2j * mean)))) ** 2)
    expected = np.sqrt(np.mean(squares)) / (1.5 * sine**2)
    assert eccentric_share(eccentricity, sine) == pytest.approx(expected, rel=1e-6)


def test_the_share_begins_as_the_series_does() -> None:
    """1 - 5/2 e^2 and 9/4 e^2 (Hansen coefficients of any textbook, for example Murray & Dermott 1999)."""
    assert eccentric_share(0.0, 0.8) == pytest.approx(1.0, abs=1e-12)
    e = 0.02
    steady = 2.0 * 2.25 * e * e / 3.0
    assert eccentric_share(e, 1.0) == pytest.approx(np.hypot(1.0 - 2.5 * e * e, steady), abs=1e-6)
