"""An outside estimate of the seen star's mass."""

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
class SeenMassObservation(GaussianObservation):
    """Gaussian in the seen star's mass (solar); says nothing where the star is not what it looks like."""

    name: ClassVar[str] = "seen_mass"
    label: ClassVar[str] = "mass estimate"
    rank: ClassVar[int] = 45

    @classmethod
    def from_system(cls, system: System, engine: LightEngine) -> Self | None:
        """Return the observation, or None when no estimate was given."""
        measured = system.primary.mass_msun
        return None if measured is None else cls(measured.value, measured.error)

    def predicted_value(self, predicted: Prediction) -> NDArray[np.float64]:
        """Return the mass in solar masses; the estimate itself for a seen star that is not ordinary (n,)."""
        mass = predicted.mass_msun
        return mass if predicted.ordinary_seen_star else np.full_like(mass, self.value)

    def describe(self) -> str:
        """Return the datum in a few words."""
        return "mass estimate of the seen star"
