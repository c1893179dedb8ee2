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
from vetter.scenarios.priors import Guide, LogUniform, Parameter, Uniform, to_unit
from vetter.system.model import Measurement, Orbit

FloatArray = NDArray[np.float64]


K1_REACH_SIGMA = 6.0
"""K1 is the premise: it is explored this far and no farther, so that a scenario cannot escape by denying it."""


class VelocityDraw(NamedTuple):
    """K1 of each sample (n,), its mass function, and the heaviest seen star that leaves the companion in range."""

    k1_km_s: FloatArray
    f_msun: FloatArray
    mass_max_msun: FloatArray
    ln_ratio: FloatArray


class CompanionDraw(NamedTuple):
    """Companion mass and geometry of each sample, all (n,)."""

    mass_msun: FloatArray
    cos_inclination: FloatArray
    ln_ratio: FloatArray


@dataclass(frozen=True)
class OrbitDraws:
    """Draws companion masses for one orbit and one range of masses.

    Attributes
    ----------
    orbit : the measured orbit
    k1_error_km_s : error of K1 with those of P and e, 0 when K1 was not measured
    inclination_deg : the measured inclination, from whatever source, or None
    prior : prior of the companion's mass
    """

    orbit: Orbit
    k1_error_km_s: float
    inclination_deg: Measurement | None
    prior: LogUniform | Uniform

    def parameters(self) -> list[Parameter]:
        """Return the two parameters as printed: the companion's mass, and the cosine of the inclination."""
        inclination = Parameter("cos_inclination", "", Uniform(0.0, 1.0), self._inclination_guide())
        return [Parameter("companion_mass_msun", "Msun", self.prior), inclination]

    def velocity(self, x: FloatArray) -> VelocityDraw | None:
        """Return K1 from standard normal deviates (n,), or None when it was not measured."""
        k1 = self.orbit.k1_km_s
        if k1 is None:
            return None
        relative = self.k1_error_km_s / k1.value
        reach = K1_REACH_SIGMA * relative
        guide = Guide(np.log(k1.value), relative, np.log(k1.value) - reach, np.log(k1.value) + reach)
        ln_k1 = guide.from_normal(x)
        f_msun = self.mass_function_msun(np.exp(ln_k1))
        # Edge on, (M1 + M2)^2 = M2^3 / f at the heaviest companion.
        mass_max = np.sqrt(self.prior.high**3 / f_msun) - self.prior.high
        return VelocityDraw(np.exp(ln_k1), f_msun, mass_max, -guide.ln_density(ln_k1))

    def mass_function_msun(self, k1_km_s: FloatArray | float) -> FloatArray:
        """Return the mass function (solar) for values of K1 (km/s)."""
        return kepler.mass_function_msun(self.orbit.period_d.value, k1_km_s, self.orbit.eccentricity.value)

    def companion_from_velocity(
        self, velocity: VelocityDraw, x_inclination: FloatArray, mass_msun: FloatArray
    ) -> CompanionDraw:
        """Return the companion of seen stars of ``mass_msun`` (n,) that makes the drawn K1."""
        f_msun, prior = velocity.f_msun, self.prior
        # Heavier means more face-on: the mass range is a range of cos i.
        cos_high = _cosine(kepler.sin_inclination(f_msun, mass_msun, prior.high))
        cos_low = np.minimum(_cosine(kepler.sin_inclination(f_msun, mass_msun, prior.low)), cos_high * (1.0 - 1e-9))
        cos_i, ln_ratio = self._draw_cosine(x_inclination, cos_low, cos_high)
        companion = kepler.companion_mass_msun(f_msun, mass_msun, np.sqrt(1.0 - cos_i**2))
        companion = np.clip(companion, prior.low, prior.high)
        # d ln K1 / d ln M2 at fixed inclination turns the density of the mass into one of K1.
        slope = 1.0 - 2.0 / 3.0 * companion / (companion + mass_msun)
        return CompanionDraw(companion, cos_i, ln_ratio + prior.ln_density(companion) + np.log(companion / slope))

    def companion_from_prior(self, x_mass: FloatArray, x_inclination: FloatArray) -> CompanionDraw:
        """Return companions drawn from the prior of their mass, for an orbit without K1."""
        companion = self.prior.from_normal(x_mass)
        zero = np.zeros(x_mass.shape)
        cos_i, ln_ratio = self._draw_cosine(x_inclination, zero, zero + 1.0)
        return CompanionDraw(companion, cos_i, ln_ratio)

    def _draw_cosine(self, x: FloatArray, low: FloatArray, high: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Return cos i (n,) between per-sample bounds and ln(isotropic prior / density it was drawn from)."""
        guide = self._inclination_guide()
        if guide is None:
            return low + to_unit(x) * (high - low), np.log(high - low)
        value = guide.from_normal_within(x, low, high)
        return value, -guide.ln_density_within(value, low, high)

    def _inclination_guide(self) -> Guide | None:
        measured = self.inclination_deg
        if measured is None:
            return None
        angle, error = np.radians(measured.value), np.radians(measured.error)
        return Guide(abs(float(np.cos(angle))), float(np.hypot(np.sin(angle) * error, 0.5 * error**2)), 0.0, 1.0)


def _cosine(sine: FloatArray) -> FloatArray:
    """Cosine of an inclination (n,) from its sine, kept just above zero where the sine reaches one."""
    return np.sqrt(np.maximum(1.0 - np.minimum(sine, 1.0) ** 2, 1e-12))
