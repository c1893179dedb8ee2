"""The seen star's velocity semi-amplitude: the premise of the question."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, ClassVar, Self

import numpy as np
from numpy.typing import NDArray

from vetter.observations.base import GaussianObservation, register
from vetter.observations.prediction import Prediction
from vetter.system.model import Orbit, System

if TYPE_CHECKING:
    from vetter.light.engine import LightEngine


@register
@dataclass(frozen=True)
class OrbitObservation(GaussianObservation):
    """Gaussian in K1 (km/s); the errors of period and eccentricity are carried into it.

    Never left out: without it there is no unseen mass to explain.
    """

    name: ClassVar[str] = "orbit"
    label: ClassVar[str] = "orbit"
    rank: ClassVar[int] = 50
    droppable: ClassVar[bool] = False

    @classmethod
    def from_system(cls, system: System, engine: LightEngine) -> Self | None:
        """Return the observation, or None when no K1 was given."""
        measured = system.orbit.k1_km_s
        return None if measured is None else cls(measured.value, k1_error_km_s(system.orbit))

    def predicted_value(self, predicted: Prediction) -> NDArray[np.float64]:
        """Return K1 in km/s (n,)."""
        return predicted.k1_km_s


def k1_error_km_s(orbit: Orbit) -> float:
    """Return the error of K1 with those of P and e added in quadrature through K1 ~ P^(-1/3) (1 - e^2)^(-1/2).

    Raises ValueError when K1 was not measured.
    """
    if orbit.k1_km_s is None:
        raise ValueError("the orbit has no K1")
    k1, period, e = orbit.k1_km_s, orbit.period_d, orbit.eccentricity
    from_period = k1.value * period.error / (3.0 * period.value)
    from_eccentricity = k1.value * e.value * e.error / (1.0 - e.value**2)
    return float(np.sqrt(k1.error**2 + from_period**2 + from_eccentricity**2))
