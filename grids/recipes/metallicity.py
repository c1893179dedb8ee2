"""How metallicity changes the Gaia magnitudes of a surface, from the grid that the package dustapprox carries.

The grid holds G, BP and RP of the models of Castelli & Kurucz 2003, IAU Symp. 210, A20, 3500-50000 K, nine
metallicities from -4 to +0.5. Only differences from solar are kept, so its zero points and its dust do not matter. Most
models stand there twice, with alpha elements as in the Sun and enhanced by 0.4 dex, without a mark to tell which: the
mean is taken. Above 4500 K the two differ by less than 0.015 mag, at 4000 K by up to 0.09.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from .sources import Sources
from .spectra import Array

_FILE = "dustapprox/data/precomputed/grids/kurucz_gaiaedr3_small_a0_grid.csv"
_HEADER = "teff,logg,feh,passband,mag0,mag,A0,Ax"
_DUSTLESS = ",0.0,0.0"
BANDS = {"GAIA_GAIA3.G": "GAIA/GAIA3.G", "GAIA_GAIA3.Gbp": "GAIA/GAIA3.Gbp", "GAIA_GAIA3.Grp": "GAIA/GAIA3.Grp"}


def read_rows(lines: Sequence[str], ending: str = _DUSTLESS) -> tuple[Array, list[str]]:
    """Return (n, 6) Teff, log g, [Fe/H], magnitude, reddened magnitude and A0, and the band of each row.

    Only lines with this ``ending`` are read. Raises ValueError when the columns are not the ones expected.
    """
    if lines[0].strip() != _HEADER:
        raise ValueError(f"the metallicity grid has columns {lines[0]!r}, expected {_HEADER}")
    words = [line.split(",") for line in lines[1:] if line.endswith(ending)]
    return np.array([[float(row[i]) for i in (0, 1, 2, 4, 5, 6)] for row in words]), [BANDS[row[3]] for row in words]


def gridded(axes: Sequence[Array], rows: Array, value: Array, names: Sequence[str]) -> Array:
    """Return the mean ``value`` (n,) per cell of the axes (first columns of ``rows``) and band; NaN where absent."""
    place = [np.searchsorted(axis, rows[:, column]) for column, axis in enumerate(axes)]
    index = (*place, [list(BANDS.values()).index(name) for name in names])
    total, count = np.zeros((2, *(axis.size for axis in axes), len(BANDS)))
    np.add.at(total, index, value)
    np.add.at(count, index, 1.0)
    return np.where(count > 0, total / np.maximum(count, 1.0), np.nan)


def metallicity_arrays(lines: Sequence[str]) -> dict[str, np.ndarray]:
    """Return the arrays of metallicity.npz.

    ``difference_mag`` (nt, ng, nf, 3) is the magnitude at [Fe/H] minus that at solar, same Teff and log g; a gravity
    that is absent at some temperature takes the nearest that is there.
    """
    rows, names = read_rows(lines)
    axes = [np.unique(rows[:, column]) for column in range(3)]
    magnitude = gridded(axes, rows, rows[:, 3], names)
    solar = int(np.flatnonzero(axes[2] == 0.0)[0])
    difference = magnitude - magnitude[:, :, solar : solar + 1]
    for block in difference:
        known = np.flatnonzero(np.isfinite(block).all(axis=(1, 2)))
        block[:] = block[[known[np.argmin(np.abs(known - j))] for j in range(len(block))]]
    return {
        "teff_k": axes[0],
        "logg": axes[1],
        "feh": axes[2],
        "bands": np.array(list(BANDS.values())),
        "difference_mag": difference.astype(np.float32),
    }


def solar_arrays(lines: Sequence[str]) -> dict[str, np.ndarray]:
    """Return the solar slice for a check of our tables: teff_k, logg, a0_mag and mag (nt, ng, na, 3), no zero point.

    ``a0_mag`` is the grid's own measure of dust, 0, 1, 3 and 5.
    """
    rows, names = read_rows([lines[0], *(line for line in lines[1:] if ",0.0,GAIA" in line)], "")
    keep = (rows[:, 0] >= 4500.0) & (rows[:, 2] == 0.0) & np.isin(rows[:, 5], (0.0, 1.0, 3.0, 5.0))
    rows, names = rows[keep][:, [0, 1, 5, 4]], [name for name, kept in zip(names, keep, strict=True) if kept]
    axes = [np.unique(rows[:, column]) for column in range(3)]
    mag = gridded(axes, rows, rows[:, 3], names).astype(np.float32)
    return {"teff_k": axes[0], "logg": axes[1], "a0_mag": axes[2], "mag": mag}


def build_solar(sources: Sources) -> dict[str, np.ndarray]:
    """Return :func:`solar_arrays` from the archive."""
    return solar_arrays(sources.text("dustapprox", _FILE).splitlines())


def build_metallicity(sources: Sources) -> dict[str, np.ndarray]:
    """Return the arrays of metallicity.npz from the archive."""
    return metallicity_arrays(sources.text("dustapprox", _FILE).splitlines())
