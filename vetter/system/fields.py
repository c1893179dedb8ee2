"""One description of a table's keys, and the one function that reads any table by its description.

The description drives the checks of type, range and completeness, the did-you-mean for unknown keys, and the
documentation of the file format.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from difflib import SequenceMatcher
from typing import Any

from vetter.system.faults import LONGEST_SHOWN, FaultLog, show
from vetter.system.kinds import Kind, Number
from vetter.system.model import Measurement

_LIKENESS = 0.65
"""Two keys at least this alike (difflib ratio) are taken for a slip of the pen."""


@dataclass(frozen=True)
class Key:
    """One key of a table.

    Attributes
    ----------
    name : as written in the file, unit included
    kind : what its value may be
    meaning : one line for the documentation
    required : whether the table is incomplete without it
    error : name of the key that holds the one-sigma error; empty when the value has none
    error_kind : what the error may be
    error_optional : whether the value may stand without its error, which is then read as 0
    """

    name: str
    kind: Kind
    meaning: str
    required: bool = False
    error: str = ""
    error_kind: Kind | None = None
    error_optional: bool = False


@dataclass(frozen=True)
class Table:
    """One table of the file: its name (empty for the top level), what it is for, its keys, whether it repeats."""

    name: str
    meaning: str
    keys: tuple[Key, ...]
    repeated: bool = False

    @property
    def heading(self) -> str:
        """The table as the user writes it."""
        if not self.name:
            return "the top of the file"
        return f"[[{self.name}]]" if self.repeated else f"[{self.name}]"

    def kinds(self) -> dict[str, Kind]:
        """Return every key that may be written, those of errors included, with its kind."""
        kinds: dict[str, Kind] = {}
        for key in self.keys:
            kinds[key.name] = key.kind
            if key.error and key.error_kind is not None:
                kinds[key.error] = key.error_kind
        return kinds


@dataclass(frozen=True)
class Checked:
    """What was read from one table.

    Attributes
    ----------
    where : the table's place in the file, for fault messages
    values : accepted values by key; a value with an error is a :class:`~vetter.system.model.Measurement`
    present : the keys that the user wrote or plainly meant to write, faulty or not
    clean : whether no key of the table was faulty; rules between keys come later
    raw : the table as written
    """

    where: str
    values: dict[str, Any]
    present: frozenset[str]
    clean: bool
    raw: Mapping[str, object]

    def key(self, name: str) -> str:
        """Return the full name of one of its keys."""
        return f"{self.where}.{name}" if self.where else name


def nearest_key(text: str, options: Iterable[str]) -> str | None:
    """Return the option most like the text, or None when none is; the order of the parts between ``_`` is free."""

    if len(text) > LONGEST_SHOWN:
        return None

    def likeness(option: str) -> float:
        parts = ["_".join(sorted(name.casefold().split("_"))) for name in (text, option)]
        pairs = ((text.casefold(), option.casefold()), (parts[0], parts[1]))
        return max(SequenceMatcher(None, a, b, autojunk=False).ratio() for a, b in pairs)

    best = max(options, key=likeness, default=None)
    return best if best is not None and likeness(best) >= _LIKENESS else None


def read_table(table: Table, raw: Mapping[str, object], where: str, log: FaultLog, homes: Mapping[str, str]) -> Checked:
    """Return what a table holds, having recorded every fault of its keys in the log.

    ``where`` is the table's place in the file; ``homes`` says in which table a key found here by mistake belongs.
    """
    before = len(log)
    kinds = table.kinds()
    blank = Checked(where, {}, frozenset(raw), clean=True, raw=raw)
    meant = _report_unknown(table, blank, log, homes)
    present = frozenset(raw) | meant
    accepted: dict[str, Any] = {}
    for name in [name for name in raw if name in kinds]:
        value = kinds[name].accept(raw[name])
        if value is None:
            log.add(blank.key(name), raw[name], kinds[name].expected, kinds[name].mend(raw[name]))
        else:
            accepted[name] = value
    values: dict[str, Any] = {}
    for key in table.keys:
        _report_missing(key, blank, present, log)
        if key.name in accepted:
            values[key.name] = accepted[key.name]
            if key.error:
                values[key.name] = Measurement(accepted[key.name], accepted.get(key.error, 0.0))
    return Checked(where, values, present, len(log) == before, raw)


def _report_unknown(table: Table, blank: Checked, log: FaultLog, homes: Mapping[str, str]) -> frozenset[str]:
    """Record keys that the table does not have; return the keys they were probably meant to be."""
    kinds = table.kinds()
    meant = set()
    for name, value in blank.raw.items():
        if name in kinds:
            continue
        near = None if log.is_full else nearest_key(name, [known for known in kinds if known not in blank.raw])
        if name in homes:
            mend = f"Move it to {homes[name]}."
        elif near is not None:
            mend = f"Did you mean {near}?"
            meant.add(near)
        else:
            mend = f"Remove it, or use one of: {', '.join(kinds)}."
        written = name if name.isprintable() and 0 < len(name) <= LONGEST_SHOWN else show(name)
        log.add(blank.key(written), value, f"a key that {table.heading} has", mend)
    return frozenset(meant)


def _report_missing(key: Key, blank: Checked, present: frozenset[str], log: FaultLog) -> None:
    """Record a required key that is absent, a value without its error, and an error without its value."""
    if key.name not in present:
        if key.error in present:
            expected = f"{key.name} beside it, since an error says nothing without its value"
            log.add(blank.key(key.error), blank.raw.get(key.error), expected, f"Add {key.name}, or remove {key.error}.")
        elif key.required:
            log.add(blank.key(key.name), None, f"{key.kind.expected}, but it is missing", f"Add {key.name}.")
    elif key.error and not key.error_optional and key.error not in present:
        expected = f"its one-sigma error beside it, in {key.error}"
        log.add(blank.key(key.name), blank.raw.get(key.name), expected, f"Add {key.error}.")


def measured(
    name: str,
    error: str,
    kind: Number,
    meaning: str,
    *,
    error_max: float | None = None,
    required: bool = False,
    error_optional: bool = False,
) -> Key:
    """Return the key of a measured value whose error (> 0, same unit) is written under its own key.

    ``error_max`` defaults to the width of the value's range: a larger error says nothing and overflows squares.
    """
    widest = kind.high - kind.low if error_max is None else error_max
    error_kind = Number(0.0, widest, kind.unit, open_low=True)
    return Key(name, kind, meaning, required, error, error_kind, error_optional)
