"""Epoch velocities as an observation: K1 passed on, cautions raised, inner pairs limited."""

from __future__ import annotations

from dataclasses import replace
from types import SimpleNamespace

import numpy as np
import pytest

from vetter.errors import InputError
from vetter.observations.base import registered
from vetter.observations.orbit import k1_error_km_s
from vetter.observations.prediction import InnerOrbit
from vetter.observations.velocities import (
    VelocitiesObservation,
    enough_epochs,
    epoch_cautions,
    fit_epochs,
    inner_signal_limit,
    orbit_with_velocities,
)
from vetter.physics import kepler, triples
from vetter.system.model import Distance, Measurement, Orbit, System, Velocities

PERIOD_D, E, K1 = 212.4, 0.31, 53.2


def _velocities(
    count: int = 25, error: float = 0.5, wave: tuple[float, float] | None = None, scatter: float = 0.0
) -> Velocities:
    rng = np.random.default_rng(17)
    time = np.sort(rng.uniform(2457000.0, 2458200.0, count))
    velocity = -20.0 + kepler.radial_velocity_km_s(time, PERIOD_D, 2457050.0, E, 0.8, K1)
    velocity = velocity + rng.normal(0.0, np.hypot(error, scatter), count)
    if wave is not None:
        velocity = velocity + wave[0] * np.sin(2.0 * np.pi * wave[1] * time)
    return Velocities("rv.ecsv", tuple(time), tuple(velocity), (error,) * count, ("",) * count)


def _system(velocities: Velocities | None, **orbit: object) -> System:
    values = {
        "period_d": Measurement(PERIOD_D, 0.0),
        "eccentricity": Measurement(0.0, 0.0),
        "eccentricity_given": False,
    }
    made = Orbit(**{**values, **orbit})  # type: ignore[arg-type]
    return System("Marlow", "marlow.toml", Distance(Measurement(2.0, 0.02)), made, (), velocities=velocities)


def _observation(system: System) -> VelocitiesObservation:
    found = VelocitiesObservation.from_system(system, None)  # type: ignore[arg-type]
    assert found is not None
    return found


def test_it_is_registered() -> None:
    assert VelocitiesObservation in registered()


def test_k1_comes_from_the_epochs() -> None:
    system = _system(_velocities())
    orbit = orbit_with_velocities(system).orbit
    assert orbit.k1_km_s is not None
    assert orbit.eccentricity_given
    assert orbit.k1_km_s.value == pytest.approx(K1, abs=4.0 * orbit.k1_km_s.error)
    assert orbit.period_d.value == pytest.approx(PERIOD_D, abs=1.0)
    assert orbit.eccentricity.value == pytest.approx(E, abs=0.03)
    # 25 epochs of 0.5 km/s fix an amplitude to 0.5 sqrt(2/25) = 0.14 km/s and a little more.
    assert 0.1 < orbit.k1_km_s.error < 0.3
    # What the orbit term will use is the width of the mass function itself.
    assert k1_error_km_s(orbit) == orbit.k1_km_s.error
    fit = fit_epochs(system.velocities, system.orbit)  # type: ignore[arg-type]
    low, high = np.quantile(fit.mass_function_msun, [0.15865, 0.84135])
    middle = kepler.mass_function_msun(orbit.period_d.value, orbit.k1_km_s.value, orbit.eccentricity.value)
    assert 3.0 * orbit.k1_km_s.error / orbit.k1_km_s.value == pytest.approx((high - low) / (2.0 * middle), rel=0.02)


def test_the_rest_of_the_system_is_untouched() -> None:
    system = _system(_velocities(), inclination_deg=Measurement(58.0, 0.5))
    done = orbit_with_velocities(system)
    assert replace(done, orbit=system.orbit) == system
    assert done.orbit.inclination_deg == system.orbit.inclination_deg


@pytest.mark.parametrize("velocities", [None, _velocities()])
def test_a_given_k1_wins(velocities: Velocities | None) -> None:
    system = _system(velocities, k1_km_s=Measurement(40.0, 0.1))
    assert orbit_with_velocities(system) is system


def test_a_given_k1_that_disagrees_is_said() -> None:
    velocities = _velocities()
    shape = {"eccentricity": Measurement(E, 0.01), "eccentricity_given": True}
    agreeing = _system(velocities, k1_km_s=Measurement(K1, 0.3), **shape)
    assert _observation(agreeing).cautions(agreeing) == []
    wrong = _system(velocities, k1_km_s=Measurement(58.0, 0.3), **shape)
    (said,) = _observation(wrong).cautions(wrong)
    assert "which is the one used" in said
    sigma = float(said.split(" sigma")[0].rsplit(" ", 1)[1])
    # 4.8 km/s over errors of 0.3 and about 0.15 km/s, and that of e.
    assert 7.0 < sigma < 16.0


def test_few_epochs() -> None:
    few = _velocities(4)
    assert not enough_epochs(few)
    assert VelocitiesObservation.from_system(_system(few), None) is None  # type: ignore[arg-type]
    with pytest.raises(InputError, match=r"velocities.file is 'rv.ecsv': expected 5 epochs at different times"):
        orbit_with_velocities(_system(few))
    astrometric = _system(few, photocentre_mas=Measurement(2.0, 0.1))
    assert orbit_with_velocities(astrometric) is astrometric
    with pytest.raises(ValueError, match="too few"):
        inner_signal_limit(few, astrometric.orbit, 10.0)


def test_further_instruments_need_further_epochs() -> None:
    five = _velocities(5)
    assert enough_epochs(five)
    assert not enough_epochs(replace(five, instrument=("a", "a", "a", "b", "b")))
    assert not enough_epochs(replace(five, time_bjd=(2457000.0,) * 5))


def test_scenarios_without_an_inner_pair_are_alike() -> None:
    seen = _observation(_system(_velocities()))
    plain = seen.residuals(SimpleNamespace(k1_km_s=np.array([50.0, 60.0]), inner=None))  # type: ignore[arg-type]
    assert plain.shape == (2, 1)
    assert plain[0] == plain[1]
    assert seen.count == 25 - 6
    # Chi-square of 19 epochs' worth: mean 19, standard deviation 6.2; jitter only lowers it.
    assert plain[0, 0] ** 2 < 19.0 + 4.0 * 6.2
    assert seen.describe() == "25 epoch velocities"
    assert np.isfinite(seen.ln_norm)


def test_a_wave_that_is_not_there_costs_likelihood() -> None:
    seen = _observation(_system(_velocities(40)))
    found = seen.residuals_with_wave(np.array([0.0, 0.05, 3.0]), np.full(3, 0.21))[:, 0]
    assert found[0] == pytest.approx(np.sqrt(seen.search.chi2))
    assert found[2] ** 2 > found[0] ** 2 + 25.0
    assert abs(found[1] - found[0]) < 0.5


def test_the_wave_of_a_predicted_pair_is_that_of_the_triples() -> None:
    """Pairs of 1 Msun and 1, 0.5 or next to nothing in 25 d, seen under 60 degrees, against the law called by hand."""
    seen = _observation(_system(_velocities(40, error=0.01)))
    second = np.array([1.0, 0.5, 1e-9])
    predicted = SimpleNamespace(
        k1_km_s=np.full(3, K1),
        mass_msun=np.ones(3),
        inclination_deg=np.full(3, 60.0),
        inner=InnerOrbit(np.ones(3), second, np.full(3, 25.0)),
    )
    found = seen.residuals(predicted)[:, 0]  # type: ignore[arg-type]
    wave = triples.inner_pair_signal(1.0, second, 1.0, 25.0, np.exp(seen.modes[0].point[0]), np.sqrt(0.75))
    expected = seen.residuals_with_wave(wave.first_km_s, np.broadcast_to(wave.first_per_d, 3))[:, 0]
    np.testing.assert_allclose(found, expected, rtol=1e-12)
    assert found[2] == pytest.approx(np.sqrt(seen.search.chi2), rel=1e-9)
    # A wave of 44 m/s, which 40 epochs of 10 m/s do not show.
    assert 0.03 < wave.first_km_s[0] < 0.06
    assert found[0] ** 2 > found[2] ** 2 + 25.0


def test_inner_pair_limit_finds_room_for_the_true_pair_only() -> None:
    # Inner pair of 20 d: its line at 2/20 - 3/212.4 per day with 2 km/s is put in.
    periods = np.array([20.0, 14.0, 9.0])
    frequency = 2.0 / 20.0 - 3.0 / PERIOD_D
    with_wave = inner_signal_limit(_velocities(40, wave=(2.0, frequency)), _system(None).orbit, periods)
    without = inner_signal_limit(_velocities(40), _system(None).orbit, periods)
    assert with_wave.amplitude_max_km_s[0] > 2.0
    assert np.all(without.amplitude_max_km_s < 0.7)
    expected = triples.inner_pair_signal(1.0, 1.0, 1.0, periods, PERIOD_D).first_per_d
    assert without.frequency_per_d == pytest.approx(expected, abs=2e-4)


def test_scatter_beyond_the_errors_is_said() -> None:
    system = _system(_velocities(30, scatter=3.0))
    (said,) = _observation(system).cautions(system)
    assert "beyond their errors of 0.5 km/s" in said
    quiet = _system(_velocities(30))
    assert _observation(quiet).cautions(quiet) == []


def test_a_second_period_is_said() -> None:
    # Two runs of three nights a long way apart leave the number of cycles between them open.
    velocities = _velocities(6, error=10.0)
    time = 2457000.0 + np.array([0.0, 50.0, 101.0, 3000.0, 3049.0, 3120.0])
    values = kepler.radial_velocity_km_s(time, PERIOD_D, 2457050.0, 0.0, 0.8, K1)
    epochs = replace(velocities, time_bjd=tuple(time), rv_km_s=tuple(values + 0.1))
    shape = {"eccentricity": Measurement(0.0, 0.0), "eccentricity_given": True}
    system = _system(epochs, **{**shape, "period_d": Measurement(PERIOD_D, 10.0)})
    said = " ".join(_observation(system).cautions(system))
    assert "nearly as well" in said


def test_a_period_that_was_not_given_is_searched_and_its_rivals_are_named() -> None:
    """The period of 212.4 d comes back, a K1 of the file is kept, and the cautions say whence the period is."""
    given = Measurement(float("nan"), 0.0)
    open_system = _system(_velocities(30), period_d=given, period_given=False)
    fitted = orbit_with_velocities(open_system)
    assert fitted.orbit.period_d.value == pytest.approx(212.4, rel=5e-3)
    assert orbit_with_velocities(fitted) is fitted
    (said,) = epoch_cautions(fitted)
    assert said.startswith("No period was given: 21")
    kept = _system(_velocities(30), period_d=given, period_given=False, k1_km_s=Measurement(50.0, 2.0))
    assert orbit_with_velocities(kept).orbit.k1_km_s == Measurement(50.0, 2.0)


def test_epochs_that_cannot_be_used_are_said() -> None:
    system = _system(_velocities(4), k1_km_s=Measurement(50.0, 2.0))
    (said,) = epoch_cautions(system)
    assert "The 4 epoch velocities were not used" in said
    assert epoch_cautions(_system(_velocities(30))) == []
    assert epoch_cautions(_system(None)) == []


def test_few_epochs_do_not_stand_for_the_period() -> None:
    few = _system(_velocities(4), period_d=Measurement(float("nan"), 0.0), period_given=False)
    astrometric = replace(few, orbit=replace(few.orbit, photocentre_mas=Measurement(2.0, 0.1)))
    with pytest.raises(InputError, match="5 epochs"):
        orbit_with_velocities(astrometric)
