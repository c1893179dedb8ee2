"""White dwarfs: the published magnitudes as they are, other bands and gaps in between, dust, and the hot end."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import numpy as np
import pytest
from numpy.typing import NDArray

from vetter.light import Component, LightEngine
from vetter.light.tables import LightTables, load_tables

Make = Callable[..., Component]
FloatArray = NDArray[np.float64]


def planck(wavelength_cm: FloatArray, teff_k: float) -> FloatArray:
    """F_lambda (erg s-1 cm-2 A-1) at 10 pc of a black body of 1 solar radius (c2 = 1.438776877 cm K, CODATA 2018)."""
    x = 1.438776877 / (wavelength_cm * teff_k)
    flux = 2 * np.pi * 6.62607015e-27 * 2.99792458e10**2 / wavelength_cm**5 / np.expm1(x) * 1e-8
    return flux / (3.0856776e17 / 6.957e8) ** 2


def test_tabulated_magnitudes_come_back(engine: LightEngine, world: LightTables, make_stars: Make) -> None:
    table = world.white_dwarfs
    for j, band in enumerate(table.bands):
        column = engine.bands.index(band)
        for g, logg in enumerate(table.logg):
            values = engine.magnitudes(make_stars(table.teff_k, logg, kind="white_dwarf"), 10.0, 0.0)[:, column]
            known = np.isfinite(table.surface_mag[:, g, j])
            assert values[known] == pytest.approx(table.surface_mag[known, g, j], abs=1e-9)


def test_a_gap_is_filled_from_its_neighbours(engine: LightEngine, world: LightTables, make_stars: Make) -> None:
    """NUV is missing at 1500 K, log g 7, beyond the other bands: B's 5 % over a black body are held."""
    assert np.isnan(world.white_dwarfs.surface_mag[0, 0, 1])
    full, gap = (engine.magnitudes(make_stars(1500.0, g, kind="white_dwarf"), 10.0, 0.0)[0, 0] for g in (8.0, 7.0))
    # At log g 8 the table has NUV itself: a bare black body, 0.02 mag fainter for its gravity.
    assert gap == pytest.approx(full - 0.02 - 2.5 * np.log10(1.05), abs=1e-6)


def test_band_between_the_tabulated_ones(engine: LightEngine, world: LightTables, make_stars: Make) -> None:
    """G is not tabulated: a black body's G plus a share of the excess in Ks, linear in ln wavelength from V."""
    band = world.passbands["GAIA/GAIA3.G"]
    pivots = [world.passbands[name].pivot_angstrom for name in ("Generic/Johnson.V", "2MASS/2MASS.Ks")]
    share = np.log(band.pivot_angstrom / pivots[0]) / np.log(pivots[1] / pivots[0])
    fine = np.linspace(band.wavelength_angstrom[0], band.wavelength_angstrom[-1], 5001)
    weight = np.interp(fine, band.wavelength_angstrom, band.throughput) * fine
    for teff_k in (8000.0, 20000.0, 100000.0):
        mean = np.average(planck(fine * 1e-8, teff_k), weights=weight)
        value = engine.magnitudes(make_stars(teff_k, 7.0, kind="white_dwarf"), 10.0, 0.0)
        expected = -2.5 * np.log10(mean * 1.1**share / band.zero_flux["Vega"])
        # The table has 155 nodes per e-fold of wavelength: linear interpolation of flux is good to (1/155)^2.
        assert value[0, engine.bands.index("GAIA/GAIA3.G")] == pytest.approx(expected, abs=3e-4)


def test_window_between_two_bands_follows_the_continuum(engine: LightEngine, make_stars: Make) -> None:
    """480-500 nm lies half-way between B (5 % over a black body) and V (none)."""
    values = engine.magnitudes(make_stars(50000.0, 7.0, kind="white_dwarf"), 10.0, 0.0)
    mean = planck(np.linspace(480e-7, 500e-7, 501), 50000.0).mean()
    share = np.log(490 / 440) / np.log(550 / 440)
    # The bands' pivots differ from their centres by up to 0.2 %, the share by 0.01, the light by 0.0005.
    assert values[0, -2] == pytest.approx(-2.5 * np.log10(mean * 1.05 ** (1 - share)), abs=1e-3)


@pytest.mark.parametrize("teff_k", [2500.0, 20000.0])
def test_dust_dims_like_an_atmosphere_of_the_same_temperature(
    engine: LightEngine, make_stars: Make, teff_k: float
) -> None:
    def dimming(body: Component) -> FloatArray:
        return engine.magnitudes(body, 10.0, 2.0) - engine.magnitudes(body, 10.0, 0.0)

    star, dwarf = dimming(make_stars(teff_k, 5.0)), dimming(make_stars(teff_k, 8.0, kind="white_dwarf"))
    # The dimming is tabulated at the white dwarfs' own temperatures only.
    assert dwarf == pytest.approx(star, abs=0.02 if teff_k < 3000 else 1e-3)


def test_dust_beyond_the_hottest_atmosphere_is_its_own(engine: LightEngine, make_stars: Make) -> None:
    body = make_stars([50000.0, 120000.0], 8.0, kind="white_dwarf")
    dimming = engine.magnitudes(body, 10.0, 1.0) - engine.magnitudes(body, 10.0, 0.0)
    assert dimming[1] == pytest.approx(dimming[0], abs=1e-12)


def test_hot_stars_brighten_like_white_dwarfs(engine: LightEngine, make_stars: Make) -> None:
    teff_k = [50000.0, 70000.0, 150000.0]
    stars = engine.magnitudes(make_stars(teff_k, 4.2), 10.0, 0.4)
    dwarfs = engine.magnitudes(make_stars(teff_k, 7.0, kind="white_dwarf"), 10.0, 0.4)
    assert stars - stars[0] == pytest.approx(dwarfs - dwarfs[0], abs=1e-12)


def test_gravity_is_clamped_to_the_table(engine: LightEngine, make_stars: Make) -> None:
    values = engine.magnitudes(make_stars(20000.0, [5.5, 7.0, 9.0, 9.6], kind="white_dwarf"), 10.0, 0.0)
    assert (values[0] == values[1]).all()
    assert (values[2] == values[3]).all()


def test_the_tables_order_of_bands_does_not_matter(world: LightTables, make_stars: Make) -> None:
    table = world.white_dwarfs
    turned = replace(table, bands=table.bands[::-1], surface_mag=table.surface_mag[:, :, ::-1])
    bands = ["GAIA/GAIA3.G", "Generic/Johnson.V"]
    body = make_stars([1500.0, 9000.0], 7.5, kind="white_dwarf")
    one, other = (
        LightEngine.build(bands, tables=replace(world, white_dwarfs=either)).magnitudes(body, 10.0, 0.3)
        for either in (table, turned)
    )
    assert one == pytest.approx(other, abs=1e-12)


# The shipped tables


def test_shipped_dwarf_of_ten_kilokelvin(make_stars: Make) -> None:
    """A 0.6 Msun DA of 10 kK has M_V 12.1 and B - V 0.15 (Bedard et al. 2020, ApJ 901, 93; from memory to 0.1)."""
    engine = LightEngine.build(["Generic/Johnson.B", "Generic/Johnson.V"])
    blue, visual = engine.magnitudes(make_stars(10000.0, 8.0, 0.0129, "white_dwarf"), 10.0, 0.0)[0]
    assert visual == pytest.approx(12.1, abs=0.15)
    assert blue - visual == pytest.approx(0.15, abs=0.1)


TABLES = {"white_dwarf": load_tables().white_dwarfs, "helium_white_dwarf": load_tables().helium_white_dwarfs}


@pytest.mark.parametrize("kind", TABLES)
def test_shipped_magnitudes_come_back_in_every_tabulated_band(kind: str, make_stars: Make) -> None:
    """Hydrogen and helium surfaces, at every temperature and gravity of the published tables."""
    table = TABLES[kind]
    assert table is not None
    assert len(table.bands) == 29
    engine = LightEngine.build(table.bands)
    teff, logg = (axis.ravel() for axis in np.meshgrid(table.teff_k, table.logg, indexing="ij"))
    found = engine.magnitudes(make_stars(teff, logg, kind=kind), 10.0, 0.0).reshape(table.surface_mag.shape)
    known = np.isfinite(table.surface_mag)
    assert known.mean() > 0.99
    np.testing.assert_allclose(found[known], table.surface_mag[known], atol=1e-9)
    assert np.isfinite(found).all()


def test_a_helium_surface_has_no_balmer_jump(make_stars: Make) -> None:
    """At 15 kK U-B of a DB is about 0.3 mag bluer than that of a DA, V-I nearly the same (Bedard et al. 2020)."""
    engine = LightEngine.build(["Generic/Johnson.U", "Generic/Johnson.B", "Generic/Johnson.V", "Generic/Cousins.I"])
    hydrogen, helium = (engine.magnitudes(make_stars(15000.0, 8.0, kind=kind), 10.0, 0.0)[0] for kind in TABLES)
    difference = helium - hydrogen
    assert -0.5 < difference[0] - difference[1] < -0.1
    assert abs(difference[2] - difference[3]) < 0.1


def test_shipped_untabulated_bands_are_near_the_atmospheres(make_stars: Make) -> None:
    """TESS, Hp and UVM2 are interpolated; hot hydrogen atmospheres of log g 5 tell the same colours."""
    bands = ["Generic/Johnson.V", "TESS/TESS.Red", "Hipparcos/Hipparcos.Hp", "Swift/UVOT.UVM2"]
    engine = LightEngine.build(bands)
    star = engine.magnitudes(make_stars(30000.0, 5.0), 10.0, 0.0)[0]
    dwarf = engine.magnitudes(make_stars(30000.0, 7.0, kind="white_dwarf"), 10.0, 0.0)[0]
    # Optical 0.05: what Kurucz 1993 and the white-dwarf models differ by in tabulated bands; ultraviolet 0.15.
    assert (dwarf - dwarf[0])[1:3] == pytest.approx((star - star[0])[1:3], abs=0.05)
    assert dwarf[3] - dwarf[0] == pytest.approx(star[3] - star[0], abs=0.15)


def test_shipped_hot_end_is_finite_and_monotonic(make_stars: Make) -> None:
    engine = LightEngine.build(sorted(load_tables().passbands), [(300.0, 310.0), (2100.0, 2200.0)])
    values = engine.magnitudes(make_stars(np.linspace(45000.0, 150000.0, 60), 5.0), 10.0, 1.0)
    assert np.isfinite(values).all()
    assert (np.diff(values, axis=0) < 0.0).all()
