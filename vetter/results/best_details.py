"""What the words and the figures need of a most favourable case beside its parameters: light, residuals, masses."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from vetter.observations.base import Observation
from vetter.observations.photometry import PhotometryObservation
from vetter.observations.prediction import Prediction
from vetter.observations.spectroscopy import SpectroscopyObservation
from vetter.results.verdicts import HiddenLight, MassDensity
from vetter.scenarios.context import Context

if TYPE_CHECKING:
    from vetter.evaluation import BranchRun, ScenarioRun

FloatArray = NDArray[np.float64]

DENSITY_BINS = 40
"""Bins of a printed posterior; few enough for a smooth curve from two thousand effective draws."""

WIDE = 3.0
"""Posteriors that span more than this factor get bins of equal width in ln mass."""

DENSITY_SHARE = 0.998
"""Central share of the posterior that the bins cover."""


def light_ratios(predicted: Prediction, context: Context) -> dict[str, float]:
    """Return the light beside the seen star over the seen star's, by band and by window (``515-535 nm``)."""
    ratios = dict(zip(context.engine.bands, predicted.band_ratio[0].tolist(), strict=True))
    windows = zip(context.engine.windows_nm, predicted.window_ratio[0].tolist(), strict=True)
    return ratios | {window_name(window): ratio for window, ratio in windows}


def window_name(window_nm: tuple[float, float]) -> str:
    """Return the name of a wavelength window given in nm."""
    return f"{window_nm[0]:g}-{window_nm[1]:g} nm"


def hidden_lights(predicted: Prediction, context: Context) -> tuple[HiddenLight, ...]:
    """Return the stars that shine on the companion's orbit in one predicted sample."""
    masses: list[float | None] = [None] * len(predicted.hidden_stars)
    if predicted.inner is not None:
        masses = [float(predicted.inner.first_msun[0]), float(predicted.inner.second_msun[0])]
    elif len(masses) == 1:
        masses = [float(predicted.companion_mass_msun[0])]
    return tuple(
        HiddenLight(
            star.body.kind,
            float(star.body.teff_k[0]),
            float(star.body.logg[0]),
            float(star.body.radius_rsun[0]),
            mass,
            dict(zip(context.engine.bands, star.band_ratio[0].tolist(), strict=True)),
        )
        for star, mass in zip(predicted.hidden_stars, masses, strict=True)
    )


def residuals_by_datum(branch: BranchRun, context: Context, predicted: Prediction) -> dict[str, dict[str, float]]:
    """Return the standardised residuals of one predicted sample: observation -> datum -> (model - measured) / error.

    A limit's residual is the square root of minus twice its ln likelihood, never negative.
    """
    found = {}
    for observation in branch.fit.observations:
        residuals = observation.residuals(predicted)[0].tolist()
        found[observation.name] = dict(zip(datum_names(observation, context, len(residuals)), residuals, strict=True))
    return found


def datum_names(observation: Observation, context: Context, count: int) -> list[str]:
    """Return one name per residual column of an observation: its bands or quantities, else numbers."""
    if isinstance(observation, PhotometryObservation):
        bands = context.engine.bands
        limits = [f"limit {bands[place]}" for place in observation.limit_index]
        return [bands[place] for place in observation.index] + limits
    if isinstance(observation, SpectroscopyObservation):
        given = {"teff_k": observation.teff_k, "logg": observation.logg, "feh": observation.feh}
        return [name for name, measured in given.items() if measured is not None]
    return [observation.name] if count == 1 else [f"{observation.name} {place + 1}" for place in range(count)]


def mass_density(run: ScenarioRun) -> MassDensity | None:
    """Return the companion's posterior mass as a histogram over all branches; None where every branch is closed."""
    masses, weights = [], []
    for branch, share in zip(run.branches, run.branch_weights(), strict=True):
        if branch.posterior is not None:
            masses.append(branch.fit.sample(branch.posterior.x).values["m2_msun"])
            weights.append(share * branch.posterior.weights)
    if not masses:
        return None
    mass, weight = np.concatenate(masses), np.concatenate(weights)
    order = np.argsort(mass, kind="stable")
    below = np.cumsum(weight[order]) / weight.sum()
    tail = 0.5 * (1.0 - DENSITY_SHARE)
    # At samples, not between them: where one sample carries all the weight it must lie inside.
    low, high = mass[order][np.searchsorted(below, [tail, 1.0 - tail])]
    space = np.geomspace if high > WIDE * low else np.linspace
    edges = space(low, max(high, low * (1.0 + 1e-6)), DENSITY_BINS + 1)
    density, _ = np.histogram(mass, edges, weights=weight, density=True)
    return MassDensity(tuple(edges.tolist()), tuple(density.tolist()))
