"""Tides between the seen star and its companion: how its light waves at half the period, how soon it is locked.

- how large are the ellipsoidal variations? :func:`ellipsoidal_amplitude_mag`
- and in an eccentric orbit? times :func:`eccentric_share`
- how strongly does its surface brighten with gravity? :func:`gravity_darkening`
- does it turn with the orbit? :func:`synchronisation_time_myr`, an estimate

Every function takes numbers or arrays that broadcast together. Star 1 is the one that is seen. The hot paths check
nothing: an unphysical value gives nan.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from vetter.physics.roche import roche_lobe_fraction

FloatArray = NDArray[np.float64]

LIMB_DARKENING = 0.5
"""Linear limb darkening of a star like the Sun in red light (0.3 hot and red, 0.7 cool and blue; judgement)."""

CONVECTIVE_BELOW_K = 7000.0
"""Cooler stars have a convective envelope (Lucy 1967, Z. Astrophys. 65, 89, for its gravity darkening)."""

_MAG_PER_FRACTION = 2.5 / np.log(10.0)
_ORBIT_POINTS = 512
_SECOND_RADIATION_CM_K = 1.438777
"""h c / k, cm K."""


def ellipsoidal_amplitude_mag(
    mass_ratio: ArrayLike,
    radius_over_separation: ArrayLike,
    sin_inclination: ArrayLike,
    gravity_darkening: ArrayLike,
    limb_darkening: ArrayLike = LIMB_DARKENING,
    flux_ratio: ArrayLike = 0.0,
) -> FloatArray:
    """Return the semi-amplitude (mag) of the light of both stars at half the orbital period, for a circular orbit.

    Parameters
    ----------
    mass_ratio : M2/M1 > 0, companion over seen star
    radius_over_separation : volume radius of the seen star over the separation, up to its Roche lobe; larger is held
        at the lobe
    sin_inclination : 0-1
    gravity_darkening : exponent of local gravity in the flux of the band, see :func:`gravity_darkening`; 0.2-1
    limb_darkening : linear coefficient, 0.3-0.7
    flux_ratio : F2/F1 of the companion in the band; its light dilutes the variation

    Leading term: Morris 1985, ApJ 295, 143, eq. 1. Next term in (R/a)^2: Morris & Naftilan 1993, ApJ 419, 344 (from
    memory; it removes the dependence on the inclination that a numerical Roche star shows). The rest is fitted here
    to such stars (M2/M1 0.05-30, the ranges above, inclination 25-90 degrees, turning with the orbit): 1.5 % rms and
    4.4 % at worst up to a filling of 0.9. Without them the leading term is too small by up to 40 % there.
    """
    q, r, s, g, u = (
        np.asarray(x, dtype=float)
        for x in (mass_ratio, radius_over_separation, sin_inclination, gravity_darkening, limb_darkening)
    )
    lobe = roche_lobe_fraction(1.0 / q)
    r = np.minimum(r, lobe)
    leading = 0.15 * (15.0 + u) * (1.0 + g) / (3.0 - u) * q * r**3 * s * s
    repair = _near_filling_repair(q, r, s * s, g, u, (r / lobe) ** 2)
    return np.asarray(_MAG_PER_FRACTION * leading * repair / (1.0 + np.asarray(flux_ratio, dtype=float)))


def _near_filling_repair(
    q: FloatArray, r: FloatArray, sin2: FloatArray, g: FloatArray, u: FloatArray, filling2: FloatArray
) -> FloatArray:
    """Factor on the leading term; ``filling2`` is the square of the filling factor."""
    next_term = 15.0 * (1.0 - u) * (3.0 + g) * (6.0 - 7.0 * sin2) * r * r / (9.6 * (15.0 + u) * (1.0 + g))
    f4, f6 = filling2**2, filling2**3
    fitted = 0.114 * f4 + 1.769 * (1.0 + q) * r**3 - 0.433 * g * f4 + 0.627 * g * f6 * sin2
    return np.asarray(1.0 + next_term * (1.0 + 0.443 * f4) + fitted)


def eccentric_share(eccentricity: float, sin_inclination: ArrayLike) -> FloatArray:
    """Return the light's amplitude at half the period over that of a circular orbit of the same semi-major axis.

    The Fourier term at twice the orbital frequency of the equilibrium tide (a/r)^3 [(3/2 sin^2 i - 1) + 3/2 sin^2 i
    cos 2(nu + omega)], root mean square over the unknown omega; 0 <= e < 1. About 1 - 5/2 e^2 for an orbit seen edge
    on: the rest of the variation moves to other harmonics. Derived here; for the tide see Kumar, Ao & Quataert 1995,
    ApJ 449, 294 (from memory).
    """
    sin2 = np.maximum(np.asarray(sin_inclination, dtype=float) ** 2, 1e-6)
    forward, steady, backward = _second_harmonics(eccentricity)
    upright = 2.0 * steady * (1.0 - 2.0 / (3.0 * sin2))
    return np.asarray(np.sqrt(forward**2 + upright**2 + backward**2))


def _second_harmonics(eccentricity: float) -> tuple[float, float, float]:
    """Means over one orbit of (a/r)^3 times cos(2 nu - 2 M), cos 2M and cos(2 nu + 2 M)."""
    nu = np.linspace(-np.pi, np.pi, _ORBIT_POINTS, endpoint=False)
    e = eccentricity
    eccentric = 2.0 * np.arctan2(np.sqrt(1.0 - e) * np.sin(0.5 * nu), np.sqrt(1.0 + e) * np.cos(0.5 * nu))
    mean = eccentric - e * np.sin(eccentric)
    # dM = (r/a)^2 / sqrt(1 - e^2) d nu.
    weight = (1.0 + e * np.cos(nu)) / (1.0 - e * e) ** 1.5
    terms = (np.cos(2.0 * (nu - mean)), np.cos(2.0 * mean), np.cos(2.0 * (nu + mean)))
    forward, steady, backward = (float(np.mean(weight * term)) for term in terms)
    return forward, steady, backward


def gravity_darkening(teff_k: ArrayLike, wavelength_nm: ArrayLike) -> FloatArray:
    """Return the exponent of local gravity in the flux at this wavelength, for a black body.

    Teff goes as g^0.25 where the envelope is radiative (von Zeipel 1924, MNRAS 84, 665) and as g^0.08 where it is
    convective (Lucy 1967, Z. Astrophys. 65, 89), with a ramp between 6500 and 7500 K (judgement).
    """
    teff = np.asarray(teff_k, dtype=float)
    beta = np.interp(teff, [CONVECTIVE_BELOW_K - 500.0, CONVECTIVE_BELOW_K + 500.0], [0.08, 0.25])
    x = _SECOND_RADIATION_CM_K / (np.asarray(wavelength_nm, dtype=float) * 1e-7 * teff)
    return np.asarray(beta * x / -np.expm1(-x))


def synchronisation_time_myr(
    mass_msun: ArrayLike,
    companion_mass_msun: ArrayLike,
    radius_rsun: ArrayLike,
    luminosity_lsun: ArrayLike,
    teff_k: ArrayLike,
    separation_rsun: ArrayLike,
) -> FloatArray:
    """Return the time (Myr) in which tides lock the seen star's rotation to a circular orbit: right to a factor of ten.

    Below 7000 K turbulent friction of the convective envelope, friction time (M R^2 / L)^(1/3): Zahn 1989, A&A 220,
    112 (coefficient 0.02; from memory). Above it radiative damping of the dynamical tide: Zahn 1977, A&A 57, 383,
    with E2 = 1.592e-9 M^2.84 of Hurley, Tout & Pols 2002, MNRAS 329, 897, eqs. 43-44 (from memory). The squared
    radius of gyration is taken as 0.07.
    """
    m, m2, radius, light, teff, a = (
        np.asarray(x, dtype=float)
        for x in (mass_msun, companion_mass_msun, radius_rsun, luminosity_lsun, teff_k, separation_rsun)
    )
    q, r = m2 / m, radius / a
    # (Msun Rsun^2 / Lsun)^(1/3) = 0.4311 yr.
    friction_yr = _FRICTION_UNIT_YR * np.cbrt(m * radius * radius / light)
    convective = 6.0 * 0.02 / friction_yr * q * q * r**6 / _GYRATION2
    dynamical_per_yr = _DYNAMICAL_PER_YR * np.sqrt(m / radius**3)
    damping = 1.592e-9 * m**2.84
    radiative = 5.0 * 2.0 ** (5.0 / 3.0) * dynamical_per_yr * q * q * (1.0 + q) ** (5.0 / 6.0) * damping
    radiative = radiative * r**8.5 / _GYRATION2
    return np.asarray(1e-6 / np.where(teff < CONVECTIVE_BELOW_K, convective, radiative))


_GYRATION2 = 0.07
_YEAR_S = 3.15576e7
_FRICTION_UNIT_YR = float(np.cbrt(1.98841e33 * 6.957e10**2 / 3.828e33)) / _YEAR_S
_DYNAMICAL_PER_YR = float(np.sqrt(1.3271244e26 / 6.957e10**3)) * _YEAR_S
