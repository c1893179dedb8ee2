"""Winds, capture and X-rays against worked and published cases."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from vetter.physics import accretion


def test_black_hole_fed_by_a_giant() -> None:
    # Worked by hand: 10 Msun, giant of 1 Msun, 10 Rsun and 50 Lsun, 200 d: wind 195 km/s, orbit 81 km/s, 1.9 % caught,
    # 1.1e34 erg/s at an efficiency of a tenth.
    wind = accretion.reimers_wind(1.0, 10.0, 50.0)
    assert wind.loss_msun_yr == pytest.approx(1e-10)
    assert wind.speed_km_s == pytest.approx(195.3, rel=1e-3)
    share = accretion.captured_fraction(10.0, 11.0, 200.0, wind.speed_km_s)
    assert share == pytest.approx(0.019, rel=0.03)
    luminosity = accretion.accretion_luminosity_erg_s(share * wind.loss_msun_yr)
    assert luminosity == pytest.approx(1.1e34, rel=0.03)


def test_escape_from_the_sun() -> None:
    assert accretion.escape_speed_km_s(1.0, 1.0) == pytest.approx(617.7, abs=0.1)  # Allen's Astrophysical Quantities


def test_a_starved_black_hole_is_far_fainter_than_a_thin_disc() -> None:
    rate = 1.9e-12
    assert accretion.faint_efficiency(rate, 10.0) < 1e-3
    # A rate at a tenth of Eddington is bright again.
    bright = 0.1 * accretion.eddington_luminosity_erg_s(10.0) / accretion.accretion_luminosity_erg_s(1.0)
    assert accretion.faint_efficiency(bright, 10.0) == pytest.approx(0.1)
    assert "does not exclude a black hole" in accretion.CAUTION


@given(rate=st.floats(1e-18, 1e-6), mass=st.floats(2.3, 150.0))
def test_efficiency_never_exceeds_a_tenth_and_grows_with_the_rate(rate: float, mass: float) -> None:
    low, high = accretion.faint_efficiency(np.array([rate, 2.0 * rate]), mass)
    assert 0.0 < low <= high <= 0.1


def test_wind_of_an_o_supergiant() -> None:
    # zeta Pup: L 8e5, R 19, M 56, 40 kK: 2250 km/s and some 2-6e-6 Msun/yr (Puls et al. 2006, A&A 454, 625; from
    # memory); the law is good to a factor of three.
    wind = accretion.hot_wind(56.0, 19.0, 8e5, 40000.0)
    assert 3.5e-6 / 3.0 < wind.loss_msun_yr < 3.5e-6 * 3.0
    assert wind.speed_km_s == pytest.approx(2250.0, rel=0.3)


def test_hot_and_cool_stars_take_their_own_law() -> None:
    teff = np.array([4500.0, 15000.0, 30000.0])
    wind = accretion.stellar_wind(10.0, 8.0, 8000.0, teff)
    assert wind.loss_msun_yr[0] == accretion.reimers_wind(10.0, 8.0, 8000.0).loss_msun_yr
    assert wind.loss_msun_yr[1] == accretion.hot_wind(10.0, 8.0, 8000.0, 15000.0).loss_msun_yr
    escape = accretion.escape_speed_km_s(10.0, 8.0)
    assert wind.speed_km_s == pytest.approx(escape * np.array([1.0, 1.3, 2.6]))


@given(mx=st.floats(0.5, 100.0), m=st.floats(0.5, 50.0), period=st.floats(1.0, 5e3), speed=st.floats(10.0, 3e3))
def test_capture_is_a_share_and_falls_with_wind_speed(mx: float, m: float, period: float, speed: float) -> None:
    slow, fast = accretion.captured_fraction(mx, mx + m, period, np.array([speed, 2.0 * speed]))
    assert 0.0 < fast <= slow <= 1.0


def test_accretion_at_one_tenth_of_a_solar_mass_per_year() -> None:
    # 0.1 M c^2 of 1 Msun/yr: 5.66e45 erg/s (hand).
    assert accretion.accretion_luminosity_erg_s(1.0) == pytest.approx(5.663e45, rel=1e-3)
    assert accretion.eddington_luminosity_erg_s(10.0) == pytest.approx(1.26e39)


def test_saturated_corona_of_a_sun() -> None:
    # 10^-3.13 of the bolometric light: Wright et al. 2011, ApJ 743, 48.
    assert accretion.coronal_luminosity_max_erg_s(1.0) == pytest.approx(2.84e30, rel=0.01)
