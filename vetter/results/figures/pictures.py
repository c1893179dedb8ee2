"""The numbered figures of the section: which there are, what they show, and their captions."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from functools import cached_property
from typing import TYPE_CHECKING

from vetter.observations.base import Observation
from vetter.observations.photometry import PhotometryObservation
from vetter.results.figures import style
from vetter.results.figures.inner_pairs import inner_pairs
from vetter.results.figures.mass_and_light import deciding_window, mass_and_light
from vetter.results.figures.mass_posterior import mass_posterior
from vetter.results.figures.spectral_energy import spectral_energy
from vetter.results.figures.what_carries import what_carries
from vetter.results.prose.document import Name, Picture, Sentence, say
from vetter.results.prose.material import Material, in_a_sentence
from vetter.results.prose.numbers import given, plain
from vetter.results.verdicts import ScenarioVerdict

if TYPE_CHECKING:
    from matplotlib.figure import Figure

Rows = Sequence[ScenarioVerdict]


@dataclass(frozen=True)
class Drawn:
    """A figure with the words that go with it."""

    picture: Picture
    figure: Figure

    @cached_property
    def files(self) -> dict[str, bytes]:
        """The figure as PDF and PNG by file name."""
        return {f"{self.picture.label}.{kind}": style.figure_bytes(self.figure, kind) for kind in ("pdf", "png")}


def draw(
    material: Material, rows: Rows, observations: Sequence[Observation], numbers: Sequence[int] = ()
) -> list[Drawn]:
    """Return the figures of these numbers (all by default); one that has nothing to show is left out."""
    found = []
    for number in numbers or FIGURES:
        drawn = FIGURES[number](material, rows, observations)
        if drawn is not None:
            found.append(drawn)
    return found


def chosen_case(rows: Rows) -> ScenarioVerdict | None:
    """Return the explanation whose stars are drawn one by one: the best with light of its own, ordinary ones first."""
    lit = [row for row in rows if row.best_fit is not None and row.best_fit.hidden_stars]
    return min(lit, key=lambda row: (not row.ordinary, row.chi2_min or 0.0), default=None)


def _spectral_energy(material: Material, rows: Rows, observations: Sequence[Observation]) -> Drawn | None:
    photometry = next((o for o in observations if isinstance(o, PhotometryObservation)), None)
    if photometry is None or not any(row.best_fit is not None for row in rows):
        return None
    chosen = chosen_case(rows)
    stars: Sentence = ()
    if chosen is not None:
        stars = say(f" for the {in_a_sentence(chosen)} (black) with its stars drawn one by one, and")
    caption = (
        say("Spectral energy distribution of {name}.", name=Name(material.system.name)),
        say(
            "Top: measured fluxes with errors that include the model error; limits are arrows; the lines are the most "
            "favourable cases,{stars} for the others in grey.",
            stars=stars,
        ),
        say("Below: residuals of each explanation in units of the error, shaded within one {sigma}."),
        say("Triangles with numbers lie outside a strip."),
    )
    words = "Fluxes from ultraviolet to infrared with the best models, and residuals of every explanation."
    figure = spectral_energy(rows, chosen, material.context, photometry)
    return Drawn(Picture("figure_spectral_energy", caption, words), figure)


def _mass_and_light(material: Material, rows: Rows, observations: Sequence[Observation]) -> Drawn | None:
    figure = mass_and_light(rows, material.verdicts, material.context)
    if figure is None:
        return None
    (low, high), limit = deciding_window(material.context)
    where = {"low": given("figure.window_low_nm", low), "high": given("figure.window_high_nm", high, "nm")}
    caption = [
        say("Light of the companion relative to the seen star at {low}{dash}{high}, against its mass.", **where),
        say(
            "Curves are medians, and bands the central {share} of the prior draws, of explanations that shed light. "
            "Circles are most favourable cases, triangles dark ones; open symbols are excluded.",
            share=given("figure.band_percent", 90.0, "percent"),
        ),
        say("The vertical band is the mass that the orbit asks for with the seen star of the best fit."),
    ]
    if limit is not None:
        caption.append(say("Hatched: above the limit on a second spectrum."))
    words = "Companion mass against light ratio, with the range of each explanation, the orbit and the light limit."
    return Drawn(Picture("figure_mass_and_light", tuple(caption), words), figure)


def _what_carries(material: Material, rows: Rows, observations: Sequence[Observation]) -> Drawn | None:
    labels = {observation.name: observation.label for observation in observations}
    figure = what_carries(rows, labels)
    if figure is None:
        return None
    caption = (
        say("Which observation carries which exclusion."),
        say(
            "Numbers are {root_of_two_drop} against the best explanation, with everything in the first column and "
            "without one observation in the others; a dash is an explanation of which no case is possible."
        ),
    )
    words = "Matrix of sigma per explanation, with everything and without each observation."
    return Drawn(Picture("figure_what_carries", caption, words), figure)


def _inner_pairs(material: Material, rows: Rows, observations: Sequence[Observation]) -> Drawn | None:
    figure = inner_pairs(rows, material.context)
    row = next((row for row in rows if row.name == "inner_pair"), None)
    if figure is None or row is None or row.best_fit is None:
        return None
    total = plain("scenarios.inner_pair.best_fit.m2_msun", row.best_fit.values["m2_msun"], 3, "Msun")
    caption = (
        say(
            "Where a pair of main-sequence stars of {total} in all, that of its most favourable case, can hide.",
            total=total,
        ),
        say(
            "Left of the full line the two would touch; right of the dashed line the triple, taken as coplanar, would "
            "not last. The shaded strip is the soft edge of that limit, all of which was granted."
        ),
    )
    words = "Inner period against mass ratio with the walls of contact and stability."
    return Drawn(Picture("figure_inner_pairs", caption, words), figure)


def _mass_posterior(material: Material, rows: Rows, observations: Sequence[Observation]) -> Drawn | None:
    figure = mass_posterior(rows, material.verdicts.orbit)
    if figure is None:
        return None
    caption = (
        say("Posterior mass of the companion in each explanation that is not excluded."),
        say("Lines are medians; the central one-sigma intervals are darker."),
    )
    if all(row.verdict == "excluded" for row in rows):
        caption = (say("Posterior mass of the companion in each explanation; all of them are excluded."), caption[1])
    words = "Posterior densities of the companion's mass, one strip per explanation."
    return Drawn(Picture("figure_mass_posterior", caption, words), figure)


FIGURES: Mapping[int, Callable[[Material, Rows, Sequence[Observation]], Drawn | None]] = {
    1: _spectral_energy,
    2: _mass_and_light,
    3: _what_carries,
    4: _inner_pairs,
    5: _mass_posterior,
}
"""The figures by number."""
