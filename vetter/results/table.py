"""The table on the terminal: plain words, readable by someone who has never seen the program."""

from __future__ import annotations

import textwrap

from vetter.results.verdicts import Driver, ScenarioVerdict, Verdicts, headline, sigma_text

WIDE = 120
NARROW = 80
WIDE_FROM = 112  # below, the column of reasons would be too narrow to read
DRIVERS_SHOWN = 2


def render(verdicts: Verdicts, width: int = WIDE) -> str:
    """Return the whole report for ``width`` columns: from 112 on one row per scenario, else several lines each."""
    width = max(60, min(width, WIDE))
    lines = [*_header(verdicts, width), ""]
    if verdicts.nothing_fits:
        lines += [*_wrapped(headline(verdicts), width), ""]
    lines += _wide_rows(verdicts, width) if width >= WIDE_FROM else _narrow_rows(verdicts, width)
    if not verdicts.nothing_fits:
        lines += ["", *_wrapped(headline(verdicts), width)]
    lines += ["", "Cautions"]
    for caution in verdicts.cautions:
        lines += _wrapped(caution, width, "- ")
    return "\n".join(lines) + "\n"


def _header(verdicts: Verdicts, width: int) -> list[str]:
    """Name, orbit, what the orbit needs, what was used and what was not given."""
    orbit = verdicts.orbit
    parts = [verdicts.system, f"P {orbit.period_d:g} d", f"e {orbit.eccentricity:g}"]
    lines = []
    if orbit.k1_km_s is not None:
        parts.append(f"K1 {orbit.k1_km_s:g} km/s")
    if orbit.companion_min_msun is not None:
        lines = _wrapped(
            f"mass function {orbit.mass_function_msun:.3g} Msun: the companion has more than "
            f"{orbit.companion_min_msun:.2g} Msun if the seen star has {orbit.seen_star_msun:.3g}",
            width,
        )
    lines = ["    ".join(parts), *lines]
    lines += _wrapped("used: " + ", ".join(verdicts.observations_used_words), width)
    if verdicts.observations_absent:
        absent = ", ".join(name.replace("_", " ") for name in verdicts.observations_absent)
        lines += _wrapped("not given: " + absent, width)
    return lines


def _wide_rows(verdicts: Verdicts, width: int) -> list[str]:
    """One row per scenario; long reasons are continued under their own column."""
    widths = (36, 11, 5, 16, 16)
    last = width - sum(widths) - 2 * len(widths)
    above = ("", "", "", "companion", "", "carried by")
    heads = ("explanation", "verdict", "sigma", "(Msun)", "ln Z", "(sigma without)")
    lines = [_row(above, widths), _row(heads, widths), "-" * width]
    for scenario in verdicts.scenarios:
        reason = textwrap.wrap(_reason(scenario), last, break_on_hyphens=False) or [""]
        cells = (scenario.title, scenario.verdict, _sigma(scenario), _mass(scenario), _evidence(scenario), reason[0])
        lines.append(_row(cells, widths))
        lines += [" " * (sum(widths) + 2 * len(widths)) + rest for rest in reason[1:]]
    return lines


def _row(cells: tuple[str, ...], widths: tuple[int, ...]) -> str:
    """First two columns to the left, numbers to the right, the reason to the left."""
    padded = [
        cell.ljust(size) if place < 2 else cell.rjust(size)
        for place, (cell, size) in enumerate(zip(cells[:-1], widths, strict=True))
    ]
    return "  ".join([*padded, cells[-1]]).rstrip()


def _narrow_rows(verdicts: Verdicts, width: int) -> list[str]:
    """Two or three lines per scenario for terminals of 80 columns."""
    lines: list[str] = []
    for scenario in verdicts.scenarios:
        sigma = _sigma(scenario)
        verdict = scenario.verdict if sigma == "-" else f"{scenario.verdict}, {sigma} sigma"
        lines.append(f"{scenario.title:<36}{verdict}")
        if scenario.ln_evidence is not None:
            lines.append(f"    companion {_mass(scenario)} Msun    ln Z {_evidence(scenario)}")
        if _reason(scenario):
            lines += _wrapped(_reason(scenario), width, "    ")
    return lines


def _sigma(scenario: ScenarioVerdict) -> str:
    return "-" if scenario.sigma is None else sigma_text(scenario.sigma)


def _mass(scenario: ScenarioVerdict) -> str:
    if scenario.companion_mass_msun is None:
        return "-"
    low, _, high = scenario.companion_mass_msun
    # Enough digits that the two ends differ.
    digits = 1 if high - low > 0.2 else 2 if high - low > 0.02 else 3
    return f"{low:.{digits}f} - {high:.{digits}f}"


def _evidence(scenario: ScenarioVerdict) -> str:
    if scenario.ln_evidence is None or scenario.ln_evidence_error is None:
        return "-"
    return f"{scenario.ln_evidence:.1f} +- {max(scenario.ln_evidence_error, 0.01):.2f}"


def _reason(scenario: ScenarioVerdict) -> str:
    """The wall that closes a scenario, or the observations that carry an exclusion, weightiest first."""
    if scenario.closed_because is not None:
        return scenario.closed_because
    if scenario.verdict == "allowed" and scenario.name == "compact_pair":
        return "these data cannot tell it from one dark body"
    if scenario.verdict == "allowed" or not scenario.driven_by:
        return ""
    return ", ".join(f"{driver.label} ({sigma_text(driver.sigma_without)})" for driver in strongest(scenario))


def strongest(scenario: ScenarioVerdict) -> list[Driver]:
    """Return the observations without which the exclusion weakens most: at least one, at most two."""
    ordered = sorted(scenario.driven_by, key=lambda driver: driver.sigma_without)
    sigma = scenario.sigma or 0.0
    telling = [driver for driver in ordered if driver.sigma_without < 0.9 * sigma]
    return (telling or ordered[:1])[:DRIVERS_SHOWN]


def _wrapped(text: str, width: int, indent: str = "") -> list[str]:
    """Wrap a paragraph; continuation lines line up under the text after the indent."""
    return textwrap.wrap(
        text, width, initial_indent=indent, subsequent_indent=" " * len(indent), break_on_hyphens=False
    )
