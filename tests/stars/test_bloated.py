"""Bloated stripped stars: published core-mass luminosities, and the mass that gives them away."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from vetter.stars.bloated import bloated_luminosity_lsun, bloated_star, core_radius_rsun, lifetime_myr
from vetter.stars.helium import pure_helium


@pytest.mark.parametrize(("core", "expected"), [(0.17, 5.7), (0.20, 15.0), (0.25, 57.0), (0.30, 171.0), (0.40, 960.0)])
def test_core_mass_luminosity(core: float, expected: float) -> None:
    # Hurley, Pols & Tout 2000, MNRAS 315, 543, eq. 37, worked to two digits for Z = 0.02.
    assert bloated_luminosity_lsun(core) == pytest.approx(expected, rel=0.02)


def test_heavy_cores_shine_by_helium_burning() -> None:
    assert bloated_luminosity_lsun(2.0) == pytest.approx(float(pure_helium(2.0, 0.5).luminosity_lsun))
    # Nothing jumps downward at the change of the relation.
    below, above = bloated_luminosity_lsun(np.array([0.4499, 0.4501]))
    assert above == pytest.approx(below, rel=0.01)


@given(core=st.floats(0.12, 8.0), share=st.floats(0.001, 0.9), radius=st.floats(1.5, 50.0), z=st.floats(-3.0, 3.0))
def test_columns_agree_with_each_other(core: float, share: float, radius: float, z: float) -> None:
    star = bloated_star(core, share * core, radius, 0.0, z)
    assert bool(star.valid)
    assert star.mass_msun == pytest.approx(core * (1.0 + share))
    assert star.luminosity_lsun == pytest.approx(float(star.radius_rsun**2 * (star.teff_k / 5772.0) ** 4))
    # g R^2 / G is the mass: log g of the Sun 4.438.
    assert 10.0 ** (star.logg - 4.438067) * radius**2 == pytest.approx(float(star.mass_msun))


@given(core=st.floats(0.1, 7.9))
def test_heavier_cores_are_brighter(core: float) -> None:
    dim, bright = bloated_luminosity_lsun(np.array([core, 1.01 * core]))
    assert bright >= dim


def test_where_there_is_no_star() -> None:
    core = np.array([0.05, 9.0, 0.3, 0.3, 0.3, np.nan])
    envelope = np.array([0.01, 0.01, 0.0, 0.4, 0.01, 0.01])
    radius = np.array([2.0, 2.0, 2.0, 2.0, 0.01, 2.0])
    star = bloated_star(core, envelope, radius)
    assert not star.valid.any()
    assert all(np.all(np.isfinite(column)) for column in star)


def test_bare_cores() -> None:
    # A 0.3-Msun helium white dwarf: 0.018 Rsun cold; a 1-Msun helium star half way: 0.244 Rsun (both eqs. of HPT).
    assert core_radius_rsun(0.3) == pytest.approx(0.0176, rel=0.05)
    assert core_radius_rsun(1.0) == pytest.approx(0.244, rel=0.01)


def test_lifetime_by_hand() -> None:
    # 0.7 x 6.4e18 x 0.01 x 1.98841e33 erg over 100 x 3.828e33 erg/s: 7.37 Myr.
    assert lifetime_myr(0.01, 100.0) == pytest.approx(7.37, rel=2e-3)
    assert lifetime_myr(0.02, 100.0) == pytest.approx(2.0 * lifetime_myr(0.01, 100.0))
