"""What a reader must know before leaning on a contrast."""

from __future__ import annotations

from collections.abc import Sequence

from vetter.pairs.epochs import Epochs
from vetter.pairs.result import Explanation, PairDetail
from vetter.physics.triples import kozai_caution
from vetter.system.model import System

APSIDAL_CARRIES = 0.5
"""Part of what the epochs say from which the apsidal motion is said to carry it."""

TELLING_LN = 1.0


def cautions(
    system: System, epochs: Epochs | None, rows: Sequence[Explanation], details: Sequence[PairDetail]
) -> list[str]:
    """Return sentences."""
    said = [
        "Both orbits are taken to lie in one plane and the inner one to be circular: an inclined or eccentric pair "
        "shows other lines of like strength, and some of what is called excluded here would be open to it.",
    ]
    if epochs is None:
        said.append("No epoch velocities were used: only light, walls and the outer orbit speak.")
    if system.variability is not None:
        said.append("The light curve's limits are taken to hold at the inner period too.")
    said += _about_dark(rows, details)
    said += _about_apsidal(rows)
    said += _about_tilt(system, details)
    return said


def _about_dark(rows: Sequence[Explanation], details: Sequence[PairDetail]) -> list[str]:
    """Two dark bodies: only dynamics can tell."""
    dark = next((row for row in rows if row.name == "compact_pair" and row.ln_evidence is not None), None)
    if dark is None:
        return []
    if dark.ln_velocities is None or abs(dark.ln_velocities) < TELLING_LN:
        why = "there are no epoch velocities" if dark.ln_velocities is None else "the epochs are silent"
        return [f"Two dark bodies differ from one only in their pull, and {why}: these data cannot tell them apart."]
    return ["Two dark bodies differ from one only in their pull: the epochs alone tell them apart."]


def _about_apsidal(rows: Sequence[Explanation]) -> list[str]:
    carried = [
        row.title.lower()
        for row in rows
        if row.ln_velocities is not None
        and row.ln_apsidal is not None
        and row.ln_velocities > 5.0
        and row.ln_apsidal > APSIDAL_CARRIES * row.ln_velocities
    ]
    if not carried:
        return []
    return [
        f"For {' and '.join(carried)} it is the turning of the outer orbit, more than the wave, that the epochs show; "
        "a distant fourth body or a long-term drift of the instrument could imitate it."
    ]


def _about_tilt(system: System, details: Sequence[PairDetail]) -> list[str]:
    """What mutual inclination would do to the most favourable pair."""
    for detail in details:
        if detail.plane.best_period_d is not None and detail.masses is not None:
            seen, pair = detail.masses
            orbit = system.orbit
            return [
                kozai_caution(detail.plane.best_period_d, orbit.period_d.value, seen, pair, orbit.eccentricity.value)
            ]
    return []
