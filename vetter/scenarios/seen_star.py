"""What the seen star may be: the ways from its spectrum to its mass and radius.

Each kind of seen star draws its own parameters. The *measured* log g and Teff choose the kinds once, before any
sampling: letting a sampled log g switch between relations moves verdicts by tens of sigma. Where a measurement does
not decide, each kind that fits is run as a branch of its own and the evidences are added.
"""

from __future__ import annotations

from abc import ABC, abstractmethod
from collections.abc import MutableMapping
from typing import ClassVar, NamedTuple

import numpy as np
from numpy.typing import NDArray

from vetter.scenarios.context import optional_guide
from vetter.scenarios.priors import LogUniform, Parameter, Uniform, score, to_unit
from vetter.stars.empirical_mass import TORRES_MASS_SCATTER_DEX, torres_mass_msun
from vetter.stars.main_sequence import main_sequence
from vetter.stars.properties import radius_from_gravity_rsun
from vetter.system.model import Primary, System

FloatArray = NDArray[np.float64]

TEFF_RANGE_K = (2300.0, 60000.0)
LOGG_RANGE = (-0.5, 5.6)
FEH_RANGE = (-3.0, 0.6)

LEAST_TEFF_SHARE, LEAST_DEX = 0.015, 0.1
"""Least scales of the guides: of Teff in units of itself, of log g and [Fe/H]; they change the work, not the answer."""

GIANT_LOGG = 3.0
"""Below this measured log g the seen star is a giant, whose mass its spectrum does not tell."""

GIANT_MASS_RANGE_MSUN = (0.7, 16.0)
"""A narrower range would exclude true bright giants."""

DWARF_MASS_RANGE_MSUN = (0.3, 150.0)
"""Outside this the relation, stretched by its scatter, says nothing."""

STRIPPED_MASS_LOW_MSUN = 0.1

STRIPPED_MASS_SHARE = 0.8
"""A stripped star has at most this fraction of the mass that an ordinary star of its Teff and log g has."""

COOL_DWARF_MASS_RANGE_MSUN = (0.08, 0.8)

COOL_DWARF_MASS_MSUN = 0.6
"""Below this the relation of Torres et al. 2010 does not reach."""


class SeenStarState(NamedTuple):
    """The seen star of each sample, all (n,).

    ``ln_ratio`` is ln(prior / density it was drawn from) of its mass; ``excess`` is above zero where there is no such
    star, and grows with the distance from one.
    """

    teff_k: FloatArray
    logg: FloatArray
    feh: FloatArray
    radius_rsun: FloatArray
    mass_msun: FloatArray
    ln_ratio: FloatArray
    excess: FloatArray


class SeenStar(ABC):
    """A way from sampled parameters to the seen star.

    The last of its parameters decides the mass, and is drawn only below the mass at which the orbit would need more
    than the scenario's heaviest companion: a posterior that leans on that wall could not be sampled.
    """

    name: str
    words: str
    ordinary: ClassVar[bool] = True

    @abstractmethod
    def parameters(self, seen: Primary) -> list[Parameter]:
        """Return the parameters to draw freely, guided by what was measured."""

    @property
    @abstractmethod
    def mass_parameter(self) -> Parameter:
        """The parameter that decides the mass, drawn below ``mass_max_msun``."""

    @abstractmethod
    def star(
        self, draws: MutableMapping[str, FloatArray], x_mass: FloatArray, mass_max_msun: FloatArray
    ) -> SeenStarState:
        """Return the star of each sample; the mass parameter is added to ``draws``."""


class Dwarf(SeenStar):
    """A dwarf or subgiant above 0.6 solar masses: mass from Torres, Andersen & Gimenez 2010 (A&ARv 18, 67)."""

    name = "dwarf"
    words = "a dwarf or subgiant with the mass of the Torres et al. (2010) relation"

    def parameters(self, seen: Primary) -> list[Parameter]:
        """Return Teff, log g and [Fe/H]."""
        return spectrum_parameters(seen)

    @property
    def mass_parameter(self) -> Parameter:
        """The score of the mass relation."""
        return score("mass_score")

    def star(
        self, draws: MutableMapping[str, FloatArray], x_mass: FloatArray, mass_max_msun: FloatArray
    ) -> SeenStarState:
        """Return the star; its radius follows from mass and log g, which removes the mass-radius ridge."""
        from scipy.special import log_ndtr, ndtri_exp

        teff, logg, feh = draws["teff_k"], draws["logg"], draws["feh"]
        mean = torres_mass_msun(teff, logg, feh)
        highest = np.log10(np.maximum(mass_max_msun, 1e-3) / mean) / TORRES_MASS_SCATTER_DEX
        ln_share = log_ndtr(highest)
        draws["mass_score"] = ndtri_exp(log_ndtr(x_mass) + ln_share)
        mass = mean * 10.0 ** (TORRES_MASS_SCATTER_DEX * draws["mass_score"])
        excess = np.log(np.maximum(DWARF_MASS_RANGE_MSUN[0] / mass, mass / DWARF_MASS_RANGE_MSUN[1]))
        return SeenStarState(teff, logg, feh, radius_from_gravity_rsun(mass, logg), mass, ln_share, excess)


class Giant(SeenStar):
    """A giant of unknown mass; only g R^2 / G ties mass and radius."""

    name = "giant"
    words = f"a giant of {GIANT_MASS_RANGE_MSUN[0]:g}-{GIANT_MASS_RANGE_MSUN[1]:g} Msun (log-uniform)"

    def parameters(self, seen: Primary) -> list[Parameter]:
        """Return Teff, log g and [Fe/H]."""
        return spectrum_parameters(seen)

    @property
    def mass_parameter(self) -> Parameter:
        """The mass itself."""
        return Parameter("mass_msun", "Msun", LogUniform(*GIANT_MASS_RANGE_MSUN))

    def star(
        self, draws: MutableMapping[str, FloatArray], x_mass: FloatArray, mass_max_msun: FloatArray
    ) -> SeenStarState:
        """Return the star."""
        teff, logg = draws["teff_k"], draws["logg"]
        mass, ln_share, excess = log_uniform_below(x_mass, *GIANT_MASS_RANGE_MSUN, mass_max_msun)
        draws["mass_msun"] = mass
        return SeenStarState(teff, logg, draws["feh"], radius_from_gravity_rsun(mass, logg), mass, ln_share, excess)


class CoolDwarf(SeenStar):
    """A dwarf below 0.6 solar masses: Teff and radius from the main-sequence relation at its mass."""

    name = "cool dwarf"
    words = "a dwarf on the main-sequence relation"

    def parameters(self, seen: Primary) -> list[Parameter]:
        """Return [Fe/H] and the scores of the relation."""
        feh = Parameter("feh", "dex", Uniform(*FEH_RANGE), optional_guide(seen.feh, *FEH_RANGE, LEAST_DEX))
        return [feh, score("luminosity_score"), score("radius_score")]

    @property
    def mass_parameter(self) -> Parameter:
        """The mass itself."""
        return Parameter("mass_msun", "Msun", LogUniform(*COOL_DWARF_MASS_RANGE_MSUN))

    def star(
        self, draws: MutableMapping[str, FloatArray], x_mass: FloatArray, mass_max_msun: FloatArray
    ) -> SeenStarState:
        """Return the star, half way through its life: such a star hardly changes."""
        mass, ln_share, excess = log_uniform_below(x_mass, *COOL_DWARF_MASS_RANGE_MSUN, mass_max_msun)
        draws["mass_msun"] = mass
        feh = draws["feh"]
        star = main_sequence(mass, 0.5, feh, draws["luminosity_score"], draws["radius_score"])
        excess = np.where(star.valid, excess, np.maximum(excess, 1.0))
        return SeenStarState(star.teff_k, star.logg, feh, star.radius_rsun, mass, ln_share, excess)


class StrippedStar(SeenStar):
    """A star that has lost its envelope: far lighter than an ordinary star that looks the same.

    Its mass reaches up to ``STRIPPED_MASS_SHARE`` of the ordinary one (giants: to the lightest ordinary giant), so that
    this explanation neither contains the ordinary ones nor leaves a gap between them.
    """

    ordinary = False

    def __init__(self, giant: bool) -> None:
        """Make the stripped counterpart of an ordinary giant, or of an ordinary dwarf or subgiant."""
        self.giant = giant
        self.name = "stripped giant" if giant else "stripped star"
        self.words = f"a stripped star of {STRIPPED_MASS_LOW_MSUN:g} Msun to " + (
            f"{GIANT_MASS_RANGE_MSUN[0]:g} Msun" if giant else f"{STRIPPED_MASS_SHARE:g} of the mass it looks to have"
        )

    def parameters(self, seen: Primary) -> list[Parameter]:
        """Return Teff, log g and [Fe/H]."""
        return spectrum_parameters(seen)

    @property
    def mass_parameter(self) -> Parameter:
        """The mass itself; the upper end of its range moves with the spectrum."""
        return Parameter("mass_msun", "Msun", LogUniform(STRIPPED_MASS_LOW_MSUN, self._printed_high))

    @property
    def _printed_high(self) -> float:
        return GIANT_MASS_RANGE_MSUN[0] if self.giant else STRIPPED_MASS_SHARE * DWARF_MASS_RANGE_MSUN[1]

    def star(
        self, draws: MutableMapping[str, FloatArray], x_mass: FloatArray, mass_max_msun: FloatArray
    ) -> SeenStarState:
        """Return the star; only g R^2 / G ties its mass and radius."""
        teff, logg, feh = draws["teff_k"], draws["logg"], draws["feh"]
        if self.giant:
            high = np.full(teff.shape, GIANT_MASS_RANGE_MSUN[0])
        else:
            high = np.maximum(STRIPPED_MASS_SHARE * torres_mass_msun(teff, logg, feh), 1.01 * STRIPPED_MASS_LOW_MSUN)
        mass, ln_share, excess = log_uniform_below(x_mass, STRIPPED_MASS_LOW_MSUN, high, mass_max_msun)
        draws["mass_msun"] = mass
        return SeenStarState(teff, logg, feh, radius_from_gravity_rsun(mass, logg), mass, ln_share, excess)


def log_uniform_below(
    x: FloatArray, low: float, high: float | FloatArray, limit: FloatArray
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Return log-uniform values (n,) between low and min(high, limit), ln of the share of the prior, and the excess."""
    top = np.clip(limit, low * (1.0 + 1e-6), high)
    value = low * (top / low) ** to_unit(x)
    return value, np.log(np.log(top / low) / np.log(high / low)), np.log(low / np.maximum(limit, 1e-6))


def spectrum_parameters(seen: Primary) -> list[Parameter]:
    """Return Teff (log-uniform), log g and [Fe/H] (uniform), each guided by its measurement."""
    teff_scale_k = 0.0 if seen.teff_k is None else LEAST_TEFF_SHARE * seen.teff_k.value
    return [
        Parameter("teff_k", "K", LogUniform(*TEFF_RANGE_K), optional_guide(seen.teff_k, *TEFF_RANGE_K, teff_scale_k)),
        Parameter("logg", "dex", Uniform(*LOGG_RANGE), optional_guide(seen.logg, *LOGG_RANGE, LEAST_DEX)),
        Parameter("feh", "dex", Uniform(*FEH_RANGE), optional_guide(seen.feh, *FEH_RANGE, LEAST_DEX)),
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


def stripped_seen_stars(system: System) -> list[SeenStar]:
    """Return the stripped counterparts of the ordinary kinds that the measured log g leaves open."""
    kinds = ordinary_seen_stars(system)
    stripped: list[SeenStar] = []
    if any(not isinstance(kind, Giant) for kind in kinds):
        stripped.append(StrippedStar(giant=False))
    if any(isinstance(kind, Giant) for kind in kinds):
        stripped.append(StrippedStar(giant=True))
    return stripped


def _torres_mass_range_msun(seen: Primary) -> tuple[float, float]:
    """Mass of the Torres relation two scatters down and up, at the measured spectrum; wide open without Teff."""
    if seen.teff_k is None:
        return 0.0, np.inf
    logg = 4.5 if seen.logg is None else max(seen.logg.value, GIANT_LOGG)
    feh = 0.0 if seen.feh is None else seen.feh.value
    mass = float(torres_mass_msun(np.array([seen.teff_k.value]), np.array([logg]), np.array([feh]))[0])
    factor = 10.0 ** (2.0 * TORRES_MASS_SCATTER_DEX)
    return mass / factor, mass * factor
