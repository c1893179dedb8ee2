"""The mass of an ordinary star from its spectrum: Teff, log g and [Fe/H].

- dwarfs and subgiants above 0.6 Msun: :func:`torres_mass_msun`, :func:`torres_radius_rsun`
- dwarfs below 0.6 Msun: :func:`cool_dwarf_mass_msun`
- whichever applies: :func:`ordinary_mass_msun`

None of them knows that a star may be stripped: use them only where the star is taken to be ordinary.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from vetter.stars.dwarf_table import MASS_RANGE_MSUN, mean_dwarf
from vetter.stars.main_sequence import metallicity_slopes
from vetter.stars.properties import TEFF_SUN_K

FloatArray = NDArray[np.float64]

TORRES_MASS_SCATTER_DEX = 0.027
"""Standard deviation of log10 M of real stars about the relation (6.4 %; from memory)."""

TORRES_RADIUS_SCATTER_DEX = 0.014
"""Standard deviation of log10 R of real stars about the relation (3.2 %; from memory)."""

COOL_DWARF_MASS_SCATTER_DEX = 0.055
"""Standard deviation of log10 M of a cool dwarf at given Teff: 2.5 % in Teff over the mean slope 0.2 of ln Teff."""

_MASS_COEFFICIENTS = (1.5689, 1.3787, 0.4243, 1.139, -0.1425, 0.01969, 0.1010)
_RADIUS_COEFFICIENTS = (2.4427, 0.6679, 0.1771, 0.705, -0.21415, 0.02306, 0.04173)
_HAND_OVER_MSUN = (0.55, 0.65)
_DWARF_LOGG = 4.0
_BISECTIONS = 40


def torres_mass_msun(teff_k: ArrayLike, logg: ArrayLike, feh: ArrayLike) -> FloatArray:
    """Return the mass (Msun) of an ordinary star; inputs broadcast.

    Torres, Andersen & Gimenez 2010, A&ARv 18, 67, eq. 4 (coefficients from memory, checked with the Sun and eclipsing
    binaries). Fitted to stars above 0.6 Msun with log g > 2; the Sun comes out at 1.049.
    """
    return _torres(_MASS_COEFFICIENTS, teff_k, logg, feh)


def torres_radius_rsun(teff_k: ArrayLike, logg: ArrayLike, feh: ArrayLike) -> FloatArray:
    """Return the radius (solar) of an ordinary star; inputs broadcast.

    Torres, Andersen & Gimenez 2010, A&ARv 18, 67, eq. 5 (as :func:`torres_mass_msun`); the Sun comes out at 1.017.
    """
    return _torres(_RADIUS_COEFFICIENTS, teff_k, logg, feh)


def cool_dwarf_mass_msun(teff_k: ArrayLike, feh: ArrayLike = 0.0) -> FloatArray:
    """Return the mass (Msun, held inside 0.077-0.80) of a cool dwarf from Teff (K) and [Fe/H]; inputs broadcast.

    Inverts the mean dwarf sequence with the metallicity slopes of the main-sequence relation (Pecaut & Mamajek 2013,
    ApJS 208, 9) by bisection in ln mass, to 1e-11. M dwarfs of close binaries are some 4 % cooler than the single ones
    of the sequence, and come out 0.1 dex too light.
    """
    teff, metals = np.broadcast_arrays(np.asarray(teff_k, dtype=float), np.asarray(feh, dtype=float))
    low, high = (np.full(teff.shape, np.log(end)) for end in MASS_RANGE_MSUN)
    target = np.log(teff / TEFF_SUN_K)
    for _ in range(_BISECTIONS):
        middle = 0.5 * (low + high)
        cooler = _ln_teff_sun(middle, metals) < target
        low, high = np.where(cooler, middle, low), np.where(cooler, high, middle)
    return np.asarray(np.exp(0.5 * (low + high)))


def ordinary_mass_msun(teff_k: ArrayLike, logg: ArrayLike, feh: ArrayLike) -> FloatArray:
    """Return the mass (Msun) of an ordinary dwarf or subgiant; inputs broadcast.

    Torres et al. 2010 above 0.65 Msun, the cool-dwarf relation below 0.55 Msun (log g > 4 only), linear between.
    """
    torres = torres_mass_msun(teff_k, logg, feh)
    cool = cool_dwarf_mass_msun(teff_k, feh)
    weight = np.clip((cool - _HAND_OVER_MSUN[0]) / (_HAND_OVER_MSUN[1] - _HAND_OVER_MSUN[0]), 0.0, 1.0)
    weight = np.where(np.asarray(logg) > _DWARF_LOGG, weight, 1.0)
    return np.asarray(cool + (torres - cool) * weight)


def _torres(c: tuple[float, ...], teff_k: ArrayLike, logg: ArrayLike, feh: ArrayLike) -> FloatArray:
    x = np.log10(np.asarray(teff_k, dtype=float)) - 4.1
    g, metals = np.asarray(logg, dtype=float), np.asarray(feh, dtype=float)
    exponent = c[0] + x * (c[1] + x * (c[2] + x * c[3])) + g * g * (c[4] + c[5] * g) + c[6] * metals
    return np.asarray(10.0**exponent)


def _ln_teff_sun(ln_mass: FloatArray, feh: FloatArray) -> FloatArray:
    """Return ln(Teff / Teff of the Sun) of mean dwarfs."""
    (ln_l, ln_r), (slope_l, slope_r) = mean_dwarf(ln_mass), metallicity_slopes(ln_mass)
    return np.asarray(0.25 * (ln_l + slope_l * feh) - 0.5 * (ln_r + slope_r * feh))
