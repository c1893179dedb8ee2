"""From atmosphere spectra to a :class:`MagnitudeGrid`: integrate once per build, then never touch a spectrum again."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from vetter.light.magnitude_grid import MagnitudeGrid
from vetter.light.tables import Atmospheres, FloatArray

TEN_PARSEC_IN_SOLAR_RADII = 10.0 * 3.0856775814913673e16 / 6.957e8
SURFACE_TO_TEN_PC_MAG = float(5.0 * np.log10(TEN_PARSEC_IN_SOLAR_RADII))
"""Magnitudes between the surface and 10 pc for 1 nominal solar radius (IAU 2015 resolutions B2, B3)."""

MID_CELL_TOLERANCE_MAG = 0.0012
"""A cell is split when magnitudes interpolated across it miss the interpolated spectrum by more, half-way."""

MAX_SPLITS = 5

LEAST_LN_FLUX = -300.0
"""Fluxes below e^-300 (the far ultraviolet of the coolest stars) are raised to it: products then do not underflow."""


@dataclass(frozen=True, eq=False)
class Columns:
    """The columns of a magnitude grid, bands first, then windows.

    Attributes
    ----------
    weights : (k, nw) mean flux of column j = weights[j] @ f
    zero_flux : (k,) erg s-1 cm-2 A-1; 1 for windows
    pivot_angstrom : (k,) pivot wavelengths; the middle for windows
    dimming : (nw,) A(lambda)/A(V)
    """

    weights: FloatArray
    zero_flux: FloatArray
    pivot_angstrom: FloatArray
    dimming: FloatArray


def polynomial_degree(a_v_max_mag: float) -> int:
    """Return the degree in A_V that keeps the fit within 0.003 mag (optical, infrared) and 0.01 mag (ultraviolet)."""
    return int(np.clip(np.ceil(2.4 + 0.5 * a_v_max_mag), 3, 12))


class _Spectra:
    """The part of the atmosphere table that a set of columns looks at.

    Attributes
    ----------
    ln_teff, logg : (nt,), (ng,) the table's nodes
    ln_flux : (nt, ng, nw) ln F
    weights : (k, nw) divided by the zero points
    dimming : (nw,) A(lambda)/A(V)
    """

    def __init__(self, atmospheres: Atmospheres, columns: Columns) -> None:
        used = np.flatnonzero(columns.weights.any(axis=0))
        part = slice(used[0], used[-1] + 1)
        self.ln_teff = np.log(atmospheres.teff_k)
        self.logg = np.asarray(atmospheres.logg, dtype=float)
        self.ln_flux = np.maximum(atmospheres.ln_flux[:, :, part], LEAST_LN_FLUX)
        self.weights = columns.weights[:, part] / columns.zero_flux[:, None]
        self.dimming = columns.dimming[part]

    def part_of(self, column: int) -> slice:
        """Return the wavelengths that one column looks at."""
        used = np.flatnonzero(self.weights[column])
        return slice(used[0], used[-1] + 1)

    def dimmed_weights(self, a_v_mag: FloatArray, column: int, part: slice) -> FloatArray:
        """Return one column's weights (nw, n_av) with the dust folded in: an integral is then one product."""
        return (self.weights[column, part] * 10.0 ** (-0.4 * a_v_mag[:, None] * self.dimming[part])).T

    def column_magnitudes(self, column: int, ln_teff: FloatArray, logg: FloatArray, a_v_mag: FloatArray) -> FloatArray:
        """Return one column's magnitudes (m, ng, n_av) at any (m,) ``ln_teff`` and (ng,) ``logg`` inside the table."""
        part = self.part_of(column)
        ln_flux = _interpolate(self.ln_teff, self.ln_flux[:, :, part], ln_teff, axis=0)
        flux = np.exp(_interpolate(self.logg, ln_flux, logg, axis=1))
        return _magnitude(flux @ self.dimmed_weights(a_v_mag, column, part))


def _magnitude(mean_flux: FloatArray) -> FloatArray:
    """Return the magnitude at 10 pc of a star of 1 solar radius from its surface flux over the zero flux."""
    return np.asarray(-2.5 * np.log10(mean_flux) + SURFACE_TO_TEN_PC_MAG)


def _interpolate(nodes: FloatArray, table: FloatArray, wanted: FloatArray, axis: int) -> FloatArray:
    """Return ``table`` interpolated linearly along ``axis`` from ``nodes`` to ``wanted`` (inside the nodes)."""
    low = np.clip(np.searchsorted(nodes, wanted, side="right") - 1, 0, len(nodes) - 2)
    share = (wanted - nodes[low]) / (nodes[low + 1] - nodes[low])
    share = share.reshape([-1 if dimension == axis else 1 for dimension in range(table.ndim)])
    lower = table.take(low, axis=axis)
    return lower + (table.take(low + 1, axis=axis) - lower) * share


def _mid_cell_miss(flux: FloatArray, weights: FloatArray, table_mag: FloatArray, axis: int) -> FloatArray:
    """Return by how much interpolated magnitudes miss the interpolated spectrum half-way along ``axis``, mag.

    ``flux`` is (nt, ng, nw), ``table_mag`` its magnitudes (nt, ng, c); the result is one shorter along ``axis``.
    """
    low, high = (slice(None, -1), slice(1, None)) if axis == 0 else (np.s_[:, :-1], np.s_[:, 1:])
    middle = _magnitude(np.sqrt(flux[low] * flux[high]) @ weights)
    return np.abs(middle - (table_mag[low] + table_mag[high]) / 2.0)


def _splits(miss: FloatArray) -> NDArray[np.intp]:
    """Return how often each cell is to be halved: the miss falls fourfold each time."""
    halvings = np.ceil(np.log2(np.maximum(miss / MID_CELL_TOLERANCE_MAG, 1.0)) / 2.0)
    return np.minimum(halvings, MAX_SPLITS).astype(np.intp)


def _subdivide(nodes: FloatArray, splits: NDArray[np.intp]) -> FloatArray:
    """Return ``nodes`` with each cell cut into 2^splits equal parts."""
    parts = 2**splits
    cell = np.repeat(np.arange(len(splits)), parts)
    step = np.arange(len(cell)) - np.repeat(np.cumsum(parts) - parts, parts)
    return np.append(nodes[cell] + (nodes[cell + 1] - nodes[cell]) * (step / parts[cell]), nodes[-1])


def _union(node_lists: Sequence[FloatArray]) -> FloatArray:
    """Return the ascending union of node lists (``numpy.unique`` would import ``numpy.ma``, 30 ms)."""
    nodes = np.sort(np.concatenate(node_lists))
    return np.asarray(nodes[np.append(True, np.diff(nodes) > 0.0)])


def _refined_column(
    spectra: _Spectra, column: int, table_mag: FloatArray, miss: tuple[FloatArray, FloatArray], a_v_mag: FloatArray
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Return (ln_teff, logg, magnitudes (nt, ng, n_av)) of one column on the nodes that it needs.

    ``table_mag`` (nt, ng, n_av) holds its magnitudes on the table's nodes, ``miss`` its mid-cell misses along
    temperature (nt - 1, ng) and gravity (nt, ng - 1). Spectra are made only where something is missed.
    """
    ln_teff = _subdivide(spectra.ln_teff, _splits(miss[0].max(axis=1)))
    logg = _subdivide(spectra.logg, _splits(miss[1].max(axis=0)))
    on_table = np.zeros(len(ln_teff), dtype=bool)
    on_table[np.searchsorted(ln_teff, spectra.ln_teff)] = True
    coarse = np.empty((len(ln_teff), *table_mag.shape[1:]))
    coarse[on_table] = table_mag
    coarse[~on_table] = spectra.column_magnitudes(column, ln_teff[~on_table], spectra.logg, a_v_mag)
    magnitudes = _interpolate(spectra.logg, coarse, logg, axis=1)
    fine_row = miss[1].max(axis=1) > MID_CELL_TOLERANCE_MAG
    fine = np.interp(ln_teff, spectra.ln_teff, fine_row.astype(float)) > 0.0
    magnitudes[fine] = spectra.column_magnitudes(column, ln_teff[fine], logg, a_v_mag)
    return ln_teff, logg, magnitudes


def _refined_columns(spectra: _Spectra, a_v_mag: FloatArray) -> list[tuple[FloatArray, FloatArray, FloatArray]]:
    """Return (ln_teff, logg, magnitudes (nt, ng, n_av)) of every column, each on its own nodes.

    Interpolating magnitudes is not interpolating spectra; half-way between nodes the difference is largest. It is
    measured there without dust and with the most of it, and cells that miss too much are split. One column at a time:
    each looks at a small part of the spectra, and products this small stay on one thread, where those of all columns
    at once would wait for threads (seconds, on a busy machine).
    """
    flux = np.exp(spectra.ln_flux, dtype=float)
    refined = []
    for column in range(len(spectra.weights)):
        part = spectra.part_of(column)
        seen, weights = flux[:, :, part], spectra.dimmed_weights(a_v_mag, column, part)
        table_mag = _magnitude(seen @ weights)
        ends, ends_mag = weights[:, [0, -1]], table_mag[..., [0, -1]]
        along_teff, along_logg = (_mid_cell_miss(seen, ends, ends_mag, axis).max(axis=2) for axis in (0, 1))
        refined.append(_refined_column(spectra, column, table_mag, (along_teff, along_logg), a_v_mag))
    return refined


def magnitude_grid(atmospheres: Atmospheres, columns: Columns, a_v_max_mag: float) -> MagnitudeGrid:
    """Return the grid of surface magnitudes (10 pc, 1 solar radius) for A_V from 0 to ``a_v_max_mag`` (> 0).

    The polynomial in A_V passes through Chebyshev-Lobatto nodes, which include A_V = 0: without dust it is exact.
    """
    degree = polynomial_degree(a_v_max_mag)
    share = 0.5 - 0.5 * np.cos(np.pi * np.arange(degree + 1) / degree)
    to_coefficients = np.linalg.inv(np.vander(share, increasing=True)) / a_v_max_mag ** np.arange(degree + 1)[:, None]
    parts = _refined_columns(_Spectra(atmospheres, columns), share * a_v_max_mag)
    ln_teff = _union([nodes for nodes, _, _ in parts])
    logg = _union([nodes for _, nodes, _ in parts])
    coefficients = np.empty((len(ln_teff), len(logg), degree + 1, len(parts)))
    for column, (own_ln_teff, own_logg, magnitudes) in enumerate(parts):
        widened = _interpolate(own_logg, magnitudes @ to_coefficients.T, logg, axis=1)
        coefficients[..., column] = _interpolate(own_ln_teff, widened, ln_teff, axis=0)
    return MagnitudeGrid(ln_teff, logg, coefficients)
