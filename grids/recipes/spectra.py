"""Small numerical tools on spectra: Planck function, bin means on given nodes, total flux."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

Array = npt.NDArray[np.float64]

STEFAN_BOLTZMANN = 5.670374419e-5  # erg s-1 cm-2 K-4, CODATA 2018
_C1 = 3.741771852e27  # 2 pi h c^2 in erg s-1 cm-2 A^4 (per angstrom), CODATA 2018
_C2 = 1.438776877e8  # h c / k in angstrom K, CODATA 2018


def planck_flux(wavelength_angstrom: Array, teff_k: float) -> Array:
    """Return pi B_lambda in erg s-1 cm-2 A-1 at the given wavelengths (angstrom) and temperature (K)."""
    x = np.minimum(_C2 / (wavelength_angstrom * teff_k), 600.0)
    return np.asarray(_C1 / wavelength_angstrom**5 / np.expm1(x))


def total_flux(wavelength_angstrom: Array, flux: Array) -> float:
    """Return the integral of a spectrum over wavelength, trapezoid rule."""
    return float(np.trapezoid(flux, wavelength_angstrom))


def bin_means(wavelength: Array, flux: Array, nodes: Array) -> Array:
    """Average a spectrum over the bins between the midpoints of the nodes.

    A node whose bin is not covered by the spectrum gets NaN. ``wavelength`` and ``nodes`` ascend, same unit.
    """
    edges = np.concatenate(
        [[1.5 * nodes[0] - 0.5 * nodes[1]], 0.5 * (nodes[1:] + nodes[:-1]), [1.5 * nodes[-1] - 0.5 * nodes[-2]]]
    )
    steps = 0.5 * (flux[1:] + flux[:-1]) * np.diff(wavelength)
    summed = np.concatenate([[0.0], np.cumsum(steps)])
    left, right = edges[:-1], edges[1:]
    # The running integral is quadratic between samples; interpolate the flux at the edge and add the sliver.
    at = np.interp(edges, wavelength, flux)
    index = np.clip(np.searchsorted(wavelength, edges, side="right") - 1, 0, wavelength.size - 2)
    running = summed[index] + 0.5 * (flux[index] + at) * (edges - wavelength[index])
    mean = (running[1:] - running[:-1]) / (right - left)
    covered = (left >= wavelength[0]) & (right <= wavelength[-1])
    return np.where(covered, mean, np.nan)


def with_planck_tails(nodes: Array, flux: Array, teff_k: float, span: float = 0.03) -> Array:
    """Fill the NaN ends of a spectrum with a black body of ``teff_k``, joined to the mean of the outermost part.

    ``span`` is the part of the wavelength range, as a fraction of the end wavelength, whose mean sets the join.
    """
    good = np.flatnonzero(np.isfinite(flux))
    first, last = good[0], good[-1]
    planck = planck_flux(nodes, teff_k)
    ratio = flux / planck
    blue = good[nodes[good] <= nodes[first] * (1 + span)]
    red = good[nodes[good] >= nodes[last] * (1 - span)]
    out = flux.copy()
    out[:first] = planck[:first] * np.mean(ratio[blue])
    out[last + 1 :] = planck[last + 1 :] * np.mean(ratio[red])
    return out


def normalised(nodes: Array, flux: Array, teff_k: float) -> Array:
    """Scale a spectrum so that its integral is sigma Teff^4."""
    return flux * (STEFAN_BOLTZMANN * teff_k**4 / total_flux(nodes, flux))
