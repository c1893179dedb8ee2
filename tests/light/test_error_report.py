"""The table of model errors that ``vetter grids --errors`` prints."""

from __future__ import annotations

import json

import pytest

from vetter.light import LightEngine
from vetter.light.error_report import PRINTED_TEFF_K, errors_report, render_errors
from vetter.light.tables import LightTables, load_tables


def test_one_record_per_band_in_order_of_wavelength() -> None:
    records = errors_report()
    assert {record["id"] for record in records} == set(load_tables().passbands)
    pivots = [record["pivot_nm"] for record in records]
    assert pivots == sorted(pivots)
    assert json.loads(json.dumps(records)) == records


def test_numbers_are_those_of_the_engine() -> None:
    engine = LightEngine.build(["Generic/Johnson.V"])
    for record in errors_report():
        for teff, dwarf, giant in zip(record["teff_k"], record["dwarf_mag"], record["giant_mag"], strict=True):
            assert dwarf == pytest.approx(float(engine.model_error_mag(record["id"], teff, 4.5)), rel=1e-12)
            assert giant == pytest.approx(float(engine.model_error_mag(record["id"], teff, 2.0)), rel=1e-12)


def test_metallicity_term_is_small_where_the_light_follows_it(world: LightTables) -> None:
    at_6000 = {r["id"]: r["per_dex_mag"][r["teff_k"].index(6000.0)] for r in errors_report()}
    assert at_6000["GAIA/GAIA3.G"] == at_6000["Generic/Johnson.V"] == pytest.approx(0.03)
    assert at_6000["Generic/Johnson.U"] == pytest.approx(0.4)
    solar_only = {r["id"]: r["per_dex_mag"][0] for r in errors_report(world)}
    assert solar_only["Generic/Johnson.V"] == pytest.approx(0.07)


def test_printed_table_fits_and_rounds_to_millimagnitudes() -> None:
    records = errors_report()
    lines = render_errors(records).splitlines()
    assert len(lines) == len(records) + 3
    assert max(map(len, lines)) <= 120
    visual = next(line for line in lines if line.startswith("Generic/Johnson.V"))
    record = next(r for r in records if r["id"] == "Generic/Johnson.V")
    column = PRINTED_TEFF_K.index(5500)
    assert int(visual.split()[1 + column]) == round(1000 * record["dwarf_mag"][record["teff_k"].index(5500.0)])
