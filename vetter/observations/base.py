"""What an observation is, and the registry that finds them.

A new kind of datum is one new file in this package: a subclass of :class:`Observation` under ``@register``.
"""

from __future__ import annotations

import importlib
import pkgutil
from abc import ABC, abstractmethod
from collections.abc import Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING, ClassVar, Self

import numpy as np
from numpy.typing import NDArray

from vetter.observations.prediction import Prediction
from vetter.system.model import System

if TYPE_CHECKING:
    from vetter.light.engine import LightEngine

FloatArray = NDArray[np.float64]

_REGISTRY: dict[str, type[Observation]] = {}


class Observation(ABC):
    """One kind of datum as standardised residuals: ln likelihood = ln_norm - half their sum of squares.

    Class attributes
    ----------------
    name : identifier, as in verdicts.json
    label : as printed beside a number
    rank : place in lists, small first
    droppable : False for the premise of the whole question (the orbit), which is never left out
    """

    name: ClassVar[str]
    label: ClassVar[str]
    rank: ClassVar[int]
    droppable: ClassVar[bool] = True

    @classmethod
    @abstractmethod
    def from_system(cls, system: System, engine: LightEngine) -> Self | None:
        """Return the observation, or None when the system has no such datum."""

    @property
    @abstractmethod
    def count(self) -> int:
        """Number of measured values or limits."""

    @property
    def ln_norm(self) -> float:
        """Constant part of the ln likelihood; zero for limits."""
        return 0.0

    @abstractmethod
    def residuals(self, predicted: Prediction) -> FloatArray:
        """Return standardised residuals (n, k) for n predicted samples."""

    def ln_narrowing(self, predicted: Prediction) -> FloatArray:
        """Return ln(quoted error / error used) (n,), at most 0, summed over data whose error a prediction enlarges.

        Zero by default. It counts in the evidence only: a wider density must be lower, or being vague would pay.
        """
        return np.zeros(predicted.distance_pc.shape)

    def describe(self) -> str:
        """Return the datum in a word or two, for the list of what was used."""
        return self.label

    def ln_likelihood(self, predicted: Prediction) -> FloatArray:
        """Return the ln likelihood (n,) of this observation alone."""
        residuals = self.residuals(predicted)
        return np.asarray(self.ln_norm - 0.5 * np.einsum("ij,ij->i", residuals, residuals))

    def cautions(self, system: System) -> list[str]:
        """Return what a reader must know about this datum; nothing by default."""
        return []

    def report(self, best: Mapping[str, Prediction]) -> list[str]:
        """Return what explanations predict for a datum that is no part of the likelihood; nothing by default.

        ``best`` maps the title of each explanation that stands to its most favourable case, one sample.
        """
        return []


@dataclass(frozen=True)
class GaussianObservation(Observation):
    """One measured value with a Gaussian error; a subclass says which predicted quantity it measures."""

    value: float
    error: float

    @property
    def count(self) -> int:
        """Number of measured values."""
        return 1

    @property
    def ln_norm(self) -> float:
        """Constant part of the ln likelihood."""
        return gaussian_ln_norm([self.error])

    @abstractmethod
    def predicted_value(self, predicted: Prediction) -> FloatArray:
        """Return the predicted quantity (n,) in the unit of ``value``."""

    def residuals(self, predicted: Prediction) -> FloatArray:
        """Return (n, 1)."""
        return ((self.predicted_value(predicted) - self.value) / self.error)[:, None]


def register(cls: type[Observation]) -> type[Observation]:
    """Class decorator: make an observation known. Raises ValueError when the name is taken by another class."""
    known = _REGISTRY.get(cls.name)
    if known is not None and known.__qualname__ != cls.__qualname__:
        raise ValueError(f"an observation named {cls.name!r} is already registered by {known.__module__}")
    _REGISTRY[cls.name] = cls
    return cls


def registered() -> list[type[Observation]]:
    """Return every registered observation in order of rank, importing the modules of this package first."""
    package = importlib.import_module("vetter.observations")
    for module in pkgutil.iter_modules(package.__path__):
        importlib.import_module(f"vetter.observations.{module.name}")
    return sorted(_REGISTRY.values(), key=lambda cls: (cls.rank, cls.name))


def gaussian_ln_norm(errors: FloatArray | list[float]) -> float:
    """Return the ln normalisation of independent Gaussians with these standard deviations."""
    errors = np.asarray(errors, dtype=float)
    return float(-np.log(errors).sum() - 0.5 * errors.size * np.log(2.0 * np.pi))


def residual_from_ln(ln_value: FloatArray) -> FloatArray:
    """Return the residual whose half square is minus ``ln_value`` (<= 0): writes any likelihood as a residual."""
    return np.sqrt(np.maximum(-2.0 * ln_value, 0.0))
