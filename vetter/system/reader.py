"""Reading one system file: TOML in, a checked :class:`~vetter.system.model.System` out, or every fault at once."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from pathlib import Path
from typing import Any

from vetter.system.context import Context
from vetter.system.epochs import enough_epochs
from vetter.system.faults import FaultLog
from vetter.system.fields import Table
from vetter.system.keys import LIGHT_LIMIT, PRIMARY, SKY, TOP, X_RAY
from vetter.system.light_tables import read_imaging, read_passbands, read_photometry, read_variability
from vetter.system.model import LightLimit, Primary, Sky, System, XRay
from vetter.system.star_tables import (
    read_assumptions,
    read_distance,
    read_extinction,
    read_orbit,
    read_prior_odds,
    read_velocities,
)
from vetter.system.text_files import read_toml

Raw = Mapping[str, object]


def read_system(path: str | Path) -> System:
    """Return what a system file says was measured.

    Files that it names are found relative to it. The parallax zero point is subtracted here.

    Raises
    ------
    vetter.errors.InputError : the file cannot be read, or anything in it or in the files it names is faulty; all
        faults are in the one error
    """
    place = Path(path)
    return check_system(read_toml(place), str(path), place.parent)


def check_system(raw: Raw, source: str, folder: str | Path = ".") -> System:
    """Return the system that a system file's content, already parsed, describes.

    ``source`` names it in messages; names of other files start from ``folder``.

    Raises
    ------
    vetter.errors.InputError : as :func:`read_system`
    """
    log = FaultLog(source)
    plain = Context(log, Path(folder))
    checked = plain.read(TOP, raw, "")
    top = checked.values
    passbands = read_passbands(top.pop("passband", ()), plain)
    context = Context(log, Path(folder), {passband.id: passband.system for passband in passbands})
    magnitudes, limits = read_photometry(
        top, context, countable=not (checked.present - top.keys()) & {"photometry", "photometry_file"}
    )
    parts: dict[str, Any] = {"name": top.pop("name", None), "magnitudes": magnitudes, "magnitude_limits": limits}
    parts["light_limits"] = _read_light_limits(top.pop("light_limit", ()), context)
    parts["passbands"] = passbands
    _report_absent(checked.present, log)
    if "velocities" in top:
        parts["velocities"] = read_velocities(top.pop("velocities"), context)
    # Epoch velocities can stand for the orbit.
    if "orbit" in top or ("orbit" not in checked.present and "velocities" in checked.present):
        velocities = parts.get("velocities")
        # Faulty velocities are taken to be enough: their own fault is reported already.
        enough = "velocities" in checked.present and (velocities is None or enough_epochs(velocities))
        parts["orbit"] = read_orbit(top.pop("orbit", {}), context, has_velocities=enough)
    parts.update({name: _READERS[name](table, context) for name, table in top.items() if name in _READERS})
    log.raise_if_any()
    return System(source=source, **parts)


def _report_absent(present: frozenset[str], log: FaultLog) -> None:
    """Record the tables without which nothing can be said."""
    needed = {"distance": "parallax_mas or distance_pc, with its error", "orbit": "period_d and what was measured"}
    for name, keys in needed.items():
        if name not in present and not (name == "orbit" and "velocities" in present):
            log.add(name, None, f"a table [{name}], but it is missing", f"Add [{name}] with {keys}.")


def _read_light_limits(tables: Sequence[Raw], context: Context) -> tuple[LightLimit, ...]:
    """Return the limits on the companion's light, faulty ones left out."""
    places = [(raw, f"light_limit[{number}]") for number, raw in enumerate(tables, start=1)]
    checked = [context.read(LIGHT_LIMIT, raw, place) for raw, place in places]
    return tuple(LightLimit(**entry.values) for entry in checked if entry.clean)


def _plain(table: Table, record: Callable[..., object]) -> Callable[[Raw, Context], object]:
    """Return the reader of a table whose keys are the record's fields and that has no rules between keys."""

    def read(raw: Raw, context: Context) -> object:
        checked = context.read(table, raw, table.name)
        return record(**checked.values) if checked.clean else None

    return read


_READERS: Mapping[str, Callable[[Raw, Context], object]] = {
    "sky": _plain(SKY, Sky),
    "distance": read_distance,
    "extinction": read_extinction,
    "primary": _plain(PRIMARY, Primary),
    "variability": read_variability,
    "x_ray": _plain(X_RAY, XRay),
    "imaging": read_imaging,
    "assumptions": read_assumptions,
    "prior_odds": read_prior_odds,
}
