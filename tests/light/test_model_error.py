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
    ("pivot_angstrom", "per_dex"), [(2300.0, 0.3), (3600.0, 0.3), (5500.0, 0.05), (9000.0, 0.05), (21600.0, 0.02)]
)
def test_metallicity_per_dex(pivot_angstrom: float, per_dex: float) -> None:
    assert metallicity_error_mag(pivot_angstrom, np.array([-2.0, 0.0, 1.0])) == pytest.approx(
        [2 * per_dex, 0.0, per_dex]
    )


@given(st.floats(-3.0, 1.0), st.floats(2000.0, 50000.0), st.floats(0.0, 5.0))
def test_metallicity_adds_in_quadrature(engine: LightEngine, feh: float, teff_k: float, logg: float) -> None:
    solar = engine.model_error_mag(VISUAL, teff_k, logg)
    assert engine.model_error_mag(VISUAL, teff_k, logg, feh) == pytest.approx(np.hypot(solar, 0.05 * abs(feh)))


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
