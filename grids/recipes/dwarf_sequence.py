"""The mean dwarf sequence as a tidy table."""

from __future__ import annotations

from .sources import Sources

_FILE = "MeanStars/EEM_dwarf_UBVIJHK_colors_Teff.txt"
_HEADER = (
    "SpT",
    "Teff",
    "logT",
    "BCv",
    "logL",
    "Mbol",
    "R_Rsun",
    "Mv",
    "B-V",
    "Bt-Vt",
    "G-V",
    "Bp-Rp",
    "G-Rp",
    "M_G",
    "b-y",
    "U-B",
    "V-Rc",
    "V-Ic",
    "V-Ks",
    "J-H",
    "H-Ks",
    "M_J",
    "M_Ks",
    "Ks-W1",
    "W1-W2",
    "W1-W3",
    "W1-W4",
    "g-r",
    "i-z",
    "z-Y",
    "Msun",
)
# Published column -> ours. M_G is left out (it disagrees with M_V + (G-V) by up to 0.3 mag), so are b-y and z-Y.
COLUMNS = {
    "SpT": "spectral_type",
    "Teff": "teff_k",
    "logL": "log_luminosity_lsun",
    "R_Rsun": "radius_rsun",
    "Msun": "mass_msun",
    "Mv": "M_V",
    "U-B": "U-B",
    "B-V": "B-V",
    "Bt-Vt": "BT-VT",
    "V-Rc": "V-R",
    "V-Ic": "V-I",
    "G-V": "G-V",
    "Bp-Rp": "BP-RP",
    "G-Rp": "G-RP",
    "V-Ks": "V-Ks",
    "J-H": "J-H",
    "H-Ks": "H-Ks",
    "M_J": "M_J",
    "M_Ks": "M_Ks",
    "Ks-W1": "Ks-W1",
    "W1-W2": "W1-W2",
    "W1-W3": "W1-W3",
    "W1-W4": "W1-W4",
    "g-r": "g-r",
    "i-z": "i-z",
}


def _value(word: str) -> str:
    """Return a number as it was printed, an uncertain one (marked by a colon) without its mark, dots as nothing."""
    cleaned = word.rstrip(":")
    try:
        float(cleaned)
    except ValueError:
        return ""
    return cleaned


def build_dwarf_sequence(sources: Sources) -> str:
    """Return dwarf_sequence.csv: one row per spectral type from O3V to Y4V, missing values empty.

    Source: Pecaut & Mamajek 2013, ApJS 208, 9, table version 2022.04.16. Gaia colours are of DR2, g-r, i-z of SDSS.
    """
    lines = sources.text("meanstars", _FILE).splitlines()
    start = next(i for i, line in enumerate(lines) if line.startswith("SpT"))
    if tuple(lines[start].split()[:-1]) != _HEADER:
        raise ValueError(f"the mean dwarf sequence has columns {lines[start]!r}")
    out = [",".join(COLUMNS.values())]
    for line in lines[start + 1 :]:
        words = line.split()
        if line.startswith("#") or len(words) < len(_HEADER):
            break
        row = dict(zip(_HEADER, words, strict=False))
        out.append(",".join(row[name] if name == "SpT" else _value(row[name]) for name in COLUMNS))
    return "\n".join(out) + "\n"
