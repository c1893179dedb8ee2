"""Thiele-Innes elements of the photocentre's orbit, with their full covariance."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, ClassVar, Self

import numpy as np
from numpy.typing import NDArray

from vetter.observations.base import Observation, register
from vetter.observations.prediction import Prediction
from vetter.physics import thiele_innes
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
