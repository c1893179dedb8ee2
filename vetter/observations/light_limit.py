"""Limits on a second set of lines in the spectrum."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, ClassVar, Self

import numpy as np
from numpy.typing import NDArray

from vetter.observations.base import Observation, register, residual_from_ln
from vetter.observations.prediction import Prediction
from vetter.system.model import LightLimit, System

if TYPE_CHECKING:
    from vetter.light.engine import LightEngine

FloatArray = NDArray[np.float64]

KRAFT_BREAK_K = 6200.0
"""Cooler stars have been braked by their winds (Kraft 1967, ApJ 150, 551)."""

KRAFT_WIDTH_K = 150.0
"""How sharp the break is taken to be (judgement)."""

HOT_STAR_MEAN_ROTATION_KM_S = 150.0
"""Mean equatorial velocity of the Maxwellian for stars above the break (Zorec & Royer 2012, A&A 537, A120: 100-200)."""


@register
@dataclass(frozen=True)
class LightLimitObservation(Observation):
    """Half-Gaussian in the flux ratio of each window, times the chance that the search would have seen that star.

    exp(-r^2 / 2 s^2) with s = limit / z(confidence), z two-sided. A companion outside the templates' range of Teff,
    or rotating too fast for the search, escapes: it then counts as not looked for.
    """

    name: ClassVar[str] = "light_limit"
    label: ClassVar[str] = "light limit"
    rank: ClassVar[int] = 60
    limits: tuple[LightLimit, ...]
    index: tuple[int, ...]

    @classmethod
    def from_system(cls, system: System, engine: LightEngine) -> Self | None:
        """Return the observation, or None when no limit was given."""
        if not system.light_limits:
            return None
        index = tuple(engine.windows_nm.index(limit.wavelength_nm) for limit in system.light_limits)
        return cls(system.light_limits, index)

    @property
    def count(self) -> int:
        """Number of limits."""
        return len(self.limits)

    def residuals(self, predicted: Prediction) -> FloatArray:
        """Return (n, k), one column per limit."""
        from scipy.special import ndtri

        columns = []
        for limit, place in zip(self.limits, self.index, strict=True):
            width = limit.ratio_max / ndtri(0.5 * (1.0 + limit.confidence))
            seen = np.exp(-0.5 * (predicted.window_ratio[:, place] / width) ** 2)
            applied = search_applied(limit, predicted.companion_teff_k)
            with np.errstate(divide="ignore"):
                mixed = np.log(applied * seen + (1.0 - applied))
            plain = -0.5 * (predicted.window_ratio[:, place] / width) ** 2
            columns.append(residual_from_ln(np.where(applied >= 1.0, plain, np.maximum(mixed, plain))))
        return np.stack(columns, axis=1)

    def describe(self) -> str:
        """Return how many limits there are."""
        return f"{len(self.limits)} light limit{'s' if len(self.limits) > 1 else ''}"


def search_applied(limit: LightLimit, companion_teff_k: FloatArray) -> FloatArray:
    """Return the probability (n,) that the search would have noticed a star of this Teff at all.

    Above the Kraft break the projected velocity is Maxwellian times an isotropic sin i, below it slow.
    """
    teff = np.nan_to_num(companion_teff_k, nan=KRAFT_BREAK_K)
    applied = np.ones(teff.shape)
    if limit.vsini_max_km_s is not None:
        fast = 1.0 / (1.0 + np.exp(-np.clip((teff - KRAFT_BREAK_K) / KRAFT_WIDTH_K, -50.0, 50.0)))
        applied = 1.0 - fast * (1.0 - slow_fraction(limit.vsini_max_km_s))
    if limit.teff_range_k is not None:
        low, high = limit.teff_range_k
        applied = np.where((teff >= low) & (teff <= high), applied, 0.0)
    return applied


def slow_fraction(vsini_max_km_s: float) -> float:
    """Return the fraction of hot stars with v sin i below the given value (km/s, > 0).

    For a Maxwellian of velocities seen at random angles the projected velocity is Rayleigh distributed with the same
    scale: two of three isotropic Gaussian components remain (Deutsch 1970, in Stellar Rotation, ed. Slettebak, 207).
    """
    scale = HOT_STAR_MEAN_ROTATION_KM_S / (2.0 * np.sqrt(2.0 / np.pi))
    return float(1.0 - np.exp(-0.5 * (vsini_max_km_s / scale) ** 2))
