"""Coefficients of the stellar formulas of Tout et al. 1996 and Hurley, Pols & Tout 2000 at any metallicity.

Each published coefficient is a polynomial in zeta = log10(Z / 0.02), some with floors and ceilings. All polynomials
are evaluated at once as a matrix product. Sources: Tout, Pols, Eggleton & Han 1996, MNRAS 281, 257, tables 1 and 2;
Hurley, Pols & Tout 2000, MNRAS 315, 543, appendix. The numbers are in ``hpt_coefficients.json`` of ``vetter.grids``.
"""

from __future__ import annotations

import json
from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache
from importlib.resources import files
from typing import Any

import numpy as np
from numpy.polynomial.polynomial import polyval
from numpy.typing import ArrayLike, NDArray

FloatArray = NDArray[np.float64]

Z_SUN = 0.02
"""Metal fraction that the formulas call solar; with 0.0142 the Sun would come out 14 % too bright."""

Z_RANGE = (1e-4, 0.03)
"""Metal fractions of the underlying models; outside, the nearer end is used."""

_N_POWERS = 6
_N_A = 82
_BLOCK = 512


@dataclass(frozen=True, eq=False)
class Metallicity:
    """Everything that depends on the metal fraction alone.

    Attributes
    ----------
    z, zeta : metal fraction and log10(Z / 0.02), any shape
    zero_age : the letters of Tout et al. 1996 as "L.alpha", "R.theta", each of that shape
    a : (82, shape of z), the numbers of Hurley, Pols & Tout 2000; row k is a_k. One block and not 82 arrays: memory
        taken and given back in many small pieces costs more time than the arithmetic (measured: 4 against 0.2 ms).
    """

    z: FloatArray
    zeta: FloatArray
    zero_age: Mapping[str, FloatArray]
    a: FloatArray


@cache
def published() -> Mapping[str, Any]:
    """Return the file of published coefficients; read on first use, to be treated as read-only."""
    return dict(json.loads((files("vetter.grids") / "hpt_coefficients.json").read_text(encoding="utf-8")))


def metal_fraction(feh: ArrayLike) -> FloatArray:
    """Return Z = 0.02 x 10^[Fe/H], held inside ``Z_RANGE`` ([Fe/H] -2.30 to +0.18)."""
    return np.asarray(np.clip(Z_SUN * 10.0 ** np.asarray(feh, dtype=float), *Z_RANGE))


@cache
def _zero_age_table() -> tuple[tuple[str, ...], FloatArray]:
    """Return the letters of Tout et al. 1996 and their polynomials, (16, 6), lowest power first."""
    rows = {f"{kind}.{letter}": row for kind in "LR" for letter, row in published()["tout1996"][kind].items()}
    return tuple(rows), np.array([_padded(row) for row in rows.values()])


@cache
def _a_table() -> FloatArray:
    """Return the polynomials of a_0 to a_81, (82, 6); primed ones stand in for their unprimed, zeros for the rest."""
    table = np.zeros((_N_A, _N_POWERS))
    for name, row in published()["hpt_a"].items():
        number = name.rstrip("'")[1:]
        if number.isdigit():
            table[int(number)] = _padded(row)
    table.setflags(write=False)
    return table


def _padded(row: list[float]) -> list[float]:
    return [*row, *[0.0] * (_N_POWERS - len(row))]


def _polynomials(table: FloatArray, zeta: FloatArray) -> FloatArray:
    """Return every polynomial of ``table`` (n, 6) at ``zeta``: (n, shape of zeta)."""
    powers = np.empty((_N_POWERS, zeta.size))
    powers[0] = 1.0
    for k in range(1, _N_POWERS):
        np.multiply(powers[k - 1], zeta.reshape(-1), out=powers[k])
    values = np.empty((len(table), zeta.size))
    # Blocks keep the product below the size at which linear-algebra libraries start threads, which costs more than
    # it gains here, and much more on a busy machine.
    for start in range(0, zeta.size, _BLOCK):
        np.matmul(table, powers[:, start : start + _BLOCK], out=values[:, start : start + _BLOCK])
    return values.reshape(len(table), *zeta.shape)


def at_metal_fraction(z: ArrayLike) -> Metallicity:
    """Return all coefficients of the main sequence at metal fractions ``z`` inside ``Z_RANGE``, any shape."""
    metals = np.asarray(z, dtype=float)
    zeta = np.asarray(np.log10(metals / Z_SUN))
    a = _polynomials(_a_table(), zeta)
    a[11] *= a[14]
    a[12] *= a[14]
    a[18] *= a[20]
    a[19] *= a[20]
    a[29] = a[29] ** a[32]
    _add_luminosity_limits(a, metals, zeta)
    _add_radius_limits(a, metals, zeta)
    _add_gamma_limits(a, zeta)
    letters, table = _zero_age_table()
    return Metallicity(metals, zeta, dict(zip(letters, _polynomials(table, zeta), strict=True)), a)


def _add_luminosity_limits(a: FloatArray, z: FloatArray, zeta: FloatArray) -> None:
    """Add the coefficients with floors and ceilings of eqs. 16 and 18-20, and a17 of eq. 9."""
    rich = z > 0.01
    sigma = np.log10(z)
    inner = np.maximum(0.097, np.minimum(0.1461, 0.1461 + 0.1237 * (sigma + 2.0)))
    a[17] = 10.0 ** np.maximum(0.097 - 0.1072 * (sigma + 3.0), inner)
    a[33] = np.minimum(1.4, 1.5135 + 0.3769 * zeta)
    a[33] = np.maximum(0.6355 - 0.4192 * zeta, np.maximum(1.25, a[33]))
    a[49] = np.maximum(0.145, 0.0977 - 0.231 * zeta - 0.0753 * zeta**2)
    a[50] = np.minimum(0.24 + 0.18 * zeta + 0.595 * zeta**2, 0.306 + 0.053 * zeta)
    a[51] = np.minimum(0.33 + 0.132 * zeta + 0.218 * zeta**2, 0.3625 + 0.062 * zeta)
    a[52] = np.maximum(0.9, 1.1064 + 0.415 * zeta + 0.18 * zeta**2)
    a[52] = np.where(rich, np.minimum(a[52], 1.0), a[52])
    a[53] = np.maximum(1.0, 1.19 + 0.377 * zeta + 0.176 * zeta**2)
    a[53] = np.where(rich, np.minimum(a[53], 1.1), a[53])
    a[57] = a[33]


def _add_radius_limits(a: FloatArray, z: FloatArray, zeta: FloatArray) -> None:
    """Add the coefficients with floors and ceilings of eqs. 17, 21 and 22."""
    a[42] = np.minimum(1.25, np.maximum(1.1, 1.9848 + 1.1386 * zeta + 0.3564 * zeta**2))
    a[43] = 0.063 + 0.0481 * zeta + 0.00984 * zeta**2
    a[44] = np.minimum(1.3, np.maximum(0.45, 1.2 + 2.45 * zeta))
    a[62] = np.maximum(0.065, 0.0843 - 0.0475 * zeta - 0.0352 * zeta**2)
    a[63] = 0.0736 + 0.0749 * zeta + 0.04426 * zeta**2
    a[63] = np.where(z < 0.004, np.minimum(0.055, a[63]), a[63])
    a[64] = np.maximum(0.091, np.minimum(0.121, 0.136 + 0.0352 * zeta))
    a[66] = np.maximum(1.477 + 0.296 * zeta, np.minimum(1.6, -0.308 - 1.046 * zeta))
    a[66] = np.maximum(0.8, np.minimum(0.8 - 2.0 * zeta, a[66]))
    a[68] = np.maximum(0.9, np.minimum(1.0, 1.116 + 0.166 * zeta))
    ln = np.log(a[66])
    power = a[58] * np.exp(a[60] * ln) / (a[59] + np.exp(a[61] * ln))
    a[64] = np.where(a[68] > a[66], power, a[64])
    a[68] = np.minimum(a[68], a[66])
    a[72] = np.where(z > 0.01, np.maximum(a[72], 0.95), a[72])
    a[74] = np.maximum(1.4, np.minimum(1.6, 1.6 + 0.764 * zeta + 0.3322 * zeta**2))


def _add_gamma_limits(a: FloatArray, zeta: FloatArray) -> None:
    """Add the coefficients of eq. 23."""
    raw = published()["hpt_a"]
    a[75] = np.maximum(1.0, np.minimum(1.27, 0.8109 - 0.6282 * zeta))
    a[75] = np.maximum(a[75], 0.6355 - 0.4192 * zeta)
    a[76] = np.maximum(polyval(zeta, raw["a76_poly"]), polyval(zeta, raw["a76_floor"]))
    a[77] = np.maximum(np.minimum(0.0, polyval(zeta, raw["a77_poly"])), polyval(zeta, raw["a77_floor"]))
    a[78] = np.maximum(0.0, np.minimum(polyval(zeta, raw["a78_poly"]), 7.454 + 9.046 * zeta))
    a[79] = np.minimum(polyval(zeta, raw["a79_poly"]), np.maximum(2.0, -13.3 - 18.6 * zeta))
    a[80] = np.maximum(0.0585542, -0.2711 - 0.5756 * zeta - 0.0838 * zeta**2)
    a[81] = np.minimum(1.5, np.maximum(0.4, 2.493 + 1.1475 * zeta))
