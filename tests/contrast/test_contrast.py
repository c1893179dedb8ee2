"""The whole contrast on systems of known content."""

from __future__ import annotations

import json
from collections.abc import Callable
from dataclasses import replace

import numpy as np
import pytest

from vetter import InputError, contrast
from vetter.pairs.plane import REASONS
from vetter.pairs.report import render, speed
from vetter.pairs.result import Contrast
from vetter.system.model import Measurement, System


def test_the_pair_of_the_example_is_found(lindow_contrast: Contrast) -> None:
    """Truth in examples/README.md: 0.62 + 0.41 Msun, started at an inner period of 13.6 d, mean 13.78 d."""
    row, detail = lindow_contrast.explanation("inner_pair"), lindow_contrast.detail("inner_pair")
    assert row.ln_bayes is not None
    assert row.ln_bayes > 20.0
    assert row.sigma == 0.0
    assert detail is not None
    assert detail.inner_period_d is not None
    assert detail.inner_period_d[0] == pytest.approx(13.78, rel=0.002)
    assert lindow_contrast.headline.startswith("The data prefer a pair")
    span = detail.plane.allowed_range()
    assert span is not None
    assert span[0] < 13.78 < span[1]
    assert span[2] < 0.41 / 0.62 < span[3]
    assert detail.semi_amplitude_km_s == pytest.approx(8.9e-3 * 15.0 / 16.0, rel=0.25)


def test_the_plane_says_why(lindow_contrast: Contrast) -> None:
    detail = lindow_contrast.detail("inner_pair")
    assert detail is not None
    plane = detail.plane
    for reason, beyond in (("contact", plane.period_d < plane.shortest_d[:, None]),
                           ("unstable", plane.period_d > 1.4 * plane.stable_d[:, None])):  # fmt: skip
        assert np.all(plane.reason[beyond] == REASONS.index(reason))
        assert beyond.any()
    between = (plane.period_d > plane.shortest_d[:, None]) & (plane.period_d < plane.stable_d[:, None])
    assert not np.isin(plane.reason[between], [REASONS.index("contact"), REASONS.index("unstable")]).any()
    # A light star beside a heavy one shines too much: the light limit closes low mass ratios, not high ones.
    assert np.all(plane.reason[0][between[0]] == REASONS.index("light"))
    assert not np.any(plane.reason[-1] == REASONS.index("light"))


def test_json_and_text(lindow_contrast: Contrast) -> None:
    made = json.loads(json.dumps(lindow_contrast.to_dict(), allow_nan=False))
    assert [row["pair"] for row in made["explanations"]] == [False, True]
    assert made["pairs"][0]["plane"]["reasons"][0] == "allowed"
    assert np.array(made["pairs"][0]["plane"]["reason"]).shape == (16, 60)
    text = render(lindow_contrast, 100)
    assert "inner period 13.7" in text
    assert max(len(line) for line in text.split("\n")) <= 100


def test_the_same_seed_gives_the_same(lindow: System, lindow_contrast: Contrast) -> None:
    again = contrast(lindow, ("white_dwarf", "inner_pair"))
    assert again.to_dict() == lindow_contrast.to_dict()


def test_the_light_limit_decides_against_a_single_star(lindow: System) -> None:
    """The pair stays either way; one ordinary star of its mass goes only when the spectrum was searched for it."""
    bare = replace(lindow, velocities=None, orbit=replace(lindow.orbit, k1_km_s=Measurement(22.31, 0.01)))
    names = ("main_sequence", "inner_pair")
    searched = contrast(bare, names)
    unsearched = contrast(replace(bare, light_limits=(), magnitudes=bare.magnitudes[2:5]), names)
    star, pair = searched.explanation("main_sequence"), searched.explanation("inner_pair")
    assert star.sigma is not None
    assert pair.sigma is not None
    assert star.sigma > 5.0
    assert pair.sigma < 1.0
    open_star, open_pair = unsearched.explanation("main_sequence"), unsearched.explanation("inner_pair")
    assert open_star.sigma is not None
    assert open_pair.sigma is not None
    assert open_star.sigma < 3.0
    assert open_pair.sigma < 3.0


def test_two_dark_bodies_without_epochs(dark) -> None:
    """The shipped black hole: nothing in its data tells one dark body from two, and the output says so."""
    found = contrast(dark.system, ("black_hole", "compact_pair"))
    row = found.explanation("compact_pair")
    assert row.ln_bayes is not None
    assert abs(row.ln_bayes) < 3.0
    assert row.ln_velocities is None
    assert any("cannot tell them apart" in caution for caution in found.cautions)
    assert found.headline.startswith("These data cannot tell one body from two")
    detail = found.detail("compact_pair")
    assert detail is not None
    assert detail.reveal[0].semi_amplitude_km_s > detail.reveal[-1].semi_amplitude_km_s


def test_a_light_curve_closes_eclipsing_pairs(lindow: System) -> None:
    from vetter.system.model import Variability

    watched = replace(
        lindow,
        variability=Variability("GAIA/GAIA3.G", ellipsoidal_max_mag=1e-5),
    )
    found = contrast(watched, ("white_dwarf", "inner_pair")).detail("inner_pair")
    assert found is not None
    # Close to contact the pair is strongly distorted, even diluted by the seen star.
    first_open = np.argmax(found.plane.reason[-1] != REASONS.index("contact"))
    assert found.plane.reason[-1][first_open] == REASONS.index("light curve")


@pytest.mark.parametrize("names", [("main_sequence", "black_hole"), ("inner_pair", "inner_pair"), ("inner_pair", "x")])
def test_wrong_names(lindow: System, names: tuple[str, str]) -> None:
    with pytest.raises(InputError):
        contrast(lindow, names)


def test_progress_is_told(lindow: System) -> None:
    said: list[str] = []
    contrast(lindow, ("white_dwarf", "compact_pair"), progress=said.append)
    assert "White dwarf" in said
    assert any(words.startswith("plane") for words in said)


@pytest.mark.parametrize(("value", "words"), [(12.3, "12.3 km/s"), (0.0045, "4.5 m/s"), (2e-6, "2 mm/s")])
def test_speeds_in_words(value: float, words: str) -> None:
    assert speed(value) == words


def test_few_injections(injection: Callable[..., list]) -> None:
    """Three of each; the full set is in ``test_injection.py``."""
    for place, made in enumerate(injection(3, 21)):
        row = contrast(made.system, ("white_dwarf", "inner_pair"), seed=place).explanation("inner_pair")
        value = row.ln_bayes if row.ln_bayes is not None else row.ln_bayes_max
        assert value is not None
        assert made.pair or value < 5.0
        assert value > 5.0 or made.signal_to_noise < 10.0
