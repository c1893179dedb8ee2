"""The unseen mass is itself a tight pair of dim stars: the seen star is the third of a hierarchical triple."""

from __future__ import annotations

from collections.abc import Mapping, MutableMapping
from typing import ClassVar

import numpy as np
from numpy.typing import NDArray

from vetter.light.engine import Component
from vetter.physics import triples
from vetter.scenarios.base import Companion, OuterOrbit, Scenario, Wall, register
from vetter.scenarios.compact_remnant import WHITE_DWARF_TEFF_RANGE_K, white_dwarf_light
from vetter.scenarios.priors import LogUniform, Parameter, Uniform, score
from vetter.stars.main_sequence import main_sequence
from vetter.system.model import Assumptions

FloatArray = NDArray[np.float64]

LIGHTEST_STAR_MSUN = 0.08
HEAVIEST_STAR_MSUN = 60.0
LIGHTEST_WHITE_DWARF_MSUN = 0.2


@register
class InnerPair(Scenario):
    """Two main-sequence stars in a tight orbit; two equal ones are the dimmest for their total mass."""

    name: ClassVar[str] = "inner_pair"
    title: ClassVar[str] = "Pair of main-sequence stars"
    rank: ClassVar[int] = 30
    ordinary: ClassVar[bool] = True

    def mass_prior(self, assumptions: Assumptions) -> LogUniform:
        """Return the prior of the total mass (solar)."""
        return LogUniform(2.0 * LIGHTEST_STAR_MSUN, 2.0 * HEAVIEST_STAR_MSUN)

    def companion_parameters(self) -> list[Parameter]:
        """Return the mass ratio, the shared age and scatter, and where the inner period lies between its walls."""
        return [
            Parameter("inner_mass_ratio", "", Uniform(0.0, 1.0)),
            Parameter("companion_life_fraction", "", Uniform(0.0, 1.0)),
            score("companion_luminosity_score"),
            score("companion_radius_score"),
            Parameter("inner_period_share", "", Uniform(0.0, 1.0)),
        ]

    def companion(self, mass_msun: FloatArray, feh: FloatArray, draws: Mapping[str, FloatArray]) -> Companion:
        """Return both stars; they share age fraction, scatter and [Fe/H]."""
        heavier, lighter = self.inner_masses_msun(mass_msun, draws)
        shared = (feh, draws["companion_luminosity_score"], draws["companion_radius_score"])
        stars = [main_sequence(mass, draws["companion_life_fraction"], *shared) for mass in (heavier, lighter)]
        lights = tuple(Component("star", star.teff_k, star.logg, feh, star.radius_rsun) for star in stars)
        excess = np.log(np.maximum(heavier / HEAVIEST_STAR_MSUN, LIGHTEST_STAR_MSUN / np.maximum(lighter, 1e-9)))
        return Companion(lights, walls=(Wall(excess, "no two main-sequence stars add up to that mass"),))

    def inner_masses_msun(
        self, mass_msun: FloatArray, draws: Mapping[str, FloatArray]
    ) -> tuple[FloatArray, FloatArray]:
        """Return the heavier and the lighter mass (n,)."""
        ratio = draws["inner_mass_ratio"]
        return mass_msun / (1.0 + ratio), mass_msun * ratio / (1.0 + ratio)

    def orbit_walls(
        self, companion: Companion, outer: OuterOrbit, draws: MutableMapping[str, FloatArray]
    ) -> tuple[Wall, ...]:
        """Return the wall between contact and the stability limit, and add the inner period to ``draws``."""
        heavier, _ = self.inner_masses_msun(outer.companion_mass_msun, draws)
        return (inner_orbit(companion, heavier, outer, draws),)


@register
class InnerPairWithWhiteDwarf(Scenario):
    """A main-sequence star and a white dwarf in a tight orbit: mass without light."""

    name: ClassVar[str] = "inner_pair_with_white_dwarf"
    title: ClassVar[str] = "Main-sequence star and white dwarf"
    rank: ClassVar[int] = 40
    ordinary: ClassVar[bool] = True

    def mass_prior(self, assumptions: Assumptions) -> LogUniform:
        """Return the prior of the total mass (solar)."""
        return LogUniform(LIGHTEST_STAR_MSUN + LIGHTEST_WHITE_DWARF_MSUN, HEAVIEST_STAR_MSUN)

    def companion_parameters(self) -> list[Parameter]:
        """Return white dwarf's mass and temperature, the star's age and scatter, and where the inner period lies."""
        return [
            Parameter("white_dwarf_mass_msun", "Msun", Uniform(LIGHTEST_WHITE_DWARF_MSUN, 1.38)),
            Parameter("white_dwarf_teff_k", "K", LogUniform(*WHITE_DWARF_TEFF_RANGE_K)),
            Parameter("companion_life_fraction", "", Uniform(0.0, 1.0)),
            score("companion_luminosity_score"),
            score("companion_radius_score"),
            Parameter("inner_period_share", "", Uniform(0.0, 1.0)),
        ]

    def companion(self, mass_msun: FloatArray, feh: FloatArray, draws: Mapping[str, FloatArray]) -> Companion:
        """Return the star and the white dwarf."""
        white = draws["white_dwarf_mass_msun"]
        mass = mass_msun - white
        excess = LIGHTEST_STAR_MSUN - mass
        star = main_sequence(
            np.maximum(mass, LIGHTEST_STAR_MSUN),
            draws["companion_life_fraction"],
            feh,
            draws["companion_luminosity_score"],
            draws["companion_radius_score"],
        )
        lights = (
            Component("star", star.teff_k, star.logg, feh, star.radius_rsun),
            white_dwarf_light(white, draws["white_dwarf_teff_k"]),
        )
        return Companion(lights, walls=(Wall(excess, "too little mass is left for a star beside the white dwarf"),))

    def inner_masses_msun(
        self, mass_msun: FloatArray, draws: Mapping[str, FloatArray]
    ) -> tuple[FloatArray, FloatArray]:
        """Return the masses (n,) of the star and of the white dwarf."""
        white = draws["white_dwarf_mass_msun"]
        return np.maximum(mass_msun - white, LIGHTEST_STAR_MSUN), white

    def orbit_walls(
        self, companion: Companion, outer: OuterOrbit, draws: MutableMapping[str, FloatArray]
    ) -> tuple[Wall, ...]:
        """Return the wall between contact and the stability limit, and add the inner period to ``draws``."""
        star, _ = self.inner_masses_msun(outer.companion_mass_msun, draws)
        return (inner_orbit(companion, star, outer, draws),)


def inner_orbit(
    companion: Companion, first_msun: FloatArray, outer: OuterOrbit, draws: MutableMapping[str, FloatArray]
) -> Wall:
    """Return the wall that no inner orbit fits, and add ``inner_period_d`` to ``draws``.

    The period is log-uniform between contact (the first of the two to fill its Roche lobe) and the stability limit of
    a coplanar triple, with two widths of its soft edge granted: only what is surely unstable is closed.
    """
    total = outer.companion_mass_msun
    second_msun = np.maximum(total - first_msun, 1e-6)
    first, second = companion.components
    contact_d = triples.shortest_inner_period_d(first_msun, second_msun, first.radius_rsun, second.radius_rsun)
    limit_d = triples.longest_inner_period_d(outer.period_d, outer.mass_msun, total, outer.eccentricity)
    limit_d = limit_d * np.exp(1.5 * 2.0 * triples.SOFT_EDGE)
    span = np.maximum(limit_d / contact_d, 1.0)
    draws["inner_period_d"] = contact_d * span ** draws["inner_period_share"]
    return Wall(np.log(contact_d / limit_d), "no stable inner orbit fits inside the outer one")
