"""Members of hidden pairs and the inner orbits open to them."""

from __future__ import annotations

import numpy as np
import pytest

from vetter.pairs.members import members, merger_period_d
from vetter.physics import triples


def values(**more: np.ndarray) -> dict[str, np.ndarray]:
    one = np.ones(3)
    return {"m1_msun": 1.2 * one, "m2_msun": 3.0 * one, "inclination_deg": 30.0 * one} | more


def test_gravitational_waves() -> None:
    """Lorimer 2008 (Living Rev. Relativ. 11, 8; from memory): 9.83e6 yr (P/h)^(8/3) M^(-2/3) mu^(-1)."""
    years = 9.83e6 * 8.0 ** (8.0 / 3.0) * 2.8 ** (-2.0 / 3.0) / 0.7
    period = float(merger_period_d(np.array(1.4), np.array(1.4), years / 1e6))
    assert 24.0 * period == pytest.approx(8.0, rel=0.005)


def test_two_stars() -> None:
    found = members(
        values(inner_mass_ratio=np.array([0.5, 0.25, 1.0]), r2a_rsun=np.full(3, 2.0), r2b_rsun=np.full(3, 1.0)),
        300.0, 0.1, 1.1, np.zeros(3),
    )  # fmt: skip
    assert found.first_msun == pytest.approx([2.0, 2.4, 1.5])
    assert found.mass_ratio == pytest.approx([0.5, 0.25, 1.0])
    assert found.sin_inclination == pytest.approx(0.5)
    assert found.shortest_d == pytest.approx(triples.shortest_inner_period_d(found.first_msun, found.second_msun, 2, 1))
    assert found.stable_d == pytest.approx(float(triples.longest_inner_period_d(300.0, 1.2, 3.0, 0.1)))
    assert np.all(found.longest_d > found.stable_d)


def test_two_dark_bodies_have_at_least_the_least_mass() -> None:
    found = members(values(), 300.0, 0.0, 1.1, np.array([0.0, 0.5, 1.0]))
    assert found.second_msun[0] == pytest.approx(1.1)
    assert found.second_msun[2] == pytest.approx(1.5)
    assert found.shortest_d == pytest.approx(merger_period_d(found.first_msun, found.second_msun, 10.0))


def test_a_white_dwarf_beside_a_dark_body() -> None:
    found = members(
        values(white_dwarf_mass_msun=np.full(3, 0.6), r2_rsun=np.full(3, 0.012)), 300.0, 0.0, 1.1, np.zeros(3)
    )
    assert found.first_msun == pytest.approx(2.4)
    assert found.second_msun == pytest.approx(0.6)
    touching = triples.shortest_inner_period_d(2.4, 0.6, 0.0, 0.012)
    assert found.shortest_d == pytest.approx(
        np.maximum(touching, merger_period_d(found.first_msun, found.second_msun, 10.0))
    )
