"""What was measured of one system, as frozen records in the units their names state.

A record holds what the observer gave, checked and converted once by the reader; nothing here computes.
``None`` means "not given".
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field


@dataclass(frozen=True)
class Measurement:
    """A measured value with its one-sigma error, both in the unit that the field's name states."""

    value: float
    error: float


@dataclass(frozen=True)
class Sky:
    """Position on the sky (ICRS, degrees)."""

    ra_deg: float
    dec_deg: float


@dataclass(frozen=True)
class Distance:
    """Parallax (zero point already subtracted) or distance; exactly one of them is given."""

    parallax_mas: Measurement | None = None
    distance_pc: Measurement | None = None


@dataclass(frozen=True)
class Extinction:
    """Reddening: a measured E(B-V), or an upper bound of a flat prior, and the shape R_V of the law."""

    ebv_mag: Measurement | None = None
    ebv_max_mag: float | None = None
    r_v: float = 3.1


@dataclass(frozen=True)
class Primary:
    """The star that is seen. ``emission_lines``: gas around it may add infrared light."""

    teff_k: Measurement | None = None
    logg: Measurement | None = None
    feh: Measurement | None = None
    vsini_km_s: float | None = None
    mass_msun: Measurement | None = None
    emission_lines: bool = False


@dataclass(frozen=True)
class ThieleInnes:
    """Thiele-Innes elements of the photocentre's orbit (mas) and their 4x4 covariance (mas^2, order A B F G)."""

    a_mas: float
    b_mas: float
    f_mas: float
    g_mas: float
    covariance: tuple[tuple[float, float, float, float], ...]


@dataclass(frozen=True)
class Orbit:
    """The seen star's orbit. An error of zero for period or eccentricity means "not given".

    Where the file gives no period, it is not-a-number until the epoch velocities have told it.
    """

    period_d: Measurement
    eccentricity: Measurement
    eccentricity_given: bool = True
    period_given: bool = True
    k1_km_s: Measurement | None = None
    inclination_deg: Measurement | None = None
    photocentre_mas: Measurement | None = None
    photocentre_band: str | None = None
    thiele_innes: ThieleInnes | None = None


@dataclass(frozen=True)
class Magnitude:
    """A measured magnitude; ``band`` is the canonical identifier, ``system`` is "Vega" or "AB"."""

    band: str
    mag: float
    error_mag: float
    system: str


@dataclass(frozen=True)
class MagnitudeLimit:
    """The source is fainter than ``fainter_than_mag`` at this confidence."""

    band: str
    fainter_than_mag: float
    confidence: float
    system: str


@dataclass(frozen=True)
class LightLimit:
    """Upper limit on (companion's flux / seen star's flux) in a wavelength window.

    ``vsini_max_km_s`` and ``teff_range_k`` say which companions the search would have found.
    """

    wavelength_nm: tuple[float, float]
    ratio_max: float
    confidence: float
    vsini_max_km_s: float | None = None
    teff_range_k: tuple[float, float] | None = None


@dataclass(frozen=True)
class Velocities:
    """Epoch velocities read from ``file`` (barycentric times, days; km/s)."""

    file: str
    time_bjd: tuple[float, ...]
    rv_km_s: tuple[float, ...]
    rv_error_km_s: tuple[float, ...]
    instrument: tuple[str, ...]


@dataclass(frozen=True)
class Variability:
    """What a light curve allows; ``eclipses`` is "none", "seen" or "unknown".

    The semi-amplitude at half the orbital period is limited or measured, not both.
    """

    band: str
    ellipsoidal_max_mag: float | None = None
    eclipses: str = "unknown"
    eclipse_depth_min_mag: float | None = None
    ellipsoidal_mag: Measurement | None = None


@dataclass(frozen=True)
class XRay:
    """Upper limit on the X-ray luminosity, 0.5-7 keV."""

    luminosity_max_erg_s: float
    confidence: float


@dataclass(frozen=True)
class Imaging:
    """No resolved source brighter than ``contrast_mag`` at each ``separation_mas``."""

    band: str
    separation_mas: tuple[float, ...]
    contrast_mag: tuple[float, ...]


@dataclass(frozen=True)
class Assumptions:
    """Mass walls between kinds of remnant, and how much the companion may outshine the seen star in the optical."""

    white_dwarf_max_msun: float = 1.38
    neutron_star_min_msun: float = 1.1
    neutron_star_max_msun: float = 2.3
    black_hole_min_msun: float = 2.3
    companion_to_seen_light_max: float = 3.0


@dataclass(frozen=True)
class CustomPassband:
    """A passband of the user's own: photon-counting throughput from a file, and its zero point in Jy."""

    id: str
    file: str
    system: str
    zero_point_jy: float | None
    wavelength_nm: tuple[float, ...]
    throughput: tuple[float, ...]


@dataclass(frozen=True)
class System:
    """Everything measured of one system. ``source`` is the file it was read from, for error messages."""

    name: str
    source: str
    distance: Distance
    orbit: Orbit
    magnitudes: tuple[Magnitude, ...]
    magnitude_limits: tuple[MagnitudeLimit, ...] = ()
    sky: Sky | None = None
    extinction: Extinction | None = None
    primary: Primary = field(default_factory=Primary)
    light_limits: tuple[LightLimit, ...] = ()
    velocities: Velocities | None = None
    variability: Variability | None = None
    x_ray: XRay | None = None
    imaging: Imaging | None = None
    assumptions: Assumptions = field(default_factory=Assumptions)
    prior_odds: Mapping[str, float] = field(default_factory=dict)
    passbands: tuple[CustomPassband, ...] = ()
