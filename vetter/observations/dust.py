"""Reddening measured from outside, for example from a dust map."""

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
class DustObservation(GaussianObservation):
    """Gaussian in E(B-V) (mag). A flat prior up to a bound is no datum and is left to the prior."""

    name: ClassVar[str] = "dust"
    label: ClassVar[str] = "dust"
    rank: ClassVar[int] = 30

    @classmethod
    def from_system(cls, system: System, engine: LightEngine) -> Self | None:
        """Return the observation, or None when E(B-V) was not measured."""
        dust = system.extinction
        return None if dust is None or dust.ebv_mag is None else cls(dust.ebv_mag.value, dust.ebv_mag.error)

    def predicted_value(self, predicted: Prediction) -> NDArray[np.float64]:
        """Return E(B-V) in mag (n,)."""
        return predicted.ebv_mag
