"""What each explanation is, for `vetter scenarios`: parameters, priors, walls and light, read off the scenarios."""

from __future__ import annotations

from collections import Counter
from collections.abc import Mapping
from typing import Any

import numpy as np

from vetter.errors import InputError
from vetter.scenarios.base import Branch, Scenario, registered
from vetter.scenarios.context import Context, build_context
from vetter.scenarios.seen_star import Giant
from vetter.system.model import Distance, Magnitude, Measurement, Orbit, Primary, System

EXAMPLE = System(
    name="a Sun at 200 pc",
    source="vetter scenarios",
    distance=Distance(parallax_mas=Measurement(5.0, 0.02)),
    orbit=Orbit(Measurement(100.0, 0.1), Measurement(0.1, 0.01), k1_km_s=Measurement(30.0, 0.3)),
    magnitudes=(Magnitude("Generic/Johnson.V", 11.35, 0.02, "Vega"),),
    primary=Primary(Measurement(5772.0, 60.0), Measurement(4.44, 0.05), Measurement(0.0, 0.05)),
)
"""Parameters and walls belong to a system; for this printout they are those of a dwarf like the Sun."""

LIGHT_WORDS = {"star": "stellar atmosphere"}
"""Other kinds of body are printed as they are called."""


def scenarios_report() -> dict[str, Any]:
    """Return one line on every scenario: name, title, description, and whether it runs only on request."""
    return {
        "scenarios": [
            {
                "name": scenario.name,
                "title": scenario.title,
                "ordinary": scenario.ordinary,
                "on_request": scenario.on_request,
                "description": _description(scenario),
            }
            for scenario in registered(on_request=True).values()
        ]
    }


def scenario_report(name: str) -> dict[str, Any]:
    """Return the parameters, priors, walls in words and light of one scenario, one entry per variant run separately.

    Raises InputError for an unknown name.
    """
    known = registered(on_request=True)
    if name not in known:
        raise InputError.single("command line", "scenario", name, f"one of {', '.join(known)}")
    scenario, context = known[name], build_context(EXAMPLE)
    return {
        "name": scenario.name,
        "title": scenario.title,
        "ordinary": scenario.ordinary,
        "on_request": scenario.on_request,
        "description": _description(scenario),
        "seen_star_for": f"{EXAMPLE.name}; with a measured log g near or below 3 also, or instead, {Giant.words}",
        "variants": [_variant(branch, context) for branch in scenario.branches(context)],
    }


def _description(scenario: Scenario) -> str:
    """First sentence of the class's docstring."""
    return (type(scenario).__doc__ or scenario.title).split("\n", 1)[0].strip()


def _variant(branch: Branch, context: Context) -> dict[str, Any]:
    with np.errstate(all="ignore"):
        sampled = branch.sample(np.zeros((1, len(branch.parameters))))
    shared = {parameter.name for parameter in context.shared_parameters()}
    companion = branch.scenario.companion(
        sampled.prediction.companion_mass_msun, sampled.prediction.feh, sampled.values
    )
    return {
        "companion": branch.scenario.title,
        "seen_star": branch.seen.words,
        "light": _light([component.kind for component in companion.components]),
        "parameters": [
            {
                "name": parameter.name,
                "unit": parameter.unit,
                "prior": parameter.prior.describe(parameter.unit),
                "shared": parameter.name in shared,
                "score": parameter.counts,
            }
            for parameter in branch.parameters
        ],
        "walls": list(dict.fromkeys(wall.words for wall in sampled.walls)),
    }


def _light(kinds: list[str]) -> str:
    if not kinds:
        return "none: dark"
    words = (LIGHT_WORDS.get(kind, f"{kind.replace('_', ' ')} atmosphere") for kind in kinds)
    return " + ".join(f"{count} x {word}" for word, count in Counter(words).items())


def render_scenarios(found: Mapping[str, Any]) -> str:
    """Return the list of scenarios as text."""
    lines = []
    for row in found["scenarios"]:
        asked = "  (only when asked for)" if row["on_request"] else ""
        lines.append(f"{row['name']:<28}{row['description']}{asked}")
    return "\n".join(lines) + "\n"


def render_scenario(found: Mapping[str, Any]) -> str:
    """Return one scenario as text."""
    lines = [f"{found['name']}: {found['title']}", found["description"]]
    lines.append(f"Shown for {found['seen_star_for']}.")
    for variant in found["variants"]:
        lines += ["", variant["companion"], f"  seen star: {variant['seen_star']}", f"  light: {variant['light']}"]
        lines.append("  parameters and priors")
        for parameter in variant["parameters"]:
            note = ", a score of a published relation" if parameter["score"] else ""
            lines.append(f"    {parameter['name']:<30}{parameter['prior']}{note}")
        lines += ["  closed where", *(f"    {words}" for words in variant["walls"])]
    return "\n".join(lines) + "\n"
