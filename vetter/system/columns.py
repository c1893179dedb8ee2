"""Tables of measurements in CSV or ECSV files: named columns of numbers and text, every bad cell reported by row.

Rows count from 1 below the header. Columns that are not asked for are left alone: catalogues carry many.
"""

from __future__ import annotations

import csv
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path

from vetter.errors import Fault, InputError
from vetter.system.faults import MOST_SHOWN_OF_DATA_FILE, FaultLog
from vetter.system.kinds import Kind, Number
from vetter.system.text_files import read_text

_ECSV_MARK = "# %ECSV"


@dataclass(frozen=True)
class Column:
    """A column of a data file: its name, what its cells may be, and whether it may be absent."""

    name: str
    kind: Kind
    optional: bool = False


@dataclass(frozen=True)
class _Cells:
    """A file's columns as they stand: names, one sequence of cells per row, units by column where stated."""

    names: tuple[str, ...]
    rows: Sequence[Sequence[object]]
    units: Mapping[str, str]


def read_columns(path: Path, columns: Sequence[Column]) -> list[dict[str, object]]:
    """Return the rows of a CSV or ECSV file, each with the columns asked for; an absent optional cell is None.

    Raises
    ------
    InputError : unreadable, no rows, a column missing or in another unit, or any cell that its column refuses
    """
    text = read_text(path)
    cells = _ecsv_cells(path, text) if text.startswith(_ECSV_MARK) else _csv_cells(path, text)
    log = FaultLog(str(path), MOST_SHOWN_OF_DATA_FILE)
    places = _find_columns(cells, columns, log)
    _check_units(cells, columns, log)
    if not cells.rows:
        log.add("", None, "at least one row below the header", "Add the measurements.")
    log.raise_if_any()
    rows = [_read_row(row, number, columns, places, log) for number, row in enumerate(cells.rows, start=1)]
    log.raise_if_any()
    return rows


def _find_columns(cells: _Cells, columns: Sequence[Column], log: FaultLog) -> dict[str, int]:
    """Return the place of each column asked for; record those that are absent or there twice."""
    places = {}
    for column in columns:
        count = cells.names.count(column.name)
        if count == 1:
            places[column.name] = cells.names.index(column.name)
        elif count > 1:
            log.add(f"column {column.name}", None, "one column of this name", "Remove the others.")
        elif not column.optional:
            found = ", ".join(cells.names)[:200] or "none"
            log.add(f"column {column.name}", None, f"a column of this name; found {found}", "Add or rename it.")
    return places


def _check_units(cells: _Cells, columns: Sequence[Column], log: FaultLog) -> None:
    """Record columns whose stated unit is not the one that their name promises."""
    for column in columns:
        stated = cells.units.get(column.name, "").replace(" ", "")
        wanted = column.kind.unit if isinstance(column.kind, Number) else ""
        # Magnitudes may be stated with their system, as in mag(AB).
        if stated and stated.split("(")[0] != wanted:
            expected = f"the unit {wanted}" if wanted else "no unit"
            log.add(f"column {column.name}", cells.units[column.name], expected, "Convert the column, or correct it.")


def _read_row(
    row: Sequence[object], number: int, columns: Sequence[Column], places: Mapping[str, int], log: FaultLog
) -> dict[str, object]:
    """Return one row's accepted values; record what is refused."""
    values: dict[str, object] = {}
    for column in columns:
        place = places.get(column.name)
        cell = row[place] if place is not None and place < len(row) else None
        if isinstance(cell, str):
            cell = _from_text(cell, column.kind)
        accepted = None if cell is None else column.kind.accept(cell)
        if accepted is None and not (column.optional and cell is None):
            mend = column.kind.mend(cell) if cell is not None else "Fill the cell, or remove the row."
            log.add(f"row {number}, {column.name}", cell, column.kind.expected, mend)
        values[column.name] = accepted
    return values


def _from_text(cell: str, kind: Kind) -> object:
    """Return a cell's text as what it stands for: None when blank, a float in a column of numbers."""
    text = cell.strip()
    if not text:
        return None
    if not isinstance(kind, Number) or "_" in text:
        return text
    try:
        return float(text)
    except ValueError:
        return text


def _csv_cells(path: Path, text: str) -> _Cells:
    """Return the cells of a CSV file; lines that begin with # and blank lines are passed over."""
    lines = [line for line in text.splitlines() if line.strip() and not line.lstrip().startswith("#")]
    try:
        rows = list(csv.reader(lines, skipinitialspace=True, strict=True))
    except csv.Error as error:
        fault = Fault("", "", f"comma-separated values ({error})", "Check quotes and commas.")
        raise InputError(str(path), [fault]) from None
    names = tuple(name.strip() for name in rows[0]) if rows else ()
    log = FaultLog(str(path), MOST_SHOWN_OF_DATA_FILE)
    for number, row in enumerate(rows[1:], start=1):
        if len(row) != len(names):
            expected = f"{len(names)} cells, as the header has"
            log.add(f"row {number}", f"{len(row)} cells", expected, "Check the commas of this row.")
    log.raise_if_any()
    return _Cells(names, rows[1:], {})


def _ecsv_cells(path: Path, text: str) -> _Cells:
    """Return the cells of an ECSV file (astropy's enhanced CSV), masked ones as None."""
    import warnings

    from astropy.io import ascii as astropy_ascii

    try:
        with warnings.catch_warnings():
            # The reader warns about units it does not know; the check of units says it better.
            warnings.simplefilter("ignore")
            table = astropy_ascii.read(text, format="ecsv", guess=False)
            rows = list(zip(*(table[name].tolist() for name in table.colnames), strict=True))
            units = {name: str(table[name].unit or "") for name in table.colnames}
    except (ValueError, TypeError, KeyError, IndexError, AttributeError, RecursionError) as error:
        reason = " ".join(str(error).split())[:200]
        mend = "Write it with astropy's Table.write(..., format='ascii.ecsv'), or as CSV."
        raise InputError(str(path), [Fault("", "", f"an ECSV table ({reason})", mend)]) from None
    return _Cells(tuple(table.colnames), rows, units)
