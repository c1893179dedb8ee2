"""Atmospheres of the user's own: both layouts, the metallicity axis, and what is refused."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest
from numpy.typing import NDArray

from vetter.errors import InputError
from vetter.light import Component, LightEngine
from vetter.light.tables import Atmospheres, load_tables
from vetter.light.user_grids import add_grid, grids_report, on_shipped_nodes, own_grids, render_grids

FloatArray = NDArray[np.float64]
TEFF_K, LOGG, FEH = (5000.0, 5500.0, 6000.0), (4.0, 4.5), (-1.0, 0.0, 0.5)
BANDS = ["Generic/Johnson.B", "Generic/Johnson.V", "GAIA/GAIA3.G", "2MASS/2MASS.Ks"]


def altered(teff_k: float, logg: float, feh: float) -> tuple[FloatArray, FloatArray]:
    """A shipped spectrum whose blue is dimmed by 0.2 mag per dex of [Fe/H]: the metallicity of this little world."""
    table = load_tables().atmospheres
    i, j = list(table.teff_k).index(teff_k), list(table.logg).index(logg)
    flux = np.exp(table.ln_flux[i, j].astype(float))
    return table.wavelength_angstrom, flux * 10 ** (-0.08 * feh * (table.wavelength_angstrom < 5000.0))


def write_catalogue(folder: Path, skip: tuple[float, float, float] | None = None) -> None:
    """One FITS file per Teff and [Fe/H], one column per gravity, and the table that lists them."""
    from astropy.table import Table

    index, names = [], []
    for feh in FEH:
        for teff_k in TEFF_K:
            file = f"m{10 * feh:+03.0f}_{teff_k:.0f}.fits"
            columns = {"WAVELENGTH": altered(teff_k, LOGG[0], feh)[0]}
            for logg in LOGG:
                flux = altered(teff_k, logg, feh)[1]
                columns[f"g{10 * logg:02.0f}"] = flux * ((teff_k, logg, feh) != skip)
                index.append(f"{teff_k:.0f},{feh},{logg}")
                names.append(f"{file}[g{10 * logg:02.0f}]")
            Table(columns).write(folder / file)
    Table({"INDEX": index, "FILENAME": names}).write(folder / "catalog.fits")


def write_index(folder: Path, **changes: str) -> None:
    """Plain text and FITS per model, listed in index.csv."""
    from astropy.table import Table

    lines = ["file,teff_k,logg,feh"]
    for feh in FEH:
        for teff_k in TEFF_K:
            for logg in LOGG:
                wavelength, flux = altered(teff_k, logg, feh)
                stem = f"t{teff_k:.0f}_{logg}_{feh}"
                if feh == 0.0:
                    Table({"WAVELENGTH": wavelength, "FLUX": flux}).write(folder / f"{stem}.fits")
                    lines.append(f"{stem}.fits,{teff_k},{logg},{feh}")
                else:
                    np.savetxt(folder / f"{stem}.txt", np.column_stack([wavelength, flux]), header="angstrom, flux")
                    lines.append(f"{stem}.txt,{teff_k},{logg},{feh}")
    text = "\n".join(lines)
    for old, new in changes.items():
        text = text.replace(old, new)
    (folder / "index.csv").write_text(text + "\n", encoding="utf-8")


@pytest.fixture
def shelf(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """An empty folder of the user's tables."""
    monkeypatch.setenv("VETTER_GRIDS", str(tmp_path / "shelf"))
    return tmp_path / "shelf"


@pytest.fixture
def collection(tmp_path: Path) -> Path:
    folder = tmp_path / "mine"
    folder.mkdir()
    return folder


def star(teff_k: float, logg: float, feh: float) -> Component:
    return Component("star", *(np.array([value]) for value in (teff_k, logg, feh, 1.0)))


@pytest.mark.parametrize("write", [write_catalogue, write_index])
def test_a_copy_of_shipped_spectra_gives_their_magnitudes(
    shelf: Path, collection: Path, write: Callable[[Path], None]
) -> None:
    write(collection)
    record = add_grid(collection)
    assert record == {
        "name": "mine",
        "teff_k": [5000.0, 6000.0],
        "logg": [4.0, 4.5],
        "feh": list(FEH),
        "models": 18,
    }
    assert own_grids() == ["mine"]
    assert [path.name for path in shelf.iterdir()] == ["mine.npz"]
    own, shipped = LightEngine.build(BANDS, grid="mine"), LightEngine.build(BANDS)
    # 0.003 at a shared model: the fast path's own tolerance. 0.01 half-way: steps of 500 K and of 250 K differ.
    for teff_k, logg, tolerance in ((5500.0, 4.5, 0.003), (5730.0, 4.2, 0.01)):
        body = star(teff_k, logg, 0.0)
        expected = shipped.magnitudes(body, 10.0, 0.4)
        assert own.magnitudes(body, 10.0, 0.4) == pytest.approx(expected, abs=tolerance)


def test_metallicity_is_a_third_axis(shelf: Path, collection: Path) -> None:
    """The spectra were dimmed by 0.2 mag per dex below 5000 A, linear in [Fe/H], so interpolation is exact there."""
    write_catalogue(collection)
    add_grid(collection, "dimmed")
    engine = LightEngine.build(["Generic/Johnson.B", "2MASS/2MASS.Ks"], grid="dimmed")
    bodies = Component("star", *(np.broadcast_to(v, 4).astype(float) for v in (5730.0, 4.2, [-1, -0.3, 0.25, 0.5], 1)))
    solar = engine.magnitudes(star(5730.0, 4.2, 0.0), 10.0, 0.0)
    shift = engine.magnitudes(bodies, 10.0, 0.0) - solar
    # A fifth of B's light comes from beyond 5000 A: less than 0.2 mag per dex, and not quite linear.
    assert shift[:, 0] == pytest.approx(np.array([-1, -0.3, 0.25, 0.5]) * 0.175, abs=0.02)
    assert shift[:, 1] == pytest.approx(0.0, abs=1e-6)
    held = engine.magnitudes(star(5730.0, 4.2, -3.0), 10.0, 0.0)
    assert held == pytest.approx(engine.magnitudes(star(5730.0, 4.2, -1.0), 10.0, 0.0))
    assert engine.metallicity_known("2MASS/2MASS.Ks")


def test_stars_outside_the_users_own_range_are_not_inside(shelf: Path, collection: Path) -> None:
    write_catalogue(collection)
    add_grid(collection, "narrow")
    engine = LightEngine.build(BANDS, grid="narrow")
    assert [bool(engine.inside(star(t, 4.2, 0.0))[0]) for t in (4900.0, 5500.0, 6100.0)] == [False, True, False]
    # Where it does not reach, the shipped atmospheres stand in, not its own edge.
    shipped = LightEngine.build(BANDS)
    for outside in (star(4900.0, 4.2, 0.0), star(3000.0, 5.0, -0.5), star(5500.0, 2.0, 0.0), star(90000.0, 5.0, 0.0)):
        assert (engine.magnitudes(outside, 10.0, 0.3) == shipped.magnitudes(outside, 10.0, 0.3)).all()
    dwarf = Component("white_dwarf", *(np.array([value]) for value in (12000.0, 8.0, 0.0, 0.012)))
    same = LightEngine.build(BANDS).magnitudes(dwarf, 10.0, 0.0)
    assert engine.magnitudes(dwarf, 10.0, 0.0) == pytest.approx(same, abs=1e-9)


def test_absent_gravity_takes_the_nearest(shelf: Path, collection: Path) -> None:
    write_catalogue(collection, skip=(5500.0, 4.0, 0.0))
    assert add_grid(collection)["models"] == 17
    engine = LightEngine.build(BANDS, grid="mine")
    low, high = (engine.magnitudes(star(5500.0, logg, 0.0), 10.0, 0.0) for logg in LOGG)
    assert low == pytest.approx(high, abs=1e-6)


def test_shipped_grid_has_its_name(shelf: Path) -> None:
    first = grids_report()[0]
    assert (first["name"], first["feh"]) == ("shipped", [0.0])
    assert first["teff_k"][0] == 2000.0
    body = star(5772.0, 4.44, 0.0)
    one, other = (LightEngine.build(BANDS, grid=grid).magnitudes(body, 10.0, 0.0) for grid in (None, "shipped"))
    assert (one == other).all()


def test_printed_list(shelf: Path, collection: Path) -> None:
    write_index(collection)
    add_grid(collection)
    head, shipped, own = render_grids(grids_report()).splitlines()
    assert head.split() == ["grid", "Teff", "(K)", "log", "g", "models", "[Fe/H]"]
    assert shipped.startswith("shipped")
    assert own.split() == ["mine", "5000", "-", "6000", "4", "-", "4.5", "18", "-1,", "0,", "0.5"]


def test_short_and_fine_spectra_are_continued_and_averaged() -> None:
    """Sampled eight times finer and cut at both ends, a spectrum linear between nodes comes back in V within 2 mmag."""
    shipped = load_tables().atmospheres
    wavelength, flux = altered(5500.0, 4.5, 0.0)
    fine = np.linspace(3400.0, 9500.0, 24001)
    model = read_like(5500.0, 4.5, fine, np.interp(fine, wavelength, flux))
    back = on_shipped_nodes(Path("mine"), model, shipped)
    weights = load_tables().passbands["Generic/Johnson.V"].weights
    assert -2.5 * np.log10(weights @ back / (weights @ flux)) == pytest.approx(0.0, abs=0.002)
    beyond = wavelength > 9600.0
    assert back[beyond] == pytest.approx(flux[beyond], rel=0.01)


def read_like(teff_k: float, logg: float, wavelength: FloatArray, flux: FloatArray) -> object:
    from vetter.light.collections import Model

    return Model(teff_k, logg, 0.0, wavelength, flux)


@pytest.mark.parametrize(
    ("wavelength", "factor", "expected"),
    [
        (np.linspace(3000.0, 8000.0, 100), 1.0, "9000 angstrom at least"),
        (np.linspace(4000.0, 9500.0, 100), 1.0, "3500"),
        (np.linspace(3000.0, 30000.0, 5000), 1 / np.pi, "per steradian"),
        (np.linspace(3000.0, 30000.0, 5000), 0.25, "Eddington"),
    ],
)
def test_spectra_that_cannot_be_meant(wavelength: FloatArray, factor: float, expected: str) -> None:
    node, flux = altered(5500.0, 4.5, 0.0)
    model = read_like(5500.0, 4.5, wavelength, factor * np.interp(wavelength, node, flux))
    shipped: Atmospheres = load_tables().atmospheres
    with pytest.raises(InputError, match=expected):
        on_shipped_nodes(Path("mine"), model, shipped)


def test_missing_temperature_is_named(shelf: Path, collection: Path) -> None:
    write_index(collection)
    text = (collection / "index.csv").read_text(encoding="utf-8").splitlines()
    (collection / "index.csv").write_text(
        "\n".join(line for line in text if ",5500.0," not in line or not line.endswith("-1.0")), encoding="utf-8"
    )
    with pytest.raises(InputError, match=r"a model of 5500 K at \[Fe/H\] -1"):
        add_grid(collection)
    assert own_grids() == []


@pytest.mark.parametrize(
    ("old", "new", "expected"),
    [
        ("teff_k", "temperature", "the columns file, teff_k, logg, feh"),
        ("t5000_4.0_0.0.fits", "absent.fits", "row 7 file"),
        (",5000.0,4.0,0.0", ",hot,4.0,0.0", "row 7 teff_k is nan"),
        (",5000.0,4.0,0.0", ",5000.0,4.0,9.0", r"row 7 feh is 9\.0"),
    ],
)
def test_faults_of_an_index(shelf: Path, collection: Path, old: str, new: str, expected: str) -> None:
    write_index(collection, **{old: new})
    with pytest.raises(InputError, match=expected):
        add_grid(collection)


@pytest.mark.parametrize("content", ["1 2\n3", "1 2\n0.5 1\n", "1 -1\n2 3\n", "words\n", "5 nan\n6 1\n"])
def test_faults_of_a_spectrum(shelf: Path, collection: Path, content: str) -> None:
    write_index(collection)
    (collection / "t5000_4.0_0.5.txt").write_text(content, encoding="utf-8")
    with pytest.raises(InputError, match=r"row 13 is .*t5000_4\.0_0\.5\.txt"):
        add_grid(collection)


def test_a_folder_without_a_list(shelf: Path, collection: Path) -> None:
    with pytest.raises(InputError, match=r"catalog\.fits or index\.csv"):
        add_grid(collection)
    (collection / "catalog.fits").write_text("not FITS", encoding="utf-8")
    with pytest.raises(InputError, match="INDEX and FILENAME"):
        add_grid(collection)


@pytest.mark.parametrize("name", ["", "../up", "shipped", "a b"])
def test_names_that_cannot_be(shelf: Path, collection: Path, name: str) -> None:
    with pytest.raises(InputError, match="name is"):
        add_grid(collection, name)


@pytest.mark.parametrize("content", [b"", b"not an archive", None])
def test_a_table_that_is_not_one(shelf: Path, content: bytes | None) -> None:
    shelf.mkdir()
    if content is None:
        flux = np.zeros((1, 2, 2, 7))
        np.savez(shelf / "old.npz", teff_k=[1, 2], logg=[1, 2], feh=[0], ln_flux=flux, filled=flux[..., 0] > 0)
    else:
        (shelf / "old.npz").write_bytes(content)
    for action in (grids_report, lambda: LightEngine.build(BANDS, grid="old")):
        with pytest.raises(InputError, match=r"old\.npz.*made by this version"):
            action()


def test_unknown_grid_lists_those_there_are(shelf: Path, collection: Path) -> None:
    write_catalogue(collection)
    add_grid(collection)
    with pytest.raises(InputError, match="one of: shipped, mine"):
        LightEngine.build(BANDS, grid="other")


def test_a_shelf_that_cannot_be_made(collection: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    (tmp_path / "file").write_text("", encoding="utf-8")
    monkeypatch.setenv("VETTER_GRIDS", str(tmp_path / "file" / "below"))
    write_catalogue(collection)
    with pytest.raises(InputError, match="VETTER_GRIDS"):
        add_grid(collection)
