"""A hidden pair between contact and instability: inner period against mass ratio."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING, Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from vetter.physics import triples
from vetter.results.figures import style
from vetter.results.verdicts import BestFit, ScenarioVerdict
from vetter.scenarios.context import Context
from vetter.stars.main_sequence import main_sequence

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

FloatArray = NDArray[np.float64]

HEIGHT_INCH = 2.6
RATIOS = 200
LIGHTEST_STAR_MSUN = 0.08


class Walls(NamedTuple):
    """Inner periods (n,) in days at mass ratios (n,): contact, and stability with its soft edge."""

    mass_ratio: FloatArray
    contact_d: FloatArray
    stable_d: FloatArray
    limit_d: FloatArray
    unstable_d: FloatArray


def inner_pairs(rows: Sequence[ScenarioVerdict], context: Context) -> Figure | None:
    """Return the figure, or None where no pair of main-sequence stars was fitted."""
    row = next((row for row in rows if row.name == "inner_pair" and row.best_fit is not None), None)
    if row is None or row.best_fit is None:
        return None
    walls = pair_walls(row.best_fit, context)
    if walls is None:
        return None
    with style.drawn(style.COLUMN_INCH, HEIGHT_INCH) as figure:
        axes = figure.subplots()
        low, high = 0.6 * float(walls.contact_d.min()), 3.0 * float(walls.unstable_d.max())
        axes.set_xscale("log")
        axes.set_xlim(low, high)
        axes.set_ylim(0.0, 1.0)
        _draw(axes, walls, row.best_fit)
        axes.set_xlabel("period of the hidden pair (d)")
        axes.set_ylabel("mass ratio of the hidden pair")
        style.plain_ticks(axes, "x", style.decades(low, high, (1.0, 3.0)))
    return figure


def pair_walls(best: BestFit, context: Context) -> Walls | None:
    """Return the walls of a pair with the total mass, age and scatter of a best case; None where none is possible."""
    values, orbit = best.values, context.system.orbit
    total = values["m2_msun"]
    smallest = LIGHTEST_STAR_MSUN / max(total - LIGHTEST_STAR_MSUN, LIGHTEST_STAR_MSUN)
    if smallest >= 1.0:
        return None
    ratio = np.linspace(smallest, 1.0, RATIOS)
    masses = (total / (1.0 + ratio), total * ratio / (1.0 + ratio))
    scores = (values["companion_luminosity_score"], values["companion_radius_score"])
    with np.errstate(all="ignore"):
        radii = [
            main_sequence(mass, values["companion_life_fraction"], values["feh"], *scores).radius_rsun
            for mass in masses
        ]
        contact = triples.shortest_inner_period_d(*masses, *radii)
    limit = float(
        triples.longest_inner_period_d(orbit.period_d.value, values["m1_msun"], total, orbit.eccentricity.value)
    )
    edge = float(np.exp(1.5 * 2.0 * triples.SOFT_EDGE))
    flat = np.full(ratio.shape, limit)
    return Walls(ratio, np.asarray(contact), flat / edge, flat, flat * edge)


def _draw(axes: Axes, walls: Walls, best: BestFit) -> None:
    """Both walls, hatched behind, the soft edge of stability, and the best case."""
    low, high = axes.get_xlim()
    q = walls.mass_ratio
    axes.fill_betweenx(q, low, walls.contact_d, facecolor="none", edgecolor="0.6", hatch="\\\\\\\\", linewidth=0)
    axes.fill_betweenx(q, walls.unstable_d, high, facecolor="none", edgecolor="0.6", hatch="////", linewidth=0)
    axes.fill_betweenx(q, walls.stable_d, walls.unstable_d, color=style.PALE, linewidth=0)
    axes.axhspan(0.0, q[0], facecolor="none", edgecolor="0.6", hatch="....", linewidth=0)
    axes.plot(walls.contact_d, q, color=style.HUES[0], linewidth=1.1)
    axes.plot(walls.limit_d, q, color=style.HUES[1], linestyle=style.DASHES[1], linewidth=1.1)
    place = (best.values["inner_period_d"], best.values["inner_mass_ratio"])
    axes.plot(*place, "o", color=style.INK, markersize=4.5, zorder=5, clip_on=False)
    _name_walls(axes, walls)
    _name_best_case(axes, place)


def _name_walls(axes: Axes, walls: Walls) -> None:
    """Names on the closed sides of the walls."""
    low, high = axes.get_xlim()
    q = walls.mass_ratio
    looks: Any = {
        "va": "center",
        "fontsize": style.SMALL,
        "bbox": {"facecolor": "white", "edgecolor": "none", "pad": 0.8},
    }
    contact = 0.93 * float(walls.contact_d[(q > 0.35) & (q < 0.65)].min(initial=walls.contact_d[-1]))
    axes.text(contact, 0.5, "contact", rotation=90, ha="right", color=style.HUES[0], **looks)
    unstable = 1.08 * float(walls.unstable_d[0])
    axes.text(unstable, 0.5, "unstable triple", rotation=90, ha="left", color=style.HUES[1], **looks)
    if q[0] > 0.06:
        axes.text(np.sqrt(low * high), 0.5 * q[0], "the lighter one would be no star", ha="center", **looks)


def _name_best_case(axes: Axes, place: tuple[float, float]) -> None:
    """Its name, on the side of the mark that has room."""
    low, high = axes.get_xlim()
    right, below = place[0] < np.sqrt(low * high), place[1] > 0.5
    axes.annotate(
        "best case",
        place,
        (6 if right else -6, -3 if below else 3),
        textcoords="offset points",
        ha="left" if right else "right",
        va="top" if below else "bottom",
        fontsize=style.SMALL,
    )
