"""Mutated files: the reader returns a system whose values equal the file's, or raises InputError, and nothing else."""

from __future__ import annotations

import math
import re
import tomllib
from collections.abc import Mapping
from pathlib import Path
from typing import Any

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from vetter.errors import InputError
from vetter.system import System, canonical_band, read_system
from vetter.system.model import Measurement

ODD_VALUES = [
    "true", "false", '""', '"x"', '"1.5"', "nan", "-nan", "inf", "-inf", "0", "-0.0", "-1", "1", "0.5", "1e400",
    "1e-400", "1e300", "99999999999999999999", "0x10", "1_000", "[]", "[1]", "[[1]]", "[1, 2]", "[2, 1]", "{}",
    "{a = 1}", "1979-05-27", "1979-05-27T07:32:00Z", "07:32:00", '"G"', '"Vega"', '"none"', "'''a\nb'''", "", "é",
    '"\\u0000"', '"."', '"more.csv"',
]  # fmt: skip
PIECES = [*"=[]\"'\n#,.-09e_ \0\ré{}", "[[", "]]"]

NUMBER = re.compile(r"-?[0-9.]+")
# A nudge mostly leaves the file valid, with other values, so that being accepted is tried as often as being refused.
ACTIONS = ["nudge"] * 8 + ["value", "key", "drop", "repeat", "swap", "characters", "cut"]


@st.composite
def mutated(draw: st.DrawFn, text: str) -> str:
    """Return the text after one to four changes of a value, a key, a line or a few characters."""
    for _ in range(draw(st.integers(1, 4))):
        lines = text.split("\n")
        at = draw(st.integers(0, len(lines) - 1))
        action = draw(st.sampled_from(ACTIONS))
        key, equals, value = lines[at].partition(" = ")
        if action == "value" and equals:
            lines[at] = f"{key} = {draw(st.sampled_from(ODD_VALUES))}"
        elif action == "nudge" and NUMBER.fullmatch(value):
            lines[at] = f"{key} = {float(value) * draw(st.floats(0.97, 1.0))!r}"
        elif action == "key":
            place = draw(st.integers(0, max(len(key) - 1, 0)))
            lines[at] = lines[at][:place] + lines[at][place + 1 :]
        elif action == "drop":
            del lines[at]
        elif action == "repeat":
            lines.insert(draw(st.integers(0, len(lines))), lines[at])
        elif action == "swap":
            other = draw(st.integers(0, len(lines) - 1))
            lines[at], lines[other] = lines[other], lines[at]
        text = "\n".join(lines)
        if action == "characters":
            place = draw(st.integers(0, max(len(text) - 1, 0)))
            text = text[:place] + draw(st.sampled_from(PIECES)) + text[place + draw(st.integers(0, 2)) :]
        elif action == "cut":
            text = text[: draw(st.integers(0, len(text)))]
    return text


def _same(given_value: object, read_value: object) -> bool:
    """Return whether a value of the file and one of the system say the same."""
    if isinstance(given_value, list):
        assert isinstance(read_value, tuple)
        pairs = zip(given_value, read_value, strict=True)
        return all(_same(mine, theirs) for mine, theirs in pairs)
    if isinstance(given_value, (int, float)):
        assert type(read_value) is float
        assert math.isfinite(read_value)
        return math.isclose(given_value, read_value, rel_tol=1e-15)
    assert isinstance(given_value, str)
    assert isinstance(read_value, str)
    return given_value == read_value or given_value.strip().casefold() == read_value.casefold()


def _compare(table: Mapping[str, Any], record: object, *, skip: tuple[str, ...] = ()) -> None:
    """Check every key of a table of the file against the record's field, or against its measurement's error."""
    for key, value in table.items():
        if key in skip:
            continue
        if key == "band" or key.endswith("_band"):
            found = getattr(record, key)
            assert found in (canonical_band(value), value.strip())
        elif "error" in key and not hasattr(record, key):
            owner = key.replace("_error", "")
            measured = getattr(record, owner)
            assert isinstance(measured, Measurement)
            assert _same(value, measured.error)
        else:
            found = getattr(record, key)
            assert _same(value, found.value if isinstance(found, Measurement) else found)


def check_equal(system: System, raw: Mapping[str, Any]) -> None:
    """Check a system against the file's content, parsed independently of the reader."""
    assert system.name == raw["name"]
    for name in ("sky", "extinction", "primary", "variability", "x_ray", "imaging", "assumptions"):
        if name in raw:
            _compare(raw[name], getattr(system, name))
        else:
            assert getattr(system, name) == getattr(System("", "", system.distance, system.orbit, ()), name)
    _compare(raw["orbit"], system.orbit, skip=("thiele_innes",))
    assert system.orbit.eccentricity_given == ("eccentricity" in raw["orbit"])
    if "thiele_innes" in raw["orbit"]:
        _compare(raw["orbit"]["thiele_innes"], system.orbit.thiele_innes)
    distance = dict(raw["distance"])
    zero_point = distance.pop("parallax_zero_point_mas", 0.0)
    if "parallax_mas" in distance:
        distance["parallax_mas"] -= zero_point
    _compare(distance, system.distance)
    _compare_photometry(raw, system)
    assert len(system.light_limits) == len(raw.get("light_limit", []))
    for table, limit in zip(raw.get("light_limit", []), system.light_limits, strict=True):
        _compare(table, limit)
    assert dict(system.prior_odds) == raw.get("prior_odds", {})
    assert (system.velocities is None) == ("velocities" not in raw)
    assert [band.id for band in system.passbands] == [table["id"].strip() for table in raw.get("passband", [])]


def _compare_photometry(raw: Mapping[str, Any], system: System) -> None:
    """Check magnitudes and limits, in the file's order; those of the photometry file come last."""
    entries = raw.get("photometry", [])
    measured = [entry for entry in entries if "mag" in entry]
    extra = 2 if "photometry_file" in raw else 0
    assert len(system.magnitudes) == len(measured) + extra >= 3
    for entry, magnitude in zip(measured, system.magnitudes, strict=False):
        _compare(entry, magnitude)
    limits = [entry for entry in entries if "mag" not in entry]
    for entry, limit in zip(limits, system.magnitude_limits, strict=True):
        _compare(entry, limit)


def _run(folder: Path, text: str) -> bool:
    """Read the text as a file; return whether it was accepted, having checked that acceptance was right."""
    path = folder / "fuzz.toml"
    path.write_bytes(text.encode())
    try:
        system = read_system(path)
    except InputError as error:
        sentences = [fault.sentence() for fault in error.faults]
    else:
        check_equal(system, tomllib.loads(text))
        return True
    assert sentences
    assert not any("\n" in sentence for sentence in sentences)
    return False


RELAXED = [HealthCheck.function_scoped_fixture, HealthCheck.too_slow]


def test_the_unchanged_files_pass_the_comparison(folder: Path, full_text: str, least_text: str) -> None:
    assert _run(folder, full_text)
    assert _run(folder, least_text)


def test_the_comparison_can_fail(folder: Path, full_text: str) -> None:
    (folder / "full.toml").write_text(full_text)
    system = read_system(folder / "full.toml")
    for old, new in (("53.2", "53.3"), ("error_mag = 0.003", "error_mag = 0.004"), ("200]", "201]"), ("0.95", "0.9")):
        with pytest.raises(AssertionError):
            check_equal(system, tomllib.loads(full_text.replace(old, new)))


@settings(max_examples=400, deadline=None, suppress_health_check=RELAXED)
@given(data=st.data())
def test_mutated_full_files(folder: Path, full_text: str, data: st.DataObject) -> None:
    _run(folder, data.draw(mutated(full_text)))


@settings(max_examples=200, deadline=None, suppress_health_check=RELAXED)
@given(data=st.data())
def test_mutated_least_files(folder: Path, least_text: str, data: st.DataObject) -> None:
    _run(folder, data.draw(mutated(least_text)))


@settings(max_examples=150, deadline=None, suppress_health_check=RELAXED)
@given(content=st.binary(min_size=1, max_size=200))
def test_random_bytes_are_refused(folder: Path, content: bytes) -> None:
    (folder / "random.toml").write_bytes(content)
    with pytest.raises(InputError):
        read_system(folder / "random.toml")


@pytest.mark.slow
@settings(max_examples=5000, deadline=None, suppress_health_check=RELAXED)
@given(data=st.data())
def test_very_many_mutated_files(folder: Path, full_text: str, data: st.DataObject) -> None:
    _run(folder, data.draw(mutated(full_text)))
