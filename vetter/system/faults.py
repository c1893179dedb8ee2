"""Collecting everything wrong with one input, so that an observer can mend it all in one go."""

from __future__ import annotations

import datetime
from typing import Final

from vetter.errors import Fault, InputError

LONGEST_SHOWN: Final = 60
"""Values longer than this many characters are cut in a message."""

MOST_SHOWN: Final = 40
"""More faults than this in one source are counted, not listed."""

MOST_SHOWN_OF_DATA_FILE: Final = 20
"""The same for a file that a system file names: the two lists end in one message."""


def show(value: object) -> str:
    """Return a value as short text in the way TOML would write it; never fails, whatever the value.

    Tables are named, not written out: they may be nested deeper than ``repr`` can follow.
    """
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, int):
        # Python refuses to write out integers of thousands of digits.
        return str(value) if value.bit_length() < 200 else "an integer of more than 60 digits"
    if isinstance(value, dict):
        return "a table"
    if isinstance(value, list):
        return _show_list(value)
    if isinstance(value, (datetime.date, datetime.time)):
        return f"the date or time {value.isoformat()}"
    return _cut(repr(value))


def _show_list(items: list[object]) -> str:
    """Return a list of plain values written out, any other list by its kind and length."""
    if any(isinstance(item, (list, dict)) for item in items):
        kind = "tables" if all(isinstance(item, dict) for item in items) else "values, some of them lists or tables"
        return f"a list of {len(items)} {kind}"
    return _cut("[" + ", ".join(show(item) for item in items[:LONGEST_SHOWN]) + "]")


def _cut(text: str) -> str:
    """Return the text, shortened with an ellipsis where it is long."""
    return text if len(text) <= LONGEST_SHOWN else text[: LONGEST_SHOWN - 3] + "..."


class FaultLog:
    """Collects the faults of one source; an input is good when its log is empty.

    Attributes
    ----------
    source : the file that is being read, as the user named it
    most : how many faults are listed; further ones are counted
    """

    def __init__(self, source: str, most: int = MOST_SHOWN) -> None:
        """Start an empty log for this source."""
        self.source = source
        self.most = most
        self._faults: list[Fault] = []

    def __len__(self) -> int:
        """Return the number of faults so far."""
        return len(self._faults)

    def add(self, key: str, value: object, expected: str, mend: str = "") -> None:
        """Record one fault; ``value`` None means that nothing was given."""
        self._faults.append(Fault(key, "" if value is None else show(value), expected, mend))

    def absorb(self, key: str, file: str, error: InputError) -> None:
        """Record the faults of a second file that the key names; each one says which file it is in."""
        for fault in error.faults:
            if fault.key:
                self._faults.append(Fault(f"{file}, {fault.key}", fault.value, fault.expected, fault.mend))
            else:
                self._faults.append(Fault(key, show(file), fault.expected, fault.mend))

    @property
    def is_full(self) -> bool:
        """Return whether further faults will only be counted, so that advice on them would be wasted work."""
        return len(self._faults) >= self.most

    def raise_if_any(self) -> None:
        """Raise one :class:`~vetter.errors.InputError` with everything found, or return when there is nothing."""
        if not self._faults:
            return
        shown = self._faults[: self.most]
        hidden = len(self._faults) - len(shown)
        if hidden:
            mend = "Mend those above and read it again."
            shown.append(Fault("", "", f"no faults, but there are {hidden} more", mend))
        raise InputError(self.source, shown)
