"""Passbands and windows as quadrature weights on the wavelengths of the atmosphere tables.

A mean flux is one dot product with such weights, and a magnitude one logarithm more.
"""

from __future__ import annotations

import difflib
from collections.abc import Mapping
from typing import TYPE_CHECKING

import numpy as np

from vetter.errors import InputError
from vetter.light.tables import FloatArray, Passband

if TYPE_CHECKING:
    from vetter.system.model import CustomPassband

SPEED_OF_LIGHT_ANGSTROM_S = 2.99792458e18
JANSKY = 1e-23  # erg s-1 cm-2 Hz-1
AB_ZERO_JY = 3631.0
"""Flux density of AB magnitude zero (Oke & Gunn 1983, ApJ 266, 713: -48.60 in erg s-1 cm-2 Hz-1)."""


def quadrature_weights(
    wavelength_angstrom: FloatArray, curve_angstrom: FloatArray, throughput: FloatArray, *, photons: bool = True
) -> FloatArray:
    """Return weights w, shape (nw,), so that the mean flux in a passband is ``w @ f``.

    ``f`` is given on ``wavelength_angstrom`` (nw,) and linear between these nodes; the passband (n,) is linear
    between its own. The trapezoid rule runs over the union of both node sets. With ``photons`` the mean is
    integral f R lambda / integral R lambda (a photon counter), else integral f R / integral R (an energy meter).
    Raises ValueError when the passband reaches outside the nodes.
    """
    low, high = curve_angstrom[0], curve_angstrom[-1]
    if low < wavelength_angstrom[0] or high > wavelength_angstrom[-1]:
        raise ValueError(f"passband {low} to {high} A reaches outside the table's wavelengths")
    within = wavelength_angstrom[(wavelength_angstrom > low) & (wavelength_angstrom < high)]
    union = np.sort(np.concatenate([within, curve_angstrom]))
    step = np.diff(union)
    share = np.zeros_like(union)
    share[:-1] += step / 2.0
    share[1:] += step / 2.0
    share *= np.interp(union, curve_angstrom, throughput)
    if photons:
        share *= union
    # Each point of the union lies between two table nodes and passes its share on to them, linearly.
    left = np.clip(np.searchsorted(wavelength_angstrom, union, side="right") - 1, 0, len(wavelength_angstrom) - 2)
    fraction = (union - wavelength_angstrom[left]) / (wavelength_angstrom[left + 1] - wavelength_angstrom[left])
    size = len(wavelength_angstrom)
    weights = np.bincount(left, share * (1.0 - fraction), size) + np.bincount(left + 1, share * fraction, size)
    return np.asarray(weights / share.sum(), dtype=float)


def window_weights(wavelength_angstrom: FloatArray, window_nm: tuple[float, float]) -> FloatArray:
    """Return weights (nw,) of the mean F_lambda between two wavelengths (nm): an energy-weighted top hat.

    Raises InputError when the window is not ascending or reaches outside the table.
    """
    low, high = 10.0 * window_nm[0], 10.0 * window_nm[1]
    if not wavelength_angstrom[0] <= low < high <= wavelength_angstrom[-1]:
        nm = (wavelength_angstrom[0] / 10.0, wavelength_angstrom[-1] / 10.0)
        raise InputError.single(
            "light", "window", list(window_nm), f"two ascending wavelengths within {nm[0]:.4g} to {nm[1]:.4g} nm"
        )
    return quadrature_weights(wavelength_angstrom, np.array([low, high]), np.ones(2), photons=False)


def find_band(name: str, passbands: Mapping[str, Passband]) -> Passband:
    """Return the passband with this identifier or synonym; case does not matter.

    Raises InputError naming the nearest identifiers when there is none.
    """
    if name in passbands:
        return passbands[name]
    known = {alias.lower(): band for band in passbands.values() for alias in (band.id, *band.synonyms)}
    if name.lower() in known:
        return known[name.lower()]
    nearest = difflib.get_close_matches(name.lower(), known, n=3, cutoff=0.0)
    raise InputError.single(
        "light",
        "band",
        name,
        "the identifier of a built-in or custom passband",
        f"Nearest: {', '.join(dict.fromkeys(known[alias].id for alias in nearest))}.",
    )


def _custom_zero_flux(custom: CustomPassband, pivot_angstrom: float) -> dict[str, float]:
    """Return the zero points of a user's band (erg s-1 cm-2 A-1): AB always, its own system when in Jy."""
    per_jansky = JANSKY * SPEED_OF_LIGHT_ANGSTROM_S / pivot_angstrom**2
    zero_flux = {"AB": AB_ZERO_JY * per_jansky}
    if custom.zero_point_jy is not None:
        zero_flux[custom.system] = custom.zero_point_jy * per_jansky
    elif custom.system != "AB":
        raise InputError.single(
            custom.file,
            f"passband {custom.id} zero_point_jy",
            None,
            f"the flux density of magnitude zero in the {custom.system} system",
            'Give zero_point_jy, or system = "AB".',
        )
    return zero_flux


def custom_passband(custom: CustomPassband, wavelength_angstrom: FloatArray) -> Passband:
    """Return a user's own passband, ready for the engine; its pivot and width come from synphot.

    Raises InputError when it reaches outside the tables, lets no light through, or has no zero point.
    """
    import astropy.units as u
    from synphot import SpectralElement
    from synphot.models import Empirical1D

    curve = 10.0 * np.asarray(custom.wavelength_nm, dtype=float)
    throughput = np.asarray(custom.throughput, dtype=float)
    order = np.argsort(curve)
    curve, throughput = curve[order], throughput[order]
    if curve[0] < wavelength_angstrom[0] or curve[-1] > wavelength_angstrom[-1]:
        nm = (wavelength_angstrom[0] / 10.0, wavelength_angstrom[-1] / 10.0)
        raise InputError.single(
            custom.file, f"passband {custom.id}", (curve[0] / 10.0, curve[-1] / 10.0), f"{nm[0]:.4g} to {nm[1]:.4g} nm"
        )
    if throughput.min() < 0.0 or throughput.max() <= 0.0:
        raise InputError.single(
            custom.file, f"passband {custom.id}", (throughput.min(), throughput.max()), "throughput >= 0, some above 0"
        )
    element = SpectralElement(Empirical1D, points=curve * u.AA, lookup_table=throughput)
    pivot = float(element.pivot().to_value(u.AA))
    return Passband(
        id=custom.id,
        synonyms=(),
        usual_system=custom.system,
        pivot_angstrom=pivot,
        width_angstrom=float(element.equivwidth().to_value(u.AA)),
        zero_flux=_custom_zero_flux(custom, pivot),
        source=custom.file,
        reference="given by the user",
        weights=quadrature_weights(wavelength_angstrom, curve, throughput),
        wavelength_angstrom=curve,
        throughput=throughput,
    )
