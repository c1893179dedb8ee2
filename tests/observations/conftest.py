"""Predictions made by hand, in the columns of one light engine."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
import pytest

from vetter.light.engine import LightEngine
from vetter.observations.prediction import HiddenStar, InnerOrbit, Prediction
from vetter.scenarios.context import build_context
from vetter.system.model import System

ONE_STAR = {
    "optical_ratio": 0.0,
    "distance_pc": 200.0,
    "ebv_mag": 0.01,
    "teff_k": 5772.0,
    "logg": 4.44,
    "feh": 0.0,
    "companion_teff_k": np.nan,
    "companion_logg": np.nan,
    "mass_msun": 1.0,
    "companion_mass_msun": 1.5,
    "k1_km_s": 30.0,
    "inclination_deg": 60.0,
    "photocentre_mas": 2.0,
    "radius_rsun": 1.0,
    "separation_rsun": 100.0,
}

Predict = Callable[..., Prediction]


@pytest.fixture(scope="session")
def engine(plain: System) -> LightEngine:
    return build_context(plain).engine


@pytest.fixture
def predict() -> Predict:
    """Return a prediction of as many samples as the longest value given; the rest stays that of a Sun with a rock."""

    def make(
        ordinary: bool = True,
        hidden_stars: tuple[HiddenStar, ...] = (),
        inner: InnerOrbit | None = None,
        **given: object,
    ) -> Prediction:
        unrelated = given.pop("unrelated_mas", None)
        arrays = {name: np.atleast_1d(np.asarray(value, dtype=float)) for name, value in given.items()}
        n = max((len(values) for values in arrays.values()), default=1)
        wide = {name: arrays.pop(name, np.zeros((n, 3))) for name in ("magnitudes", "window_ratio", "band_ratio")}
        full = {name: np.broadcast_to(arrays.pop(name, np.array([value])), n) for name, value in ONE_STAR.items()}
        assert not arrays, f"unknown fields {list(arrays)}"
        return Prediction(
            **wide,
            **full,
            ordinary_seen_star=ordinary,
            hidden_stars=hidden_stars,
            inner=inner,
            unrelated_mas=None if unrelated is None else np.asarray(unrelated, dtype=float),
        )

    return make
