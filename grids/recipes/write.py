"""Write tables whose bytes depend on their content only."""

from __future__ import annotations

import io
import json
import zipfile
from collections.abc import Mapping
from pathlib import Path
from typing import Any

import numpy as np

_STAMP = (1980, 1, 1, 0, 0, 0)  # the earliest a zip archive can say


def write_npz(path: Path, arrays: Mapping[str, np.ndarray]) -> None:
    """Write a compressed npz with a fixed time stamp and the keys in order, so that equal arrays give equal bytes."""
    with zipfile.ZipFile(path, "w", zipfile.ZIP_DEFLATED, compresslevel=9) as archive:
        for key, value in arrays.items():
            buffer = io.BytesIO()
            np.lib.format.write_array(buffer, np.ascontiguousarray(value), allow_pickle=False)
            info = zipfile.ZipInfo(f"{key}.npy", _STAMP)
            info.compress_type = zipfile.ZIP_DEFLATED
            info.external_attr = 0o644 << 16
            archive.writestr(info, buffer.getvalue(), compresslevel=9)


def write_json(path: Path, content: Any) -> None:  # noqa: ANN401
    """Write JSON with one fixed layout and a final newline."""
    path.write_text(json.dumps(content, indent=1, ensure_ascii=False) + "\n", encoding="utf-8")


def rounded(value: float, digits: int = 7) -> float:
    """Return a float with so many significant digits, to keep text tables short and stable."""
    return float(f"{value:.{digits - 1}e}")
