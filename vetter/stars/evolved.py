"""Subgiants and giants: the region between the end of the main sequence and the giant branch.

Where a star of known mass stands in that region depends on an age that nobody knows, so the region itself is offered:
``rise`` (0-1) sets log L between its floor and its ceiling, ``warmth`` (0-1) sets ln Teff between the giant branch and
the end of the main sequence. Equal steps in both are equally likely in a prior.

Source of the borders: Hurley, Pols & Tout 2000, MNRAS 315, 543, eqs. 8-9 (end of the main sequence), 10 (base of the
giant branch), 46 (radius on the giant branch) and 49 (luminosity at helium ignition).
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.polynomial.polynomial import polyval
from numpy.typing import ArrayLike, NDArray

from vetter.stars import hpt
from vetter.stars.hpt_coefficients import Z_SUN, at_metal_fraction, metal_fraction, published
from vetter.stars.main_sequence import FEH_RANGE
from vetter.stars.properties import TEFF_SUN_K, StarProperties, surface_gravity, teff_from_luminosity_k

FloatArray = NDArray[np.float64]

MASS_RANGE_MSUN = (0.5, 60.0)
"""Masses with a star to offer. Below 0.8 Msun a single star is too young to have got there; a mass donor is not."""

COOL_MARGIN = 0.05
"""How far (in ln Teff) the region reaches beyond the giant branch, for the scatter of real giants (judgement)."""

CEILING = 2.0
"""Ceiling of L over the luminosity at helium ignition; brighter stars late on the asymptotic branch are left out."""

_ALPHA_STEEPNESS = 15.0
_LEAST_RISE_DEX = 0.3
_LEAST_WIDTH_LN_TEFF = 0.05


class Region(NamedTuple):
    """Floor and ceiling of log10 L (solar), and Teff (K) at the end of the main sequence."""

    log_luminosity_low: FloatArray
    log_luminosity_high: FloatArray
    teff_hot_k: FloatArray


def giant_branch_radius_rsun(mass_msun: ArrayLike, luminosity_lsun: ArrayLike, z: ArrayLike) -> FloatArray:
    """Return the radius (solar) on the giant branch at given luminosity (eq. 46); inputs broadcast, all > 0."""
    metals, m = np.asarray(z, dtype=float), np.asarray(mass_msun, dtype=float)
    luminosity, zeta, sigma = np.asarray(luminosity_lsun, dtype=float), np.log10(metals / Z_SUN), np.log10(metals)
    b = published()["hpt_b"]
    b1 = np.minimum(0.54, 0.397 + 0.28826 * zeta + 0.5293 * zeta**2)
    b2 = np.maximum(10.0 ** (-4.6739 - 0.9394 * sigma), -0.04167 + 55.67 * metals)
    b2 = np.minimum(b2, 0.4771 - 9329.21 * metals**2.94)
    b3 = 10.0 ** np.maximum(-0.1451, -2.2794 - 1.5175 * sigma - 0.254 * sigma**2)
    b3 = np.where(metals > 0.004, np.maximum(b3, 0.7307 + 14265.1 * metals**3.395), b3)
    low = polyval(zeta, b["b4"]) * m ** -polyval(zeta, b["b5"])
    high = polyval(zeta, b["b6"]) * m ** -polyval(zeta, b["b7"])
    return np.asarray(np.minimum(low, high) * (luminosity**b1 + b2 * luminosity**b3))


def giant_branch_base_lsun(mass_msun: ArrayLike, z: ArrayLike) -> FloatArray:
    """Return the luminosity (solar) at the base of the giant branch (eq. 10); mass 0.1-100 Msun, inputs broadcast."""
    m, a, record = np.asarray(mass_msun, dtype=float), at_metal_fraction(np.asarray(z, dtype=float)).a, published()
    above = a[27] * m ** a[31] + a[28] * m ** record["c2"]
    return np.asarray(above / (a[29] + a[30] * m ** record["c3"] + m ** a[32]))


def helium_ignition_lsun(mass_msun: ArrayLike, z: ArrayLike) -> FloatArray:
    """Return the luminosity (solar) at which helium ignites (eq. 49), for the lightest the tip of the giant branch."""
    m, zeta = np.asarray(mass_msun, dtype=float), np.log10(np.asarray(z, dtype=float) / Z_SUN)
    b = published()["hpt_b"]
    flash = 1.995 + 0.25 * zeta + 0.087 * zeta**2

    def quiet(mass: FloatArray) -> FloatArray:
        top = polyval(zeta, b["b11'(b11=b11'^2)"]) ** 2 + polyval(zeta, b["b12"]) * mass**3.8
        return np.asarray(top / (polyval(zeta, b["b13'(b13=b13'^2)"]) ** 2 + mass**2))

    b9, b10 = polyval(zeta, b["b9"]), polyval(zeta, b["b10"])
    alpha = b9 * flash**b10 / quiet(flash) - 1.0
    # The exponent is capped where the other branch is taken.
    excess = np.minimum(m - flash, 0.0)
    light = b9 * m**b10 / (1.0 + alpha * np.exp(_ALPHA_STEEPNESS * excess))
    return np.asarray(np.where(m < flash, light, quiet(m)))


def shell_luminosity_lsun(core_mass_msun: ArrayLike, feh: ArrayLike = 0.0) -> FloatArray:
    """Return the luminosity (solar) of the burning shell around a degenerate helium core of 0.1-0.48 Msun.

    min(B Mc^3, D Mc^6), eq. 37 for stars below 2 Msun: what shines in a giant and in a star just stripped of its
    envelope, whatever envelope is left.
    """
    core, zeta = np.asarray(core_mass_msun, dtype=float), np.log10(metal_fraction(feh) / Z_SUN)
    return np.asarray(np.minimum(3e4 * core**3, 10.0 ** (5.37 + 0.135 * zeta) * core**6))


def region(mass_msun: ArrayLike, feh: ArrayLike) -> Region:
    """Return the borders of the region for masses (Msun) and metallicities (held inside -2.30 to +0.18); broadcast.

    The floor is the lowest of the end of the main sequence, the base of the giant branch and helium ignition: stars of
    1.5-5 Msun fade while they cross, and so do those above 50 Msun, which ignite helium on the way. The ceiling is
    ``CEILING`` times helium ignition, at least 0.3 dex above the floor.
    """
    z = metal_fraction(feh)
    end, ignition = hpt.main_sequence(mass_msun, z, 1.0), helium_ignition_lsun(mass_msun, z)
    low = np.log10(np.minimum(np.minimum(end.luminosity_lsun, giant_branch_base_lsun(mass_msun, z)), ignition))
    high = np.log10(CEILING * ignition)
    hot = teff_from_luminosity_k(end.luminosity_lsun, end.radius_rsun)
    return Region(low, np.maximum(high, low + _LEAST_RISE_DEX), hot)


def evolved_star(mass_msun: ArrayLike, rise: ArrayLike, warmth: ArrayLike, feh: ArrayLike) -> StarProperties:
    """Return subgiants and giants; all arguments broadcast together.

    Parameters
    ----------
    mass_msun : 0.5-60; outside, ``valid`` is False
    rise : 0 (floor of log L) to 1 (ceiling); outside, ``valid`` is False
    warmth : 0 (5 % cooler than the giant branch of that mass and luminosity) to 1 (as hot as the end of the main
        sequence), in ln Teff; outside, ``valid`` is False
    feh : [Fe/H], -3 to 0.7; outside, ``valid`` is False
    """
    mass, up, warm, metals = np.broadcast_arrays(*(np.asarray(x, dtype=float) for x in (mass_msun, rise, warmth, feh)))
    valid = np.ones(mass.shape, dtype=bool)
    for values, (low, high) in ((mass, MASS_RANGE_MSUN), (up, (0.0, 1.0)), (warm, (0.0, 1.0)), (metals, FEH_RANGE)):
        valid &= (values >= low) & (values <= high)
    m, metals = np.where(valid, mass, 1.0), np.where(valid, metals, 0.0)
    up, warm = np.where(valid, up, 0.5), np.where(valid, warm, 0.5)
    borders = region(m, metals)
    luminosity = 10.0 ** (borders.log_luminosity_low + up * (borders.log_luminosity_high - borders.log_luminosity_low))
    branch = giant_branch_radius_rsun(m, luminosity, metal_fraction(metals))
    hot = np.log(borders.teff_hot_k)
    # Where the giant branch is as hot as the end of the main sequence a narrow strip is left.
    cool = np.minimum(np.log(teff_from_luminosity_k(luminosity, branch)) - COOL_MARGIN, hot - _LEAST_WIDTH_LN_TEFF)
    teff = np.asarray(np.exp(cool + warm * (hot - cool)))
    radius = np.asarray(np.sqrt(luminosity) * (TEFF_SUN_K / teff) ** 2)
    return StarProperties(teff, radius, surface_gravity(m, radius), np.asarray(luminosity), m, valid)
