"""The light engine: laws that every light obeys, agreement with the slow twin, and refusals."""

from __future__ import annotations

import pickle
from collections.abc import Callable

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from vetter.errors import InputError
from vetter.light import Component, LightEngine, reference, total_magnitudes
from vetter.light.synthesis import polynomial_degree
from vetter.light.tables import LightTables
from vetter.system.model import CustomPassband

Make = Callable[..., Component]

TEFF = st.floats(2000.0, 150000.0)
LOGG = st.floats(0.0, 9.0)
KIND = st.sampled_from(["star", "white_dwarf"])


# Laws


@given(KIND, TEFF, LOGG, st.integers(1, 50))
def test_n_equal_bodies(engine: LightEngine, make_stars: Make, kind: str, teff_k: float, logg: float, n: int) -> None:
    one = engine.magnitudes(make_stars(teff_k, logg, kind=kind), 100.0, 0.5)
    assert total_magnitudes([one] * n) == pytest.approx(one - 2.5 * np.log10(n), abs=1e-9)


@given(st.lists(st.tuples(KIND, TEFF, LOGG), min_size=2, max_size=4), st.randoms())
def test_order_of_the_sum(
    engine: LightEngine, make_stars: Make, bodies: list[tuple[str, float, float]], random: object
) -> None:
    parts = [engine.magnitudes(make_stars(t, g, kind=kind), 10.0, 0.0) for kind, t, g in bodies]
    total = engine.total_magnitudes(parts)
    random.shuffle(parts)  # type: ignore[attr-defined]
    assert engine.total_magnitudes(parts) == pytest.approx(total, abs=1e-9)
    assert (total <= np.min(parts, axis=0)).all()


@given(KIND, TEFF, LOGG, KIND, TEFF, LOGG, st.floats(0.0, 3.0))
def test_a_body_of_zero_radius_changes_nothing(
    engine: LightEngine,
    make_stars: Make,
    kind: str,
    teff_k: float,
    logg: float,
    other_kind: str,
    other_teff_k: float,
    other_logg: float,
    a_v: float,
) -> None:
    shines = engine.magnitudes(make_stars(teff_k, logg, kind=kind), 100.0, a_v)
    nothing = engine.magnitudes(make_stars(other_teff_k, other_logg, 0.0, other_kind), 100.0, a_v)
    assert (nothing == np.inf).all()
    for parts in ([shines, nothing], [nothing, shines], [nothing, nothing, shines]):
        assert total_magnitudes(parts) == pytest.approx(shines, abs=1e-12)
    assert (total_magnitudes([nothing, nothing]) == np.inf).all()


@given(KIND, TEFF, LOGG, st.floats(1e-3, 1e3), st.floats(1.0, 1e5), st.floats(0.0, 3.0))
def test_radius_and_distance(
    engine: LightEngine,
    make_stars: Make,
    kind: str,
    teff_k: float,
    logg: float,
    radius_rsun: float,
    distance_pc: float,
    a_v: float,
) -> None:
    near = engine.magnitudes(make_stars(teff_k, logg, kind=kind), 10.0, a_v)
    far = engine.magnitudes(make_stars(teff_k, logg, radius_rsun, kind), distance_pc, a_v)
    assert far - near == pytest.approx(5 * np.log10(distance_pc / 10.0 / radius_rsun), abs=1e-9)


@given(KIND, TEFF, LOGG, st.floats(0.0, 2.999), st.floats(1e-6, 1.0))
def test_more_dust_never_brightens(
    engine: LightEngine, make_stars: Make, kind: str, teff_k: float, logg: float, a_v: float, more: float
) -> None:
    body = make_stars(teff_k, logg, kind=kind)
    less, dimmer = engine.magnitudes(body, 10.0, a_v), engine.magnitudes(body, 10.0, min(a_v + more, 3.0))
    assert (dimmer > less).all()


@given(st.floats(2000.0, 100000.0), st.floats(1.001, 1.4), st.floats(0.0, 5.0))
def test_hotter_black_bodies_are_brighter_everywhere(
    engine: LightEngine, make_stars: Make, teff_k: float, factor: float, logg: float
) -> None:
    cool, hot = engine.magnitudes(make_stars([teff_k, teff_k * factor], logg), 10.0, 0.0)
    assert (hot < cool).all()


# Agreement with the definition


@settings(max_examples=200)
@given(st.floats(2000.0, 50000.0), st.floats(0.0, 5.0), st.floats(0.0, 3.0))
def test_agrees_with_the_slow_twin(
    engine: LightEngine, world: LightTables, make_stars: Make, teff_k: float, logg: float, a_v: float
) -> None:
    fast = engine.magnitudes(make_stars(teff_k, logg, 0.7), 250.0, a_v)[0]
    flux = reference.observed_flux(world, teff_k, logg, 0.7, 250.0, a_v)
    slow = [reference.magnitude(world, band, flux) for band in engine.bands]
    assert fast[: len(slow)] == pytest.approx(slow, abs=0.003)


@pytest.mark.parametrize(("a_v_max_mag", "tolerance"), [(0.5, 0.003), (3.0, 0.003), (9.3, 0.01)])
def test_polynomial_in_dust(world: LightTables, make_stars: Make, a_v_max_mag: float, tolerance: float) -> None:
    """At the table's own nodes nothing but the polynomial is left to be wrong."""
    bands = ["Generic/Johnson.V", "GAIA/GAIA3.G", "2MASS/2MASS.Ks"]
    engine = LightEngine.build(bands, a_v_max_mag=a_v_max_mag, tables=world)
    for teff_k in (2000.0, 6000.0, 50000.0):
        for a_v in np.linspace(0.0, a_v_max_mag, 7):
            flux = reference.observed_flux(world, teff_k, 4.0, 1.0, 10.0, float(a_v))
            slow = [reference.magnitude(world, band, flux) for band in bands]
            assert engine.magnitudes(make_stars(teff_k, 4.0), 10.0, a_v)[0] == pytest.approx(slow, abs=tolerance)


def test_degree_grows_with_dust() -> None:
    degrees = [polynomial_degree(a_v) for a_v in (0.1, 1.0, 3.0, 9.3, 31.0)]
    assert degrees == sorted(degrees)
    assert degrees[0] >= 2


def test_other_r_v_changes_the_reddening(world: LightTables, make_stars: Make) -> None:
    """With A(lambda)/A(V) of the small world at R_V 5, B is dimmed as its law says."""
    blue = LightEngine.build(["Generic/Johnson.B"], r_v=5.0, tables=world)
    dimming = blue.magnitudes(make_stars(20000.0, 4.0), 10.0, 1.0) - blue.magnitudes(
        make_stars(20000.0, 4.0), 10.0, 0.0
    )
    x = 4400.0 / 5500.0
    expected = x**-1.3 + (3 * x**-2 - 3 / x) * (1 / 5.0 - 1 / 3.1)
    # The passband is 0.09 of its wavelength wide: its mean dimming differs from the middle's by about 1 %.
    assert dimming[0, 0] == pytest.approx(expected, rel=0.02)


def test_window_is_the_mean_flux(engine: LightEngine, make_stars: Make) -> None:
    """The window 850-900 nm lies in a bare black body: compare with Planck's function averaged over it."""
    cm = np.linspace(850e-7, 900e-7, 2001)
    for teff_k in (5000.0, 20000.0):
        # c2 = hc/k = 1.438776877 cm K (CODATA 2018)
        flux = 2 * np.pi * 6.62607015e-27 * 2.99792458e10**2 / cm**5 / np.expm1(1.438776877 / (cm * teff_k)) * 1e-8
        at_ten_pc = flux.mean() / (3.0856776e17 / 6.957e8) ** 2
        window = engine.magnitudes(make_stars(teff_k, 4.0), 10.0, 0.0)[0, -1]
        # The table has 155 nodes per e-fold of wavelength: linear interpolation is good to (1/155)^2.
        assert window == pytest.approx(-2.5 * np.log10(at_ten_pc), abs=3e-4)


def test_hundred_nm_of_window_between_two_stars(engine: LightEngine, make_stars: Make) -> None:
    first, second = engine.magnitudes(make_stars([6000.0, 6000.0], 4.4, [1.0, 0.1]), 30.0, 1.0)
    assert 10 ** (-0.4 * (second - first)) == pytest.approx(0.01, rel=1e-9)


# Columns, systems, users' bands


def test_columns_and_systems(engine: LightEngine) -> None:
    assert engine.columns == (*engine.bands, (480.0, 500.0), (850.0, 900.0))
    assert engine.systems[0] == "AB"
    assert set(engine.systems[1:]) == {"Vega"}
    assert len(engine.pivots_angstrom) == len(engine.columns)
    assert engine.pivots_angstrom[-1] == 8750.0


def test_other_system_shifts_by_the_zero_points(world: LightTables, make_stars: Make) -> None:
    usual = LightEngine.build(["V-like"], tables=world)
    other = LightEngine.build(["V-like"], systems={"Generic/Johnson.V": "AB"}, tables=world)
    zero = world.passbands["Generic/Johnson.V"].zero_flux
    for kind in ("star", "white_dwarf"):
        body = make_stars(9000.0, 4.0, kind=kind)
        shift = other.magnitudes(body, 10.0, 0.0) - usual.magnitudes(body, 10.0, 0.0)
        assert shift[0, 0] == pytest.approx(2.5 * np.log10(zero["AB"] / zero["Vega"]), abs=1e-9)


def test_user_band_equal_to_a_built_in_one(world: LightTables, make_stars: Make) -> None:
    built_in = world.passbands["Generic/Johnson.B"]
    own = CustomPassband(
        id="Mine.B",
        file="b.dat",
        system="AB",
        zero_point_jy=None,
        wavelength_nm=tuple(built_in.wavelength_angstrom / 10.0),
        throughput=tuple(built_in.throughput),
    )
    systems = {"Generic/Johnson.B": "AB"}
    engine = LightEngine.build(["Mine.B", "Generic/Johnson.B"], systems=systems, passbands=[own], tables=world)
    magnitudes = engine.magnitudes(make_stars([3000.0, 30000.0], 4.0), 10.0, 0.3)
    # The small world's weights are hat functions on a fine mesh, the user's the trapezoid rule: 2 mmag between them.
    assert magnitudes[:, 0] == pytest.approx(magnitudes[:, 1], abs=0.003)
    assert engine.model_error_mag("Mine.B", 6000.0, 4.0) == engine.model_error_mag("Generic/Johnson.B", 6000.0, 4.0)


def test_engine_travels_to_other_processes(engine: LightEngine, make_stars: Make) -> None:
    copy = pickle.loads(pickle.dumps(engine))
    body = make_stars([4000.0, 9000.0], 4.0)
    assert (copy.magnitudes(body, 10.0, 1.0) == engine.magnitudes(body, 10.0, 1.0)).all()


# Edges and refusals


def test_gravity_above_the_table_counts_as_its_end(engine: LightEngine, make_stars: Make) -> None:
    five, six = engine.magnitudes(make_stars(5000.0, [5.0, 6.3]), 10.0, 1.0)
    assert (five == six).all()


def test_inside(engine: LightEngine, make_stars: Make) -> None:
    teff_k = [1999.0, 2001.0, 149000.0, 151000.0, 6000.0, 6000.0]
    logg = [4.0, 4.0, 5.0, 5.0, -0.1, 5.5]
    assert engine.inside(make_stars(teff_k, logg)).tolist() == [False, True, True, False, False, True]
    assert engine.inside(make_stars([1600.0, 1400.0], [9.5, 8.0], kind="white_dwarf")).tolist() == [True, False]


def test_clamped_outside(engine: LightEngine, make_stars: Make) -> None:
    outside, edge = engine.magnitudes(make_stars([1000.0, 2000.0], 4.0), 10.0, 0.0)
    assert (outside == edge).all()


@pytest.mark.parametrize("a_v", [-0.01, 3.01, np.array([0.0, 5.0])])
def test_dust_outside_the_built_range(engine: LightEngine, make_stars: Make, a_v: object) -> None:
    with pytest.raises(ValueError, match="built for 0 to 3"):
        engine.magnitudes(make_stars([5000.0, 6000.0], 4.0), 10.0, a_v)


def test_unknown_kind_of_body() -> None:
    nothing = np.empty(0)
    with pytest.raises(ValueError, match="component kind 'planet'"):
        Component("planet", nothing, nothing, nothing, nothing)


def test_a_kind_that_the_tables_lack(engine: LightEngine, make_stars: Make) -> None:
    with pytest.raises(ValueError, match="these tables have none"):
        engine.magnitudes(make_stars(12000.0, 8.0, kind="helium_white_dwarf"), 10.0, 0.0)


def test_nothing_to_build_or_to_add(world: LightTables) -> None:
    with pytest.raises(ValueError, match="at least one band or window"):
        LightEngine.build([], tables=world)
    with pytest.raises(ValueError, match="no light"):
        total_magnitudes([])


def test_unknown_band_and_system(world: LightTables) -> None:
    with pytest.raises(InputError, match="Nearest: "):
        LightEngine.build(["Generic/Johnson.Q"], tables=world)
    with pytest.raises(InputError, match=r"system of Generic/Johnson\.V is 'ST': expected Vega or AB"):
        LightEngine.build(["V-like"], systems={"V-like": "ST"}, tables=world)
