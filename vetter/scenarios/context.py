"""What every scenario of one system shares: the measurements, the light engine, and the columns it computes."""

from __future__ import annotations

from dataclasses import dataclass

from vetter.light.engine import LightEngine
from vetter.scenarios.priors import Guide, LogUniform, Parameter, SpaceDensity, Uniform
from vetter.system.model import Measurement, System

OPTICAL_WINDOW_NM = (500.0, 600.0)
"""Where "the companion outshines the seen star" and the dilution of its spectrum are judged."""

ASTROMETRY_BAND = "GAIA/GAIA3.G"

FREE_EBV_MAX_MAG = 1.0
"""Range of E(B-V) beside a measured value, so that leaving the measurement out is possible."""

UNKNOWN_EBV_MAX_MAG = 3.0
"""Range of E(B-V) when nothing is known of the dust."""


@dataclass(frozen=True)
class Context:
    """One system ready to be explained.

    Attributes
    ----------
    system : the measurements
    engine : light in every band and window that some observation needs
    """

    system: System
    engine: LightEngine

    @property
    def optical_column(self) -> int:
        """Column of the optical window in the engine's output."""
        return len(self.engine.bands) + self.engine.windows_nm.index(OPTICAL_WINDOW_NM)

    @property
    def photocentre_column(self) -> int | None:
        """Column of the photocentre's band, or None when no photocentre was measured."""
        band = photocentre_band(self.system)
        return None if band is None else self.engine.bands.index(band)

    def shared_parameters(self) -> list[Parameter]:
        """Return distance and dust, the parameters that every scenario has in common beside the seen star's."""
        return [distance_parameter(self.system), dust_parameter(self.system)]


def build_context(system: System, grid: str | None = None) -> Context:
    """Return the context of a system: its bands, windows and range of dust decide the light engine.

    ``grid`` names atmospheres of the user's own. Raises InputError when there are none of that name.
    """
    systems = {m.band: m.system for m in system.magnitudes} | {m.band: m.system for m in system.magnitude_limits}
    others = (photocentre_band(system), *(table.band for table in (system.variability, system.imaging) if table))
    bands = list(dict.fromkeys([*systems, *(band for band in others if band is not None)]))
    windows = list(dict.fromkeys([*(limit.wavelength_nm for limit in system.light_limits), OPTICAL_WINDOW_NM]))
    r_v = 3.1 if system.extinction is None else system.extinction.r_v
    a_v_max_mag = r_v * ebv_max_mag(system)
    engine = LightEngine.build(
        bands, windows, r_v=r_v, a_v_max_mag=a_v_max_mag, systems=systems, passbands=system.passbands, grid=grid
    )
    return Context(system, engine)


def photocentre_band(system: System) -> str | None:
    """Return the band of the astrometry; Thiele-Innes elements without one are taken as those of Gaia's G."""
    if system.orbit.photocentre_band is None and system.orbit.thiele_innes is not None:
        return ASTROMETRY_BAND
    return system.orbit.photocentre_band


def ebv_max_mag(system: System) -> float:
    """Return the largest E(B-V) (mag) that is considered for a system."""
    dust = system.extinction
    if dust is None:
        return UNKNOWN_EBV_MAX_MAG
    if dust.ebv_max_mag is not None:
        return dust.ebv_max_mag
    if dust.ebv_mag is None:
        return UNKNOWN_EBV_MAX_MAG
    return max(FREE_EBV_MAX_MAG, dust.ebv_mag.value + 8.0 * dust.ebv_mag.error)


def dust_parameter(system: System) -> Parameter:
    """Return E(B-V): flat prior, guided by the measured value where there is one."""
    high = ebv_max_mag(system)
    measured = None if system.extinction is None else system.extinction.ebv_mag
    guide = None if measured is None else guided(measured, 0.0, high)
    return Parameter("ebv_mag", "mag", Uniform(0.0, high), guide)


def distance_parameter(system: System) -> Parameter:
    """Return the distance: a space density as prior, guided by the parallax or distance where it is significant."""
    given = system.distance
    prior = SpaceDensity()
    if given.distance_pc is not None:
        return Parameter("distance_pc", "pc", far_enough(given.distance_pc.value), guided(given.distance_pc, 0.1, 1e7))
    parallax = given.parallax_mas
    if parallax is None or parallax.value < 5.0 * parallax.error:
        return Parameter("distance_pc", "pc", prior)
    distance = 1000.0 / parallax.value
    guide = Guide(distance, distance * parallax.error / parallax.value, 0.1, 1e7)
    return Parameter("distance_pc", "pc", far_enough(distance), guide)


def far_enough(distance_pc: float) -> SpaceDensity | LogUniform:
    """Return the space density of the disc, or beyond its reach (20 kpc) a log-uniform prior."""
    return SpaceDensity() if distance_pc < 20000.0 else LogUniform(1000.0, 1e6)


def guided(measured: Measurement, low: float, high: float) -> Guide:
    """Return the guide of a measured quantity within the range of its prior."""
    return Guide(min(max(measured.value, low), high), measured.error, low, high)


def optional_guide(measured: Measurement | None, low: float, high: float, least_scale: float) -> Guide | None:
    """Return the guide of a quantity that may not have been measured, no narrower than ``least_scale``.

    A second light makes a spectrum far less sure than its errors say. A guide as narrow as those would squeeze the
    posterior into two horns in the guide's tails, where no proposal finds both.
    """
    if measured is None:
        return None
    return Guide(min(max(measured.value, low), high), max(measured.error, least_scale), low, high)
