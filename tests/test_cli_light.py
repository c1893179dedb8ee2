"""The commands about light as a user meets them: bands, grids, grids add, --grid, and a passband of one's own."""

from __future__ import annotations

import json
from pathlib import Path

import numpy as np
import pytest
from click.testing import CliRunner, Result

from vetter import read_system
from vetter.cli import main
from vetter.light.tables import load_tables

HIDDEN = Path(__file__).parent.parent / "examples" / "hidden_star.toml"
SUN = ("light", "--star", "5772,4.44,1", "--distance-pc", 10, "--band", "V", "--band", "Ks", "--json")


def run(*arguments: object) -> Result:
    return CliRunner().invoke(main, [str(argument) for argument in arguments])


@pytest.fixture
def shelf(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """An empty folder of the user's own tables."""
    monkeypatch.setenv("VETTER_GRIDS", str(tmp_path / "shelf"))
    return tmp_path / "shelf"


@pytest.fixture
def collection(tmp_path: Path) -> Path:
    """Shipped spectra of 5000 to 6500 K; those of [Fe/H] -1 are a fifth brighter, a change that cannot be missed."""
    table = load_tables().atmospheres
    folder = tmp_path / "mine"
    folder.mkdir()
    lines = ["file,teff_k,logg,feh"]
    for i, teff_k in enumerate(table.teff_k):
        for logg in (4.0, 4.5, 5.0) if 5000.0 <= teff_k <= 6500.0 else ():
            flux = np.exp(table.ln_flux[i, list(table.logg).index(logg)].astype(float))
            for feh in (-1.0, 0.0):
                name = f"{teff_k:g}_{logg:g}_{feh:g}.txt"
                np.savetxt(folder / name, np.column_stack([table.wavelength_angstrom, flux * (1.0 - 0.2 * feh)]))
                lines.append(f"{name},{teff_k},{logg},{feh}")
    (folder / "index.csv").write_text("\n".join(lines) + "\n")
    return folder


# vetter bands


def test_bands_lists_every_passband() -> None:
    result = run("bands")
    assert result.exit_code == 0
    assert result.stderr == ""
    assert all(f"\n{band} " in result.stdout for band in load_tables().passbands)
    assert max(map(len, result.stdout.splitlines())) <= 120


def test_bands_as_json_tell_source_type_pivot_and_zero_point() -> None:
    found = json.loads(run("bands", "--json").stdout)
    assert {record["id"] for record in found} == set(load_tables().passbands)
    for record in found:
        assert record["source"]
        assert record["reference"]
        assert record["type"] == "photon"
        assert record["pivot_nm"] > 0.0
        assert record["zero_point_jy"] > 0.0


@pytest.mark.parametrize(("name", "head"), [("bands.png", b"\x89PNG"), ("bands.pdf", b"%PDF")])
def test_the_figure_is_written_beside_the_list(tmp_path: Path, name: str, head: bytes) -> None:
    result = run("bands", "--json", "--figure", tmp_path / name)
    assert result.exit_code == 0
    assert (tmp_path / name).read_bytes().startswith(head)
    assert len(json.loads(result.stdout)) == len(load_tables().passbands)
    assert result.stderr == f"written: {tmp_path / name}\n"


@pytest.mark.parametrize("name", ["bands.jpeg", "no/such/folder/bands.png"])
def test_a_figure_that_cannot_be_written(tmp_path: Path, name: str) -> None:
    result = run("bands", "--figure", tmp_path / name)
    assert result.exit_code == 2
    assert result.stdout == ""
    assert result.stderr.startswith("vetter: ")
    assert "--figure" in result.stderr
    assert list(tmp_path.iterdir()) == []


# vetter grids


def test_grids_lists_the_shipped_one(shelf: Path) -> None:
    head, shipped = run("grids").stdout.splitlines()
    assert head.startswith("grid")
    assert shipped.startswith("shipped")
    (record,) = json.loads(run("grids", "--json").stdout)
    assert record["name"] == "shipped"
    assert record["teff_k"] == [2000.0, 150000.0]
    assert not shelf.exists()


def test_grids_errors() -> None:
    result = run("grids", "--errors")
    assert result.exit_code == 0
    assert all(f"\n{band} " in result.stdout for band in load_tables().passbands)
    found = json.loads(run("grids", "--errors", "--json").stdout)
    visual = next(record for record in found if record["id"] == "Generic/Johnson.V")
    at_6000 = visual["dwarf_mag"][visual["teff_k"].index(6000.0)]
    assert 0.01 <= at_6000 <= 0.03
    row = next(line for line in result.stdout.splitlines() if line.startswith("Generic/Johnson.V"))
    assert row.split()[1 + 6] == f"{1000 * at_6000:.0f}"


def test_a_collection_is_added_listed_and_used(shelf: Path, collection: Path) -> None:
    added = run("grids", "add", collection, "--name", "bright")
    assert added.exit_code == 0
    assert added.stdout.splitlines()[1].startswith("bright")
    assert [record["name"] for record in json.loads(run("grids", "--json").stdout)] == ["shipped", "bright"]

    def magnitudes(*options: object) -> dict[str, float]:
        result = run(*SUN, *options)
        assert result.exit_code == 0, result.stderr
        return {band: entry["total_mag"] for band, entry in json.loads(result.stdout)["bands"].items()}

    shipped, own = magnitudes(), magnitudes("--grid", "bright")
    assert own == pytest.approx(shipped, abs=0.003)
    poor = run(*(word if word != "5772,4.44,1" else "5772,4.44,1,-1" for word in SUN), "--grid", "bright")
    for band, entry in json.loads(poor.stdout)["bands"].items():
        assert entry["total_mag"] - shipped[band] == pytest.approx(-2.5 * np.log10(1.2), abs=0.003)


def test_where_the_own_grid_ends_the_shipped_one_stands_in(shelf: Path, collection: Path) -> None:
    assert run("grids", "add", collection).exit_code == 0
    giant = ("light", "--star", "4500,2,10", "--distance-pc", 10, "--band", "V", "--json")
    own, shipped = (json.loads(run(*giant, *options).stdout) for options in (("--grid", "mine"), ()))
    assert own["bands"] == shipped["bands"]
    assert own["cautions"] == ["star 1 lies outside the atmospheres 'mine': the shipped ones stand in"]
    assert "cautions" not in shipped


def test_an_evaluation_with_the_own_grid_says_so(shelf: Path, collection: Path) -> None:
    assert run("grids", "add", collection).exit_code == 0
    result = run("evaluate", HIDDEN, "--scenario", "neutron_star", "--grid", "mine", "--json")
    assert result.exit_code == 0
    said = " ".join(json.loads(result.stdout)["cautions"])
    assert "your own atmospheres 'mine'" in said


@pytest.mark.parametrize(
    ("arguments", "words"),
    [
        (("grids", "add", "no_such_folder"), "no_such_folder"),
        (("grids", "add", "empty"), "catalog.fits or index.csv"),
        (("grids", "add", "empty", "--name", "../up"), "../up"),
        ((*SUN, "--grid", "other"), "expected one of: shipped"),
        (("evaluate", HIDDEN, "--grid", "other"), "expected one of: shipped"),
    ],
)
def test_bad_input_is_one_message(
    shelf: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, arguments: tuple[object, ...], words: str
) -> None:
    monkeypatch.chdir(tmp_path)
    (tmp_path / "empty").mkdir()
    result = run(*arguments)
    assert result.exit_code == 2
    assert result.stdout == ""
    assert result.stderr.startswith("vetter: ")
    assert words in result.stderr
    assert not shelf.exists()


@pytest.mark.parametrize("arguments", [("grids", "remove"), ("grids", "add"), ("grids", "--errors", "add", "x")])
def test_a_wrong_command_line(arguments: tuple[str, ...]) -> None:
    result = run(*arguments)
    assert result.exit_code == 2
    assert result.stdout == ""


# Light in the system file


@pytest.mark.parametrize(("written", "read"), [("true", True), ("false", False), (None, False)])
def test_the_flag_of_emission_lines_is_read(tmp_path: Path, written: str | None, read: bool) -> None:
    line = "" if written is None else f"\nemission_lines = {written}"
    (tmp_path / "star.toml").write_text(HIDDEN.read_text().replace("[primary]", f"[primary]{line}"))
    assert read_system(tmp_path / "star.toml").primary.emission_lines is read


def test_a_flag_in_quotes_is_refused(tmp_path: Path) -> None:
    (tmp_path / "star.toml").write_text(HIDDEN.read_text().replace("[primary]", '[primary]\nemission_lines = "yes"'))
    result = run("inspect", tmp_path / "star.toml")
    assert result.exit_code == 2
    assert "primary.emission_lines" in result.stderr
    assert "true or false" in result.stderr


def test_an_own_passband_in_the_system_file(tmp_path: Path) -> None:
    """V given again as the user's own: the same best fit, though the weights are made at run time."""
    visual = load_tables().passbands["Generic/Johnson.V"]
    np.savetxt(tmp_path / "v.txt", np.column_stack([visual.wavelength_angstrom, visual.throughput]), header="angstrom")
    text = HIDDEN.read_text()
    assert text.count('"Generic/Johnson.V"') == 1
    zero_jy = visual.zero_flux["Vega"] * visual.pivot_angstrom**2 / 2.99792458e-5
    table = f'\n[[passband]]\nid = "Own.V"\nfile = "v.txt"\nsystem = "Vega"\nzero_point_jy = {zero_jy:.6f}\n'
    (tmp_path / "own.toml").write_text(text.replace('"Generic/Johnson.V"', '"Own.V"') + table)
    (tmp_path / "built_in.toml").write_text(text)
    own, built_in = (
        json.loads(run("evaluate", tmp_path / f"{name}.toml", "--scenario", "neutron_star", "--json").stdout)
        for name in ("own", "built_in")
    )
    best = [result["scenarios"][0]["ln_likelihood_max"] for result in (own, built_in)]
    # 1 mmag between the two sets of weights, 0.02 mag of error, at most 2 sigma off in V: 0.1 in ln likelihood.
    assert best[0] == pytest.approx(best[1], abs=0.1)


def test_an_own_passband_without_a_zero_point(tmp_path: Path) -> None:
    (tmp_path / "v.txt").write_text("5000 0\n5500 1\n6000 0\n")
    table = '\n[[passband]]\nid = "Own.V"\nfile = "v.txt"\nsystem = "Vega"\n'
    path = tmp_path / "own.toml"
    path.write_text(HIDDEN.read_text().replace('"Generic/Johnson.V"', '"Own.V"') + table)
    result = run("evaluate", path, "--scenario", "neutron_star")
    assert result.exit_code == 2
    assert "zero_point_jy" in result.stderr
    assert "Own.V" in result.stderr
