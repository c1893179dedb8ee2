"""One compact remnant: white dwarf, neutron star or black hole."""

from __future__ import annotations

from collections.abc import Mapping
from typing import ClassVar

import numpy as np
from numpy.typing import NDArray

from vetter.light.engine import Component
from vetter.scenarios.base import Companion, Scenario, register
from vetter.scenarios.priors import LogUniform, Parameter, Uniform
from vetter.stars.white_dwarf import white_dwarf
from vetter.system.model import Assumptions

FloatArray = NDArray[np.float64]


@register
class WhiteDwarf(Scenario):
    """A white dwarf of any temperature."""

    name: ClassVar[str] = "white_dwarf"
    title: ClassVar[str] = "White dwarf"
    rank: ClassVar[int] = 70
    ordinary: ClassVar[bool] = True

    def mass_prior(self, assumptions: Assumptions) -> Uniform:
        """Return the prior of the companion's mass (solar)."""
        return Uniform(0.15, assumptions.white_dwarf_max_msun)

    def companion_parameters(self) -> list[Parameter]:
        """Return the effective temperature."""
        return [Parameter("companion_teff_k", "K", LogUniform(4000.0, 100000.0))]

    def companion(self, mass_msun: FloatArray, feh: FloatArray, draws: Mapping[str, FloatArray]) -> Companion:
        """Return the white dwarf of each sample, a hydrogen atmosphere."""
        star = white_dwarf(mass_msun, draws["companion_teff_k"])
        light = Component("white_dwarf", star.teff_k, star.logg, np.zeros(mass_msun.shape), star.radius_rsun)
        return Companion((light,))


class DarkRemnant(Scenario):
    """A remnant that sheds no light of its own."""

    ordinary: ClassVar[bool] = False

    def companion(self, mass_msun: FloatArray, feh: FloatArray, draws: Mapping[str, FloatArray]) -> Companion:
        """Return nothing that shines."""
        return Companion()


@register
class NeutronStar(DarkRemnant):
    """A neutron star."""

    name: ClassVar[str] = "neutron_star"
    title: ClassVar[str] = "Neutron star"
    rank: ClassVar[int] = 80

    def mass_prior(self, assumptions: Assumptions) -> Uniform:
        """Return the prior of the companion's mass (solar)."""
        return Uniform(assumptions.neutron_star_min_msun, assumptions.neutron_star_max_msun)


@register
class BlackHole(DarkRemnant):
    """A black hole."""

    name: ClassVar[str] = "black_hole"
    title: ClassVar[str] = "Black hole"
    rank: ClassVar[int] = 90

    def mass_prior(self, assumptions: Assumptions) -> LogUniform:
        """Return the prior of the companion's mass (solar)."""
        return LogUniform(assumptions.black_hole_min_msun, 150.0)
