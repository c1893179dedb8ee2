"""The most favourable case of each explanation, for the words and numbers that go beside the table."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING, NamedTuple

import numpy as np

from vetter.observations.prediction import Prediction
from vetter.observations.variability import (
    eclipse_depths_mag,
    ellipsoidal_mag,
    inner_eclipses,
    inner_ellipsoidal_mag,
)
from vetter.observations.velocities import inner_signal
from vetter.results.verdicts import ScenarioVerdict
from vetter.scenarios.context import Context

if TYPE_CHECKING:
    from vetter.evaluation import BranchRun, ScenarioRun

SIGNALS_ANGSTROM = 6000.0
"""Without a light curve, predicted variations are those of the band nearest to this wavelength."""


class BestCase(NamedTuple):
    """One row of the table, its best branch, and what that predicts (one sample)."""

    row: ScenarioVerdict
    branch: BranchRun
    prediction: Prediction

    @property
    def title(self) -> str:
        """Its title as in the middle of a sentence."""
        return self.row.title[0].lower() + self.row.title[1:]

    @property
    def stands(self) -> bool:
        """Whether it is not excluded."""
        return self.row.verdict != "excluded"


def best_cases(runs: Sequence[ScenarioRun], rows: Sequence[ScenarioVerdict]) -> list[BestCase]:
    """Return the best case of every row that is not closed by a wall; ``runs`` and ``rows`` in the same order."""
    return [
        BestCase(row, run.best, run.best.fit.sample(run.best.best_x[None]).prediction)
        for run, row in zip(runs, rows, strict=True)
        if row.best_fit is not None
    ]


def predicted_signals(predicted: Prediction, context: Context) -> dict[str, float]:
    """Return what one predicted sample would show in a light curve and in velocities, by name.

    ``ellipsoidal_mag`` (semi-amplitude at half the period) and ``eclipse_depth_mag`` (deepest for any argument of
    periastron); for a hidden pair also ``inner_signal_km_s`` and ``inner_signal_per_d`` (its strongest wave in the seen
    star's velocity, both orbits circular and in one plane), ``inner_ellipsoidal_mag`` and ``inner_eclipse_depth_mag``
    (both seen edge on) and ``inner_eclipse_probability`` (for a plane of any orientation).
    """
    engine, orbit = context.engine, context.system.orbit
    column = _light_column(context)
    wavelength_nm, e = 0.1 * engine.pivots_angstrom[column], orbit.eccentricity.value
    depths = eclipse_depths_mag(predicted, column, e, np.zeros(1, dtype=np.intp))
    values = {
        "ellipsoidal_mag": ellipsoidal_mag(predicted, column, wavelength_nm, e),
        "eclipse_depth_mag": np.max(np.stack(depths)),
    }
    wave = inner_signal(predicted, orbit.period_d.value)
    light, pair = inner_ellipsoidal_mag(predicted, column, wavelength_nm), inner_eclipses(predicted, column)
    if wave is not None and light is not None and pair is not None:
        values |= {
            "inner_signal_km_s": wave.first_km_s,
            "inner_signal_per_d": wave.first_per_d,
            "inner_ellipsoidal_mag": light,
            "inner_eclipse_depth_mag": np.max(np.stack([pair.first_mag, pair.second_mag])),
            "inner_eclipse_probability": pair.probability,
        }
    return {name: float(np.asarray(value).reshape(-1)[0]) for name, value in values.items()}


def _light_column(context: Context) -> int:
    """Column of the light curve's band, or of the band nearest to red light."""
    light_curve, engine = context.system.variability, context.engine
    if light_curve is not None:
        return engine.bands.index(light_curve.band)
    return int(np.argmin([abs(pivot - SIGNALS_ANGSTROM) for pivot in engine.pivots_angstrom[: len(engine.bands)]]))
