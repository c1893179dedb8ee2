"""Magnitudes and limits on magnitudes of everything in the aperture together."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, ClassVar, Self

import numpy as np
from numpy.typing import NDArray

from vetter.observations.base import Observation, gaussian_ln_norm, register, residual_from_ln
from vetter.observations.prediction import Prediction
from vetter.system.model import System

if TYPE_CHECKING:
    from vetter.light.engine import LightEngine

FloatArray = NDArray[np.float64]

CHROMOSPHERE_BELOW_K = 7000.0
"""Below this Teff a star may shine more in the ultraviolet than its photosphere (common practice, no source)."""

ULTRAVIOLET_BELOW_ANGSTROM = 3000.0
"""Pivot wavelength below which a chromosphere counts: GALEX and the three blue bands of Swift."""

INFRARED_FROM_ANGSTROM = 30000.0
"""Pivot wavelength from which gas around a star with emission lines may outshine its surface (common practice, no
source): WISE and Spitzer, not Ks."""


@register
@dataclass(frozen=True)
class PhotometryObservation(Observation):
    """Gaussian in each magnitude, variance = error^2 + model error^2; limits by the Gaussian integral.

    The model error is taken once, at the measured Teff and log g of the seen star, and is then the same for every
    scenario: an error that moved with the parameters would bias the comparison.

    Attributes
    ----------
    index : (k,) column of each measured magnitude among the engine's bands
    mag, sigma_mag : (k,)
    chromospheric, with_excess : (k,) True where the star may be brighter than the model but not fainter: ultraviolet
        of a cool star, and infrared of a star with emission lines
    limit_index, limit_mag : (l,)
    limit_width : (l,) width of the limit as a fraction of the limiting flux
    """

    name: ClassVar[str] = "photometry"
    label: ClassVar[str] = "brightness"
    rank: ClassVar[int] = 10
    index: NDArray[np.intp]
    mag: FloatArray
    sigma_mag: FloatArray
    chromospheric: NDArray[np.bool_]
    with_excess: NDArray[np.bool_]
    limit_index: NDArray[np.intp]
    limit_mag: FloatArray
    limit_width: FloatArray

    @classmethod
    def from_system(cls, system: System, engine: LightEngine) -> Self | None:
        """Return the observation; every system has one."""
        from scipy.special import ndtri

        column = {band: place for place, band in enumerate(engine.bands)}
        model_error = model_errors_mag(system, engine)
        measured, limits = system.magnitudes, system.magnitude_limits
        index = np.array([column[m.band] for m in measured], dtype=np.intp)
        limit_index = np.array([column[m.band] for m in limits], dtype=np.intp)
        error = np.array([m.error_mag for m in measured])
        # One-sided, in units of the limiting flux: the error that makes this confidence, with the model's own error.
        limit_error = np.array([1.0 / ndtri(m.confidence) for m in limits])
        seen, pivot = system.primary, np.array(engine.pivots_angstrom)[index]
        cool = seen.teff_k is not None and seen.teff_k.value < CHROMOSPHERE_BELOW_K
        return cls(
            index,
            np.array([m.mag for m in measured]),
            np.hypot(error, model_error[index]),
            cool & (pivot < ULTRAVIOLET_BELOW_ANGSTROM),
            seen.emission_lines & (pivot >= INFRARED_FROM_ANGSTROM),
            limit_index,
            np.array([m.fainter_than_mag for m in limits]),
            np.hypot(limit_error, 0.4 * np.log(10.0) * model_error[limit_index]),
        )

    @property
    def count(self) -> int:
        """Number of magnitudes and limits."""
        return self.mag.size + self.limit_mag.size

    @property
    def ln_norm(self) -> float:
        """Constant part of the ln likelihood."""
        return gaussian_ln_norm(self.sigma_mag)

    def residuals(self, predicted: Prediction) -> FloatArray:
        """Return (n, k + l); negative where the model is brighter than the measurement."""
        model = predicted.magnitudes
        gaussian = (model[:, self.index] - self.mag) / self.sigma_mag
        gaussian = np.where(self.chromospheric | self.with_excess, np.minimum(gaussian, 0.0), gaussian)
        if self.limit_mag.size == 0:
            return gaussian
        return np.concatenate([gaussian, self._limit_residuals(model[:, self.limit_index])], axis=1)

    def _limit_residuals(self, model_mag: FloatArray) -> FloatArray:
        """Probability that a source this bright is missed, relative to no source at all, as residuals (n, l)."""
        from scipy.special import log_ndtr

        flux = 10.0 ** (0.4 * (self.limit_mag - model_mag))
        missed = log_ndtr((1.0 - flux) / self.limit_width) - log_ndtr(1.0 / self.limit_width)
        return residual_from_ln(missed)

    def describe(self) -> str:
        """Return how many magnitudes and limits there are."""
        words = f"{self.mag.size} magnitudes"
        limits = self.limit_mag.size
        return words if limits == 0 else f"{words}, {limits} magnitude limit{'s' if limits > 1 else ''}"

    def cautions(self, system: System) -> list[str]:
        """Return the cautions for magnitudes that count on one side only, where there are any."""
        said = []
        if self.chromospheric.any():
            said.append(
                "The ultraviolet of a star this cool is partly chromospheric: those magnitudes count only where a "
                "model is brighter than the measurement, so they cannot show a hot companion."
            )
        if self.with_excess.any():
            said.append(
                "The seen star has emission lines: its magnitudes beyond 3 micron count only where a model is brighter "
                "than the measurement, so they cannot show a cool companion."
            )
        return said


def model_errors_mag(system: System, engine: LightEngine) -> FloatArray:
    """Return the model error (bands,) in mag at the seen star's measured Teff, log g and [Fe/H].

    Where Teff was not measured the largest error between 4000 and 10000 K is taken.
    """
    seen = system.primary
    logg = 4.4 if seen.logg is None else seen.logg.value
    feh = 0.0 if seen.feh is None else seen.feh.value
    temperatures = np.linspace(4000.0, 10000.0, 13) if seen.teff_k is None else np.array([seen.teff_k.value])
    errors = [[float(engine.model_error_mag(band, t, logg, feh)) for band in engine.bands] for t in temperatures]
    return np.asarray(np.maximum(np.max(np.array(errors), axis=0), 0.01))
