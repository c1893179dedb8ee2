"""Surfaces hotter than the published atmospheres: the 50000 K model times the ratio of the white-dwarf magnitudes.

A Planck ratio is 0.2-0.3 mag too bright in V at 80-100 kK; real hot atmospheres put the extra flux into the extreme
ultraviolet, which here takes what is left of sigma Teff^4. The ratio is the mean of the hydrogen and helium tables at
log g 7, their lowest; the two differ by 0.05 mag at 75 kK, 0.02 at 100 kK and 0.25 at 150 kK.
"""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from .spectra import STEFAN_BOLTZMANN, Array, total_flux

HOT_TEFF_K = np.array([60000.0, 75000.0, 100000.0, 120000.0, 150000.0])
BASE_TEFF_K = 50000.0
LYMAN_ANGSTROM = 912.0


def ratio_mag(white_dwarfs: Mapping[str, np.ndarray], pivots_angstrom: Mapping[str, float], nodes: Array) -> Array:
    """Return (n_hot, nw) magnitude differences from 50000 K at the nodes, linear in ln lambda between the bands."""
    bands = white_dwarfs["da_bands"].tolist()
    pivots = np.array([pivots_angstrom[band] for band in bands])
    order = np.argsort(pivots)
    rows = []
    for teff in HOT_TEFF_K:
        steps = []
        for kind in ("da", "db"):
            teffs, magnitudes = white_dwarfs[f"{kind}_teff_k"].tolist(), white_dwarfs[f"{kind}_surface_mag"]
            steps.append(magnitudes[teffs.index(teff), 0] - magnitudes[teffs.index(BASE_TEFF_K), 0])
        rows.append(np.interp(np.log(nodes), np.log(pivots[order]), np.mean(steps, axis=0)[order]))
    return np.array(rows)


def hot_block(nodes: Array, base_ln_flux: Array, steps_mag: Array) -> Array:
    """Return ln F (n_hot, ng, nw) from the 50000 K block (ng, nw); the flux below 912 A completes sigma Teff^4."""
    extreme = nodes < LYMAN_ANGSTROM
    out = base_ln_flux[None] - 0.4 * np.log(10) * steps_mag[:, None, :]
    for i, teff in enumerate(HOT_TEFF_K):
        for row in out[i]:
            flux = np.exp(row)
            seen = total_flux(nodes, np.where(extreme, 0.0, flux))
            unseen = total_flux(nodes, np.where(extreme, flux, 0.0))
            row[extreme] += np.log((STEFAN_BOLTZMANN * teff**4 - seen) / unseen)
    return np.asarray(out)
