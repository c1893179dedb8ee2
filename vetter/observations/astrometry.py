"""Thiele-Innes elements of the photocentre's orbit, with their full covariance."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, ClassVar, Self

import numpy as np
from numpy.typing import NDArray

from vetter.observations.base import Observation, register
from vetter.observations.prediction import Prediction
from vetter.physics import kepler, thiele_innes
from vetter.system.model import Measurement, Orbit, System

if TYPE_CHECKING:
    from vetter.light.engine import LightEngine

FloatArray = NDArray[np.float64]


@register
@dataclass(frozen=True)
class AstrometryObservation(Observation):
    """Semi-major axis (mas) and inclination (degrees, folded into 0-90) as a two-dimensional Gaussian.

    The node and the argument of periastron carry no mass and are marginalised, to first order in the covariance.

    Attributes
    ----------
    centre : (2,) semi-major axis and inclination
    covariance : (2, 2) in mas and degrees
    """

    name: ClassVar[str] = "astrometry"
    label: ClassVar[str] = "astrometry"
    rank: ClassVar[int] = 53
    centre: FloatArray
    covariance: FloatArray

    @classmethod
    def from_system(cls, system: System, engine: LightEngine) -> Self | None:
        """Return the observation, or None when no Thiele-Innes elements were given."""
        found = axis_and_inclination(system.orbit)
        return None if found is None else cls(*found)

    @property
    def count(self) -> int:
        """Number of measured values that carry mass."""
        return 2

    @property
    def ln_norm(self) -> float:
        """Constant part of the ln likelihood."""
        return float(-0.5 * np.linalg.slogdet(self.covariance)[1] - np.log(2.0 * np.pi))

    def residuals(self, predicted: Prediction) -> FloatArray:
        """Return (n, 2), whitened by the Cholesky factor of the covariance."""
        offset = np.stack([predicted.photocentre_mas, predicted.inclination_deg], axis=1) - self.centre
        return np.asarray(np.linalg.solve(np.linalg.cholesky(self.covariance), offset.T).T)

    def cautions(self, system: System) -> list[str]:
        """Return by how much the velocities disagree with this orbit, where they do."""
        return velocity_cautions(system)


CAUTION_SIGMA = 3.0


def predicted_k1_km_s(system: System) -> Measurement | None:
    """Return the K1 that the astrometric orbit alone predicts for a companion that gives no light; None without one.

    2 pi (a0 / parallax) sin i / (P sqrt(1 - e^2)), errors to first order, with the covariance of a0 and i. The
    parallax has had its zero point subtracted. A companion that shines makes the true K1 larger than this.
    """
    found = _axis_inclination_distance(system)
    if found is None:
        return None
    (a_mas, inclination_deg), covariance, distance_pc = found
    orbit = system.orbit
    period, e, i = orbit.period_d, orbit.eccentricity, np.radians(inclination_deg)
    speed = 2.0 * np.pi * kepler.AU_KM / (period.value * kepler.DAY_S)
    k1 = a_mas * 1e-3 * distance_pc.value * speed * np.sin(i) / np.sqrt(1.0 - e.value**2)
    slope = np.array([1.0 / a_mas, np.radians(1.0) / np.tan(i)])
    variance = slope @ covariance @ slope + (distance_pc.error / distance_pc.value) ** 2
    variance += (period.error / period.value) ** 2 + (e.value * e.error / (1.0 - e.value**2)) ** 2
    return Measurement(float(k1), float(k1 * np.sqrt(variance)))


def velocity_cautions(system: System) -> list[str]:
    """Return a caution where K1 of the astrometric orbit and the measured K1 differ by more than three sigma."""
    measured, predicted = system.orbit.k1_km_s, predicted_k1_km_s(system)
    if measured is None or predicted is None:
        return []
    sigma = (predicted.value - measured.value) / float(np.hypot(predicted.error, measured.error))
    if abs(sigma) < CAUTION_SIGMA:
        return []
    reason = (
        "light of the companion would only make it smaller: one of the two orbits is wrong"
        if sigma > 0.0
        else "the companion gives light in that band, or one of the two orbits is wrong"
    )
    return [
        f"The astrometric orbit with a dark companion predicts K1 = {predicted.value:.4g} +- {predicted.error:.2g} "
        f"km/s, the velocities say {measured.value:.4g} +- {measured.error:.2g} ({abs(sigma):.1f} sigma apart): "
        f"{reason}."
    ]


def _axis_inclination_distance(system: System) -> tuple[FloatArray, FloatArray, Measurement] | None:
    """Return (a0 in mas, inclination in deg), their covariance, and the distance; None where one is missing."""
    orbit, given = system.orbit, system.distance
    found = axis_and_inclination(orbit)
    if found is None:
        if orbit.photocentre_mas is None or orbit.inclination_deg is None:
            return None
        axis, tilt = orbit.photocentre_mas, orbit.inclination_deg
        found = np.array([axis.value, tilt.value]), np.diag([axis.error**2, tilt.error**2])
    if given.distance_pc is not None:
        return *found, given.distance_pc
    parallax = given.parallax_mas
    if parallax is None or parallax.value <= 0.0 or not 0.0 < found[0][1] < 180.0:
        return None
    distance_pc = 1000.0 / parallax.value
    return *found, Measurement(distance_pc, distance_pc * parallax.error / parallax.value)


def axis_and_inclination(orbit: Orbit) -> tuple[FloatArray, FloatArray] | None:
    """Return semi-major axis (mas) and folded inclination (deg), (2,), and their covariance; None when not measured."""
    elements = orbit.thiele_innes
    if elements is None:
        return None
    geometric, covariance = thiele_innes.propagate_covariance(
        elements.a_mas, elements.b_mas, elements.f_mas, elements.g_mas, np.array(elements.covariance)
    )
    inclination, flip = float(geometric.inclination_deg), 1.0
    if inclination > 90.0:
        inclination, flip = 180.0 - inclination, -1.0
    sign = np.array([1.0, flip])
    return np.array([float(geometric.a_mas), inclination]), covariance[:2, :2] * np.outer(sign, sign)


def measured_inclination(orbit: Orbit) -> Measurement | None:
    """Return the inclination (deg) however it was measured, or None."""
    if orbit.inclination_deg is not None:
        return orbit.inclination_deg
    found = axis_and_inclination(orbit)
    return None if found is None else Measurement(float(found[0][1]), float(np.sqrt(found[1][1, 1])))
