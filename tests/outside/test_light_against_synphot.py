"""The light engine against synphot and dust_extinction used directly, spectrum by spectrum."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray

from vetter.light import Component, LightEngine, reference
from vetter.light.passbands import custom_passband
from vetter.light.tables import LightTables, load_tables
from vetter.system.model import CustomPassband

FloatArray = NDArray[np.float64]

N_POINTS = 50
A_V_MAX_MAG = 3.0
ULTRAVIOLET = ("GALEX/GALEX.FUV", "GALEX/GALEX.NUV", "Swift/UVOT.UVW2", "Swift/UVOT.UVM2", "Swift/UVOT.UVW1")


@pytest.fixture(scope="module")
def tables() -> LightTables:
    return load_tables()


@pytest.fixture(scope="module")
def points() -> FloatArray:
    """Random (Teff, log g, A_V, radius, distance) inside the tables, the coolest and the hottest included."""
    generator = np.random.default_rng(20260101)
    low = np.array([np.log(2000.0), 0.0, 0.0, np.log(0.1), np.log(10.0)])
    high = np.array([np.log(50000.0), 5.0, A_V_MAX_MAG, np.log(100.0), np.log(5000.0)])
    values = generator.uniform(low, high, (N_POINTS, 5))
    values[:, [0, 3, 4]] = np.exp(values[:, [0, 3, 4]])
    return values


def synphot_elements(tables: LightTables, bands: list[str]) -> list[Any]:
    """Passbands for synphot, closed by zeros: it holds the last value for ever where a curve does not end at zero."""
    import astropy.units as u
    from synphot import SpectralElement
    from synphot.models import Empirical1D

    elements = []
    for name in bands:
        curve, throughput = tables.passbands[name].wavelength_angstrom, tables.passbands[name].throughput
        closed = np.concatenate([[curve[0] - 1e-3], curve, [curve[-1] + 1e-3]]), np.pad(throughput, 1)
        elements.append(SpectralElement(Empirical1D, points=closed[0] * u.AA, lookup_table=closed[1]))
    return elements


def synphot_magnitudes(
    tables: LightTables, bands: list[str], elements: list[Any], points: FloatArray
) -> Iterator[list[float]]:
    """Redden each unreddened spectrum with dust_extinction and observe it with synphot, band by band."""
    import astropy.units as u
    from dust_extinction.parameter_averages import G23
    from synphot import Observation, SourceSpectrum
    from synphot.models import Empirical1D
    from synphot.units import FLAM

    wavelength = tables.atmospheres.wavelength_angstrom
    within = (wavelength > 912.0) & (wavelength < 3.2e5)
    dimming_per_a_v = G23(Rv=3.1)(wavelength[within] * u.AA)
    zero_flux = [tables.passbands[name].zero_flux[tables.passbands[name].usual_system] for name in bands]
    for teff_k, logg, a_v, radius_rsun, distance_pc in points:
        flux = reference.observed_flux(tables, teff_k, logg, radius_rsun, distance_pc, 0.0)
        flux[within] *= 10 ** (-0.4 * a_v * dimming_per_a_v)
        star = SourceSpectrum(Empirical1D, points=wavelength * u.AA, lookup_table=flux * FLAM)
        yield [
            float(-2.5 * np.log10(Observation(star, element, binset=element.waveset).effstim(FLAM).value / zero))
            for element, zero in zip(elements, zero_flux, strict=True)
        ]


@pytest.mark.parametrize("n_points", [6, pytest.param(N_POINTS, marks=pytest.mark.slow)])
def test_fast_slow_and_synphot_agree(tables: LightTables, points: FloatArray, n_points: int) -> None:
    """Stars in every band: within 0.003 mag (0.01 in the ultraviolet, for the dust polynomial)."""
    points = points[:n_points]
    bands = list(tables.passbands)
    engine = LightEngine.build(bands, a_v_max_mag=A_V_MAX_MAG)
    component = Component("star", points[:, 0], points[:, 1], np.zeros(n_points), points[:, 3])
    fast = engine.magnitudes(component, points[:, 4], points[:, 2])
    direct = np.array(list(synphot_magnitudes(tables, bands, synphot_elements(tables, bands), points)))
    slow = np.empty_like(direct)
    for i, (teff_k, logg, a_v, radius_rsun, distance_pc) in enumerate(points):
        flux = reference.observed_flux(tables, teff_k, logg, radius_rsun, distance_pc, a_v)
        slow[i] = [reference.magnitude(tables, band, flux) for band in bands]
    tolerance = np.array([0.01 if band in ULTRAVIOLET else 0.003 for band in bands])
    for name, values in (("fast", fast), ("slow", slow)):
        miss = np.abs(values - direct).max(axis=0)
        late = {band: float(worst) for band, worst, most in zip(bands, miss, tolerance, strict=True) if worst > most}
        assert not late, f"{name} against synphot: {late}"


def test_without_dust_every_band_is_within_three_millimag(tables: LightTables, points: FloatArray) -> None:
    bands = list(tables.passbands)
    engine = LightEngine.build(bands, a_v_max_mag=A_V_MAX_MAG)
    component = Component("star", points[:, 0], points[:, 1], np.zeros(N_POINTS), np.ones(N_POINTS))
    fast = engine.magnitudes(component, 10.0, 0.0)
    for i, (teff_k, logg, *_) in enumerate(points):
        flux = reference.observed_flux(tables, teff_k, logg, 1.0, 10.0, 0.0)
        assert fast[i] == pytest.approx([reference.magnitude(tables, band, flux) for band in bands], abs=0.003)


def test_much_dust_in_the_optical(tables: LightTables) -> None:
    """A_V up to 9.3 (E(B-V) 3): within 0.01 mag from U to W4."""
    bands = [name for name in tables.passbands if name not in ULTRAVIOLET]
    engine = LightEngine.build(bands, a_v_max_mag=9.3)
    generator = np.random.default_rng(7)
    for teff_k, logg, a_v in generator.uniform([2500, 0, 0], [45000, 5, 9.3], (60, 3)):
        flux = reference.observed_flux(tables, teff_k, logg, 1.0, 10.0, a_v)
        slow = [reference.magnitude(tables, band, flux) for band in bands]
        one = Component("star", *(np.array([value]) for value in (teff_k, logg, 0.0, 1.0)))
        assert engine.magnitudes(one, 10.0, a_v)[0] == pytest.approx(slow, abs=0.01)


@pytest.mark.parametrize("name", sorted(load_tables().passbands))
def test_stored_weights_are_those_made_at_run_time(tables: LightTables, name: str) -> None:
    """A built-in band given again as the user's own: same mean flux, same pivot and width."""
    band = tables.passbands[name]
    own = CustomPassband(
        id="own",
        file="own.dat",
        system="AB",
        zero_point_jy=None,
        wavelength_nm=tuple(band.wavelength_angstrom / 10.0),
        throughput=tuple(band.throughput),
    )
    made = custom_passband(own, tables.atmospheres.wavelength_angstrom)
    assert made.pivot_angstrom == pytest.approx(band.pivot_angstrom, rel=1e-4)
    for teff_k in (2500.0, 6000.0, 40000.0):
        flux = reference.surface_flux(tables.atmospheres, teff_k, 4.5)
        assert -2.5 * np.log10(made.weights @ flux / (band.weights @ flux)) == pytest.approx(0.0, abs=1e-3)
