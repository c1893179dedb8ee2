"""G, BP, RP of our solar surfaces against an independent grid: models of Castelli & Kurucz 2003 in dustapprox 0.2.0.

``gaia_grid.npz`` beside this file is the solar slice of that grid, 4500-50000 K; written by the table builder.
"""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from numpy.typing import NDArray

from vetter.light import Component, LightEngine
from vetter.light.synthesis import SURFACE_TO_TEN_PC_MAG
from vetter.light.tables import DustTable, LightTables, load_tables

FloatArray = NDArray[np.float64]
BANDS = ["GAIA/GAIA3.G", "GAIA/GAIA3.Gbp", "GAIA/GAIA3.Grp"]
G_MAG, COLOUR_MAG = 0.02, 0.03

# The grid's extinction is the law of Fitzpatrick 1999 at R_V 3.1, everywhere 1.083 times that of dust_extinction: the
# ratio in G, BP and RP at 10500 K, log g 4, A0 1 is 1.082, 1.084, 1.084. With Gordon et al. 2023, which we ship, the
# same A0 gives G 0.05-0.15 and BP-RP 0.06-0.25 mag less from A0 1 to 5: that is the law, not the tables.
A_V_PER_A0 = 1.083


@pytest.fixture(scope="module")
def grid() -> dict[str, FloatArray]:
    with np.load(Path(__file__).with_name("gaia_grid.npz"), allow_pickle=False) as archive:
        return {key: archive[key].astype(float) for key in archive.files}


def fitzpatrick(tables: LightTables) -> LightTables:
    """The tables with the dust law of Fitzpatrick 1999, PASP 111, 63, where the Gaia bands are."""
    import astropy.units as u
    from dust_extinction.parameter_averages import F99

    wavelength = np.geomspace(1200.0, 32000.0, 4000)
    law = np.asarray(F99(Rv=3.1)(wavelength * 1e-4 * u.um), dtype=float)
    return replace(tables, dust=DustTable(wavelength, law, np.zeros_like(law)))


@pytest.fixture(scope="module")
def misses(grid: dict[str, FloatArray]) -> dict[str, FloatArray]:
    """Ours minus the grid's in G and BP-RP, (nt, ng, na); the grid has no zero points, so ours are taken out."""
    tables = fitzpatrick(load_tables())
    a_v = grid["a0_mag"] * A_V_PER_A0
    engine = LightEngine.build(BANDS, a_v_max_mag=float(a_v.max()), tables=tables)
    teff, logg, dust = (axis.ravel() for axis in np.meshgrid(grid["teff_k"], grid["logg"], a_v, indexing="ij"))
    body = Component("star", teff, logg, np.zeros(teff.size), np.ones(teff.size))
    ours = engine.magnitudes(body, 10.0, dust) - SURFACE_TO_TEN_PC_MAG
    ours -= 2.5 * np.log10([tables.passbands[band].zero_flux["Vega"] for band in BANDS])
    difference = ours.reshape(grid["mag"].shape) - grid["mag"]
    return {"G": difference[..., 0], "BP-RP": difference[..., 1] - difference[..., 2]}


def test_dwarfs_and_subgiants_with_and_without_dust(grid: dict[str, FloatArray], misses: dict[str, FloatArray]) -> None:
    """Log g 3 and more, 4500-50000 K, A_V 0 to 5.4."""
    kept = grid["logg"] >= 3.0
    assert np.nanmax(np.abs(misses["G"][:, kept])) <= G_MAG
    assert np.nanmax(np.abs(misses["BP-RP"][:, kept])) <= COLOUR_MAG


def test_giants(grid: dict[str, FloatArray], misses: dict[str, FloatArray]) -> None:
    """Log g below 3: BP-RP of 5250-6500 K is up to 0.04 mag redder than the grid, G of 4500 K, log g 0 0.023 fainter.

    Ours are the models of 1993 there; dwarfs carry the blue correction measured on solar-type stars, which is what
    separates the two generations of models, and which fades out by log g 2.5 for want of evidence.
    """
    low = grid["logg"] < 3.0
    warm = (grid["teff_k"] > 5000.0) & (grid["teff_k"] < 6600.0)
    assert np.nanmax(np.abs(misses["G"][:, low])) <= 0.025
    assert np.nanmax(np.abs(misses["BP-RP"][:, low][~warm])) <= COLOUR_MAG
    assert np.nanmax(np.abs(misses["BP-RP"][:, low][warm])) <= 0.041
    known = misses["BP-RP"][np.isfinite(misses["BP-RP"])]
    assert np.mean(np.abs(known) <= COLOUR_MAG) >= 0.95
