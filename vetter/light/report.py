"""What the commands ``vetter light`` and ``vetter bands`` print, as plain dictionaries.

``vetter grids`` is in :mod:`vetter.light.user_grids`, ``vetter grids --errors`` in :mod:`vetter.light.error_report`.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from textwrap import wrap
from typing import Any

import numpy as np

from vetter.errors import Fault, InputError
from vetter.light.engine import Component, LightEngine, Window, total_magnitudes
from vetter.light.passbands import JANSKY, SPEED_OF_LIGHT_ANGSTROM_S
from vetter.light.tables import FloatArray, LightTables, load_tables
from vetter.light.user_grids import SHIPPED
from vetter.system.bands import canonical_band

Star = Sequence[float]
"""Teff (K), log g (log10 cm/s2), radius (solar) and, when it is not 0, [Fe/H] (dex)."""

WHITE_DWARF_LOGG = 7.0
"""From this gravity on a star is a white dwarf with a hydrogen surface: where the published tables begin."""

STAR_LIMITS = (("teff_k", 500.0, 500000.0), ("logg", -2.0, 10.0), ("radius_rsun", 1e-6, 1e5), ("feh", -6.0, 1.5))


def _check(stars: Sequence[Star], windows_nm: Sequence[Sequence[float]], distance_pc: float, ebv_mag: float) -> None:
    """Raise one InputError with every fault in the numbers."""
    faults = [
        Fault(f"star {i + 1} {name}", repr(value), f"a number from {low:g} to {high:g}", "")
        for i, star in enumerate(stars)
        for value, (name, low, high) in zip(star, STAR_LIMITS, strict=False)
        if not low <= value <= high
    ]
    faults += [
        Fault(f"star {i + 1}", repr(tuple(star)), "three or four numbers", "Give TEFF,LOGG,RADIUS[,FEH].")
        for i, star in enumerate(stars)
        if len(star) not in (3, 4)
    ]
    faults += [
        Fault("window", repr(tuple(window)), "two wavelengths in nm", "Give LO-HI.")
        for window in windows_nm
        if len(window) != 2
    ]
    if not stars:
        faults.append(Fault("star", "", "at least one star", "Give --star TEFF,LOGG,RADIUS[,FEH]."))
    if not 0.0 < distance_pc < np.inf:
        faults.append(Fault("distance_pc", repr(distance_pc), "a positive number of parsecs", ""))
    if not 0.0 <= ebv_mag <= 10.0:
        faults.append(Fault("ebv_mag", repr(ebv_mag), "a number from 0 to 10", ""))
    if faults:
        raise InputError("light", faults)


def _body(star: Star) -> Component:
    """Return one body; its gravity says whether it is a star or a white dwarf."""
    teff_k, logg, radius_rsun, feh = (np.array([value], dtype=float) for value in [*star, 0.0][:4])
    return Component("star" if logg[0] < WHITE_DWARF_LOGG else "white_dwarf", teff_k, logg, feh, radius_rsun)


def _cautions(engine: LightEngine, bodies: Sequence[Component]) -> list[str]:
    """Return a sentence for every star whose light is not what the tables were made for."""
    instead = "tables: the nearest surface stands in"
    if engine.grid != SHIPPED:
        instead = f"atmospheres {engine.grid!r}: the shipped ones stand in"
    cautions = [
        f"star {place} lies outside the {instead}"
        for place, body in enumerate(bodies, start=1)
        if not engine.inside(body)[0]
    ]
    cautions += [
        f"star {place} is taken for a white dwarf with a hydrogen surface (log g {WHITE_DWARF_LOGG:g} or more)"
        for place, body in enumerate(bodies, start=1)
        if body.kind == "white_dwarf"
    ]
    metals = any(body.kind == "star" and body.feh.any() for body in bodies)
    if metals and not all(map(engine.metallicity_known, engine.bands)):
        cautions.append(
            "[Fe/H] changes the light from 470 to 1000 nm only; other bands are those of solar atmospheres, with a "
            "larger error"
        )
    return cautions


def light_report(
    stars: Sequence[Star],
    distance_pc: float,
    ebv_mag: float = 0.0,
    r_v: float = 3.1,
    bands: Sequence[str] = (),
    windows_nm: Sequence[Sequence[float]] = (),
    tables: LightTables | None = None,
    grid: str | None = None,
) -> dict[str, Any]:
    """Return magnitudes of each star and of their sum, and light ratios to the first star in windows.

    The form is ``{"bands": {id: {"system", "total_mag", "star_mag": [...]}}, "windows": [{"wavelength_nm",
    "ratio_to_first": [...]}]}``; a list ``cautions`` is added when there is something to say. Without ``bands`` all
    that are built in are reported. A_V = R_V E(B-V). ``grid`` names atmospheres of the user's own. From log g 7 on a
    star is a white dwarf. Raises InputError naming everything that is out of range.
    """
    _check(stars, windows_nm, distance_pc, ebv_mag)
    tables = tables or load_tables()
    names = [canonical_band(name) or name for name in bands or tables.passbands]
    windows: list[Window] = [(low, high) for low, high in windows_nm]
    a_v_mag = r_v * ebv_mag
    engine = LightEngine.build(names, windows, r_v=r_v, a_v_max_mag=a_v_mag, tables=tables, grid=grid)
    bodies = [_body(star) for star in stars]
    report = _tabulated(engine, np.vstack([engine.magnitudes(body, distance_pc, a_v_mag) for body in bodies]))
    if cautions := _cautions(engine, bodies):
        report["cautions"] = cautions
    return report


def _tabulated(engine: LightEngine, magnitudes: FloatArray) -> dict[str, Any]:
    """Return the magnitudes (n, n_columns) of n stars as :func:`light_report` names them."""
    total = total_magnitudes([row[None] for row in magnitudes])[0]
    ratios = 10.0 ** (-0.4 * (magnitudes - magnitudes[0]))
    return {
        "bands": {
            band: {"system": system, "total_mag": float(total[j]), "star_mag": magnitudes[:, j].tolist()}
            for j, (band, system) in enumerate(zip(engine.bands, engine.systems, strict=True))
        },
        "windows": [
            {"wavelength_nm": list(window), "ratio_to_first": ratios[:, len(engine.bands) + j].tolist()}
            for j, window in enumerate(engine.windows_nm)
        ],
    }


def bands_report(tables: LightTables | None = None) -> list[dict[str, Any]]:
    """Return one record per built-in band, in order of pivot wavelength.

    Keys: id, synonyms, system (the usual one), type (all are photon counters), pivot_nm, width_nm, zero_point_jy (flux
    density of magnitude zero in the usual system at the pivot wavelength), zero_flux_vega and zero_flux_ab (the same in
    either system, erg s-1 cm-2 A-1), source (where the curve was taken from) and reference (who measured it).
    """
    passbands = (tables or load_tables()).passbands.values()
    per_jansky = JANSKY * SPEED_OF_LIGHT_ANGSTROM_S
    return [
        {
            "id": band.id,
            "synonyms": list(band.synonyms),
            "system": band.usual_system,
            "type": "photon",
            "pivot_nm": band.pivot_angstrom / 10.0,
            "width_nm": band.width_angstrom / 10.0,
            "zero_point_jy": band.zero_flux[band.usual_system] * band.pivot_angstrom**2 / per_jansky,
            "zero_flux_vega": band.zero_flux["Vega"],
            "zero_flux_ab": band.zero_flux["AB"],
            "source": band.source,
            "reference": band.reference,
        }
        for band in sorted(passbands, key=lambda band: band.pivot_angstrom)
    ]


def render_light(report: Mapping[str, Any]) -> str:
    """Return :func:`light_report`'s dictionary as a table, one line per band and per window."""
    lines: list[str] = []
    for band, entry in report["bands"].items():
        if not lines:
            stars = "".join(f"{f'star {i + 1}':>10}" for i in range(len(entry["star_mag"])))
            lines.append(f"{'band':<24}{'system':<8}{'total':>10}{stars}")
        star_mag = "".join(f"{magnitude:10.3f}" for magnitude in entry["star_mag"])
        lines.append(f"{band:<24}{entry['system']:<8}{entry['total_mag']:10.3f}{star_mag}")
    for window in report["windows"]:
        low, high = window["wavelength_nm"]
        ratios = "".join(f"{ratio:10.3g}" for ratio in window["ratio_to_first"])
        lines.append(f"{f'light ratio to star 1, {low:g}-{high:g} nm':<42}{ratios}")
    return "\n".join([*lines, *report.get("cautions", ())]) + "\n"


def render_bands(records: Sequence[Mapping[str, Any]]) -> str:
    """Return :func:`bands_report`'s records as a table, and below it which package each curve was taken from."""
    lines = [f"{'band':<24}{'system':<8}{'type':<8}{'pivot nm':>10}{'width nm':>10}{'zero Jy':>9}  reference"]
    packages: dict[str, list[str]] = {}
    for band in records:
        numbers = f"{band['pivot_nm']:10.2f}{band['width_nm']:10.2f}{band['zero_point_jy']:9.5g}"
        reference = band["reference"].split(" (")[0][:48]
        lines.append(f"{band['id']:<24}{band['system']:<8}{band['type']:<8}{numbers}  {reference}")
        packages.setdefault(" ".join(band["source"].split()[:2]), []).append(band["id"])
    lines += ["", "curves taken from (the file in each package: --json)"]
    for package, names in packages.items():
        lines += wrap(f"{package}: {', '.join(names)}", 116, initial_indent="  ", subsequent_indent="    ")
    return "\n".join(lines) + "\n"
