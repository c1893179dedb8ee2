"""What an ordinary companion can do at most to the photocentre: the limits beside the measured mass-ratio function."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from vetter.light.engine import Component, LightEngine
from vetter.physics.kepler import photocentre_mass_ratio_function
from vetter.scenarios.seen_star import SeenStarState
from vetter.stars.main_sequence import main_sequence

FloatArray = NDArray[np.float64]

COMPANION_MASSES_MSUN = np.geomspace(0.08, 60.0, 100)
HALF_LIFE = 0.5


class OrdinaryMaxima(NamedTuple):
    """Largest mass-ratio function (n,) of one main-sequence companion, and of two alike in a tight pair."""

    single: FloatArray
    pair: FloatArray


def ordinary_maxima(star: SeenStarState, engine: LightEngine, column: int) -> OrdinaryMaxima:
    """Return the maxima in the band of ``column`` for each seen star (n,), with its own mass and light.

    Companions are half way through their lives, share [Fe/H], and give together no more light than the seen star:
    were they brighter, they would be the star that is seen. Twins give the least light for their mass. Source of the
    test: Shahaf et al. 2019, MNRAS 487, 5610.
    """
    feh, masses = star.feh[:, None], COMPANION_MASSES_MSUN[None, :]
    companion = main_sequence(masses, HALF_LIFE, feh)
    n, m = companion.mass_msun.shape
    flat = (np.broadcast_to(x, (n, m)).ravel() for x in (companion.teff_k, companion.logg, feh, companion.radius_rsun))
    other = engine.magnitudes(Component("star", *flat), 10.0, 0.0)[:, column].reshape(n, m)
    seen = Component("star", star.teff_k, star.logg, star.feh, star.radius_rsun)
    light = 10.0 ** (0.4 * (engine.magnitudes(seen, 10.0, 0.0)[:, column, None] - other))
    ratio = masses / star.mass_msun[:, None]

    def largest(bodies: float) -> FloatArray:
        value = photocentre_mass_ratio_function(bodies * ratio, bodies * light)
        return np.asarray(np.max(np.where(companion.valid & (bodies * light <= 1.0), value, 0.0), axis=1))

    return OrdinaryMaxima(largest(1.0), largest(2.0))
