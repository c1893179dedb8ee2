"""White-dwarf magnitudes of one solar radius from the published cooling tables."""

from __future__ import annotations

import numpy as np

from .sources import Sources

GRAVITY_SUN_CGS = 27423.2  # G Msun / Rsun^2 with the nominal solar values of IAU 2015 resolution B3
_FILE = "WDPhotTools/wd_photometry/Table_{}_13012021.txt"
# Position of each band among the numbers of a row; between lie MKO YJHK and the Gaia DR2 bands, which are left out.
_COLUMNS = {
    "Generic/Johnson.U": 5,
    "Generic/Johnson.B": 6,
    "Generic/Johnson.V": 7,
    "Generic/Cousins.R": 8,
    "Generic/Cousins.I": 9,
    "2MASS/2MASS.J": 10,
    "2MASS/2MASS.H": 11,
    "2MASS/2MASS.Ks": 12,
    "WISE/WISE.W1": 17,
    "WISE/WISE.W2": 18,
    "WISE/WISE.W3": 19,
    "WISE/WISE.W4": 20,
    "Spitzer/IRAC.I1": 21,
    "Spitzer/IRAC.I2": 22,
    "SLOAN/SDSS.u": 25,
    "SLOAN/SDSS.g": 26,
    "SLOAN/SDSS.r": 27,
    "SLOAN/SDSS.i": 28,
    "SLOAN/SDSS.z": 29,
    "PAN-STARRS/PS1.g": 30,
    "PAN-STARRS/PS1.r": 31,
    "PAN-STARRS/PS1.i": 32,
    "PAN-STARRS/PS1.z": 33,
    "PAN-STARRS/PS1.y": 34,
    "GAIA/GAIA3.G": 38,
    "GAIA/GAIA3.Gbp": 39,
    "GAIA/GAIA3.Grp": 40,
    "GALEX/GALEX.FUV": 41,
    "GALEX/GALEX.NUV": 42,
}
_MISSING_ABOVE_MAG = 99.0
# The tables' U is 0.09 mag brighter, relative to their other bands, than GD 71, GD 153, G191-B2B and WD1657+343 through
# our U, which itself gives Landolt's U of G191-B2B and GD 71 within 0.025: another passband, a constant is enough.
OFFSETS_MAG = {"Generic/Johnson.U": 0.09}


def read_table(sources: Sources, composition: str) -> np.ndarray:
    """Return all numbers of one table, (rows, 44); ``composition`` is "DA" (hydrogen) or "DB" (helium)."""
    lines = sources.text("wdphottools", _FILE.format(composition)).splitlines()
    return np.array([[float(word) for word in line.split()] for line in lines[2:] if line.strip()])


def build_white_dwarfs(sources: Sources) -> dict[str, np.ndarray]:
    """Return the arrays of white_dwarfs.npz.

    Source: Bedard, Bergeron, Brassard & Fontaine 2020, ApJ 901, 93 and the references there.
    """
    arrays: dict[str, np.ndarray] = {}
    for composition in ("DA", "DB"):
        rows = read_table(sources, composition)
        teff, logg = np.unique(rows[:, 0]), np.unique(rows[:, 1])
        magnitude = np.full((teff.size, logg.size, len(_COLUMNS)), np.nan)
        radius_rsun = np.sqrt(rows[:, 2] * GRAVITY_SUN_CGS / 10 ** rows[:, 1])
        found = rows[:, list(_COLUMNS.values())]
        found = np.where(np.abs(found) < _MISSING_ABOVE_MAG, found, np.nan) + 5 * np.log10(radius_rsun)[:, None]
        found += [OFFSETS_MAG.get(band, 0.0) for band in _COLUMNS]
        magnitude[np.searchsorted(teff, rows[:, 0]), np.searchsorted(logg, rows[:, 1])] = found
        key = composition.lower()
        arrays |= {
            f"{key}_teff_k": teff,
            f"{key}_logg": logg,
            f"{key}_bands": np.array(list(_COLUMNS)),
            f"{key}_surface_mag": magnitude,
        }
    return arrays
