"""How good velocities must be to reveal or exclude the inner pairs that are left."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from vetter.results.compare import weighted_quantiles

FloatArray = NDArray[np.float64]

DECISIVE_LN = 5.0
"""Ln Bayes factor that counts as found or excluded."""

SHARES = (0.25, 0.5, 0.75)
"""Parts of what is left, those with the strongest waves first."""

ORBIT_PARAMETERS = 6
"""Parameters of the outer orbit with one offset, which some of the epochs are spent on."""

EPOCHS_MAX = 10**9
"""More are not counted."""

PRECISION_FLOOR_KM_S = 3e-4
"""No spectrograph is better than 0.3 m/s (common practice, no source)."""


@dataclass(frozen=True)
class Reveal:
    """What would reveal, or exclude, this share of the pairs that are left.

    Attributes
    ----------
    share : of the posterior, pairs with the strongest waves first
    semi_amplitude_km_s : least semi-amplitude among them
    precision_km_s : error per epoch that is needed with ``epochs`` epochs; None where fewer epochs than parameters
    epochs : as many as there are, or 40
    epochs_needed : at the present error, None without epochs
    in_reach : whether that precision is better than any spectrograph's, 0.3 m/s
    """

    share: float
    semi_amplitude_km_s: float
    precision_km_s: float
    epochs: int
    epochs_needed: int | None

    @property
    def in_reach(self) -> bool:
        """Whether a spectrograph has this precision."""
        return self.precision_km_s >= PRECISION_FLOOR_KM_S


def signal_needed(trials: float) -> float:
    """Return the signal-to-noise ratio at which a wave among this many independent periods is found with ln B of 5."""
    return float(np.sqrt(2.0 * (DECISIVE_LN + np.log(max(trials, 1.0)))))


def reveals(
    semi_amplitude_km_s: FloatArray, weights: FloatArray, trials: float, epochs: int, error_km_s: float | None
) -> tuple[Reveal, ...]:
    """Return what each of ``SHARES`` would take.

    Semi-amplitudes (n,) of what is left and their weights (n,), the number of independent trial periods, the number
    of epochs, and the present error per epoch or None. A sine wave of semi-amplitude A in N epochs of error s has the
    signal-to-noise ratio A sqrt(N / 2) / s.
    """
    signal = signal_needed(trials)
    free = max(epochs - ORBIT_PARAMETERS, 1)
    out = []
    for share in SHARES:
        least = float(weighted_quantiles(semi_amplitude_km_s, weights, np.array([1.0 - share]))[0])
        needed = None
        if error_km_s is not None:
            needed = int(min(np.ceil(2.0 * (signal * error_km_s / least) ** 2) + ORBIT_PARAMETERS, EPOCHS_MAX))
        out.append(Reveal(share, least, least * float(np.sqrt(0.5 * free)) / signal, epochs, needed))
    return tuple(out)
