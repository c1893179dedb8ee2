"""Figures open, embed their fonts, carry units, do not cover their own names, and come out the same twice."""

from __future__ import annotations

import io
from itertools import combinations
from types import SimpleNamespace

import numpy as np
import pytest
from matplotlib.figure import Figure
from PIL import Image

from vetter.physics import triples
from vetter.results.figures import style
from vetter.results.figures.best_light import narrow_engine, spectra
from vetter.results.figures.inner_pairs import pair_walls
from vetter.results.figures.mass_and_light import light_band, required_mass
from vetter.results.figures.pictures import FIGURES, chosen_case, draw
from vetter.results.prose.material import Material
from vetter.results.verdicts import BestFit

UNITS = ("M_\\odot", "µm", "(d)", "erg s", "(σ)")
PLAIN_NUMBERS = ("mass ratio", "light of the companion / seen star")


@pytest.fixture(scope="module")
def drawings(dark: SimpleNamespace, hidden: SimpleNamespace) -> dict[str, list[tuple[str, Figure]]]:
    found = {}
    for name, one in (("dark", dark), ("hidden", hidden)):
        material = Material(one.context, one.verdicts)
        drawn = draw(material, one.verdicts.scenarios, one.observations)
        found[name] = [(d.picture.label, d.figure) for d in drawn]
    return found


@pytest.mark.parametrize("example", ["dark", "hidden"])
def test_every_figure_with_something_to_show_is_drawn(
    example: str, drawings: dict[str, list[tuple[str, Figure]]]
) -> None:
    """No pair of stars is among the four explanations of the cheap evaluations, so there is no figure of one."""
    labels = [label for label, _ in drawings[example]]
    assert len(labels) == len(FIGURES) - 1
    assert "figure_inner_pairs" not in labels


@pytest.mark.parametrize("example", ["dark", "hidden"])
def test_files_open_and_embed_their_fonts(example: str, drawings: dict[str, list[tuple[str, Figure]]]) -> None:
    for label, figure in drawings[example]:
        png, pdf = style.figure_bytes(figure, "png"), style.figure_bytes(figure, "pdf")
        with Image.open(io.BytesIO(png)) as image:
            assert image.width == pytest.approx(300 * style.COLUMN_INCH, abs=2), label
            assert len(image.convert("L").getcolors(256) or []) > 2
        assert pdf.startswith(b"%PDF")
        assert b"/FontFile2" in pdf
        assert b"/Type3" not in pdf
        assert pdf == style.figure_bytes(figure, "pdf")


@pytest.mark.parametrize("example", ["dark", "hidden"])
def test_every_axis_has_a_unit(example: str, drawings: dict[str, list[tuple[str, Figure]]]) -> None:
    for _, figure in drawings[example]:
        for axes in figure.axes:
            for label in (axes.get_xlabel(), axes.get_ylabel()):
                assert not label or any(unit in label for unit in (*UNITS, *PLAIN_NUMBERS)), label


@pytest.mark.parametrize("example", ["dark", "hidden"])
def test_names_inside_a_figure_do_not_cover_each_other(
    example: str, drawings: dict[str, list[tuple[str, Figure]]]
) -> None:
    for label, figure in drawings[example]:
        figure.draw_without_rendering()
        frame = figure.bbox
        for axes in figure.axes:
            boxes = {text.get_text(): text.get_window_extent() for text in axes.texts if text.get_text()}
            for (one, box), (other, second) in combinations(boxes.items(), 2):
                assert not box.overlaps(second), (label, one, other)
            for word, box in boxes.items():
                assert frame.x0 <= box.x0, (label, word)
                assert box.x1 <= frame.x1 + 1.0, (label, word)


@pytest.mark.parametrize("example", ["dark", "hidden"])
def test_no_word_is_cut_at_the_resolution_of_the_file(
    example: str, drawings: dict[str, list[tuple[str, Figure]]]
) -> None:
    for label, figure in drawings[example]:
        figure.set_dpi(300)
        figure.draw_without_rendering()
        for axes in figure.axes:
            texts = (*axes.get_xticklabels(), *axes.get_yticklabels(), *axes.texts, axes.xaxis.label, axes.yaxis.label)
            # Numbers of an axis also stand, undrawn, beyond its ends: only words are looked at.
            words = (t for t in texts if any(c.isalpha() for c in t.get_text()) and "mathdefault" not in t.get_text())
            for text in words:
                box = text.get_window_extent()
                inside = box.x0 >= -0.5 and box.y0 >= -0.5 and box.x1 <= figure.bbox.x1 + 0.5
                assert inside, (label, text.get_text())


def test_the_case_drawn_star_by_star_is_the_best_ordinary_one_with_light(hidden: SimpleNamespace) -> None:
    chosen = chosen_case(hidden.verdicts.scenarios)
    assert chosen is not None
    assert chosen.name == "main_sequence"
    assert chosen_case([]) is None


def test_spectra_add_up_to_the_magnitudes(hidden: SimpleNamespace) -> None:
    """The sum of the stars, read at the V band, is the total V magnitude of the best case within 0.05 mag."""
    best = hidden.verdicts.scenario("main_sequence").best_fit
    found = spectra(narrow_engine(hidden.context, 0.4, 2.5), best)
    engine, band = hidden.context.engine, "Generic/Johnson.V"
    pivot = engine.pivots_angstrom[engine.bands.index(band)]
    flux = float(np.interp(pivot / 1e4, found.micron, found.total))
    mag = -2.5 * np.log10(flux / (pivot * engine.zero_flux(band)))
    assert mag == pytest.approx(best.magnitudes[band], abs=0.05)


def test_zero_flux_is_that_of_the_magnitudes(hidden: SimpleNamespace) -> None:
    """V of Vega's system: 3.63e-9 erg/s/cm2/A at magnitude zero (Bessell, Castelli & Plez 1998, A&A 333, 231)."""
    assert hidden.context.engine.zero_flux("Generic/Johnson.V") == pytest.approx(3.63e-9, rel=0.03)


def test_the_orbit_asks_for_the_true_mass(dark: SimpleNamespace) -> None:
    """Truth 3.7 Msun (examples/README.md)."""
    wanted = required_mass(dark.verdicts, dark.context)
    assert wanted is not None
    low, high = wanted
    assert high is not None
    assert low < high
    assert low - 0.1 < 3.7 < high + 0.1


def test_a_heavier_main_sequence_star_shines_more(hidden: SimpleNamespace) -> None:
    band = light_band("main_sequence", hidden.verdicts.best.best_fit, hidden.context, (0.2, 1.0))
    assert band is not None
    assert (np.diff(band.middle) > 0.0).all()
    assert (band.low <= band.middle).all()
    assert (band.middle <= band.high).all()
    assert light_band("white_dwarf", hidden.verdicts.best.best_fit, hidden.context, (2.0, 3.0)) is None


def test_walls_of_a_pair_are_those_of_the_triple(hidden: SimpleNamespace) -> None:
    orbit = hidden.context.system.orbit
    values = {
        "m1_msun": 1.1,
        "m2_msun": 0.7,
        "feh": 0.0,
        "companion_life_fraction": 0.5,
        "companion_luminosity_score": 0.0,
        "companion_radius_score": 0.0,
    }
    walls = pair_walls(BestFit(values, {}), hidden.context)
    assert walls is not None
    limit = triples.longest_inner_period_d(orbit.period_d.value, 1.1, 0.7, orbit.eccentricity.value)
    np.testing.assert_allclose(walls.limit_d, limit)
    assert (walls.contact_d < walls.stable_d).all()
    np.testing.assert_allclose(np.sqrt(walls.stable_d * walls.unstable_d), walls.limit_d)
    assert walls.mass_ratio[0] == pytest.approx(0.08 / 0.62)
    assert pair_walls(BestFit({**values, "m2_msun": 0.1}, {}), hidden.context) is None
