"""Inclination of the orbit measured from outside (light curve or astrometry)."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, ClassVar, Self

import numpy as np
from numpy.typing import NDArray

from vetter.observations.base import GaussianObservation, register
from vetter.observations.prediction import Prediction
from vetter.system.model import System

if TYPE_CHECKING:
    from vetter.light.engine import LightEngine


@register
@dataclass(frozen=True)
class InclinationObservation(GaussianObservation):
    """Gaussian in the inclination folded into 0-90 degrees: velocities do not tell which way the orbit turns."""

    name: ClassVar[str] = "inclination"
    label: ClassVar[str] = "inclination"
    rank: ClassVar[int] = 51

    @classmethod
    def from_system(cls, system: System, engine: LightEngine) -> Self | None:
        """Return the observation, or None when no inclination was given."""
        measured = system.orbit.inclination_deg
        return None if measured is None else cls(min(measured.value, 180.0 - measured.value), measured.error)

    def predicted_value(self, predicted: Prediction) -> NDArray[np.float64]:
        """Return the inclination in degrees (n,)."""
        return predicted.inclination_deg
