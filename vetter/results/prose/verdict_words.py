"""The verdict itself, never more than it says, and which observation carries it."""

from __future__ import annotations

from vetter.results.prose.costs import named_costs
from vetter.results.prose.document import Number, Sentence, joined, say
from vetter.results.prose.material import Material, observation_words
from vetter.results.prose.numbers import given, interval, plain, sigma
from vetter.results.prose.quoted import quoted
from vetter.results.verdicts import EXCLUDED_SIGMA, Driver, ScenarioVerdict, verdict_word

AS_GOOD_AS_THE_BEST = 1.0
"""Below this many sigma a fit is called as good as the best."""

EXACT_CHI2 = 0.005
"""Below this a sum of squares says only that the data leave more freedom than they take."""

LOW_CHANCE, HIGH_CHANCE = 0.001, 0.99
"""Probabilities beyond these are given as bounds."""

LEADS = ("To get that far the fit must accept", "Even so it needs", "The price is")
"""How the list of what a fit has to accept begins, in turn."""

WEAKER_BY = 0.9
"""An observation carries an exclusion when less than this share of its sigma is left without it."""


def verdict(material: Material, row: ScenarioVerdict) -> tuple[Sentence, ...]:
    """Return why an explanation fails or stays, and what carries that."""
    if row.sigma is None:
        return (closed(row),)
    if material.verdicts.nothing_fits:
        return (unreadable(row),)
    if len(material.verdicts.scenarios) == 1:
        return (say("With nothing to compare it to, it has no verdict."),)
    if row.verdict == "allowed":
        return (*allowed(material, row), *mass(row))
    cost = named_costs(material, row)
    lead = LEADS[material.verdicts.scenarios.index(row) % len(LEADS)]
    accepts = (say(f"{lead} {{cost}}.", cost=cost),) if cost else ()
    number = sigma(f"scenarios.{row.name}.sigma", row.sigma)
    if row.verdict == "disfavoured":
        first = say("The explanation is disfavoured at {number}, but not excluded.", number=number)
        return (*accepts, first, *disfavour_drivers(material, row), *mass(row))
    return (*accepts, say("The explanation is excluded at {number}.", number=number), *drivers(material, row))


def closed(row: ScenarioVerdict) -> Sentence:
    """Return the wall that closes an explanation."""
    reason = quoted(row.closed_because or "no case of it is possible", f"scenarios.{row.name}.closed_because")
    return say("It is excluded before any fit: {reason}.", reason=reason)


def unreadable(row: ScenarioVerdict) -> Sentence:
    """Return how far a row is from the best where even the best does not fit: no verdict follows."""
    number = sigma(f"scenarios.{row.name}.sigma", row.sigma or 0.0)
    return say(
        "It falls short of the best fit by {number}, but as that does not fit either, nothing follows.", number=number
    )


def allowed(material: Material, row: ScenarioVerdict) -> tuple[Sentence, ...]:
    """Return that an explanation is allowed, and how well it does."""
    number = sigma(f"scenarios.{row.name}.sigma", row.sigma or 0.0)
    if row is material.best:
        return (best_fit(row),)
    if (row.sigma or 0.0) < AS_GOOD_AS_THE_BEST:
        return (say("It fits as well as the best explanation ({number}) and is allowed.", number=number),)
    cost = named_costs(material, row)
    strain = say(", its main strain being {cost},", cost=cost) if cost else ()
    return (say("It fits less well than the best by {number}{strain} and is allowed.", number=number, strain=strain),)


def best_fit(row: ScenarioVerdict) -> Sentence:
    """Return the goodness of the best fit of all."""
    if row.chi2_min is None or row.fit_p_value is None:
        return say("It fits best of all and is allowed.")
    if row.chi2_min < EXACT_CHI2:
        return say("With so few data it matches every one of them exactly, and is allowed.")
    key = f"scenarios.{row.name}"
    if row.fit_p_value < LOW_CHANCE:
        chance = say("less than {p}", p=given("method.p_value_low", LOW_CHANCE))
    elif row.fit_p_value > HIGH_CHANCE:
        chance = say("more than {p}", p=given("method.p_value_high", HIGH_CHANCE))
    else:
        chance = (plain(f"{key}.fit_p_value", row.fit_p_value, 2),)
    return say(
        "It fits best of all and is allowed, with {chi2} = {value}; the probability to exceed that by chance is "
        "{chance}.",
        value=plain(f"{key}.chi2_min", row.chi2_min, 3),
        chance=chance,
    )


def mass(row: ScenarioVerdict) -> tuple[Sentence, ...]:
    """Return the companion's posterior mass."""
    if row.companion_mass_msun is None:
        return ()
    number = interval(f"scenarios.{row.name}.companion_mass_msun", *row.companion_mass_msun, unit="Msun")
    return (say("The posterior mass of the companion is then {number}.", number=number),)


def drivers(material: Material, row: ScenarioVerdict) -> tuple[Sentence, ...]:
    """Return whether an exclusion survives without each observation, and which one it leans on."""
    if not row.driven_by:
        return ()
    ordered = sorted(row.driven_by, key=lambda driver: driver.sigma_without)
    fatal = [driver for driver in ordered if driver.sigma_without < EXCLUDED_SIGMA]
    if fatal:
        return (_hanging(material, row, fatal),)
    weakest = ordered[0]
    if weakest.sigma_without > WEAKER_BY * (row.sigma or 0.0):
        return (say("No single observation carries that: without any one of them it changes by less than a tenth."),)
    return (
        say(
            f"The exclusion survives the loss of any one observation; it leans most on {_words(material, weakest)}, "
            "without which {left} remain.",
            left=_left(row, weakest),
        ),
    )


def _hanging(material: Material, row: ScenarioVerdict, fatal: list[Driver]) -> Sentence:
    """The observations without which the exclusion falls, by what would be left of it."""
    parts = []
    for word, left in (("allowed", "allowed"), ("disfavoured", "only disfavoured")):
        some = [driver for driver in fatal if verdict_word(driver.sigma_without) == word]
        if some:
            names = joined([say(f"{_words(material, d)} ({{left}})", left=_left(row, d)) for d in some], last=" or ")
            parts.append(say(f"without {{names}} the explanation would be {left}", names=names))
    which = "one observation" if len(fatal) == 1 else "more than one observation"
    return say(f"That hangs on {which}: {{parts}}.", parts=joined(parts, last="; "))


def disfavour_drivers(material: Material, row: ScenarioVerdict) -> tuple[Sentence, ...]:
    """Return which observation a disfavoured explanation would be allowed without."""
    ordered = sorted(row.driven_by, key=lambda driver: driver.sigma_without)
    fatal = [driver for driver in ordered if verdict_word(driver.sigma_without) == "allowed"]
    if not fatal:
        return ()
    parts = joined(
        [say(f"without {_words(material, driver)} ({{left}})", left=_left(row, driver)) for driver in fatal],
        last=" or ",
    )
    return (say("It would be allowed {parts}.", parts=parts),)


def _words(material: Material, driver: Driver) -> str:
    return observation_words(driver.observation, material.system)


def _left(row: ScenarioVerdict, driver: Driver) -> Number:
    return sigma(f"scenarios.{row.name}.sigma_without.{driver.observation}", driver.sigma_without)
