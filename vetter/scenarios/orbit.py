"""From the orbit to the companion's mass, so that no sample is wasted on a mass the velocities forbid.

K1 is usually known to a per cent or better. Drawing mass and inclination freely would leave a ridge far thinner than
any proposal; instead K1 and the inclination are drawn and the mass follows, with the Jacobian as a weight. The
inclination is drawn only where the mass lies in the scenario's range, which also says when no inclination will do.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from vetter.physics import kepler
from vetter.scenarios.priors import Guide, LogUniform, Parameter, Uniform
from vetter.system.model import Measurement, Orbit

FloatArray = NDArray[np.float64]
BoolArray = NDArray[np.bool_]


class CompanionDraw(NamedTuple):
    """Companion mass and geometry of each sample, all (n,).

    ``closed`` is True where no inclination gives a mass inside the scenario's range; the numbers are then dummies.
    """

    mass_msun: FloatArray
    cos_inclination: FloatArray
    k1_km_s: FloatArray
    ln_ratio: FloatArray
    closed: BoolArray


@dataclass(frozen=True)
class OrbitDraws:
    """Draws companion masses for one orbit.

    Attributes
    ----------
    orbit : the measured orbit
    k1_error_km_s : its error with those of P and e, 0 when K1 was not measured
    inclination_deg : the measured inclination, from whatever source, or None
    """

    orbit: Orbit
    k1_error_km_s: float
    inclination_deg: Measurement | None

    def parameters(self, mass_prior: LogUniform | Uniform) -> list[Parameter]:
        """Return the two parameters as printed: K1 or the mass, and the cosine of the inclination."""
        inclination = Parameter("cos_inclination", "", Uniform(0.0, 1.0), self._inclination_guide())
        return [Parameter("companion_mass_msun", "Msun", mass_prior), inclination]

    def draw(
        self, unit_mass: FloatArray, unit_inclination: FloatArray, mass_msun: FloatArray, prior: LogUniform | Uniform
    ) -> CompanionDraw:
        """Return companion masses (n,) for seen stars of ``mass_msun`` (n,) from two uniform deviates (n,) each."""
        if self.orbit.k1_km_s is None:
            return self._draw_from_prior(unit_mass, unit_inclination, mass_msun, prior)
        return self._draw_from_k1(self.orbit.k1_km_s, unit_mass, unit_inclination, mass_msun, prior)

    def _draw_from_k1(
        self, k1: Measurement, unit_k1: FloatArray, unit_i: FloatArray, mass_msun: FloatArray,
        prior: LogUniform | Uniform,
    ) -> CompanionDraw:
        guide = Guide(np.log(k1.value), self.k1_error_km_s / k1.value, np.log(k1.value) - 8.0, np.log(k1.value) + 8.0)
        ln_k1 = guide.from_unit(unit_k1)
        k1_km_s = np.exp(ln_k1)
        f_msun = kepler.mass_function_msun(self.orbit.period_d.value, k1_km_s, self.orbit.eccentricity.value)
        # Heavier means more face-on: the mass range is a range of cos i, empty where even edge-on needs more.
        cos_low = _cos_inclination(f_msun, mass_msun, prior.low)
        sin_high = kepler.sin_inclination(f_msun, mass_msun, prior.high)
        closed = sin_high >= 1.0
        cos_high = np.where(closed, 1e-6, np.sqrt(np.maximum(1.0 - sin_high**2, 1e-12)))
        cos_low = np.minimum(cos_low, cos_high * (1.0 - 1e-9))
        cos_i, ln_ratio = self._draw_cosine(unit_i, cos_low, cos_high)
        sin_i = np.sqrt(1.0 - cos_i**2)
        companion = kepler.companion_mass_msun(np.where(closed, 0.1 * mass_msun, f_msun), mass_msun, sin_i)
        companion = np.clip(companion, prior.low, prior.high)
        # d ln K1 / d ln M2 at fixed inclination.
        slope = 1.0 - 2.0 / 3.0 * companion / (companion + mass_msun)
        ln_ratio = ln_ratio + prior.ln_density(companion) + np.log(companion / slope) - guide.ln_density(ln_k1)
        return CompanionDraw(companion, cos_i, k1_km_s, np.where(closed, -np.inf, ln_ratio), closed)

    def _draw_from_prior(
        self, unit_mass: FloatArray, unit_i: FloatArray, mass_msun: FloatArray, prior: LogUniform | Uniform
    ) -> CompanionDraw:
        companion = prior.from_unit(unit_mass)
        cos_i, ln_ratio = self._draw_cosine(unit_i, np.zeros(unit_i.shape), np.ones(unit_i.shape))
        k1_km_s = kepler.semi_amplitude_km_s(
            mass_msun, companion, self.orbit.period_d.value, np.sqrt(1.0 - cos_i**2), self.orbit.eccentricity.value
        )
        return CompanionDraw(companion, cos_i, k1_km_s, ln_ratio, np.zeros(unit_mass.shape, dtype=bool))

    def _draw_cosine(self, unit: FloatArray, low: FloatArray, high: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Return cos i (n,) between per-sample bounds and ln(isotropic prior / density it was drawn from)."""
        guide = self._inclination_guide()
        if guide is None:
            return low + unit * (high - low), np.log(high - low)
        value = guide.from_unit_within(unit, low, high)
        return value, -guide.ln_density_within(value, low, high)

    def _inclination_guide(self) -> Guide | None:
        measured = self.inclination_deg
        if measured is None:
            return None
        angle, error = np.radians(measured.value), np.radians(measured.error)
        return Guide(abs(float(np.cos(angle))), float(np.hypot(np.sin(angle) * error, 0.5 * error**2)), 0.0, 1.0)


def _cos_inclination(f_msun: FloatArray, mass_msun: FloatArray, companion_msun: float) -> FloatArray:
    sine = np.minimum(kepler.sin_inclination(f_msun, mass_msun, companion_msun), 1.0)
    return np.sqrt(np.maximum(1.0 - sine**2, 0.0))
