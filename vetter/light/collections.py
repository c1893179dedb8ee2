"""Reading a user's own collection of model atmospheres.

Two open layouts are understood. Wavelengths are in angstrom, fluxes are surface fluxes in erg s-1 cm-2 A-1.

- ``catalog.fits``: a FITS table with INDEX ("teff,metallicity,logg") and FILENAME ("folder/file.fits[column]", relative
  to the collection); every file is a FITS table with WAVELENGTH and one column per gravity. All-zero columns are
  taken as absent.
- ``index.csv`` or ``index.ecsv``: columns file, teff_k, logg, feh; every file is a FITS table (WAVELENGTH, FLUX, or its
  first two columns) or plain text of two columns.
"""

from __future__ import annotations

import re
import warnings
from collections.abc import Callable
from dataclasses import dataclass
from functools import partial
from pathlib import Path
from typing import Any

import numpy as np

from vetter.errors import Fault, InputError
from vetter.light.tables import FloatArray

CATALOGUE = "catalog.fits"
INDEXES = ("index.csv", "index.ecsv")
INDEX_COLUMNS = ("file", "teff_k", "logg", "feh")
LIMITS = {"teff_k": (500.0, 500000.0), "logg": (-2.0, 10.0), "feh": (-6.0, 1.5)}
_FILE_AND_COLUMN = re.compile(r"(?P<file>.+)\[(?P<column>[^\]]+)\]\s*")


@dataclass(frozen=True, eq=False)
class Model:
    """One model: Teff (K), log g (log10 cm/s2), [Fe/H] (dex), and its spectrum (n,) in angstrom and surface flux."""

    teff_k: float
    logg: float
    feh: float
    wavelength_angstrom: FloatArray
    flux: FloatArray


@dataclass(frozen=True)
class _Row:
    """One line of a catalogue or index: where it stands, which file and column, and the parameters."""

    key: str
    file: Path
    column: str
    teff_k: float
    logg: float
    feh: float


def read_collection(folder: Path) -> list[Model]:
    """Return the models of a collection, in the order of its catalogue.

    Raises InputError naming every line and file at fault.
    """
    if (folder / CATALOGUE).is_file():
        source, rows = folder / CATALOGUE, _catalogue_rows(folder)
    else:
        source = next((folder / name for name in INDEXES if (folder / name).is_file()), folder)
        if source == folder:
            expected = f"{CATALOGUE} or {' or '.join(INDEXES)} in it"
            raise InputError.single(str(folder), "", None, expected, "See the README for the two layouts.")
        rows = _index_rows(source)
    faults = [fault for row in rows for fault in _row_faults(row)]
    models: list[Model] = []
    for row, found in zip(rows, _read_files(rows) if not faults else [], strict=False):
        if isinstance(found, str):
            faults.append(Fault(row.key, str(row.file), found, ""))
        elif found[1].any():
            models.append(Model(row.teff_k, row.logg, row.feh, *found))
    if faults:
        raise InputError(str(source), faults)
    return models


def _row_faults(row: _Row) -> list[Fault]:
    """Return what is wrong with the numbers or the file of one line."""
    faults = [
        Fault(f"{row.key} {name}", repr(getattr(row, name)), f"a number from {low:g} to {high:g}", "")
        for name, (low, high) in LIMITS.items()
        if not low <= getattr(row, name) <= high
    ]
    if not row.file.is_file():
        faults.append(Fault(f"{row.key} file", str(row.file), "a file of the collection", ""))
    return faults


def _number(text: object) -> float:
    """Return a number, NaN when it is not one: the range check then reports it."""
    try:
        return float(str(text))
    except ValueError:
        return float("nan")


def _fits_table(path: Path) -> Any:  # noqa: ANN401
    """Return the first table of a FITS file; nonstandard keywords of old files are not worth a warning."""
    from astropy.io import fits

    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        return fits.getdata(path, 1)


def _catalogue_rows(folder: Path) -> list[_Row]:
    """Return the lines of a catalogue table. Raises InputError when it has not the two columns."""
    try:
        table = _fits_table(folder / CATALOGUE)
        pairs = [(str(index), str(name)) for index, name in zip(table["INDEX"], table["FILENAME"], strict=True)]
    except (OSError, KeyError, TypeError, IndexError) as error:
        raise InputError.single(
            str(folder / CATALOGUE), "", None, f"a FITS table with INDEX and FILENAME ({error})"
        ) from error
    rows = []
    for line, (index, name) in enumerate(pairs, start=1):
        numbers = [_number(word) for word in index.split(",")]
        teff, feh, logg = (numbers + [np.nan] * 3)[:3]
        match = _FILE_AND_COLUMN.fullmatch(name)
        file, column = (match["file"], match["column"]) if match else (name, "")
        rows.append(_Row(f"row {line}", folder / file, column, teff, logg, feh))
    return rows


def _index_rows(path: Path) -> list[_Row]:
    """Return the lines of an index table. Raises InputError when a column is missing."""
    from astropy.table import Table

    try:
        table = Table.read(path, format="ascii.ecsv" if path.suffix == ".ecsv" else "ascii.csv")
    except (OSError, ValueError) as error:
        raise InputError.single(str(path), "", None, f"a table ({error})") from error
    missing = [name for name in INDEX_COLUMNS if name not in table.colnames]
    if missing:
        raise InputError.single(
            str(path), "columns", table.colnames, f"the columns {', '.join(INDEX_COLUMNS)}", f"Add {missing[0]}."
        )
    return [
        _Row(f"row {line}", path.parent / str(row["file"]), "", *(_number(row[name]) for name in INDEX_COLUMNS[1:]))
        for line, row in enumerate(table, start=1)
    ]


def _read_files(rows: list[_Row]) -> list[tuple[FloatArray, FloatArray] | str]:
    """Return the spectrum of each line, or what is wrong with it; each FITS file is opened once."""
    opened: dict[Path, Any] = {}
    found: list[tuple[FloatArray, FloatArray] | str] = []
    for row in rows:
        if row.file not in opened:
            opened[row.file] = _attempt(partial(_open, row.file))
        table = opened[row.file]
        spectrum = table if isinstance(table, str) else _attempt(partial(_columns, table, row.column))
        found.append(spectrum if isinstance(spectrum, str) else _checked(*spectrum))
    return found


def _attempt(action: Callable[[], Any]) -> Any:  # noqa: ANN401
    """Return what the action returns, or its failure in words."""
    try:
        return action()
    except (OSError, KeyError, ValueError, TypeError, IndexError) as error:
        return f"a readable spectrum ({error})"


def _open(path: Path) -> Any:  # noqa: ANN401
    """Return a FITS table or an array of text columns."""
    if path.suffixes[-1:] == [".gz"] or path.suffix.lower() in {".fits", ".fit"}:
        return _fits_table(path)
    return np.loadtxt(path, comments="#", ndmin=2)


def _columns(table: Any, column: str) -> tuple[FloatArray, FloatArray]:  # noqa: ANN401
    """Return wavelength and flux of an opened file."""
    if table.dtype.names is None:
        return np.asarray(table[:, 0], dtype=float), np.asarray(table[:, 1], dtype=float)
    names = {name.upper(): name for name in table.dtype.names}
    wave = names.get("WAVELENGTH", table.dtype.names[0])
    flux = names[column.upper()] if column else names.get("FLUX", table.dtype.names[1])
    return np.asarray(table[wave], dtype=float), np.asarray(table[flux], dtype=float)


def _checked(wavelength: FloatArray, flux: FloatArray) -> tuple[FloatArray, FloatArray] | str:
    """Return the spectrum, or what was expected of it."""
    if not (np.isfinite(wavelength).all() and np.isfinite(flux).all() and (flux >= 0.0).all()):
        return "finite wavelengths and fluxes, no flux below 0"
    if len(wavelength) < 2 or wavelength[0] <= 0.0 or not (np.diff(wavelength) > 0.0).all():
        return "ascending wavelengths in angstrom"
    return wavelength, flux
