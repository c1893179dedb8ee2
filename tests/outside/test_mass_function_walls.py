"""A mass function above the heaviest remnant closes it whatever the seen star weighs, and the table says so in words.

f = (M2 sin i)^3 / (M1 + M2)^2 is smaller than M2 for every M1 > 0: 1.44 Msun (Chandrasekhar) for a white dwarf, 2.3 for
a neutron star.
"""

from __future__ import annotations

from dataclasses import replace

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from vetter import Verdicts, evaluate
from vetter.inference.importance import Settings
from vetter.results.table import render
from vetter.system.model import (
    Assumptions,
    Distance,
    Extinction,
    Magnitude,
    Measurement,
    Orbit,
    Primary,
    System,
)

FEW = Settings(
    start_points=256, polish_starts=2, rung_points=128, rungs=1, effective=20, last_points=256, second_effort=False
)
WALLS = {"white_dwarf": 1.44, "neutron_star": 2.3}
SEEN = {
    "dwarf": Primary(Measurement(5772.0, 60.0), Measurement(4.44, 0.05), Measurement(0.0, 0.1)),
    "hot dwarf": Primary(Measurement(20000.0, 500.0), Measurement(4.0, 0.1), Measurement(0.0, 0.1)),
    "giant": Primary(Measurement(4700.0, 60.0), Measurement(2.4, 0.1), Measurement(0.0, 0.1)),
    "cool dwarf": Primary(Measurement(3500.0, 60.0), Measurement(4.8, 0.1), Measurement(0.0, 0.1)),
    "unknown": Primary(),
}


def verdicts(name: str, seen: str, f_msun: float, period_d: float, e: float) -> Verdicts:
    """K1 (known to 0.01 %) from f = 1.036149e-7 (1 - e^2)^1.5 K^3 P."""
    k1 = (f_msun / (1.036149e-7 * (1.0 - e**2) ** 1.5 * period_d)) ** (1.0 / 3.0)
    bands = ("Generic/Johnson.V", "GAIA/GAIA3.G", "2MASS/2MASS.Ks")
    system = System(
        name="Wall",
        source="wall.toml",
        distance=Distance(parallax_mas=Measurement(2.0, 0.02)),
        orbit=Orbit(Measurement(period_d, 0.0), Measurement(e, 0.0), k1_km_s=Measurement(k1, 1e-4 * k1)),
        magnitudes=tuple(Magnitude(band, 12.0, 0.02, "Vega") for band in bands),
        extinction=Extinction(ebv_mag=Measurement(0.0, 0.01)),
        primary=SEEN[seen],
        assumptions=Assumptions(white_dwarf_max_msun=1.44),
    )
    return evaluate(system, [name], settings=FEW)


@pytest.mark.parametrize("name", sorted(WALLS))
@settings(max_examples=6, deadline=None)
@given(st.sampled_from(sorted(SEEN)), st.floats(1.001, 30.0), st.floats(0.5, 3000.0), st.floats(0.0, 0.9))
def test_above_the_wall_it_is_closed(name: str, seen: str, factor: float, period_d: float, e: float) -> None:
    found = verdicts(name, seen, factor * WALLS[name], period_d, e)
    row = found.scenario(name)
    assert (row.verdict, row.sigma, row.ln_evidence) == ("excluded", None, None)
    words = f"the orbit needs more than {WALLS[name]:g} Msun at any inclination, whatever the mass of the seen star"
    assert row.closed_because == words
    assert "whatever the mass of the seen star" in " ".join(render(found, 80).split())


@pytest.mark.parametrize("name", sorted(WALLS))
@settings(max_examples=3, deadline=None)
@given(st.sampled_from(sorted(SEEN)), st.floats(0.3, 0.999))
def test_below_the_wall_that_is_not_said(name: str, seen: str, factor: float) -> None:
    """It may still be closed by the masses that ordinary seen stars have, and then in those words."""
    row = verdicts(name, seen, factor * WALLS[name], 50.0, 0.1).scenario(name)
    assert "whatever the mass of the seen star" not in (row.closed_because or "")
    if row.closed_because is not None:
        assert row.verdict == "excluded"


def test_the_words_reach_the_default_wall_too() -> None:
    """The shipped wall for white dwarfs is 1.38 Msun, below Chandrasekhar's 1.44: 1.44 closes it a fortiori."""
    assert Assumptions().white_dwarf_max_msun <= WALLS["white_dwarf"]
    assert Assumptions().neutron_star_max_msun == WALLS["neutron_star"]
    assert replace(Assumptions(), white_dwarf_max_msun=1.44).white_dwarf_max_msun == 1.44
