"""The complete example is read field by field; the least file gets the stated defaults."""

from __future__ import annotations

import dataclasses
import pickle
import tomllib
from collections.abc import Callable
from pathlib import Path

import pytest

from vetter.system import System, check_system, read_system
from vetter.system.model import (
    Assumptions,
    CustomPassband,
    Distance,
    Extinction,
    Imaging,
    LightLimit,
    Magnitude,
    MagnitudeLimit,
    Measurement,
    Orbit,
    Primary,
    Sky,
    ThieleInnes,
    Variability,
    Velocities,
    XRay,
)

Read = Callable[..., System]


@pytest.fixture
def full(read: Read, full_text: str) -> System:
    return read(full_text)


@pytest.fixture
def least(read: Read, least_text: str) -> System:
    return read(least_text)


def test_the_full_example_has_every_field_of_the_model_filled(full: System) -> None:
    empty = [field.name for field in dataclasses.fields(full) if getattr(full, field.name) in (None, (), {})]
    assert empty == []


def test_name_and_source(full: System) -> None:
    assert full.name == "Marlow 7"
    assert Path(full.source).name == "system.toml"


@pytest.mark.parametrize(
    ("field", "expected"),
    [
        ("sky", Sky(281.12, -12.5)),
        # 1.73 mas with a zero point of -0.03 mas is 1.76 mas.
        ("distance", Distance(parallax_mas=Measurement(1.73 + 0.03, 0.02))),
        ("extinction", Extinction(ebv_mag=Measurement(0.12, 0.02), r_v=3.1)),
        (
            "primary",
            Primary(
                teff_k=Measurement(5960.0, 80.0),
                logg=Measurement(4.3, 0.1),
                feh=Measurement(0.1, 0.1),
                vsini_km_s=4.0,
                mass_msun=Measurement(1.02, 0.05),
            ),
        ),
        (
            "orbit",
            Orbit(
                period_d=Measurement(212.4, 0.05),
                eccentricity=Measurement(0.31, 0.01),
                eccentricity_given=True,
                k1_km_s=Measurement(53.2, 0.6),
                inclination_deg=Measurement(58.0, 0.5),
                photocentre_mas=Measurement(2.02, 0.03),
                photocentre_band="GAIA/GAIA3.G",
            ),
        ),
        (
            "magnitudes",
            (
                Magnitude("GAIA/GAIA3.G", 12.914, 0.003, "Vega"),
                Magnitude("own.H", 11.0, 0.02, "AB"),
                Magnitude("2MASS/2MASS.J", 11.5, 0.02, "Vega"),
                Magnitude("SLOAN/SDSS.r", 13.1, 0.03, "Vega"),
            ),
        ),
        ("magnitude_limits", (MagnitudeLimit("GALEX/GALEX.NUV", 21.5, 0.95, "AB"),)),
        ("light_limits", (LightLimit((480.0, 520.0), 0.03, 0.95, 100.0, (4000.0, 9000.0)),)),
        (
            "velocities",
            Velocities(
                "marlow7_rv.csv",
                (2459000.5, 2459010.5, 2459020.5),
                (-10.5, 12.0, 40.25),
                (0.1, 0.2, 0.1),
                ("", "", ""),
            ),
        ),
        ("variability", Variability("TESS/TESS.Red", 0.002, "none", 0.005)),
        ("x_ray", XRay(3e30, 0.95)),
        ("imaging", Imaging("2MASS/2MASS.Ks", (50.0, 100.0, 200.0), (3.0, 4.5, 6.0))),
        ("assumptions", Assumptions(1.4, 1.2, 2.2, 2.5, 2.0)),
        ("prior_odds", {"black_hole": 0.5, "inner_pair": 2.0}),
    ],
)
def test_the_full_example_is_read_as_written(full: System, field: str, expected: object) -> None:
    assert getattr(full, field) == expected


def test_the_passband_is_read_in_nanometres(full: System) -> None:
    (band,) = full.passbands
    assert dataclasses.replace(band, wavelength_nm=()) == CustomPassband(
        "own.H", "own_h.txt", "AB", 3631.0, (), (0.0, 0.8, 0.0)
    )
    assert band.wavelength_nm == pytest.approx((1500.0, 1600.0, 1800.0), rel=1e-15)


def test_the_least_file_is_enough_and_gets_the_stated_defaults(least: System) -> None:
    assert least.distance == Distance(distance_pc=Measurement(578.0, 7.0))
    assert least.orbit.eccentricity == Measurement(0.0, 0.0)
    assert not least.orbit.eccentricity_given
    assert least.orbit.period_d == Measurement(3.0, 0.0)
    assert least.assumptions == Assumptions(1.38, 1.1, 2.3, 2.3, 3.0)
    assert least.prior_odds == {}
    assert least.primary == Primary()
    assert (least.sky, least.extinction, least.velocities, least.variability) == (None,) * 4
    assert (least.x_ray, least.imaging, least.light_limits, least.magnitude_limits) == (None, None, (), ())


def test_short_band_names_become_identifiers(least: System) -> None:
    assert [entry.band for entry in least.magnitudes] == ["Generic/Johnson.B", "Generic/Johnson.V", "2MASS/2MASS.Ks"]
    assert {entry.system for entry in least.magnitudes} == {"Vega"}


def test_every_number_is_a_float_even_where_an_integer_was_written(least: System) -> None:
    numbers = [least.orbit.period_d.value, least.magnitudes[0].mag]
    assert [type(number) for number in numbers] == [float, float]


def test_a_bound_on_the_reddening_alone(read: Read, least_text: str) -> None:
    system = read(least_text + "[extinction]\nebv_max_mag = 0.5\n")
    assert system.extinction == Extinction(ebv_mag=None, ebv_max_mag=0.5, r_v=3.1)


@pytest.mark.parametrize("parallax", ["-0.4", "0", "-0.0", "768.5"])
def test_a_parallax_may_be_negative_or_zero(read: Read, least_text: str, parallax: str) -> None:
    text = least_text.replace("distance_pc = 578", f"parallax_mas = {parallax}")
    measured = read(text.replace("distance_error_pc = 7", "parallax_error_mas = 0.5")).distance.parallax_mas
    assert measured == Measurement(float(parallax), 0.5)
    assert not str(measured.value).startswith("-0.0")


def test_thiele_innes_elements_replace_photocentre_and_inclination(read: Read, least_text: str) -> None:
    elements = (
        "[orbit.thiele_innes]\na_mas = -1.6\nb_mas = 0\nf_mas = -1.25\ng_mas = -1.87\ncovariance = "
        "[[4, 1, 0, 0], [1, 4, 0, 0], [0, 0, 4, -1], [0, 0, -1, 4]]\n"
    )
    orbit = read(least_text.replace("[[photometry]]", elements + "[[photometry]]", 1)).orbit
    assert orbit.thiele_innes == ThieleInnes(
        -1.6,
        0.0,
        -1.25,
        -1.87,
        ((4.0, 1.0, 0.0, 0.0), (1.0, 4.0, 0.0, 0.0), (0.0, 0.0, 4.0, -1.0), (0.0, 0.0, -1.0, 4.0)),
    )


def test_windows_line_ends_and_a_byte_order_mark_are_read(folder: Path, least_text: str) -> None:
    path = folder / "windows.toml"
    path.write_bytes(b"\xef\xbb\xbf" + least_text.replace("\n", "\r\n").encode())
    assert read_system(str(path)).name == "Least"


def test_parsed_content_gives_the_same_system_as_the_file(folder: Path, full: System, full_text: str) -> None:
    assert check_system(tomllib.loads(full_text), full.source, folder) == full


def test_a_system_goes_to_other_processes(full: System) -> None:
    assert pickle.loads(pickle.dumps(full)) == full


def test_reading_leaves_the_parsed_content_alone(least_text: str) -> None:
    raw = tomllib.loads(least_text)
    check_system(raw, "memory")
    assert raw == tomllib.loads(least_text)
