"""Compact remnants: white dwarf, neutron star, black hole, and two of them in a tight pair."""

from __future__ import annotations

from collections.abc import Mapping
from typing import ClassVar

import numpy as np
from numpy.typing import NDArray

from vetter.light.engine import Component
from vetter.scenarios.base import Branch, Companion, Scenario, Wall, register
from vetter.scenarios.context import Context
from vetter.scenarios.priors import LogUniform, Parameter, Uniform
from vetter.scenarios.seen_star import ordinary_seen_stars
from vetter.stars.white_dwarf import white_dwarf
from vetter.system.model import Assumptions

FloatArray = NDArray[np.float64]


WHITE_DWARF_MASS_LOW_MSUN = 0.15

WHITE_DWARF_TEFF_RANGE_K = (4000.0, 100000.0)


def white_dwarf_light(mass_msun: FloatArray, teff_k: FloatArray) -> Component:
    """Return the light of white dwarfs (n,) with hydrogen atmospheres."""
    star = white_dwarf(mass_msun, teff_k)
    return Component("white_dwarf", star.teff_k, star.logg, np.zeros(mass_msun.shape), star.radius_rsun)


@register
class WhiteDwarf(Scenario):
    """A white dwarf of any temperature."""

    name: ClassVar[str] = "white_dwarf"
    title: ClassVar[str] = "White dwarf"
    rank: ClassVar[int] = 70
    ordinary: ClassVar[bool] = True

    def mass_prior(self, assumptions: Assumptions) -> Uniform:
        """Return the prior of the companion's mass (solar)."""
        return Uniform(WHITE_DWARF_MASS_LOW_MSUN, assumptions.white_dwarf_max_msun)

    def companion_parameters(self) -> list[Parameter]:
        """Return the effective temperature."""
        return [Parameter("companion_teff_k", "K", LogUniform(*WHITE_DWARF_TEFF_RANGE_K))]

    def companion(self, mass_msun: FloatArray, feh: FloatArray, draws: Mapping[str, FloatArray]) -> Companion:
        """Return the white dwarf of each sample, a hydrogen atmosphere."""
        return Companion((white_dwarf_light(mass_msun, draws["companion_teff_k"]),))


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


class DarkPair(DarkRemnant):
    """Two dark remnants; only their total mass can be felt."""

    name: ClassVar[str] = "compact_pair"
    title: ClassVar[str] = "Two dark remnants"
    rank: ClassVar[int] = 0

    def mass_prior(self, assumptions: Assumptions) -> LogUniform:
        """Return the prior of the total mass (solar): at least two of the lightest neutron stars."""
        return LogUniform(2.0 * assumptions.neutron_star_min_msun, 150.0)


class WhiteDwarfAndDark(Scenario):
    """A white dwarf with a dark remnant; the white dwarf shines."""

    name: ClassVar[str] = "compact_pair"
    title: ClassVar[str] = "White dwarf and dark remnant"
    rank: ClassVar[int] = 0
    ordinary: ClassVar[bool] = False

    def __init__(self, assumptions: Assumptions) -> None:
        """Take the mass walls from the assumptions."""
        self.assumptions = assumptions

    def mass_prior(self, assumptions: Assumptions) -> LogUniform:
        """Return the prior of the total mass (solar)."""
        return LogUniform(WHITE_DWARF_MASS_LOW_MSUN + assumptions.neutron_star_min_msun, 150.0)

    def companion_parameters(self) -> list[Parameter]:
        """Return the white dwarf's mass and temperature."""
        heaviest = self.assumptions.white_dwarf_max_msun
        return [
            Parameter("white_dwarf_mass_msun", "Msun", Uniform(WHITE_DWARF_MASS_LOW_MSUN, heaviest)),
            Parameter("white_dwarf_teff_k", "K", LogUniform(*WHITE_DWARF_TEFF_RANGE_K)),
        ]

    def companion(self, mass_msun: FloatArray, feh: FloatArray, draws: Mapping[str, FloatArray]) -> Companion:
        """Return the white dwarf's light; what is left of the mass must make a neutron star at least."""
        white = draws["white_dwarf_mass_msun"]
        excess = np.log((white + self.assumptions.neutron_star_min_msun) / mass_msun)
        wall = Wall(excess, "too little mass is left for a neutron star beside the white dwarf")
        return Companion((white_dwarf_light(white, draws["white_dwarf_teff_k"]),), walls=(wall,))


class TwoWhiteDwarfs(Scenario):
    """Two white dwarfs of any temperatures."""

    name: ClassVar[str] = "compact_pair"
    title: ClassVar[str] = "Two white dwarfs"
    rank: ClassVar[int] = 0
    ordinary: ClassVar[bool] = False

    def __init__(self, assumptions: Assumptions) -> None:
        """Take the mass walls from the assumptions."""
        self.assumptions = assumptions

    def mass_prior(self, assumptions: Assumptions) -> LogUniform:
        """Return the prior of the total mass (solar)."""
        return LogUniform(0.4, 2.0 * assumptions.white_dwarf_max_msun)

    def companion_parameters(self) -> list[Parameter]:
        """Return the share of the heavier one (0.5-1 of the total) and both temperatures."""
        return [
            Parameter("heavier_share", "", Uniform(0.5, 1.0)),
            Parameter("white_dwarf_teff_k", "K", LogUniform(*WHITE_DWARF_TEFF_RANGE_K)),
            Parameter("second_white_dwarf_teff_k", "K", LogUniform(*WHITE_DWARF_TEFF_RANGE_K)),
        ]

    def companion(self, mass_msun: FloatArray, feh: FloatArray, draws: Mapping[str, FloatArray]) -> Companion:
        """Return both white dwarfs."""
        heavier = mass_msun * draws["heavier_share"]
        lighter = mass_msun - heavier
        excess = np.log(
            np.maximum(heavier / self.assumptions.white_dwarf_max_msun, WHITE_DWARF_MASS_LOW_MSUN / lighter)
        )
        wall = Wall(excess, "no two white dwarfs add up to that mass")
        lights = (
            white_dwarf_light(np.minimum(heavier, self.assumptions.white_dwarf_max_msun), draws["white_dwarf_teff_k"]),
            white_dwarf_light(np.maximum(lighter, WHITE_DWARF_MASS_LOW_MSUN), draws["second_white_dwarf_teff_k"]),
        )
        return Companion(lights, walls=(wall,))


@register
class CompactPair(DarkPair):
    """Two remnants in a tight pair: two dark ones, a white dwarf with a dark one, or two white dwarfs."""

    title: ClassVar[str] = "Two compact remnants in a tight pair"
    rank: ClassVar[int] = 100

    def branches(self, context: Context) -> list[Branch]:
        """Return the three kinds of pair for every kind of seen star."""
        assumptions = context.system.assumptions
        pairs: tuple[Scenario, ...] = (DarkPair(), WhiteDwarfAndDark(assumptions), TwoWhiteDwarfs(assumptions))
        return [Branch(pair, seen, context) for seen in ordinary_seen_stars(context.system) for pair in pairs]
