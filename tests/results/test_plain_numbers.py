"""Two significant digits as a reader writes them."""

from __future__ import annotations

import pytest

from vetter.results.plain_numbers import two_digits


@pytest.mark.parametrize(
    ("value", "shown"), [(583.2, "580"), (1.26, "1.3"), (0.0523, "0.052"), (41000.0, "41000"), (9.96, "10"), (0.0, "0")]
)
def test_two_digits(value: float, shown: str) -> None:
    assert two_digits(value) == shown
