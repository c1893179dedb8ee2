"""Rounding: errors to two significant digits and values to match; values without an error to three or as is usual."""

from __future__ import annotations

import math

from vetter.results.prose.document import Number
from vetter.results.verdicts import sigma_text

WORDS = ("no", "one", "two", "three", "four", "five", "six", "seven", "eight", "nine", "ten", "eleven", "twelve")


def decimals_for(value: float, digits: int) -> int:
    """Return the decimals that show ``value`` (not 0) with so many significant digits; negative left of the point."""
    exponent = math.floor(math.log10(abs(value)))
    # 0.0996 to two digits is 0.10, one decimal less than its exponent says.
    if round(abs(value), digits - 1 - exponent) >= 10.0 ** (exponent + 1):
        exponent += 1
    return digits - 1 - exponent


def fixed(value: float, decimals: int) -> str:
    """Return ``value`` rounded to ``decimals`` (may be negative), never as minus zero."""
    text = f"{round(value, decimals):.{max(decimals, 0)}f}"
    return text[1:] if text.startswith("-") and float(text) == 0.0 else text


def significant(value: float, digits: int) -> str:
    """Return ``value`` with so many significant digits, without an exponent; zero is ``0``."""
    return "0" if value == 0.0 else fixed(value, decimals_for(value, digits))


def measured(key: str, value: float, error: float, unit: str = "") -> Number:
    """Return a value with a symmetric error (> 0); without an error see :func:`given`."""
    decimals = decimals_for(error, 2)
    shown = fixed(error, decimals)
    return Number(key, value, fixed(value, decimals), shown, shown, unit, (error, error))


def interval(key: str, low: float, middle: float, high: float, unit: str = "") -> Number:
    """Return a median with its 68 % interval.

    Two digits of the larger error, and so many more that the smaller one does not vanish.
    """
    down, up = middle - low, high - middle
    if up <= 0.0 or down <= 0.0:
        return plain(key, middle, 3, unit)
    decimals = max(decimals_for(max(up, down), 2), decimals_for(min(up, down), 1))
    return Number(key, middle, fixed(middle, decimals), fixed(down, decimals), fixed(up, decimals), unit, (down, up))


def plain(key: str, value: float, digits: int = 3, unit: str = "") -> Number:
    """Return a value without an error."""
    return Number(key, value, significant(value, digits), unit=unit)


def given(key: str, value: float, unit: str = "") -> Number:
    """Return a number as a person gave it: a limit, a confidence, a bound of a prior."""
    text = f"{value:.10g}"
    return Number(key, value, fixed(value, 0) if "e" in text else text, unit=unit)


def temperature(key: str, value: float) -> Number:
    """Return a temperature (K) to the nearest ten, above 20000 K to the nearest hundred."""
    return Number(key, value, fixed(value, -1 if value < 20000.0 else -2), unit="K")


def percent(key: str, share: float) -> Number:
    """Return a share as a percentage: two significant digits, no more than one decimal."""
    value = 100.0 * share
    decimals = min(decimals_for(value, 2), 1) if value else 0
    return Number(key, value, fixed(value, decimals), unit="percent")


def given_percent(key: str, share: float) -> Number:
    """Return a share that a person gave as a percentage: a limit, a confidence."""
    return given(key, round(100.0 * share, 10), "percent")


def sigma(key: str, value: float) -> Number:
    """Return a number of sigma to one decimal; two where one would cross the border between two verdicts."""
    return Number(key, value, sigma_text(value, 1 if value < 100.0 else 0), unit="sigma")


def counted(number: int) -> str | None:
    """Return a small number as a word, or None where it is written in digits."""
    return WORDS[number] if number < len(WORDS) else None
