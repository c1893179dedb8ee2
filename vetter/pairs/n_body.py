"""The most favourable pair integrated under Newton's law with the package rebound, against the analytic prediction."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from vetter.errors import InputError
from vetter.pairs.epochs import epochs_about
from vetter.pairs.members import Members
from vetter.physics import kepler
from vetter.physics.inner_wave import SeenOrbit, inner_wave, strongest_line, wave_strength_km_s
from vetter.physics.keplerian_search import find_modes, search_periods
from vetter.physics.velocity_model import epoch_data

FloatArray = NDArray[np.float64]

TURNS, SAMPLES = 6, 240
"""Outer turns that are integrated, and velocities that are taken from them."""

NOISE = 0.01
"""Error given to those velocities, over the predicted semi-amplitude: small, so that the fit follows them closely."""

PERIOD_REACH = 0.04
"""The quadrupole of the three changes the mean inner period by up to some per cent from the one they start with."""


@dataclass(frozen=True)
class NBodyCheck:
    """One integration.

    Attributes
    ----------
    inner_period_d, mass_ratio : of the pair
    predicted_km_s, integrated_km_s : semi-amplitude of the wave's strongest line
    left_km_s : rms of what orbit, wave and apsidal motion leave of the integrated velocities
    without_wave_km_s : the same without wave and apsidal motion
    lasts : whether both semi-major axes stay within a fifth of themselves
    """

    inner_period_d: float
    mass_ratio: float
    predicted_km_s: float
    integrated_km_s: float
    left_km_s: float
    without_wave_km_s: float
    lasts: bool


def rebound_module() -> Any:  # noqa: ANN401 - an optional package without types
    """Return the package rebound. InputError where it is not installed."""
    try:
        import rebound
    except ImportError as error:
        raise InputError.single(
            "command line",
            "--n-body",
            "",
            "the package rebound, which is not installed",
            "Install it with: pip install 'companion-vetter[outside]'",
        ) from error
    return rebound


def n_body_check(pair: Members, inner_period_d: float, orbit: SeenOrbit) -> NBodyCheck:
    """Integrate one pair, the first of ``pair``, over six outer turns and set its velocities against the wave.

    Integrator IAS15 (Rein & Spiegel 2015, MNRAS 446, 1424). InputError where rebound is not installed.
    """
    sine = float(pair.sin_inclination[0])
    simulation = _simulation(pair, inner_period_d, orbit)
    time = np.linspace(0.0, TURNS * orbit.period_d, SAMPLES) + 0.3 * inner_period_d * np.sin(np.arange(SAMPLES))
    time = np.sort(np.maximum(time, 0.0))
    velocity, first, lasts = np.empty(SAMPLES), _axes(simulation), True
    for place, day in enumerate(time):
        simulation.integrate(day * kepler.DAY_S)
        velocity[place] = sine * simulation.particles[2].vy
        lasts = lasts and bool(np.all(np.abs(_axes(simulation) / first - 1.0) < 0.2))
    masses = (pair.first_msun[0], pair.second_msun[0], pair.mass_msun[0])
    strength = float(wave_strength_km_s(*masses, inner_period_d, orbit.period_d, sine))
    predicted = strength * strongest_line(orbit)
    found = _wave_in(time, velocity, inner_period_d, orbit.period_d, NOISE * predicted)
    return NBodyCheck(
        inner_period_d,
        float(pair.mass_ratio[0]),
        predicted,
        found[0] * strongest_line(orbit),
        found[1],
        found[2],
        lasts,
    )


def _wave_in(
    time: FloatArray, velocity: FloatArray, inner_period_d: float, outer_period_d: float, error: float
) -> tuple[float, float, float]:
    """Strength of the wave in these velocities, rms left with it, and rms without it (km/s)."""
    data = epoch_data(time, velocity, np.full(time.size, error))
    epochs = epochs_about(data, find_modes(data, search_periods(data, outer_period_d, None))[0])
    search = epochs.searches[0]
    trial = inner_period_d * (1.0 + np.linspace(-PERIOD_REACH, PERIOD_REACH, 4001))
    wave = inner_wave(data.time_d, trial, epochs.orbit)
    slope = np.broadcast_to(epochs.apsidal_slope, (trial.size, time.size))
    columns = np.stack([wave.real, wave.imag, slope], axis=1) * search.sqrt_weight
    columns = columns - (columns @ search.orbit_basis) @ search.orbit_basis.T
    # A circular orbit has no apsidal motion: a whisper of the identity keeps the system solvable.
    gram = columns @ np.swapaxes(columns, 1, 2)
    gram += 1e-10 * np.trace(gram, axis1=1, axis2=2)[:, None, None] * np.eye(3)
    right = columns @ search.residual
    solved = np.linalg.solve(gram, right[..., None])[..., 0]
    gain = np.einsum("nk,nk->n", solved, right)
    best = int(np.argmax(gain))
    scale = float(1.0 / search.sqrt_weight[0])
    left = max(search.chi2 - float(gain[best]), 0.0)
    rms = [scale * float(np.sqrt(value / time.size)) for value in (left, search.chi2)]
    return float(np.hypot(*solved[best, :2])), rms[0], rms[1]


def _simulation(pair: Members, inner_period_d: float, orbit: SeenOrbit) -> Any:  # noqa: ANN401
    """Pair and seen star, edge on, in solar masses, km and s; the sight line is the second axis."""
    simulation = rebound_module().Simulation()
    simulation.G = kepler.GM_SUN_KM3_S2
    simulation.integrator = "ias15"
    first, second, star = (float(mass[0]) for mass in (pair.first_msun, pair.second_msun, pair.mass_msun))
    inner = float(kepler.separation_au(first + second, inner_period_d) * kepler.AU_KM)
    outer = float(kepler.separation_au(first + second + star, orbit.period_d) * kepler.AU_KM)
    simulation.add(m=first)
    simulation.add(m=second, a=inner)
    centre = simulation.com()
    simulation.add(m=star, a=outer, e=orbit.eccentricity, omega=orbit.periastron_argument_rad, M=1.0, primary=centre)
    simulation.move_to_com()
    return simulation


def _axes(simulation: Any) -> FloatArray:  # noqa: ANN401
    """Semi-major axes (km) of the pair and of the seen star about it."""
    inner = simulation.particles[1].orbit(primary=simulation.particles[0])
    outer = simulation.particles[2].orbit(primary=simulation.com(first=0, last=2))
    return np.array([inner.a, outer.a])
