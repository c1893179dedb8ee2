"""Roche lobes against the published formula's worked values, a numerical Roche star and the geometry of the lobe."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from vetter.physics.roche import roche_lobe_fraction, roche_lobe_rsun


@pytest.mark.parametrize(
    ("q", "fraction"), [(0.1, 0.20677), (0.5, 0.32079), (1.0, 0.37892), (2.0, 0.44), (10.0, 0.57817)]
)
def test_worked_values(q: float, fraction: float) -> None:
    # Eggleton 1983, ApJ 268, 368, eq. 2, worked to five digits.
    assert roche_lobe_fraction(q) == pytest.approx(fraction, abs=1e-5)


@pytest.mark.parametrize("q", [0.2, 1.0, 5.0])
def test_numerical_volume_of_the_lobe(q: float) -> None:
    # The formula is good to 1 % (its author's claim); the volume is integrated here with no use of it.
    assert roche_lobe_fraction(q) == pytest.approx(_numerical_lobe(q), rel=0.011)


def _numerical_lobe(q: float) -> float:
    """Volume radius of the lobe of the star of mass q at the origin, other star of mass 1 at x = 1."""
    x0 = 1.0 / (1.0 + q)

    def potential(x: np.ndarray, y: np.ndarray, z: np.ndarray) -> np.ndarray:
        near, far = np.sqrt(x * x + y * y + z * z), np.sqrt((x - 1.0) ** 2 + y * y + z * z)
        return -q / near - 1.0 / far - 0.5 * (1.0 + q) * ((x - x0) ** 2 + y * y)

    axis = np.linspace(0.01, 0.99, 20001)
    critical = np.max(potential(axis, 0.0 * axis, 0.0 * axis))
    l1 = axis[np.argmax(potential(axis, 0.0 * axis, 0.0 * axis))]
    cosines, weights = np.polynomial.legendre.leggauss(60)
    phi = (np.arange(60) + 0.5) * np.pi / 60
    c, p = np.meshgrid(cosines, phi, indexing="ij")
    s = np.sqrt(1.0 - c * c)
    low, high = np.full(c.shape, 1e-3), np.full(c.shape, l1)
    for _ in range(50):
        r = 0.5 * (low + high)
        inside = potential(r * c, r * s * np.cos(p), r * s * np.sin(p)) < critical
        low, high = np.where(inside, r, low), np.where(inside, high, r)
    # Mean of r^3 over directions is the cube of the volume radius.
    return float(np.cbrt(np.sum(weights * np.mean(low**3, axis=1)) / 2.0))


@given(m1=st.floats(0.01, 100), m2=st.floats(0.01, 100), a=st.floats(1, 1e4), e=st.floats(0, 0.95))
def test_lobes_of_a_pair_never_overlap(m1: float, m2: float, a: float, e: float) -> None:
    first, second = roche_lobe_rsun(m1, m2, a, e), roche_lobe_rsun(m2, m1, a, e)
    assert 0.0 < first + second < a * (1.0 - e)
    assert (first > second) == (m1 > m2) or m1 == pytest.approx(m2)


def test_lobe_grows_with_mass_ratio_and_shrinks_at_periastron() -> None:
    q = np.geomspace(1e-4, 1e4, 200)
    assert np.all(np.diff(roche_lobe_fraction(q)) > 0.0)
    assert roche_lobe_rsun(1.0, 2.0, 100.0, 0.4) == pytest.approx(0.6 * roche_lobe_rsun(1.0, 2.0, 100.0))


@pytest.mark.parametrize("q", [0.03, 0.1, 0.5, 1.0, 2.0, 10.0, 30.0])
def test_volume_by_another_grid(q: float, lobe_radius: Callable[[float], float]) -> None:
    # The claim of Eggleton 1983 is 1 %; the same integral on other directions, whose own error is 0.05 %.
    assert lobe_radius(q) == pytest.approx(roche_lobe_fraction(q), rel=0.0105)
