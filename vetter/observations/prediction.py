"""What a scenario predicts for n samples: the only thing an observation ever sees of it."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, NamedTuple

import numpy as np
from numpy.typing import NDArray

if TYPE_CHECKING:
    from vetter.light.engine import Component

FloatArray = NDArray[np.float64]


class HiddenStar(NamedTuple):
    """One star that shines on the companion's orbit: its body (n,) and, per band (n, bands), its flux / seen star's."""

    body: Component
    band_ratio: FloatArray


class InnerOrbit(NamedTuple):
    """The orbit (n,) inside a companion that is a pair: masses in Msun, in the order of ``hidden_stars``, and days."""

    first_msun: FloatArray
    second_msun: FloatArray
    period_d: FloatArray


@dataclass(frozen=True)
class Prediction:
    """Predicted quantities, one row per sample; bands and windows in the order of the light engine.

    Attributes
    ----------
    magnitudes : (n, bands) of everything together, in each band's photometric system
    window_ratio : (n, windows) companion's flux / seen star's flux
    optical_ratio : (n,) the same between 500 and 600 nm
    distance_pc, ebv_mag : (n,)
    teff_k, logg, feh : (n,) of the seen star
    companion_teff_k, companion_logg : (n,) of the companion's brightest star; not-a-number where it is dark
    mass_msun, companion_mass_msun : (n,)
    k1_km_s, inclination_deg, photocentre_mas : (n,) of the orbit; inclination folded into 0-90 degrees
    ordinary_seen_star : whether the seen star is what it looks like, so that an outside mass estimate applies
    radius_rsun, separation_rsun : (n,) of the seen star, and semi-major axis of the relative orbit
    band_ratio : (n, bands) flux of everything beside the seen star / seen star's flux
    hidden_stars : the stars that shine on the companion's orbit; none for a dark companion or an unrelated star
    inner : the companion's own orbit where it is a pair whose period is predicted
    unrelated_mas : (n,) distance on the sky of a star that is free of the orbit; None where there is none
    """

    magnitudes: FloatArray
    window_ratio: FloatArray
    optical_ratio: FloatArray
    distance_pc: FloatArray
    ebv_mag: FloatArray
    teff_k: FloatArray
    logg: FloatArray
    feh: FloatArray
    companion_teff_k: FloatArray
    companion_logg: FloatArray
    mass_msun: FloatArray
    companion_mass_msun: FloatArray
    k1_km_s: FloatArray
    inclination_deg: FloatArray
    photocentre_mas: FloatArray
    ordinary_seen_star: bool
    radius_rsun: FloatArray
    separation_rsun: FloatArray
    band_ratio: FloatArray
    hidden_stars: tuple[HiddenStar, ...] = ()
    inner: InnerOrbit | None = None
    unrelated_mas: FloatArray | None = None
