"""The words of five systems, kept: a change is read before it is accepted (see rewrite_golden.py)."""

from __future__ import annotations

from types import ModuleType

import pytest


@pytest.mark.parametrize("name", ["dark_companion", "hidden_star", "ai_phe", "yz_cas", "v404_cyg"])
def test_the_words_are_those_that_were_read(name: str, golden: ModuleType) -> None:
    assert golden.words(name) == (golden.GOLDEN / f"{name}.md").read_text()
