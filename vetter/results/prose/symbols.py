"""Quantities and units as LaTeX and as plain text, and the short names of bands."""

from __future__ import annotations

from typing import NamedTuple


class Form(NamedTuple):
    """How a symbol is typeset: plain LaTeX without packages, Unicode text, and HTML."""

    latex: str
    text: str
    html: str


def _form(latex: str, text: str, html: str | None = None) -> Form:
    return Form(latex, text, text if html is None else html)


SYMBOLS = {
    "Msun": _form(r"$M_\odot$", "M☉", "M<sub>☉</sub>"),
    "Rsun": _form(r"$R_\odot$", "R☉", "R<sub>☉</sub>"),
    "Lsun": _form(r"$L_\odot$", "L☉", "L<sub>☉</sub>"),
    "K": _form("K", "K"),
    "mag": _form("mag", "mag"),
    "mas": _form("mas", "mas"),
    "pc": _form("pc", "pc"),
    "d": _form("d", "d"),
    "nm": _form("nm", "nm"),
    "micron": _form(r"$\mu$m", "µm"),
    "dex": _form("dex", "dex"),
    "Myr": _form("Myr", "Myr"),
    "Gyr": _form("Gyr", "Gyr"),
    "km_s": _form(r"km\,s$^{-1}$", "km/s", "km s<sup>−1</sup>"),
    "m_s": _form(r"m\,s$^{-1}$", "m/s", "m s<sup>−1</sup>"),
    "erg_s": _form(r"erg\,s$^{-1}$", "erg/s", "erg s<sup>−1</sup>"),
    "deg": _form(r"$^\circ$", "°"),
    "percent": _form(r"\%", "%"),
    "sigma": _form(r"$\sigma$", "σ"),
    "P": _form("$P$", "P", "<i>P</i>"),
    "e": _form("$e$", "e", "<i>e</i>"),
    "i": _form("$i$", "i", "<i>i</i>"),
    "K1": _form("$K_1$", "K1", "<i>K</i><sub>1</sub>"),
    "M1": _form("$M_1$", "M1", "<i>M</i><sub>1</sub>"),
    "M2": _form("$M_2$", "M2", "<i>M</i><sub>2</sub>"),
    "fM": _form("$f(M)$", "f(M)", "<i>f</i>(<i>M</i>)"),
    "Teff": _form(r"$T_{\rm eff}$", "Teff", "<i>T</i><sub>eff</sub>"),
    "logg": _form(r"$\log g$", "log g", "log <i>g</i>"),
    "FeH": _form("[Fe/H]", "[Fe/H]"),
    "EBV": _form("$E(B-V)$", "E(B−V)", "<i>E</i>(<i>B</i>−<i>V</i>)"),
    "RV": _form("$R_V$", "R_V", "<i>R<sub>V</sub></i>"),
    "lnZ": _form(r"$\ln Z$", "ln Z", "ln <i>Z</i>"),
    "lnL": _form(r"$\ln L$", "ln L", "ln <i>L</i>"),
    "chi2": _form(r"$\chi^2$", "χ²", "χ<sup>2</sup>"),
    "gR2G": _form("$gR^2/G$", "gR²/G", "<i>gR</i><sup>2</sup>/<i>G</i>"),
    "space_density": _form(r"$d^2\exp(-d/L)$", "d² exp(−d/L)", "<i>d</i><sup>2</sup> exp(−<i>d</i>/<i>L</i>)"),
    "scale_length": _form("$L$", "L", "<i>L</i>"),
    "cos_i": _form(r"$\cos i$", "cos i", "cos <i>i</i>"),
    "root_of_two_drop": _form(
        r"$\sqrt{2\,\Delta\ln L_{\rm max}}$", "√(2 Δ ln L_max)", "√(2 Δ ln <i>L</i><sub>max</sub>)"
    ),
    "at_least": _form(r"$\ge$", "≥"),
    "minus": _form("$-$", "−"),
    "dash": _form("--", "–"),
    "none": _form("--", "–"),
}
"""Every symbol by key."""

TIGHT_UNITS = ("percent", "deg", "sigma")
"""Units that follow their number without a space."""

GROUPS = {
    "Generic/Johnson": "",
    "Generic/Cousins": "",
    "TYCHO/TYCHO": "Tycho ",
    "Hipparcos/Hipparcos": "Hipparcos ",
    "SLOAN/SDSS": "SDSS ",
    "PAN-STARRS/PS1": "PS1 ",
    "SkyMapper/SkyMapper": "SkyMapper ",
    "GAIA/GAIA3": "Gaia ",
    "2MASS/2MASS": "",
    "WISE/WISE": "",
    "Spitzer/IRAC": "IRAC ",
    "GALEX/GALEX": "GALEX ",
    "Swift/UVOT": "UVOT ",
    "TESS/TESS": "TESS",
}
"""What is written before the last part of a band's identifier."""

SHORT = {"Gbp": "BP", "Grp": "RP", "Red": "", "I1": "1", "I2": "2"}
"""Last parts that astronomers write otherwise."""


def band_label(band: str) -> str:
    """Return a band as astronomers write it: ``Gaia G``, ``Ks``, ``W1``; a band of the user's own as it is."""
    group, _, member = band.rpartition(".")
    if group not in GROUPS:
        return band
    return GROUPS[group] + SHORT.get(member, member)
