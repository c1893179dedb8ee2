"""What was tried: one sentence per scenario, with its own priors."""

from __future__ import annotations

from collections.abc import Mapping

from vetter.results.prose.document import Citation, Inline, Sentence, say
from vetter.results.prose.method_words import prior_words
from vetter.results.prose.quoted import quoted
from vetter.results.verdicts import ScenarioVerdict

TEMPLATES: Mapping[str, str] = {
    "main_sequence": "We tried a single main-sequence star of any age, with a mass {mass}.",
    "evolved_star": (
        "The companion may have left the main sequence: we tried a subgiant or giant anywhere between the end of the "
        "main sequence and the giant branch, with a mass {mass}."
    ),
    "inner_pair": (
        "Two main-sequence stars in a tight orbit may share the mass, and are dimmest for their sum when they are "
        "equal. We took a total mass {mass}, a uniform mass ratio, and an inner period between contact {roche} and the "
        "stability limit of the triple {triple}."
    ),
    "inner_pair_with_white_dwarf": (
        "A white dwarf adds mass with hardly any light. We put one, with a mass {white}, into a tight orbit with a "
        "main-sequence star, the total mass {mass} and the inner period between contact {roche} and the stability "
        "limit of the triple {triple}."
    ),
    "stripped_companion": (
        "A helium star that has lost its hydrogen envelope is massive for its size, hot, and faint in the optical. We "
        "tried one with a mass {mass}."
    ),
    "stripped_primary": (
        "The seen star itself may have lost its envelope. It then has far less mass than it looks to have, and an "
        "ordinary companion, on the main sequence or evolved, is enough. We took it as {seen}, log-uniform; little but "
        "its surface gravity and its radius can close this explanation."
    ),
    "white_dwarf": "We tried a white dwarf with a mass {mass} and a temperature {teff}.",
    "neutron_star": "A neutron star was taken to be dark, with a mass {mass}.",
    "black_hole": "A black hole was taken to be dark, with a mass {mass}.",
    "compact_pair": (
        "Two remnants in a tight orbit may share the mass: two dark ones, a white dwarf and a dark one, or two white "
        "dwarfs. In the variant that fits best the total mass is {mass}."
    ),
    "unrelated_light": (
        "A star that has nothing to do with the orbit may add its light to the aperture, beside a dark companion with "
        "a mass {mass}."
    ),
}
"""Templates by scenario; one that is not here is described by the prior of its mass."""

PRIORS = {"mass": "companion_mass_msun", "white": "white_dwarf_mass_msun", "teff": "companion_teff_k"}
"""Parameters whose priors fill the fields of the templates."""


def configuration(row: ScenarioVerdict) -> Sentence:
    """Return what configuration was tried, with its priors."""
    template = TEMPLATES.get(row.name, "The mass of the companion was taken as {mass}.")
    parts: dict[str, Inline | Sentence] = {
        "roche": Citation(("eggleton1983",)),
        "triple": Citation(("vynatheya2022",)),
        "seen": quoted(row.seen_star, f"scenarios.{row.name}.seen_star"),
    }
    for field, parameter in PRIORS.items():
        known = parameter in row.priors
        parts[field] = prior_words(row, parameter) if known else say("as given above")
    return say(template, **parts)
