"""Dust in the bands: against published coefficients and against direct integration, any R_V, up to E(B-V) 3."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from numpy.typing import NDArray

from vetter.light import Component, LightEngine, reference
from vetter.light.tables import DustTable, LightTables, load_tables

FloatArray = NDArray[np.float64]
V = "Generic/Johnson.V"

# Schlafly & Finkbeiner 2011, ApJ 737, 103, table 6, R_V 3.1: A_band / E(B-V), made with a 7000 K star and the law of
# Fitzpatrick 1999. Looked up in public code that copies the table (U from memory); J H K are UKIRT's there.
TABLE_6 = {
    "Generic/Johnson.U": 4.334, "Generic/Johnson.B": 3.626, V: 2.742, "Generic/Cousins.R": 2.169,
    "Generic/Cousins.I": 1.505, "SLOAN/SDSS.u": 4.239, "SLOAN/SDSS.g": 3.303, "SLOAN/SDSS.r": 2.285,
    "SLOAN/SDSS.i": 1.698, "SLOAN/SDSS.z": 1.263, "PAN-STARRS/PS1.g": 3.172, "PAN-STARRS/PS1.r": 2.271,
    "PAN-STARRS/PS1.i": 1.682, "PAN-STARRS/PS1.z": 1.322, "PAN-STARRS/PS1.y": 1.087, "2MASS/2MASS.J": 0.709,
    "2MASS/2MASS.H": 0.449, "2MASS/2MASS.Ks": 0.302,
}  # fmt: skip


def star(teff_k: float) -> Component:
    return Component("star", *(np.array([value]) for value in (teff_k, 4.5, 0.0, 1.0)))


def coefficients(tables: LightTables, teff_k: float) -> dict[str, float]:
    """A_band / A(V band) behind one magnitude of dust."""
    engine = LightEngine.build(list(TABLE_6), tables=tables)
    dimming = (engine.magnitudes(star(teff_k), 10.0, 1.0) - engine.magnitudes(star(teff_k), 10.0, 0.0))[0]
    return dict(zip(TABLE_6, (dimming / dimming[engine.bands.index(V)]).tolist(), strict=True))


@pytest.mark.parametrize("law", ["Fitzpatrick 1999", "Gordon et al. 2023"])
def test_published_coefficients(law: str) -> None:
    """Relative to V. With their law 0.03: they fix it at 1 micron, and their passbands are older.

    With ours 0.045: 0.03 stronger from r to y, 0.03-0.04 weaker in U and B, as the two laws differ there.
    """
    tables = load_tables()
    if law == "Fitzpatrick 1999":
        import astropy.units as u
        from dust_extinction.parameter_averages import F99

        wavelength = np.geomspace(1200.0, 32000.0, 4000)
        published = np.asarray(F99(Rv=3.1)(wavelength * 1e-4 * u.um), dtype=float)
        tables = replace(tables, dust=DustTable(wavelength, published, np.zeros_like(published)))
    tolerance = 0.03 if law == "Fitzpatrick 1999" else 0.045
    for band, ratio in coefficients(tables, 7000.0).items():
        assert ratio == pytest.approx(TABLE_6[band] / TABLE_6[V], abs=tolerance), band


@pytest.mark.parametrize("teff_k", [5750.0, 20000.0])
def test_coefficients_are_the_direct_integrals(teff_k: float) -> None:
    """Redden the spectrum, integrate, compare: 0.002 of A(V)."""
    tables = load_tables()
    clear, dusty = (reference.observed_flux(tables, teff_k, 4.5, 1.0, 10.0, a_v) for a_v in (0.0, 1.0))
    direct = {b: reference.magnitude(tables, b, dusty) - reference.magnitude(tables, b, clear) for b in TABLE_6}
    for band, ratio in coefficients(tables, teff_k).items():
        assert ratio == pytest.approx(direct[band] / direct[V], abs=0.002), band


ULTRAVIOLET = [band.id for band in load_tables().passbands.values() if band.pivot_angstrom < 3000.0]


@pytest.mark.parametrize("r_v", [2.5, 3.1, 4.2, 5.5])
def test_any_law_up_to_three_magnitudes_of_reddening(r_v: float) -> None:
    """Every band, E(B-V) 0 to 3: 0.01 mag optical and infrared, 0.03 ultraviolet, against direct integration."""
    tables, bands = load_tables(), list(load_tables().passbands)
    engine = LightEngine.build(bands, r_v=r_v, a_v_max_mag=3.0 * r_v)
    tolerance = np.array([0.03 if band in ULTRAVIOLET else 0.01 for band in bands])
    for teff_k in (2800.0, 4200.0, 5750.0, 10400.0, 20000.0, 45000.0):
        for ebv in (0.05, 0.4, 0.95, 2.3, 3.0):
            flux = reference.observed_flux(tables, teff_k, 4.5, 1.0, 10.0, ebv * r_v, r_v)
            direct = np.array([reference.magnitude(tables, band, flux) for band in bands])
            miss = np.abs(engine.magnitudes(star(teff_k), 10.0, ebv * r_v)[0] - direct)
            assert (miss <= tolerance).all(), (teff_k, ebv, bands[int(np.argmax(miss / tolerance))])
