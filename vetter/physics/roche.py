"""The Roche lobe: how large a star may be before it spills onto its companion."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

FloatArray = NDArray[np.float64]


def roche_lobe_fraction(mass_ratio: ArrayLike) -> FloatArray:
    """Return the lobe's volume radius over the separation, for ``mass_ratio`` = (this star) / (other star) > 0.

    Right to 1 % for every ratio. Source: Eggleton 1983, ApJ 268, 368, eq. 2.
    """
    third = np.cbrt(np.asarray(mass_ratio, dtype=float))
    return np.asarray(0.49 / (0.6 + np.log1p(third) / (third * third)))


def roche_lobe_rsun(
    mass_msun: ArrayLike,
    companion_mass_msun: ArrayLike,
    separation_rsun: ArrayLike,
    eccentricity: ArrayLike = 0.0,
) -> FloatArray:
    """Return the lobe radius (solar radii) of the star of ``mass_msun`` at periastron, a (1 - e).

    ``separation_rsun`` is the semi-major axis of the relative orbit. Taking a circular lobe at periastron follows
    Sepinsky, Willems & Kalogera 2007 (ApJ 660, 1624): right to some 15 % for stars that turn slowly.
    """
    ratio = np.asarray(mass_msun, dtype=float) / np.asarray(companion_mass_msun, dtype=float)
    periastron = np.asarray(separation_rsun) * (1.0 - np.asarray(eccentricity, dtype=float))
    return np.asarray(roche_lobe_fraction(ratio) * periastron)
