"""What a light curve would show of the inner pair: ellipsoidal variations and eclipses, diluted by the seen star."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from vetter.light.engine import Component, LightEngine
from vetter.pairs.plane import Rows
from vetter.physics import eclipses, kepler, tides
from vetter.scenarios.fit import Fit
from vetter.system.model import Variability

FloatArray = NDArray[np.float64]


class InnerLightCurve(NamedTuple):
    """Semi-amplitude (mag) of the ellipsoidal variations and depth (mag) of the deeper eclipse, both (m, k)."""

    ellipsoidal_mag: FloatArray
    eclipse_mag: FloatArray

    def ruled_out(self, seen: Variability) -> NDArray[np.bool_]:
        """Return (m, k) whether the light curve's limits, taken to hold at any period, exclude it."""
        out = np.zeros(self.ellipsoidal_mag.shape, dtype=bool)
        if seen.ellipsoidal_max_mag is not None:
            out |= self.ellipsoidal_mag > seen.ellipsoidal_max_mag
        if seen.eclipses == "none" and seen.eclipse_depth_min_mag is not None:
            out |= self.eclipse_mag > seen.eclipse_depth_min_mag
        return out


def inner_light_curve(fit: Fit, rows: Rows, period_d: FloatArray, band: str) -> InnerLightCurve | None:
    """Return the light curve of the pairs of ``rows`` (m,) at inner periods (k,) in ``band``; None for a dark pair.

    The inner orbit is circular and tilted like the outer one.
    """
    sampled = fit.sample(rows.x)
    values, seen = sampled.values, sampled.prediction
    stars = fit.branch.scenario.companion(values["m2_msun"], seen.feh, values).components
    if not stars:
        return None
    engine = LightEngine.build([band], passbands=fit.branch.context.system.passbands)
    first = Component("star", seen.teff_k, seen.logg, seen.feh, values["r1_rsun"])
    # Ratios of light at one distance, behind one dust: both drop out to first order.
    flux = [10.0 ** (-0.4 * engine.magnitudes(star, 10.0, 0.0)[:, 0]) for star in (first, *stars)]
    pairs, total = rows.pairs, sum(flux)
    masses = [pairs.first_msun, pairs.second_msun]
    if len(stars) == 1:
        masses = [pairs.second_msun, pairs.first_msun]
    axis = kepler.separation_rsun((pairs.first_msun + pairs.second_msun)[:, None], period_d)
    sine, wavelength = pairs.sin_inclination[:, None], engine.pivots_angstrom[0] / 10.0
    wave, deepest = np.zeros(axis.shape), np.zeros(axis.shape)
    radii = [star.radius_rsun for star in stars] + [np.zeros(len(rows.x))] * (2 - len(stars))
    for place, star in enumerate(stars):
        own, other = masses[place][:, None], masses[1 - place][:, None]
        share = (flux[place + 1] / total)[:, None]
        darkening = tides.gravity_darkening(star.teff_k, wavelength)[:, None]
        size = star.radius_rsun[:, None] / axis
        wave += share * tides.ellipsoidal_amplitude_mag(other / own, size, sine, darkening)
        apart = axis * np.sqrt(np.maximum(1.0 - sine**2, 0.0))
        hidden = eclipses.covered_fraction(radii[place][:, None], radii[1 - place][:, None], apart)
        deepest = np.maximum(deepest, share * hidden)
    return InnerLightCurve(wave, -2.5 * np.log10(np.maximum(1.0 - deepest, 1e-12)))
