"""Reading the tables about light: photometry, custom passbands, light limits, variability, imaging."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from pathlib import Path
from typing import Any, Final

from vetter.errors import InputError
from vetter.system.bands import canonical_band
from vetter.system.columns import Column, read_columns
from vetter.system.context import Context
from vetter.system.fields import Checked
from vetter.system.keys import BAND, IMAGING, MAGNITUDE, MAGNITUDE_ERROR, PASSBAND, PHOTOMETRY, SYSTEM, VARIABILITY
from vetter.system.model import CustomPassband, Imaging, Magnitude, MagnitudeLimit, Variability
from vetter.system.passband_files import read_passband

LEAST_MAGNITUDES: Final = 3
"""Measured magnitudes without which the light says nothing: temperature, dust and size of the seen star."""

PHOTOMETRY_COLUMNS: Final = (
    Column("band", BAND),
    Column("mag", MAGNITUDE),
    Column("error_mag", MAGNITUDE_ERROR),
    Column("system", SYSTEM, optional=True),
)

Raw = Mapping[str, object]


def read_passbands(tables: Sequence[Raw], context: Context) -> tuple[CustomPassband, ...]:
    """Return the user's own passbands with their curves (nm, rising)."""
    passbands: list[CustomPassband] = []
    for number, raw in enumerate(tables, start=1):
        checked = context.read(PASSBAND, raw, f"passband[{number}]")
        values = checked.values
        identifier = str(values.get("id", "")).strip()
        if canonical_band(identifier) is not None:
            context.log.add(checked.key("id"), identifier, "an identifier that is not built in", "Choose another.")
        if identifier and identifier in [passband.id for passband in passbands]:
            context.log.add(checked.key("id"), identifier, "a different identifier for each passband", "Change one.")
        if not checked.present & {"system", "zero_point_jy"}:
            mend = 'Add system = "AB" or "Vega".'
            context.log.add(checked.key("system"), None, "a magnitude system or a zero_point_jy", mend)
        curve = _curve(checked, context)
        # A faulty passband still names a band: its users are not at fault as well.
        passbands.append(
            CustomPassband(
                identifier,
                str(values.get("file", "")),
                str(values.get("system", "Vega")),
                values.get("zero_point_jy"),
                *curve,
            )
        )
    return tuple(passbands)


def _curve(checked: Checked, context: Context) -> tuple[tuple[float, ...], tuple[float, ...]]:
    """Return a passband's wavelengths and throughputs; both are empty when its file is faulty."""
    file = checked.values.get("file")
    if file is None:
        return (), ()
    try:
        return read_passband(context.folder / file)
    except InputError as error:
        context.log.absorb(checked.key("file"), file, error)
        return (), ()


def read_magnitude_file(path: Path, context: Context, name: str) -> list[tuple[str, Magnitude]]:
    """Return the magnitudes of a photometry file, each with its place there, under the file's ``name``.

    Raises
    ------
    InputError : the file or a cell of it is faulty; unknown bands go to the context's log
    """
    magnitudes = []
    for number, row in enumerate(read_columns(path, PHOTOMETRY_COLUMNS), start=1):
        place = f"{name}, row {number}, band"
        if (band := context.band(row["band"], place)) is not None:
            values: Any = {**row, "band": band, "system": row["system"] or context.usual_system(band)}
            magnitudes.append((place, Magnitude(**values)))
    return magnitudes


def read_photometry(
    top: Mapping[str, Any], context: Context, *, countable: bool
) -> tuple[tuple[Magnitude, ...], tuple[MagnitudeLimit, ...]]:
    """Return magnitudes and limits of ``photometry`` and ``photometry_file``, both optional in ``top``.

    ``countable``: neither of the two was refused, so that too few magnitudes are a fault of their own.
    """
    file = top.get("photometry_file")
    before = len(context.log)
    magnitudes: list[tuple[str, Magnitude]] = []
    limits: list[tuple[str, MagnitudeLimit]] = []
    for number, raw in enumerate(top.get("photometry", ()), start=1):
        entry = _read_entry(context.read(PHOTOMETRY, raw, f"photometry[{number}]"), context)
        place = f"photometry[{number}].band"
        if isinstance(entry, Magnitude):
            magnitudes.append((place, entry))
        elif entry is not None:
            limits.append((place, entry))
    if file is not None:
        try:
            magnitudes += read_magnitude_file(context.folder / file, context, file)
        except InputError as error:
            context.log.absorb("photometry_file", file, error)
    _report_repeats(magnitudes, limits, context)
    # With an entry at fault the count is not known, and counting would only repeat the complaint.
    if countable and len(context.log) == before and len(magnitudes) < LEAST_MAGNITUDES:
        expected = f"at least {LEAST_MAGNITUDES} measured magnitudes (limits do not count), got {len(magnitudes)}"
        context.log.add("photometry", None, expected, "Add [[photometry]] tables or a photometry_file.")
    return tuple(entry for _, entry in magnitudes), tuple(entry for _, entry in limits)


def _read_entry(checked: Checked, context: Context) -> Magnitude | MagnitudeLimit | None:
    """Return one ``[[photometry]]`` table as a measurement or a limit; None when it is faulty."""
    before = len(context.log)
    measured, limited = ({"mag", "error_mag"} & checked.present), ({"fainter_than_mag"} & checked.present)
    if bool(measured) == bool(limited):
        expected = "either mag with error_mag, or fainter_than_mag with confidence"
        mend = "Keep one of the two." if measured else "Add one of the two."
        context.log.add(checked.where, None, expected, mend)
    elif limited and "confidence" not in checked.present:
        context.log.add(checked.key("confidence"), None, "the confidence of the limit", "Add confidence = 0.95.")
    elif measured and "confidence" in checked.present:
        mend = "Remove it, or write fainter_than_mag instead of mag."
        context.log.add(checked.key("confidence"), checked.raw.get("confidence"), "no confidence beside mag", mend)
    band = context.band(checked.values.get("band"), checked.key("band"))
    if not checked.clean or len(context.log) > before or band is None:
        return None
    system = checked.values.get("system", context.usual_system(band))
    if limited:
        return MagnitudeLimit(band, checked.values["fainter_than_mag"], checked.values["confidence"], system)
    return Magnitude(band, checked.values["mag"].value, checked.values["mag"].error, system)


def _report_repeats(
    magnitudes: Sequence[tuple[str, Magnitude]], limits: Sequence[tuple[str, MagnitudeLimit]], context: Context
) -> None:
    """Record bands measured twice, and bands with both a measurement and a limit."""
    first: dict[str, str] = {}
    for place, entry in magnitudes:
        if entry.band in first:
            mend = f"It is there already ({first[entry.band].removesuffix('.band')}): average the two."
            context.log.add(place, entry.band, "one measurement of each band", mend)
        first.setdefault(entry.band, place)
    for place, limit in limits:
        if limit.band in first:
            mend = f"Keep the measurement ({first[limit.band].removesuffix('.band')}) or the limit."
            context.log.add(place, limit.band, "a measurement or a limit of a band, not both", mend)


def read_variability(raw: Raw, context: Context) -> Variability | None:
    """Return what the light curve allows, or None when the table is faulty."""
    checked = context.read(VARIABILITY, raw, "variability")
    if {"ellipsoidal_max_mag", "ellipsoidal_mag"} <= checked.present:
        expected = "a measured ellipsoidal_mag or the limit ellipsoidal_max_mag, not both"
        key = "ellipsoidal_max_mag"
        context.log.add(checked.key(key), raw.get(key), expected, "Keep one of the two.")
    band = context.band(checked.values.get("band"), "variability.band")
    return Variability(**{**checked.values, "band": band}) if checked.clean and band is not None else None


def read_imaging(raw: Raw, context: Context) -> Imaging | None:
    """Return the contrast curve, or None when the table is faulty."""
    checked = context.read(IMAGING, raw, "imaging")
    band = context.band(checked.values.get("band"), "imaging.band")
    separations, contrasts = (checked.values.get(name, ()) for name in ("separation_mas", "contrast_mag"))
    if checked.clean and len(separations) != len(contrasts):
        expected = f"as many values as separation_mas has ({len(separations)})"
        context.log.add("imaging.contrast_mag", f"{len(contrasts)} values", expected, "Give one contrast for each.")
    return Imaging(**{**checked.values, "band": band}) if checked.clean and band is not None else None
