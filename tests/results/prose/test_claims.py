"""The words never claim more than the verdict: golden systems, and made-up verdicts of every kind."""

from __future__ import annotations

import re
from collections.abc import Callable

import pytest
from hypothesis import HealthCheck, given, settings, strategies

from vetter.results.prose.document import Paragraph
from vetter.results.prose.markdown import render_paragraph
from vetter.results.prose.material import Material
from vetter.results.prose.section import write_document
from vetter.results.verdicts import ScenarioVerdict

Row = Callable[..., ScenarioVerdict]
MadeUp = Callable[..., Material]

NAMES = {
    "main_sequence": True,
    "evolved_star": True,
    "inner_pair": True,
    "white_dwarf": True,
    "neutron_star": False,
    "black_hole": False,
    "compact_pair": False,
}
TITLES = {name: name.replace("_", " ").capitalize() for name in NAMES}
OBSERVATIONS = ("photometry", "distance", "light_limit", "spectroscopy")


def plain_words(paragraph: Paragraph) -> str:
    text = re.sub(r"\s+", " ", render_paragraph(paragraph, "british"))
    return re.sub(r"(not|cannot be) excluded", "kept", text)


def assert_no_more_than_the_verdict(material: Material) -> None:
    rows = {row.name: row for row in material.verdicts.scenarios}
    for paragraph in write_document(material).paragraphs:
        row = rows.get(paragraph.about)
        if row is None:
            continue
        words = plain_words(paragraph)
        if row.verdict != "excluded" or (material.verdicts.nothing_fits and row.sigma is not None):
            assert "exclu" not in words, words
            assert "ruled out" not in words
        if row.verdict == "allowed":
            assert "disfavour" not in words, words
        if row.verdict == "excluded" and not material.verdicts.nothing_fits:
            assert "excluded" in words


def test_golden_systems_claim_no_more_than_their_verdicts(material: Material) -> None:
    assert_no_more_than_the_verdict(material)


def test_nobody_is_said_to_have_found_a_black_hole(material: Material) -> None:
    for paragraph in write_document(material).paragraphs:
        words = render_paragraph(paragraph, "british").lower()
        for claim in ("we have found", "must be a", "proves", "discovered", "confirms", "confirmed"):
            assert claim not in words


sigmas = strategies.one_of(strategies.none(), strategies.floats(0.0, 60.0))
drivers = strategies.dictionaries(strategies.sampled_from(OBSERVATIONS), strategies.floats(0.0, 60.0))


@settings(max_examples=60, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(strategies.dictionaries(strategies.sampled_from(sorted(NAMES)), strategies.tuples(sigmas, drivers), min_size=2))
def test_made_up_verdicts_claim_no_more(
    row: Row, made_up: MadeUp, found: dict[str, tuple[float | None, dict[str, float]]]
) -> None:
    rows = []
    for name, (sigma, without) in found.items():
        fields = {"name": name, "title": TITLES[name], "ordinary": NAMES[name]}
        made = row(closed=True, **fields) if sigma is None else row(sigma=sigma, without=without, **fields)
        rows.append(made)
    material = made_up(*rows)
    assert_no_more_than_the_verdict(material)
    (summary,) = (p for p in write_document(material).paragraphs if p.heading == "What remains")
    words = re.sub(r"\s+", " ", render_paragraph(summary, "british"))
    ordinary = [made for made in rows if made.ordinary]
    if not material.verdicts.nothing_fits:
        all_gone = bool(ordinary) and all(made.verdict == "excluded" for made in ordinary)
        assert ("ordinary explanations tried are excluded" in words) == all_gone
        for made in rows:
            if made.verdict != "excluded" and made.ordinary:
                assert made.title.lower() in words


def test_an_exclusion_that_hangs_on_one_observation_says_so(row: Row, made_up: MadeUp) -> None:
    best = row(sigma=0.0, name="black_hole", title="Black hole", ordinary=False)
    weak = row(sigma=9.0, without={"photometry": 2.5, "distance": 8.5})
    (paragraph,) = (p for p in write_document(made_up(weak, best)).paragraphs if p.about == "main_sequence")
    words = plain_words(paragraph)
    assert "That hangs on one observation: without the photometry (2.5σ) the explanation would be allowed." in words


def test_an_exclusion_that_stands_says_what_it_leans_on(row: Row, made_up: MadeUp) -> None:
    best = row(sigma=0.0, name="black_hole", title="Black hole", ordinary=False)
    strong = row(sigma=9.0, without={"photometry": 6.5, "distance": 8.5})
    material = made_up(strong, best)
    text = "\n".join(plain_words(p) for p in write_document(material).paragraphs)
    assert "it leans most on the photometry, without which 6.5σ remain" in text
    assert "stay so without any one observation" in text


def test_a_disfavoured_explanation_is_not_excluded(row: Row, made_up: MadeUp) -> None:
    best = row(sigma=0.0, name="black_hole", title="Black hole", ordinary=False)
    half = row(sigma=4.98, without={"photometry": 1.0})
    material = made_up(half, best)
    (paragraph,) = (p for p in write_document(material).paragraphs if p.about == "main_sequence")
    text = render_paragraph(paragraph, "british").replace("\n", " ")
    assert "is disfavoured at 4.98σ, but not excluded" in text
    assert "It would be allowed without the photometry (1.0σ)." in text


def test_when_nothing_fits_no_verdict_follows(row: Row, made_up: MadeUp) -> None:
    bad = row(sigma=0.0, fit_p_value=1e-9)
    worse = row(sigma=12.0, fit_p_value=1e-12, name="black_hole", title="Black hole", ordinary=False)
    material = made_up(bad, worse)
    document = write_document(material)
    assert_no_more_than_the_verdict(material)
    text = "\n".join(render_paragraph(p, "british") for p in document.paragraphs).replace("\n", " ")
    assert "No explanation fits these data" in text
    assert "none can be said to remain" in text
    assert all(row[1] != document.table.heads[1] for row in document.table.rows)


def test_a_single_explanation_has_no_verdict(row: Row, made_up: MadeUp) -> None:
    text = "\n".join(render_paragraph(p, "british") for p in write_document(made_up(row(sigma=0.0))).paragraphs)
    assert "has no verdict" in text
    assert "nothing can be said about what remains" in text.replace("\n", " ")


@pytest.mark.parametrize("weight", [0.0, 5.0])
def test_unequal_prior_odds_are_printed(weight: float, row: Row, made_up: MadeUp) -> None:
    rows = (row(sigma=0.0), row(sigma=1.0, name="black_hole", title="Black hole", ordinary=False))
    material = made_up(*rows, prior_odds={"main_sequence": 1.0, "black_hole": weight})
    text = "\n".join(render_paragraph(p, "british") for p in write_document(material).paragraphs)
    assert f"With prior odds of {weight:.3g}" in text.replace(".00", "").replace("\n", " ")


def test_a_poorly_sampled_evidence_is_not_quoted(materials: dict[str, Material]) -> None:
    material = materials["ai_phe"]
    poor = [row for row in material.verdicts.scenarios if row.diagnostics and not row.diagnostics.converged]
    text = "\n".join(render_paragraph(p, "british") for p in write_document(material).paragraphs)
    assert ("poorly sampled" in text) == bool(poor)
