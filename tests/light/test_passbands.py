"""Quadrature weights against integrals done by hand, windows, names and user's own bands."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from numpy.typing import NDArray

from vetter.errors import InputError
from vetter.light.passbands import custom_passband, find_band, quadrature_weights, window_weights
from vetter.light.tables import LightTables
from vetter.system.model import CustomPassband

FloatArray = NDArray[np.float64]
NODES = np.geomspace(3000.0, 9000.0, 57)


def exact_mean(flux: FloatArray, curve: FloatArray, throughput: FloatArray, power: int) -> float:
    """Trapezoid rule on a mesh of 2e5 points, f and R linear between their nodes: converged to 1e-8."""
    fine = np.linspace(curve[0], curve[-1], 200001)
    weight = np.interp(fine, curve, throughput) * fine**power
    return float(np.trapezoid(np.interp(fine, NODES, flux) * weight, fine) / np.trapezoid(weight, fine))


def test_flat_spectrum_has_its_own_mean() -> None:
    weights = quadrature_weights(NODES, np.array([4000.0, 5000.0, 6000.0]), np.array([0.0, 1.0, 0.0]))
    assert weights.sum() == pytest.approx(1.0, abs=1e-14)
    assert (weights >= 0.0).all()


@pytest.mark.parametrize(("photons", "power"), [(True, 1), (False, 0)])
def test_agrees_with_a_fine_mesh(photons: bool, power: int) -> None:
    curve = np.linspace(4100.0, 6900.0, 30)
    throughput = np.exp(-(((curve - 5400.0) / 700.0) ** 2))
    flux = 1.0 + 0.5 * np.sin(NODES / 150.0)
    weights = quadrature_weights(NODES, curve, throughput, photons=photons)
    # The trapezoid on the union of nodes is exact for the energy mean up to the product f R within a step: (h/x)^2.
    assert weights @ flux == pytest.approx(exact_mean(flux, curve, throughput, power), rel=2e-3)


def test_union_trapezoid_by_hand() -> None:
    """Three table nodes, a two-point curve inside: the sums written out."""
    nodes = np.array([1000.0, 2000.0, 4000.0])
    flux = np.array([2.0, 4.0, 0.0])
    # union 1500, 2000, 3000; R = 1, 2/3, 0; f = 3, 4, 2; weights R lambda = 1500, 4000/3, 0
    numerator = 250 * (3 * 1500 + 4 * 4000 / 3) + 500 * (4 * 4000 / 3 + 0)
    denominator = 250 * (1500 + 4000 / 3) + 500 * (4000 / 3 + 0)
    weights = quadrature_weights(nodes, np.array([1500.0, 3000.0]), np.array([1.0, 0.0]))
    assert weights @ flux == pytest.approx(numerator / denominator, rel=1e-14)


def test_curve_point_on_a_table_node() -> None:
    nodes = np.array([1000.0, 2000.0, 3000.0])
    weights = quadrature_weights(nodes, np.array([1000.0, 2000.0, 3000.0]), np.array([0.0, 1.0, 0.0]))
    assert weights == pytest.approx([0.0, 1.0, 0.0], abs=1e-15)


def test_curve_outside_the_nodes_is_refused() -> None:
    with pytest.raises(ValueError, match="outside the table"):
        quadrature_weights(NODES, np.array([2000.0, 4000.0]), np.ones(2))


@given(st.floats(300.0, 880.0), st.floats(1.0, 400.0))
def test_window_of_a_straight_line_is_its_middle(low_nm: float, width_nm: float) -> None:
    high_nm = min(low_nm + width_nm, 900.0)
    weights = window_weights(NODES, (low_nm, high_nm))
    assert weights @ NODES == pytest.approx(5.0 * (low_nm + high_nm), rel=1e-12)


@pytest.mark.parametrize("window", [(500.0, 480.0), (100.0, 400.0), (600.0, 901.0), (500.0, 500.0)])
def test_bad_windows(window: tuple[float, float]) -> None:
    with pytest.raises(InputError, match="two ascending wavelengths within 300 to 900 nm"):
        window_weights(NODES, window)


def test_names_synonyms_and_case(world: LightTables) -> None:
    for name in ("Generic/Johnson.V", "generic/johnson.v", "V-like", "v-LIKE"):
        assert find_band(name, world.passbands).id == "Generic/Johnson.V"


def test_unknown_name_offers_the_nearest(world: LightTables) -> None:
    with pytest.raises(InputError) as caught:
        find_band("Generic/Jonson.V", world.passbands)
    assert "Nearest: Generic/Johnson.V" in caught.value.faults[0].mend


def custom(**changes: object) -> CustomPassband:
    fields: dict[str, object] = {
        "id": "Own/Narrow.H",
        "file": "narrow.dat",
        "system": "AB",
        "zero_point_jy": None,
        "wavelength_nm": (650.0, 655.0, 660.0),
        "throughput": (0.0, 0.8, 0.0),
    }
    return CustomPassband(**{**fields, **changes})  # type: ignore[arg-type]


def test_custom_band_pivot_and_zero_point() -> None:
    band = custom_passband(custom(), NODES)
    assert band.pivot_angstrom == pytest.approx(6550.0, rel=1e-4)
    assert band.width_angstrom == pytest.approx(0.8 * 50.0, rel=1e-6)
    # AB: 3631 Jy = 3.631e-20 erg s-1 cm-2 Hz-1 (Oke & Gunn 1983, ApJ 266, 713), times c / pivot^2
    assert band.zero_flux == {"AB": pytest.approx(3.631e-20 * 2.99792458e18 / band.pivot_angstrom**2, rel=1e-12)}
    assert band.weights.sum() == pytest.approx(1.0)


def test_custom_band_in_its_own_system() -> None:
    band = custom_passband(custom(system="Vega", zero_point_jy=2870.0), NODES)
    assert band.zero_flux["Vega"] / band.zero_flux["AB"] == pytest.approx(2870.0 / 3631.0)


def test_custom_band_may_come_in_descending_order() -> None:
    turned = custom(wavelength_nm=(660.0, 655.0, 650.0), throughput=(0.0, 0.8, 0.2))
    straight = custom(wavelength_nm=(650.0, 655.0, 660.0), throughput=(0.2, 0.8, 0.0))
    assert custom_passband(turned, NODES).weights == pytest.approx(custom_passband(straight, NODES).weights)


@pytest.mark.parametrize(
    ("changes", "expected"),
    [
        ({"system": "Vega"}, "zero_point_jy"),
        ({"wavelength_nm": (100.0, 655.0, 660.0)}, "300 to 900 nm"),
        ({"throughput": (0.0, 0.0, 0.0)}, "throughput >= 0"),
        ({"throughput": (0.0, -0.1, 0.5)}, "throughput >= 0"),
    ],
)
def test_bad_custom_bands_name_the_file(changes: dict[str, object], expected: str) -> None:
    with pytest.raises(InputError, match=expected) as caught:
        custom_passband(custom(**changes), NODES)
    assert caught.value.source == "narrow.dat"
