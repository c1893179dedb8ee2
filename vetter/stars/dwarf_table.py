"""The mean dwarf sequence: luminosity, radius and temperature of ordinary dwarfs by mass.

Source: Pecaut & Mamajek 2013, ApJS 208, 9, table version 2022.04.16 (``dwarf_sequence.csv`` of ``vetter.grids``).
Trusted below 0.8 Msun only: at A4-A9 its masses are not monotonic, and at B5-B8 its R, Teff and L disagree.
"""

from __future__ import annotations

import csv
from dataclasses import dataclass
from functools import cache
from importlib.resources import files
from importlib.resources.abc import Traversable

import numpy as np
from numpy.typing import ArrayLike, NDArray

FloatArray = NDArray[np.float64]

MASS_RANGE_MSUN = (0.077, 0.80)
"""Masses the relation is used for (L0 to about K2); outside, the nearer end is used."""

_COLUMNS = ("mass_msun", "log_luminosity_lsun", "radius_rsun", "teff_k")


@dataclass(frozen=True, eq=False)
class DwarfSequence:
    """Mean dwarfs in order of mass, all (n,): ln of mass, luminosity and radius in solar units."""

    ln_mass: FloatArray
    ln_luminosity: FloatArray
    ln_radius: FloatArray


def read_columns(folder: Traversable, names: tuple[str, ...]) -> dict[str, FloatArray]:
    """Return the named columns of ``dwarf_sequence.csv`` in ``folder``, hottest first, nan where a value is missing.

    Raises KeyError for a column that the file does not have.
    """
    with (folder / "dwarf_sequence.csv").open(encoding="utf-8") as stream:
        rows = list(csv.DictReader(stream))
    return {name: np.array([float(row[name] or "nan") for row in rows]) for name in names}


@cache
def dwarf_sequence() -> DwarfSequence:
    """Return the shipped sequence over 0.075-0.90 Msun, read on first use; L and R are kept, Teff follows from them."""
    columns = read_columns(files("vetter.grids"), _COLUMNS)
    mass = columns["mass_msun"]
    keep = (mass >= 0.07) & (mass <= 0.90) & np.isfinite(columns["log_luminosity_lsun"] + columns["radius_rsun"])
    order = np.argsort(mass[keep], kind="stable")
    ln_mass = np.log(mass[keep][order])
    if not np.all(np.diff(ln_mass) > 0.0):
        raise ValueError("dwarf_sequence.csv: masses below 0.9 Msun are not in strict order")
    columns_ln = (
        ln_mass,
        np.log(10.0) * columns["log_luminosity_lsun"][keep][order],
        np.log(columns["radius_rsun"][keep][order]),
    )
    for column in columns_ln:
        column.setflags(write=False)
    return DwarfSequence(*columns_ln)


def mean_dwarf(ln_mass: ArrayLike) -> tuple[FloatArray, FloatArray]:
    """Return ln L and ln R (solar) of mean dwarfs of solar metallicity, linear between the rows in ln mass."""
    table = dwarf_sequence()
    x = np.asarray(ln_mass, dtype=float)
    return (
        np.asarray(np.interp(x, table.ln_mass, table.ln_luminosity)),
        np.asarray(np.interp(x, table.ln_mass, table.ln_radius)),
    )
