"""A star in the aperture that has nothing to do with the orbit: a diagnosis beside the explanations, when asked for."""

from __future__ import annotations

from collections.abc import Mapping
from typing import ClassVar

import numpy as np
from numpy.typing import NDArray

from vetter.light.engine import Component
from vetter.scenarios.base import Companion, Scenario, register
from vetter.scenarios.priors import LogUniform, Parameter, Uniform
from vetter.system.model import Assumptions

FloatArray = NDArray[np.float64]

APERTURE_MAS = 2000.0
"""Radius within which the star may lie, evenly in area (judgement: the blur of ground-based photometry)."""

DWARF_LOGG = 4.5
"""Its gravity, which broad bands hardly feel; its size is free."""

TEFF_RANGE_K = (2500.0, 30000.0)
RADIUS_RANGE_RSUN = (0.01, 30.0)


@register
class UnrelatedLight(Scenario):
    """A dark companion, and the light of an unrelated star in the aperture.

    The star may lie at any distance: its radius is the one it would have beside the seen star, and it is seen through
    the same dust. It takes no part in the orbit: it dilutes the photocentre and does not pull it.
    """

    name: ClassVar[str] = "unrelated_light"
    title: ClassVar[str] = "Dark body, unrelated star's light"
    rank: ClassVar[int] = 110
    ordinary: ClassVar[bool] = False
    on_request: ClassVar[bool] = True

    def mass_prior(self, assumptions: Assumptions) -> LogUniform:
        """Return the prior of the dark companion's mass (solar): any mass, since only its darkness is claimed."""
        return LogUniform(0.1, 150.0)

    def companion_parameters(self) -> list[Parameter]:
        """Return the unrelated star's temperature, its radius as if beside the seen star, and where it lies."""
        return [
            Parameter("unrelated_teff_k", "K", LogUniform(*TEFF_RANGE_K)),
            Parameter("unrelated_radius_rsun", "Rsun", LogUniform(*RADIUS_RANGE_RSUN)),
            Parameter("unrelated_area_share", "", Uniform(0.0, 1.0)),
        ]

    def companion(self, mass_msun: FloatArray, feh: FloatArray, draws: Mapping[str, FloatArray]) -> Companion:
        """Return the unrelated star of each sample, of solar composition; the companion itself is dark."""
        flat = np.zeros(mass_msun.shape)
        radius = draws["unrelated_radius_rsun"]
        light = Component("star", draws["unrelated_teff_k"], flat + DWARF_LOGG, flat, radius)
        return Companion((light,), unrelated_mas=APERTURE_MAS * np.sqrt(draws["unrelated_area_share"]))
