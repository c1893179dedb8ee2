"""Numbers in sentences: two significant digits, never an exponent where a reader would write none."""

from __future__ import annotations


def two_digits(value: float) -> str:
    """Return ``value`` to two significant digits, as 580 and not 5.8e+02 up to a million."""
    return f"{float(f'{value:.2g}'):g}"
