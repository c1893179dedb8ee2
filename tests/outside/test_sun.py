"""The Sun at 10 pc against Willmer 2018 (ApJS 236, 47); the published numbers are from memory."""

from __future__ import annotations

import numpy as np
import pytest

from vetter.light import Component, LightEngine

ABSOLUTE_MAG = {
    "Generic/Johnson.B": 5.44,
    "Generic/Johnson.V": 4.81,
    "GAIA/GAIA3.G": 4.67,
    "2MASS/2MASS.J": 3.67,
    "2MASS/2MASS.H": 3.32,
    "2MASS/2MASS.Ks": 3.27,
    "WISE/WISE.W1": 3.26,
    "SLOAN/SDSS.g": 5.11,
    "SLOAN/SDSS.r": 4.65,
}


@pytest.mark.parametrize("band", ABSOLUTE_MAG)
def test_the_sun(band: str) -> None:
    engine = LightEngine.build([band])
    sun = Component("star", *(np.array([value]) for value in (5777.0, 4.44, 0.0, 1.0)))
    assert engine.magnitudes(sun, 10.0, 0.0)[0, 0] == pytest.approx(ABSOLUTE_MAG[band], abs=0.05)


def test_the_sun_in_ab_and_vega() -> None:
    """V in AB and Vega: AB(Vega) of V is 0.002 plus Vega's own 0.03 (Bohlin's spectrum, as computed; see grids)."""
    sun = Component("star", *(np.array([value]) for value in (5777.0, 4.44, 0.0, 1.0)))
    vega, ab = (
        LightEngine.build(["Generic/Johnson.V"], systems={"Generic/Johnson.V": system}).magnitudes(sun, 10.0, 0.0)[0, 0]
        for system in ("Vega", "AB")
    )
    assert abs(ab - vega) < 0.05
