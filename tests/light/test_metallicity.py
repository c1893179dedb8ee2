"""What [Fe/H] does to the light: the published table, its interpolation, and the bands between."""

from __future__ import annotations

from collections.abc import Callable
from importlib.resources import files

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from numpy.typing import NDArray

from vetter.light import Component, LightEngine
from vetter.light.magnitude_grid import CHUNK
from vetter.light.metallicity import MetallicityCorrection, follows_metallicity
from vetter.light.tables import LightTables, MetallicityTable, load_tables

FloatArray = NDArray[np.float64]
Make = Callable[..., Component]
GAIA = ("GAIA/GAIA3.G", "GAIA/GAIA3.Gbp", "GAIA/GAIA3.Grp")
BANDS = ["Generic/Johnson.B", "Generic/Johnson.V", *GAIA, "2MASS/2MASS.Ks"]


@pytest.fixture(scope="module")
def gaia() -> LightEngine:
    return LightEngine.build(BANDS, [(480.0, 500.0), (1500.0, 1600.0)])


def shift(engine: LightEngine, teff_k: float, logg: float, feh: float, a_v: float = 0.0) -> FloatArray:
    body = Component("star", *(np.array(v) for v in ([teff_k, teff_k], [logg, logg], [feh, 0.0], [1.0, 1.0])))
    poor, solar = engine.magnitudes(body, 10.0, a_v)
    return np.asarray(poor - solar)


def test_zero_at_solar_and_untouched_elsewhere(gaia: LightEngine) -> None:
    assert (shift(gaia, 5777.0, 4.44, 0.0) == 0.0).all()
    poor = shift(gaia, 6000.0, 4.5, -1.0)
    assert poor[[0, 5, 7]] == pytest.approx(0.0, abs=1e-12)
    assert (poor[[1, 2, 3, 4, 6]] > 0.03).all()


def test_published_nodes_come_back(gaia: LightEngine) -> None:
    """At the grid's own Teff, log g and [Fe/H] the difference is the table's, whatever the dust."""
    with (files("vetter.grids") / "metallicity.npz").open("rb") as stream, np.load(stream, allow_pickle=False) as table:
        teff, logg, feh, value = (table[key] for key in ("teff_k", "logg", "feh", "difference_mag"))
    for i, j, k in ((5, 8, 3), (12, 9, 7), (40, 7, 1), (0, 0, 0), (75, 10, 8)):
        for a_v in (0.0, 2.0):
            found = shift(gaia, float(teff[i]), float(logg[j]), float(feh[k]), a_v)[2:5]
            assert found == pytest.approx(value[i, j, k], abs=1e-6)


def test_size_of_the_published_effect(gaia: LightEngine) -> None:
    """Read off the source's rows by hand: 6000 K, log g 4.5, [Fe/H] -1 G 0.061, BP 0.046, RP 0.071 (two decimals)."""
    assert shift(gaia, 6000.0, 4.5, -1.0)[2:5] == pytest.approx([0.061, 0.046, 0.071], abs=0.003)


def test_bands_between_take_the_interpolated_difference(gaia: LightEngine) -> None:
    """V (5478 A) lies between BP (5110) and G (6218): in ln wavelength 0.354 of the way."""
    poor = shift(gaia, 6100.0, 4.2, -0.7)
    share = np.log(5477.7 / 5109.7) / np.log(6217.6 / 5109.7)
    assert poor[1] == pytest.approx((1 - share) * poor[3] + share * poor[2], abs=1e-5)
    assert poor[6] == pytest.approx(poor[3], abs=1e-12)  # the window at 490 nm is bluer than BP: held


@pytest.mark.parametrize(
    ("pivot", "expected"), [(4371.0, False), (4702.0, True), (9628.0, True), (12355.0, False), (2300.0, False)]
)
def test_which_bands_follow(pivot: float, expected: bool) -> None:
    assert follows_metallicity(pivot) is expected


@given(st.floats(2000.0, 60000.0), st.floats(-1.0, 6.0), st.floats(-6.0, 1.5), st.floats(1e-7, 1e-6))
def test_continuous_and_finite(teff_k: float, logg: float, feh: float, step: float) -> None:
    """Steepest between 3500 and 4000 K: 0.5 mag per dex, 3 mag per unit of ln Teff."""
    correction = small_correction()
    here, there = (
        correction.difference_mag(*(np.array([value]) for value in point))
        for point in ((teff_k, logg, feh), (teff_k * (1 + step), logg + step, feh + step))
    )
    assert np.isfinite(here).all()
    assert np.abs(here - there).max() < 20.0 * step


def small_correction() -> MetallicityCorrection:
    tables = load_tables()
    assert tables.metallicity is not None
    pivots = [tables.passbands[band].pivot_angstrom for band in GAIA]
    found = MetallicityCorrection.of(tables.metallicity, GAIA, pivots, tables.passbands)
    assert found is not None
    return found


def test_plane_is_interpolated_exactly() -> None:
    """A table that is a plane in (ln Teff, log g, [Fe/H]) has no interpolation error; beyond its ends it is held."""
    teff, logg, feh = np.array([4000.0, 6000.0, 9000.0]), np.array([1.0, 3.0, 5.0]), np.array([-2.0, 0.0, 0.5])
    plane = np.log(teff)[:, None, None] * feh + 0.1 * logg[:, None] * feh
    value = np.stack([plane, 2 * plane, 3 * plane], axis=-1).astype(np.float32)
    tables = load_tables()
    table = MetallicityTable(teff, logg, feh, GAIA, value)
    correction = MetallicityCorrection.of(table, GAIA, [6218.0, 5110.0, 7769.0], tables.passbands)
    assert correction is not None
    found = correction.difference_mag(np.array([5000.0, 5000.0]), np.array([2.2, 2.2]), np.array([-0.8, -5.0]))
    expected = [(np.log(5000.0) + 0.22) * -0.8, (np.log(5000.0) + 0.22) * -2.0]
    # The product Teff x [Fe/H] is bilinear, so trilinear interpolation is exact; 1e-5 is float32.
    assert found[:, 0] == pytest.approx(expected, abs=1e-5)
    assert found == pytest.approx(found[:, :1] * [1.0, 2.0, 3.0], abs=1e-5)


def test_chunks_agree_with_one_star_at_a_time(gaia: LightEngine) -> None:
    n = CHUNK + 3
    generator = np.random.default_rng(3)
    values = generator.uniform([4000.0, 2.0, -2.0], [9000.0, 5.0, 0.5], (n, 3)).T
    together = gaia.magnitudes(Component("star", *values, np.ones(n)), 10.0, 0.3)
    for i in (0, CHUNK - 1, CHUNK, n - 1):
        alone = gaia.magnitudes(Component("star", *values[:, [i]], np.ones(1)), 10.0, 0.3)
        assert together[i] == pytest.approx(alone[0], abs=1e-10)


def test_white_dwarfs_do_not_follow(gaia: LightEngine) -> None:
    values = (np.array([12000.0, 12000.0]), np.array([8.0, 8.0]), np.array([-2.0, 0.0]), np.array([0.012, 0.012]))
    one, other = gaia.magnitudes(Component("white_dwarf", *values), 10.0, 0.0)
    assert (one == other).all()


def test_world_without_a_table_is_solar(world: LightTables, make_stars: Make) -> None:
    engine = LightEngine.build(["GAIA/GAIA3.G"], tables=world)
    poor, solar = (engine.magnitudes(make_stars(6000.0, 4.0, feh=feh), 10.0, 0.0) for feh in (-1.0, 0.0))
    assert (poor == solar).all()
    assert not engine.metallicity_known("GAIA/GAIA3.G")


def test_nothing_to_correct_in_the_infrared() -> None:
    tables = load_tables()
    assert tables.metallicity is not None
    assert MetallicityCorrection.of(tables.metallicity, ["2MASS/2MASS.Ks"], [21603.0], tables.passbands) is None
