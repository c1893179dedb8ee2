"""Masses from spectra: the Sun, the handover between the two relations, and the inverse of the dwarf sequence."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from vetter.stars.empirical_mass import (
    cool_dwarf_mass_msun,
    ordinary_mass_msun,
    torres_mass_msun,
    torres_radius_rsun,
)
from vetter.stars.main_sequence import main_sequence


def test_the_sun() -> None:
    # The relation gives the Sun 1.051 Msun and 1.016 Rsun by its authors (Torres et al. 2010; from memory): within 5 %.
    assert torres_mass_msun(5772.0, 4.438, 0.0) == pytest.approx(1.0, rel=0.05)
    assert torres_radius_rsun(5772.0, 4.438, 0.0) == pytest.approx(1.0, rel=0.02)


def test_mass_radius_and_gravity_agree() -> None:
    # Two fits to the same stars: g R^2 / M = 27420 cm/s2 within the scatter of both, 0.027 and 2 x 0.014 dex.
    teff, logg = np.array([5000, 6000, 8000, 12000, 20000]), np.array([3.5, 4.3, 4.0, 4.2, 4.0])
    log_g = np.log10(27420.0 * torres_mass_msun(teff, logg, 0.0) / torres_radius_rsun(teff, logg, 0.0) ** 2)
    assert log_g == pytest.approx(logg, abs=0.04)


def test_hotter_and_richer_is_heavier() -> None:
    assert np.all(np.diff(torres_mass_msun(np.linspace(4500, 30000, 100), 4.2, 0.0)) > 0.0)
    # 0.1010 dex per dex of metallicity.
    assert torres_mass_msun(6000, 4.2, 0.5) / torres_mass_msun(6000, 4.2, -0.5) == pytest.approx(10**0.1010)


@given(mass=st.floats(0.08, 0.64), feh=st.floats(-1.0, 0.5))
def test_cool_dwarfs_come_back(mass: float, feh: float) -> None:
    teff = main_sequence(mass, 0.5, feh).teff_k
    # ln Teff rises with ln M everywhere, at least by 0.03: rounding of 1e-16 becomes no more than 1e-13.
    assert cool_dwarf_mass_msun(teff, feh) == pytest.approx(mass, rel=1e-9)


def test_cool_dwarfs_are_held_inside_the_range() -> None:
    assert cool_dwarf_mass_msun([1000.0, 9000.0]) == pytest.approx([0.077, 0.80])


def test_handover() -> None:
    hot, cold = 5000.0, 3500.0
    assert ordinary_mass_msun(hot, 4.5, 0.0) == torres_mass_msun(hot, 4.5, 0.0)
    assert ordinary_mass_msun(cold, 4.8, 0.0) == pytest.approx(float(cool_dwarf_mass_msun(cold)))
    # A giant is no dwarf, however cool.
    assert ordinary_mass_msun(cold, 1.0, 0.0) == torres_mass_msun(cold, 1.0, 0.0)
    teff = np.linspace(3600, 4600, 2001)
    assert np.max(np.abs(np.diff(np.log(ordinary_mass_msun(teff, 4.65, 0.0))))) < 3e-3


def test_shapes_broadcast() -> None:
    assert ordinary_mass_msun(np.full((3, 1), 5000.0), np.full(4, 4.5), 0.0).shape == (3, 4)
