"""Real spectra through our passbands against published magnitudes: zero points, passbands and the Sun.

The spectra are CALSPEC's (Bohlin et al.); ``standard_stars.npz`` beside this file is written by the table builder.
"""

from __future__ import annotations

import json
from collections.abc import Iterable
from functools import cache
from importlib.resources import files
from pathlib import Path
from typing import Any

import numpy as np
import pytest

pytest.importorskip("vetter.grids.recipes", reason="the recipes are part of a source checkout only")

from vetter.grids.recipes.standard_stars import STANDARDS, Standard

from vetter.light import Component, LightEngine

GRIDS = Path(str(files("vetter.grids")))
JOHNSON_V = "Generic/Johnson.V"


@cache
def spectra() -> dict[str, np.ndarray]:
    with np.load(Path(__file__).with_name("standard_stars.npz"), allow_pickle=False) as archive:
        return {key: archive[key].astype(np.float64) for key in archive.files}


@cache
def bands() -> dict[str, tuple[dict[str, Any], np.ndarray, np.ndarray]]:
    entries = json.loads((GRIDS / "passbands.json").read_text(encoding="utf-8"))
    with np.load(GRIDS / "passbands.npz", allow_pickle=False) as archive:
        return {e["id"]: (e, archive[f"wavelength_{i}"], archive[f"throughput_{i}"]) for i, e in enumerate(entries)}


def mean_flux(band: str, star: str) -> float:
    """Photon-weighted mean flux, integrated on the union of the wavelengths of star and band."""
    _, wavelength, throughput = bands()[band]
    star_wavelength, flux = spectra()[f"{star}_wavelength"], spectra()[f"{star}_flux"]
    inside = (star_wavelength > wavelength[0]) & (star_wavelength < wavelength[-1])
    union = np.union1d(wavelength, star_wavelength[inside])
    kernel = np.interp(union, wavelength, throughput) * union
    return float(np.trapezoid(kernel * np.interp(union, star_wavelength, flux), union) / np.trapezoid(kernel, union))


def magnitude(band: str, star: str) -> float:
    entry = bands()[band][0]
    return -2.5 * np.log10(mean_flux(band, star) / entry[f"zero_flux_{entry['usual_system'].lower()}"])


def true_ab(band: str, star: str) -> float:
    """AB magnitude from the definition, free of the stored zero points."""
    pivot = bands()[band][0]["pivot_angstrom"]
    return -2.5 * np.log10(mean_flux(band, star) * pivot**2 / 2.99792458e18 / 3631e-23)


@pytest.mark.parametrize(
    ("band", "ab"),
    [
        ("Generic/Johnson.U", 0.791), ("Generic/Johnson.B", -0.119), (JOHNSON_V, 0.002),
        ("Generic/Cousins.R", 0.194), ("Generic/Cousins.I", 0.445), ("2MASS/2MASS.J", 0.908),
        ("2MASS/2MASS.H", 1.388), ("2MASS/2MASS.Ks", 1.860), ("WISE/WISE.W1", 2.694), ("WISE/WISE.W2", 3.334),
        ("WISE/WISE.W3", 5.169), ("WISE/WISE.W4", 6.645),
    ],
)  # fmt: skip
def test_vega_in_ab(band: str, ab: float) -> None:
    """Computed once by hand from the same spectrum (alpha_lyr_stis_011); pins files, units and photon weighting."""
    assert true_ab(band, "vega_stis") == pytest.approx(ab, abs=0.0015)


@pytest.mark.parametrize(
    ("band", "ab"), [("GAIA/GAIA3.G", 0.1136), ("GAIA/GAIA3.Gbp", 0.0155), ("GAIA/GAIA3.Grp", 0.3561)]
)
def test_gaia_vega_zero_points(band: str, ab: float) -> None:
    """Difference of the published AB and Vega zero points (Riello et al. 2021, A&A 649, A3; from memory)."""
    assert true_ab(band, "vega_gaia") == pytest.approx(ab, abs=0.001)
    assert magnitude(band, "vega_gaia") == pytest.approx(0, abs=1e-5)


@pytest.mark.parametrize(
    ("band", "ab"),
    [
        ("Swift/UVOT.UVW2", 1.73), ("Swift/UVOT.UVM2", 1.69), ("Swift/UVOT.UVW1", 1.51), ("Swift/UVOT.U", 1.02),
        ("Swift/UVOT.B", -0.13), ("Swift/UVOT.V", -0.01),
    ],
)  # fmt: skip
def test_uvot_vega_to_ab(band: str, ab: float) -> None:
    """The mission's zero-point page of 2011 (Breeveld et al. 2011, AIP Conf. Proc. 1358, 373; looked up).

    0.04: its Vega is an older spectrum, 3 % different in the ultraviolet; zero points themselves are given to 0.03.
    """
    assert true_ab(band, "vega_stis") == pytest.approx(ab, abs=0.04)


@pytest.mark.parametrize(
    ("band", "mag"),
    [
        ("Generic/Johnson.U", 0.025), ("Generic/Johnson.B", 0.03), (JOHNSON_V, 0.03), ("Generic/Cousins.R", 0.039),
        ("Generic/Cousins.I", 0.035), ("2MASS/2MASS.J", 0.0), ("2MASS/2MASS.H", 0.03), ("2MASS/2MASS.Ks", 0.0),
        ("WISE/WISE.W1", -0.033), ("WISE/WISE.W2", 0.0), ("TESS/TESS.Red", 0.0),
    ],
)  # fmt: skip
def test_vega_has_the_magnitude_it_is_given(band: str, mag: float) -> None:
    assert magnitude(band, "vega_stis") == pytest.approx(mag, abs=1e-5)


# U B V R I of Landolt & Uomoto 2007, AJ 133, 768; V and B-V as CALSPEC lists them, the other colours from memory.
LANDOLT = {
    "bd17": (9.724, 9.907, 9.464, 9.166, 8.846),
    "g191b2b": (10.250, 11.455, 11.781, 11.930, 12.108),
    "gd71": (11.676, 12.783, 13.032, 13.169, 13.334),
    "feige110": (10.360, 11.527, 11.832, 11.970, 12.145),
}


@pytest.mark.parametrize("star", sorted(LANDOLT))
def test_landolt_stars(star: str) -> None:
    """0.025: calibration scale of the 2009 spectra (1 %), of Vega (1 %) and the colour term of the passbands; B 0.05.

    The B of hot stars comes out 0.03-0.05 too faint (none in solar-type stars), the known colour term of this passband.
    """
    names = ("Generic/Johnson.U", "Generic/Johnson.B", JOHNSON_V, "Generic/Cousins.R", "Generic/Cousins.I")
    computed = np.array([magnitude(name, star) for name in names])
    difference = computed - np.array(LANDOLT[star])
    assert np.all(np.abs(difference) < [0.025, 0.05, 0.025, 0.025, 0.025]), difference


@pytest.mark.parametrize(("star", "mag"), [("bd17", 9.5691), ("hd209458", 7.7719), ("feige110", 11.7526)])
def test_hipparcos_magnitudes(star: str, mag: float) -> None:
    """Hp of the new Hipparcos reduction (van Leeuwen 2007, A&A 474, 653); 0.015 is what the two ends differ by."""
    assert magnitude("Hipparcos/Hipparcos.Hp", star) == pytest.approx(mag, abs=0.015)


# Willmer 2018, ApJS 236, 47: apparent magnitudes of the Sun, looked up in a public copy of his table 3, AB for SDSS,
# else Vega. His B and V differ by 0.63, solar twins by 0.653 (Ramirez et al. 2012, ApJ 752, 5, from memory):
# the spectrum is held to the twins.
WILLMER = {
    "Generic/Johnson.B": -26.13, JOHNSON_V: -26.76, "2MASS/2MASS.J": -27.90, "2MASS/2MASS.H": -28.25,
    "2MASS/2MASS.Ks": -28.30, "SLOAN/SDSS.g": -26.47, "SLOAN/SDSS.r": -26.93, "SLOAN/SDSS.i": -27.05,
}  # fmt: skip


@pytest.mark.parametrize("band", list(WILLMER))
def test_spectrum_of_the_sun(band: str) -> None:
    expected = WILLMER[JOHNSON_V] + 0.653 if band == "Generic/Johnson.B" else WILLMER[band]
    assert magnitude(band, "sun") == pytest.approx(expected, abs=0.035)  # 2 % each: scale of his Sun and of his Vega


# The tables against the standard stars: published Teff, log g, [Fe/H] and E(B-V), nothing fitted but the angular
# diameter, which V fixes (J where there is no V).
R_V = 3.1
# Vega turns fast and is seen pole-on: no one temperature is right. 9400 K, 3.90, -0.5 is that of the CALSPEC spectrum
# (Bohlin 2014, AJ 147, 127; from memory); with the 9550 K, 3.95 of Castelli & Kurucz 1994, A&A 281, 817, all 44 bands
# are within the stored errors instead of 39.
PUBLISHED = {**STANDARDS, "vega_stis": Standard("alpha_lyr_stis_011", 9400.0, 3.90, -0.5)}
STARS = [name for name, standard in PUBLISHED.items() if np.isfinite(standard.teff_k)]
NAMED = ("sun", "p330e", "bd17", "vb8", "gd71", "gd153", "g191b2b", "vega_stis")


@cache
def engine() -> LightEngine:
    return LightEngine.build(list(bands()), a_v_max_mag=1.0)


@cache
def residuals(star: str) -> dict[str, float]:
    """Table minus spectrum in every band that the measured spectrum covers, relative to the anchor (left out)."""
    standard = PUBLISHED[star]
    values = (np.array([value]) for value in (standard.teff_k, standard.logg, standard.feh, 1.0))
    computed = engine().magnitudes(Component(standard.kind, *values), 10.0, R_V * standard.ebv_mag)[0]
    reach = spectra()[f"{star}_wavelength"][[0, -1]]
    covered = [b for b in bands() if reach[0] <= bands()[b][1][0] and bands()[b][1][-1] <= reach[1]]
    difference = {band: float(computed[engine().bands.index(band)]) - magnitude(band, star) for band in covered}
    anchor = difference.pop(anchor_of(difference))
    return {band: value - anchor for band, value in difference.items()}


def anchor_of(covered: Iterable[str]) -> str:
    return JOHNSON_V if JOHNSON_V in covered else "2MASS/2MASS.J"


def stored_error(star: str, band: str) -> float:
    standard = PUBLISHED[star]
    return float(engine().model_error_mag(band, standard.teff_k, standard.logg, standard.feh))


def test_there_are_enough_standards() -> None:
    assert len(STARS) >= 20
    assert set(NAMED) <= set(STARS)
    assert sum(len(residuals(star)) for star in STARS) >= 450


def test_standard_stars_within_the_stored_errors() -> None:
    """At least 95 % of all bands within the stored error of the band alone, though the anchor has an error too."""
    within = [abs(value) <= stored_error(star, band) for star in STARS for band, value in residuals(star).items()]
    assert np.mean(within) >= 0.95


def test_the_named_standards_within_the_stored_errors() -> None:
    """The eight on their own; VB 8, one M7 dwarf, is 0.08-0.18 mag off the mean sequence and shapes its errors."""
    within = [abs(value) <= stored_error(star, band) for star in NAMED for band, value in residuals(star).items()]
    assert len(within) > 150
    assert np.mean(within) >= 0.95


@pytest.mark.parametrize("star", STARS)
def test_most_bands_of_every_standard(star: str) -> None:
    within = [abs(value) <= stored_error(star, band) for band, value in residuals(star).items()]
    assert np.mean(within) > 0.6


@pytest.mark.parametrize("star", STARS)
def test_no_standard_star_is_far_off(star: str) -> None:
    """Every band within twice the stored errors of band and anchor in quadrature."""
    for band, value in residuals(star).items():
        assert abs(value) < 2.0 * np.hypot(stored_error(star, band), stored_error(star, anchor_of(bands()))), band


@pytest.mark.parametrize("star", ["c26202", "sf1615", "bd17"])
def test_metal_poor_stars_between_470_and_1000_nm(star: str) -> None:
    """[Fe/H] -0.39, -0.61, -1.69: with the published differences every band there is within 0.03 mag of V (g z y .045).

    The same bands with solar light: V minus G alone was 0.03, 0.03 and 0.11 mag off when only G was corrected.
    """
    for band, value in residuals(star).items():
        pivot = bands()[band][0]["pivot_angstrom"]
        if 4700.0 < pivot < 10000.0:
            assert abs(value) < (0.03 if 4900.0 < pivot < 8500.0 else 0.045), band
    colour = residuals(star)["GAIA/GAIA3.Gbp"] - residuals(star)["GAIA/GAIA3.Grp"]
    assert abs(colour) < 0.01


@pytest.mark.parametrize("star", ["sun", "hd209458", "p041c", "p177d", "p330e", "snap2"])
def test_colours_of_solar_type_stars(star: str) -> None:
    """Within the errors first found when the recipe was tried, 0.03 mag from B to Ks and 0.09 bluer, where not listed.

    An earlier version took P041C at 5890 K without dust and 0.035 and 0.06 mag. Its published 5960 K and E(B-V) 0.022
    give 0.02 in Ks; 5960 K without dust would give 0.08. The listed excesses are real: P330E, SNAP-2 and P177D have
    [Fe/H] -0.16, -0.19, -0.02 and E(B-V) 0.03-0.045, known to 0.01 (0.03 mag in V-Ks).
    """
    known = {("p177d", "2MASS/2MASS.Ks"): 0.045} | {
        (name, band): 0.13
        for name in ("snap2", "p330e")
        for band in bands()
        if bands()[band][0]["pivot_angstrom"] < 3900
    }
    for band, value in residuals(star).items():
        if bands()[band][0]["pivot_angstrom"] < 3000:
            continue  # the stored error is 0.2 and more there
        first_found = 0.09 if bands()[band][0]["pivot_angstrom"] < 3900 else 0.03
        assert abs(value) < known.get((star, band), first_found), band


@pytest.mark.parametrize("star", ["g191b2b", "gd153", "gd71"])
def test_colours_of_white_dwarfs(star: str) -> None:
    """Three primary standards (Bohlin, Gordon & Tremblay 2014, PASP 126, 711), relative to PS1 r: 0.02 mag, U too.

    U carries the constant 0.09 mag between the table's passband and ours, measured on these stars. SDSS u and z are
    left out: the offsets of that system are in ours and not in the table; B: the colour term of the passband.
    """
    found = residuals(star)
    names = [b for b in found if b.startswith(("PAN", "GAIA", "SLOAN/SDSS.g", "SLOAN/SDSS.r", "SLOAN/SDSS.i", "GALEX"))]
    for band in (*names, "Generic/Johnson.U"):
        assert found[band] - found["PAN-STARRS/PS1.r"] == pytest.approx(0, abs=0.02), band
