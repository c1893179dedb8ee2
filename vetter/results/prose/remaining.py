"""What is left, with what odds, under which priors."""

from __future__ import annotations

from collections.abc import Sequence

from vetter.results.prose.data_words import count_of
from vetter.results.prose.document import Sentence, joined, say
from vetter.results.prose.material import Material, in_a_sentence, observation_words, with_article
from vetter.results.prose.numbers import given_percent, percent, plain, sigma
from vetter.results.verdicts import EXCLUDED_SIGMA, ScenarioVerdict, verdict_word

SMALL_SHARE = 0.01
"""Posterior shares below this are not listed one by one."""


def remaining(material: Material) -> tuple[Sentence, ...]:
    """Return the paragraph on what is left."""
    verdicts = material.verdicts
    if verdicts.nothing_fits:
        return (say("As no explanation fits these data, none can be said to remain; the data must be checked first."),)
    if len(verdicts.scenarios) == 1:
        return (say("With a single explanation tried, nothing can be said about what remains."),)
    return (*ordinary(material), *standing(material), *odds(material))


def ordinary(material: Material) -> tuple[Sentence, ...]:
    """Return the fate of the ordinary explanations together."""
    rows = [row for row in material.verdicts.scenarios if row.ordinary]
    if not rows:
        return (say("No ordinary explanation was tried."),)
    left = [row for row in rows if row.verdict != "excluded"]
    if left:
        return (left_among(rows, left),)
    return (survival(material, rows),)


def left_among(rows: Sequence[ScenarioVerdict], left: Sequence[ScenarioVerdict]) -> Sentence:
    """Return which ordinary explanations are not excluded, those that are disfavoured marked as such."""
    names = [with_article(row) if row.verdict == "allowed" else f"{with_article(row)} ({row.verdict})" for row in left]
    if 1 < len(left) == len(rows):
        every = count_of("remaining.ordinary", len(rows))
        return say(
            "None of the {count} ordinary explanations tried is excluded: {names}.", count=every, names=joined(names)
        )
    verb = "is" if len(left) == 1 else "are"
    return say(
        f"Of the {{count}} ordinary explanations tried, {{left}} {verb} not excluded: {{names}}.",
        count=count_of("remaining.ordinary", len(rows)),
        left=count_of("remaining.ordinary_left", len(left)),
        names=joined(names),
    )


def survival(material: Material, rows: Sequence[ScenarioVerdict]) -> Sentence:
    """Return that all ordinary explanations are excluded, and whether that survives without any one observation."""
    pairs = [(driver.sigma_without, row, driver) for row in rows for driver in row.driven_by]
    count = count_of("remaining.ordinary", len(rows))
    if not pairs:
        return say(
            "All {count} ordinary explanations tried are excluded, whatever observation is left out.", count=count
        )
    _, row, driver = min(pairs, key=lambda pair: pair[0])
    words = observation_words(driver.observation, material.system)
    left = sigma(f"scenarios.{row.name}.sigma_without.{driver.observation}", driver.sigma_without)
    if driver.sigma_without >= EXCLUDED_SIGMA:
        return say(
            f"All {{count}} ordinary explanations tried are excluded, and stay so without any one observation; the "
            f"weakest of these exclusions is that of the {in_a_sentence(row)} without {words}, at {{left}}.",
            count=count,
            left=left,
        )
    return say(
        f"All {{count}} ordinary explanations tried are excluded, but not without {words}: then {with_article(row)} "
        f"would be {verdict_word(driver.sigma_without)}, at {{left}}.",
        count=count,
        left=left,
    )


def standing(material: Material) -> tuple[Sentence, ...]:
    """Return what else stands, and what these data cannot tell apart."""
    dark = [row for row in material.standing if not row.ordinary]
    if not dark:
        if any(not row.ordinary for row in material.verdicts.scenarios):
            return (say("Nothing more exotic is left."),)
        return ()
    names = joined(
        [with_article(row) if row.verdict == "allowed" else f"{with_article(row)} ({row.verdict})" for row in dark],
        last=" or ",
    )
    if any(row.ordinary for row in material.standing):
        found = [say("Of the other explanations, {names} cannot be excluded.", names=names)]
    else:
        found = [say("What is left is {names}.", names=names)]
    if len(dark) > 1 and any(row.name == "compact_pair" for row in dark):
        found.append(say("These data cannot tell a tight pair of dark bodies from a single one of the same mass."))
    return tuple(found)


def odds(material: Material) -> tuple[Sentence, ...]:
    """Return the posterior shares, the priors they rest on, and whose evidence is too poorly sampled."""
    rows = sorted(material.verdicts.scenarios, key=lambda row: -row.posterior_odds_to_best)
    total = sum(row.posterior_odds_to_best for row in rows)
    if total <= 0.0 or len(rows) < 2:
        return ()
    shares = [(row, row.posterior_odds_to_best / total) for row in rows]
    large = [(row, share) for row, share in shares if share >= SMALL_SHARE]
    parts = joined(
        [
            say(f"{{share}} for {with_article(row)}", share=percent(f"scenarios.{row.name}.posterior_share", share))
            for row, share in large
        ]
    )
    rest: Sentence = ()
    if len(large) < len(shares):
        rest = say(
            ", and less than {small} for each of the others", small=given_percent("remaining.small_share", SMALL_SHARE)
        )
    found = [
        say(
            "{priors}, the posterior probability is {parts}{rest}.", priors=prior_odds(material), parts=parts, rest=rest
        ),
        say("These shares count only what was tried, and follow the priors as much as the data."),
    ]
    poor = [row for row, share in large if row.diagnostics is not None and not row.diagnostics.converged]
    if poor:
        names = joined([with_article(row) for row in poor], last=", and of ", between=", of ")
        found.append(
            say("The evidence is poorly sampled, and the share not to be quoted, in the case of {names}.", names=names)
        )
    return tuple(found)


def prior_odds(material: Material) -> Sentence:
    """Return the prior odds in words."""
    rows, weights = material.verdicts.scenarios, material.verdicts.prior_odds
    unequal = [row for row in rows if weights.get(row.name, 1.0) != 1.0]
    if not unequal:
        return say("With equal prior odds for all")
    parts = joined(
        [
            say(f"{{weight}} for {with_article(row)}", weight=plain(f"prior_odds.{row.name}", weights[row.name], 3))
            for row in unequal
        ]
    )
    if len(unequal) == len(rows):
        return say("With prior odds of {parts}", parts=parts)
    return say("With prior odds of {parts}, and of one for the others", parts=parts)
