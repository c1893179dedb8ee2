"""An X-ray limit: what each explanation would emit is reported beside it and never multiplied in."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING, ClassVar, NamedTuple, Self

import numpy as np
from numpy.typing import NDArray

from vetter.observations.base import Observation, register
from vetter.observations.prediction import Prediction
from vetter.physics import accretion, kepler
from vetter.stars.properties import TEFF_SUN_K
from vetter.system.model import System

if TYPE_CHECKING:
    from vetter.light.engine import LightEngine

FloatArray = NDArray[np.float64]


class Accretion(NamedTuple):
    """X-rays (n,) in erg/s of a dark companion in the seen star's wind: a starved flow, and a thin disc."""

    starved_erg_s: FloatArray
    thin_disc_erg_s: FloatArray


@register
@dataclass(frozen=True)
class XRayObservation(Observation):
    """The limit and its confidence; no residuals, because nobody knows the efficiency of so thin a flow."""

    name: ClassVar[str] = "x_ray"
    label: ClassVar[str] = "X-rays"
    rank: ClassVar[int] = 80
    droppable: ClassVar[bool] = False
    luminosity_max_erg_s: float
    confidence: float

    @classmethod
    def from_system(cls, system: System, engine: LightEngine) -> Self | None:
        """Return the limit, or None when none was given."""
        given = system.x_ray
        return None if given is None else cls(given.luminosity_max_erg_s, given.confidence)

    @property
    def count(self) -> int:
        """Nothing of it enters the likelihood."""
        return 0

    def residuals(self, predicted: Prediction) -> FloatArray:
        """Return (n, 0)."""
        return np.zeros((predicted.k1_km_s.size, 0))

    def describe(self) -> str:
        """Return the datum in a few words, and that it is no part of the table."""
        return "X-ray limit (reported only)"

    def report(self, best: Mapping[str, Prediction]) -> list[str]:
        """Return what the most favourable case of each explanation would emit, beside the limit."""
        if not best:
            return []
        limit = f"The X-ray limit of {self.luminosity_max_erg_s:.1e} erg/s is no part of the table"
        dark = [title for title, predicted in best.items() if is_dark(predicted)]
        said = []
        if dark:
            words = "; ".join(f"{title} {_range(wind_accretion(best[title]))} erg/s" for title in dark)
            said.append(
                f"{limit}. A dark companion in the seen star's wind would emit, between a starved flow and a thin disc "
                f"of {100 * accretion.THIN_DISC_EFFICIENCY:.0f} % efficiency: {words}. The wind is a guess too, too "
                f"strong for cool dwarfs. {accretion.CAUTION}"
            )
        coronae = {title: float(coronal_max_erg_s(predicted)[0]) for title, predicted in best.items()}
        if any(coronae.values()):
            words = "; ".join(f"{title} {value:.1e} erg/s" for title, value in coronae.items() if value)
            said.append(
                f"{limit}. Coronae of all cool stars, if they turn so fast (as in tight pairs) that the emission "
                f"saturates at {accretion.SATURATED_CORONA:.1e} of their light (right to a factor of about 3), would "
                f"reach: {words}. Slower stars emit far less."
            )
        return said


def wind_accretion(predicted: Prediction) -> Accretion:
    """Return the X-rays (n,) of the companion fed by the seen star's wind; circular orbit, point companion."""
    luminosity = predicted.radius_rsun**2 * (predicted.teff_k / TEFF_SUN_K) ** 4
    wind = accretion.stellar_wind(predicted.mass_msun, predicted.radius_rsun, luminosity, predicted.teff_k)
    total = predicted.mass_msun + predicted.companion_mass_msun
    period_d = kepler.orbital_period_d(total, predicted.separation_rsun)
    caught = accretion.captured_fraction(predicted.companion_mass_msun, total, period_d, wind.speed_km_s)
    rate = caught * wind.loss_msun_yr
    starved = accretion.faint_efficiency(rate, predicted.companion_mass_msun)
    return Accretion(accretion.accretion_luminosity_erg_s(rate, starved), accretion.accretion_luminosity_erg_s(rate))


def coronal_max_erg_s(predicted: Prediction) -> FloatArray:
    """Return the most X-rays (n,) that the coronae of the seen and the hidden stars could emit, in erg/s."""
    bodies = [(predicted.radius_rsun, predicted.teff_k)]
    bodies += [(s.body.radius_rsun, s.body.teff_k) for s in predicted.hidden_stars if s.body.kind == "star"]
    total = np.zeros(predicted.k1_km_s.shape)
    for radius, teff in bodies:
        saturated = accretion.coronal_luminosity_max_erg_s(radius**2 * (teff / TEFF_SUN_K) ** 4)
        total = total + np.where(teff < accretion.CORONA_BELOW_K, saturated, 0.0)
    return total


def is_dark(predicted: Prediction) -> bool:
    """Return whether the companion, and the aperture beside the seen star, shed no light at all."""
    return not predicted.hidden_stars and predicted.unrelated_mas is None


def _range(found: Accretion) -> str:
    return f"{float(found.starved_erg_s[0]):.1e} to {float(found.thin_disc_erg_s[0]):.1e}"
