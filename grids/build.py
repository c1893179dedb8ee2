"""Make the shipped tables again: ``python -m vetter.grids.build ARCHIVES`` with ARCHIVES a folder of the packages."""

from __future__ import annotations

import argparse
import sys
from pathlib import Path

from .recipes import extinction
from .recipes.atmospheres import as_arrays, blue_corrected, build_atmospheres, extended
from .recipes.cool_correction import cool_corrected, without_kinks
from .recipes.dwarf_sequence import build_dwarf_sequence
from .recipes.metallicity import build_metallicity, build_solar
from .recipes.model_error import Photometer, build_model_error
from .recipes.passbands import build_passbands, read_curves
from .recipes.sources import Sources, file_sha256
from .recipes.standard_stars import build_standard_stars
from .recipes.white_dwarfs import build_white_dwarfs
from .recipes.write import write_json, write_npz

CHECKSUMS_BEGIN = "<!-- checksums: written by build.py -->"
CHECKSUMS_END = "<!-- end of checksums -->"


def build(archives: Path, out: Path) -> None:
    """Write every table into ``out`` (a folder that exists); same archives, same bytes.

    Raises FileNotFoundError or ValueError when an archive is absent or is not the one the tables were made from.
    """
    sources = Sources(archives)
    plain = blue_corrected(sources, build_atmospheres(sources))
    curves = read_curves(sources)
    arrays, entries = build_passbands(sources, curves, plain.wavelength_angstrom)
    write_npz(out / "passbands.npz", arrays)
    write_json(out / "passbands.json", entries)
    white_dwarfs = build_white_dwarfs(sources)
    write_npz(out / "white_dwarfs.npz", white_dwarfs)
    write_npz(out / "metallicity.npz", build_metallicity(sources))
    sequence = build_dwarf_sequence(sources)
    (out / "dwarf_sequence.csv").write_text(sequence, encoding="utf-8")
    extinction.main(out)
    table = extended(
        without_kinks(cool_corrected(plain, arrays["weights"], entries, sequence)),
        white_dwarfs,
        {entry["id"]: entry["pivot_angstrom"] for entry in entries},
    )
    write_npz(out / "atmospheres.npz", as_arrays(table))
    photometer = Photometer(
        table.wavelength_angstrom, table.teff_k, table.logg, table.ln_flux, arrays["weights"], entries
    )
    pivots = [entry["pivot_angstrom"] for entry in entries]
    write_json(out / "model_error.json", build_model_error(sources, photometer, curves, sequence, pivots))


def write_checksums(folder: Path) -> None:
    """Put the checksum of every table in ``folder`` into the README there, between its two markers."""
    readme = folder / "README.md"
    tables = sorted(path for path in folder.iterdir() if path.suffix in {".npz", ".json", ".csv"})
    rows = [f"| {path.name} | {file_sha256(path)} |" for path in tables]
    head, rest = readme.read_text(encoding="utf-8").split(CHECKSUMS_BEGIN)
    tail = rest.split(CHECKSUMS_END)[1]
    block = "\n".join([CHECKSUMS_BEGIN, "", "| file | SHA-256 |", "|---|---|", *rows, "", CHECKSUMS_END])
    readme.write_text(head + block + tail, encoding="utf-8")


def main() -> int:
    """Read the command line and build; return the exit code."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("archives", type=Path, help="folder with the package archives")
    parser.add_argument("--out", type=Path, default=Path(__file__).parent, help="where the tables go")
    parser.add_argument("--test-data", type=Path, help="also write the data of tests/outside into this folder")
    options = parser.parse_args()
    build(options.archives, options.out)
    if (options.out / "README.md").is_file():
        write_checksums(options.out)
    if options.test_data:
        sources = Sources(options.archives)
        write_npz(options.test_data / "standard_stars.npz", build_standard_stars(sources))
        write_npz(options.test_data / "gaia_grid.npz", build_solar(sources))
    return 0


if __name__ == "__main__":
    sys.exit(main())
