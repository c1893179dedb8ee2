"""What ``vetter grids --errors`` prints: the stored one-sigma errors of synthetic magnitudes."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

import numpy as np

from vetter.light import model_error
from vetter.light.metallicity import follows_metallicity
from vetter.light.tables import LightTables, load_tables

PRINTED_TEFF_K = (2500, 3000, 3500, 4000, 5000, 5500, 6000, 7000, 8000, 10000, 15000, 20000, 30000, 50000)
GIANT_LOGG, DWARF_LOGG = 2.0, 4.5


def errors_report(tables: LightTables | None = None) -> list[dict[str, Any]]:
    """Return one record per band, in order of pivot wavelength.

    Keys: id, pivot_nm, teff_k (the nodes), dwarf_mag and giant_mag (one sigma at each node, solar metallicity), and
    per_dex_mag (what each dex of [Fe/H] adds in quadrature, at each node; small where the light follows [Fe/H]).
    """
    tables = tables or load_tables()
    table, bands = tables.model_errors, tables.passbands
    records = []
    for band in sorted(bands.values(), key=lambda band: band.pivot_angstrom):
        known = tables.metallicity is not None and follows_metallicity(band.pivot_angstrom)
        dwarf, giant = (
            model_error.model_error_mag(table, band, bands, table.teff_k, np.full_like(table.teff_k, logg), np.zeros(1))
            for logg in (DWARF_LOGG, GIANT_LOGG)
        )
        one_dex = np.ones_like(table.teff_k)
        per_dex = model_error.metallicity_error_mag(band.pivot_angstrom, table.teff_k, one_dex, known)
        records.append(
            {
                "id": band.id,
                "pivot_nm": band.pivot_angstrom / 10.0,
                "teff_k": table.teff_k.tolist(),
                "dwarf_mag": dwarf.tolist(),
                "giant_mag": giant.tolist(),
                "per_dex_mag": per_dex.tolist(),
            }
        )
    return records


def render_errors(records: Sequence[Mapping[str, Any]]) -> str:
    """Return :func:`errors_report`'s records as a table in millimagnitudes: dwarfs, then the metallicity term."""
    head = "".join(f"{teff / 1000:>6.4g}" for teff in PRINTED_TEFF_K)
    lines = [
        "one-sigma error of a synthetic magnitude (0.001 mag), solar dwarfs; what a dex of [Fe/H] adds at 6000 K",
        f"{'band    Teff (1000 K)':<24}{head}{'per dex':>9}",
    ]
    for record in records:
        at = np.interp(np.log(PRINTED_TEFF_K), np.log(record["teff_k"]), record["dwarf_mag"])
        per_dex = np.interp(np.log(6000.0), np.log(record["teff_k"]), record["per_dex_mag"])
        cells = "".join(f"{1000 * value:6.0f}" for value in at)
        lines.append(f"{record['id']:<24}{cells}{1000 * per_dex:9.0f}")
    giants = [max(record["giant_mag"]) for record in records]
    lines.append(f"giants (log g below 3): at least 150 below 4200 K, at most {1000 * max(giants):.0f}; all in --json")
    return "\n".join(lines) + "\n"
