"""Images that would have shown a second source beside the seen star."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, ClassVar, Self

import numpy as np
from numpy.typing import NDArray

from vetter.observations.base import Observation, register, residual_from_ln
from vetter.observations.prediction import Prediction
from vetter.physics import kepler
from vetter.system.model import System

if TYPE_CHECKING:
    from vetter.light.engine import LightEngine

FloatArray = NDArray[np.float64]

CONTRAST_SIGMA = 1.959964
"""The contrast is taken as a 95 % limit on the flux ratio; published curves are often the deeper 5-sigma ones."""

_NODES = 8


@register
@dataclass(frozen=True)
class ImagingObservation(Observation):
    """Half-Gaussian in the flux ratio where the source is resolved; a source closer or farther out is not looked for.

    The separation on the sky is that of a random moment of the orbit, or of a star free of it. For a close binary it
    is far below what any image resolves, and the term is then exactly zero.

    Attributes
    ----------
    column : of the images' band among the engine's bands
    separation_mas, contrast_mag : (k,) the curve, linear between its points
    eccentricity : of the orbit
    """

    name: ClassVar[str] = "imaging"
    label: ClassVar[str] = "imaging"
    rank: ClassVar[int] = 75
    column: int
    separation_mas: FloatArray
    contrast_mag: FloatArray
    eccentricity: float

    @classmethod
    def from_system(cls, system: System, engine: LightEngine) -> Self | None:
        """Return the observation, or None when no contrast curve was given."""
        given = system.imaging
        if given is None:
            return None
        curve = (np.array(given.separation_mas), np.array(given.contrast_mag))
        return cls(engine.bands.index(given.band), *curve, system.orbit.eccentricity.value)

    @property
    def count(self) -> int:
        """One limit."""
        return 1

    def residuals(self, predicted: Prediction) -> FloatArray:
        """Return (n, 1)."""
        ratio = predicted.band_ratio[:, self.column]
        if predicted.unrelated_mas is not None:
            return self._unseen(ratio[:, None], predicted.unrelated_mas[:, None])
        found = np.zeros((ratio.size, 1))
        widest = _separation_mas(predicted) * (1.0 + self.eccentricity)
        rows = np.flatnonzero((widest >= self.separation_mas[0]) & (ratio > 0.0))
        if rows.size:
            found[rows] = self._unseen(ratio[rows][:, None], self._moments_mas(predicted, rows))
        return found

    def describe(self) -> str:
        """Return the datum in a few words."""
        return "imaging"

    def _unseen(self, ratio: FloatArray, separation_mas: FloatArray) -> FloatArray:
        """Residuals (n, 1) of the mean chance, over moments (n, m), that this flux ratio (n, 1) was missed."""
        contrast = np.interp(separation_mas, self.separation_mas, self.contrast_mag)
        looked_for = (separation_mas >= self.separation_mas[0]) & (separation_mas <= self.separation_mas[-1])
        sigmas = np.where(looked_for, CONTRAST_SIGMA * ratio * 10.0 ** (0.4 * contrast), 0.0)
        # Where no moment escapes, the mean underflows; the most favourable moment stands for it.
        least = np.min(sigmas, axis=1, keepdims=True)
        mean = np.mean(np.exp(-0.5 * (sigmas**2 - least**2)), axis=1, keepdims=True)
        return residual_from_ln(np.log(mean) - 0.5 * least**2)

    def _moments_mas(self, predicted: Prediction, rows: NDArray[np.intp]) -> FloatArray:
        """Separations (len(rows), m) on the sky at moments spread evenly in time and argument of periastron."""
        even = (np.arange(_NODES) + 0.5) / _NODES
        anomaly = kepler.eccentric_anomaly(np.pi * even, self.eccentricity)
        distance = np.unique(1.0 - self.eccentricity * np.cos(anomaly))
        cosine = np.cos(np.radians(predicted.inclination_deg[rows]))[:, None]
        angle = 0.5 * np.pi * even
        flattened = np.sqrt(np.cos(angle) ** 2 + (np.sin(angle) * cosine) ** 2)
        return np.asarray(
            (_separation_mas(predicted)[rows][:, None, None] * flattened[:, :, None] * distance).reshape(rows.size, -1)
        )


def _separation_mas(predicted: Prediction) -> FloatArray:
    """Semi-major axis (n,) of the relative orbit on the sky."""
    au = predicted.separation_rsun * (kepler.R_SUN_KM / kepler.AU_KM)
    return np.asarray(1000.0 * au / predicted.distance_pc)
