"""The mean dwarf sequence: the shipped numbers, and an independent mass-luminosity relation."""

from __future__ import annotations

from importlib.resources import files

import numpy as np
import pytest

from vetter.stars.dwarf_table import dwarf_sequence, mean_dwarf, read_columns


def test_rows_come_back() -> None:
    # M0V, M4V and K5V of Pecaut & Mamajek 2013, version 2022.04.16.
    for mass, log_l, radius in ((0.57, -1.16, 0.588), (0.23, -2.14, 0.274), (0.70, -0.76, 0.701)):
        ln_l, ln_r = mean_dwarf(np.log(mass))
        assert ln_l / np.log(10.0) == pytest.approx(log_l, abs=1e-9)
        assert np.exp(ln_r) == pytest.approx(radius, rel=1e-9)


def test_temperature_follows_from_luminosity_and_radius() -> None:
    # The table rounds log L to 0.01 and R to three digits: T4 agrees with its Teff to 1.5 % at the most.
    columns = read_columns(files("vetter.grids"), ("mass_msun", "log_luminosity_lsun", "radius_rsun", "teff_k"))
    rows = (columns["mass_msun"] >= 0.077) & (columns["mass_msun"] <= 0.8)
    teff = 5772.0 * 10.0 ** (columns["log_luminosity_lsun"] / 4.0) / np.sqrt(columns["radius_rsun"])
    assert teff[rows] == pytest.approx(columns["teff_k"][rows], rel=0.015)


def test_masses_against_an_independent_relation() -> None:
    # Mann et al. 2019, ApJ 871, 63, mass from M_Ks (coefficients from memory); they agree to 3 %, at worst 7 %.
    columns = read_columns(files("vetter.grids"), ("mass_msun", "M_Ks"))
    mass, x = columns["mass_msun"], columns["M_Ks"] - 7.5
    rows = (mass >= 0.078) & (mass <= 0.65)
    log_mass = -0.642 - 0.208 * x - 8.43e-4 * x**2 + 7.87e-3 * x**3 + 1.42e-4 * x**4 - 2.13e-4 * x**5
    ratio = 10.0 ** log_mass[rows] / mass[rows]
    assert np.max(np.abs(ratio - 1.0)) < 0.07
    assert np.median(np.abs(ratio - 1.0)) < 0.03


def test_table_is_ordered_and_read_only() -> None:
    table = dwarf_sequence()
    assert np.all(np.diff(table.ln_mass) > 0.0)
    assert np.all(np.diff(table.ln_luminosity) > 0.0)
    with pytest.raises(ValueError, match="read-only"):
        table.ln_mass[0] = 0.0


def test_unknown_column_is_named() -> None:
    with pytest.raises(KeyError, match="colour"):
        read_columns(files("vetter.grids"), ("colour",))
