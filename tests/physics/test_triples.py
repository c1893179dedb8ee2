"""Triples: worked values, limits and inverses. Comparison with N-body runs is in tests/outside."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from vetter.physics import kepler, triples

masses = st.floats(0.1, 30.0)


def test_critical_ratio_by_hand() -> None:
    # Vynatheya et al. 2022, MNRAS 516, 4146 (from memory), equal masses, one plane: 2.4 x 1.5^0.4 = 2.8226.
    assert triples.critical_ratio(0.5) == pytest.approx(2.8226, abs=1e-4)
    # Retrograde: 1 - 2/8. Eccentric: (2 / sqrt 0.5)^0.4. At right angles e' = 1/2: 1.5^0.6 (1 - 0.9/8).
    assert triples.critical_ratio(0.5, 0.0, np.pi) == pytest.approx(0.75 * 2.8226, abs=1e-4)
    assert triples.critical_ratio(1.0, 0.5) == pytest.approx(2.4 * (2.0 / 0.5**0.5) ** 0.4)
    assert triples.critical_ratio(0.5, 0.0, np.pi / 2) == pytest.approx(2.8226 * 1.5**0.6 * (1.0 - 0.9 / 8.0), rel=1e-4)


@given(q=st.floats(0.05, 10.0), e=st.floats(0.0, 0.6))
def test_never_stricter_than_the_older_limit(q: float, e: float) -> None:
    # Mardling & Aarseth 2001, MNRAS 321, 398: 2.8 [(1 + q)(1 + e)/sqrt(1 - e)]^0.4, known to be on the safe side.
    older = 2.8 * ((1.0 + q) * (1.0 + e) / np.sqrt(1.0 - e)) ** 0.4
    assert 0.6 < triples.critical_ratio(q, e) / older < 0.9


@given(m=masses, pair=masses, p_out=st.floats(10.0, 1e4), e=st.floats(0.0, 0.9), tilt=st.floats(0.0, np.pi))
def test_longest_inner_period_sits_on_the_edge(m: float, pair: float, p_out: float, e: float, tilt: float) -> None:
    longest = triples.longest_inner_period_d(p_out, m, pair, e, tilt)
    assert 0.0 < longest < p_out
    assert triples.ln_stability(longest, p_out, m, pair, e, tilt) == pytest.approx(0.0, abs=1e-10)
    assert triples.ln_stability(0.5 * longest, p_out, m, pair, e, tilt) > 0.0


def test_equal_suns_at_two_hundred_days() -> None:
    # a_in < a_out / 2.8226, so P_in < P_out sqrt(3/2) / 2.8226^1.5 = 51.65 d: Kepler's third law by hand.
    assert triples.longest_inner_period_d(200.0, 1.0, 2.0) == pytest.approx(51.65, abs=0.01)


def test_soft_edge() -> None:
    chance = triples.stable_probability(np.array([-10.0, -0.1, 0.0, 0.1, 10.0]))
    # One sigma of a normal integral is 15.87 and 84.13 %.
    assert chance == pytest.approx([0.0, 0.1587, 0.5, 0.8413, 1.0], abs=1e-4)


def test_contact_of_twins() -> None:
    # Two Suns fill lobes of 0.37892 a (Eggleton 1983) at a = 2.6391 Rsun: 0.3512 d by Kepler's third law
    # (P = 0.115835 d sqrt(a^3 / M) in solar units).
    assert triples.shortest_inner_period_d(1.0, 1.0, 1.0, 1.0) == pytest.approx(
        0.115835 * np.sqrt(2.6391**3 / 2.0), rel=1e-4
    )
    assert triples.shortest_inner_period_d(1.0, 1.0, 1.0, 0.0) == triples.shortest_inner_period_d(1.0, 1.0, 1.0, 1.0)


@given(m_a=masses, m_b=masses, r_a=st.floats(0.1, 10.0), r_b=st.floats(0.1, 10.0))
def test_contact_does_not_depend_on_the_order(m_a: float, m_b: float, r_a: float, r_b: float) -> None:
    forth, back = (
        triples.shortest_inner_period_d(m_a, m_b, r_a, r_b),
        triples.shortest_inner_period_d(m_b, m_a, r_b, r_a),
    )
    assert forth == pytest.approx(back, rel=1e-12)
    assert triples.shortest_inner_period_d(m_a, m_b, 2.0 * r_a, 2.0 * r_b) == pytest.approx(2.0**1.5 * forth)


def test_inner_pair_example() -> None:
    # Three Suns, 200 d and 10 d: 6.2 m/s, as N-body runs show (tests/outside), 5 times less in the second line.
    signal = triples.inner_pair_signal(1.0, 1.0, 1.0, 10.0, 200.0)
    assert signal.first_km_s == pytest.approx(0.00623, rel=0.01)
    expected_ratio = 5.0 * (1.0 - 0.5 * 0.05) / (1.0 - 1.5 * 0.05)
    assert signal.first_km_s / signal.second_km_s == pytest.approx(expected_ratio)
    assert signal.first_per_d == pytest.approx(0.2 - 0.015)
    assert signal.second_per_d == pytest.approx(0.2 - 0.005)


@given(m_a=masses, m_b=masses, m=masses, p_in=st.floats(0.5, 20.0))
def test_inner_pair_signal_scales(m_a: float, m_b: float, m: float, p_in: float) -> None:
    p_out = 100.0 * p_in
    signal = triples.inner_pair_signal(m_a, m_b, m, p_in, p_out)
    swapped = triples.inner_pair_signal(m_b, m_a, m, p_in, p_out)
    assert signal.first_km_s == pytest.approx(swapped.first_km_s)
    # Kepler's third law: at a fixed ratio of periods velocities go as P^(-1/3), and as the sine of the inclination.
    later = triples.inner_pair_signal(m_a, m_b, m, 8.0 * p_in, 8.0 * p_out, 0.5)
    assert later.first_km_s == pytest.approx(0.25 * signal.first_km_s)
    k1 = kepler.semi_amplitude_km_s(m, m_a + m_b, p_out)
    assert signal.first_km_s < 0.02 * k1


def test_light_travel_time_of_the_earth() -> None:
    # A clock on the Earth is early and late by 499.005 s (light time of 1 au); K = 29.785 km/s for a circular orbit.
    assert triples.light_travel_time_s(29.7847, 365.2569) == pytest.approx(499.005, rel=1e-4)
    # Seen along the major axis (omega 90 degrees) the full a counts, along the minor axis b = a sqrt(1 - e^2).
    full, minor = triples.light_travel_time_s(10.0, 100.0, 0.6, np.array([np.pi / 2, 0.0]))
    assert minor / full == pytest.approx(0.8)


def test_kozai_time_by_hand() -> None:
    # Antognini 2015, MNRAS 452, 3610, eq. 1: 8/(15 pi) x 3 x 365.25^2 / 3.6525 d = 50.93 yr for three Suns.
    assert triples.kozai_time_yr(3.6525, 365.25, 1.0, 2.0) == pytest.approx(8.0 / (15.0 * np.pi) * 3.0 * 100.0)
    assert triples.kozai_time_yr(3.6525, 365.25, 1.0, 2.0, 0.8) == pytest.approx(0.216 * 50.93, rel=1e-3)


def test_kozai_eccentricity() -> None:
    angles = np.radians([0.0, 39.0, 90.0, 141.0, 180.0])
    assert triples.kozai_peak_eccentricity(angles) == pytest.approx([0.0, 0.0, 1.0, 0.0, 0.0])
    # 60 degrees: sqrt(1 - 5/12) = 0.7638 (Kozai 1962, AJ 67, 591).
    assert triples.kozai_peak_eccentricity(np.pi / 3.0) == pytest.approx(0.7638, abs=1e-4)
    assert np.degrees(triples.KOZAI_INCLINATION_RAD) == pytest.approx(39.23, abs=0.01)


def test_precession_quenches_tight_pairs_in_wide_orbits_only() -> None:
    # Ratio of two time scales: precession 6 pi G M / (a c^2) per turn. Two Suns at 1 d turn by 2.2 degrees a year.
    assert triples.apsidal_quench(1.0, 1e5, 1.0, 2.0) > 2.25 > triples.apsidal_quench(10.0, 200.0, 1.0, 2.0)
    assert "too fast" in triples.kozai_caution(1.0, 1e5, 1.0, 2.0)
    words = triples.kozai_caution(10.0, 200.0, 1.0, 2.0)
    # 8 / (15 pi) x 3 x 200^2 / 10 d = 5.6 yr
    assert "39-141 degrees" in words
    assert "5.6 yr" in words


def test_precession_rate_by_hand() -> None:
    # epsilon = rate of precession x time of the torque: 3 G M n / (a c^2) over (M1/M) n (a_in/a_out)^3.
    a_in, a_out = kepler.separation_rsun(2.0, 3.0), kepler.separation_rsun(3.0, 900.0)
    rate = 3.0 * 1.3271244e11 * 2.0 / (a_in * 6.957e5 * 299792.458**2)
    assert triples.apsidal_quench(3.0, 900.0, 1.0, 2.0) == pytest.approx(rate / (0.5 * (a_in / a_out) ** 3))
