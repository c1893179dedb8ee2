"""Whether two stars eclipse each other, and how deeply, on eccentric orbits too.

omega is the argument of periastron of the seen star's own orbit, as velocities give it. The companion passes in front
at true anomaly 90 degrees - omega, the seen star at 270 degrees - omega. The sky separation there is
r |cos i|; that it can be a little smaller nearby matters only beyond e of 0.8 or so, at grazing eclipses.
Every function takes numbers or arrays that broadcast together; lengths in one unit, angles in radians.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

FloatArray = NDArray[np.float64]
BoolArray = NDArray[np.bool_]


class Conjunctions(NamedTuple):
    """Sky separation of the two centres when the companion, and when the seen star, is in front."""

    companion_in_front: FloatArray
    star_in_front: FloatArray


class Eclipses(NamedTuple):
    """Whether the discs overlap when the companion, and when the seen star, is in front."""

    companion_in_front: BoolArray
    star_in_front: BoolArray


def conjunction_separations(
    semi_major_axis: ArrayLike,
    cos_inclination: ArrayLike,
    eccentricity: ArrayLike = 0.0,
    periastron_argument_rad: ArrayLike = 0.0,
) -> Conjunctions:
    """Return the sky separations at both conjunctions, in the unit of the relative orbit's ``semi_major_axis``.

    a (1 - e^2) |cos i| / (1 +- e sin omega): any textbook, for example Winn 2010 (arXiv:1001.2010), eqs. 7-8.
    """
    e = np.asarray(eccentricity, dtype=float)
    tilt = e * np.sin(np.asarray(periastron_argument_rad, dtype=float))
    projected = np.asarray(semi_major_axis) * (1.0 - e * e) * np.abs(np.asarray(cos_inclination, dtype=float))
    return Conjunctions(np.asarray(projected / (1.0 + tilt)), np.asarray(projected / (1.0 - tilt)))


def eclipses(
    radius: ArrayLike,
    companion_radius: ArrayLike,
    semi_major_axis: ArrayLike,
    cos_inclination: ArrayLike,
    eccentricity: ArrayLike = 0.0,
    periastron_argument_rad: ArrayLike = 0.0,
) -> Eclipses:
    """Return at which of the two conjunctions the discs of these radii touch or overlap."""
    reach = np.asarray(radius, dtype=float) + np.asarray(companion_radius, dtype=float)
    apart = conjunction_separations(semi_major_axis, cos_inclination, eccentricity, periastron_argument_rad)
    return Eclipses(np.asarray(apart.companion_in_front <= reach), np.asarray(apart.star_in_front <= reach))


def eclipse_probability(
    radius_sum: ArrayLike, semi_major_axis: ArrayLike, cos_inclination: ArrayLike, eccentricity: ArrayLike = 0.0
) -> FloatArray:
    """Return the share of all omega for which at least one of the two conjunctions is an eclipse, at this inclination.

    For a system file, which gives no omega. 0 or 1 for a circular orbit.
    """
    e = np.asarray(eccentricity, dtype=float)
    projected = np.asarray(semi_major_axis) * (1.0 - e * e) * np.abs(np.asarray(cos_inclination, dtype=float))
    # Eclipse where e |sin omega| exceeds this.
    need = projected / np.asarray(radius_sum, dtype=float) - 1.0
    sine = np.clip(need / np.maximum(e, 1e-12), 0.0, 1.0)
    return np.asarray(2.0 * np.arccos(sine) / np.pi)


def covered_fraction(radius: ArrayLike, occulter_radius: ArrayLike, separation: ArrayLike) -> FloatArray:
    """Return the share of a disc that another disc covers, centres ``separation`` apart (radius > 0, others >= 0).

    The area of the lens where two circles overlap. Times the star's share of the light, it is the depth of the eclipse
    in flux, limb darkening left out.
    """
    r, p, d = np.broadcast_arrays(*(np.asarray(x, dtype=float) for x in (radius, occulter_radius, separation)))
    inside = np.minimum(p / r, 1.0) ** 2
    crossing = (d < r + p) & (d > np.abs(r - p)) & (d > 1e-12 * r)
    # Anywhere else these values would be off the arcs; they are not used there.
    x, y, gap = np.where(crossing, r, 1.0), np.where(crossing, p, 1.0), np.where(crossing, d, 1.0)
    first = np.arccos(np.clip((gap**2 + x**2 - y**2) / (2.0 * gap * x), -1.0, 1.0))
    second = np.arccos(np.clip((gap**2 + y**2 - x**2) / (2.0 * gap * y), -1.0, 1.0))
    kite = np.sqrt(np.maximum((x + y - gap) * (gap + x - y) * (gap - x + y) * (x + y + gap), 0.0))
    lens = (x**2 * first + y**2 * second - 0.5 * kite) / (np.pi * x**2)
    return np.asarray(np.where(crossing, np.clip(lens, 0.0, inside), np.where(d >= r + p, 0.0, inside)))
