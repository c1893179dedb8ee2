"""Subgiants and giants: borders of the region, and measured giants inside it."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from vetter.stars import evolved
from vetter.stars.main_sequence import main_sequence

masses = st.floats(*evolved.MASS_RANGE_MSUN)
unit = st.floats(0.0, 1.0)


def test_giant_branch_worked_by_hand() -> None:
    # Hurley, Pols & Tout 2000, eq. 46 at Z = 0.02: b1 .397, b2 .3827, b3 .7551, b4 .99603, b5 .25611; 1 Msun, 100 Lsun:
    # .99603 (100^.397 + .3827 100^.7551) = .99603 (6.223 + 12.387).
    assert evolved.giant_branch_radius_rsun(1.0, 100.0, 0.02) == pytest.approx(18.536, rel=2e-3)


def test_tip_of_the_giant_branch() -> None:
    # Eq. 49 at Z = 0.02: b9 2751.631 for 1 Msun. Published tips: log L 3.4 +- 0.1 (Serenelli et al. 2017, A&A 606, A33;
    # from memory).
    tip = evolved.helium_ignition_lsun(1.0, 0.02)
    assert tip == pytest.approx(2751.6, rel=1e-3)
    assert np.log10(tip) == pytest.approx(3.4, abs=0.1)


def test_ignition_is_continuous_at_the_flash() -> None:
    for z in (1e-4, 0.004, 0.02):
        zeta = np.log10(z / 0.02)
        flash = 1.995 + 0.25 * zeta + 0.087 * zeta**2
        below, above = evolved.helium_ignition_lsun([flash - 1e-9, flash + 1e-9], z)
        assert below == pytest.approx(above, rel=1e-6)


@pytest.mark.parametrize(
    ("core", "luminosity"), [(0.17, 5.7), (0.20, 15.0), (0.25, 57.0), (0.30, 171.0), (0.40, 960.0)]
)
def test_shell_around_a_core(core: float, luminosity: float) -> None:
    # Hurley, Pols & Tout 2000, eq. 37 at Z = 0.02, worked to the digits given.
    assert evolved.shell_luminosity_lsun(core) == pytest.approx(luminosity, rel=0.01)


@pytest.mark.parametrize(
    ("name", "mass", "radius", "teff", "feh"),
    [
        # Components of eclipsing binaries: DEBCat (Southworth 2015, ASPC 496, 164) and the papers named there.
        ("AI Phe, subgiant", 1.2439, 2.9329, 5094.0, -0.14),
        ("TZ For, giant", 2.0568, 8.3407, 4932.0, 0.02),
        ("TZ For, F subgiant", 1.9579, 3.9701, 6353.0, 0.02),
        ("KIC 8410637, giant", 1.472, 10.595, 4603.0, 0.02),
    ],
)
def test_measured_giants_lie_in_the_region(name: str, mass: float, radius: float, teff: float, feh: float) -> None:
    log_l = np.log10(radius**2 * (teff / 5772.0) ** 4)
    borders = evolved.region(mass, feh)
    low, high = float(borders.log_luminosity_low), float(borders.log_luminosity_high)
    assert low < log_l < high, name
    rise = (log_l - low) / (high - low)
    cool, hot = evolved.evolved_star(mass, rise, np.array([0.0, 1.0]), feh).teff_k
    assert cool < teff < hot, name


@pytest.mark.parametrize("mass", [1.0, 2.0])
def test_red_giants_follow_the_branch(mass: float) -> None:
    # A giant of 50 Lsun has 4400-4900 K (red giants with interferometric radii; from memory).
    radius = evolved.giant_branch_radius_rsun(mass, 50.0, 0.02)
    assert 4400.0 < 5772.0 * 50.0**0.25 / np.sqrt(radius) < 4900.0


@given(mass=masses, rise=unit, warmth=unit, feh=st.floats(-3.0, 0.7))
def test_every_point_is_a_star(mass: float, rise: float, warmth: float, feh: float) -> None:
    star = evolved.evolved_star(mass, rise, warmth, feh)
    assert star.valid
    assert 1500.0 < star.teff_k < 60000.0
    assert star.radius_rsun**2 * (star.teff_k / 5772.0) ** 4 == pytest.approx(float(star.luminosity_lsun))
    assert 10**star.logg == pytest.approx(27420.0 * mass / float(star.radius_rsun) ** 2, rel=3e-4)


def test_the_corner_next_to_the_main_sequence() -> None:
    mass = np.array([0.9, 1.2, 6.0, 20.0])
    corner, end = evolved.evolved_star(mass, 0.0, 1.0, 0.0), main_sequence(mass, 1.0, 0.0)
    assert corner.teff_k == pytest.approx(end.teff_k)
    assert np.all(corner.luminosity_lsun <= end.luminosity_lsun * (1.0 + 1e-12))


def test_up_is_brighter_and_warm_is_smaller() -> None:
    up = evolved.evolved_star(1.5, np.linspace(0.0, 1.0, 50), 0.3, 0.0)
    assert np.all(np.diff(up.luminosity_lsun) > 0.0)
    warm = evolved.evolved_star(1.5, 0.5, np.linspace(0.0, 1.0, 50), 0.0)
    assert np.all(np.diff(warm.radius_rsun) < 0.0)
    assert np.all(np.diff(warm.teff_k) > 0.0)


def test_no_star_outside_the_ranges() -> None:
    star = evolved.evolved_star(
        [0.4, 61.0, 1.0, 1.0, 1.0, np.nan, 1.0],
        [0.5, 0.5, 1.1, 0.5, 0.5, 0.5, 0.5],
        [0.5, 0.5, 0.5, -0.1, 0.5, 0.5, 0.5],
        [0.0, 0.0, 0.0, 0.0, 0.8, 0.0, 0.0],
    )
    assert star.valid.tolist() == [False] * 6 + [True]
    assert all(np.all(np.isfinite(column)) for column in star)
