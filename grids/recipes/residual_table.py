"""Our colours against the mean dwarf sequence: ``python -m vetter.grids.recipes.residual_table`` prints the table.

For every row of the sequence (Pecaut & Mamajek 2013, version 2022.04.16) the colours of a star of its Teff and gravity
are compared with the published ones, relative to Ks below 7500 K and to V above; a constant per band, the median from
5200 to 10000 K, is taken out (zero points). A cell holds the largest difference of its bands and temperatures. The Gaia
column stands apart because the sequence's Gaia colours are of DR2.
"""

from __future__ import annotations

import json
import sys
from collections.abc import Mapping
from importlib.resources import files
from itertools import pairwise

import numpy as np

from .model_error import Photometer
from .sequence import CHAINS, chain_minus, sequence_stars
from .spectra import Array

CLASSES: Mapping[str, tuple[str, ...]] = {
    "U": ("Generic/Johnson.U",),
    "optical": (
        "Generic/Johnson.B", "Generic/Johnson.V", "Generic/Cousins.R", "Generic/Cousins.I",
    ),
    "Gaia": ("GAIA/GAIA3.G", "GAIA/GAIA3.Gbp", "GAIA/GAIA3.Grp"),
    "near-infrared": ("2MASS/2MASS.J", "2MASS/2MASS.H", "2MASS/2MASS.Ks"),
    "W1 W2": ("WISE/WISE.W1", "WISE/WISE.W2"),
}  # fmt: skip
EDGES_K = (2600.0, 2700.0, 3300.0, 4500.0, 7500.0, 15000.0, 31000.0)
OFFSET_RANGE_K = (5200.0, 10000.0)
COOL_REFERENCE, HOT_REFERENCE, HOT_FROM_K = "2MASS/2MASS.Ks", "Generic/Johnson.V", 7500.0


def shipped_photometer() -> Photometer:
    """Return the synthetic magnitudes of the shipped tables."""
    folder = files("vetter.grids")
    with (folder / "atmospheres.npz").open("rb") as stream, np.load(stream, allow_pickle=False) as table:
        arrays = [table[key].astype(np.float64) for key in ("wavelength_angstrom", "teff_k", "logg", "ln_flux")]
    with (folder / "passbands.npz").open("rb") as stream, np.load(stream, allow_pickle=False) as table:
        weights = table["weights"]
    return Photometer(*arrays, weights, json.loads((folder / "passbands.json").read_text(encoding="utf-8")))


def colour_residuals(photometer: Photometer, csv_text: str, reference: str) -> tuple[Array, Array]:
    """Return temperatures (n,) of the rows and residuals (n, n_bands) of band minus ``reference``; NaN where absent."""
    stars = [star for star in sequence_stars(csv_text, EDGES_K[0], EDGES_K[-1]) if np.isfinite(star["logg"])]
    teff = np.array([star["teff_k"] for star in stars])
    found = np.full((teff.size, len(photometer.ids)), np.nan)
    for i, star in enumerate(stars):
        magnitude = dict(zip(photometer.ids, photometer.absolute_mag(star["teff_k"], star["logg"], 1.0), strict=True))
        for band in CHAINS:
            published = chain_minus(star, band, reference)
            found[i, photometer.ids.index(band)] = magnitude[band] - magnitude[reference] - published
    known = np.isfinite(found).any(axis=0)
    middle = (teff > OFFSET_RANGE_K[0]) & (teff < OFFSET_RANGE_K[1])
    found[:, known] -= np.nanmedian(found[middle][:, known], axis=0)
    return teff, found


def residuals(photometer: Photometer, csv_text: str) -> tuple[Array, Array]:
    """Return temperatures (n,) and residuals (n, n_bands), each temperature relative to its own reference band."""
    teff, cool = colour_residuals(photometer, csv_text, COOL_REFERENCE)
    hot = colour_residuals(photometer, csv_text, HOT_REFERENCE)[1]
    return teff, np.where((teff < HOT_FROM_K)[:, None], cool, hot)


def cells(photometer: Photometer, csv_text: str) -> dict[str, list[float]]:
    """Return per class of bands the largest residual (mag) between neighbouring temperatures of ``EDGES_K``."""
    teff, found = residuals(photometer, csv_text)
    out = {}
    for name, bands in CLASSES.items():
        columns = [photometer.ids.index(band) for band in bands]
        out[name] = [
            float(np.nanmax(np.abs(found[(teff >= low) & (teff < high)][:, columns]), initial=0.0))
            for low, high in pairwise(EDGES_K)
        ]
    return out


def render(table: Mapping[str, list[float]]) -> str:
    """Return the cells as a Markdown table."""
    lines = ["| Teff (K) | " + " | ".join(table) + " |", "|---" * (len(table) + 1) + "|"]
    for i, (low, high) in enumerate(pairwise(EDGES_K)):
        lines.append(f"| {low:g}-{high:g} | " + " | ".join(f"{column[i]:.3f}" for column in table.values()) + " |")
    return "\n".join(lines)


def main() -> int:
    """Print the table; return the exit code."""
    sequence = (files("vetter.grids") / "dwarf_sequence.csv").read_text(encoding="utf-8")
    sys.stdout.write(render(cells(shipped_photometer(), sequence)) + "\n")
    return 0


if __name__ == "__main__":
    sys.exit(main())
