"""The dictionaries behind ``vetter light`` and ``vetter bands``."""

from __future__ import annotations

import json

import numpy as np
import pytest

from vetter.errors import InputError
from vetter.light import Component, LightEngine
from vetter.light.report import bands_report, light_report, render_bands, render_light
from vetter.light.tables import LightTables, load_tables

SUN = (5777.0, 4.44, 1.0, 0.0)


def test_form(world: LightTables) -> None:
    bands = ["Generic/Johnson.V", "GALEX/GALEX.NUV"]
    report = light_report([SUN, (4000.0, 4.6, 0.6, 0.0)], 50.0, 0.1, 3.1, bands, [(540.0, 560.0)], tables=world)
    assert json.loads(json.dumps(report)) == report
    assert list(report) == ["bands", "windows"]
    assert list(report["bands"]) == bands
    visual = report["bands"]["Generic/Johnson.V"]
    assert visual["system"] == "Vega"
    assert report["bands"]["GALEX/GALEX.NUV"]["system"] == "AB"
    assert visual["total_mag"] == pytest.approx(-2.5 * np.log10(sum(10 ** (-0.4 * m) for m in visual["star_mag"])))
    [window] = report["windows"]
    assert window["wavelength_nm"] == [540.0, 560.0]
    assert window["ratio_to_first"][0] == 1.0
    assert 0.0 < window["ratio_to_first"][1] < 0.36


def test_one_star_is_its_own_total(world: LightTables) -> None:
    report = light_report([SUN], 10.0, bands=["V-like"], tables=world)
    assert report["bands"]["Generic/Johnson.V"]["star_mag"] == [report["bands"]["Generic/Johnson.V"]["total_mag"]]
    assert report["windows"] == []


def test_reddening_is_r_v_times_excess(world: LightTables) -> None:
    one, other = (
        light_report([SUN], 10.0, ebv, 3.1, ["Generic/Johnson.V"], tables=world)["bands"]["Generic/Johnson.V"]
        for ebv in (0.0, 1.0)
    )
    # In the small world A(5500 A) = A(V); the passband's mean lies within 2 % of that.
    assert other["total_mag"] - one["total_mag"] == pytest.approx(3.1, rel=0.02)


def test_all_bands_by_default() -> None:
    assert list(light_report([SUN], 10.0)["bands"]) == list(load_tables().passbands)


def test_metallicity_may_be_left_out(world: LightTables) -> None:
    short, full = (light_report([star], 10.0, bands=["V-like"], tables=world) for star in (SUN[:3], SUN))
    assert short == full


def test_short_names_are_understood() -> None:
    assert list(light_report([SUN], 10.0, bands=["V", "Ks", "gaia/gaia3.g"])["bands"]) == [
        "Generic/Johnson.V",
        "2MASS/2MASS.Ks",
        "GAIA/GAIA3.G",
    ]


def test_cautions(world: LightTables) -> None:
    report = light_report([SUN, (1500.0, 5.0, 0.1, -0.5)], 10.0, bands=["V-like"], tables=world)
    assert len(report["cautions"]) == 2
    assert report["cautions"][0].startswith("star 2 lies outside")
    assert "[Fe/H]" in report["cautions"][1]


def test_a_star_of_high_gravity_is_a_white_dwarf(world: LightTables) -> None:
    bands = ["Generic/Johnson.V"]
    report = light_report([SUN, (20000.0, 8.0, 0.0126)], 10.0, bands=bands, tables=world)
    body = Component("white_dwarf", *(np.array([value]) for value in (20000.0, 8.0, 0.0, 0.0126)))
    expected = LightEngine.build(bands, tables=world).magnitudes(body, 10.0, 0.0)[0, 0]
    assert report["bands"]["Generic/Johnson.V"]["star_mag"][1] == expected
    assert report["cautions"] == ["star 2 is taken for a white dwarf with a hydrogen surface (log g 7 or more)"]


def test_every_fault_at_once() -> None:
    with pytest.raises(InputError) as caught:
        light_report([SUN, (-5.0, 4.0, 0.0, 0.0)], -1.0, float("nan"))
    assert [fault.key for fault in caught.value.faults] == [
        "star 2 teff_k",
        "star 2 radius_rsun",
        "distance_pc",
        "ebv_mag",
    ]


def test_wrong_counts_of_numbers() -> None:
    with pytest.raises(InputError) as caught:
        light_report([(5777.0, 4.44), SUN], 10.0, windows_nm=[(500.0, 510.0, 520.0)])
    assert [fault.key for fault in caught.value.faults] == ["star 1", "window"]


def test_printed_light(world: LightTables) -> None:
    windows = [(540.0, 560.0)]
    report = light_report([SUN, (4000.0, 4.6, 0.6, 0.3)], 10.0, bands=["V-like"], windows_nm=windows, tables=world)
    head, visual, window, caution = render_light(report).splitlines()
    assert head.split() == ["band", "system", "total", "star", "1", "star", "2"]
    assert visual.split()[:2] == ["Generic/Johnson.V", "Vega"]
    assert float(visual.split()[2]) == pytest.approx(report["bands"]["Generic/Johnson.V"]["total_mag"], abs=5e-4)
    assert window.startswith("light ratio to star 1, 540-560 nm")
    assert window.split()[-2] == "1"
    assert caution == report["cautions"][0]


def test_printed_bands_fit_the_screen() -> None:
    lines = render_bands(bands_report()).splitlines()
    assert max(map(len, lines)) <= 120
    table, words = lines[: lines.index("")], " ".join(lines[lines.index("") :]).replace(",", "").split()
    assert len(table) == len(load_tables().passbands) + 1
    assert all(words.count(line.split()[0]) == 1 for line in table[1:])
    assert words[words.index("GALEX/GALEX.FUV") - 2 :][:2] == ["speclite", "1.0.0:"]
    visual = next(line for line in table if line.startswith("Generic/Johnson.V"))
    assert visual.split()[1:3] == ["Vega", "photon"]
    assert visual.endswith("Bessell 1990, PASP 102, 1181")


@pytest.mark.parametrize("distance_pc", [0.0, float("inf"), float("nan")])
def test_bad_distances(distance_pc: float) -> None:
    with pytest.raises(InputError, match="positive number of parsecs"):
        light_report([SUN], distance_pc)


def test_no_star() -> None:
    with pytest.raises(InputError, match="at least one star"):
        light_report([], 10.0)


def test_bands_report_lists_every_band_once() -> None:
    records = bands_report()
    assert {record["id"] for record in records} == set(load_tables().passbands)
    assert len(records) == len(load_tables().passbands)
    pivots = [record["pivot_nm"] for record in records]
    assert pivots == sorted(pivots)
    assert json.loads(json.dumps(records)) == records
    visual = next(record for record in records if record["id"] == "Generic/Johnson.V")
    # Bessell & Murphy 2012 (PASP 124, 140): pivot of V 547.9 nm (from memory); f(V = 0) is 3.6e-9 to 1 %.
    assert visual["pivot_nm"] == pytest.approx(548.0, abs=2.0)
    assert visual["zero_flux_vega"] == pytest.approx(3.63e-9, rel=0.04)
    # Bessell, Castelli & Plez 1998, A&A 333, 231, table A2: V = 0 is 3636 Jy; ours has Vega at 0.03.
    assert visual["zero_point_jy"] == pytest.approx(3636.0 * 10**0.012, rel=0.01)
    # Every AB band but the two of SDSS that are off by a constant has the 3631 Jy of the definition.
    ab = {record["id"]: record["zero_point_jy"] for record in records if record["system"] == "AB"}
    for band, offset in (("SLOAN/SDSS.u", 0.04), ("SLOAN/SDSS.z", -0.02)):
        assert ab.pop(band) == pytest.approx(3631.0 * 10 ** (0.4 * offset), rel=1e-4)
    assert list(ab.values()) == pytest.approx([3631.0] * len(ab), rel=1e-4)
    assert all(isinstance(record["source"], str) and record["reference"] for record in records)
