"""Smooth colour correction of cool dwarfs to the mean dwarf sequence.

In the sense of Lejeune, Cuisinier & Buser 1997, A&AS 125, 229: every spectrum is multiplied by a curve that is
piecewise linear in ln lambda, found by regularised least squares from the colours of the (smoothed) sequence, and
scaled back to sigma Teff^4. In full below 4400 K, fading to none at 5000 K and towards giants.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import replace
from typing import Any

import numpy as np

from .atmospheres import Atmospheres
from .sequence import chain_minus, sequence_stars
from .spectra import Array, normalised

KNOTS_ANGSTROM = np.array(
    [3300, 3800, 4400, 5000, 5600, 6400, 7200, 8200, 10000, 12500, 16500, 21500, 34000, 47000, 80000, 130000.0]
)
REFERENCE = "2MASS/2MASS.Ks"
TEFF_WEIGHT = (np.array([4400.0, 5000.0]), np.array([1.0, 0.0]))
LOGG_WEIGHT = (np.array([3.0, 4.0]), np.array([0.0, 1.0]))
WINDOW_LN_TEFF = 0.025
WIDEST_LN_TEFF = 0.06  # farther than this from any row a colour counts as not published
# How far each colour of the sequence is trusted, mag. Gaia is DR2 there; R of the latest types is erratic.
TRUST_MAG: Mapping[str, float] = {
    "Generic/Johnson.U": 0.06, "Generic/Johnson.B": 0.02, "Generic/Johnson.V": 0.02, "Generic/Cousins.R": 0.03,
    "Generic/Cousins.I": 0.02, "GAIA/GAIA3.G": 0.03, "GAIA/GAIA3.Gbp": 0.03, "GAIA/GAIA3.Grp": 0.03,
    "2MASS/2MASS.J": 0.015, "2MASS/2MASS.H": 0.015, "WISE/WISE.W1": 0.02, "WISE/WISE.W2": 0.02, "WISE/WISE.W3": 0.03,
}  # fmt: skip
R_FROM_K = 2700.0
BEND_MAG = 0.15  # one-sigma second difference of the curve between knots
SIZE_MAG = np.where(KNOTS_ANGSTROM < 60000, 1.0, 0.03)  # one-sigma size of the curve; small where nothing measures it
ROUNDS = 5
KINKED_K = (2350.0, 3000.0)  # rows between the templates of VB 8 and LP 791-18
KINK_SHARE, KINK_ROUNDS = 0.5, 2


def smoothed_colours(csv_text: str, teff_k: Array) -> dict[str, Array]:
    """Return band minus Ks of the sequence at each temperature, smoothed in ln Teff; NaN where absent.

    W1-W2 is not published between 3100 and 4400 K: such a gap is bridged by a straight line.
    """
    stars = sequence_stars(csv_text, 1500.0, 7000.0)
    x = np.log([star["teff_k"] for star in stars])
    out = {}
    for band in TRUST_MAG:
        colour = np.array([chain_minus(star, band, REFERENCE) for star in stars])
        if band == "Generic/Cousins.R":
            colour = np.where(x < np.log(R_FROM_K), np.nan, colour)
        smooth = np.array([local_parabola(x, colour, float(np.log(teff))) for teff in teff_k])
        known = np.isfinite(smooth)
        bridged = np.interp(np.log(teff_k), np.log(teff_k[known]), smooth[known], left=np.nan, right=np.nan)
        out[band] = bridged
    return out


def local_parabola(x: Array, y: Array, at: float) -> float:
    """Return the value at ``at`` of a parabola fitted with Gaussian weights to the known points; NaN if far off.

    A straight line would cut the corner of V-Ks, which bends by 0.03 mag within the window.
    """
    known = np.isfinite(y)
    if not known.any() or at < x[known].min() - 1e-9 or np.abs(x[known] - at).min() > WIDEST_LN_TEFF:
        return float("nan")
    distance = x[known] - at
    nearest = np.sort(np.abs(distance))[min(4, distance.size - 1)]
    scale = np.exp(-0.25 * (distance / max(WINDOW_LN_TEFF, nearest)) ** 2)
    design = np.column_stack([np.ones_like(distance), distance, distance**2])
    solution = np.linalg.lstsq(design * scale[:, None], y[known] * scale, rcond=None)[0]
    return float(solution[0])


def hats(nodes: Array) -> Array:
    """Return (nw, n_knots): the hat functions in ln lambda, constant beyond the end knots."""
    unit = np.eye(KNOTS_ANGSTROM.size)
    columns = [np.interp(np.log(nodes), np.log(KNOTS_ANGSTROM), row) for row in unit]
    return np.array(columns).T


def fitted_curve(flux: Array, weights: Array, zero: Array, target: Array, trust: Array, basis: Array) -> Array:
    """Return the correction curve (nw,) in magnitudes for one spectrum.

    Parameters
    ----------
    flux : (nw,) uncorrected surface flux
    weights, zero : (n + 1, nw), (n + 1,) quadrature weights and zero fluxes; the last band is the reference
    target : (n,) wanted magnitudes relative to the reference, NaN where unknown
    trust : (n,) one-sigma errors of the targets
    basis : (nw, n_knots) hat functions
    """
    known = np.isfinite(target)
    bends = np.diff(np.eye(basis.shape[1]), n=2, axis=0) / BEND_MAG
    size = np.diag(1 / SIZE_MAG)
    knots = np.zeros(basis.shape[1])
    for _ in range(ROUNDS):
        shaped = flux * 10 ** (-0.4 * basis @ knots)
        means = weights @ shaped
        response = (weights * shaped) @ basis / means[:, None]
        magnitude = -2.5 * np.log10(means / zero)
        miss = (target - (magnitude[:-1] - magnitude[-1]))[known] / trust[known]
        slope = (response[:-1] - response[-1])[known] / trust[known, None]
        design = np.concatenate([slope, bends, size])
        wanted = np.concatenate([miss, -bends @ knots, -size @ knots])
        knots = knots + np.linalg.lstsq(design, wanted, rcond=None)[0]
    return np.asarray(basis @ knots)


def cool_corrected(
    table: Atmospheres,
    band_weights: Array,
    entries: Sequence[Mapping[str, Any]],
    csv_text: str,
    leave_out: str = "",
) -> Atmospheres:
    """Return the table with the cool dwarfs corrected.

    ``band_weights`` (n_bands, nw) and ``entries`` are those of the passbands, in the same order; ``leave_out`` names a
    band whose colour is not used, to see how well the others predict it.
    """
    nodes, logg = table.wavelength_angstrom, table.logg
    cool = np.flatnonzero(table.teff_k < TEFF_WEIGHT[0][1])
    colours = smoothed_colours(csv_text, table.teff_k[cool])
    names = [band for band in TRUST_MAG if band != leave_out]
    ids = [entry["id"] for entry in entries]
    index = [ids.index(band) for band in (*names, REFERENCE)]
    zero = np.array([entries[i]["zero_flux_vega"] for i in index])
    trust = np.array([TRUST_MAG[band] for band in names])
    basis = hats(nodes)
    out = table.ln_flux.copy()
    dwarf = int(np.argmin(np.abs(logg - 4.5)))
    for row, i in enumerate(cool):
        target = np.array([colours[band][row] for band in names])
        curve_mag = fitted_curve(np.exp(table.ln_flux[i, dwarf]), band_weights[index], zero, target, trust, basis)
        for j, gravity in enumerate(logg):
            share = float(np.interp(table.teff_k[i], *TEFF_WEIGHT) * np.interp(gravity, *LOGG_WEIGHT))
            if share > 0:
                shape = np.exp(table.ln_flux[i, j] - 0.4 * np.log(10) * share * curve_mag)
                out[i, j] = np.log(normalised(nodes, shape, float(table.teff_k[i])))
    return replace(table, ln_flux=out)


def without_kinks(table: Atmospheres) -> Atmospheres:
    """Return the table with the run of the coolest dwarfs in temperature smoothed.

    Two templates of different stars make kinks of up to 0.06 mag in r and g between 2400 and 2950 K. Each row there is
    drawn half-way, twice, towards the cubic in ln Teff through the two rows on either side, and scaled to sigma Teff^4.
    """
    ln_teff, out = np.log(table.teff_k), table.ln_flux.copy()
    rows = np.flatnonzero((table.teff_k > KINKED_K[0]) & (table.teff_k < KINKED_K[1]))
    dwarfs = np.flatnonzero(table.logg > LOGG_WEIGHT[0][0])
    others = np.array([-2, -1, 1, 2])
    for _ in range(KINK_ROUNDS):
        before = out.copy()
        for i in rows:
            to_cubic = np.linalg.inv(np.vander(ln_teff[i + others] - ln_teff[i], 4))[-1]
            for j in dwarfs:
                drawn = (1 - KINK_SHARE) * before[i, j] + KINK_SHARE * (to_cubic @ before[i + others, j])
                out[i, j] = np.log(normalised(table.wavelength_angstrom, np.exp(drawn), float(table.teff_k[i])))
    return replace(table, ln_flux=out)
