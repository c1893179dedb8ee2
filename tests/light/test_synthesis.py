"""How the magnitude grid is refined, and how the tables are read."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from vetter.light import LightEngine
from vetter.light.synthesis import MAX_SPLITS, MID_CELL_TOLERANCE_MAG, SURFACE_TO_TEN_PC_MAG, _splits, _subdivide
from vetter.light.tables import LightTables, load_tables, read_tables


def test_distance_modulus_of_a_surface() -> None:
    """The bolometric magnitude of the Sun from sigma T^4 and the IAU 2015 zero point (resolution B2): 4.74."""
    surface = 5.670374419e-5 * 5772.0**4  # erg s-1 cm-2
    zero_at_ten_pc = 3.0128e35 / (4 * np.pi * 3.0856776e19**2)  # L0 = 3.0128e28 W in erg/s, 10 pc in cm
    assert -2.5 * np.log10(surface / zero_at_ten_pc) + SURFACE_TO_TEN_PC_MAG == pytest.approx(4.74, abs=0.001)


def test_halvings_follow_the_fourfold_law() -> None:
    miss = MID_CELL_TOLERANCE_MAG * np.array([0.0, 1.0, 1.01, 4.0, 4.1, 16.0, 1e9])
    assert _splits(miss).tolist() == [0, 0, 1, 1, 2, 2, MAX_SPLITS]


def test_subdivision_keeps_the_nodes() -> None:
    nodes = np.array([1.0, 2.0, 4.0, 5.0])
    assert _subdivide(nodes, np.array([0, 2, 1])).tolist() == [1.0, 2.0, 2.5, 3.0, 3.5, 4.0, 4.5, 5.0]
    assert _subdivide(nodes, np.zeros(3, dtype=int)).tolist() == nodes.tolist()


def test_steep_columns_get_more_nodes(world: LightTables) -> None:
    """The ultraviolet of cool black bodies bends; the Rayleigh-Jeans side is straight."""
    rows = [len(LightEngine.build([band], tables=world)._stars.slices[0].ln_teff) for band in ("NUV-like", "W1-like")]
    assert rows[0] > rows[1]


def test_columns_do_not_disturb_each_other(world: LightTables) -> None:
    """A band has the same magnitudes alone and beside one that needs more nodes."""
    from vetter.light import Component

    generator = np.random.default_rng(5)
    n = 200
    values = np.exp(generator.uniform(np.log(2000), np.log(50000), n)), generator.uniform(0, 5, n)
    body = Component("star", *values, np.zeros(n), np.ones(n))
    alone = LightEngine.build(["W1-like"], tables=world).magnitudes(body, 10.0, 1.0)[:, 0]
    beside = LightEngine.build(["NUV-like", "W1-like"], tables=world).magnitudes(body, 10.0, 1.0)[:, 1]
    assert beside == pytest.approx(alone, abs=1e-9)


def test_shared_tables_are_read_only() -> None:
    tables = load_tables()
    assert load_tables() is tables
    with pytest.raises(ValueError, match="read-only"):
        tables.atmospheres.teff_k[0] = 1.0


def test_reader_keeps_what_was_written(world: LightTables) -> None:
    assert world.atmospheres.ln_flux.shape == (15, 11, 900)
    assert world.passbands["GAIA/GAIA3.G"].usual_system == "Vega"
    assert world.passbands["GAIA/GAIA3.G"].source == "none 0 made up"
    assert world.white_dwarfs.bands[0] == "Generic/Johnson.V"


def test_incomplete_folder(tmp_path: Path) -> None:
    with pytest.raises(FileNotFoundError):
        read_tables(tmp_path)
