"""Prior densities, and the guide densities that put samples where the data will want them.

A parameter is drawn from its *guide* and carries ln(prior / guide) along, so a guide changes the work, never the
answer. Without a guide it is drawn from the prior itself.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Protocol

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]


SMALLEST_UNIT = 1e-15
"""Uniform deviates are kept this far from 0 and 1, where their rounding begins to show."""


def to_unit(x: FloatArray) -> FloatArray:
    """Return uniform deviates (n,) in (0, 1) from standard normal ones."""
    from scipy.special import ndtr

    return np.asarray(np.clip(ndtr(x), SMALLEST_UNIT, 1.0 - SMALLEST_UNIT))


class Prior(Protocol):
    """A one-dimensional density that can be drawn from and printed."""

    def from_normal(self, x: FloatArray) -> FloatArray:
        """Return values from standard normal deviates."""
        ...

    def ln_density(self, value: FloatArray) -> FloatArray:
        """Return ln density at ``value``; -inf outside the range."""
        ...

    def describe(self, unit: str) -> str:
        """Return the prior in words, with the unit of the parameter."""
        ...


@dataclass(frozen=True)
class Uniform:
    """Constant density between ``low`` and ``high``."""

    low: float
    high: float

    def from_normal(self, x: FloatArray) -> FloatArray:
        """Return values from standard normal deviates."""
        return self.low + to_unit(x) * (self.high - self.low)

    def ln_density(self, value: FloatArray) -> FloatArray:
        """Return ln density at ``value``; -inf outside the range."""
        inside = (value >= self.low) & (value <= self.high)
        return np.where(inside, -np.log(self.high - self.low), -np.inf)

    def describe(self, unit: str) -> str:
        """Return the prior in words."""
        return f"uniform {self.low:g} to {self.high:g} {unit}".strip()


@dataclass(frozen=True)
class LogUniform:
    """Constant density in the logarithm between ``low`` > 0 and ``high``."""

    low: float
    high: float

    def from_normal(self, x: FloatArray) -> FloatArray:
        """Return values from standard normal deviates."""
        return np.asarray(self.low * (self.high / self.low) ** to_unit(x))

    def ln_density(self, value: FloatArray) -> FloatArray:
        """Return ln density (per unit of the value itself) at ``value``; -inf outside the range."""
        inside = (value >= self.low) & (value <= self.high)
        safe = np.where(inside, value, self.low)
        return np.where(inside, -np.log(safe) - np.log(np.log(self.high / self.low)), -np.inf)

    def describe(self, unit: str) -> str:
        """Return the prior in words."""
        return f"log-uniform {self.low:g} to {self.high:g} {unit}".strip()


@dataclass(frozen=True)
class Normal:
    """Gaussian with ``mean`` and standard deviation ``sigma``."""

    mean: float
    sigma: float

    def from_normal(self, x: FloatArray) -> FloatArray:
        """Return values from standard normal deviates: directly, so that no tail is cut."""
        return self.mean + self.sigma * x

    def ln_density(self, value: FloatArray) -> FloatArray:
        """Return ln density at ``value``."""
        score = (value - self.mean) / self.sigma
        return np.asarray(-0.5 * score**2 - np.log(self.sigma * np.sqrt(2.0 * np.pi)))

    def describe(self, unit: str) -> str:
        """Return the prior in words."""
        return f"normal {self.mean:g} +- {self.sigma:g} {unit}".strip()


@dataclass(frozen=True)
class SpaceDensity:
    """Distance prior d^2 exp(-d / L) with scale length L in pc (Bailer-Jones 2015, PASP 127, 994)."""

    scale_pc: float = 1350.0

    def from_normal(self, x: FloatArray) -> FloatArray:
        """Return distances (pc) from standard normal deviates."""
        from scipy.special import gammaincinv

        return np.asarray(self.scale_pc * gammaincinv(3.0, to_unit(x)))

    def ln_density(self, value: FloatArray) -> FloatArray:
        """Return ln density per pc at distance ``value`` (pc)."""
        positive = value > 0.0
        safe = np.where(positive, value, 1.0)
        density = 2.0 * np.log(safe) - safe / self.scale_pc - np.log(2.0 * self.scale_pc**3)
        return np.where(positive, density, -np.inf)

    def describe(self, unit: str) -> str:
        """Return the prior in words."""
        return f"d^2 exp(-d/L), L = {self.scale_pc:g} {unit}".strip()


@dataclass(frozen=True)
class Guide:
    """Student t density with two degrees of freedom about a measured value, cut to a range.

    Two degrees of freedom because both the density and its inverse distribution function are elementary, and the
    tails are long enough to reach a solution many sigma from the measurement.
    """

    centre: float
    scale: float
    low: float = -np.inf
    high: float = np.inf

    def from_normal(self, x: FloatArray) -> FloatArray:
        """Return values from standard normal deviates."""
        return self.from_normal_within(x, np.asarray(self.low), np.asarray(self.high))

    def from_normal_within(self, x: FloatArray, low: FloatArray, high: FloatArray) -> FloatArray:
        """Return values within per-sample bounds ``low`` < ``high`` (n,)."""
        first, last = self._below(low), self._below(high)
        fraction = np.clip(first + to_unit(x) * (last - first), SMALLEST_UNIT, 1.0 - SMALLEST_UNIT)
        score = (2.0 * fraction - 1.0) / np.sqrt(2.0 * fraction * (1.0 - fraction))
        return np.clip(self.centre + self.scale * score, low, high)

    def ln_density(self, value: FloatArray) -> FloatArray:
        """Return ln density at ``value``, normalised over the guide's own range."""
        return self.ln_density_within(value, np.asarray(self.low), np.asarray(self.high))

    def ln_density_within(self, value: FloatArray, low: FloatArray, high: FloatArray) -> FloatArray:
        """Return ln density at ``value``, normalised within per-sample bounds (n,)."""
        score = (value - self.centre) / self.scale
        mass = np.maximum(self._below(high) - self._below(low), 1e-300)
        return np.asarray(-1.5 * np.log(2.0 + score**2) - np.log(self.scale) - np.log(mass))

    def _below(self, value: FloatArray) -> FloatArray:
        """Distribution function of the uncut density."""
        score = (np.asarray(value, dtype=float) - self.centre) / self.scale
        finite = np.clip(score, -1e8, 1e8)
        return 0.5 + 0.5 * finite / np.sqrt(2.0 + finite**2)


@dataclass(frozen=True)
class Parameter:
    """One sampled quantity.

    Attributes
    ----------
    name, unit : as printed
    prior : its prior density
    guide : where to sample, or None for the prior itself
    counts : True for a standard-normal score with empirical content (scatter of a published relation)
    """

    name: str
    unit: str
    prior: Prior
    guide: Guide | None = None
    counts: bool = False

    def draw(self, x: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Return values and ln(prior / guide), both (n,), from standard normal deviates (n,)."""
        if self.guide is None:
            return self.prior.from_normal(x), np.zeros(x.shape)
        value = self.guide.from_normal(x)
        return value, self.prior.ln_density(value) - self.guide.ln_density(value)


def score(name: str) -> Parameter:
    """Return a standard-normal score: how many scatters a star lies from a published relation."""
    return Parameter(name, "", Normal(0.0, 1.0), counts=True)
