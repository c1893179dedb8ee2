"""Coevality: whether the companion can be as old as the seen star. It is reported, never demanded."""

from __future__ import annotations

from collections.abc import Sequence
from typing import NamedTuple

import numpy as np

from vetter.results.best_cases import BestCase
from vetter.results.plain_numbers import two_digits
from vetter.stars.main_sequence import lifetime_myr, main_sequence
from vetter.system.model import System

RADIUS_SCATTER = 0.05
"""Scatter of ln R of real stars about the relation, added to the error of log g."""

EVOLVED_LIFE = 1.2
"""A giant's age over its main-sequence life, at most (common practice, no source)."""

_TRACK_POINTS = 101


class AgeRange(NamedTuple):
    """Ages (Myr) between which a star lies, two sigma wide."""

    least_myr: float
    most_myr: float


def age_range(mass_msun: float, radius_rsun: float, feh: float, ln_radius_error: float) -> AgeRange:
    """Return the plausible age of an ordinary star from how far it has swollen since it was born.

    The radius on the main sequence grows with age; a star larger than at its end has left it. ``ln_radius_error`` is
    one sigma.
    """
    life = float(lifetime_myr(mass_msun, feh))
    share = np.linspace(0.0, 1.0, _TRACK_POINTS)
    # The contraction near the end of massive stars' lives is smoothed over.
    ln_track = np.log(np.maximum.accumulate(main_sequence(mass_msun, share, feh).radius_rsun))
    reach = 2.0 * np.hypot(ln_radius_error, RADIUS_SCATTER)
    ln_radius = np.log(radius_rsun)
    least = float(share[np.searchsorted(ln_track, ln_radius - reach).clip(0, _TRACK_POINTS - 1)])
    if ln_radius - reach <= ln_track[0]:
        least = 0.0
    most = EVOLVED_LIFE
    if ln_radius + reach < ln_track[-1]:
        most = float(share[np.searchsorted(ln_track, ln_radius + reach)])
    return AgeRange(least * life, most * life)


def age_cautions(system: System, cases: Sequence[BestCase]) -> list[str]:
    """Return which explanations that stand need two stars of different ages."""
    said = []
    logg = system.primary.logg
    ln_radius_error = 0.0 if logg is None else 0.5 * np.log(10.0) * logg.error
    for case in cases:
        star_msun = companion_star_msun(case)
        if not case.stands or star_msun is None:
            continue
        seen = case.prediction
        feh = float(seen.feh[0])
        age = age_range(float(seen.mass_msun[0]), float(seen.radius_rsun[0]), feh, ln_radius_error)
        life = float(lifetime_myr(star_msun, feh))
        if case.row.name == "evolved_star":
            if life > age.most_myr:
                said.append(
                    f"{case.title}: {two_digits(star_msun)} Msun leave the main sequence after {_time(life)}, "
                    f"the seen star is at most {_time(age.most_myr)} old"
                )
        elif life < age.least_myr:
            said.append(
                f"{case.title}: a star of {two_digits(star_msun)} Msun lives {_time(life)} on the main sequence, "
                f"the seen star is at least {_time(age.least_myr)} old"
            )
    if not said:
        return []
    return [f"Born together, the two stars would not fit, unless one fed the other: {'; '.join(said)}."]


def companion_star_msun(case: BestCase) -> float | None:
    """Return the mass of the companion's heaviest ordinary star where the seen star is ordinary too, else None."""
    predicted = case.prediction
    if not predicted.ordinary_seen_star:
        return None
    if case.row.name in ("main_sequence", "evolved_star"):
        return float(predicted.companion_mass_msun[0])
    return None if predicted.inner is None else float(predicted.inner.first_msun[0])


def _time(myr: float) -> str:
    return f"{two_digits(myr / 1000.0)} Gyr" if myr >= 1000.0 else f"{two_digits(myr)} Myr"
