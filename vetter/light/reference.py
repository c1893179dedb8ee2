"""The readable definition of a star's magnitude, one star at a time: interpolate the spectrum, redden, integrate.

The fast engine must agree with this within 0.003 mag; use it to understand or to check, not to fit.
"""

from __future__ import annotations

import numpy as np

from vetter.light.extinction import extinction_curve
from vetter.light.synthesis import SURFACE_TO_TEN_PC_MAG
from vetter.light.tables import Atmospheres, FloatArray, LightTables


def surface_flux(atmospheres: Atmospheres, teff_k: float, logg: float) -> FloatArray:
    """Return the surface flux F_lambda (nw,) in erg s-1 cm-2 A-1: ln F bilinear in (log Teff, log g).

    Temperature and gravity are clamped to the table; gravity above its end counts as its end.
    """
    t_low, t_share = _between(np.log(atmospheres.teff_k), float(np.log(teff_k)))
    g_low, g_share = _between(atmospheres.logg, logg)
    ln_flux = atmospheres.ln_flux.astype(float)[t_low : t_low + 2, g_low : g_low + 2]
    at_low, at_high = (1.0 - t_share) * ln_flux[0] + t_share * ln_flux[1]
    return np.asarray(np.exp((1.0 - g_share) * at_low + g_share * at_high))


def observed_flux(
    tables: LightTables,
    teff_k: float,
    logg: float,
    radius_rsun: float,
    distance_pc: float,
    a_v_mag: float,
    r_v: float = 3.1,
) -> FloatArray:
    """Return the flux at Earth F_lambda (nw,) in erg s-1 cm-2 A-1 of one star behind dust."""
    wavelength = tables.atmospheres.wavelength_angstrom
    dust_mag = a_v_mag * extinction_curve(tables.dust, wavelength, r_v)
    distance_mag = SURFACE_TO_TEN_PC_MAG + 5.0 * np.log10(distance_pc / 10.0 / radius_rsun)
    dimming = 10.0 ** (-0.4 * (dust_mag + distance_mag))
    return np.asarray(surface_flux(tables.atmospheres, teff_k, logg) * dimming)


def magnitude(tables: LightTables, band: str, flux: FloatArray, system: str | None = None) -> float:
    """Return the magnitude of a spectrum ``flux`` (nw,) at Earth in a built-in band, in ``system`` or its usual one."""
    passband = tables.passbands[band]
    zero_flux = passband.zero_flux[system or passband.usual_system]
    return float(-2.5 * np.log10(passband.weights @ flux / zero_flux))


def _between(nodes: FloatArray, value: float) -> tuple[int, float]:
    """Return the lower node's index and the share of the upper one, clamped to the nodes."""
    low = int(np.clip(np.searchsorted(nodes, value, side="right") - 1, 0, len(nodes) - 2))
    share = (value - nodes[low]) / (nodes[low + 1] - nodes[low])
    return low, float(np.clip(share, 0.0, 1.0))
