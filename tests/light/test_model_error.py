"""The error of a synthetic magnitude: its table, giants, metallicity and bands that are not in the table."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from vetter.light import LightEngine
from vetter.light.model_error import FLOOR_MAG, metallicity_error_mag, nearest_band
from vetter.light.tables import LightTables, load_tables

VISUAL, INFRARED = "Generic/Johnson.V", "2MASS/2MASS.Ks"


@pytest.mark.parametrize(
    ("band", "teff_k", "logg", "expected"),
    [
        (VISUAL, 3000.0, 4.5, 0.08),
        (VISUAL, 6000.0, 4.5, 0.02),
        (VISUAL, np.sqrt(3000.0 * 6000.0), 4.5, 0.05),  # half-way in log Teff
        (VISUAL, 2000.0, 4.5, 0.08),
        (VISUAL, 40000.0, 4.5, 0.04),
        (VISUAL, 6000.0, 2.9, 0.06),
        (VISUAL, 6000.0, 3.0, 0.02),
        (INFRARED, 3000.0, 1.0, 0.12),
        (INFRARED, 6000.0, 4.5, FLOOR_MAG),
    ],
)
def test_table(engine: LightEngine, band: str, teff_k: float, logg: float, expected: float) -> None:
    assert engine.model_error_mag(band, teff_k, logg) == pytest.approx(expected, abs=1e-12)


@pytest.mark.parametrize(
    ("pivot_angstrom", "per_dex"), [(2300.0, 0.4), (3600.0, 0.4), (4400.0, 0.15), (9000.0, 0.07), (21600.0, 0.04)]
)
def test_metallicity_per_dex_of_solar_light(pivot_angstrom: float, per_dex: float) -> None:
    error = metallicity_error_mag(pivot_angstrom, np.full(3, 6000.0), np.array([-2.0, 0.0, 1.0]), known=False)
    assert error == pytest.approx([2 * per_dex, 0.0, per_dex])


@pytest.mark.parametrize(("teff_k", "per_dex"), [(3000.0, 0.2), (3500.0, 0.2), (4500.0, 0.03), (20000.0, 0.03)])
def test_metallicity_per_dex_where_the_light_follows_it(teff_k: float, per_dex: float) -> None:
    error = metallicity_error_mag(5500.0, np.array([teff_k]), np.array([-0.5]), known=True)
    assert error == pytest.approx([0.5 * per_dex])


@given(st.floats(-3.0, 1.0), st.floats(2000.0, 50000.0), st.floats(0.0, 5.0))
def test_metallicity_adds_in_quadrature(engine: LightEngine, feh: float, teff_k: float, logg: float) -> None:
    """The small world has no metallicity table: its light is solar, 0.07 mag per dex in V."""
    solar = engine.model_error_mag(VISUAL, teff_k, logg)
    assert engine.model_error_mag(VISUAL, teff_k, logg, feh) == pytest.approx(np.hypot(solar, 0.07 * abs(feh)))


def test_shipped_light_follows_metallicity_between_470_and_1000_nm() -> None:
    engine = LightEngine.build([VISUAL])
    poor = {band: float(engine.model_error_mag(band, 6000.0, 4.4, -1.0)) for band in load_tables().passbands}
    solar = {band: float(engine.model_error_mag(band, 6000.0, 4.4)) for band in poor}
    assert poor[VISUAL] == pytest.approx(np.hypot(solar[VISUAL], 0.03))
    assert poor["Generic/Johnson.B"] == pytest.approx(np.hypot(solar["Generic/Johnson.B"], 0.15))
    assert poor[INFRARED] == pytest.approx(np.hypot(solar[INFRARED], 0.04))


def test_untabulated_band_takes_the_nearest_in_wavelength(engine: LightEngine, world: LightTables) -> None:
    nearest = {band.id: nearest_band(world.model_errors, band, world.passbands) for band in world.passbands.values()}
    assert nearest["GAIA/GAIA3.G"] == VISUAL
    assert nearest["WISE/WISE.W1"] == INFRARED
    assert nearest[INFRARED] == INFRARED
    assert engine.model_error_mag("GAIA/GAIA3.G", 3000.0, 4.5) == engine.model_error_mag(VISUAL, 3000.0, 4.5)


def test_arrays_broadcast(engine: LightEngine) -> None:
    assert engine.model_error_mag(VISUAL, np.array([[3000.0], [6000.0]]), np.array([2.0, 4.0, 5.0])).shape == (2, 3)


def test_shipped_errors_are_sane() -> None:
    """Every band, every temperature: at least the floor, at most 2 mag, and less in the visual than the ultraviolet."""
    engine = LightEngine.build([VISUAL])
    for band in load_tables().passbands:
        errors = engine.model_error_mag(band, np.geomspace(2000, 100000, 30), np.array([[1.0], [4.5]]))
        assert (errors >= FLOOR_MAG).all()
        assert (errors <= 2.0).all()
    assert engine.model_error_mag(VISUAL, 5777.0, 4.44) < engine.model_error_mag("GALEX/GALEX.NUV", 5777.0, 4.44)
