"""Reading the mean dwarf sequence as stars: radius, gravity, and magnitudes from its colours."""

from __future__ import annotations

import csv
from collections.abc import Mapping

import numpy as np

GRAVITY_SUN_CGS = 27423.2  # G Msun / Rsun^2, nominal solar values
TEFF_SUN_K = 5772.0
# One colour chain per band, from V. Gaia is DR2 there: offsets of 0.02 mag are its own.
CHAINS: Mapping[str, tuple[tuple[str, int], ...]] = {
    "Generic/Johnson.U": (("B-V", 1), ("U-B", 1)),
    "Generic/Johnson.B": (("B-V", 1),),
    "Generic/Johnson.V": (),
    "Generic/Cousins.R": (("V-R", -1),),
    "Generic/Cousins.I": (("V-I", -1),),
    "GAIA/GAIA3.G": (("G-V", 1),),
    "GAIA/GAIA3.Grp": (("G-V", 1), ("G-RP", -1)),
    "GAIA/GAIA3.Gbp": (("G-V", 1), ("G-RP", -1), ("BP-RP", 1)),
    "2MASS/2MASS.Ks": (("V-Ks", -1),),
    "2MASS/2MASS.H": (("V-Ks", -1), ("H-Ks", 1)),
    "2MASS/2MASS.J": (("V-Ks", -1), ("H-Ks", 1), ("J-H", 1)),
    "WISE/WISE.W1": (("V-Ks", -1), ("Ks-W1", -1)),
    "WISE/WISE.W2": (("V-Ks", -1), ("Ks-W1", -1), ("W1-W2", -1)),
    "WISE/WISE.W3": (("V-Ks", -1), ("Ks-W1", -1), ("W1-W3", -1)),
    "WISE/WISE.W4": (("V-Ks", -1), ("Ks-W1", -1), ("W1-W4", -1)),
}


def sequence_stars(csv_text: str, coolest_k: float, hottest_k: float) -> list[dict[str, float]]:
    """Return the rows between two temperatures, with ``radius`` (Rsun) and ``logg`` added; NaN where not published.

    The radius follows from log L and Teff, because the published radii disagree with them at B5, B6 and B8.
    """
    stars = []
    for row in csv.DictReader(csv_text.splitlines()):
        star = {key: float(value) if value else np.nan for key, value in row.items() if key != "spectral_type"}
        if coolest_k <= star["teff_k"] <= hottest_k:
            radius = 10 ** (0.5 * star["log_luminosity_lsun"]) * (TEFF_SUN_K / star["teff_k"]) ** 2
            stars.append(star | {"radius": radius, "logg": np.log10(GRAVITY_SUN_CGS * star["mass_msun"] / radius**2)})
    return stars


def chain_minus(star: Mapping[str, float], band: str, reference: str) -> float:
    """Return the magnitude in ``band`` minus that in ``reference``; NaN where a colour is not published.

    Colours that both chains share cancel, so a missing one does no harm: V-Ks is absent among the coolest rows.
    """
    steps: dict[str, int] = {}
    for colour, sign in CHAINS[band]:
        steps[colour] = steps.get(colour, 0) + sign
    for colour, sign in CHAINS[reference]:
        steps[colour] = steps.get(colour, 0) - sign
    return float(sum(sign * star[colour] for colour, sign in steps.items() if sign))
