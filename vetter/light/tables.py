"""The shipped tables of light as frozen records, read once from the package data."""

from __future__ import annotations

import json
from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache
from importlib.resources import files
from importlib.resources.abc import Traversable
from typing import Any

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]


@dataclass(frozen=True, eq=False)
class Atmospheres:
    """Surface fluxes of stars on a grid of temperature and gravity.

    Attributes
    ----------
    wavelength_angstrom : (nw,) ascending
    teff_k : (nt,) ascending
    logg : (ng,) ascending, log10 of cm/s2
    ln_flux : (nt, ng, nw) float32, ln of the surface flux F_lambda in erg s-1 cm-2 A-1 (its integral is sigma T^4)
    filled : (nt, ng) True where no published model exists and a neighbour stands in
    """

    wavelength_angstrom: FloatArray
    teff_k: FloatArray
    logg: FloatArray
    ln_flux: NDArray[np.float32]
    filled: NDArray[np.bool_]


@dataclass(frozen=True, eq=False)
class Passband:
    """One photon-counting passband with its zero points.

    Attributes
    ----------
    id, synonyms : canonical name and the other names it answers to
    usual_system : "Vega" or "AB"
    pivot_angstrom, width_angstrom : pivot wavelength and equivalent width
    zero_flux : system name -> flux of magnitude zero (erg s-1 cm-2 A-1)
    source, reference : where the curve was taken from, and who measured it
    weights : (nw,) mean flux in the band = weights @ f, f on the atmospheres' wavelengths
    wavelength_angstrom, throughput : (n,) the curve itself
    """

    id: str
    synonyms: tuple[str, ...]
    usual_system: str
    pivot_angstrom: float
    width_angstrom: float
    zero_flux: Mapping[str, float]
    source: str
    reference: str
    weights: FloatArray
    wavelength_angstrom: FloatArray
    throughput: FloatArray


@dataclass(frozen=True, eq=False)
class WhiteDwarfTable:
    """Magnitudes of white-dwarf surfaces.

    Attributes
    ----------
    teff_k, logg : (nt,), (ng,) ascending
    bands : canonical identifiers of the tabulated bands
    surface_mag : (nt, ng, nb) magnitude in the band's usual system at 10 pc of a star of 1 solar radius with that
        surface; NaN where not tabulated
    """

    teff_k: FloatArray
    logg: FloatArray
    bands: tuple[str, ...]
    surface_mag: FloatArray


@dataclass(frozen=True, eq=False)
class DustTable:
    """A(lambda)/A(V) = a + b (1/R_V - 1/3.1) on ``wavelength_angstrom`` (Gordon et al. 2023, ApJ 950, 86)."""

    wavelength_angstrom: FloatArray
    a: FloatArray
    b: FloatArray


@dataclass(frozen=True, eq=False)
class ModelErrorTable:
    """One-sigma errors of synthetic magnitudes, (nt, nb) for dwarfs and for giants, on ``teff_k`` and ``bands``."""

    bands: tuple[str, ...]
    teff_k: FloatArray
    logg_giant_below: float
    dwarf_mag: FloatArray
    giant_mag: FloatArray


@dataclass(frozen=True, eq=False)
class MetallicityTable:
    """What metallicity does to the magnitudes of some bands.

    Attributes
    ----------
    teff_k, logg, feh : (nt,), (ng,), (nf,) ascending; ``feh`` holds 0
    bands : canonical identifiers
    difference_mag : (nt, ng, nf, nb) magnitude minus that of a solar star of the same Teff, log g and radius
    """

    teff_k: FloatArray
    logg: FloatArray
    feh: FloatArray
    bands: tuple[str, ...]
    difference_mag: NDArray[np.float32]


@dataclass(frozen=True, eq=False)
class LightTables:
    """Everything the light engine is built from.

    ``white_dwarfs`` have hydrogen surfaces; those of helium are None where a table lacks them. ``metallicity``
    corrects solar atmospheres; None where there is nothing to correct them with. ``slices`` holds the user's own
    atmospheres, ([Fe/H], atmospheres) ascending, which are used where they reach; empty without any.
    """

    atmospheres: Atmospheres
    passbands: Mapping[str, Passband]
    white_dwarfs: WhiteDwarfTable
    dust: DustTable
    model_errors: ModelErrorTable
    metallicity: MetallicityTable | None = None
    slices: tuple[tuple[float, Atmospheres], ...] = ()
    helium_white_dwarfs: WhiteDwarfTable | None = None


def _arrays(folder: Traversable, name: str) -> dict[str, NDArray[Any]]:
    """Read every array of an npz file; they are set read-only because the tables are shared."""
    with (folder / name).open("rb") as stream, np.load(stream, allow_pickle=False) as archive:
        arrays = {key: archive[key] for key in archive.files}
    for array in arrays.values():
        array.setflags(write=False)
    return arrays


def _one_line(source: str | Mapping[str, object]) -> str:
    """Return where a table came from as one line: package, version, path."""
    return source if isinstance(source, str) else " ".join(str(part) for part in source.values())


def _read_passbands(folder: Traversable) -> dict[str, Passband]:
    arrays = _arrays(folder, "passbands.npz")
    bands = [
        Passband(
            id=entry["id"],
            synonyms=tuple(entry["synonyms"]),
            usual_system=entry["usual_system"],
            pivot_angstrom=float(entry["pivot_angstrom"]),
            width_angstrom=float(entry["width_angstrom"]),
            zero_flux={"Vega": float(entry["zero_flux_vega"]), "AB": float(entry["zero_flux_ab"])},
            source=_one_line(entry["source"]),
            reference=str(entry["reference"]),
            weights=arrays["weights"][i],
            wavelength_angstrom=arrays[f"wavelength_{i}"],
            throughput=arrays[f"throughput_{i}"],
        )
        for i, entry in enumerate(json.loads((folder / "passbands.json").read_text(encoding="utf-8")))
    ]
    return {band.id: band for band in bands}


def _read_model_errors(folder: Traversable) -> ModelErrorTable:
    entry = json.loads((folder / "model_error.json").read_text(encoding="utf-8"))
    return ModelErrorTable(
        bands=tuple(entry["bands"]),
        teff_k=np.array(entry["teff_k"], dtype=float),
        logg_giant_below=float(entry["logg_giant_below"]),
        dwarf_mag=np.array(entry["dwarf_mag"], dtype=float),
        giant_mag=np.array(entry["giant_mag"], dtype=float),
    )


def _white_dwarf_table(arrays: Mapping[str, NDArray[Any]], surface: str) -> WhiteDwarfTable:
    """Return one surface's table: the arrays whose names begin with ``surface``, "da" or "db"."""
    return WhiteDwarfTable(
        teff_k=arrays[f"{surface}_teff_k"],
        logg=arrays[f"{surface}_logg"],
        bands=tuple(str(name) for name in arrays[f"{surface}_bands"]),
        surface_mag=arrays[f"{surface}_surface_mag"],
    )


def _read_metallicity(folder: Traversable) -> MetallicityTable | None:
    if not (folder / "metallicity.npz").is_file():
        return None
    arrays = _arrays(folder, "metallicity.npz")
    bands = tuple(str(name) for name in arrays.pop("bands"))
    return MetallicityTable(bands=bands, **arrays)


def read_tables(folder: Traversable) -> LightTables:
    """Read all tables of light from a folder of the shipped form (see ``grids/README.md``).

    Raises FileNotFoundError or KeyError when the folder is incomplete: shipped data, so a broken installation.
    """
    white_dwarfs = _arrays(folder, "white_dwarfs.npz")
    return LightTables(
        atmospheres=Atmospheres(**_arrays(folder, "atmospheres.npz")),
        passbands=_read_passbands(folder),
        white_dwarfs=_white_dwarf_table(white_dwarfs, "da"),
        dust=DustTable(**_arrays(folder, "extinction.npz")),
        model_errors=_read_model_errors(folder),
        metallicity=_read_metallicity(folder),
        helium_white_dwarfs=_white_dwarf_table(white_dwarfs, "db") if "db_teff_k" in white_dwarfs else None,
    )


@cache
def load_tables() -> LightTables:
    """Return the tables shipped with the package; read on first use, read-only afterwards."""
    return read_tables(files("vetter.grids"))
