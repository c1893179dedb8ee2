"""Neutron stars and black holes: dark, small, and only within their ranges."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from vetter.stars.remnant import black_hole, neutron_star


def test_horizon_of_ten_suns() -> None:
    # 2 G M / c^2 = 29.53 km for 10 Msun (2.953 km for the Sun, any textbook).
    assert black_hole(10.0).radius_rsun * 6.957e5 == pytest.approx(29.53, abs=0.01)


def test_gravity_of_a_neutron_star() -> None:
    # G 1.4 Msun / (12 km)^2 = 1.290e14 cm/s2 (hand).
    assert neutron_star(1.4).logg == pytest.approx(np.log10(1.290e14), abs=1e-3)


@given(mass=st.floats(0.0, 500.0))
def test_they_are_dark_and_held_to_their_range(mass: float) -> None:
    for star, (low, high) in ((neutron_star(mass), (1.1, 2.3)), (black_hole(mass), (2.3, 150.0))):
        assert bool(star.valid) == (low <= mass <= high)
        assert star.luminosity_lsun == 0.0
        assert star.teff_k == 0.0
        assert all(np.all(np.isfinite(column)) for column in star)


def test_arrays() -> None:
    star = black_hole(np.array([[1.0, 5.0], [20.0, 200.0]]))
    assert star.radius_rsun.shape == (2, 2)
    assert star.valid.tolist() == [[False, True], [True, False]]
