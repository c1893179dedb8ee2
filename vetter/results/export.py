"""Machine-readable results: JSON, CSV and ECSV, and writing many files as if they were one."""

from __future__ import annotations

import csv
import io
import json
import shutil
import tempfile
from collections.abc import Mapping
from pathlib import Path
from typing import Any

from vetter.results.verdicts import Verdicts

COLUMNS: Mapping[str, tuple[str, str]] = {
    "scenario": ("string", ""),
    "title": ("string", ""),
    "verdict": ("string", ""),
    "sigma": ("float64", ""),
    "companion_mass_low_msun": ("float64", "solMass"),
    "companion_mass_median_msun": ("float64", "solMass"),
    "companion_mass_high_msun": ("float64", "solMass"),
    "ln_likelihood_max": ("float64", ""),
    "chi2_min": ("float64", ""),
    "n_data": ("int64", ""),
    "n_free": ("int64", ""),
    "fit_p_value": ("float64", ""),
    "ln_evidence": ("float64", ""),
    "ln_evidence_error": ("float64", ""),
    "posterior_odds_to_best": ("float64", ""),
    "closed_because": ("string", ""),
}
"""Columns of the flat tables: data type and unit, as ECSV writes them."""


def to_json(verdicts: Verdicts) -> str:
    """Return verdicts.json. Numbers are written in full; what does not exist is null."""
    return json.dumps(verdicts.to_dict(), indent=1, allow_nan=False) + "\n"


def to_csv(verdicts: Verdicts) -> str:
    """Return the table as CSV; an empty cell where there is no number."""
    return _delimited(verdicts, ",")


def to_ecsv(verdicts: Verdicts) -> str:
    """Return the table as ECSV 1.0 (the Enhanced Character Separated Values of the Astropy project)."""
    header = ["%ECSV 1.0", "---", "datatype:"]
    for name, (kind, unit) in COLUMNS.items():
        header.append(f"- {{name: {name}, {f'unit: {unit}, ' if unit else ''}datatype: {kind}}}")
    header += ["delimiter: ','", f"meta: {{system: {json.dumps(verdicts.system)}, version: {verdicts.version}, "]
    header[-1] += f"seed: {verdicts.seed}}}"
    return "".join(f"# {line}\n" for line in header) + _delimited(verdicts, ",")


def _delimited(verdicts: Verdicts, delimiter: str) -> str:
    text = io.StringIO()
    writer = csv.writer(text, delimiter=delimiter, lineterminator="\n")
    writer.writerow(COLUMNS)
    for record in records(verdicts):
        writer.writerow(["" if record[name] is None else record[name] for name in COLUMNS])
    return text.getvalue()


def records(verdicts: Verdicts) -> list[dict[str, Any]]:
    """Return one flat record per scenario with the keys of ``COLUMNS``."""
    rows = []
    for scenario in verdicts.scenarios:
        low, median, high = scenario.companion_mass_msun or (None, None, None)
        row = {name: getattr(scenario, name, None) for name in COLUMNS}
        row |= {
            "scenario": scenario.name,
            "companion_mass_low_msun": low,
            "companion_mass_median_msun": median,
            "companion_mass_high_msun": high,
        }
        rows.append(row)
    return rows


def write_whole(directory: Path, files: Mapping[str, str | bytes]) -> list[Path]:
    """Write ``files`` (name -> content) into ``directory``: all of them, or none.

    They are made in a temporary folder on the same disk and moved only when every one is complete. Raises OSError
    when the folder cannot be made or written.
    """
    directory.mkdir(parents=True, exist_ok=True)
    staging = Path(tempfile.mkdtemp(prefix=".vetter-", dir=directory))
    try:
        for name, content in files.items():
            (staging / name).write_bytes(content.encode() if isinstance(content, str) else content)
        return [(staging / name).replace(directory / name) for name in files]
    finally:
        shutil.rmtree(staging, ignore_errors=True)
