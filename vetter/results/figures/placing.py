"""Where a name fits: beside what it names, clear of everything else."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import ArrayLike, NDArray

from vetter.results.figures import style

if TYPE_CHECKING:
    from matplotlib.axes import Axes

FloatArray = NDArray[np.float64]

LETTER_INCH, LINE_INCH = 0.052, 0.105
"""Size of a letter of the small type."""

GAP = 0.015
"""Room between a name and what it names, in fractions of the axes."""

ENOUGH = 0.06
"""More room than this around a name is no better."""

MARK_RADIUS = 0.013

WORDS_COUNT, MARKS_COUNT = 20.0, 30.0
"""How much worse it is to cover a name, or a mark, than a point of a curve."""


class Placer:
    """Keeps the points that names must stay clear of, in fractions of the axes, and puts names between them."""

    def __init__(self, axes: Axes) -> None:
        """Start with an empty frame; the axes must have their final place, limits and scales."""
        self.axes = axes
        self.points: FloatArray = np.empty((0, 2))
        self.weights: FloatArray = np.empty(0)
        self.owners: list[str] = []
        box = axes.get_window_extent()
        root = axes.get_figure(root=True)
        inch = 100.0 if root is None else root.dpi
        self.letter, self.line = LETTER_INCH * inch / box.width, LINE_INCH * inch / box.height

    def avoid(self, x: ArrayLike, y: ArrayLike, weight: float = 1.0, owner: str = "") -> None:
        """Keep names away from these points, in units of the data; the name ``owner`` may come close to them."""
        self._occupy(self._fractions(x, y), weight, owner)

    def avoid_mark(self, x: float, y: float) -> None:
        """Keep names away from a mark, which is wider than a point."""
        ring = MARK_RADIUS * np.array([(a, b) for a in (-1.0, 0.0, 1.0) for b in (-1.0, 0.0, 1.0)])
        self._occupy(self._fractions(x, y) + ring, MARKS_COUNT)

    def beside(self, name: str, x: float, y: float, color: str) -> None:
        """Write ``name`` at one of eight places around a mark."""
        half = self._half(name)
        mark = self._fractions(x, y)[0]
        sides = [(1, 0), (-1, 0), (0, 1), (0, -1), (1, 1), (-1, 1), (1, -1), (-1, -1)]
        self._put(name, np.array([mark + (half + 2.0 * GAP) * np.array(side) for side in sides]), half, color)

    def along(self, name: str, x: ArrayLike, y: ArrayLike, color: str) -> None:
        """Write ``name`` beside a curve, wherever along it there is room."""
        half = self._half(name)
        curve = self._fractions(x, y)
        places = [
            curve + np.array([a * (half[0] + GAP), b * (half[1] + GAP)])
            for a, b in ((0, -1), (0, 1), (1, 0), (-1, 0), (0.8, -0.8), (-0.8, 0.8), (-0.8, -0.8), (0.8, 0.8))
        ]
        self._put(name, np.concatenate(places), half, color)

    def _half(self, name: str) -> FloatArray:
        return 0.5 * np.array([self.letter * len(name), self.line])

    def _occupy(self, points: FloatArray, weight: float, owner: str = "") -> None:
        self.points = np.concatenate([self.points, points])
        self.owners += [owner] * len(points)
        self.weights = np.concatenate([self.weights, np.full(len(points), weight)])

    def _put(self, name: str, centres: FloatArray, half: FloatArray, color: str) -> None:
        """Write the name at the cheapest of these places inside the frame; nowhere when none is."""
        inside = np.all((centres - half > 0.005) & (centres + half < 0.995), axis=1)
        if not inside.any():
            return
        others = np.array([owner != name for owner in self.owners], dtype=bool)
        centre = centres[inside][np.argmin([self._cost(place, half, others) for place in centres[inside]])]
        self.axes.text(
            float(centre[0]),
            float(centre[1]),
            name,
            transform=self.axes.transAxes,
            ha="center",
            va="center",
            fontsize=style.SMALL,
            color=color,
            bbox=style.PLATE,
            zorder=6,
        )
        grid = np.meshgrid(np.linspace(-1.0, 1.0, 13), np.linspace(-1.0, 1.0, 5))
        self._occupy(centre + half * np.stack([part.ravel() for part in grid], axis=1), WORDS_COUNT)

    def _cost(self, centre: FloatArray, half: FloatArray, others: NDArray[np.bool_]) -> float:
        """What a name there would cover, and a little for standing close to something that is not its own."""
        if not others.any():
            return 0.0
        gaps = np.maximum(np.abs(self.points - centre) - half, 0.0)
        distance = np.hypot(*gaps.T)
        covered = float(self.weights[distance < 0.3 * GAP].sum())
        return covered - min(float(distance[others].min()), ENOUGH)

    def _fractions(self, x: ArrayLike, y: ArrayLike) -> FloatArray:
        """Points (n, 2) in fractions of the axes."""
        data = np.stack(np.broadcast_arrays(np.atleast_1d(x), np.atleast_1d(y)), axis=1).astype(float)
        return np.asarray(self.axes.transAxes.inverted().transform(self.axes.transData.transform(data)))
