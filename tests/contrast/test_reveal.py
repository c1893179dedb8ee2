"""What would reveal or exclude the rest."""

from __future__ import annotations

import numpy as np
import pytest

from vetter.pairs.reveal import ORBIT_PARAMETERS, reveals, signal_needed


def test_the_signal_that_is_needed() -> None:
    # exp(s^2 / 2) over 1000 trial periods is e^5: s^2 = 2 (5 + ln 1000) = 23.8.
    assert signal_needed(1000.0) == pytest.approx(4.88, abs=0.01)
    assert signal_needed(0.1) == pytest.approx(np.sqrt(10.0))


def test_precision_and_epochs() -> None:
    amplitude = np.array([1.0, 0.1, 0.01, 0.001])
    first, half, most = reveals(amplitude, np.ones(4), 1000.0, 56, 0.1)
    assert first.semi_amplitude_km_s > half.semi_amplitude_km_s > most.semi_amplitude_km_s
    # A sqrt(N / 2) / s is the signal-to-noise ratio.
    assert half.precision_km_s == pytest.approx(half.semi_amplitude_km_s * 5.0 / signal_needed(1000.0))
    epochs = (half.epochs_needed or 0) - ORBIT_PARAMETERS
    assert half.semi_amplitude_km_s * np.sqrt(0.5 * epochs) / 0.1 >= signal_needed(1000.0)
    assert half.semi_amplitude_km_s * np.sqrt(0.5 * (epochs - 1)) / 0.1 < signal_needed(1000.0)


def test_out_of_reach() -> None:
    (entry, *_) = reveals(np.full(3, 1e-6), np.ones(3), 100.0, 40, None)
    assert not entry.in_reach
    assert entry.epochs_needed is None
