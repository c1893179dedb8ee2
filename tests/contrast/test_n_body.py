"""The check by integration."""

from __future__ import annotations

import sys

import numpy as np
import pytest

from vetter import InputError, contrast
from vetter.pairs.members import Members
from vetter.pairs.n_body import n_body_check
from vetter.physics.inner_wave import SeenOrbit
from vetter.system.model import System


def test_without_rebound_there_is_one_clear_message(lindow: System, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setitem(sys.modules, "rebound", None)
    with pytest.raises(InputError, match=r"companion-vetter\[outside\]"):
        contrast(lindow, n_body=True)


@pytest.mark.parametrize("e", [0.0, 0.2])
def test_prediction_and_integration_agree(e: float) -> None:
    pytest.importorskip("rebound")
    one = np.ones(1)
    pair = Members(0.7 * one, 0.5 * one, 1.2 * one, 0.8 * one, 0.3 * one, 40.0 * one)
    check = n_body_check(pair, 12.0, SeenOrbit(200.0, e, 0.6))
    assert check.lasts
    assert check.integrated_km_s == pytest.approx(check.predicted_km_s, rel=0.08)
    # Wave and apsidal motion explain nearly all of what a Keplerian orbit leaves.
    assert check.left_km_s < 0.15 * check.without_wave_km_s


def test_an_unstable_triple_breaks_up() -> None:
    pytest.importorskip("rebound")
    one = np.ones(1)
    pair = Members(0.7 * one, 0.5 * one, 1.2 * one, one, 0.3 * one, 40.0 * one)
    assert not n_body_check(pair, 90.0, SeenOrbit(200.0, 0.2, 0.6)).lasts
