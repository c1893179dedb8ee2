"""Ordinary stars on the main sequence: mass, age and metallicity to temperature, radius, luminosity and gravity.

What is used where:

- below 0.65 Msun the mean dwarf sequence (:mod:`vetter.stars.dwarf_table`) with metallicity slopes; age is ignored;
- 0.65-0.80 Msun a blend, linear in mass;
- above 0.80 Msun the published formulas with age (:mod:`vetter.stars.hpt`), whose solar metal fraction is 0.02.

Real stars scatter about the relation; two standard-normal scores say where in the scatter a star lies. The standard
errors were measured against the mean dwarf sequence and eclipsing binaries. The correlation of ln L and ln R is set
by the scatter of ln Teff: 16 sT^2 = sL^2 + 4 sR^2 - 4 rho sL sR.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

from vetter.stars import hpt
from vetter.stars.dwarf_table import mean_dwarf
from vetter.stars.hpt_coefficients import Z_RANGE, Z_SUN, metal_fraction
from vetter.stars.properties import StarProperties, surface_gravity, teff_from_luminosity_k

FloatArray = NDArray[np.float64]

MASS_RANGE_MSUN = (0.077, 100.0)
"""Masses with a star to offer: from the end of hydrogen burning to the end of the formulas."""

FEH_RANGE = (-3.0, 0.7)
"""Metallicities accepted. The formulas span -2.30 to +0.18; beyond, the slopes at that edge carry on."""

BLEND_MSUN = (0.65, 0.80)
"""Where the table hands over to the formulas."""

_LN10 = float(np.log(10.0))
_FEH_OF_FORMULAS_LOW, _FEH_OF_FORMULAS_HIGH = (float(np.log10(z / Z_SUN)) for z in Z_RANGE)

# Change of log10 L and ln R per dex of metallicity at five masses (fits to the formulas and to M dwarfs).
_SLOPE_LN_MASS = np.log([0.4, 0.6, 1.0, 2.0, 5.0])
_SLOPE_LN_LUMINOSITY = _LN10 * np.array([-0.10, -0.29, -0.41, -0.26, -0.10])
_SLOPE_LN_RADIUS = np.array([0.02, 0.0, -0.11, 0.36, 0.30])

# Upper edge of each mass range (Msun) and its scatter in log10 L, ln R and ln Teff; the last has no upper edge.
_SCATTER_EDGES_MSUN = (0.65, 0.80, 1.6, 2.5, 20.0)
_SCATTER_LOG_L = (0.06, 0.05, 0.04, 0.06, 0.04, 0.06)
_SCATTER_LN_R = (0.05, 0.04, 0.04, 0.06, 0.05, 0.12)
_SCATTER_LN_TEFF = (0.025, 0.02, 0.02, 0.03, 0.03, 0.06)
_SCATTER_STEP_WIDTH = 0.03

# Extra scatter of stars far from solar metallicity, in log10 L, and where it sets in.
_EXTRA_LOG_L, _EXTRA_FEH_START, _EXTRA_FEH_FULL = 0.05, 0.45, 0.55


class Scatter(NamedTuple):
    """Standard deviations of ln L and ln R at fixed mass, age and metallicity, and their correlation."""

    ln_luminosity: FloatArray
    ln_radius: FloatArray
    correlation: FloatArray


def main_sequence(
    mass_msun: ArrayLike,
    life_fraction: ArrayLike,
    feh: ArrayLike,
    z_luminosity: ArrayLike = 0.0,
    z_radius: ArrayLike = 0.0,
) -> StarProperties:
    """Return the properties of main-sequence stars; all arguments broadcast together.

    Parameters
    ----------
    mass_msun : 0.077-100; outside, ``valid`` is False
    life_fraction : 0 (zero age) to 1 (end of the main sequence); outside, ``valid`` is False
    feh : [Fe/H] (dex), -3 to 0.7; outside, ``valid`` is False
    z_luminosity, z_radius : independent standard-normal scores of the scatter; 0 gives the mean relation. ln L moves
        with the first alone, ln R with the first through the correlation and with the second.

    Sources: Pecaut & Mamajek 2013, ApJS 208, 9; Tout et al. 1996, MNRAS 281, 257; Hurley, Pols & Tout 2000,
    MNRAS 315, 543.
    """
    mass, tau, metals, z_l, z_r = np.broadcast_arrays(
        *(np.asarray(x, dtype=float) for x in (mass_msun, life_fraction, feh, z_luminosity, z_radius))
    )
    valid = _inside(mass, MASS_RANGE_MSUN) & _inside(tau, (0.0, 1.0)) & _inside(metals, FEH_RANGE)
    # A stand-in inside the range keeps the columns finite where there is no star.
    m = np.where(valid, mass, 1.0)
    tau, metals = np.where(valid, tau, 0.5), np.where(valid, metals, 0.0)
    ln_l, ln_r = _mean(m, tau, metals)
    spread = scatter(m, metals)
    rho = spread.correlation
    ln_l = ln_l + spread.ln_luminosity * z_l
    ln_r = ln_r + spread.ln_radius * (rho * z_l + np.sqrt(1.0 - rho * rho) * z_r)
    luminosity, radius = np.asarray(np.exp(ln_l)), np.asarray(np.exp(ln_r))
    return StarProperties(
        teff_k=teff_from_luminosity_k(luminosity, radius),
        radius_rsun=radius,
        logg=surface_gravity(m, radius),
        luminosity_lsun=luminosity,
        mass_msun=m,
        valid=valid,
    )


def lifetime_myr(mass_msun: ArrayLike, feh: ArrayLike) -> FloatArray:
    """Return the main-sequence lifetime (Myr); Hurley, Pols & Tout 2000, eq. 5.

    Masses are held inside 0.1-100 Msun and metallicities inside -2.30 to +0.18, the range of the formulas.
    """
    return hpt.lifetime_myr(mass_msun, metal_fraction(feh))


def scatter(mass_msun: ArrayLike, feh: ArrayLike = 0.0) -> Scatter:
    """Return the scatter of real stars about the relation, for masses > 0 (Msun).

    The steps between mass ranges are ramps of +-3 % in mass. Beyond |[Fe/H]| = 0.5 another 0.05 dex in log L is added
    in quadrature, which leaves the covariance with ln R as it was.
    """
    ln_mass, metals = np.log(np.asarray(mass_msun, dtype=float)), np.asarray(feh, dtype=float)
    s_l = _LN10 * _stepped(ln_mass, _SCATTER_LOG_L)
    s_r, s_t = _stepped(ln_mass, _SCATTER_LN_R), _stepped(ln_mass, _SCATTER_LN_TEFF)
    covariance = 0.25 * (s_l * s_l + 4.0 * s_r * s_r - 16.0 * s_t * s_t)
    far = np.clip((np.abs(metals) - _EXTRA_FEH_START) / (_EXTRA_FEH_FULL - _EXTRA_FEH_START), 0.0, 1.0)
    total = np.hypot(s_l, _LN10 * _EXTRA_LOG_L * far)
    return Scatter(np.asarray(total), s_r, np.asarray(covariance / (total * s_r)))


def metallicity_slopes(ln_mass: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return the changes of ln L and ln R per dex of metallicity, linear in ln mass between 0.4 and 5 Msun."""
    return (
        np.asarray(np.interp(ln_mass, _SLOPE_LN_MASS, _SLOPE_LN_LUMINOSITY)),
        np.asarray(np.interp(ln_mass, _SLOPE_LN_MASS, _SLOPE_LN_RADIUS)),
    )


def _mean(mass: FloatArray, tau: FloatArray, feh: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return mean ln L and ln R; each relation is evaluated only for the stars that need it."""
    ln_mass = np.log(mass)
    slope_l, slope_r = metallicity_slopes(ln_mass)
    table_l, table_r = mean_dwarf(ln_mass)
    ln_l, ln_r = np.asarray(table_l + slope_l * feh), np.asarray(table_r + slope_r * feh)
    above = mass > BLEND_MSUN[0]
    if np.any(above):
        m, metals = mass[above], feh[above]
        star = hpt.main_sequence(m, metal_fraction(metals), tau[above])
        beyond = metals - np.clip(metals, _FEH_OF_FORMULAS_LOW, _FEH_OF_FORMULAS_HIGH)
        weight = np.clip((m - BLEND_MSUN[0]) / (BLEND_MSUN[1] - BLEND_MSUN[0]), 0.0, 1.0)
        formula_l = np.log(star.luminosity_lsun) + slope_l[above] * beyond
        formula_r = np.log(star.radius_rsun) + slope_r[above] * beyond
        ln_l[above] += weight * (formula_l - ln_l[above])
        ln_r[above] += weight * (formula_r - ln_r[above])
    return ln_l, ln_r


def _stepped(ln_mass: FloatArray, values: tuple[float, ...]) -> FloatArray:
    """Return the value of each mass range, joined by short ramps around the edges."""
    edges = np.log(_SCATTER_EDGES_MSUN)
    nodes = np.stack([edges - _SCATTER_STEP_WIDTH, edges + _SCATTER_STEP_WIDTH], axis=-1).reshape(-1)
    return np.asarray(np.interp(ln_mass, nodes, np.repeat(values, 2)[1:-1]))


def _inside(x: FloatArray, limits: tuple[float, float]) -> NDArray[np.bool_]:
    return np.asarray((x >= limits[0]) & (x <= limits[1]))
