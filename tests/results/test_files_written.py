"""Machine-readable results: strict JSON with the keys of the contract, tables that other tools read, all or nothing."""

from __future__ import annotations

import io
import json
from collections.abc import Callable
from pathlib import Path
from types import SimpleNamespace

import numpy as np
import pandas as pd
import pytest
from astropy.table import Table as AstropyTable

from vetter.results.export import COLUMNS, records, to_csv, to_ecsv, to_json, write_whole
from vetter.results.verdicts import ScenarioVerdict, Verdicts

Row = Callable[..., ScenarioVerdict]
Table = Callable[..., Verdicts]

TOP_KEYS = {"system", "version", "seed", "observations_used", "observations_absent", "scenarios", "cautions"}
SCENARIO_KEYS = {
    "name",
    "title",
    "verdict",
    "sigma",
    "ln_likelihood_max",
    "chi2_min",
    "n_data",
    "n_free",
    "fit_p_value",
    "ln_evidence",
    "ln_evidence_error",
    "posterior_odds_to_best",
    "companion_mass_msun",
    "driven_by",
    "diagnostics",
    "best_fit",
}
MORE_TOP_KEYS = {"orbit", "nothing_fits", "headline", "prior_odds"}
MORE_SCENARIO_KEYS = {
    "closed_because",
    "best_fit_magnitudes",
    "best_fit_light_ratio",
    "best_fit_residuals",
    "best_fit_hidden_stars",
    "companion_mass_density",
    "at_prior_edge",
    "priors",
    "seen_star",
}
DIAGNOSTIC_KEYS = {"effective_sample_size", "pareto_k", "method"}


def strict(text: str) -> dict[str, object]:
    """Parse as a strict reader would: NaN and Infinity are no JSON."""

    def refuse(word: str) -> float:
        raise AssertionError(f"{word} in JSON")

    return json.loads(text, parse_constant=refuse)


@pytest.mark.parametrize("example", ["dark", "hidden"])
def test_json_is_strict_and_has_the_keys_of_the_contract(example: str, request: pytest.FixtureRequest) -> None:
    found = strict(to_json(request.getfixturevalue(example).verdicts))
    assert set(found) == TOP_KEYS | MORE_TOP_KEYS
    for scenario in found["scenarios"]:
        assert set(scenario) == SCENARIO_KEYS | MORE_SCENARIO_KEYS
        assert scenario["diagnostics"] is None or set(scenario["diagnostics"]) >= DIAGNOSTIC_KEYS
        assert scenario["companion_mass_msun"] is None or len(scenario["companion_mass_msun"]) == 3
        for driver in scenario["driven_by"]:
            assert set(driver) == {"observation", "sigma_without"}
            assert driver["observation"] in found["observations_used"]


def test_a_walled_off_scenario_is_null_and_in_words(dark: SimpleNamespace) -> None:
    found = strict(to_json(dark.verdicts))
    (white,) = (scenario for scenario in found["scenarios"] if scenario["name"] == "white_dwarf")
    assert white["verdict"] == "excluded"
    for key in ("sigma", "ln_evidence", "ln_evidence_error", "chi2_min", "companion_mass_msun", "best_fit"):
        assert white[key] is None, key
    assert "1.38 Msun at any inclination" in white["closed_because"]
    assert white["posterior_odds_to_best"] == 0.0
    others = [scenario for scenario in found["scenarios"] if scenario is not white]
    assert all(scenario["closed_because"] is None for scenario in others)


def test_a_number_that_is_none_cannot_be_written(row: Row, table: Table) -> None:
    with pytest.raises(ValueError, match="not JSON compliant"):
        to_json(table(row(ln_evidence=float("nan"))))


def test_json_writes_numbers_in_full(row: Row, table: Table) -> None:
    value = 0.1 + 0.2
    assert strict(to_json(table(row(sigma=value))))["scenarios"][0]["sigma"] == value


def test_observations_are_used_or_absent_and_never_both(dark: SimpleNamespace) -> None:
    found = dark.verdicts
    assert not set(found.observations_used) & set(found.observations_absent)
    assert {"x_ray", "imaging", "variability", "velocities", "seen_mass"} <= set(found.observations_absent)
    assert len(found.observations_used) == len(found.observations_used_words)


def assert_same(column: np.ndarray, expected: list[object]) -> None:
    if all(value is None or isinstance(value, str) for value in expected):
        assert [str(value) for value in column] == [value or "" for value in expected]
    else:
        as_float = np.array([np.nan if value is None else value for value in expected], dtype=float)
        np.testing.assert_array_equal(np.asarray(column, dtype=float), as_float)


@pytest.mark.parametrize("example", ["dark", "hidden"])
def test_csv_is_read_back_by_pandas(example: str, request: pytest.FixtureRequest) -> None:
    verdicts = request.getfixturevalue(example).verdicts
    words: dict[str, type] = {name: str for name, (kind, _) in COLUMNS.items() if kind == "string"}
    frame = pd.read_csv(io.StringIO(to_csv(verdicts)), dtype=words)
    assert list(frame.columns) == list(COLUMNS)
    for name, (kind, _) in COLUMNS.items():
        column = frame[name].fillna("") if kind == "string" else frame[name]
        assert_same(column.to_numpy(), [record[name] for record in records(verdicts)])


@pytest.mark.parametrize("example", ["dark", "hidden"])
def test_ecsv_is_read_back_by_astropy(example: str, request: pytest.FixtureRequest) -> None:
    verdicts = request.getfixturevalue(example).verdicts
    found = AstropyTable.read(to_ecsv(verdicts), format="ascii.ecsv")
    assert found.colnames == list(COLUMNS)
    for name, (kind, unit) in COLUMNS.items():
        assert str(found[name].unit or "") == unit
        column = found[name]
        filled = column.filled("" if kind == "string" else np.nan) if hasattr(column, "filled") else column
        assert_same(np.asarray(filled), [record[name] for record in records(verdicts)])
    assert found.meta == {"system": verdicts.system, "version": verdicts.version, "seed": 0}


def test_units_of_the_flat_table_are_those_astropy_knows() -> None:
    from astropy import units

    for kind, unit in COLUMNS.values():
        units.Unit(unit)
        assert kind in {"string", "float64", "int64"}


def test_words_with_commas_and_quotes_survive(row: Row, table: Table) -> None:
    awkward = 'needs more, "much more" than it has'
    frame = pd.read_csv(io.StringIO(to_csv(table(row(closed=True, closed_because=awkward)))))
    assert frame["closed_because"][0] == awkward
    odd = table(row(), system='Name, with "quotes" and: colon')
    assert AstropyTable.read(to_ecsv(odd), format="ascii.ecsv").meta["system"] == odd.system


def test_files_are_written_where_asked(tmp_path: Path) -> None:
    where = tmp_path / "new" / "folder"
    written = write_whole(where, {"a.txt": "é\n", "b.bin": b"\x00\x01"})
    assert written == [where / "a.txt", where / "b.bin"]
    assert (where / "a.txt").read_bytes() == "é\n".encode()
    assert (where / "b.bin").read_bytes() == b"\x00\x01"
    assert sorted(path.name for path in where.iterdir()) == ["a.txt", "b.bin"]


def test_files_are_replaced_and_others_left_alone(tmp_path: Path) -> None:
    (tmp_path / "a.txt").write_text("old")
    (tmp_path / "mine.txt").write_text("mine")
    write_whole(tmp_path, {"a.txt": "new"})
    assert (tmp_path / "a.txt").read_text() == "new"
    assert (tmp_path / "mine.txt").read_text() == "mine"


@pytest.mark.parametrize("failing", ["first", "last"])
def test_one_failure_leaves_the_folder_as_it_was(failing: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """The disk fills up while one file is made: the old results stay whole, nothing temporary remains."""
    (tmp_path / "first").write_text("old")
    write = Path.write_bytes

    def full_disk(path: Path, content: bytes) -> int:
        if path.name == failing:
            raise OSError(28, "No space left on device")
        return write(path, content)

    monkeypatch.setattr(Path, "write_bytes", full_disk)
    with pytest.raises(OSError, match="No space left"):
        write_whole(tmp_path, {"first": "new", "last": "new"})
    assert [path.name for path in tmp_path.iterdir()] == ["first"]
    assert (tmp_path / "first").read_text() == "old"


def test_an_interruption_leaves_nothing(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def interrupted(path: Path, content: bytes) -> int:
        raise KeyboardInterrupt

    monkeypatch.setattr(Path, "write_bytes", interrupted)
    with pytest.raises(KeyboardInterrupt):
        write_whole(tmp_path, {"a": "x"})
    assert list(tmp_path.iterdir()) == []


def test_a_file_in_place_of_the_folder(tmp_path: Path) -> None:
    (tmp_path / "taken").write_text("x")
    with pytest.raises(OSError, match="exists"):
        write_whole(tmp_path / "taken", {"a": "x"})
    assert (tmp_path / "taken").read_text() == "x"
