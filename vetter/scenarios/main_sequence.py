"""One ordinary star, on the main sequence or evolved, lost in the glare of the seen star."""

from __future__ import annotations

from collections.abc import Mapping
from typing import ClassVar

import numpy as np
from numpy.typing import NDArray

from vetter.light.engine import Component
from vetter.scenarios.base import Companion, Scenario, Wall, register
from vetter.scenarios.priors import LogUniform, Parameter, Uniform, score
from vetter.stars.evolved import MASS_RANGE_MSUN as EVOLVED_MASS_RANGE_MSUN
from vetter.stars.evolved import evolved_star
from vetter.stars.main_sequence import main_sequence
from vetter.system.model import Assumptions

FloatArray = NDArray[np.float64]


@register
class MainSequenceCompanion(Scenario):
    """A single main-sequence star of any age, with the scatter of the mass-luminosity-radius relation."""

    name: ClassVar[str] = "main_sequence"
    title: ClassVar[str] = "Luminous main-sequence companion"
    rank: ClassVar[int] = 10
    ordinary: ClassVar[bool] = True

    def mass_prior(self, assumptions: Assumptions) -> LogUniform:
        """Return the prior of the companion's mass (solar)."""
        return LogUniform(0.08, 60.0)

    def companion_parameters(self) -> list[Parameter]:
        """Return the age as a fraction of the main-sequence life, and the scores of the relation's scatter."""
        return [
            Parameter("companion_life_fraction", "", Uniform(0.0, 1.0)),
            score("companion_luminosity_score"),
            score("companion_radius_score"),
        ]

    def companion(self, mass_msun: FloatArray, feh: FloatArray, draws: Mapping[str, FloatArray]) -> Companion:
        """Return the star of each sample; it shares the seen star's [Fe/H]."""
        star = main_sequence(
            mass_msun,
            draws["companion_life_fraction"],
            feh,
            draws["companion_luminosity_score"],
            draws["companion_radius_score"],
        )
        light = Component("star", star.teff_k, star.logg, feh, star.radius_rsun)
        walls = (Wall(np.where(star.valid, -1.0, 1.0), "no main-sequence star has that mass"),)
        return Companion((light,), star.radius_rsun, walls)


@register
class EvolvedCompanion(Scenario):
    """A subgiant or giant: hidden companions of a giant, and the half-way states between dwarf and giant."""

    name: ClassVar[str] = "evolved_star"
    title: ClassVar[str] = "Evolved companion"
    rank: ClassVar[int] = 20
    ordinary: ClassVar[bool] = True

    def mass_prior(self, assumptions: Assumptions) -> LogUniform:
        """Return the prior of the companion's mass (solar)."""
        return LogUniform(*EVOLVED_MASS_RANGE_MSUN)

    def companion_parameters(self) -> list[Parameter]:
        """Return where the star stands between the end of the main sequence and the giant branch (uniform in both)."""
        return [
            Parameter("companion_rise", "", Uniform(0.0, 1.0)),
            Parameter("companion_warmth", "", Uniform(0.0, 1.0)),
        ]

    def companion(self, mass_msun: FloatArray, feh: FloatArray, draws: Mapping[str, FloatArray]) -> Companion:
        """Return the star of each sample; it shares the seen star's [Fe/H]."""
        star = evolved_star(mass_msun, draws["companion_rise"], draws["companion_warmth"], feh)
        light = Component("star", star.teff_k, star.logg, feh, star.radius_rsun)
        walls = (Wall(np.where(star.valid, -1.0, 1.0), "no evolved star has that mass"),)
        return Companion((light,), star.radius_rsun, walls)
