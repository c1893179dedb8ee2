"""Bloated stripped stars: a helium core under a thin, swollen envelope, which looks like an ordinary B-K star.

The core's mass sets the luminosity, the radius is free up to the Roche lobe, and the mass is far below what an
ordinary star of that look has: g R^2 / G is what tells them apart. They do not last: see :func:`lifetime_myr`.
Source of the luminosity: core mass-luminosity relation of Hurley, Pols & Tout 2000, MNRAS 315, 543, eq. 37; above
0.45 Msun the brighter of that relation, held at its end, and the helium main sequence (judgement).
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from vetter.stars.evolved import shell_luminosity_lsun
from vetter.stars.helium import pure_helium
from vetter.stars.properties import StarProperties, surface_gravity, teff_from_luminosity_k
from vetter.stars.white_dwarf import white_dwarf_radius_rsun

FloatArray = NDArray[np.float64]

CORE_RANGE_MSUN = (0.1, 8.0)
"""Core masses with a star to offer."""

DEGENERATE_BELOW_MSUN = 0.45
"""Cores up to this mass are degenerate and shine by their shell; heavier ones burn helium."""

SHELL_SCATTER_DEX = 0.1
CORE_SCATTER_DEX = 0.3
"""Standard deviations of log10 L about the relation, below and above 0.45 Msun (judgement)."""

_HYDROGEN_ENERGY_ERG_G = 6.4e18
_HYDROGEN_SHARE = 0.7
_MSUN_G = 1.98841e33
_LSUN_ERG_MYR = 3.828e33 * 3.15576e13


def bloated_luminosity_lsun(core_mass_msun: ArrayLike, feh: ArrayLike = 0.0) -> FloatArray:
    """Return the luminosity (solar) from the core's mass (0.1-8 Msun) and [Fe/H] (dex)."""
    core, metals = np.broadcast_arrays(np.asarray(core_mass_msun, dtype=float), np.asarray(feh, dtype=float))
    shell = shell_luminosity_lsun(np.minimum(core, DEGENERATE_BELOW_MSUN), metals)
    burning = pure_helium(np.maximum(core, DEGENERATE_BELOW_MSUN), 0.5).luminosity_lsun
    return np.asarray(np.where(core <= DEGENERATE_BELOW_MSUN, shell, np.maximum(shell, burning)))


def core_radius_rsun(core_mass_msun: ArrayLike) -> FloatArray:
    """Return the radius (solar) of the bare core, which the star cannot be smaller than."""
    core = np.asarray(core_mass_msun, dtype=float)
    degenerate = white_dwarf_radius_rsun(np.minimum(core, DEGENERATE_BELOW_MSUN))
    burning = pure_helium(np.maximum(core, DEGENERATE_BELOW_MSUN), 0.5).radius_rsun
    return np.asarray(np.where(core <= DEGENERATE_BELOW_MSUN, degenerate, burning))


def bloated_star(
    core_mass_msun: ArrayLike,
    envelope_mass_msun: ArrayLike,
    radius_rsun: ArrayLike,
    feh: ArrayLike = 0.0,
    z_luminosity: ArrayLike = 0.0,
) -> StarProperties:
    """Return bloated stripped stars; all arguments broadcast together.

    Parameters
    ----------
    core_mass_msun : 0.1-8; outside, ``valid`` is False
    envelope_mass_msun : above 0, at most the core's mass; outside, ``valid`` is False
    radius_rsun : above :func:`core_radius_rsun`; below, ``valid`` is False. The Roche lobe is the caller's wall
    feh : [Fe/H], dex
    z_luminosity : standard-normal score of the scatter of log L
    """
    core, envelope, radius, metals, z = np.broadcast_arrays(
        *(np.asarray(x, dtype=float) for x in (core_mass_msun, envelope_mass_msun, radius_rsun, feh, z_luminosity))
    )
    valid = (core >= CORE_RANGE_MSUN[0]) & (core <= CORE_RANGE_MSUN[1]) & (envelope > 0.0) & (envelope <= core)
    c = np.where(valid, core, 0.3)
    valid = np.asarray(valid & (radius > core_radius_rsun(c)))
    mass, r = np.where(valid, c + envelope, 0.3), np.where(valid, radius, 1.0)
    scatter = np.where(c <= DEGENERATE_BELOW_MSUN, SHELL_SCATTER_DEX, CORE_SCATTER_DEX)
    luminosity = np.asarray(bloated_luminosity_lsun(c, metals) * 10.0 ** (scatter * z))
    return StarProperties(teff_from_luminosity_k(luminosity, r), r, surface_gravity(mass, r), luminosity, mass, valid)


def lifetime_myr(envelope_mass_msun: ArrayLike, luminosity_lsun: ArrayLike) -> FloatArray:
    """Return how long (Myr) the envelope's hydrogen lasts at this luminosity, both > 0.

    0.7 x 6.4e18 erg/g x M_env / L. Short beside the seen star's life: such a star must be met in passing, which lowers
    the odds of this explanation but does not exclude it.
    """
    energy = _HYDROGEN_SHARE * _HYDROGEN_ENERGY_ERG_G * _MSUN_G * np.asarray(envelope_mass_msun, dtype=float)
    return np.asarray(energy / (_LSUN_ERG_MYR * np.asarray(luminosity_lsun, dtype=float)))
