"""Teff, log g and [Fe/H] of the seen star from its spectrum."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, ClassVar, Self

import numpy as np
from numpy.typing import NDArray

from vetter.observations.base import Observation, gaussian_ln_norm, register
from vetter.observations.prediction import Prediction
from vetter.system.model import Measurement, System

if TYPE_CHECKING:
    from vetter.light.engine import LightEngine

FloatArray = NDArray[np.float64]

DILUTION_FROM = 0.10
"""Second light above this fraction of the seen star's makes an analysis as a single star unsafe."""


@register
@dataclass(frozen=True)
class SpectroscopyObservation(Observation):
    """Gaussian in each given quantity; less sure where a second star adds more than a tenth of the light.

    A blended spectrum analysed as one star gives something between the two stars. The error therefore grows by
    (share of the second light beyond a tenth) x (difference between the stars), in quadrature (judgement; no published
    relation). The best fit is not charged the ln normalisation of the grown error: doing so was tried, and put 4.1
    sigma against the true bright companion of AI Phe, whose published Teff and log g are exact because both spectra
    were told apart. The evidence is: without it a compact stripped companion, whose Teff is far from any seen star's,
    beat the true stars of YZ Cas and V2365 Oph by ln B 5.7 and 4.9.
    """

    name: ClassVar[str] = "spectroscopy"
    label: ClassVar[str] = "spectrum"
    rank: ClassVar[int] = 40
    teff_k: Measurement | None
    logg: Measurement | None
    feh: Measurement | None

    @classmethod
    def from_system(cls, system: System, engine: LightEngine) -> Self | None:
        """Return the observation, or None when no quantity was given."""
        seen = system.primary
        if seen.teff_k is None and seen.logg is None and seen.feh is None:
            return None
        return cls(seen.teff_k, seen.logg, seen.feh)

    @property
    def count(self) -> int:
        """Number of measured values."""
        return len(self._given())

    @property
    def ln_norm(self) -> float:
        """Constant part of the ln likelihood."""
        return gaussian_ln_norm([measured.error for measured in self._given()])

    def residuals(self, predicted: Prediction) -> FloatArray:
        """Return (n, k), one column per given quantity."""
        return np.stack([(value - measured.value) / error for measured, value, error in self._terms(predicted)], axis=1)

    def ln_narrowing(self, predicted: Prediction) -> FloatArray:
        """Return ln(quoted error / grown error) (n,), summed over the given quantities."""
        narrowing = [np.log(measured.error / error) for measured, _, error in self._terms(predicted)]
        return np.asarray(np.sum(narrowing, axis=0))

    def _terms(self, predicted: Prediction) -> list[tuple[Measurement, FloatArray, FloatArray]]:
        """Each given quantity with its prediction (n,) and the error (n,) that the second light leaves."""
        share = second_light_share(predicted.optical_ratio)
        terms: list[tuple[Measurement, FloatArray, FloatArray]] = []
        for measured, value, second in (
            (self.teff_k, predicted.teff_k, predicted.companion_teff_k),
            (self.logg, predicted.logg, predicted.companion_logg),
            (self.feh, predicted.feh, predicted.feh),
        ):
            if measured is not None:
                bias = np.where(share > 0.0, share * np.abs(np.nan_to_num(second - value)), 0.0)
                terms.append((measured, value, np.hypot(measured.error, bias)))
        return terms

    def describe(self) -> str:
        """Return the datum in a word."""
        return "spectrum"

    def _given(self) -> list[Measurement]:
        return [measured for measured in (self.teff_k, self.logg, self.feh) if measured is not None]


def second_light_share(optical_ratio: FloatArray) -> FloatArray:
    """Return the companion's share of the light (n,) beyond what a tenth of the seen star's light would give."""
    ratio = np.nan_to_num(optical_ratio)
    return np.maximum(ratio / (1.0 + ratio) - DILUTION_FROM / (1.0 + DILUTION_FROM), 0.0)
