"""Which observation carries which exclusion: sigma with everything, and without each observation in turn."""

from __future__ import annotations

import textwrap
from collections.abc import Mapping, Sequence
from typing import TYPE_CHECKING

from vetter.results.figures import style
from vetter.results.verdicts import ScenarioVerdict, sigma_text, verdict_word

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

ROW_INCH, HEAD_INCH = 0.27, 0.95

SHADES: Mapping[str, tuple[str, str]] = {
    "excluded": ("0.35", "white"),
    "disfavoured": ("0.75", "black"),
    "allowed": ("white", "black"),
}
"""Ground and ink of a cell by verdict."""

NAME_LETTERS = 24


def what_carries(rows: Sequence[ScenarioVerdict], labels: Mapping[str, str]) -> Figure | None:
    """Return the figure, or None where nothing was left out; ``labels`` names the observations in order."""
    columns = [name for name in labels if any(d.observation == name for row in rows for d in row.driven_by)]
    if not columns:
        return None
    with style.drawn(style.COLUMN_INCH, HEAD_INCH + ROW_INCH * len(rows)) as figure:
        axes = figure.subplots()
        for place, row in enumerate(rows):
            left = {driver.observation: driver.sigma_without for driver in row.driven_by}
            _cell(axes, 0.0, place, row.sigma, row.sigma is None)
            for number, name in enumerate(columns):
                _cell(axes, number + 1.35, place, left.get(name), row.sigma is None)
        _finish(axes, rows, [labels[name] for name in columns])
    return figure


def _cell(axes: Axes, x: float, y: int, sigma: float | None, closed: bool) -> None:
    """One cell, shaded by the verdict that its number would give; a closed explanation is excluded without one."""
    from matplotlib.patches import Rectangle

    if sigma is None and not closed:
        return
    ground, ink = SHADES[verdict_word(sigma)]
    axes.add_patch(Rectangle((x, y), 1.0, 1.0, facecolor=ground, edgecolor=style.GREY, linewidth=0.4))
    text = "–" if sigma is None else sigma_text(sigma, 1 if sigma < 99.95 else 0)
    axes.text(x + 0.5, y + 0.5, text, ha="center", va="center", fontsize=6, color=ink)


def _finish(axes: Axes, rows: Sequence[ScenarioVerdict], names: Sequence[str]) -> None:
    """Names of rows and columns, and the key of the shades."""
    width = len(names) + 1.35
    axes.set_xlim(0.0, width)
    axes.set_ylim(len(rows) + 1.0, 0.0)
    axes.set_yticks(
        [place + 0.5 for place in range(len(rows))],
        ["\n".join(textwrap.wrap(row.title, NAME_LETTERS)) for row in rows],
        fontsize=6,
        linespacing=0.9,
    )
    axes.xaxis.tick_top()
    places = [0.5, *(number + 1.85 for number in range(len(names)))]
    axes.set_xticks(places, ["everything", *(f"no {name}" for name in names)], rotation=55, ha="left", fontsize=6.5)
    axes.tick_params(length=0, pad=2)
    for side in axes.spines.values():
        side.set_visible(False)
    _key(axes, len(rows) + 0.55)


def _key(axes: Axes, y: float) -> None:
    from matplotlib.patches import Rectangle

    width = axes.get_xlim()[1]
    for place, (word, said) in enumerate((("excluded", "≥ 5σ"), ("disfavoured", "3–5σ"), ("allowed", "< 3σ"))):
        x = place * width / 3.0
        axes.add_patch(Rectangle((x, y), 0.4, 0.4, facecolor=SHADES[word][0], edgecolor=style.GREY, linewidth=0.4))
        axes.text(x + 0.5, y + 0.2, said, va="center", fontsize=6)
