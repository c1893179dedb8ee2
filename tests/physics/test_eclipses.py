"""Eclipse geometry against a brute-force walk round the orbit, and overlap against a brute-force count."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from vetter.physics.eclipses import conjunction_separations, covered_fraction, eclipse_probability, eclipses


def _walk(a: float, cos_i: float, e: float, omega: float) -> tuple[float, float]:
    """Least sky separation on the half of the orbit with the companion in front, and on the other half."""
    nu = np.linspace(0.0, 2.0 * np.pi, 200001)
    r = a * (1.0 - e * e) / (1.0 + e * np.cos(nu))
    height = np.sin(nu + omega)
    sky = r * np.sqrt(1.0 - height**2 * (1.0 - cos_i**2))
    # The seen star is far away, behind, where sin(nu + omega) > 0.
    return float(sky[height > 0.0].min()), float(sky[height < 0.0].min())


@settings(max_examples=30, deadline=None)
@given(e=st.floats(0.0, 0.6), omega=st.floats(0.0, 6.28), cos_i=st.floats(0.0, 0.1))
def test_conjunctions_against_the_whole_orbit(e: float, omega: float, cos_i: float) -> None:
    # Near conjunction the least separation differs by e^2 cos^2 i at most: 1 % of itself here.
    front, back = _walk(50.0, cos_i, e, omega)
    found = conjunction_separations(50.0, cos_i, e, omega)
    assert found.companion_in_front == pytest.approx(front, rel=0.02, abs=2e-3)
    assert found.star_in_front == pytest.approx(back, rel=0.02, abs=2e-3)


def test_periastron_in_front_of_us() -> None:
    # omega 90 degrees: the companion passes in front at periastron, a (1 - e); the star at apastron, a (1 + e).
    found = conjunction_separations(100.0, 0.02, 0.5, np.pi / 2)
    assert found.companion_in_front == pytest.approx(1.0)
    assert found.star_in_front == pytest.approx(3.0)
    seen = eclipses(1.5, 0.2, 100.0, 0.02, 0.5, np.pi / 2)
    assert bool(seen.companion_in_front)
    assert not bool(seen.star_in_front)


def test_retrograde_orbits_eclipse_alike() -> None:
    assert conjunction_separations(10.0, -0.1, 0.3, 1.0) == conjunction_separations(10.0, 0.1, 0.3, 1.0)


@given(e=st.floats(0.0, 0.95), cos_i=st.floats(0.0, 1.0), size=st.floats(0.1, 60.0))
def test_probability_is_the_share_of_orientations(e: float, cos_i: float, size: float) -> None:
    omega = (np.arange(4000) + 0.5) * 2.0 * np.pi / 4000
    seen = eclipses(size, 0.0, 100.0, cos_i, e, omega)
    share = np.mean(seen.companion_in_front | seen.star_in_front)
    assert eclipse_probability(size, 100.0, cos_i, e) == pytest.approx(share, abs=2e-3)


def test_circular_orbits_eclipse_or_not() -> None:
    assert eclipse_probability(2.0, 100.0, np.array([0.0, 0.019, 0.021, 1.0])) == pytest.approx([1.0, 1.0, 0.0, 0.0])


@pytest.mark.parametrize(("occulter", "apart"), [(0.5, 0.8), (0.5, 1.3), (1.0, 0.4), (2.0, 1.5), (2.0, 2.5)])
def test_overlap_against_a_count(occulter: float, apart: float) -> None:
    axis = np.linspace(-1.0, 1.0, 2001)
    x, y = np.meshgrid(axis, axis)
    disc = x * x + y * y < 1.0
    share = np.mean(((x - apart) ** 2 + y * y < occulter**2)[disc])
    assert covered_fraction(1.0, occulter, apart) == pytest.approx(share, abs=1e-3)


def test_overlap_at_its_ends() -> None:
    # Apart, touching, ringed, total, a point.
    found = covered_fraction(1.0, np.array([1.0, 0.5, 0.5, 2.0, 0.0]), np.array([2.5, 1.5, 0.0, 0.5, 0.0]))
    assert found == pytest.approx([0.0, 0.0, 0.25, 1.0, 0.0])


@given(r=st.floats(0.1, 10.0), p=st.floats(0.0, 10.0), d=st.floats(0.0, 25.0))
def test_overlap_is_a_share_of_the_smaller_disc(r: float, p: float, d: float) -> None:
    share = covered_fraction(r, p, d)
    assert 0.0 <= share <= min(1.0, (p / r) ** 2) + 1e-9
    assert share >= covered_fraction(r, p, d + 0.1) - 1e-9
