"""What a light curve says: ellipsoidal variation at half the period, and eclipses seen or not seen."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, ClassVar, NamedTuple, Self

import numpy as np
from numpy.typing import NDArray

from vetter.observations.base import Observation, gaussian_ln_norm, register, residual_from_ln
from vetter.observations.prediction import Prediction
from vetter.physics import kepler, tides
from vetter.physics.eclipses import conjunction_separations, covered_fraction
from vetter.system.model import Measurement, System

if TYPE_CHECKING:
    from vetter.light.engine import LightEngine

FloatArray = NDArray[np.float64]

LIMIT_SIGMA = 1.959964
"""A 95 % limit in sigmas of a half-Gaussian."""

ELLIPSOIDAL_MODEL_ERROR = 0.10
"""Relative error of a predicted ellipsoidal amplitude: limb and gravity darkening of the star (judgement)."""

NOTICED_DEPTH_MAG = 0.01
"""Depth that would have been noticed where the file does not say (judgement)."""

LN_NEVER = -50.0
"""Ln of the chance of seeing eclipses where none are possible: 10 sigma, so that a fit can still find its way."""

ECCENTRIC_CAUTION = 0.2
"""Above this eccentricity the amplitude at half the period hangs on an argument of periastron that is not known."""

_PERIASTRA = 16
_TILTS = 8


@register
@dataclass(frozen=True)
class VariabilityObservation(Observation):
    """The amplitude at half the period (a half-Gaussian limit, or a Gaussian measurement), and eclipses.

    A limit of 95 % is a half-Gaussian as in the light limits. A depth that would have been noticed is such a limit on
    the depth of every eclipse: the chance of missing one is exp(-depth^2 / 2 s^2), averaged over the argument of
    periastron, which is not known. Where eclipses are seen the chance of noticing one counts instead.

    Attributes
    ----------
    column : of the light curve's band among the engine's bands
    wavelength_nm : of that band
    eccentricity : of the orbit
    limit_mag, measured_mag : on the semi-amplitude at half the period, at most one of them
    eclipses : "none", "seen" or "unknown"
    depth_mag : least depth that would have been noticed
    """

    name: ClassVar[str] = "variability"
    label: ClassVar[str] = "light curve"
    rank: ClassVar[int] = 70
    column: int
    wavelength_nm: float
    eccentricity: float
    limit_mag: float | None
    measured_mag: Measurement | None
    eclipses: str
    depth_mag: float

    @classmethod
    def from_system(cls, system: System, engine: LightEngine) -> Self | None:
        """Return the observation, or None when the light curve says nothing or was not given."""
        given = system.variability
        if given is None:
            return None
        column = engine.bands.index(given.band)
        found = cls(
            column,
            0.1 * engine.pivots_angstrom[column],
            system.orbit.eccentricity.value,
            given.ellipsoidal_max_mag,
            given.ellipsoidal_mag,
            given.eclipses,
            NOTICED_DEPTH_MAG if given.eclipse_depth_min_mag is None else given.eclipse_depth_min_mag,
        )
        return found if found.count else None

    @property
    def count(self) -> int:
        """Number of statements: amplitude, eclipses."""
        has_amplitude = self.limit_mag is not None or self.measured_mag is not None
        return int(has_amplitude) + int(self.eclipses != "unknown")

    @property
    def ln_norm(self) -> float:
        """Constant part of the ln likelihood; zero for limits."""
        return 0.0 if self.measured_mag is None else gaussian_ln_norm([_measured_error(self.measured_mag)])

    def residuals(self, predicted: Prediction) -> FloatArray:
        """Return (n, k), one column for the amplitude and one for eclipses, where given."""
        columns = []
        if self.measured_mag is not None:
            excess = self.ellipsoidal_mag(predicted) - self.measured_mag.value
            columns.append(excess / _measured_error(self.measured_mag))
        elif self.limit_mag is not None:
            columns.append(self.ellipsoidal_mag(predicted) * (LIMIT_SIGMA / self.limit_mag))
        if self.eclipses == "none":
            ln_missed = np.log(self._missed(predicted)) + np.log(self._inner_missed(predicted))
            columns.append(residual_from_ln(ln_missed))
        elif self.eclipses == "seen":
            noticed = np.maximum(1.0 - self._missed(predicted), 0.0)
            columns.append(residual_from_ln(np.log(noticed + np.exp(LN_NEVER))) + self._too_wide(predicted))
        return np.stack(columns, axis=1)

    def ellipsoidal_mag(self, predicted: Prediction) -> FloatArray:
        """Return the semi-amplitude (n,) at half the orbital period, in this light curve."""
        return ellipsoidal_mag(predicted, self.column, self.wavelength_nm, self.eccentricity)

    def describe(self) -> str:
        """Return what the light curve says, in a few words."""
        parts = {"none": ["no eclipses"], "seen": ["eclipses"], "unknown": []}[self.eclipses]
        if self.limit_mag is not None:
            parts = ["limit on the ellipsoidal variation", *parts]
        elif self.measured_mag is not None:
            parts = ["ellipsoidal variation", *parts]
        return " and ".join(parts)

    def cautions(self, system: System) -> list[str]:
        """Return what was assumed of the depth, and what an eccentric orbit does to the amplitude."""
        said = []
        given = system.variability
        if self.eclipses != "unknown" and given is not None and given.eclipse_depth_min_mag is None:
            said.append(f"No depth was given beside eclipses: {NOTICED_DEPTH_MAG:g} mag would have been noticed.")
        if (self.limit_mag or self.measured_mag) and self.eccentricity > ECCENTRIC_CAUTION:
            said.append(
                f"At an eccentricity of {self.eccentricity:.2g} the tide spreads over many harmonics of the orbit: the "
                "amplitude predicted at half the period is a mean over the unknown argument of periastron."
            )
        return said

    def _missed(self, predicted: Prediction) -> FloatArray:
        """Chance (n,) that every eclipse of the seen star and its companion goes unnoticed."""
        missed = np.ones(predicted.k1_km_s.shape)
        close = np.flatnonzero(_closest_rsun(predicted, self.eccentricity) < _reach_rsun(predicted))
        if close.size:
            depths = eclipse_depths_mag(predicted, self.column, self.eccentricity, close)
            missed[close] = np.mean(self._unnoticed(depths.companion_in_front, depths.star_in_front), axis=1)
        return np.maximum(missed, np.finfo(float).tiny)

    def _inner_missed(self, predicted: Prediction) -> FloatArray:
        """Chance (n,) that the eclipses inside a hidden pair go unnoticed, its plane unknown: isotropic."""
        inner = inner_eclipses(predicted, self.column)
        if inner is None:
            return np.ones(predicted.k1_km_s.shape)
        noticed = 1.0 - np.mean(self._unnoticed(inner.first_mag, inner.second_mag), axis=1)
        return np.asarray(1.0 - inner.probability * noticed)

    def _unnoticed(self, first_mag: FloatArray, second_mag: FloatArray) -> FloatArray:
        scale = LIMIT_SIGMA / self.depth_mag
        return np.asarray(np.exp(-0.5 * scale**2 * (first_mag**2 + second_mag**2)))

    def _too_wide(self, predicted: Prediction) -> FloatArray:
        """Ln of the closest approach over the sum of the radii where no eclipse is possible: a slope to follow."""
        return np.maximum(np.log(_closest_rsun(predicted, self.eccentricity) / _reach_rsun(predicted)), 0.0)


class EclipseDepths(NamedTuple):
    """Depths (n, arguments of periastron) in mag of the eclipse of the seen star, and of that of its companion."""

    companion_in_front: FloatArray
    star_in_front: FloatArray


class InnerEclipses(NamedTuple):
    """Eclipses inside a hidden pair: chance (n,) of a plane that shows any, and both depths (n, tilts) in mag there."""

    probability: FloatArray
    first_mag: FloatArray
    second_mag: FloatArray


def ellipsoidal_mag(predicted: Prediction, column: int, wavelength_nm: float, eccentricity: float = 0.0) -> FloatArray:
    """Return the semi-amplitude (n,) of all the light in a band (``column``) at half the orbital period.

    Both the seen star and those of the companion bulge along the line between the two, so their variations add; each
    is diluted by the other's light.
    """
    sine = np.sin(np.radians(predicted.inclination_deg))
    ratio = predicted.companion_mass_msun / predicted.mass_msun
    total = 1.0 + predicted.band_ratio[:, column]
    share = tides.eccentric_share(eccentricity, sine) if eccentricity > 0.0 else 1.0

    def amplitude(mass_ratio: FloatArray, radius: FloatArray, teff: FloatArray) -> FloatArray:
        darkening = tides.gravity_darkening(teff, wavelength_nm)
        return tides.ellipsoidal_amplitude_mag(mass_ratio, radius / predicted.separation_rsun, sine, darkening)

    light = amplitude(ratio, predicted.radius_rsun, predicted.teff_k)
    for star in predicted.hidden_stars:
        light = light + star.band_ratio[:, column] * amplitude(1.0 / ratio, star.body.radius_rsun, star.body.teff_k)
    return np.asarray(share * light / total)


def eclipse_depths_mag(
    predicted: Prediction, column: int, eccentricity: float, rows: NDArray[np.intp]
) -> EclipseDepths:
    """Return the depths of both eclipses in a band for these samples, over all arguments of periastron.

    Uniform discs, no limb darkening. The stars of a hidden pair pass one by one: the deepest of them counts.
    """
    arguments = (np.arange(_PERIASTRA) + 0.5) * np.pi / _PERIASTRA - 0.5 * np.pi if eccentricity > 0.0 else np.zeros(1)
    cosine = np.cos(np.radians(predicted.inclination_deg[rows]))[:, None]
    apart = conjunction_separations(predicted.separation_rsun[rows][:, None], cosine, eccentricity, arguments)
    radius, total = predicted.radius_rsun[rows][:, None], 1.0 + predicted.band_ratio[rows, column][:, None]
    front, back = np.zeros(apart.star_in_front.shape), np.zeros(apart.star_in_front.shape)
    for star in predicted.hidden_stars:
        other, light = star.body.radius_rsun[rows][:, None], star.band_ratio[rows, column][:, None]
        front = np.maximum(front, covered_fraction(radius, other, apart.companion_in_front) / total)
        back = np.maximum(back, covered_fraction(other, radius, apart.star_in_front) * light / total)
    return EclipseDepths(_depth_mag(front), _depth_mag(back))


def inner_eclipses(predicted: Prediction, column: int) -> InnerEclipses | None:
    """Return the eclipses of a circular hidden pair in a band, diluted by everything else; None without a pair.

    The inner plane is not known: inclinations that eclipse are tried evenly in cos i, and their share is the chance.
    """
    inner = predicted.inner
    if inner is None:
        return None
    first, second = predicted.hidden_stars
    radii = (first.body.radius_rsun[:, None], second.body.radius_rsun[:, None])
    axis = kepler.separation_rsun(inner.first_msun + inner.second_msun, inner.period_d)
    reach = radii[0] + radii[1]
    apart = reach * (np.arange(_TILTS) + 0.5) / _TILTS
    total = 1.0 + predicted.band_ratio[:, column][:, None]
    hidden = [
        covered_fraction(own, other, apart) * star.band_ratio[:, column][:, None] / total
        for star, own, other in ((first, *radii), (second, radii[1], radii[0]))
    ]
    return InnerEclipses(np.minimum(reach[:, 0] / axis, 1.0), _depth_mag(hidden[0]), _depth_mag(hidden[1]))


def inner_ellipsoidal_mag(predicted: Prediction, column: int, wavelength_nm: float) -> FloatArray | None:
    """Return the semi-amplitude (n,) at half the INNER period of a hidden pair seen edge on; None without a pair.

    Diluted by the seen star. No likelihood uses it: the file's limit is at half the outer period.
    """
    inner = predicted.inner
    if inner is None:
        return None
    axis = kepler.separation_rsun(inner.first_msun + inner.second_msun, inner.period_d)
    ratio = inner.second_msun / inner.first_msun
    light = np.zeros(ratio.shape)
    for star, mass_ratio in zip(predicted.hidden_stars, (ratio, 1.0 / ratio), strict=True):
        darkening = tides.gravity_darkening(star.body.teff_k, wavelength_nm)
        own = tides.ellipsoidal_amplitude_mag(mass_ratio, star.body.radius_rsun / axis, 1.0, darkening)
        light = light + own * star.band_ratio[:, column]
    return np.asarray(light / (1.0 + predicted.band_ratio[:, column]))


def _measured_error(measured: Measurement) -> float:
    return float(np.hypot(measured.error, ELLIPSOIDAL_MODEL_ERROR * measured.value))


def _closest_rsun(predicted: Prediction, eccentricity: float) -> FloatArray:
    """Least sky separation (n,) at a conjunction for any argument of periastron."""
    cosine = np.cos(np.radians(predicted.inclination_deg))
    return np.asarray(predicted.separation_rsun * (1.0 - eccentricity) * cosine)


def _reach_rsun(predicted: Prediction) -> FloatArray:
    """Sum (n,) of the radii of the seen star and the companion's largest star."""
    others = [star.body.radius_rsun for star in predicted.hidden_stars]
    return predicted.radius_rsun + (np.max(others, axis=0) if others else 0.0)


def _depth_mag(lost: FloatArray) -> FloatArray:
    """Depth in mag of an eclipse that takes this share (0-1) of the light."""
    return np.asarray(2.5 * np.log10(1.0 / np.maximum(1.0 - lost, 1e-6)))
