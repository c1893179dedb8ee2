"""The declared keys, the model and the documentation agree with one another."""

from __future__ import annotations

import dataclasses
import tomllib

import pytest

from vetter.system import model
from vetter.system.documentation import key_table
from vetter.system.fields import Table, nearest_key
from vetter.system.keys import HOMES, SCENARIO_NAMES, TABLES, TOP

RECORDS = {
    "sky": model.Sky,
    "distance": model.Distance,
    "extinction": model.Extinction,
    "primary": model.Primary,
    "orbit": model.Orbit,
    "orbit.thiele_innes": model.ThieleInnes,
    "light_limit": model.LightLimit,
    "variability": model.Variability,
    "x_ray": model.XRay,
    "imaging": model.Imaging,
    "assumptions": model.Assumptions,
}


@pytest.mark.parametrize("table", TABLES, ids=lambda table: table.name)
def test_the_documentation_has_every_table_and_key(table: Table) -> None:
    section = key_table().split(f"### `{table.heading}`")[1].split("###")[0]
    for key in table.kinds():
        assert f"| `{key}` |" in section or key == "thiele_innes"


def test_every_key_of_the_example_is_declared(full_text: str) -> None:
    declared = {table.name: set(table.kinds()) for table in (TOP, *TABLES)}
    raw = tomllib.loads(full_text)
    assert set(raw) <= declared[""]
    for name, content in raw.items():
        for entry in content if isinstance(content, list) else [content]:
            assert not isinstance(entry, dict) or set(entry) <= declared[name]


def test_the_example_leaves_out_only_what_excludes_something_else(full_text: str) -> None:
    raw = tomllib.loads(full_text)
    missing = {
        f"{table.name}.{key}"
        for table in TABLES
        if table.name not in {"orbit.thiele_innes", "prior_odds", "photometry"}
        for key in table.kinds()
        if key not in (raw[table.name][0] if table.repeated else raw[table.name])
    }
    assert missing == {
        "distance.distance_pc",
        "distance.distance_error_pc",
        "extinction.ebv_max_mag",
        "orbit.thiele_innes",
        "primary.emission_lines",  # a flag: the fuzz of this text compares numbers and words
        "variability.ellipsoidal_mag",
        "variability.ellipsoidal_error_mag",
    }


@pytest.mark.parametrize(("name", "record"), RECORDS.items())
def test_every_field_of_a_record_has_a_key(name: str, record: type) -> None:
    (table,) = (table for table in TABLES if table.name == name)
    fields = {field.name for field in dataclasses.fields(record)} - {"eccentricity_given", "period_given"}
    assert fields <= set(table.kinds())


@pytest.mark.parametrize("table", TABLES, ids=lambda table: table.name)
def test_every_key_and_table_is_explained(table: Table) -> None:
    assert table.meaning.endswith(".")
    assert all(key.meaning for key in table.keys)
    assert all(kind.expected for kind in table.kinds().values())


def test_a_unit_in_a_name_is_the_unit_of_the_kind() -> None:
    endings = {"_mas": "mas", "_deg": "deg", "_pc": "pc", "_k": "K", "_msun": "Msun", "_d": "d", "_km_s": "km/s"}
    for table in TABLES:
        for key, kind in table.kinds().items():
            for ending, unit in endings.items():
                if key.endswith(ending):
                    assert f" {unit}" in kind.expected, f"{table.name}.{key}"


def test_a_key_of_several_tables_has_no_one_home() -> None:
    assert "confidence" not in HOMES
    assert HOMES["photometry_file"] == "the top of the file"
    assert HOMES["a_mas"] == "[orbit.thiele_innes]"


def test_the_scenario_names_are_ten_different_ones() -> None:
    assert len(set(SCENARIO_NAMES)) == 10


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("teff_error", "teff_error_k"),
        ("k_teff", "teff_k"),
        ("Teff_K", "teff_k"),
        ("logg_err", "logg_error"),
        ("temperature", None),
        ("", None),
    ],
)
def test_the_nearest_key(text: str, expected: str | None) -> None:
    assert nearest_key(text, ["teff_k", "teff_error_k", "logg", "logg_error"]) == expected


def test_there_is_no_nearest_key_among_none() -> None:
    assert nearest_key("x", []) is None
