"""Spectra of the stars of a most favourable case, from the light engine through narrow windows."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from vetter.light.engine import Component, LightEngine
from vetter.results.verdicts import BestFit
from vetter.scenarios.context import Context

FloatArray = NDArray[np.float64]

STEPS_PER_E = 22
"""Windows per factor e in wavelength."""


class Spectra(NamedTuple):
    """lambda F_lambda (erg s-1 cm-2) of the seen star (n,) and hidden stars (k, n) at wavelengths (n,) in micron."""

    micron: FloatArray
    seen: FloatArray
    hidden: FloatArray

    @property
    def total(self) -> FloatArray:
        """The sum."""
        return np.asarray(self.seen + self.hidden.sum(axis=0))


def seen_star(best: BestFit) -> Component:
    """Return the seen star of a most favourable case as a body of one sample."""
    names = ("teff1_k", "logg1", "feh", "r1_rsun")
    return Component("star", *(np.array([best.values[name]]) for name in names))


def hidden_components(best: BestFit) -> list[Component]:
    """Return the hidden stars of a most favourable case; those that are stars share the seen star's [Fe/H]."""
    feh = np.array([best.values["feh"]])
    return [
        Component(star.kind, np.array([star.teff_k]), np.array([star.logg]), feh, np.array([star.radius_rsun]))
        for star in best.hidden_stars
    ]


def narrow_engine(context: Context, low_micron: float, high_micron: float) -> LightEngine:
    """Return an engine of narrow windows between two wavelengths, with the dust and atmospheres of the context."""
    edges = np.geomspace(low_micron, high_micron, _count(low_micron, high_micron) + 1)
    windows = [(float(a), float(b)) for a, b in zip(1000.0 * edges[:-1], 1000.0 * edges[1:], strict=True)]
    engine = context.engine
    return LightEngine.build([], windows, engine.r_v, engine.a_v_max_mag, grid=engine.grid)


def spectra(narrow: LightEngine, best: BestFit) -> Spectra:
    """Return the spectra of a most favourable case through the windows of :func:`narrow_engine`."""
    middle = np.array(narrow.pivots_angstrom) / 1e4
    place = (best.values["distance_pc"], narrow.r_v * best.values["ebv_mag"])

    def light(component: Component) -> FloatArray:
        return np.asarray(1e4 * middle * 10.0 ** (-0.4 * narrow.magnitudes(component, *place)[0]))

    hidden = [light(component) for component in hidden_components(best)]
    return Spectra(middle, light(seen_star(best)), np.array(hidden).reshape(len(hidden), len(middle)))


def _count(low_micron: float, high_micron: float) -> int:
    return int(np.ceil(STEPS_PER_E * np.log(high_micron / low_micron)))
