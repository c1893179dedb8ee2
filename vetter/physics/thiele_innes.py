"""Thiele-Innes elements A, B, F, G of an orbit on the sky, the geometric elements, and errors carried between them.

Conventions: angles in degrees, lengths in mas; x to the north, y to the east; Omega is the position angle of the
ascending node, omega the argument of periastron. Positions alone do not tell the ascending node from the descending
one: Omega comes out in [0, 180) with omega to match, and both may be off by 180 degrees together.
Source of the relations: Heintz 1978, Double Stars (Reidel); Halbwachs et al. 2023, A&A 674, A9, appendix A
(from memory).
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

FloatArray = NDArray[np.float64]


class GeometricElements(NamedTuple):
    """Semi-major axis (mas), inclination 0-180, node 0-180 and argument of periastron 0-360 (degrees)."""

    a_mas: FloatArray
    inclination_deg: FloatArray
    node_deg: FloatArray
    periastron_deg: FloatArray


class ThieleInnesElements(NamedTuple):
    """The four elements, in mas."""

    a_mas: FloatArray
    b_mas: FloatArray
    f_mas: FloatArray
    g_mas: FloatArray


def to_thiele_innes(
    a_mas: ArrayLike, inclination_deg: ArrayLike, node_deg: ArrayLike, periastron_deg: ArrayLike
) -> ThieleInnesElements:
    """Return A, B, F, G (mas) from the geometric elements; inputs broadcast together."""
    i, node, periastron = (np.radians(np.asarray(x, float)) for x in (inclination_deg, node_deg, periastron_deg))
    a, cos_i = np.asarray(a_mas, dtype=float), np.cos(i)
    cn, sn, cp, sp = np.cos(node), np.sin(node), np.cos(periastron), np.sin(periastron)
    return ThieleInnesElements(
        a_mas=np.asarray(a * (cp * cn - sp * sn * cos_i)),
        b_mas=np.asarray(a * (cp * sn + sp * cn * cos_i)),
        f_mas=np.asarray(a * (-sp * cn - cp * sn * cos_i)),
        g_mas=np.asarray(a * (-sp * sn + cp * cn * cos_i)),
    )


def to_geometric(a_mas: ArrayLike, b_mas: ArrayLike, f_mas: ArrayLike, g_mas: ArrayLike) -> GeometricElements:
    """Return the geometric elements from A, B, F, G (mas); inputs broadcast together.

    With p = (A + G, B - F) and m = (A - G, -(B + F)): |p| = a (1 + cos i) and |m| = a (1 - cos i), and their
    directions are omega + Omega and omega - Omega. This form is the usual one through u and v, without its loss of
    digits: tan(i/2) = sqrt(|m| / |p|) is right to 1e-10 even for orbits seen face on or edge on.
    Face on, Omega and omega are not defined one by one; then what is returned has the right sum (or difference).
    """
    px, py, mx, my = _sum_and_difference(a_mas, b_mas, f_mas, g_mas)
    p, m = np.hypot(px, py), np.hypot(mx, my)
    inclination = 2.0 * np.arctan2(np.sqrt(m), np.sqrt(p))
    plus, minus = np.arctan2(py, px), np.arctan2(my, mx)
    node, periastron = np.degrees(0.5 * (plus - minus)), np.degrees(0.5 * (plus + minus))
    # Both shift by half a turn together, so omega + Omega keeps its value. A node of minus a rounding error comes out
    # of the first shift as 180 itself, hence the second.
    for _ in range(2):
        shift = 180.0 * np.floor(node / 180.0)
        node, periastron = node - shift, periastron - shift
    return GeometricElements(
        a_mas=np.asarray(0.5 * (p + m)),
        inclination_deg=np.asarray(np.degrees(inclination)),
        node_deg=np.asarray(node),
        periastron_deg=np.asarray(periastron % 360.0),
    )


def jacobian(a_mas: ArrayLike, b_mas: ArrayLike, f_mas: ArrayLike, g_mas: ArrayLike) -> FloatArray:
    """Return d(a, i, Omega, omega) / d(A, B, F, G), shape (..., 4, 4), in mas and degrees per mas.

    Analytic. ValueError for an orbit seen exactly face on, where the derivative of the inclination has no limit.
    """
    px, py, mx, my = _sum_and_difference(a_mas, b_mas, f_mas, g_mas)
    p, m = np.hypot(px, py), np.hypot(mx, my)
    if np.any(p == 0.0) or np.any(m == 0.0):
        raise ValueError("the Jacobian does not exist for an orbit seen exactly face on (inclination 0 or 180 degrees)")
    zero = np.zeros_like(p)
    # Rows over (A, B, F, G): lengths and directions of the vectors p = (A + G, B - F), m = (A - G, -(B + F)).
    d_p = np.stack([px, py, -py, px], axis=-1) / p[..., None]
    d_m = np.stack([mx, -my, -my, -mx], axis=-1) / m[..., None]
    d_plus = np.stack([-py, px, -px, -py], axis=-1) / (p * p)[..., None]
    d_minus = np.stack([-my, -mx, -mx, my], axis=-1) / (m * m)[..., None]
    # tan(i/2)^2 = m/p, hence di = sqrt(m p) / (m + p) (dm/m - dp/p).
    root = np.sqrt(m * p) / (m + p)
    d_i = (root / m)[..., None] * d_m - (root / p)[..., None] * d_p
    rows = [
        0.5 * (d_p + d_m),
        np.degrees(d_i),
        np.degrees(0.5 * (d_plus - d_minus)),
        np.degrees(0.5 * (d_plus + d_minus)),
    ]
    return np.asarray(np.stack(rows, axis=-2) + zero[..., None, None])


def propagate_covariance(
    a_mas: ArrayLike, b_mas: ArrayLike, f_mas: ArrayLike, g_mas: ArrayLike, covariance: ArrayLike
) -> tuple[GeometricElements, FloatArray]:
    """Return the geometric elements and their covariance, order (a, i, Omega, omega), mas and degrees.

    ``covariance`` is that of (A, B, F, G) in mas^2, shape (..., 4, 4). First order: right where the errors of the
    inclination stay well below its distance from 0 and 180 degrees. ValueError face on or for another shape.
    """
    cov = np.asarray(covariance, dtype=float)
    if cov.shape[-2:] != (4, 4):
        raise ValueError(f"the covariance of A, B, F, G must end in shape (4, 4), got {cov.shape}")
    derivative = jacobian(a_mas, b_mas, f_mas, g_mas)
    return (
        to_geometric(a_mas, b_mas, f_mas, g_mas),
        np.asarray(derivative @ cov @ np.swapaxes(derivative, -1, -2)),
    )


def _sum_and_difference(
    a_mas: ArrayLike, b_mas: ArrayLike, f_mas: ArrayLike, g_mas: ArrayLike
) -> tuple[FloatArray, FloatArray, FloatArray, FloatArray]:
    """Return (A + G, B - F) and (A - G, -(B + F)), broadcast."""
    a, b, f, g = np.broadcast_arrays(*(np.asarray(x, dtype=float) for x in (a_mas, b_mas, f_mas, g_mas)))
    return np.asarray(a + g), np.asarray(b - f), np.asarray(a - g), np.asarray(-(b + f))
