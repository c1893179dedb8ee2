"""The figure of ``vetter bands --figure FILE``: every built-in passband, one panel per system."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from vetter.errors import InputError
from vetter.light.tables import LightTables, Passband, load_tables

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

PANELS: Mapping[str, tuple[str, ...]] = {
    "GALEX": ("GALEX/",),
    "Swift UVOT": ("Swift/",),
    "Johnson, Cousins": ("Generic/",),
    "Tycho, Hipparcos": ("TYCHO/", "Hipparcos/"),
    "SDSS": ("SLOAN/",),
    "Pan-STARRS": ("PAN-STARRS/",),
    "SkyMapper": ("SkyMapper/",),
    "Gaia, TESS": ("GAIA/", "TESS/"),
    "2MASS": ("2MASS/",),
    "WISE, Spitzer": ("WISE/", "Spitzer/"),
}
LABELS = {"TESS/TESS.Red": "TESS"}
HUES = ("#0072b2", "#d55e00", "#009e73", "#aa4499", "#6a6a00", "#8c2d04")
SHOWN_ABOVE = 0.01
LEVELS = (1.06, 1.36, 1.66)
DEX_PER_LETTER = 0.022
"""Width of a letter of the names on the axis of wavelengths."""
TICKS_UM = (0.15, 0.2, 0.3, 0.5, 0.7, 1.0, 1.5, 2.0, 3.0, 5.0, 10.0, 20.0)


def bands_figure(tables: LightTables | None = None) -> Figure:
    """Return the figure: photon-counting throughput over its own peak against wavelength (micron, logarithmic)."""
    from matplotlib.figure import Figure

    bands = sorted((tables or load_tables()).passbands.values(), key=lambda band: band.pivot_angstrom)
    groups = {title: [b for b in bands if b.id.startswith(starts)] for title, starts in PANELS.items()}
    others = [b for b in bands if not any(b in group for group in groups.values())]
    shown = {title: group for title, group in {**groups, "others": others}.items() if group}
    figure = Figure(figsize=(9.0, 1.0 * len(shown) + 0.8), layout="constrained")
    panels = figure.subplots(len(shown), 1, sharex=True, squeeze=False)[:, 0]
    for axes, (title, group) in zip(panels, shown.items(), strict=True):
        _draw(axes, title, group)
    last = panels[-1]
    last.set_xscale("log")
    last.set_xlim(0.12, 32.0)
    last.set_xticks(TICKS_UM, [f"{tick:g}" for tick in TICKS_UM])
    last.minorticks_off()
    last.set_xlabel("wavelength (micron)")
    figure.supylabel("photon-counting throughput / peak", fontsize=9)
    return figure


def _draw(axes: Axes, title: str, group: Sequence[Passband]) -> None:
    """Draw one panel: each curve named above its pivot wavelength."""
    names = [LABELS.get(band.id, band.id.rsplit(".", 1)[-1]) for band in group]
    levels = _levels([np.log10(band.pivot_angstrom) for band in group], names)
    for place, (band, name, level) in enumerate(zip(group, names, levels, strict=True)):
        hue = HUES[place % len(HUES)]
        curve = band.throughput / band.throughput.max()
        inside = np.flatnonzero(curve > SHOWN_ABOVE)
        part = slice(max(inside[0] - 1, 0), inside[-1] + 2)
        micron = band.wavelength_angstrom[part] / 1e4
        axes.fill_between(micron, curve[part], color=hue, alpha=0.15, linewidth=0)
        axes.plot(micron, curve[part], color=hue, linewidth=1.1)
        axes.text(band.pivot_angstrom / 1e4, level, name, color=hue, fontsize=8, ha="center", va="bottom")
    axes.grid(axis="x", color="0.9", linewidth=0.6)
    axes.set_axisbelow(True)
    axes.set_ylim(0.0, max(levels) + 0.3)
    axes.set_yticks([0.0, 1.0])
    axes.tick_params(labelsize=8)
    axes.spines[["top", "right"]].set_visible(False)
    axes.set_ylabel(title, rotation=0, fontsize=9, ha="right", va="center")


def _levels(log_pivots: Sequence[float], names: Sequence[str]) -> list[float]:
    """Return the height of each name: the lowest of three at which it does not touch the names before it."""
    ends = dict.fromkeys(LEVELS, -np.inf)
    heights = []
    for centre, name in zip(log_pivots, names, strict=True):
        half = 0.5 * DEX_PER_LETTER * (len(name) + 1)
        height = next((level for level in LEVELS if ends[level] <= centre - half), LEVELS[-1])
        ends[height] = centre + half
        heights.append(height)
    return heights


def write_bands_figure(path: Path, tables: LightTables | None = None) -> None:
    """Write the figure to a file; its ending (png, pdf, svg) decides the format.

    Raises InputError when the ending is another or the file cannot be written.
    """
    kind = path.suffix.lower().removeprefix(".")
    if kind not in {"png", "pdf", "svg"}:
        raise InputError.single("bands", "--figure", str(path), "a file ending in .png, .pdf or .svg")
    try:
        bands_figure(tables).savefig(path, format=kind, dpi=150)
    except OSError as error:
        raise InputError.single("bands", "--figure", str(path), f"a file that can be written ({error})") from error
