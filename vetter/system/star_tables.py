"""Reading the tables about star and orbit: sky, distance, dust, primary, orbit, velocities, limits, assumptions."""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import Any, Final

from vetter.errors import InputError
from vetter.system.columns import Column, read_columns
from vetter.system.context import Context
from vetter.system.epochs import ENOUGH_WORDS
from vetter.system.fields import Checked
from vetter.system.keys import (
    ASSUMPTIONS,
    DISTANCE,
    EXTINCTION,
    ORBIT,
    PRIOR_ODDS,
    SCENARIO_NAMES,
    THIELE_INNES,
    VELOCITIES,
    VELOCITY,
)
from vetter.system.kinds import Number, Text
from vetter.system.model import (
    Assumptions,
    Distance,
    Extinction,
    Measurement,
    Orbit,
    ThieleInnes,
    Velocities,
)

VELOCITY_COLUMNS: Final = (
    Column("time_bjd", Number(-1e8, 1e8, "d")),
    Column("rv_km_s", VELOCITY),
    Column("rv_error_km_s", Number(0.0, 1e5, "km/s", open_low=True)),
    Column("instrument", Text("an instrument's name", 200), optional=True),
)

Raw = Mapping[str, object]


def read_distance(raw: Raw, context: Context) -> Distance | None:
    """Return parallax (zero point subtracted) or distance; None when the table is faulty."""
    checked = context.read(DISTANCE, raw, "distance")
    parallax = checked.present & {"parallax_mas", "parallax_error_mas"}
    distance = checked.present & {"distance_pc", "distance_error_pc"}
    if bool(parallax) == bool(distance):
        mend = "Remove one: they are one measurement in two forms." if parallax else "Add one, with its error."
        context.log.add("distance", None, "exactly one of parallax_mas and distance_pc", mend)
    elif distance and "parallax_zero_point_mas" in checked.present:
        value = checked.raw.get("parallax_zero_point_mas")
        context.log.add(checked.key("parallax_zero_point_mas"), value, "a parallax_mas to correct", "Remove it.")
    if not checked.clean:
        return None
    measured = checked.values.get("parallax_mas")
    if measured is not None:
        zero_point = checked.values.get("parallax_zero_point_mas", 0.0)
        measured = Measurement(measured.value - zero_point, measured.error)
    return Distance(measured, checked.values.get("distance_pc"))


def read_extinction(raw: Raw, context: Context) -> Extinction | None:
    """Return the reddening, measured or bounded; None when the table is faulty."""
    checked = context.read(EXTINCTION, raw, "extinction")
    measured = checked.present & {"ebv_mag", "ebv_error_mag"}
    if bool(measured) == ("ebv_max_mag" in checked.present):
        mend = "Remove one of the two." if measured else "Add one, or remove the table."
        context.log.add("extinction", None, "either ebv_mag with ebv_error_mag, or ebv_max_mag alone", mend)
    return Extinction(**checked.values) if checked.clean else None


def read_orbit(raw: Raw, context: Context, *, has_velocities: bool) -> Orbit | None:
    """Return the orbit; None when the table is faulty. ``has_velocities``: epoch velocities can give the orbit."""
    checked = context.read(ORBIT, raw, "orbit")
    elements_raw = checked.values.pop("thiele_innes", None)
    elements = _read_elements(elements_raw, context) if elements_raw is not None else None
    _report_orbit_rules(checked, context, has_velocities=has_velocities)
    band = checked.values.pop("photocentre_band", None)
    if band is not None:
        band = context.band(band, "orbit.photocentre_band")
    if not checked.clean:
        return None
    return Orbit(
        **{"period_d": Measurement(math.nan, 0.0), "eccentricity": Measurement(0.0, 0.0), **checked.values},
        period_given="period_d" in checked.values,
        eccentricity_given="eccentricity" in checked.values,
        photocentre_band=band,
        thiele_innes=elements,
    )


def _report_orbit_rules(checked: Checked, context: Context, *, has_velocities: bool) -> None:
    """Record what the orbit's keys require of and forbid to each other."""
    present = checked.present
    if not (has_velocities or present & {"k1_km_s", "k1_error_km_s", "photocentre_mas", "thiele_innes"}):
        expected = f"one of k1_km_s, photocentre_mas, [orbit.thiele_innes], or [velocities] with {ENOUGH_WORDS}"
        context.log.add("orbit", None, expected, "Add one: a period alone does not bound the companion's mass.")
    if not (has_velocities or present & {"period_d", "period_error_d"}):
        expected = f"a number above 0 in d, but it is missing, and so are {ENOUGH_WORDS}"
        context.log.add(checked.key("period_d"), None, expected, "Add period_d.")
    for name in ("photocentre_mas", "inclination_deg"):
        if "thiele_innes" in present and name in present:
            value = checked.raw.get(name)
            mend = "Remove it, or remove the elements: both say the same thing."
            context.log.add(checked.key(name), value, f"no {name} beside [orbit.thiele_innes]", mend)
    if "photocentre_mas" in present and "photocentre_band" not in present:
        mend = 'Add photocentre_band, for example "GAIA/GAIA3.G".'
        context.log.add("orbit.photocentre_band", None, "the band of photocentre_mas, but it is missing", mend)
    if "photocentre_band" in present and not present & {"photocentre_mas", "thiele_innes"}:
        value = checked.raw.get("photocentre_band")
        context.log.add("orbit.photocentre_band", value, "a photocentre_mas to go with it", "Add it, or remove this.")


def _read_elements(raw: Raw, context: Context) -> ThieleInnes | None:
    """Return the Thiele-Innes elements; None when their table is faulty."""
    checked = context.read(THIELE_INNES, raw, "orbit.thiele_innes")
    return ThieleInnes(**checked.values) if checked.clean else None


def read_velocities(raw: Raw, context: Context) -> Velocities | None:
    """Return the epoch velocities of the file that the table names; None when table or file is faulty."""
    checked = context.read(VELOCITIES, raw, "velocities")
    file = checked.values.get("file")
    if not checked.clean or file is None:
        return None
    try:
        rows = read_columns(context.folder / file, VELOCITY_COLUMNS)
    except InputError as error:
        context.log.absorb("velocities.file", file, error)
        return None
    values: dict[str, Any] = {name: tuple(row[name] for row in rows) for name in rows[0]}
    values["instrument"] = tuple(name or "" for name in values["instrument"])
    return Velocities(file, **values)


def read_assumptions(raw: Raw, context: Context) -> Assumptions | None:
    """Return the mass walls, defaults filled in; None when the table is faulty."""
    checked = context.read(ASSUMPTIONS, raw, "assumptions")
    if not checked.clean:
        return None
    assumptions = Assumptions(**checked.values)
    if assumptions.neutron_star_min_msun >= assumptions.neutron_star_max_msun:
        expected = f"less than neutron_star_max_msun ({assumptions.neutron_star_max_msun:g})"
        value = assumptions.neutron_star_min_msun
        context.log.add("assumptions.neutron_star_min_msun", value, expected, "Lower it, or raise the other.")
    return assumptions


def read_prior_odds(raw: Raw, context: Context) -> dict[str, float]:
    """Return the weights that were given; those not given are 1."""
    checked = context.read(PRIOR_ODDS, raw, "prior_odds")
    if checked.clean and all(checked.values.get(name, 1.0) == 0.0 for name in SCENARIO_NAMES):
        context.log.add("prior_odds", None, "at least one weight above zero", "Raise the weight of one explanation.")
    return checked.values
