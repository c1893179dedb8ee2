"""Semi-major axis of the orbit of the centre of light on the sky."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, ClassVar, Self

import numpy as np
from numpy.typing import NDArray

from vetter.observations.astrometry import velocity_cautions
from vetter.observations.base import GaussianObservation, register
from vetter.observations.prediction import Prediction
from vetter.system.model import System

if TYPE_CHECKING:
    from vetter.light.engine import LightEngine


@register
@dataclass(frozen=True)
class PhotocentreObservation(GaussianObservation):
    """Gaussian in the photocentre's semi-major axis (mas)."""

    name: ClassVar[str] = "photocentre"
    label: ClassVar[str] = "photocentre"
    rank: ClassVar[int] = 52

    @classmethod
    def from_system(cls, system: System, engine: LightEngine) -> Self | None:
        """Return the observation, or None when it was not given."""
        measured = system.orbit.photocentre_mas
        return None if measured is None else cls(measured.value, measured.error)

    def predicted_value(self, predicted: Prediction) -> NDArray[np.float64]:
        """Return the photocentre's semi-major axis in mas (n,)."""
        return predicted.photocentre_mas

    def cautions(self, system: System) -> list[str]:
        """Return by how much the velocities disagree with this orbit, where they do."""
        return velocity_cautions(system)
