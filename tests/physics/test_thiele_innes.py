"""Thiele-Innes elements: a worked orbit, the way there and back, and errors against Monte Carlo."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from vetter.physics import thiele_innes

axes = st.floats(1e-3, 100.0)
nodes = st.floats(0.0, 179.999)
periastra = st.floats(0.0, 359.999)


def _apart_deg(x: float, y: float, turn: float) -> float:
    return abs((x - y + turn / 2) % turn - turn / 2)


def test_worked_orbit() -> None:
    # a 2.5, i 60, Omega 40, omega 120 degrees, worked by hand from the definition (Heintz 1978, Double Stars).
    elements = thiele_innes.to_thiele_innes(2.5, 60.0, 40.0, 120.0)
    assert elements == pytest.approx((-1.653394, 0.025783, -1.256793, -1.870454), abs=1e-6)


@given(a=axes, i=st.floats(0.5, 179.5), node=nodes, periastron=periastra)
def test_there_and_back(a: float, i: float, node: float, periastron: float) -> None:
    found = thiele_innes.to_geometric(*thiele_innes.to_thiele_innes(a, i, node, periastron))
    assert found.a_mas == pytest.approx(a, rel=1e-10)
    assert found.inclination_deg == pytest.approx(i, abs=1e-10)
    assert _apart_deg(float(found.node_deg), node, 180.0) < 1e-9
    assert _apart_deg(float(found.periastron_deg), periastron, 180.0) < 1e-9
    assert _apart_deg(float(found.node_deg + found.periastron_deg), node + periastron, 360.0) < 1e-9
    assert 0.0 <= found.node_deg < 180.0


@given(a=axes, i=st.floats(0.0, 180.0), node=nodes, periastron=periastra)
def test_elements_come_back_even_face_on(a: float, i: float, node: float, periastron: float) -> None:
    # Face on, the angles are not defined one by one, but the orbit on the sky still is.
    before = np.array(thiele_innes.to_thiele_innes(a, i, node, periastron))
    after = np.array(thiele_innes.to_thiele_innes(*thiele_innes.to_geometric(*before)))
    assert after == pytest.approx(before, abs=1e-10 * a)


@given(a=axes, i=st.floats(1.0, 179.0), node=nodes, periastron=periastra)
def test_agrees_with_the_usual_form(a: float, i: float, node: float, periastron: float) -> None:
    A, B, F, G = (float(x) for x in thiele_innes.to_thiele_innes(a, i, node, periastron))
    u, v = (A * A + B * B + F * F + G * G) / 2.0, A * G - B * F
    square = u + np.sqrt(max((u + v) * (u - v), 0.0))
    found = thiele_innes.to_geometric(A, B, F, G)
    assert found.a_mas == pytest.approx(np.sqrt(square), rel=1e-10)
    assert np.cos(np.radians(found.inclination_deg)) == pytest.approx(v / square, abs=1e-10)


def test_half_a_turn_of_both_angles_is_the_same_orbit() -> None:
    one = thiele_innes.to_thiele_innes(1.0, 40.0, 20.0, 300.0)
    other = thiele_innes.to_thiele_innes(1.0, 40.0, 200.0, 120.0)
    assert np.array(one) == pytest.approx(np.array(other))


@pytest.mark.parametrize("orbit", [(2.5, 60.0, 40.0, 120.0), (0.8, 130.0, 170.0, 5.0), (5.0, 89.0, 90.0, 200.0)])
def test_jacobian_against_finite_differences(orbit: tuple[float, float, float, float]) -> None:
    elements = np.array(thiele_innes.to_thiele_innes(*orbit))
    analytic = thiele_innes.jacobian(*elements)
    step = 1e-6
    for k in range(4):
        up, down = elements.copy(), elements.copy()
        up[k] += step
        down[k] -= step
        difference = np.array(thiele_innes.to_geometric(*up)) - np.array(thiele_innes.to_geometric(*down))
        difference[2] = (difference[2] + 90.0) % 180.0 - 90.0
        difference[3] = (difference[3] + 90.0) % 180.0 - 90.0
        assert analytic[:, k] == pytest.approx(difference / (2.0 * step), rel=1e-6, abs=1e-6)


def test_covariance_against_monte_carlo() -> None:
    elements = np.array(thiele_innes.to_thiele_innes(2.5, 60.0, 40.0, 120.0))
    root = 0.01 * np.array([[1.0, 0, 0, 0], [0.4, 1.1, 0, 0], [-0.3, 0.2, 0.9, 0], [0.1, -0.5, 0.3, 1.2]])
    covariance = root @ root.T
    geometric, carried = thiele_innes.propagate_covariance(*elements, covariance)
    draws = elements + np.random.default_rng(0).standard_normal((200_000, 4)) @ root.T
    sample = np.array(thiele_innes.to_geometric(*draws.T))
    # 2e5 draws give a standard deviation to 0.16 %; 1 % leaves room for the second order (error/a = 0.4 %).
    errors = np.sqrt(np.diag(carried))
    assert sample.std(axis=1) == pytest.approx(errors, rel=0.01)
    assert np.corrcoef(sample) == pytest.approx(carried / np.outer(errors, errors), abs=0.01)
    assert np.array(geometric) == pytest.approx([2.5, 60.0, 40.0, 120.0])


def test_many_orbits_at_once() -> None:
    inclinations = np.array([20.0, 90.0, 150.0])
    elements = thiele_innes.to_thiele_innes(1.0, inclinations, 30.0, 60.0)
    geometric, covariance = thiele_innes.propagate_covariance(*elements, np.eye(4) * 1e-4)
    assert geometric.inclination_deg == pytest.approx(inclinations)
    assert covariance.shape == (3, 4, 4)


def test_face_on_has_no_jacobian() -> None:
    with pytest.raises(ValueError, match="face on"):
        thiele_innes.jacobian(1.0, 0.0, 0.0, 1.0)


def test_wrong_shape_is_named() -> None:
    with pytest.raises(ValueError, match=r"\(3, 3\)"):
        thiele_innes.propagate_covariance(1.0, 0.2, 0.1, 0.5, np.eye(3))
