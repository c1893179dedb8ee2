"""The look that all figures share, and how one becomes a file."""

from __future__ import annotations

import io
from collections.abc import Iterator
from contextlib import contextmanager
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

COLUMN_INCH = 3.4
"""Width of one column of a journal (86 mm)."""

HUES = ("#0072b2", "#d55e00", "#009e73", "#cc79a7", "#56b4e9", "#e69f00")
"""Okabe & Ito's colours, told apart by colour-blind readers (jfly.uni-koeln.de/color, 2008)."""

DASHES: tuple[Any, ...] = (
    "-",
    (0, (5, 1.5)),
    (0, (1.2, 1.2)),
    (0, (5, 1.2, 1.2, 1.2)),
    (0, (8, 2)),
    (0, (3, 1, 1, 1, 1, 1)),
)
"""One dash per hue, so that curves differ in grey as well."""

SMALL = 6.5
"""Size of names inside a figure, in points."""

INK, GREY, PALE = "black", "0.45", "0.88"

PLATE: dict[str, Any] = {"facecolor": "white", "edgecolor": "none", "pad": 0.6, "alpha": 0.85}
"""White ground for words that stand on curves."""

RULES: Any = {
    "font.family": "sans-serif",
    "font.size": 7.5,
    "axes.labelsize": 7.5,
    "xtick.labelsize": 7,
    "ytick.labelsize": 7,
    "axes.linewidth": 0.6,
    "xtick.major.width": 0.6,
    "ytick.major.width": 0.6,
    "xtick.minor.width": 0.4,
    "ytick.minor.width": 0.4,
    "xtick.direction": "in",
    "ytick.direction": "in",
    "lines.linewidth": 1.0,
    "hatch.linewidth": 0.4,
    "mathtext.fontset": "dejavusans",
    "pdf.fonttype": 42,
    # One resolution for laying out and saving: at another one letters are hinted otherwise, and names would be cut.
    "figure.dpi": 300,
    "savefig.dpi": 300,
}


@contextmanager
def drawn(width_inch: float, height_inch: float) -> Iterator[Figure]:
    """Give a figure of this size in the common style; what is drawn inside the block has it."""
    import matplotlib as mpl
    from matplotlib.figure import Figure
    from matplotlib.layout_engine import ConstrainedLayoutEngine

    with mpl.rc_context(rc=RULES):
        layout = ConstrainedLayoutEngine(w_pad=0.02, h_pad=0.02, hspace=0.0, wspace=0.0)
        figure = Figure(figsize=(width_inch, height_inch), layout=layout)
        yield figure
        # The layout is frozen: done again for every file, it would creep.
        figure.draw_without_rendering()
        figure.set_layout_engine("none")


def figure_bytes(figure: Figure, kind: str) -> bytes:
    """Return the figure as a file of ``kind`` ("png" or "pdf"), the same bytes for the same figure."""
    import matplotlib as mpl

    buffer = io.BytesIO()
    metadata = {"Software": None} if kind == "png" else {"CreationDate": None, "Creator": None, "Producer": None}
    with mpl.rc_context(rc=RULES):
        figure.savefig(buffer, format=kind, metadata=metadata)
    return buffer.getvalue()


def plain_ticks(axes: Axes, which: str, ticks: tuple[float, ...]) -> None:
    """Put plain numbers at those of ``ticks`` that lie inside a logarithmic axis, and no minor ticks."""
    low, high = axes.get_xlim() if which == "x" else axes.get_ylim()
    shown = [tick for tick in ticks if min(low, high) <= tick <= max(low, high)]
    axis = axes.xaxis if which == "x" else axes.yaxis
    axis.set_ticks(shown, labels=[f"{tick:g}" for tick in shown])
    axis.set_ticks([], minor=True)


def decades(low: float, high: float, steps: tuple[float, ...] = (1.0, 2.0, 5.0)) -> tuple[float, ...]:
    """Return 1, 2, 5, 10, 20 ... between two positive numbers."""
    import numpy as np

    powers = np.arange(np.floor(np.log10(low)), np.ceil(np.log10(high)) + 1.0)
    return tuple(float(step * 10.0**power) for power in powers for step in steps if low <= step * 10.0**power <= high)
