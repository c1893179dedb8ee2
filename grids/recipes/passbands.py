"""Passbands as photon counters: reading, quadrature weights on the atmospheres' nodes, zero points."""

from __future__ import annotations

import io
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from .band_list import BANDS, Band
from .sources import ARCHIVES, Sources, fits_columns
from .spectra import Array
from .write import rounded

LIGHT_SPEED_ANGSTROM_S = 2.99792458e18
AB_ZERO_JY = 3631.0
GAIA_VEGA_550NM = 3.62286e-9  # erg s-1 cm-2 A-1 at 550 nm: Gaia DR3 ties its Vega system to this
_VEGA = {
    "stis": ("sedpy", "sedpy/data/alpha_lyr_stis_011.fits"),
    "gaia": ("pyphot", "pyphot/libs/alpha_lyr_mod_002.fits"),
}


@dataclass(frozen=True)
class Curve:
    """A photon-counting response: wavelength in angstrom, ascending, and throughput in any one unit."""

    wavelength: Array
    throughput: Array

    @property
    def pivot_angstrom(self) -> float:
        """Pivot wavelength, sqrt(int R lambda / int R/lambda)."""
        top = np.trapezoid(self.throughput * self.wavelength, self.wavelength)
        return float(np.sqrt(top / np.trapezoid(self.throughput / self.wavelength, self.wavelength)))

    @property
    def width_angstrom(self) -> float:
        """Width of the box of the same area and peak."""
        return float(np.trapezoid(self.throughput, self.wavelength) / self.throughput.max())


def _two_columns(text: str) -> np.ndarray:
    """Return the first two numbers of every line that starts with two numbers."""
    rows = []
    for line in text.splitlines():
        words = line.split()
        if words and words[0] == "KFILTER":
            words = words[1:]
        try:
            rows.append([float(words[0]), float(words[1])])
        except (ValueError, IndexError):
            continue
    return np.array(rows)


def _ecsv_columns(data: bytes) -> np.ndarray:
    from astropy import units
    from astropy.table import QTable

    table = QTable.read(io.BytesIO(data), format="ascii.ecsv")
    wavelength = units.Quantity(table["wavelength"], copy=False)
    return np.column_stack([wavelength.to_value(units.angstrom), np.asarray(table["response"], dtype=np.float64)])


def _hdf5_columns(data: bytes, dataset: str) -> np.ndarray:
    import h5py

    with h5py.File(io.BytesIO(data)) as store:
        rows = store[f"filters/{dataset}"][:]
    return np.column_stack([rows["WAVELENGTH"], rows["THROUGHPUT"]]).astype(np.float64)


def tidy(rows: np.ndarray) -> Curve:
    """Sort, clip negative throughputs, drop stray outliers of wavelength and all but one of the zeros at the ends."""
    rows = rows[np.argsort(rows[:, 0], kind="stable")]
    rows = rows[np.concatenate([[True], np.diff(rows[:, 0]) > 0])]
    wavelength, throughput = rows[:, 0], np.clip(rows[:, 1], 0.0, None)
    live = np.flatnonzero(throughput > 0)
    first, last = max(live[0] - 1, 0), min(live[-1] + 1, wavelength.size - 1)
    return Curve(wavelength[first : last + 1], throughput[first : last + 1])


def read_curve(sources: Sources, band: Band) -> Curve:
    """Return the response of one band.

    The Tycho B file has a stray row at 500 A, which would stretch the blue wing across the ultraviolet: it is dropped.
    """
    data = sources.read(band.package, band.member)
    if band.dataset:
        rows = _hdf5_columns(data, band.dataset)
    elif band.member.endswith(".ecsv"):
        rows = _ecsv_columns(data)
    else:
        rows = _two_columns(data.decode("utf-8", errors="replace"))
    if band.id == "TYCHO/TYCHO.B":
        rows = np.vstack([[[3500.0, 0.0]], rows[rows[:, 0] > 3000.0]])
    return tidy(rows)


def hat_weights(curve: Curve, nodes: Array) -> Array:
    """Return w (nw,) such that w @ f is the photon-weighted mean of a flux given on the nodes and linear between.

    The integrals are trapezoids on the union of the nodes and the curve's own wavelengths, as synphot takes them.
    """
    lo, hi = curve.wavelength[0], curve.wavelength[-1]
    union = np.union1d(nodes[(nodes > lo) & (nodes < hi)], curve.wavelength)
    step = np.diff(union)
    quadrature = np.zeros(union.size)
    quadrature[:-1] += 0.5 * step
    quadrature[1:] += 0.5 * step
    mass = quadrature * np.interp(union, curve.wavelength, curve.throughput) * union
    left = np.clip(np.searchsorted(nodes, union, side="right") - 1, 0, nodes.size - 2)
    share = (union - nodes[left]) / (nodes[left + 1] - nodes[left])
    weights = np.zeros(nodes.size)
    np.add.at(weights, left, mass * (1 - share))
    np.add.at(weights, left + 1, mass * share)
    return np.asarray(weights / mass.sum())


def mean_flux(curve: Curve, wavelength: Array, flux: Array) -> float:
    """Return int f R lambda / int R lambda of a spectrum on its own wavelengths (ascending)."""
    return float(hat_weights(curve, wavelength) @ flux)


def vega_spectra(sources: Sources) -> dict[str, tuple[Array, Array]]:
    """Return the two spectra of Vega: the calibrated one ("stis") and the one of Gaia's system ("gaia")."""
    spectra = {}
    for name, (package, member) in _VEGA.items():
        wavelength, flux = fits_columns(sources.read(package, member), "WAVELENGTH", "FLUX")
        if name == "gaia":
            flux = flux * (GAIA_VEGA_550NM / np.interp(5500.0, wavelength, flux))
        spectra[name] = (wavelength, flux)
    return spectra


def zero_fluxes(band: Band, curve: Curve, vega: Mapping[str, tuple[Array, Array]]) -> tuple[float, float]:
    """Return the mean fluxes (erg s-1 cm-2 A-1) of magnitude zero in the band's Vega and AB systems."""
    in_vega = mean_flux(curve, *vega[band.vega]) * 10 ** (0.4 * band.vega_mag)
    in_ab = AB_ZERO_JY * 1e-23 * LIGHT_SPEED_ANGSTROM_S / curve.pivot_angstrom**2 * 10 ** (0.4 * band.ab_offset_mag)
    return in_vega, in_ab


def read_curves(sources: Sources) -> list[Curve]:
    """Return the response curves of all bands, in the order of the band list."""
    return [read_curve(sources, band) for band in BANDS]


def build_passbands(
    sources: Sources, curves: Sequence[Curve], nodes: Array
) -> tuple[dict[str, np.ndarray], list[dict[str, Any]]]:
    """Return the arrays of passbands.npz and the entries of passbands.json, in the order of the band list."""
    vega = vega_spectra(sources)
    arrays: dict[str, np.ndarray] = {"weights": np.array([hat_weights(curve, nodes) for curve in curves])}
    entries = []
    for index, (band, curve) in enumerate(zip(BANDS, curves, strict=True)):
        arrays[f"wavelength_{index}"] = curve.wavelength
        arrays[f"throughput_{index}"] = curve.throughput
        in_vega, in_ab = zero_fluxes(band, curve, vega)
        archive = ARCHIVES[band.package]
        path = f"{band.member}:{band.dataset}" if band.dataset else band.member
        entries.append(
            {
                "id": band.id,
                "synonyms": list(band.synonyms),
                "usual_system": band.usual_system,
                "pivot_angstrom": rounded(curve.pivot_angstrom),
                "width_angstrom": rounded(curve.width_angstrom),
                "zero_flux_vega": rounded(in_vega),
                "zero_flux_ab": rounded(in_ab),
                "source": {"package": archive.package, "version": archive.version, "path": path},
                "reference": band.reference,
            }
        )
    return arrays, entries
