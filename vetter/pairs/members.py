"""The two members of a hidden pair, for whatever scenario proposes them, and the inner orbits that are open to them."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from vetter.physics import kepler, triples
from vetter.physics.inner_wave import apsidal_rate_rad_d, wave_strength_km_s

FloatArray = NDArray[np.float64]
Values = Mapping[str, FloatArray]

PAIRS = ("inner_pair", "inner_pair_with_white_dwarf", "compact_pair")
"""Scenarios in which the unseen mass is a pair."""

STABILITY_GRANTED = 2.0 * triples.SOFT_EDGE
"""How far in ln(separation ratio) beyond the middle of the stability limit a pair is still tried."""

MERGER_TIME_MYR = 10.0
"""Two dark bodies that would merge sooner are not expected to be found (judgement)."""


@dataclass(frozen=True)
class Members:
    """Hidden pairs, all (n,).

    Attributes
    ----------
    first_msun, second_msun : the members
    mass_msun : the seen star
    sin_inclination : of the outer orbit, which the inner one shares
    shortest_d : inner period at contact, or at which two dark bodies merge within 10 Myr
    stable_d : inner period in the middle of the stability limit
    """

    first_msun: FloatArray
    second_msun: FloatArray
    mass_msun: FloatArray
    sin_inclination: FloatArray
    shortest_d: FloatArray
    stable_d: FloatArray

    @property
    def longest_d(self) -> FloatArray:
        """Inner period beyond which the triple is surely unstable."""
        return np.asarray(self.stable_d * np.exp(1.5 * STABILITY_GRANTED))

    @property
    def mass_ratio(self) -> FloatArray:
        """Lighter over heavier member."""
        ratio = self.second_msun / self.first_msun
        return np.minimum(ratio, 1.0 / ratio)

    def strength_at_1_d(self, outer_period_d: float) -> FloatArray:
        """Return the strength (km/s) of the wave at an inner period of 1 d."""
        return wave_strength_km_s(
            self.first_msun, self.second_msun, self.mass_msun, 1.0, outer_period_d, self.sin_inclination
        )

    def apsidal_at_1_d(self, outer_period_d: float, eccentricity: float) -> FloatArray:
        """Return the apsidal motion (rad/d) of the outer orbit at an inner period of 1 d."""
        masses = (self.first_msun, self.second_msun, self.mass_msun)
        return apsidal_rate_rad_d(*masses, 1.0, outer_period_d, eccentricity)

    def at(self, rows: NDArray[np.intp]) -> Members:
        """Return some of them."""
        return Members(*(getattr(self, name)[rows] for name in self.__dataclass_fields__))


def members(
    values: Values, outer_period_d: float, eccentricity: float, lightest_dark_msun: float, dark_ratio: FloatArray
) -> Members:
    """Return the members of the pairs whose parameters and derived quantities are ``values``.

    ``dark_ratio`` (n,) in 0-1 places the mass ratio of two dark bodies between that at which the lighter one has
    ``lightest_dark_msun`` and one: their light says nothing of it.
    """
    total = values["m2_msun"]
    first, second = _masses(values, lightest_dark_msun, dark_ratio)
    radii = [values.get(name, np.zeros(total.shape)) for name in _radius_names(values)]
    merged = merger_period_d(first, second, MERGER_TIME_MYR)
    touching = triples.shortest_inner_period_d(first, second, *radii) if any(np.any(r > 0.0) for r in radii) else merged
    stable = triples.longest_inner_period_d(outer_period_d, values["m1_msun"], total, eccentricity)
    sine = np.sin(np.radians(values["inclination_deg"]))
    return Members(first, second, values["m1_msun"], sine, np.maximum(touching, merged), stable)


def _masses(values: Values, lightest_dark_msun: float, dark_ratio: FloatArray) -> tuple[FloatArray, FloatArray]:
    """First and second member, in the order of the stars that shine."""
    total = values["m2_msun"]
    if "inner_mass_ratio" in values:
        heavier = total / (1.0 + values["inner_mass_ratio"])
        return heavier, total - heavier
    if "heavier_share" in values:
        heavier = total * values["heavier_share"]
        return heavier, total - heavier
    if "white_dwarf_mass_msun" in values:
        white = values["white_dwarf_mass_msun"]
        return np.maximum(total - white, 1e-3), white
    least = np.minimum(lightest_dark_msun / np.maximum(total - lightest_dark_msun, 1e-3), 1.0)
    heavier = total / (1.0 + least + (1.0 - least) * dark_ratio)
    return heavier, total - heavier


def _radius_names(values: Values) -> tuple[str, str]:
    """Names of the radii of first and second member; a white dwarf beside a dark body is the only star there is."""
    return ("", "r2_rsun") if "white_dwarf_mass_msun" in values and "r2_rsun" in values else ("r2a_rsun", "r2b_rsun")


def merger_period_d(first_msun: FloatArray, second_msun: FloatArray, time_myr: float) -> FloatArray:
    """Return the period (d) of a circular pair that gravitational waves merge in this time (Myr).

    a^4 = (256/5) G^3 m1 m2 (m1 + m2) t / c^5: Peters 1964, Phys. Rev. 136, B1224, eq. 5.10.
    """
    gm = kepler.GM_SUN_KM3_S2
    seconds = time_myr * 1e6 * kepler.YEAR_D * kepler.DAY_S
    total = first_msun + second_msun
    a4 = 51.2 * gm**3 * first_msun * second_msun * total * seconds / triples.LIGHT_KM_S**5
    return kepler.orbital_period_d(total, a4**0.25 / kepler.R_SUN_KM)
