"""The one error a user sees: which file, which key, which value, what was expected and how to mend it."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass


@dataclass(frozen=True)
class Fault:
    """One thing wrong with an input.

    Attributes
    ----------
    key : the full key as the user wrote it, for example ``photometry[2].error_mag``; empty for the file as a whole
    value : the offending value as text; empty when there is none
    expected : what is allowed there
    mend : what to do about it
    """

    key: str
    value: str
    expected: str
    mend: str

    def sentence(self) -> str:
        """Return the fault as one line of plain English."""
        subject = self.key or "the file"
        got = f" is {self.value}" if self.value else ""
        mend = f" {self.mend}" if self.mend else ""
        return f"{subject}{got}: expected {self.expected}.{mend}"


class InputError(ValueError):
    """Bad input; carries every fault found in one source so that all can be mended at once.

    Attributes
    ----------
    source : the file (or option) the faults are in
    faults : the faults, in the order they were met
    """

    def __init__(self, source: str, faults: Sequence[Fault]) -> None:
        """Make the error; the message lists every fault."""
        self.source = source
        self.faults = tuple(faults)
        head = f"{source}: " if len(self.faults) == 1 else f"{source}: {len(self.faults)} faults\n  "
        super().__init__(head + "\n  ".join(fault.sentence() for fault in self.faults))

    @classmethod
    def single(cls, source: str, key: str, value: object, expected: str, mend: str = "") -> InputError:
        """Return an error with one fault; ``value`` None means that nothing was given."""
        return cls(source, [Fault(key, "" if value is None else repr(value), expected, mend)])
