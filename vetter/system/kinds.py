"""What a value in a system file may be: number, text, choice, list of numbers, covariance, table.

Each kind says in words what it expects, accepts or refuses a value, and knows how the usual mistakes are mended.
TOML has no null, so ``None`` is free to mean "refused".
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from itertools import pairwise
from typing import Protocol

from vetter.system.covariance import is_covariance, is_symmetric


class Kind(Protocol):
    """One kind of value."""

    @property
    def expected(self) -> str:
        """What is allowed, as the words after "expected"."""

    def accept(self, value: object) -> object | None:
        """Return the value in the form the model keeps, or None when it is refused."""

    def mend(self, value: object) -> str:
        """Return one sentence on how to mend a refused value; may be empty."""


def as_number(value: object) -> float | None:
    """Return a finite float from a TOML integer or float; None for anything else, true and false included."""
    if isinstance(value, bool) or not isinstance(value, (int, float)):
        return None
    try:
        number = float(value)
    except OverflowError:
        return None
    # Adding zero turns -0.0 into 0.0, which nobody means to tell apart.
    return number + 0.0 if math.isfinite(number) else None


@dataclass(frozen=True)
class Number:
    """A finite number in a range, in a stated unit; the ends belong to the range unless they are open."""

    low: float
    high: float
    unit: str = ""
    open_low: bool = False
    open_high: bool = False

    @property
    def expected(self) -> str:
        """The range in words."""
        low = f"{'above' if self.open_low else 'at least'} {self.low:g}"
        high = f"{'below' if self.open_high else 'at most'} {self.high:g}"
        return f"a number {low} and {high}{' ' if self.unit else ''}{self.unit}"

    def holds(self, number: float) -> bool:
        """Return whether a finite number is inside the range."""
        above = number > self.low if self.open_low else number >= self.low
        return above and (number < self.high if self.open_high else number <= self.high)

    def accept(self, value: object) -> float | None:
        """Return the number as a float."""
        number = as_number(value)
        return number if number is not None and self.holds(number) else None

    def mend(self, value: object) -> str:
        """Return what to do about quotes, truth values, nan, and values out of range."""
        if isinstance(value, str):
            return "Write a bare number, without quotes and without a unit."
        if isinstance(value, bool) or not isinstance(value, (int, float)):
            return "Write one number."
        if as_number(value) is None:
            return "Leave the key out when the value is not known."
        return f"Check the value and that it is in {self.unit}." if self.unit else "Check the value."


@dataclass(frozen=True)
class Text:
    """One line of text that is not blank."""

    what: str = "text"
    longest: int = 500

    @property
    def expected(self) -> str:
        """The rule in words."""
        return f"{self.what} in quotes, on one line, not blank and at most {self.longest} characters"

    def accept(self, value: object) -> str | None:
        """Return the text unchanged."""
        good = isinstance(value, str) and value.strip() and value.isprintable() and len(value) <= self.longest
        return str(value) if good else None

    def mend(self, value: object) -> str:
        """Return what to do about a value that is not text."""
        return "" if isinstance(value, str) else "Put it in double quotes."


@dataclass(frozen=True)
class Choice:
    """One of a few words; case does not matter, the listed spelling is kept."""

    options: tuple[str, ...]

    @property
    def expected(self) -> str:
        """The options in words."""
        return " or ".join(f'"{option}"' for option in self.options)

    def accept(self, value: object) -> str | None:
        """Return the option in its listed spelling."""
        wanted = value.strip().casefold() if isinstance(value, str) else None
        return next((option for option in self.options if option.casefold() == wanted), None)

    def mend(self, value: object) -> str:
        """Return the remedy: write one of the options."""
        del value
        return "Write one of these words."


@dataclass(frozen=True)
class Flag:
    """True or false."""

    @property
    def expected(self) -> str:
        """The two values."""
        return "true or false"

    def accept(self, value: object) -> bool | None:
        """Return the value when it is one of the two."""
        return value if isinstance(value, bool) else None

    def mend(self, value: object) -> str:
        """Return the remedy: TOML's own words."""
        del value
        return "Write true or false, without quotes."


@dataclass(frozen=True)
class Numbers:
    """A list of numbers of one range; ``length`` fixes how many, ``ascending`` asks for strictly rising values."""

    item: Number
    length: int | None = None
    ascending: bool = False

    @property
    def expected(self) -> str:
        """The rule in words."""
        count = "at least one" if self.length is None else str(self.length)
        rising = " rising" if self.ascending else ""
        return f"a list of {count}{rising} numbers, each {self.item.expected.removeprefix('a number ')}"

    def accept(self, value: object) -> tuple[float, ...] | None:
        """Return the numbers as a tuple of floats."""
        if not isinstance(value, list) or not value or (self.length is not None and len(value) != self.length):
            return None
        numbers = [number for number in map(self.item.accept, value) if number is not None]
        rising = all(a < b for a, b in pairwise(numbers))
        return tuple(numbers) if len(numbers) == len(value) and (rising or not self.ascending) else None

    def mend(self, value: object) -> str:
        """Return what to do about the first thing wrong in the list."""
        if not isinstance(value, list):
            return "Write the numbers in square brackets."
        bad = next((entry for entry in value if self.item.accept(entry) is None), None)
        if bad is not None:
            return self.item.mend(bad)
        return "Put the numbers in rising order." if self.ascending and len(value) == self.length else ""


@dataclass(frozen=True)
class Covariance:
    """A square list of lists that is symmetric and positive definite."""

    size: int
    item: Number

    @property
    def expected(self) -> str:
        """The rule in words."""
        size = f"{self.size} x {self.size}"
        return f"a {size} list of numbers in {self.item.unit}, symmetric and positive definite"

    def _rows(self, value: object) -> tuple[tuple[float, ...], ...] | None:
        """Return the numbers row by row, or None when the shape or a number is wrong."""
        if not isinstance(value, list) or len(value) != self.size:
            return None
        rows = [Numbers(self.item, self.size).accept(row) for row in value]
        return tuple(row for row in rows if row is not None) if None not in rows else None

    def accept(self, value: object) -> tuple[tuple[float, ...], ...] | None:
        """Return the matrix as a tuple of rows, as given."""
        rows = self._rows(value)
        return rows if rows is not None and is_covariance(rows) else None

    def mend(self, value: object) -> str:
        """Return which of shape, symmetry and positive definiteness is missing."""
        rows = self._rows(value)
        if rows is None:
            return f"Give {self.size} rows of {self.size} finite numbers."
        if not is_symmetric(rows):
            return "Make the element in row i, column j equal to that in row j, column i."
        return "Give variances on the diagonal and check the correlations: none may reach 1."


@dataclass(frozen=True)
class OneTable:
    """A table, written once under its name in single brackets."""

    name: str

    @property
    def expected(self) -> str:
        """How the table is written."""
        return f"one table [{self.name}]"

    def accept(self, value: object) -> dict[str, object] | None:
        """Return the table unchanged."""
        return value if isinstance(value, dict) else None

    def mend(self, value: object) -> str:
        """Return how to write the table."""
        del value
        return f"Write [{self.name}] once, in single brackets, with its keys below it."


@dataclass(frozen=True)
class ManyTables:
    """A table that may be repeated, written in double brackets."""

    name: str

    @property
    def expected(self) -> str:
        """How the tables are written."""
        return f"tables [[{self.name}]]"

    def accept(self, value: object) -> list[dict[str, object]] | None:
        """Return the tables unchanged."""
        return value if isinstance(value, list) and all(isinstance(item, dict) for item in value) else None

    def mend(self, value: object) -> str:
        """Return how to write the tables."""
        del value
        return f"Write [[{self.name}]], in double brackets, before each one."
