"""What metallicity does to the light: published differences from solar in G, BP and RP, and between them.

Linear between the nodes of (log Teff, log g, [Fe/H]), held at the ends, exactly zero at solar metallicity. A column
between 4700 and 10000 A takes the difference interpolated in ln wavelength: to correct G and not V would set G-V of a
star at [Fe/H] -1.7 wrong by 0.11 mag (BD+17 4708). Bluer and infrared columns keep the solar light and a larger error.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from vetter.light.magnitude_grid import CHUNK, MagnitudeGrid, bracket
from vetter.light.tables import FloatArray, MetallicityTable, Passband

FOLLOWED_ANGSTROM = (4700.0, 10000.0)
"""Pivot wavelengths between which a column follows [Fe/H]."""


def follows_metallicity(pivot_angstrom: float) -> bool:
    """Return whether a band or window with this pivot wavelength is corrected for [Fe/H]."""
    return FOLLOWED_ANGSTROM[0] <= pivot_angstrom <= FOLLOWED_ANGSTROM[1]


@dataclass(frozen=True, eq=False)
class MetallicityCorrection:
    """Differences from solar for some columns of an engine.

    Attributes
    ----------
    columns : (k,) which columns of the magnitudes are corrected
    ln_teff, logg, feh : the nodes, ascending
    rows : (nt ng (nf - 1), 2 k) per cell of [Fe/H] the value at its lower node and the step to the upper one, mag
    """

    columns: NDArray[np.intp]
    ln_teff: FloatArray
    logg: FloatArray
    feh: FloatArray
    rows: FloatArray

    @classmethod
    def of(
        cls,
        table: MetallicityTable,
        names: Sequence[object],
        pivots_angstrom: Sequence[float],
        passbands: Mapping[str, Passband],
    ) -> MetallicityCorrection | None:
        """Return the correction of an engine's columns (``names`` and pivot wavelengths, same order), if any."""
        columns = [column for column, pivot in enumerate(pivots_angstrom) if follows_metallicity(pivot)]
        if not columns:
            return None
        order = sorted(range(len(table.bands)), key=lambda place: passbands[table.bands[place]].pivot_angstrom)
        ln_pivots = np.log([passbands[table.bands[place]].pivot_angstrom for place in order])
        shares = np.zeros((len(table.bands), len(columns)))
        for k, column in enumerate(columns):
            if names[column] in table.bands:
                shares[table.bands.index(str(names[column])), k] = 1.0
            else:
                wanted = np.log(pivots_angstrom[column])
                shares[order, k] = [np.interp(wanted, ln_pivots, unit) for unit in np.eye(len(order))]
        value = table.difference_mag.astype(float) @ shares
        cells = np.concatenate([value[:, :, :-1], np.diff(value, axis=2)], axis=-1)
        rows = np.ascontiguousarray(cells.reshape(-1, 2 * len(columns)))
        return cls(np.array(columns), np.log(table.teff_k), table.logg, table.feh, rows)

    def add_to(self, magnitudes: FloatArray, teff_k: FloatArray, logg: FloatArray, feh: FloatArray) -> None:
        """Add the correction in place to ``magnitudes`` (n, n_columns) of stars given by three (n,) arrays."""
        for start in range(0, len(teff_k), CHUNK):
            part = slice(start, start + CHUNK)
            magnitudes[part, self.columns] += self.difference_mag(teff_k[part], logg[part], feh[part])

    def difference_mag(self, teff_k: FloatArray, logg: FloatArray, feh: FloatArray) -> FloatArray:
        """Return (n, k) magnitude minus that of a solar star of the same Teff, log g and radius."""
        t_low, t_share = bracket(self.ln_teff, np.log(teff_k))
        g_low, g_share = bracket(self.logg, logg)
        f_low, f_share = bracket(self.feh, feh)
        n_feh = len(self.feh) - 1
        n_logg = len(self.logg)
        corner = (t_low * n_logg + g_low) * n_feh + f_low
        mean = (1.0 - t_share) * (1.0 - g_share) * self.rows.take(corner, axis=0)
        for offset, share in (
            (n_feh, (1.0 - t_share) * g_share),
            (n_logg * n_feh, t_share * (1.0 - g_share)),
            ((n_logg + 1) * n_feh, t_share * g_share),
        ):
            mean += share * self.rows.take(corner + offset, axis=0)
        k = len(self.columns)
        return np.asarray(mean[:, :k] + f_share * mean[:, k:])


@dataclass(frozen=True, eq=False)
class StarGrid:
    """Magnitude grids of stars along [Fe/H]; the shipped atmospheres are one solar slice.

    Attributes
    ----------
    feh : (nf,) ascending, dex
    slices : one grid of magnitudes per [Fe/H]
    correction : differences from solar, added to a single solar slice; None where there is nothing to add
    beyond : the grid that stands in where this one does not reach; None where the nearest edge does
    """

    feh: FloatArray
    slices: tuple[MagnitudeGrid, ...]
    correction: MetallicityCorrection | None = None
    beyond: StarGrid | None = None

    def reaches(self, teff_k: FloatArray, logg: FloatArray) -> NDArray[np.bool_]:
        """Return (n,) True inside the grid; gravities above 5 count as 5, for no light depends on them."""
        grid, ln_teff = self.slices[0], np.log(teff_k)
        warm = (ln_teff >= grid.ln_teff[0]) & (ln_teff <= grid.ln_teff[-1])
        return np.asarray(warm & (logg >= grid.logg[0]) & (np.minimum(logg, 5.0) <= grid.logg[-1]))

    def evaluate(self, teff_k: FloatArray, logg: FloatArray, feh: FloatArray, a_v_mag: FloatArray) -> FloatArray:
        """Return magnitudes (n, k) from four (n,) arrays; where no grid reaches the nearest edge stands in."""
        magnitudes = self._evaluate(teff_k, logg, feh, a_v_mag)
        if self.beyond is not None:
            out = ~self.reaches(teff_k, logg)
            magnitudes[out] = self.beyond.evaluate(teff_k[out], logg[out], feh[out], a_v_mag[out])
        return magnitudes

    def _evaluate(self, teff_k: FloatArray, logg: FloatArray, feh: FloatArray, a_v_mag: FloatArray) -> FloatArray:
        if len(self.slices) == 1:
            magnitudes = self.slices[0].evaluate(teff_k, logg, a_v_mag)
            if self.correction is not None and feh.any():
                self.correction.add_to(magnitudes, teff_k, logg, feh)
            return magnitudes
        low, share = bracket(self.feh, feh)
        magnitudes = np.empty((len(teff_k), self.slices[0].coefficients.shape[3]))
        for cell in range(len(self.slices) - 1):
            here = np.flatnonzero(low == cell)
            poor, rich = (
                grid.evaluate(teff_k[here], logg[here], a_v_mag[here]) for grid in self.slices[cell : cell + 2]
            )
            magnitudes[here] = poor + share[here] * (rich - poor)
        return magnitudes
