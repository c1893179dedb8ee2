"""Photometry, velocities and passbands from files: what is read, and faults that name the file and the row."""

from __future__ import annotations

import math
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest
from astropy import units
from astropy.io import fits
from astropy.table import MaskedColumn, Table
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from vetter.errors import Fault, InputError
from vetter.system import System
from vetter.system.model import Magnitude
from vetter.system.passband_files import read_passband

Read = Callable[..., System]
Faults = Callable[..., tuple[Fault, ...]]

VELOCITY_TABLE = '[velocities]\nfile = "rv.csv"\n'
HEADER = "time_bjd,rv_km_s,rv_error_km_s,instrument\n"


@pytest.fixture
def with_velocities(least_text: str) -> str:
    return least_text + VELOCITY_TABLE


@pytest.fixture
def only_file(least_text: str) -> str:
    return 'photometry_file = "p.csv"\n' + least_text[: least_text.index("[[photometry]]")]


def test_magnitudes_may_all_come_from_a_file(read: Read, only_file: str) -> None:
    content = (
        "# a remark\n\nmag , band, error_mag, flag\n12.5, gaia g, 0.01, x\n13.1, BP, 0.02, \n12, SDSS r, 0.03, y\n"
    )
    assert read(only_file, p__csv=content).magnitudes == (
        Magnitude("GAIA/GAIA3.G", 12.5, 0.01, "Vega"),
        Magnitude("GAIA/GAIA3.Gbp", 13.1, 0.02, "Vega"),
        Magnitude("SLOAN/SDSS.r", 12.0, 0.03, "AB"),
    )


def test_an_ecsv_file_that_astropy_wrote(read: Read, only_file: str, folder: Path) -> None:
    table = Table(
        {
            "band": ["J", "H", "Ks"],
            "mag": [11.0, 10.5, 10.25] * units.mag,
            "error_mag": [0.02, 0.03, 0.04] * units.mag,
            "system": MaskedColumn(["Vega", "", "AB"], mask=[False, True, False]),
        }
    )
    table.write(folder / "p.csv", format="ascii.ecsv")
    magnitudes = read(only_file).magnitudes
    assert [(entry.mag, entry.error_mag, entry.system) for entry in magnitudes] == [
        (11.0, 0.02, "Vega"),
        (10.5, 0.03, "Vega"),
        (10.25, 0.04, "AB"),
    ]


def test_velocities_in_ecsv_with_instruments(read: Read, with_velocities: str, folder: Path) -> None:
    table = Table(
        {
            "time_bjd": [2459000.5, 2459001.5] * units.day,
            "rv_km_s": [1, -2] * units.km / units.s,
            "rv_error_km_s": [0.1, 0.2],
            "instrument": ["blue", "red"],
        }
    )
    table.write(folder / "rv.csv", format="ascii.ecsv", delimiter=",")
    velocities = read(with_velocities).velocities
    assert velocities is not None
    assert velocities.file == "rv.csv"
    assert velocities.rv_km_s == (1.0, -2.0)
    assert velocities.time_bjd == (2459000.5, 2459001.5)
    assert velocities.instrument == ("blue", "red")


@pytest.mark.parametrize(
    ("content", "key", "value", "expected"),
    [
        (HEADER, "velocities.file", "'rv.csv'", "at least one row"),
        ("time_bjd,rv_km_s\n1,2\n", "rv.csv, column rv_error_km_s", "", "found time_bjd, rv_km_s"),
        ("rv_km_s," + HEADER + "1,2,3,1,a\n", "rv.csv, column rv_km_s", "", "one column"),
        (HEADER + "1,2,0.1,a\n1,2,0,a\n", "rv.csv, row 2, rv_error_km_s", "0.0", "above 0"),
        (HEADER + "1,2,-0.1,a\n", "rv.csv, row 1, rv_error_km_s", "-0.1", "above 0"),
        (HEADER + "1,nan,0.1,a\n", "rv.csv, row 1, rv_km_s", "nan", "a number"),
        (HEADER + "1,1_0,0.1,a\n", "rv.csv, row 1, rv_km_s", "'1_0'", "a number"),
        (HEADER + "1,fast,0.1,a\n", "rv.csv, row 1, rv_km_s", "'fast'", "a number"),
        (HEADER + "inf,1,0.1,a\n", "rv.csv, row 1, time_bjd", "inf", "a number"),
        (HEADER + ",1,0.1,a\n", "rv.csv, row 1, time_bjd", "", "a number"),
        (HEADER + "1,2,0.1\n", "rv.csv, row 1", "'3 cells'", "4 cells"),
        (HEADER + '1,2,0.1,"a\n', "velocities.file", "'rv.csv'", "comma-separated"),
        ("# nothing but a remark\n", "rv.csv, column time_bjd", "", "found none"),
        ("\n \n", "velocities.file", "'rv.csv'", "some content"),
        ("# %ECSV 1.0\n# ---\n# datatype: [\na\n", "velocities.file", "'rv.csv'", "an ECSV table"),
    ],
)
def test_a_fault_in_a_velocity_file_names_file_and_row(
    faults: Faults, with_velocities: str, content: str, key: str, value: str, expected: str
) -> None:
    fault = faults(with_velocities, rv__csv=content)[0]
    assert (fault.key, fault.value) == (key, value)
    assert expected in fault.expected
    assert fault.mend or key.endswith("rv_km_s")


def test_a_column_in_another_unit_is_refused_not_converted(faults: Faults, with_velocities: str, folder: Path) -> None:
    table = Table({"time_bjd": [1.0], "rv_km_s": [1.0] * units.m / units.s, "rv_error_km_s": [1.0]})
    table.write(folder / "rv.csv", format="ascii.ecsv")
    (fault,) = faults(with_velocities)
    assert (fault.key, fault.value) == ("rv.csv, column rv_km_s", "'m / s'")
    assert fault.expected == "the unit km/s"


def test_truth_values_in_an_ecsv_column_are_not_numbers(faults: Faults, with_velocities: str, folder: Path) -> None:
    Table({"time_bjd": [1.0], "rv_km_s": [True], "rv_error_km_s": [1.0]}).write(folder / "rv.csv", format="ascii.ecsv")
    (fault,) = faults(with_velocities)
    assert (fault.key, fault.value) == ("rv.csv, row 1, rv_km_s", "true")


FIVE_EPOCHS = "".join(f"{day},{day % 3},0.1,a\n" for day in range(1, 6))


@pytest.mark.parametrize(
    "rows", [FIVE_EPOCHS.replace("5,2,0.1,a\n", ""), FIVE_EPOCHS.replace("5,2,0.1,a", "5,2,0.1,b")]
)
def test_few_epochs_alone_are_no_orbit_constraint(faults: Faults, with_velocities: str, rows: str) -> None:
    """Four of one instrument, or five of two: what is missing is said, for the amplitude and for the period."""
    text = with_velocities.replace("k1_km_s = 40\nk1_error_km_s = 1\n", "")
    (fault,) = faults(text, rv__csv=HEADER + rows)
    assert fault.key == "orbit"
    assert "5 epochs at different times, and one more for each further instrument" in fault.expected
    found = faults(text.replace("[orbit]\nperiod_d = 3\n", ""), rv__csv=HEADER + rows)
    assert [fault.key for fault in found] == ["orbit", "orbit.period_d"]


def test_enough_epochs_stand_for_the_whole_orbit(read: Read, with_velocities: str) -> None:
    text = with_velocities.replace("k1_km_s = 40\nk1_error_km_s = 1\n", "")
    dated = read(text, rv__csv=HEADER + FIVE_EPOCHS).orbit
    assert (dated.period_given, dated.period_d.value, dated.k1_km_s) == (True, 3.0, None)
    for rest in (text.replace("period_d = 3\n", ""), text.replace("[orbit]\nperiod_d = 3\n", "")):
        orbit = read(rest, rv__csv=HEADER + FIVE_EPOCHS).orbit
        assert not orbit.period_given
        assert math.isnan(orbit.period_d.value)


@pytest.mark.parametrize(
    ("rows", "key", "expected"),
    [
        ("J,11,0.1\nJJ,11,0.1\nH,11,0.1\n", "p.csv, row 2, band", "a known band"),
        ("J,11,0.1\n2MASS J,11.1,0.1\nH,11,0.1\n", "p.csv, row 2, band", "one measurement of each band"),
        ("J,11,0.1\nH,99,0.1\nK,11,0.1\n", "p.csv, row 2, mag", "at most 60"),
        ("J,11,0.1\nH,10,0.1\n", "photometry", "got 2"),
    ],
)
def test_a_fault_in_a_photometry_file_names_file_and_row(
    faults: Faults, only_file: str, rows: str, key: str, expected: str
) -> None:
    (fault,) = faults(only_file, p__csv="band,mag,error_mag\n" + rows)
    assert fault.key == key
    assert expected in fault.expected
    assert fault.mend


def test_file_names_are_relative_to_the_system_file_not_to_the_working_folder(
    read: Read, only_file: str, folder: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    (folder / "elsewhere").mkdir()
    monkeypatch.chdir(folder / "elsewhere")
    assert len(read(only_file, p__csv="band,mag,error_mag\nJ,1,0.1\nH,1,0.1\nKs,1,0.1\n").magnitudes) == 3


@pytest.mark.parametrize("name", ["\\u0000", "x" * 400, "a/b/c.csv", "system.toml/x"])
def test_a_name_that_can_be_no_file(faults: Faults, only_file: str, name: str) -> None:
    (fault,) = faults(only_file.replace("p.csv", name))
    assert fault.key == "photometry_file"


@pytest.mark.parametrize("unit", ["AA", "nm", "um", None])
def test_a_fits_passband_is_read_in_the_unit_of_its_header(tmp_path: Path, unit: str | None) -> None:
    angstrom = np.array([15000.0, 16000.0, 18000.0])
    scale = {"AA": 1.0, "nm": 0.1, "um": 1e-4, None: 1.0}[unit]
    table = Table({"WAVELENGTH": angstrom * scale, "THROUGHPUT": [0.0, 0.9, 0.0]})
    if unit is not None:
        table["WAVELENGTH"].unit = unit
    table.write(tmp_path / "band.fits")
    wavelengths, throughputs = read_passband(tmp_path / "band.fits")
    assert wavelengths == pytest.approx((1500.0, 1600.0, 1800.0), rel=1e-12)
    assert throughputs == (0.0, 0.9, 0.0)


def test_a_fits_passband_agrees_with_synphot(tmp_path: Path) -> None:
    from synphot import SpectralElement
    from synphot.models import Empirical1D

    points = np.linspace(5000.0, 6000.0, 11)
    curve = np.exp(-(((points - 5500.0) / 200.0) ** 2))
    SpectralElement(Empirical1D, points=points, lookup_table=curve).to_fits(str(tmp_path / "v.fits"), overwrite=True)
    wavelengths, throughputs = read_passband(tmp_path / "v.fits")
    reference = SpectralElement.from_file(str(tmp_path / "v.fits"))
    # The file is written in single precision.
    assert reference(np.array(wavelengths) * 10.0 * units.AA).value == pytest.approx(throughputs, rel=1e-6)
    assert 550.0 in [pytest.approx(wavelength, rel=1e-6) for wavelength in wavelengths]


@pytest.mark.parametrize(
    ("content", "key", "expected"),
    [
        ("450 0\n550 1\n650 0\n", "row 1, wavelength", "at least 900"),
        ("5000 0\n5500 1\n5400 0\n", "row 3, wavelength", "more than the 5500"),
        ("5000 0\n5000 1\n5400 0\n", "row 2, wavelength", "more than the 5000"),
        ("5000 0\n5500 -1\n5600 1\n", "row 2, throughput", "at least 0"),
        ("5000 0\n5500 0\n", "throughput", "above zero somewhere"),
        ("5000 1\n", "", "at least two rows"),
        ("5000 1 3\n5100 1\n", "row 1", "two numbers"),
        ("wave thru\n5000 1\n5100 x\n", "row 2", "two numbers"),
        ("5000 1\n5100 nan\n", "row 2", "two numbers"),
        ("SIMPLE  = nonsense", "", "a FITS table"),
    ],
)
def test_a_faulty_passband_names_the_row(tmp_path: Path, content: str, key: str, expected: str) -> None:
    path = tmp_path / "band.txt"
    path.write_text(content, encoding="utf-8")
    with pytest.raises(InputError) as caught:
        read_passband(path)
    assert caught.value.source == str(path)
    assert key in [fault.key for fault in caught.value.faults]
    assert any(expected in fault.expected for fault in caught.value.faults)


def test_a_fits_file_without_a_table(tmp_path: Path) -> None:
    fits.PrimaryHDU(np.zeros((2, 2))).writeto(tmp_path / "image.fits")
    with pytest.raises(InputError, match="it has none"):
        read_passband(tmp_path / "image.fits")


@pytest.mark.parametrize(
    ("names", "expected"),
    [(["a"], "two columns"), (["a", "b"], None), (["throughput", "wavelength"], None)],
)
def test_columns_of_a_fits_passband_go_by_name_then_by_place(
    tmp_path: Path, names: list[str], expected: str | None
) -> None:
    wavelengths, throughputs = [5000.0, 6000.0], [0.5, 0.6]
    values = [throughputs, wavelengths] if names[0] == "throughput" else [wavelengths, throughputs]
    Table(dict(zip(names, values, strict=False))).write(tmp_path / "t.fits")
    if expected is None:
        assert read_passband(tmp_path / "t.fits") == ((500.0, 600.0), (0.5, 0.6))
    else:
        with pytest.raises(InputError, match=expected):
            read_passband(tmp_path / "t.fits")


@pytest.fixture
def good_fits(tmp_path: Path) -> bytes:
    Table({"WAVELENGTH": [5000.0, 6000.0], "THROUGHPUT": [0.5, 0.6]}).write(tmp_path / "good.fits")
    return (tmp_path / "good.fits").read_bytes()


@settings(max_examples=100, suppress_health_check=[HealthCheck.function_scoped_fixture], deadline=None)
@given(cut=st.integers(0, 5760), byte=st.integers(0, 255))
def test_a_damaged_fits_file_never_escapes(good_fits: bytes, tmp_path: Path, cut: int, byte: int) -> None:
    path = tmp_path / "damaged.fits"
    content = bytearray(good_fits)
    content[cut % len(content)] = byte
    path.write_bytes(bytes(content[: len(content) - (cut if byte % 2 else 0)]))
    try:
        wavelengths, _ = read_passband(path)
    except InputError:
        return
    assert len(wavelengths) >= 2


ECSV = """\
# %ECSV 1.0
# ---
# datatype:
# - {name: time_bjd, unit: d, datatype: float64}
# - {name: rv_km_s, unit: km / s, datatype: float64}
# - {name: rv_error_km_s, datatype: float64}
time_bjd rv_km_s rv_error_km_s
1 2 3
4 5 6
"""


@settings(max_examples=150, suppress_health_check=[HealthCheck.function_scoped_fixture], deadline=None)
@given(
    place=st.integers(8, len(ECSV) - 1),
    text=st.sampled_from(["", " ", "\n", "{", "]", ":", "nan", "é", "float", "-", '"']),
)
def test_a_damaged_ecsv_file_never_escapes_as_another_error(
    read: Read, with_velocities: str, place: int, text: str
) -> None:
    keys = []
    try:
        system = read(with_velocities, rv__csv=ECSV[:place] + text + ECSV[place + 1 :])
    except InputError as error:
        keys = [fault.key for fault in error.faults]
    else:
        assert system.velocities is not None
        assert len(system.velocities.time_bjd) >= 1
    assert all(key.startswith(("rv.csv", "velocities.file")) for key in keys)
