"""Parallax or distance."""

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
class DistanceObservation(GaussianObservation):
    """Gaussian in parallax (mas), or in distance (pc) where that is what was given."""

    name: ClassVar[str] = "distance"
    label: ClassVar[str] = "distance"
    rank: ClassVar[int] = 20
    is_parallax: bool

    @classmethod
    def from_system(cls, system: System, engine: LightEngine) -> Self | None:
        """Return the observation, or None when neither was given."""
        given = system.distance
        if given.parallax_mas is not None:
            return cls(given.parallax_mas.value, given.parallax_mas.error, True)
        return None if given.distance_pc is None else cls(given.distance_pc.value, given.distance_pc.error, False)

    def predicted_value(self, predicted: Prediction) -> NDArray[np.float64]:
        """Return the parallax in mas or the distance in pc (n,)."""
        return 1000.0 / predicted.distance_pc if self.is_parallax else predicted.distance_pc

    def describe(self) -> str:
        """Return the datum in a word."""
        return "parallax" if self.is_parallax else "distance"
