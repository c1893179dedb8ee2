"""What the seen star may be: the ways from its spectrum to its mass and radius.

Each kind of seen star draws its own parameters. The *measured* log g and Teff choose the kinds once, before any
sampling: letting a sampled log g switch between relations moves verdicts by tens of sigma. Where a measurement does
not decide, each kind that fits is run as a branch of its own and the evidences are added.
"""

from __future__ import annotations

from abc import ABC, abstractmethod
from collections.abc import Mapping
from typing import ClassVar, NamedTuple

import numpy as np
from numpy.typing import NDArray

from vetter.scenarios.context import optional_guide
from vetter.scenarios.priors import LogUniform, Parameter, Uniform, score
from vetter.stars import empirical_mass
from vetter.stars.main_sequence import main_sequence
from vetter.stars.properties import radius_from_gravity_rsun
from vetter.system.model import Primary, System

FloatArray = NDArray[np.float64]

TEFF_RANGE_K = (2300.0, 60000.0)
LOGG_RANGE = (-0.5, 5.6)
FEH_RANGE = (-3.0, 0.6)

GIANT_LOGG = 3.0
"""Below this measured log g the seen star is a giant, whose mass its spectrum does not tell."""

GIANT_MASS_RANGE_MSUN = (0.7, 16.0)
"""A narrower range would exclude true bright giants."""

COOL_DWARF_MASS_MSUN = 0.6
"""Below this the relation of Torres et al. 2010 does not reach."""


class SeenStarState(NamedTuple):
    """The seen star of each sample, all (n,); ``valid`` False where the relation has no star."""

    teff_k: FloatArray
    logg: FloatArray
    feh: FloatArray
    radius_rsun: FloatArray
    mass_msun: FloatArray
    valid: NDArray[np.bool_]


class SeenStar(ABC):
    """A way from sampled parameters to the seen star."""

    name: ClassVar[str]
    words: ClassVar[str]
    ordinary: ClassVar[bool] = True

    @abstractmethod
    def parameters(self, seen: Primary) -> list[Parameter]:
        """Return the parameters to draw, guided by what was measured."""

    @abstractmethod
    def star(self, draws: Mapping[str, FloatArray]) -> SeenStarState:
        """Return the star of each sample from the drawn parameters."""


class Dwarf(SeenStar):
    """A dwarf or subgiant above 0.6 solar masses: mass from Torres, Andersen & Gimenez 2010 (A&ARv 18, 67)."""

    name = "dwarf"
    words = "a dwarf or subgiant with the mass of the Torres et al. (2010) relation"

    def parameters(self, seen: Primary) -> list[Parameter]:
        """Return Teff, log g, [Fe/H] and the score of the mass relation."""
        return [*spectrum_parameters(seen), score("mass_score")]

    def star(self, draws: Mapping[str, FloatArray]) -> SeenStarState:
        """Return the star; its radius follows from mass and log g, which removes the mass-radius ridge."""
        teff, logg, feh = draws["teff_k"], draws["logg"], draws["feh"]
        mass = empirical_mass.torres_mass_msun(teff, logg, feh)
        mass = mass * 10.0 ** (empirical_mass.TORRES_MASS_SCATTER_DEX * draws["mass_score"])
        valid = (mass > 0.3) & (mass < 150.0)
        return SeenStarState(teff, logg, feh, radius_from_gravity_rsun(mass, logg), mass, valid)


class Giant(SeenStar):
    """A giant of unknown mass; only g R^2 / G ties mass and radius."""

    name = "giant"
    words = f"a giant of {GIANT_MASS_RANGE_MSUN[0]:g}-{GIANT_MASS_RANGE_MSUN[1]:g} Msun (log-uniform)"

    def parameters(self, seen: Primary) -> list[Parameter]:
        """Return Teff, log g, [Fe/H] and the mass."""
        return [*spectrum_parameters(seen), Parameter("mass_msun", "Msun", LogUniform(*GIANT_MASS_RANGE_MSUN))]

    def star(self, draws: Mapping[str, FloatArray]) -> SeenStarState:
        """Return the star."""
        teff, logg, mass = draws["teff_k"], draws["logg"], draws["mass_msun"]
        radius = radius_from_gravity_rsun(mass, logg)
        return SeenStarState(teff, logg, draws["feh"], radius, mass, np.ones(mass.shape, dtype=bool))


class CoolDwarf(SeenStar):
    """A dwarf below 0.6 solar masses: Teff and radius from the main-sequence relation at its mass."""

    name = "cool dwarf"
    words = "a dwarf on the main-sequence relation"

    def parameters(self, seen: Primary) -> list[Parameter]:
        """Return mass, [Fe/H] and the scores of the relation."""
        feh = Parameter("feh", "dex", Uniform(*FEH_RANGE), optional_guide(seen.feh, *FEH_RANGE))
        mass = Parameter("mass_msun", "Msun", LogUniform(0.08, 0.8))
        return [mass, feh, score("luminosity_score"), score("radius_score")]

    def star(self, draws: Mapping[str, FloatArray]) -> SeenStarState:
        """Return the star, half way through its life: such a star hardly changes."""
        mass, feh = draws["mass_msun"], draws["feh"]
        star = main_sequence(
            mass, np.full(mass.shape, 0.5), feh, draws["luminosity_score"], draws["radius_score"]
        )
        return SeenStarState(star.teff_k, star.logg, feh, star.radius_rsun, star.mass_msun, star.valid)


def spectrum_parameters(seen: Primary) -> list[Parameter]:
    """Return Teff (log-uniform), log g and [Fe/H] (uniform), each guided by its measurement."""
    return [
        Parameter("teff_k", "K", LogUniform(*TEFF_RANGE_K), optional_guide(seen.teff_k, *TEFF_RANGE_K)),
        Parameter("logg", "dex", Uniform(*LOGG_RANGE), optional_guide(seen.logg, *LOGG_RANGE)),
        Parameter("feh", "dex", Uniform(*FEH_RANGE), optional_guide(seen.feh, *FEH_RANGE)),
    ]


def ordinary_seen_stars(system: System) -> list[SeenStar]:
    """Return the kinds of ordinary star that the measured Teff and log g leave open within two sigma."""
    seen = system.primary
    giant = dwarf = True
    if seen.logg is not None:
        reach = 2.0 * seen.logg.error
        giant = seen.logg.value < GIANT_LOGG + reach
        dwarf = seen.logg.value >= GIANT_LOGG - reach
    kinds: list[SeenStar] = []
    if dwarf:
        low, high = _torres_mass_range_msun(seen)
        if high >= COOL_DWARF_MASS_MSUN:
            kinds.append(Dwarf())
        if low < COOL_DWARF_MASS_MSUN:
            kinds.append(CoolDwarf())
    if giant:
        kinds.append(Giant())
    return kinds


def _torres_mass_range_msun(seen: Primary) -> tuple[float, float]:
    """Mass of the Torres relation two scatters down and up, at the measured spectrum; wide open without Teff."""
    if seen.teff_k is None:
        return 0.0, np.inf
    logg = 4.5 if seen.logg is None else max(seen.logg.value, GIANT_LOGG)
    feh = 0.0 if seen.feh is None else seen.feh.value
    mass = float(
        empirical_mass.torres_mass_msun(np.array([seen.teff_k.value]), np.array([logg]), np.array([feh]))[0]
    )
    factor = 10.0 ** (2.0 * empirical_mass.TORRES_MASS_SCATTER_DEX)
    return mass / factor, mass * factor
