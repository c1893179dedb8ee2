"""verdicts.json read back is what was written; anything else is one clear error."""

from __future__ import annotations

import json
from pathlib import Path
from types import SimpleNamespace

import pytest

from vetter.errors import InputError
from vetter.results.export import to_json
from vetter.results.prose.saved import read_verdicts


@pytest.mark.parametrize("example", ["dark", "hidden"])
def test_a_saved_evaluation_comes_back_whole(example: str, request: pytest.FixtureRequest, tmp_path: Path) -> None:
    found: SimpleNamespace = request.getfixturevalue(example)
    path = tmp_path / "verdicts.json"
    path.write_text(to_json(found.verdicts))
    back = read_verdicts(path, found.system.name, found.observations)
    assert back == found.verdicts


def test_a_posterior_is_a_density(dark: SimpleNamespace) -> None:
    for row in dark.verdicts.scenarios:
        if row.mass_density is None:
            assert row.companion_mass_msun is None
            continue
        edges, heights = row.mass_density.edges_msun, row.mass_density.per_msun
        areas = [height * (b - a) for height, a, b in zip(heights, edges[:-1], edges[1:], strict=True)]
        assert sum(areas) == pytest.approx(1.0)
        low, _, high = row.companion_mass_msun
        inside = sum(
            area for area, a, b in zip(areas, edges[:-1], edges[1:], strict=True) if low <= 0.5 * (a + b) <= high
        )
        # Half of a bin at each end may fall on the other side.
        assert inside == pytest.approx(0.68, abs=max(areas) + 0.01)


def test_residuals_add_up_to_chi2(dark: SimpleNamespace) -> None:
    for row in dark.verdicts.scenarios:
        if row.best_fit is None:
            continue
        data = sum(r**2 for one in row.best_fit.residuals.values() for r in one.values())
        scores = sum(value**2 for name, value in row.best_fit.values.items() if name.endswith("_score"))
        assert data + scores == pytest.approx(row.chi2_min)


def test_light_ratios_are_those_of_the_hidden_stars(hidden: SimpleNamespace) -> None:
    row = hidden.verdicts.scenario("main_sequence")
    (star,) = row.best_fit.hidden_stars
    for band, ratio in star.band_ratio.items():
        assert row.best_fit.light_ratio[band] == pytest.approx(ratio)
    assert star.mass_msun == pytest.approx(row.best_fit.values["m2_msun"])
    assert "510-530 nm" in row.best_fit.light_ratio


@pytest.mark.parametrize(
    ("content", "expected"),
    [
        ("{", "JSON as written by vetter evaluate"),
        ("[]", "the name in the system file"),
        ('{"system": "Other"}', "'Corrie 12', the name in the system file"),
        ('{"system": "Corrie 12"}', "keys that this version of vetter evaluate writes"),
    ],
)
def test_what_is_not_a_saved_evaluation(content: str, expected: str, dark: SimpleNamespace, tmp_path: Path) -> None:
    path = tmp_path / "verdicts.json"
    path.write_text(content)
    with pytest.raises(InputError, match=expected):
        read_verdicts(path, "Corrie 12", dark.observations)
    with pytest.raises(InputError, match="can be read"):
        read_verdicts(tmp_path / "none.json", "Corrie 12", dark.observations)


def test_an_older_file_without_the_newer_keys(dark: SimpleNamespace, tmp_path: Path) -> None:
    found = json.loads(to_json(dark.verdicts))
    for row in found["scenarios"]:
        del row["companion_mass_density"]
    path = tmp_path / "verdicts.json"
    path.write_text(json.dumps(found))
    with pytest.raises(InputError, match="companion_mass_density"):
        read_verdicts(path, "Corrie 12", dark.observations)
