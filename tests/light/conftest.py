"""A small world of light whose answers are known: black bodies with a line, smooth passbands, a power law of dust.

It is written in the shipped form and read with the shipped reader, so that these tests do not depend on the real
tables.
"""

from __future__ import annotations

import json
from pathlib import Path

import numpy as np
import pytest
from numpy.typing import NDArray

from vetter.light import Component, LightEngine
from vetter.light.tables import LightTables, read_tables

FloatArray = NDArray[np.float64]

SPEED_OF_LIGHT_ANGSTROM_S = 2.99792458e18
BANDS: dict[str, tuple[str, float, float]] = {
    # identifier: usual system, centre and width in angstrom
    "GALEX/GALEX.NUV": ("AB", 2300.0, 250.0),
    "Generic/Johnson.B": ("Vega", 4400.0, 400.0),
    "Generic/Johnson.V": ("Vega", 5500.0, 350.0),
    "GAIA/GAIA3.G": ("Vega", 6400.0, 1400.0),
    "2MASS/2MASS.Ks": ("Vega", 21600.0, 1100.0),
    "WISE/WISE.W1": ("Vega", 33500.0, 2500.0),
}
WHITE_DWARF_BANDS = ("Generic/Johnson.V", "GALEX/GALEX.NUV", "2MASS/2MASS.Ks", "Generic/Johnson.B")
WHITE_DWARF_EXCESS = dict(zip(WHITE_DWARF_BANDS, (1.0, 1.0, 1.1, 1.05), strict=True))
TEFF_K = np.array([2000, 2500, 3000, 3500, 4000, 4500, 5000, 6000, 7000, 8000, 10000, 14000, 20000, 30000, 50000.0])
WHITE_DWARF_TEFF_K = np.array([1500, 3000, 5000, 8000, 12000, 20000, 35000, 50000, 70000, 100000, 150000.0])
SURFACE_TO_TEN_PC = 3.0856776e17 / 6.957e8  # 10 pc in solar radii


def surface_planck(wavelength_angstrom: FloatArray, teff_k: FloatArray) -> FloatArray:
    """pi B_lambda in erg s-1 cm-2 A-1 (Planck 1901; constants CODATA 2018)."""
    metre = wavelength_angstrom * 1e-10
    exponent = 6.62607015e-34 * 2.99792458e8 / (metre * 1.380649e-23 * teff_k)
    watt_per_m3 = 2 * np.pi * 6.62607015e-34 * 2.99792458e8**2 / metre**5 * np.exp(-exponent) / -np.expm1(-exponent)
    return watt_per_m3 * 1e3 * 1e-10


def curve(centre: float, width: float) -> tuple[FloatArray, FloatArray]:
    """A smooth passband that ends at zero."""
    wavelength = np.linspace(centre - width, centre + width, 41)
    return wavelength, np.cos(np.pi * (wavelength - centre) / (2 * width)) ** 2


def slow_mean(node: FloatArray, flux: FloatArray, wavelength: FloatArray, throughput: FloatArray) -> float:
    """Photon-weighted mean flux on a mesh far finer than any table: the definition, not the recipe."""
    fine = np.linspace(wavelength[0], wavelength[-1], 20001)
    weight = np.interp(fine, wavelength, throughput) * fine
    return float(np.trapezoid(np.interp(fine, node, flux) * weight, fine) / np.trapezoid(weight, fine))


def _write_passbands(folder: Path, node: FloatArray) -> dict[str, tuple[float, FloatArray]]:
    """Write passbands whose Vega is a 10 kK black body; return usual zero flux and weights of each."""
    arrays: dict[str, FloatArray] = {}
    entries = []
    usual = {}
    rows = []
    vega = surface_planck(node, np.float64(1e4)) / SURFACE_TO_TEN_PC**2
    for i, (name, (system, centre, width)) in enumerate(BANDS.items()):
        wavelength, throughput = curve(centre, width)
        arrays[f"wavelength_{i}"], arrays[f"throughput_{i}"] = wavelength, throughput
        # Hat functions integrated one by one: slow, and not the code under test.
        near = np.flatnonzero((node > wavelength[0] - 500) & (node < wavelength[-1] + 500))
        row = np.zeros(len(node))
        row[near] = [slow_mean(node, np.eye(len(node))[j], wavelength, throughput) for j in near]
        rows.append(row)
        weight = throughput * wavelength
        pivot = float(np.sqrt(weight.sum() / (throughput / wavelength).sum()))
        zero = {"Vega": float(row @ vega), "AB": 3631e-23 * SPEED_OF_LIGHT_ANGSTROM_S / pivot**2}
        usual[name] = (zero[system], row)
        entries.append(
            {
                "id": name,
                "synonyms": [name.split(".")[-1] + "-like"],
                "usual_system": system,
                "pivot_angstrom": pivot,
                "width_angstrom": width,
                "zero_flux_vega": zero["Vega"],
                "zero_flux_ab": zero["AB"],
                "source": {"package": "none", "version": "0", "path": "made up"},
                "reference": "made up",
            }
        )
    np.savez(folder / "passbands.npz", weights=np.array(rows), **arrays)
    (folder / "passbands.json").write_text(json.dumps(entries), encoding="utf-8")
    return usual


def _write_white_dwarfs(folder: Path, node: FloatArray, usual: dict[str, tuple[float, FloatArray]]) -> None:
    """Write white dwarfs that are black bodies, 10 % brighter in Ks, 5 % in B, fainter at high gravity, with a gap."""
    magnitudes = np.empty((len(WHITE_DWARF_TEFF_K), 3, len(WHITE_DWARF_BANDS)))
    for j, name in enumerate(WHITE_DWARF_BANDS):
        zero, row = usual[name]
        spectra = surface_planck(node, WHITE_DWARF_TEFF_K[:, None]) / SURFACE_TO_TEN_PC**2
        flux = WHITE_DWARF_EXCESS[name] * np.array([row @ spectrum for spectrum in spectra])
        magnitudes[:, :, j] = (-2.5 * np.log10(flux / zero))[:, None] + np.array([0.0, 0.02, 0.04])
    magnitudes[0, 0, 1] = np.nan
    np.savez(
        folder / "white_dwarfs.npz",
        da_teff_k=WHITE_DWARF_TEFF_K,
        da_logg=np.array([7.0, 8.0, 9.0]),
        da_bands=np.array(WHITE_DWARF_BANDS),
        da_surface_mag=magnitudes,
    )


def write_world(folder: Path) -> None:
    """Write all tables of the small world."""
    node = np.geomspace(905.0, 3.2e5, 900)
    logg = np.arange(0.0, 5.01, 0.5)
    line = -np.log1p(0.5 * np.exp(-(((node - 4861.0) / 60.0) ** 2)))
    jump = -np.where(node < 3646.0, 0.15, 0.0)
    continuum = np.log(surface_planck(node, TEFF_K[:, None]))
    gravity = (logg / 5.0)[None, :, None]
    ln_flux = continuum[:, None] + line * (0.5 + gravity) + jump * (1.5 - gravity)
    filled = np.zeros((len(TEFF_K), len(logg)), dtype=bool)
    np.savez(
        folder / "atmospheres.npz",
        wavelength_angstrom=node,
        teff_k=TEFF_K,
        logg=logg,
        ln_flux=ln_flux.astype(np.float32),
        filled=filled,
    )
    dust_node = np.geomspace(912.0, 3.2e5, 2000)
    np.savez(
        folder / "extinction.npz",
        wavelength_angstrom=dust_node,
        a=(dust_node / 5500.0) ** -1.3,
        b=3.0 * (dust_node / 5500.0) ** -2 - 3.0 * (dust_node / 5500.0) ** -1,
    )
    usual = _write_passbands(folder, node)
    _write_white_dwarfs(folder, node, usual)
    errors = {
        "bands": ["Generic/Johnson.V", "2MASS/2MASS.Ks"],
        "teff_k": [3000.0, 6000.0, 12000.0],
        "logg_giant_below": 3.0,
        "dwarf_mag": [[0.08, 0.04], [0.02, 0.002], [0.04, 0.03]],
        "giant_mag": [[0.16, 0.12], [0.06, 0.05], [0.06, 0.05]],
    }
    (folder / "model_error.json").write_text(json.dumps(errors), encoding="utf-8")


@pytest.fixture(scope="session")
def world_folder(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Folder of the small world's tables."""
    folder = tmp_path_factory.mktemp("light_world")
    write_world(folder)
    return folder


@pytest.fixture(scope="session")
def world(world_folder: Path) -> LightTables:
    """Tables of the small world."""
    return read_tables(world_folder)


@pytest.fixture(scope="session")
def engine(world: LightTables) -> LightEngine:
    """All bands of the small world and two windows."""
    return LightEngine.build(list(BANDS), [(480.0, 500.0), (850.0, 900.0)], a_v_max_mag=3.0, tables=world)


def stars(teff_k: object, logg: object, radius_rsun: object = 1.0, kind: str = "star", feh: object = 0.0) -> Component:
    """A component from anything that broadcasts."""
    values = np.broadcast_arrays(*(np.atleast_1d(np.asarray(v, dtype=float)) for v in (teff_k, logg, feh, radius_rsun)))
    return Component(kind, *values)


@pytest.fixture(scope="session")
def make_stars() -> object:
    """The function that makes components."""
    return stars
