"""Compact stripped stars: worked values, envelopes, validity."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from vetter.stars.helium import MASS_RANGE_MSUN, helium_star, inflation_max, pure_helium


@pytest.mark.parametrize(
    ("mass", "log_l", "radius", "teff_kk"),
    [(0.5, 1.41, 0.135, 35), (1.0, 2.54, 0.244, 50), (3.0, 4.03, 0.50, 83), (8.0, 5.05, 0.90, 111)],
)
def test_half_way_through_helium_burning(mass: float, log_l: float, radius: float, teff_kk: float) -> None:
    # Hurley, Pols & Tout 2000, eqs. 77-81, worked once to the digits given.
    star = helium_star(mass, 0.5)
    assert np.log10(star.luminosity_lsun) == pytest.approx(log_l, abs=0.006)
    assert star.radius_rsun == pytest.approx(radius, rel=0.02)
    assert star.teff_k / 1000.0 == pytest.approx(teff_kk, rel=0.015)


def test_a_known_stripped_star() -> None:
    # Subdwarf B stars: 0.47 Msun, 0.1-0.3 Rsun, 20-40 kK (Heber 2016, PASP 128, 082001; from memory).
    star = helium_star(0.47, 0.5, np.linspace(0.0, 1.0, 5))
    assert np.all((star.radius_rsun > 0.1) & (star.radius_rsun < 0.35))
    assert np.any((star.teff_k > 2.0e4) & (star.teff_k < 4.0e4))


def test_lifetime_falls_with_mass() -> None:
    assert np.all(np.diff(pure_helium(np.geomspace(*MASS_RANGE_MSUN, 500), 0.0).lifetime_myr) < 0.0)


@given(mass=st.floats(*MASS_RANGE_MSUN), tau=st.floats(0, 1), share=st.floats(0, 1), z=st.floats(-3, 3))
def test_envelope_makes_larger_and_cooler(mass: float, tau: float, share: float, z: float) -> None:
    bare, star = helium_star(mass, tau, 0.0, z), helium_star(mass, tau, share, z)
    assert star.valid
    assert star.radius_rsun == pytest.approx(float(bare.radius_rsun * inflation_max(mass) ** share))
    assert star.luminosity_lsun == bare.luminosity_lsun
    assert star.teff_k <= bare.teff_k
    assert star.radius_rsun**2 * (star.teff_k / 5772.0) ** 4 == pytest.approx(float(star.luminosity_lsun))


def test_scatter_and_largest_envelopes() -> None:
    assert inflation_max([0.5, 0.9, 1.1, 5.0]) == pytest.approx([2.5, 2.5, 1.5, 1.5])
    up, mean = helium_star(1.0, 0.5, 0.0, 1.0), helium_star(1.0, 0.5)
    assert np.log10(up.luminosity_lsun / mean.luminosity_lsun) == pytest.approx(0.15)


def test_no_star_outside_the_ranges() -> None:
    star = helium_star([0.2, 16.0, 1.0, 1.0, 1.0, 1.0], [0.5, 0.5, 1.1, 0.5, -0.1, 0.5], [0, 0, 0, 1.2, 0, 1.0])
    assert star.valid.tolist() == [False] * 5 + [True]
    assert all(np.all(np.isfinite(column)) for column in star)
