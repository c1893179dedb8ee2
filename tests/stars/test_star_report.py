"""What ``vetter star`` prints, and how it says no."""

from __future__ import annotations

import json
import math

import pytest
from click.testing import CliRunner

from vetter.cli import main
from vetter.errors import InputError
from vetter.stars.main_sequence import main_sequence
from vetter.stars.report import KINDS, render_star, star_report

KEYS = {"teff_k", "radius_rsun", "luminosity_lsun", "logg", "mass_msun", "lifetime_myr"}


@pytest.mark.parametrize("kind", KINDS)
def test_every_kind_has_the_same_keys_and_is_plain_json(kind: str) -> None:
    report = star_report(kind, 0.9)
    assert set(report) == KEYS
    assert json.loads(json.dumps(report)) == report
    assert report["mass_msun"] == 0.9


def test_main_sequence_star() -> None:
    report, star = star_report("main_sequence", 2.0, 0.3, -0.2), main_sequence(2.0, 0.3, -0.2)
    assert report["teff_k"] == float(star.teff_k)
    assert report["logg"] == float(star.logg)
    assert star_report("main_sequence", 1.0)["lifetime_myr"] == pytest.approx(11003.1, abs=0.1)


def test_white_dwarf_has_no_lifetime() -> None:
    report = star_report("white_dwarf", 0.6)
    assert report["lifetime_myr"] is None
    assert report["radius_rsun"] == pytest.approx(0.01278, abs=6e-6)


def test_unknown_kind_lists_the_kinds() -> None:
    with pytest.raises(InputError, match="main_sequence, helium, white_dwarf"):
        star_report("quark", 1.0)


def test_all_faults_are_told_at_once() -> None:
    with pytest.raises(InputError) as caught:
        star_report("main_sequence", 500.0, 1.5, 3.0)
    assert [fault.key for fault in caught.value.faults] == ["--mass", "--life-fraction", "--feh"]
    assert "0.077 to 100 solar masses" in str(caught.value)


@pytest.mark.parametrize(
    ("kind", "mass"),
    [("white_dwarf", 1.5), ("white_dwarf", 0.01), ("main_sequence", 0.05), ("main_sequence", math.nan)],
)
def test_mass_out_of_range(kind: str, mass: float) -> None:
    with pytest.raises(InputError, match="--mass"):
        star_report(kind, mass)


def test_white_dwarf_temperature_can_be_chosen() -> None:
    assert star_report("white_dwarf", 0.6, white_dwarf_teff_k=2e4)["teff_k"] == 2e4
    with pytest.raises(InputError, match="--teff"):
        star_report("white_dwarf", 0.6, white_dwarf_teff_k=1e6)


def test_helium_star_lives_on_helium() -> None:
    # Hurley, Pols & Tout 2000, eq. 79: 1 Msun burns helium for 0.4129 + 18.81 + 1.853 = 21.08 Myr.
    assert star_report("helium", 1.0)["lifetime_myr"] == pytest.approx(21.0759)
    with pytest.raises(InputError, match=r"0\.3 to 15 solar masses"):
        star_report("helium", 0.1)


@pytest.mark.parametrize("kind", KINDS)
def test_the_command_knows_every_kind(kind: str) -> None:
    result = CliRunner().invoke(main, ["star", kind, "--mass", "0.6", "--teff", "20000", "--json"])
    assert json.loads(result.stdout) == star_report(kind, 0.6, white_dwarf_teff_k=20000.0)
    assert kind in CliRunner().invoke(main, ["star", "--help"]).stdout


def test_screen_shows_every_quantity_with_its_unit() -> None:
    lines = render_star(star_report("white_dwarf", 0.6)).splitlines()
    assert lines[0] == "mass        0.6 Msun"
    assert lines[-1] == "lifetime    -"
    assert len(lines) == len(KEYS)
    assert "lifetime    11003 Myr" in render_star(star_report("main_sequence", 1.0))
