"""The stored dust law against the package it comes from, and its behaviour beyond the published range."""

from __future__ import annotations

import runpy
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from vetter.errors import InputError
from vetter.light.extinction import R_V_RANGE, extinction_curve
from vetter.light.tables import load_tables

RECIPE = Path(__file__).parents[2] / "grids" / "recipes" / "extinction.py"


@pytest.mark.parametrize("r_v", [2.3, 2.8, 3.1, 4.0, 5.6])
def test_agrees_with_the_published_implementation(r_v: float) -> None:
    """Gordon et al. 2023 (ApJ 950, 86) through dust_extinction, at wavelengths between the stored ones."""
    import astropy.units as u
    from dust_extinction.parameter_averages import G23

    wavelength = np.geomspace(912.5, 319990.0, 7919)
    published = G23(Rv=r_v)(wavelength * u.AA)
    stored = extinction_curve(load_tables().dust, wavelength, r_v)
    # Steps of 0.1 % leave 3e-5 of A(V) at the top of the 2175 A bump: 1e-4 mag behind 3 mag of dust.
    assert np.abs(stored - published).max() < 5e-5


def test_stored_columns_are_what_the_recipe_makes() -> None:
    made = runpy.run_path(str(RECIPE))["dust_columns"]()
    dust = load_tables().dust
    for name in ("wavelength_angstrom", "a", "b"):
        # Not bit for bit: the package's own arithmetic may change in the last digit between versions.
        np.testing.assert_allclose(getattr(dust, name), made[name], rtol=0, atol=1e-9 * np.abs(made[name]).max())


def test_visual_extinction_is_one() -> None:
    """A(5500 A) = A(V) to the 1.5 % of the law's own photometric zero point (Gordon et al. 2023, section 5)."""
    assert extinction_curve(load_tables().dust, np.array([5500.0]))[0] == pytest.approx(1.0, abs=0.02)


def test_held_below_and_falling_above_the_range() -> None:
    below = extinction_curve(load_tables().dust, np.array([300.0, 800.0, 912.0]))
    assert below[0] == below[1] == pytest.approx(below[2], rel=1e-9)
    above = extinction_curve(load_tables().dust, np.array([3.19e5, 3.2e5, 3.3e5, 6.4e5, 1.28e6]))
    assert (np.diff(above) < 0.0).all()
    assert (above > 0.0).all()
    # One power law: each doubling divides by the same number.
    assert above[3] / above[1] == pytest.approx(above[4] / above[3], rel=1e-9)


@given(st.floats(*R_V_RANGE))
def test_positive_for_every_r_v(r_v: float) -> None:
    curve = extinction_curve(load_tables().dust, np.geomspace(905.0, 3.2e5, 500), r_v)
    assert (curve > 0.0).all()


@pytest.mark.parametrize("r_v", [2.29, 5.61, float("nan")])
def test_r_v_outside_the_law(r_v: float) -> None:
    with pytest.raises(InputError, match=r"2\.3 to 5\.6"):
        extinction_curve(load_tables().dust, np.array([5500.0]), r_v)
