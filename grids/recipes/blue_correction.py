"""Blue correction of solar-type models, measured on standard-star spectra.

The Kurucz models of 5700-6100 K are 0.03-0.09 mag too faint between 3200 and 4500 A against the CALSPEC spectra of the
Sun, P041C and HD 209458, whose red and infrared colours they match to 0.01 mag; the mean dwarf sequence shows the same
in B-V (0.03-0.05 mag, 5000-7300 K) and shows none at 4600 K and 9000 K. The mean ratio of the three stars is applied,
fading towards those temperatures and towards giants, for which there is no evidence. Total flux is kept.
"""

from __future__ import annotations

import numpy as np

from .sources import Sources, fits_columns
from .spectra import Array, normalised

STARS = {  # spectrum, log g (the temperature is fitted to the red and infrared shape)
    "sun_reference_stis_001": 4.44,
    "p041c_stisnic_002": 4.4,
    "hd209458_stisnic_002": 4.36,
}
EDGES_ANGSTROM = np.array([3150, 3300, 3450, 3600, 3750, 3900, 4050, 4200, 4350, 4500, 4700, 4900, 5200, 5500.0])
RED_EDGES_ANGSTROM = np.array([5500, 6000, 6500, 7000, 8000, 9000, 10000, 12000, 14000, 16500, 19000, 22000.0])
NONE_BELOW_ANGSTROM = 2900.0  # the near ultraviolet of the three stars disagrees with itself: left alone
TEFF_TRIAL_K = np.arange(5600.0, 6400.1, 10.0)
TEFF_WEIGHT = (np.array([4600.0, 5200.0, 7000.0, 9000.0]), np.array([0.0, 1.0, 1.0, 0.0]))
BALMER_ANGSTROM = np.array([3800.0, 4000.0])  # below, U-B of the dwarf sequence asks for an earlier fading
BALMER_TEFF_WEIGHT = (np.array([4600.0, 5200.0, 6000.0, 6700.0]), np.array([0.0, 1.0, 1.0, 0.0]))
LOGG_WEIGHT = (np.array([2.5, 3.5]), np.array([0.0, 1.0]))


def bin_averages(wavelength: Array, flux: Array, edges: Array) -> Array:
    """Return the mean flux in each bin between the edges (angstrom)."""
    grids = np.linspace(edges[:-1], edges[1:], 201, axis=1)
    return np.asarray(np.interp(grids, wavelength, flux).mean(axis=1))


def interpolate(teff_k: Array, logg: Array, ln_flux: Array, teff: float, gravity: float) -> Array:
    """Return the flux (nw,) of one star, bilinear in ln F over (log Teff, log g)."""
    i = int(np.clip(np.searchsorted(teff_k, teff) - 1, 0, teff_k.size - 2))
    j = int(np.clip(np.searchsorted(logg, gravity) - 1, 0, logg.size - 2))
    x = np.log(teff / teff_k[i]) / np.log(teff_k[i + 1] / teff_k[i])
    y = (gravity - logg[j]) / (logg[j + 1] - logg[j])
    cell = ln_flux[i : i + 2, j : j + 2]
    mixed = (1 - x) * ((1 - y) * cell[0, 0] + y * cell[0, 1]) + x * ((1 - y) * cell[1, 0] + y * cell[1, 1])
    return np.asarray(np.exp(mixed))


def measured_ratio_mag(sources: Sources, nodes: Array, teff_k: Array, logg: Array, ln_flux: Array) -> Array:
    """Return -2.5 log10(model / observed) in the blue bins, (13,), mean of the stars, zero in the red."""
    ratios = []
    for name, gravity in STARS.items():
        wavelength, flux = fits_columns(sources.standards()[f"calspec/{name}.fits"], "WAVELENGTH", "FLUX")
        red = bin_averages(wavelength, flux, RED_EDGES_ANGSTROM)
        models = [interpolate(teff_k, logg, ln_flux, teff, gravity) for teff in TEFF_TRIAL_K]
        logs = np.array([np.log(bin_averages(nodes, model, RED_EDGES_ANGSTROM) / red) for model in models])
        best = int(np.argmin(logs.var(axis=1)))
        blue = bin_averages(nodes, models[best], EDGES_ANGSTROM) / bin_averages(wavelength, flux, EDGES_ANGSTROM)
        ratios.append(-2.5 / np.log(10) * (np.log(blue) - np.median(logs[best])))
    return np.asarray(np.mean(ratios, axis=0))


def corrected(sources: Sources, nodes: Array, teff_k: Array, logg: Array, ln_flux: Array) -> Array:
    """Return ln F (nt, ng, nw) with the blue correction applied and sigma Teff^4 restored."""
    ratio = measured_ratio_mag(sources, nodes, teff_k, logg, ln_flux)
    middle = 0.5 * (EDGES_ANGSTROM[1:] + EDGES_ANGSTROM[:-1])
    knots = np.concatenate([[NONE_BELOW_ANGSTROM], middle, [EDGES_ANGSTROM[-1] + 150.0]])
    curve_mag = np.interp(nodes, knots, np.concatenate([[0.0], ratio, [0.0]]))
    out = ln_flux.copy()
    for i, teff in enumerate(teff_k):
        for j, gravity in enumerate(logg):
            pair = [np.interp(teff, *law) for law in (BALMER_TEFF_WEIGHT, TEFF_WEIGHT)]
            weight = np.interp(nodes, BALMER_ANGSTROM, pair) * np.interp(gravity, *LOGG_WEIGHT)
            if weight.any():
                shape = np.exp(ln_flux[i, j] + 0.4 * np.log(10) * weight * curve_mag)
                out[i, j] = np.log(normalised(nodes, shape, float(teff)))
    return out
