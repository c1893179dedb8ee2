"""Real spectra for checks against the outside world: standard stars with published parameters, both Vegas, the Sun."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from .passbands import vega_spectra
from .sources import Sources, fits_columns
from .spectra import Array

MEASURED_ANGSTROM = 25000.0  # CALSPEC spectra are models beyond
NICMOS_ANGSTROM = 8200.0  # stars observed with NICMOS only are models below


@dataclass(frozen=True)
class Standard:
    """One CALSPEC spectrum.

    Attributes
    ----------
    file : name of the CALSPEC file without ending
    teff_k, logg, feh, ebv_mag : published parameters; NaN where none are used
    kind : "star" or "white_dwarf"
    from_angstrom, to_angstrom : where the spectrum is measured
    """

    file: str
    teff_k: float
    logg: float
    feh: float = 0.0
    ebv_mag: float = 0.0
    kind: str = "star"
    from_angstrom: float = 0.0
    to_angstrom: float = MEASURED_ANGSTROM


def _near_infrared(file: str, *parameters: float) -> Standard:
    return Standard(file, *parameters, from_angstrom=NICMOS_ANGSTROM)


# Parameters of stars: Bohlin, Meszaros, Fleming, Gordon, Koekemoer & Kovacs 2017, AJ 153, 234 (their fits of the BOSZ
# models, as kept in the public code spacetelescope/ABSCAL, idl_code/vmag.pro; BD+17 4708: its Castelli & Kurucz fit).
# White dwarfs: the same file (Bohlin, Gordon & Tremblay 2014, PASP 126, 711); GRW+70 5824: Gianninas, Bergeron & Ruiz
# 2011, ApJ 743, 138 (from memory). VB 8: mean dwarf sequence at M7V (Pecaut & Mamajek 2013, ApJS 208, 9).
# Left out: WD1057+719, whose file has a gap from 5694 to 8024 A.
STANDARDS: dict[str, Standard] = {
    "sun": Standard("sun_reference_stis_001", 5777.0, 4.44),
    "hd209458": Standard("hd209458_stisnic_002", 6090.0, 4.15, 0.01, 0.002),
    "p041c": Standard("p041c_stisnic_002", 5960.0, 4.15, 0.11, 0.022),
    "p177d": Standard("p177d_stisnic_002", 5850.0, 3.65, -0.02, 0.045),
    "p330e": Standard("p330e_stisnic_002", 5840.0, 4.4, -0.16, 0.036),
    "snap2": Standard("snap2_stisnic_002", 5750.0, 4.4, -0.19, 0.033),
    "c26202": Standard("c26202_stisnic_002", 6300.0, 4.65, -0.39, 0.069),
    "sf1615": Standard("sf1615_001a_stisnic_002", 5820.0, 4.45, -0.61, 0.105),
    "bd17": Standard("bd_17d4708_stisnic_002", 6200.0, 3.9, -1.69, 0.022),
    "hd93521": Standard("hd93521_stis_001", 25450.0, 3.05, -0.06),
    "hd165459": _near_infrared("hd165459_nic_002", 8570.0, 4.2, 0.10, 0.023),
    "1732526": _near_infrared("1732526_nic_002", 8630.0, 4.1, -0.32, 0.036),
    "1743045": _near_infrared("1743045_nic_002", 7470.0, 3.65, -0.29, 0.026),
    "1802271": _near_infrared("1802271_nic_002", 9040.0, 4.0, -0.48, 0.017),
    "1805292": _near_infrared("1805292_nic_002", 8570.0, 4.0, -0.07, 0.034),
    "1812095": _near_infrared("1812095_nic_002", 7810.0, 3.65, 0.22, 0.008),
    "kf06t2": _near_infrared("kf06t2_nic_001", 4510.0, 1.5, -0.25, 0.055),
    "kf08t3": _near_infrared("kf08t3_nic_001", 4910.0, 1.6, -0.26, 0.037),
    "vb8": Standard("vb8_stisnic_002", 2680.0, 5.2, from_angstrom=4300.0),
    "gd71": Standard("gd71_stisnic_002", 32747.0, 7.683, kind="white_dwarf"),
    "gd153": Standard("gd153_stisnic_002", 38686.0, 7.662, kind="white_dwarf"),
    "g191b2b": Standard("g191b2b_stisnic_002", 61193.0, 7.492, kind="white_dwarf"),
    "wd1657": Standard("wd1657_343_stisnic_002", 53011.0, 7.757, 0.0, 0.01, "white_dwarf", 0.0, 19200.0),
    "grw70": Standard("grw_70d5824_stisnic_002", 20540.0, 7.95, kind="white_dwarf"),
    "feige110": Standard("feige110_stisnic_002", np.nan, np.nan),
}


def standard_spectrum(sources: Sources, standard: Standard) -> tuple[Array, Array]:
    """Return wavelengths (angstrom, ascending) and fluxes (erg s-1 cm-2 A-1) of the measured part of a spectrum."""
    wavelength, flux = fits_columns(sources.standards()[f"calspec/{standard.file}.fits"], "WAVELENGTH", "FLUX")
    keep = (wavelength >= standard.from_angstrom) & (wavelength <= standard.to_angstrom)
    keep &= np.append(True, np.diff(wavelength) > 0)
    return wavelength[keep], flux[keep]


def build_standard_stars(sources: Sources) -> dict[str, np.ndarray]:
    """Return NAME_wavelength (angstrom) and NAME_flux (erg s-1 cm-2 A-1) float32 of every star and of both Vegas."""
    spectra = {f"vega_{name}": spectrum for name, spectrum in vega_spectra(sources).items()}
    spectra |= {name: standard_spectrum(sources, standard) for name, standard in STANDARDS.items()}
    arrays: dict[str, np.ndarray] = {}
    for name, (wavelength, flux) in spectra.items():
        arrays[f"{name}_wavelength"] = wavelength.astype(np.float32)
        arrays[f"{name}_flux"] = flux.astype(np.float32)
    return arrays
