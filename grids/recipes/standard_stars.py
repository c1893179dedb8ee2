"""Real spectra for the checks against the outside world: Vega, the Sun, and standard stars with known magnitudes."""

from __future__ import annotations

import numpy as np

from .passbands import vega_spectra
from .sources import Sources, fits_columns

STARS = {
    "sun": "sun_reference_stis_001",
    "p041c": "p041c_stisnic_002",
    "hd209458": "hd209458_stisnic_002",
    "bd17": "bd_17d4708_stisnic_002",
    "g191b2b": "g191b2b_stisnic_002",
    "gd71": "gd71_stisnic_002",
    "gd153": "gd153_stisnic_002",
    "feige110": "feige110_stisnic_002",
    "grw70": "grw_70d5824_stisnic_002",
    "vb8": "vb8_stisnic_002",
}
END_ANGSTROM = 320000.0


def build_standard_stars(sources: Sources) -> dict[str, np.ndarray]:
    """Return NAME_wavelength (angstrom) and NAME_flux (erg s-1 cm-2 A-1) float32 of every star and of both Vegas."""
    spectra = {f"vega_{name}": spectrum for name, spectrum in vega_spectra(sources).items()}
    for name, file in STARS.items():
        wavelength, flux = fits_columns(sources.standards()[f"calspec/{file}.fits"], "WAVELENGTH", "FLUX")
        spectra[name] = (wavelength, flux)
    arrays: dict[str, np.ndarray] = {}
    for name, (wavelength, flux) in spectra.items():
        keep = wavelength <= END_ANGSTROM
        arrays[f"{name}_wavelength"] = wavelength[keep].astype(np.float32)
        arrays[f"{name}_flux"] = flux[keep].astype(np.float32)
    return arrays
