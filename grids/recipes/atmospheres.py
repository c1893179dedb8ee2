"""The surface-flux table: observed cool stars, Kurucz 1993 from 4250 to 50000 K, scaled beyond."""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import dataclass, replace

import numpy as np

from . import blue_correction, hot_stars
from .cool_stars import dwarf_spectra, giant_spectra
from .sources import Sources, fits_columns
from .spectra import Array

LOGG = np.arange(0.0, 5.01, 0.5)
COOL_TEFF_K = np.array(
    [2000, 2200, 2400, 2600, 2700, 2800, 2950, 3100, 3200, 3300, 3400, 3500, 3580, 3700, 3800, 3900, 4000, 4125.0]
)
NATIVE_END_ANGSTROM = 20000.0
END_ANGSTROM = 320000.0
RESOLUTION = 120.0
FLOOR_FLUX = 1e-30  # erg s-1 cm-2 A-1: stands for the zeros of the published tables, whose logarithm is wanted
BLEND_K = (3900.0, 4250.0)
DWARF_ABOVE_LOGG = 4.0
GIANT_BELOW_LOGG = 2.5


@dataclass(frozen=True)
class Atmospheres:
    """The surface-flux table.

    Attributes
    ----------
    wavelength_angstrom : (nw,) ascending
    teff_k : (nt,) ascending
    logg : (11,) cgs, 0 to 5
    ln_flux : (nt, 11, nw) natural logarithm of the surface flux in erg s-1 cm-2 A-1 (pi I convention)
    filled : (nt, 11) True where no published spectrum exists and a neighbour stands in
    """

    wavelength_angstrom: Array
    teff_k: Array
    logg: Array
    ln_flux: Array
    filled: np.ndarray


def wavelength_nodes(native: Array) -> Array:
    """Return the published nodes up to 2 micron and a logarithmic grid of resolving power 120 up to 32 micron."""
    below = native[native <= NATIVE_END_ANGSTROM]
    count = int(np.ceil(np.log(END_ANGSTROM / below[-1]) * RESOLUTION))
    above = np.exp(np.linspace(np.log(below[-1]), np.log(END_ANGSTROM), count + 1))[1:]
    return np.concatenate([below, above])


def read_kurucz(sources: Sources) -> tuple[Array, Array, Array]:
    """Return native wavelengths (1221,), Teff (61,) and surface fluxes (61, 11, 1221); absent models are NaN.

    Source: Kurucz 1993, CD-ROM 13, solar metallicity, microturbulence 2 km/s.
    """
    files: Mapping[int, bytes] = {
        int(match[1]): data
        for name, data in sources.standards().items()
        if (match := re.fullmatch(r"kurucz93/kp00/kp00_(\d+)\.fits", name))
    }
    names = [f"g{round(10 * g):02d}" for g in LOGG]
    fluxes = []
    for teff in sorted(files):
        wavelength, *columns = fits_columns(files[teff], "WAVELENGTH", *names)
        cube = np.array(columns)
        fluxes.append(np.where(cube.max(axis=1, keepdims=True) > 0, cube, np.nan))
    return wavelength, np.array(sorted(files), dtype=np.float64), np.array(fluxes)


def onto_nodes(native: Array, flux: Array, nodes: Array) -> Array:
    """Interpolate ln(F lambda^4) in ln lambda onto the nodes; at the published nodes the values are kept.

    The published far-infrared nodes are so sparse that interpolating F itself costs 0.3-0.5 mag at 12-22 micron.
    """
    smooth = np.log(np.maximum(flux, FLOOR_FLUX) * native**4)
    moved = np.interp(np.log(nodes), np.log(native), smooth)
    return np.asarray(moved - 4 * np.log(nodes))


def fill_gravities(cube: Array) -> tuple[Array, np.ndarray]:
    """Replace absent models of each temperature by the nearest gravity; return the cube and where that was done."""
    out, filled = cube.copy(), np.isnan(cube[..., 0])
    for row, missing in zip(out, filled, strict=True):
        present = np.flatnonzero(~missing)
        for index in np.flatnonzero(missing):
            row[index] = row[present[np.argmin(np.abs(present - index))]]
    return out, filled


def between_temperatures(teff_k: Array, cube: Array, wanted_k: float) -> Array:
    """Interpolate a (nt, ...) table of ln F linearly in log Teff at one temperature."""
    right = int(np.clip(np.searchsorted(teff_k, wanted_k), 1, teff_k.size - 1))
    lo, hi = np.log(teff_k[right - 1]), np.log(teff_k[right])
    weight = (np.log(wanted_k) - lo) / (hi - lo)
    return np.asarray((1 - weight) * cube[right - 1] + weight * cube[right])


def cool_block(sources: Sources, nodes: Array, kurucz_teff: Array, kurucz: Array) -> tuple[Array, np.ndarray]:
    """Return ln F (n_cool, 11, nw) at ``COOL_TEFF_K`` and where a neighbour stands in."""
    dwarfs = dwarf_spectra(sources, nodes, COOL_TEFF_K)
    giants = giant_spectra(sources, nodes, COOL_TEFF_K)
    share = np.clip((LOGG - GIANT_BELOW_LOGG) / (DWARF_ABOVE_LOGG - GIANT_BELOW_LOGG), 0.0, 1.0)
    block = (1 - share)[:, None] * giants.ln_flux[:, None] + share[:, None] * dwarfs.ln_flux[:, None]
    for index, teff in enumerate(COOL_TEFF_K):
        weight = (teff - BLEND_K[0]) / (BLEND_K[1] - BLEND_K[0])
        if weight > 0:
            block[index] = (1 - weight) * block[index] + weight * between_temperatures(kurucz_teff, kurucz, teff)
    empty = np.where(share[None, :] < 0.5, giants.extrapolated[:, None], dwarfs.extrapolated[:, None])
    empty = empty | ((share > 0) & (share < 1))[None, :]
    return block, empty


def build_atmospheres(sources: Sources) -> Atmospheres:
    """Return the whole surface-flux table."""
    native, teff, flux = read_kurucz(sources)
    nodes = wavelength_nodes(native)
    filled_flux, filled = fill_gravities(flux)
    kurucz = np.array([[onto_nodes(native, spectrum, nodes) for spectrum in row] for row in filled_flux])
    cool, cool_filled = cool_block(sources, nodes, teff, kurucz)
    hot = teff >= BLEND_K[1]
    return Atmospheres(
        wavelength_angstrom=nodes,
        teff_k=np.concatenate([COOL_TEFF_K, teff[hot]]),
        logg=LOGG,
        ln_flux=np.concatenate([cool, kurucz[hot]]),
        filled=np.concatenate([cool_filled, filled[hot]]),
    )


def blue_corrected(sources: Sources, table: Atmospheres) -> Atmospheres:
    """Return the table with the blue correction that was measured on solar-type standard stars."""
    nodes = table.wavelength_angstrom
    blue = blue_correction.corrected(sources, nodes, table.teff_k, table.logg, table.ln_flux)
    return replace(table, ln_flux=blue)


def extended(table: Atmospheres, white_dwarfs: Mapping[str, np.ndarray], pivots: Mapping[str, float]) -> Atmospheres:
    """Return the table with the surfaces hotter than 50000 K appended; all of them are marked as filled."""
    steps = hot_stars.ratio_mag(white_dwarfs, pivots, table.wavelength_angstrom)
    block = hot_stars.hot_block(table.wavelength_angstrom, table.ln_flux[-1], steps)
    return replace(
        table,
        teff_k=np.concatenate([table.teff_k, hot_stars.HOT_TEFF_K]),
        ln_flux=np.concatenate([table.ln_flux, block]),
        filled=np.concatenate([table.filled, np.ones(block.shape[:2], dtype=bool)]),
    )


def as_arrays(table: Atmospheres) -> dict[str, np.ndarray]:
    """Return the arrays that are stored; the flux as float32 (rounding below 1e-5 mag)."""
    return {
        "wavelength_angstrom": table.wavelength_angstrom,
        "teff_k": table.teff_k,
        "logg": table.logg,
        "ln_flux": table.ln_flux.astype(np.float32),
        "filled": table.filled,
    }
