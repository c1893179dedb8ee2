"""Epoch velocities: the orbit they give when the file gives no K1, and what their residuals say of an inner pair."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, ClassVar, NamedTuple, Self

import numpy as np
from numpy.typing import ArrayLike, NDArray

from vetter.errors import InputError
from vetter.observations.base import Observation, gaussian_ln_norm, register
from vetter.observations.orbit import k1_error_km_s
from vetter.observations.prediction import Prediction
from vetter.physics.keplerian_fit import SECURE_LN_RATIO, KeplerianFit, fit_velocities
from vetter.physics.keplerian_search import Mode, find_modes, search_periods
from vetter.physics.triples import InnerPairSignal, inner_pair_signal
from vetter.physics.velocity_model import EpochData, epoch_data
from vetter.physics.velocity_residuals import ResidualSearch, k1_at_fixed_shape, residual_search
from vetter.system.epochs import ENOUGH_WORDS, enough_epochs
from vetter.system.model import Measurement, Orbit, System, Velocities

if TYPE_CHECKING:
    from vetter.light.engine import LightEngine

FloatArray = NDArray[np.float64]

ASSUMED_ECCENTRICITY_ERROR = 1e-3
"""An eccentricity given without error is held to this."""

CAUTION_SIGMA = 3.0


@register
@dataclass(frozen=True)
class VelocitiesObservation(Observation):
    """Residuals of the epochs about the orbit, with the wave that an inner pair would add.

    K1 itself is in the orbit term. A scenario without an inner pair predicts no wave; all such scenarios are treated
    alike. The jitter is that of the best orbit and is then held.

    Attributes
    ----------
    search : the residuals, whitened
    modes : the best orbit, then its rivals
    data : the epochs
    """

    name: ClassVar[str] = "velocities"
    label: ClassVar[str] = "velocities"
    rank: ClassVar[int] = 54
    search: ResidualSearch
    modes: tuple[Mode, ...]
    data: EpochData

    @classmethod
    def from_system(cls, system: System, engine: LightEngine) -> Self | None:
        """Return the observation, or None without epochs, or with too few of them to fit an orbit."""
        velocities = system.velocities
        if velocities is None or not enough_epochs(velocities):
            return None
        data = _epochs(velocities)
        modes = tuple(find_modes(data, search_periods(data, *_constraints(system.orbit))))
        return cls(residual_search(data, modes[0]), modes, data)

    @property
    def count(self) -> int:
        """Epochs minus what the orbit takes."""
        return self.search.degrees_of_freedom

    @property
    def ln_norm(self) -> float:
        """Constant part of the ln likelihood; the same for every scenario."""
        return gaussian_ln_norm(1.0 / self.search.sqrt_weight)

    def residuals(self, predicted: Prediction) -> FloatArray:
        """Return (n, 1): the root of the sum of squares, the phase of the wave integrated out."""
        signal = inner_signal(predicted, float(np.exp(self.modes[0].point[0])))
        if signal is None:
            return np.full((predicted.k1_km_s.size, 1), np.sqrt(self.search.chi2))
        return self.residuals_with_wave(signal.first_km_s, signal.first_per_d)

    def residuals_with_wave(self, amplitude_km_s: FloatArray, frequency_per_d: FloatArray) -> FloatArray:
        """Return (n, 1) for waves of these amplitudes and frequencies (turns per day), both (n,)."""
        ln_ratio = self.search.ln_likelihood_ratio(amplitude_km_s, frequency_per_d)
        return np.sqrt(np.maximum(self.search.chi2 - 2.0 * ln_ratio, 0.0))[:, None]

    def describe(self) -> str:
        """Return how many epochs there are."""
        return f"{self.data.count} epoch velocities"

    def cautions(self, system: System) -> list[str]:
        """Return what does not fit between the epochs and the orbit, and among the epochs."""
        return [*_about_k1(self, system.orbit), *_about_periods(self.modes, self.data), *_about_jitter(self)]


class InnerSignalLimit(NamedTuple):
    """Limit on the velocity wave of an inner pair: its frequency (1/d) and largest amplitude (km/s), both (n,)."""

    frequency_per_d: FloatArray
    amplitude_max_km_s: FloatArray


def inner_signal(predicted: Prediction, period_d: float) -> InnerPairSignal | None:
    """Return the waves (n,) that a hidden pair adds to the seen star's velocity in an orbit of ``period_d``; else None.

    Both orbits taken as circular and in one plane.
    """
    inner = predicted.inner
    if inner is None:
        return None
    sine = np.sin(np.radians(predicted.inclination_deg))
    return inner_pair_signal(inner.first_msun, inner.second_msun, predicted.mass_msun, inner.period_d, period_d, sine)


def inner_signal_limit(
    velocities: Velocities, orbit: Orbit, inner_period_d: ArrayLike, confidence: float = 0.95
) -> InnerSignalLimit:
    """Return the largest wave that the epochs leave room for at twice the inner orbit's frequency.

    ``inner_period_d`` is (n,). The line is that of :func:`vetter.physics.triples.inner_pair_signal` at
    2/P_in - 3/P_out, the strongest of a circular pair in one plane. Infinite where the epochs say nothing. ValueError
    for too few epochs.
    """
    if not enough_epochs(velocities):
        raise ValueError(f"{len(velocities.time_bjd)} epochs are too few to fit an orbit")
    data = _epochs(velocities)
    best = find_modes(data, search_periods(data, *_constraints(orbit)))[0]
    frequency = 2.0 / np.atleast_1d(np.asarray(inner_period_d, dtype=float)) - 3.0 * float(np.exp(-best.point[0]))
    return InnerSignalLimit(frequency, residual_search(data, best).amplitude_limit_km_s(frequency, confidence))


def fit_epochs(velocities: Velocities, orbit: Orbit, seed: int = 0) -> KeplerianFit:
    """Return the fit of the epochs, with the file's period and eccentricity as measurements where they have errors."""
    period, eccentricity = _constraints(orbit)
    return fit_velocities(
        velocities.time_bjd,
        velocities.rv_km_s,
        velocities.rv_error_km_s,
        velocities.instrument,
        period,
        eccentricity,
        seed,
    )


def orbit_with_velocities(system: System) -> System:
    """Return the system with K1, eccentricity and period from its epochs, where the file gives no K1 or no period.

    Otherwise the system itself. The errors of period and eccentricity come out as zero and that of K1 stands for
    all three: K1 and e are correlated, and so the mass function keeps its right width. The file's period and
    eccentricity count as measurements; where they come from the same epochs, their errors are too small by up to
    sqrt 2. A K1 of the file is kept. InputError where the epochs are too few and nothing else weighs the companion.
    """
    orbit, velocities = system.orbit, system.velocities
    if velocities is None or not (orbit.k1_km_s is None or math.isnan(orbit.period_d.value)):
        return system
    if not enough_epochs(velocities):
        if orbit.period_given and (orbit.photocentre_mas is not None or orbit.thiele_innes is not None):
            return system
        mend = "Add epochs, or give k1_km_s and period_d of your own fit."
        raise InputError.single(system.source, "velocities.file", velocities.file, ENOUGH_WORDS, mend)
    fit = fit_epochs(velocities, orbit)
    fitted = replace(
        orbit,
        period_d=Measurement(fit.value("period_d"), 0.0),
        eccentricity=Measurement(fit.value("eccentricity"), 0.0),
        eccentricity_given=True,
        k1_km_s=orbit.k1_km_s or Measurement(*fit.k1_at_fixed_shape()),
    )
    return replace(system, orbit=fitted)


def epoch_cautions(system: System) -> list[str]:
    """Return a caution on a period that only the epochs tell, or on epochs too few to tell anything."""
    velocities = system.velocities
    if velocities is not None and not enough_epochs(velocities):
        return [f"The {len(velocities.time_bjd)} epoch velocities were not used: an orbit needs {ENOUGH_WORDS}."]
    if not system.orbit.period_given:
        return [f"No period was given: {system.orbit.period_d.value:.6g} d is that of the best orbit of the epochs."]
    return []


def _epochs(velocities: Velocities) -> EpochData:
    return epoch_data(velocities.time_bjd, velocities.rv_km_s, velocities.rv_error_km_s, velocities.instrument)


def _constraints(orbit: Orbit) -> tuple[Measurement | float | None, Measurement | None]:
    """Return period and eccentricity as the fit takes them: an error of zero means that none was given.

    A period that the file does not give is searched for every time, so that its rivals can be named.
    """
    period: Measurement | float | None = orbit.period_d if orbit.period_d.error > 0.0 else orbit.period_d.value
    if not orbit.period_given:
        period = None
    if not orbit.eccentricity_given:
        return period, None
    return period, Measurement(orbit.eccentricity.value, max(orbit.eccentricity.error, ASSUMED_ECCENTRICITY_ERROR))


def _about_k1(seen: VelocitiesObservation, orbit: Orbit) -> list[str]:
    """The file's K1 against that of the epochs."""
    if orbit.k1_km_s is None:
        return []
    fitted = Measurement(*k1_at_fixed_shape(seen.data, seen.modes[0]))
    given, error = orbit.k1_km_s.value, k1_error_km_s(orbit)
    sigma = abs(given - fitted.value) / float(np.hypot(error, fitted.error))
    if sigma < CAUTION_SIGMA:
        return []
    return [
        f"The epoch velocities give K1 = {fitted.value:.4g} +- {fitted.error:.2g} km/s, {sigma:.1f} sigma from the "
        f"{given:.4g} +- {error:.2g} km/s of the file, which is the one used."
    ]


def _about_periods(modes: tuple[Mode, ...], data: EpochData) -> list[str]:
    best = modes[0]
    for mode in modes[1:]:
        cycles = abs(np.exp(-mode.point[0]) - np.exp(-best.point[0])) * data.baseline_d
        if cycles > 1.0 and best.ln_value - mode.ln_value < SECURE_LN_RATIO:
            return [
                f"The epoch velocities fit a period of {np.exp(mode.point[0]):.6g} d nearly as well as the "
                f"{np.exp(best.point[0]):.6g} d that is used."
            ]
    return []


def _about_jitter(seen: VelocitiesObservation) -> list[str]:
    jitter, error = float(np.exp(seen.modes[0].point[3])), float(np.median(seen.data.error_km_s))
    if jitter < 2.0 * error:
        return []
    return [
        f"The epoch velocities scatter by {jitter:.2g} km/s about the best orbit beyond their errors of {error:.2g} "
        "km/s: activity, an inner pair, or a wrong period."
    ]
