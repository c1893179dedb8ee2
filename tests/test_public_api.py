"""What other people's scripts may lean on: names, signatures and the fields of the result."""

from __future__ import annotations

import dataclasses
import inspect

import pytest

import vetter


def test_the_public_names() -> None:
    assert {"InputError", "Verdicts", "evaluate", "read_system"} <= set(vetter.__all__)
    for name in vetter.__all__:
        assert getattr(vetter, name).__name__ == name
    with pytest.raises(AttributeError, match="no attribute 'frobnicate'"):
        _ = vetter.frobnicate


def test_signatures_only_grow_at_the_end() -> None:
    parameters = list(inspect.signature(vetter.evaluate).parameters)
    assert parameters[:5] == ["system", "scenarios", "seed", "settings", "progress"]
    assert next(iter(inspect.signature(vetter.read_system).parameters)) == "path"


def test_fields_of_the_result() -> None:
    fields = {field.name for field in dataclasses.fields(vetter.Verdicts)}
    assert {"system", "version", "seed", "orbit", "scenarios", "cautions", "observations_absent"} <= fields
    assert {"scenario", "best", "nothing_fits", "to_dict"} <= set(dir(vetter.Verdicts))


@pytest.mark.parametrize("name", vetter.__all__)
def test_public_names_explain_themselves(name: str) -> None:
    assert len(str(getattr(vetter, name).__doc__)) > 40


def test_results_cannot_be_changed() -> None:
    assert vetter.Verdicts.__dataclass_params__.frozen
