"""How many epoch velocities make an orbit."""

from __future__ import annotations

from typing import Final

from vetter.system.model import Velocities

LEAST_EPOCHS: Final = 5
"""Of one instrument; each further one needs another for its offset. Three would fix mean, amplitude and phase of a
circular orbit of known period, with nothing left to tell a wrong one."""

ENOUGH_WORDS: Final = f"{LEAST_EPOCHS} epochs at different times, and one more for each further instrument"


def enough_epochs(velocities: Velocities) -> bool:
    """Return whether an orbit can be fitted to these epochs."""
    needed = LEAST_EPOCHS - 1 + len(set(velocities.instrument))
    return len(velocities.time_bjd) >= needed and max(velocities.time_bjd) > min(velocities.time_bjd)
