"""Observed spectra of cool dwarfs and giants, brought to absolute surface flux and interpolated in temperature."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from .sources import Sources, fits_columns
from .spectra import Array, bin_means, normalised, planck_flux, with_planck_tails

_PICKLES = "EXOSIMS/TargetList/dat_uvk/pickles_uk_{}.fits"
_LATE_M = "EXOSIMS/TargetList/muscles/muscles_lp-791-18_2949_M6V.fits"


@dataclass(frozen=True)
class Template:
    """One observed spectrum: effective temperature, where it comes from, and the wavelengths it can be trusted at."""

    teff_k: float
    package: str
    member: str
    from_angstrom: float
    to_angstrom: float


# Temperatures of the dwarfs: the mean dwarf sequence (Pecaut & Mamajek 2013) at the template's type, rounded.
DWARFS = (
    Template(2000.0, "pypeit", "calspec/2m003618_stisnic_002.fits", 6000.0, 24900.0),
    Template(2700.0, "pypeit", "calspec/vb8_stisnic_002.fits", 4200.0, 24900.0),
    Template(2950.0, "exosims", _LATE_M, 3300.0, 25000.0),
    Template(3200.0, "exosims", _PICKLES.format(43), 2800.0, 24950.0),
    Template(3400.0, "exosims", _PICKLES.format(42), 2800.0, 24950.0),
    Template(3580.0, "exosims", _PICKLES.format(40), 2800.0, 24950.0),
    Template(3700.0, "exosims", _PICKLES.format(39), 2800.0, 24950.0),
    Template(3900.0, "exosims", _PICKLES.format(38), 2800.0, 24950.0),
)
# Temperatures of M0III-M9III: Fluks et al. 1994, A&AS 105, 311, table 13 (from memory).
GIANTS = tuple(
    Template(teff, "exosims", _PICKLES.format(95 + i), 2100.0, 24950.0)
    for i, teff in enumerate((3895.0, 3810.0, 3736.0, 3666.0, 3574.0, 3434.0, 3309.0, 3126.0, 2890.0, 2667.0))
)


@dataclass(frozen=True)
class Branch:
    """Spectra of one branch at given temperatures.

    Attributes
    ----------
    ln_flux : (nt, nw) natural logarithm of the surface flux in erg s-1 cm-2 A-1
    extrapolated : (nt,) True where the temperature lies outside the templates
    """

    ln_flux: Array
    extrapolated: np.ndarray


def read_template(sources: Sources, template: Template, nodes: Array) -> Array:
    """Return one template as surface flux on the nodes (nw,), its ends continued by a black body."""
    if template.package == "pypeit":
        data = sources.standards()[template.member]
    else:
        data = sources.read(template.package, template.member)
    wavelength, flux = fits_columns(data, "WAVELENGTH", "FLUX")
    # Pickles marks missing samples by zero; noise makes the faint blue ends negative.
    keep = (flux > 0) & (wavelength >= template.from_angstrom) & (wavelength <= template.to_angstrom)
    means = bin_means(wavelength[keep], flux[keep], nodes)
    return normalised(nodes, with_planck_tails(nodes, means, template.teff_k), template.teff_k)


def interpolated(templates: Array, template_teff_k: Array, nodes: Array, wanted_k: Array) -> Branch:
    """Interpolate ln F in log Teff between templates (ascending); beyond the ends scale by Planck ratios."""
    logs = np.log(templates)
    rows = []
    for teff in wanted_k:
        inside = float(np.clip(teff, template_teff_k[0], template_teff_k[-1]))
        right = int(np.clip(np.searchsorted(template_teff_k, inside), 1, template_teff_k.size - 1))
        lo, hi = np.log(template_teff_k[right - 1]), np.log(template_teff_k[right])
        weight = (np.log(inside) - lo) / (hi - lo)
        row = (1 - weight) * logs[right - 1] + weight * logs[right]
        if teff != inside:
            row = row + np.log(planck_flux(nodes, teff) / planck_flux(nodes, inside))
        rows.append(np.log(normalised(nodes, np.exp(row), float(teff))))
    outside = (wanted_k < template_teff_k[0]) | (wanted_k > template_teff_k[-1])
    return Branch(np.array(rows), outside)


def _branch(sources: Sources, templates: tuple[Template, ...], nodes: Array, wanted_k: Array) -> Branch:
    ordered = sorted(templates, key=lambda template: template.teff_k)
    spectra = np.array([read_template(sources, template, nodes) for template in ordered])
    return interpolated(spectra, np.array([template.teff_k for template in ordered]), nodes, wanted_k)


def dwarf_spectra(sources: Sources, nodes: Array, wanted_k: Array) -> Branch:
    """Return dwarf spectra at the wanted temperatures.

    Sources: Pickles 1998, PASP 110, 863 (M0V-M4V); MUSCLES (LP 791-18); CALSPEC (VB 8, 2MASS J0036+18).
    M5V and M6V of Pickles are left out: they disagree with the mean dwarf colours by 0.3 mag.
    """
    return _branch(sources, DWARFS, nodes, wanted_k)


def giant_spectra(sources: Sources, nodes: Array, wanted_k: Array) -> Branch:
    """Return giant spectra at the wanted temperatures; source: Pickles 1998, PASP 110, 863 (M0III-M9III)."""
    return _branch(sources, GIANTS, nodes, wanted_k)
