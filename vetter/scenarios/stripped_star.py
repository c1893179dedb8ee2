"""A star stripped of its envelope: as the hidden companion, or as the star that is seen."""

from __future__ import annotations

from collections.abc import Mapping
from typing import ClassVar

import numpy as np
from numpy.typing import NDArray

from vetter.light.engine import Component
from vetter.scenarios.base import Branch, Companion, Scenario, Wall, register
from vetter.scenarios.context import Context
from vetter.scenarios.main_sequence import EvolvedCompanion, MainSequenceCompanion
from vetter.scenarios.priors import LogUniform, Parameter, Uniform, score
from vetter.scenarios.seen_star import stripped_seen_stars
from vetter.stars.helium import MASS_RANGE_MSUN as HELIUM_MASS_RANGE_MSUN
from vetter.stars.helium import helium_star
from vetter.system.model import Assumptions

FloatArray = NDArray[np.float64]


@register
class StrippedCompanion(Scenario):
    """A compact helium star: massive, hot, faint in the optical; the ultraviolet decides."""

    name: ClassVar[str] = "stripped_companion"
    title: ClassVar[str] = "Compact stripped companion"
    rank: ClassVar[int] = 50
    ordinary: ClassVar[bool] = True

    def mass_prior(self, assumptions: Assumptions) -> LogUniform:
        """Return the prior of the companion's mass (solar)."""
        return LogUniform(*HELIUM_MASS_RANGE_MSUN)

    def companion_parameters(self) -> list[Parameter]:
        """Return the fraction of helium burning, how much envelope is left, and the score of the luminosity."""
        return [
            Parameter("companion_life_fraction", "", Uniform(0.0, 1.0)),
            Parameter("companion_inflation", "", Uniform(0.0, 1.0)),
            score("companion_luminosity_score"),
        ]

    def companion(self, mass_msun: FloatArray, feh: FloatArray, draws: Mapping[str, FloatArray]) -> Companion:
        """Return the helium star of each sample."""
        star = helium_star(
            mass_msun,
            draws["companion_life_fraction"],
            draws["companion_inflation"],
            draws["companion_luminosity_score"],
        )
        light = Component("star", star.teff_k, star.logg, np.zeros(mass_msun.shape), star.radius_rsun)
        walls = (Wall(np.where(star.valid, -1.0, 1.0), "no helium star has that mass"),)
        return Companion((light,), star.radius_rsun, walls)


@register
class StrippedPrimary(Scenario):
    """The seen star is stripped: it is far lighter than it looks, and an ordinary companion is enough.

    The companion is a main-sequence star or an evolved one, each a branch of its own. Only g R^2 / G, and so the error
    of log g, the Roche lobe and the mass function close this explanation. An outside mass estimate does not apply.
    """

    name: ClassVar[str] = "stripped_primary"
    title: ClassVar[str] = "Seen star stripped of its envelope"
    rank: ClassVar[int] = 60
    ordinary: ClassVar[bool] = True

    def mass_prior(self, assumptions: Assumptions) -> LogUniform:
        """Return the prior of the companion's mass (solar), that of a main-sequence companion."""
        return MainSequenceCompanion().mass_prior(assumptions)

    def companion(self, mass_msun: FloatArray, feh: FloatArray, draws: Mapping[str, FloatArray]) -> Companion:
        """Return the companion of the first branch, a main-sequence star."""
        return MainSequenceCompanion().companion(mass_msun, feh, draws)

    def branches(self, context: Context) -> list[Branch]:
        """Return the kinds of stripped star times the kinds of companion."""
        companions = (MainSequenceCompanion(), EvolvedCompanion())
        return [Branch(other, seen, context) for seen in stripped_seen_stars(context.system) for other in companions]
