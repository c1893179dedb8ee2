"""How long a contrast takes; ``OPENBLAS_NUM_THREADS=1 python -m pytest -m slow -s`` on a quiet core."""

from __future__ import annotations

import time
from pathlib import Path

import pytest

from vetter import contrast, read_system

EXAMPLE = Path(__file__).parent.parent.parent / "examples" / "hidden_pair.toml"


@pytest.mark.slow
@pytest.mark.benchmark
def test_contrast_of_forty_epochs_and_ten_bands() -> None:
    system = read_system(EXAMPLE)
    assert system.velocities is not None
    assert len(system.velocities.time_bjd) == 40
    assert len(system.magnitudes) == 10
    contrast(system)
    start = time.process_time()
    contrast(system)
    seconds = time.process_time() - start
    print(f"\ncontrast of 40 epochs and 10 bands, all pairs: {seconds:.1f} s")
    assert seconds < 5.0
