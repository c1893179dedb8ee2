"""A user's own passband: wavelength and throughput from a text file or a FITS table.

Text: two columns, wavelength in angstrom and throughput, split by blanks or commas; lines that begin with # are
passed over. FITS: the first table; its columns are named WAVELENGTH and THROUGHPUT, or are the first two; the
wavelength's unit is read from the header and is angstrom when none is stated.
"""

from __future__ import annotations

import io
from pathlib import Path
from typing import Any, Final

from vetter.errors import Fault, InputError
from vetter.system.faults import MOST_SHOWN_OF_DATA_FILE, FaultLog
from vetter.system.kinds import Number, as_number
from vetter.system.text_files import read_bytes, read_text

_ANGSTROM: Final = Number(900.0, 300000.0, "angstrom")
_THROUGHPUT: Final = Number(0.0, 1e6)
_NM_PER_ANGSTROM: Final = 0.1
_ANGSTROM_PER: Final = {
    **dict.fromkeys(("angstrom", "angstroms", "aa", "a"), 1.0),
    **dict.fromkeys(("nm", "nanometer", "nanometers"), 10.0),
    **dict.fromkeys(("um", "micron", "microns", "micrometer", "micrometers"), 1e4),
}

Points = list[tuple[float, float]]


def read_passband(path: Path) -> tuple[tuple[float, ...], tuple[float, ...]]:
    """Return wavelengths (nm, rising) and throughputs (>= 0, any scale) of a photon-counting passband.

    Raises
    ------
    InputError : unreadable, not two columns of numbers, fewer than two points, wavelengths outside
        900-300000 angstrom or not strictly rising, negative throughput, or no light passed at all
    """
    points = _fits_points(path) if read_bytes(path).startswith(b"SIMPLE  =") else _text_points(path)
    log = FaultLog(str(path), MOST_SHOWN_OF_DATA_FILE)
    for number, (wavelength, throughput) in enumerate(points, start=1):
        if not _ANGSTROM.holds(wavelength):
            log.add(f"row {number}, wavelength", wavelength, _ANGSTROM.expected, "Give wavelengths in angstrom.")
        if not _THROUGHPUT.holds(throughput):
            log.add(f"row {number}, throughput", throughput, _THROUGHPUT.expected, _THROUGHPUT.mend(throughput))
        if number > 1 and wavelength <= points[number - 2][0]:
            expected = f"more than the {points[number - 2][0]:g} of the row before"
            log.add(f"row {number}, wavelength", wavelength, expected, "Sort by wavelength; each only once.")
    if len(points) < 2:
        log.add("", f"only {len(points)} row", "at least two rows of wavelength and throughput", "Add the curve.")
    elif not any(throughput > 0.0 for _, throughput in points):
        log.add("throughput", 0.0, "above zero somewhere", "Check the second column.")
    log.raise_if_any()
    wavelengths = tuple(wavelength * _NM_PER_ANGSTROM for wavelength, _ in points)
    return wavelengths, tuple(throughput for _, throughput in points)


def _text_points(path: Path) -> Points:
    """Return the rows of a two-column text file; a first row of words is taken for a header."""
    lines = [line.replace(",", " ").split() for line in read_text(path).splitlines()]
    rows = [cells for cells in lines if cells and not cells[0].startswith("#")]
    if rows and all(_number(cell) is None for cell in rows[0]):
        rows = rows[1:]
    log = FaultLog(str(path), MOST_SHOWN_OF_DATA_FILE)
    points: Points = []
    for number, cells in enumerate(rows, start=1):
        values = [value for value in map(_number, cells) if value is not None]
        if len(cells) == len(values) == 2:
            points.append((values[0], values[1]))
        else:
            expected = "two numbers, wavelength in angstrom and throughput"
            log.add(f"row {number}", " ".join(cells), expected, "Keep these two columns only.")
    log.raise_if_any()
    return points


def _number(cell: str) -> float | None:
    """Return a cell as a finite number, or None."""
    try:
        return as_number(float(cell)) if "_" not in cell else None
    except ValueError:
        return None


def _fits_points(path: Path) -> Points:
    """Return the rows of the first table of a FITS file, wavelengths in angstrom."""
    import warnings

    from astropy.io import fits

    try:
        with warnings.catch_warnings():
            # A header that breaks a rule of the standard is no fault as long as the two columns can be read.
            warnings.simplefilter("ignore")
            with fits.open(io.BytesIO(path.read_bytes()), memmap=False) as hdus:
                table = next(hdu for hdu in hdus if isinstance(hdu, fits.BinTableHDU | fits.TableHDU))
                return _points_of_table(table)
    except StopIteration:
        reason = "it has none"
    except (OSError, ValueError, TypeError, KeyError, IndexError, AttributeError, fits.VerifyError) as error:
        reason = " ".join(str(error).split())[:200]
    mend = "Columns WAVELENGTH, with its unit, and THROUGHPUT; or use a text file."
    raise InputError(str(path), [Fault("", "", f"a FITS table of two columns ({reason})", mend)])


def _points_of_table(table: Any) -> Points:  # noqa: ANN401 - astropy has no types
    """Return (wavelength in angstrom, throughput) of a FITS table; raises ValueError where it has no such."""
    columns = list(table.columns)
    if len(columns) < 2:
        raise ValueError(f"it has {len(columns)}")
    by_name = {column.name.casefold(): column for column in columns}
    first = by_name.get("wavelength", columns[0])
    second = by_name.get("throughput", columns[1])
    unit = str(first.unit or "angstrom").strip().casefold()
    if unit not in _ANGSTROM_PER:
        raise ValueError(f"the wavelength's unit {first.unit!r} is none of {', '.join(_ANGSTROM_PER)}")
    values = zip(table.data[first.name], table.data[second.name], strict=True)
    points = [(float(wavelength) * _ANGSTROM_PER[unit], float(throughput)) for wavelength, throughput in values]
    if any(as_number(value) is None for point in points for value in point):
        raise ValueError("some values are not numbers")
    return points
