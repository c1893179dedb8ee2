"""What the sentences are made from, and the few questions that many of them ask."""

from __future__ import annotations

from dataclasses import dataclass

from vetter.observations.base import registered as registered_observations
from vetter.results.verdicts import ScenarioVerdict, Verdicts
from vetter.scenarios.context import Context
from vetter.system.model import System


@dataclass(frozen=True)
class Material:
    """One evaluated system.

    Attributes
    ----------
    context : the measurements (K1 filled in from epoch velocities where need be) and the light engine
    verdicts : what the evaluation found
    """

    context: Context
    verdicts: Verdicts

    @property
    def system(self) -> System:
        """The measurements."""
        return self.context.system

    @property
    def best(self) -> ScenarioVerdict | None:
        """The row with the largest likelihood."""
        return self.verdicts.best

    @property
    def standing(self) -> list[ScenarioVerdict]:
        """The rows that are not excluded."""
        return [row for row in self.verdicts.scenarios if row.verdict != "excluded"]


def in_a_sentence(row: ScenarioVerdict) -> str:
    """Return the title of a row as in the middle of a sentence."""
    return row.title[0].lower() + row.title[1:]


def with_article(row: ScenarioVerdict) -> str:
    """Return the title of a row with its article: ``a black hole``, ``two compact remnants in a tight pair``."""
    title = in_a_sentence(row)
    if title.startswith("two "):
        return title
    if title.startswith("seen star "):
        return f"a {title}"
    return f"{'an' if title[0] in 'aeiou' else 'a'} {title}"


def observation_words(name: str, system: System) -> str:
    """Return an observation with its article, as in "without the photocentre"."""
    if name == "distance" and system.distance.parallax_mas is None:
        return "the distance"
    return OBSERVATION_WORDS.get(name) or f"the {_labels().get(name, name.replace('_', ' '))}"


def _labels() -> dict[str, str]:
    return {kind.name: kind.label for kind in registered_observations()}


OBSERVATION_WORDS = {
    "photometry": "the photometry",
    "distance": "the parallax",
    "dust": "the reddening",
    "spectroscopy": "the spectroscopic parameters",
    "inclination": "the inclination",
    "photocentre": "the photocentre",
    "astrometry": "the astrometric orbit",
    "light_limit": "the limit on a second spectrum",
    "seen_mass": "the outside mass of the seen star",
    "velocities": "the epoch velocities",
    "variability": "the light curve",
    "imaging": "the images",
    "x_ray": "the limit in X-rays",
}
"""Observations with their article."""
