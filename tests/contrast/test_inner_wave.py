"""The wave of an inner pair and the apsidal motion: against the circular formulas and against integrated triples."""

from __future__ import annotations

import numpy as np
import pytest

from vetter.pairs.epochs import epochs_about
from vetter.physics import inner_wave, triples
from vetter.physics.keplerian_search import find_modes, search_periods
from vetter.physics.velocity_model import epoch_data


def test_a_circular_orbit_has_the_two_known_lines() -> None:
    lines = inner_wave.outer_lines(inner_wave.SeenOrbit(200.0))
    assert sorted(lines.harmonics) == [-3.0, -1.0]
    assert np.sort(np.abs(lines.amplitudes)) == pytest.approx([3.0 / 16.0, 15.0 / 16.0])
    assert inner_wave.strongest_line(inner_wave.SeenOrbit(200.0)) == pytest.approx(15.0 / 16.0)


def test_a_circular_wave_is_the_known_signal() -> None:
    """Frequencies and amplitudes of ``triples.inner_pair_signal``, found by least squares in the wave's time series."""
    time = np.linspace(0.0, 2000.0, 6000)
    wave = inner_wave.inner_wave(time, np.array([10.0]), inner_wave.SeenOrbit(200.0))[0].real
    signal = triples.inner_pair_signal(1.0, 1.0, 1.0, 10.0, 200.0)
    turns = [2.0 * np.pi * float(f) * time for f in (signal.first_per_d, signal.second_per_d)]
    design = np.stack([wave for turn in turns for wave in (np.cos(turn), np.sin(turn))], axis=1)
    found = np.linalg.lstsq(design, wave, rcond=None)[0]
    strength = float(inner_wave.wave_strength_km_s(1.0, 1.0, 1.0, 10.0, 200.0))
    assert np.abs(wave - design @ found).max() < 1e-9
    assert strength * np.hypot(*found[:2]) == pytest.approx(float(signal.first_km_s))
    assert strength * np.hypot(*found[2:]) == pytest.approx(float(signal.second_km_s))


def test_powers_of_the_inner_period() -> None:
    for function, power in (
        (inner_wave.wave_strength_km_s, inner_wave.STRENGTH_EXPONENT),
        (inner_wave.apsidal_rate_rad_d, inner_wave.APSIDAL_EXPONENT),
    ):
        one, two = (float(function(0.7, 0.4, 1.2, period, 300.0)) for period in (5.0, 10.0))
        assert two / one == pytest.approx(2.0**power)


@pytest.mark.parametrize("e", [0.0, 0.15, 0.3])
def test_against_integrated_triples(e: float, three_bodies, triple_type) -> None:
    """Strength within 8 %, apsidal motion within 10 %: the errors that the evidence allows for."""
    m_a, m_b, m, p_in = 0.8, 0.6, 1.3, 10.0
    p_out = p_in / float(triples.longest_inner_period_d(1.0, m, m_a + m_b, e)) * 2.2**1.5
    one = np.ones(1)
    made = triple_type(m_a * one, m_b * one, m * one, p_in * one, p_out * one, e * one, 0.7 * one, 2.0 * one, 1.0 * one)
    time = np.linspace(0.5, 5.0 * p_out, 400)
    seen = three_bodies(made, time[None])
    strength = float(inner_wave.wave_strength_km_s(m_a, m_b, m, p_in, p_out))
    data = epoch_data(time, seen.velocity[0], np.full(time.size, 0.01 * strength))
    epochs = epochs_about(data, find_modes(data, search_periods(data, p_out, None))[0])
    search = epochs.searches[0]
    wave = inner_wave.inner_wave(data.time_d, seen.mean_period_d, epochs.orbit)[0]
    columns = np.stack([wave.real, wave.imag, epochs.apsidal_slope]) * search.sqrt_weight
    columns -= (columns @ search.orbit_basis) @ search.orbit_basis.T
    solved = np.linalg.lstsq(columns.T, search.residual, rcond=1e-8)[0]
    assert np.hypot(*solved[:2]) == pytest.approx(strength, rel=0.08)
    if e > 0.0:
        rate = float(inner_wave.apsidal_rate_rad_d(m_a, m_b, m, p_in, p_out, e))
        assert solved[2] == pytest.approx(rate, rel=0.10)
