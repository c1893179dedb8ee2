"""What a scenario is, the machinery all scenarios share, and the registry that finds them.

A new explanation is one new class in this package under ``@register``: its titles, the range and prior of the
companion's mass, its own parameters, and one method that says what light the companion sheds. Distance, dust, the
seen star, the orbit and the walls that hold for any pair of stars are handled here.
"""

from __future__ import annotations

import importlib
import pkgutil
from abc import ABC, abstractmethod
from collections.abc import Mapping, MutableMapping
from dataclasses import dataclass
from functools import cached_property
from typing import ClassVar, NamedTuple

import numpy as np
from numpy.typing import NDArray

from vetter.light.engine import Component
from vetter.observations.astrometry import measured_inclination
from vetter.observations.orbit import k1_error_km_s
from vetter.observations.prediction import HiddenStar, InnerOrbit, Prediction
from vetter.physics import kepler, roche
from vetter.scenarios.context import Context
from vetter.scenarios.orbit import CompanionDraw, OrbitDraws
from vetter.scenarios.priors import LogUniform, Parameter, Uniform
from vetter.scenarios.seen_star import SeenStar, SeenStarState, ordinary_seen_stars
from vetter.system.model import Assumptions

FloatArray = NDArray[np.float64]

NO_SEEN_STAR = "no ordinary star has the seen star's spectrum"

_REGISTRY: dict[str, type[Scenario]] = {}


class Wall(NamedTuple):
    """A region of parameter space that is closed, and why, in words that can be printed.

    ``excess`` (n,) is above zero behind the wall and, where it can, tells how far.
    """

    excess: FloatArray
    words: str


@dataclass(frozen=True)
class Companion:
    """The companion of each sample.

    Attributes
    ----------
    components : the stars that shine, none for a dark companion
    radius_rsun : (n,) size for the Roche wall, None where the companion is a point
    walls : regions closed by the companion's own physics
    unrelated_mas : (n,) distance on the sky where the light is that of a star free of the orbit; else None
    """

    components: tuple[Component, ...] = ()
    radius_rsun: FloatArray | None = None
    walls: tuple[Wall, ...] = ()
    unrelated_mas: FloatArray | None = None


class OuterOrbit(NamedTuple):
    """The measured orbit of each sample: masses (n,) in Msun, period in days, eccentricity."""

    mass_msun: FloatArray
    companion_mass_msun: FloatArray
    period_d: float
    eccentricity: float


class Scenario(ABC):
    """One explanation of the unseen mass.

    Class attributes
    ----------------
    name : identifier, as on the command line and in verdicts.json
    title : as printed
    rank : place in the table, ordinary explanations first
    ordinary : True when no compact remnant beyond the white dwarf is involved
    on_request : True for a row that is tried only when it is asked for
    """

    name: ClassVar[str]
    title: ClassVar[str]
    rank: ClassVar[int]
    ordinary: ClassVar[bool]
    on_request: ClassVar[bool] = False

    @abstractmethod
    def mass_prior(self, assumptions: Assumptions) -> LogUniform | Uniform:
        """Return the prior of the companion's mass (solar)."""

    def companion_parameters(self) -> list[Parameter]:
        """Return the companion's own parameters beside its mass; none by default."""
        return []

    @abstractmethod
    def companion(self, mass_msun: FloatArray, feh: FloatArray, draws: Mapping[str, FloatArray]) -> Companion:
        """Return the companions of given mass (n,) and [Fe/H] (n,) with the drawn parameters."""

    def orbit_walls(
        self, companion: Companion, outer: OuterOrbit, draws: MutableMapping[str, FloatArray]
    ) -> tuple[Wall, ...]:
        """Return walls that need the outer orbit; none by default. Derived quantities may be added to ``draws``."""
        return ()

    def inner_masses_msun(
        self, mass_msun: FloatArray, draws: Mapping[str, FloatArray]
    ) -> tuple[FloatArray, FloatArray] | None:
        """Return the masses (n,) of both stars of a companion that is a pair with ``inner_period_d`` in ``draws``.

        In the order of the companion's components. None by default.
        """
        return None

    def branches(self, context: Context) -> list[Branch]:
        """Return the discrete variants that are run separately; their evidences are averaged."""
        return [Branch(self, seen, context) for seen in ordinary_seen_stars(context.system)]


@dataclass(frozen=True)
class Sampled:
    """One evaluation of a branch at n points.

    Attributes
    ----------
    prediction : predicted quantities
    ln_ratio : (n,) ln(prior / density drawn from), -inf behind a wall
    walls : every wall, open or not
    nuisances : (n, k) scores of published relations
    values : parameters and derived quantities by name, each (n,)
    """

    prediction: Prediction
    ln_ratio: FloatArray
    walls: tuple[Wall, ...]
    nuisances: FloatArray
    values: Mapping[str, FloatArray]


@dataclass(frozen=True)
class Branch:
    """A scenario with one kind of seen star: maps points in normal coordinates to predicted quantities."""

    scenario: Scenario
    seen: SeenStar
    context: Context

    @cached_property
    def free_parameters(self) -> list[Parameter]:
        """Parameters that are drawn independently, in the order of the first coordinates."""
        seen = self.seen.parameters(self.context.system.primary)
        return [*self.context.shared_parameters(), *seen, *self.scenario.companion_parameters()]

    @cached_property
    def parameters(self) -> list[Parameter]:
        """All parameters: the free ones, then the seen star's mass, the companion's mass and the inclination."""
        return [*self.free_parameters, self.seen.mass_parameter, *self.orbit_draws.parameters()]

    @cached_property
    def orbit_draws(self) -> OrbitDraws:
        """The orbit's part of the map."""
        orbit = self.context.system.orbit
        error = 0.0 if orbit.k1_km_s is None else k1_error_km_s(orbit)
        prior = self.scenario.mass_prior(self.context.system.assumptions)
        return OrbitDraws(orbit, error, measured_inclination(orbit), prior)

    def sample(self, x: FloatArray) -> Sampled:
        """Return predictions for points ``x`` (n, number of parameters) that are standard normal a priori."""
        draws: dict[str, FloatArray] = {}
        ln_ratio = np.zeros(x.shape[0])
        for column, parameter in enumerate(self.free_parameters):
            draws[parameter.name], ratio = parameter.draw(x[:, column])
            ln_ratio = ln_ratio + ratio
        star, orbit, walls = self._masses(draws, x)
        companion = self.scenario.companion(orbit.mass_msun, star.feh, draws)
        orbit_walls = self.scenario.orbit_walls(companion, self._outer_orbit(star, orbit), draws)
        prediction = self._predict(draws, star, orbit, companion)
        walls += [*self._walls(star, orbit, companion, prediction), *companion.walls, *orbit_walls]
        ln_ratio = ln_ratio + star.ln_ratio + orbit.ln_ratio
        for wall in walls:
            ln_ratio = np.where(wall.excess > 0.0, -np.inf, ln_ratio)
        scores = [draws[parameter.name] for parameter in self.parameters if parameter.counts]
        nuisances = np.stack(scores, axis=1) if scores else np.zeros((len(x), 0))
        values = draws | _derived(star, orbit, companion, prediction)
        return Sampled(prediction, ln_ratio, tuple(walls), nuisances, values)

    def _outer_orbit(self, star: SeenStarState, orbit: CompanionDraw) -> OuterOrbit:
        measured = self.context.system.orbit
        return OuterOrbit(star.mass_msun, orbit.mass_msun, measured.period_d.value, measured.eccentricity.value)

    def _masses(self, draws: dict[str, FloatArray], x: FloatArray) -> tuple[SeenStarState, CompanionDraw, list[Wall]]:
        """The seen star, then the companion that the orbit asks for, and the walls met on the way."""
        x_seen, x_mass, x_inclination = x[:, -3], x[:, -2], x[:, -1]
        velocity = self.orbit_draws.velocity(x_mass)
        if velocity is None:
            star = self.seen.star(draws, x_seen, np.full(len(x), np.inf))
            orbit = self.orbit_draws.companion_from_prior(x_mass, x_inclination)
            return star, orbit, [Wall(star.excess, NO_SEEN_STAR)]
        star = self.seen.star(draws, x_seen, velocity.mass_max_msun)
        orbit = self.orbit_draws.companion_from_velocity(velocity, x_inclination, star.mass_msun)
        heaviest = self.orbit_draws.prior.high
        needs = f"the orbit needs more than {heaviest:g} Msun at any inclination"
        walls = [
            Wall(np.log(velocity.f_msun / heaviest), f"{needs}, whatever the mass of the seen star"),
            Wall(star.excess, f"{needs}, for any ordinary mass of the seen star"),
        ]
        return star, orbit._replace(ln_ratio=orbit.ln_ratio + velocity.ln_ratio), walls

    def _predict(
        self, draws: Mapping[str, FloatArray], star: SeenStarState, orbit: CompanionDraw, companion: Companion
    ) -> Prediction:
        """Light and orbit of every sample."""
        engine, system = self.context.engine, self.context.system
        distance_pc, ebv_mag = draws["distance_pc"], draws["ebv_mag"]
        r_v = 3.1 if system.extinction is None else system.extinction.r_v
        seen = engine.magnitudes(
            Component("star", star.teff_k, star.logg, star.feh, star.radius_rsun), distance_pc, r_v * ebv_mag
        )
        others = [engine.magnitudes(component, distance_pc, r_v * ebv_mag) for component in companion.components]
        ratios = [10.0 ** (0.4 * (seen - other)) for other in others]
        ratio = sum(ratios, start=np.zeros(seen.shape))
        bands = len(engine.bands)
        brightest = _brightest(companion, others, self.context.optical_column)
        dark = np.full(len(distance_pc), np.nan)
        sin_i = np.sqrt(1.0 - orbit.cos_inclination**2)
        period_d, e = system.orbit.period_d.value, system.orbit.eccentricity.value
        return Prediction(
            magnitudes=seen[:, :bands] - 2.5 * np.log10(1.0 + ratio[:, :bands]),
            window_ratio=ratio[:, bands:],
            optical_ratio=ratio[:, self.context.optical_column],
            distance_pc=distance_pc,
            ebv_mag=ebv_mag,
            teff_k=star.teff_k,
            logg=star.logg,
            feh=star.feh,
            companion_teff_k=dark if brightest is None else brightest.teff_k,
            companion_logg=dark if brightest is None else brightest.logg,
            mass_msun=star.mass_msun,
            companion_mass_msun=orbit.mass_msun,
            k1_km_s=kepler.semi_amplitude_km_s(star.mass_msun, orbit.mass_msun, period_d, sin_i, e),
            inclination_deg=np.degrees(np.arccos(orbit.cos_inclination)),
            photocentre_mas=self._photocentre_mas(star, orbit, companion, distance_pc, ratio),
            ordinary_seen_star=self.seen.ordinary,
            radius_rsun=star.radius_rsun,
            separation_rsun=kepler.separation_rsun(star.mass_msun + orbit.mass_msun, period_d),
            band_ratio=ratio[:, :bands],
            hidden_stars=_hidden_stars(companion, ratios, bands),
            inner=self._inner_orbit(orbit, draws),
            unrelated_mas=companion.unrelated_mas,
        )

    def _photocentre_mas(
        self,
        star: SeenStarState,
        orbit: CompanionDraw,
        companion: Companion,
        distance_pc: FloatArray,
        ratio: FloatArray,
    ) -> FloatArray:
        """Photocentre's semi-major axis; light that is free of the orbit dilutes it and does not move."""
        column = self.context.photocentre_column
        flux_ratio = np.zeros(len(distance_pc)) if column is None else ratio[:, column]
        separation = kepler.separation_au(star.mass_msun + orbit.mass_msun, self.context.system.orbit.period_d.value)
        geometry = (1000.0 / distance_pc, separation, star.mass_msun, orbit.mass_msun)
        if companion.unrelated_mas is None:
            return kepler.photocentre_mas(*geometry, flux_ratio)
        return kepler.photocentre_mas(*geometry) / (1.0 + flux_ratio)

    def _inner_orbit(self, orbit: CompanionDraw, draws: Mapping[str, FloatArray]) -> InnerOrbit | None:
        masses = self.scenario.inner_masses_msun(orbit.mass_msun, draws)
        return None if masses is None else InnerOrbit(*masses, draws["inner_period_d"])

    def _walls(
        self, star: SeenStarState, orbit: CompanionDraw, companion: Companion, prediction: Prediction
    ) -> list[Wall]:
        """Walls that hold for every scenario."""
        system = self.context.system
        largest = system.assumptions.companion_to_seen_light_max
        e = system.orbit.eccentricity.value
        separation_rsun = prediction.separation_rsun
        lobe = roche.roche_lobe_rsun(star.mass_msun, orbit.mass_msun, separation_rsun, e)
        walls = [Wall(np.log(star.radius_rsun / lobe), "the seen star would overflow its Roche lobe")]
        if companion.components:
            words = f"the companion would outshine the seen star more than {largest:g} times in the optical"
            walls.append(Wall(np.log(np.maximum(prediction.optical_ratio, 1e-30) / largest), words))
        if companion.radius_rsun is not None:
            lobe = roche.roche_lobe_rsun(orbit.mass_msun, star.mass_msun, separation_rsun, e)
            walls.append(Wall(np.log(companion.radius_rsun / lobe), "the companion would overflow its Roche lobe"))
        return walls


def _brightest(companion: Companion, magnitudes: list[FloatArray], column: int) -> Component | None:
    """The component that shines most in the optical, sample by sample; None for a dark companion."""
    if not companion.components:
        return None
    if len(companion.components) == 1:
        return companion.components[0]
    which = np.argmin(np.stack([m[:, column] for m in magnitudes]), axis=0)

    def pick(name: str) -> FloatArray:
        return np.asarray(np.choose(which, [getattr(component, name) for component in companion.components]))

    return Component("star", pick("teff_k"), pick("logg"), pick("feh"), pick("radius_rsun"))


def _hidden_stars(companion: Companion, ratios: list[FloatArray], bands: int) -> tuple[HiddenStar, ...]:
    """The components that move with the companion, with their light in the bands."""
    if companion.unrelated_mas is not None:
        return ()
    return tuple(HiddenStar(body, r[:, :bands]) for body, r in zip(companion.components, ratios, strict=True))


def _derived(
    star: SeenStarState, orbit: CompanionDraw, companion: Companion, prediction: Prediction
) -> dict[str, FloatArray]:
    """Quantities worth reporting that are not parameters."""
    values = {
        "m1_msun": star.mass_msun,
        "r1_rsun": star.radius_rsun,
        "teff1_k": star.teff_k,
        "logg1": star.logg,
        "m2_msun": orbit.mass_msun,
        "inclination_deg": prediction.inclination_deg,
        "k1_km_s": prediction.k1_km_s,
    }
    for place, component in enumerate(companion.components):
        suffix = "2" if len(companion.components) == 1 else f"2{'ab'[place]}"
        values |= {f"teff{suffix}_k": component.teff_k, f"r{suffix}_rsun": component.radius_rsun}
    return values


def register(cls: type[Scenario]) -> type[Scenario]:
    """Class decorator: make a scenario known. Raises ValueError when the name is taken by another class."""
    known = _REGISTRY.get(cls.name)
    if known is not None and known.__qualname__ != cls.__qualname__:
        raise ValueError(f"a scenario named {cls.name!r} is already registered by {known.__module__}")
    _REGISTRY[cls.name] = cls
    return cls


def registered(on_request: bool = False) -> dict[str, Scenario]:
    """Return the registered scenarios by name in order of rank, importing the modules of this package first.

    Those that run only on request are left out unless ``on_request``.
    """
    package = importlib.import_module("vetter.scenarios")
    for module in pkgutil.iter_modules(package.__path__):
        importlib.import_module(f"vetter.scenarios.{module.name}")
    ordered = sorted(_REGISTRY.values(), key=lambda cls: (cls.rank, cls.name))
    ordered = [cls for cls in ordered if on_request or not cls.on_request]
    return {cls.name: cls() for cls in ordered}
