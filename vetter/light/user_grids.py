"""Atmospheres of the user's own beside the shipped ones: ``vetter grids add DIR``, then ``--grid NAME``.

A collection (see :mod:`vetter.light.collections`) becomes one table on the shipped wavelengths, with metallicity as a
third axis, kept as NAME.npz in the user's data folder: the environment variable VETTER_GRIDS, else
``~/.local/share/vetter/grids``.
"""

from __future__ import annotations

import os
import re
from collections.abc import Mapping, Sequence
from dataclasses import replace
from pathlib import Path
from typing import Any
from zipfile import BadZipFile

import numpy as np

from vetter.errors import InputError
from vetter.light.collections import Model, read_collection
from vetter.light.reference import surface_flux
from vetter.light.tables import Atmospheres, FloatArray, LightTables, load_tables

SHIPPED = "shipped"
ARRAYS = ("teff_k", "logg", "feh", "ln_flux", "filled")
COVERED_ANGSTROM = (3500.0, 9000.0)
"""Every spectrum must reach over this range; the rest is continued with the shipped spectrum of its Teff and log g."""

STEFAN_BOLTZMANN = 5.670374419e-5  # erg s-1 cm-2 K-4, CODATA 2018
TOTAL_FLUX_RANGE = (0.7, 1.3)
_JOIN_SHARE = 0.03
_LEAST_FLUX = 1e-30
_NAME = re.compile(r"[A-Za-z0-9][A-Za-z0-9_.-]*")


def grids_folder() -> Path:
    """Return the folder of the user's own tables (it need not exist)."""
    own = os.environ.get("VETTER_GRIDS", "")
    return Path(own) if own else Path.home() / ".local" / "share" / "vetter" / "grids"


def add_grid(folder: Path, name: str | None = None) -> dict[str, Any]:
    """Make a table of a collection and keep it under ``name`` (default: the folder's own); return its record.

    An older table of that name is replaced. Raises InputError when the collection cannot be read or is incomplete, or
    the name is not one.
    """
    name = folder.resolve().name if name is None else name
    if not _NAME.fullmatch(name) or name == SHIPPED:
        raise InputError.single(str(folder), "name", name, f"letters, digits, '_', '-', '.'; not '{SHIPPED}'")
    if not folder.is_dir():
        raise InputError.single("grids", "DIR", str(folder), "a folder with a collection of atmospheres")
    arrays = grid_arrays(folder, read_collection(folder), load_tables().atmospheres)
    target = grids_folder() / f"{name}.npz"
    part = target.with_suffix(".part")
    try:
        target.parent.mkdir(parents=True, exist_ok=True)
        with part.open("wb") as stream:
            np.savez_compressed(stream, **arrays)
        part.replace(target)
    except OSError as error:
        raise InputError.single(
            str(target.parent), "", None, f"a folder that can be written ({error.strerror})", "Set VETTER_GRIDS."
        ) from error
    return _record(name, arrays)


def grid_arrays(folder: Path, models: Sequence[Model], shipped: Atmospheres) -> dict[str, Any]:
    """Return the arrays of a table: teff_k, logg, feh, ln_flux (nf, nt, ng, nw) and filled (nf, nt, ng).

    A gravity that is absent takes the nearest one of the same Teff and [Fe/H]. Raises InputError when a Teff is absent
    at some [Fe/H], there are fewer than two Teff or gravities, or a spectrum is too short or not a surface flux.
    """
    teff, logg, feh = (np.unique([getattr(m, axis) for m in models]) for axis in ("teff_k", "logg", "feh"))
    if len(teff) < 2 or len(logg) < 2:
        raise InputError.single(
            str(folder), "models", f"{len(teff)} temperatures and {len(logg)} gravities", "at least two of each"
        )
    ln_flux = np.full((len(feh), len(teff), len(logg), len(shipped.wavelength_angstrom)), np.nan, dtype=np.float32)
    for model in models:
        place = tuple(
            int(np.searchsorted(axis, value))
            for axis, value in ((feh, model.feh), (teff, model.teff_k), (logg, model.logg))
        )
        ln_flux[place] = np.log(np.maximum(on_shipped_nodes(folder, model, shipped), _LEAST_FLUX))
    filled = np.isnan(ln_flux[..., 0])
    for i, j in np.argwhere(filled.all(axis=2)):
        raise InputError.single(
            str(folder),
            "models",
            None,
            f"a model of {teff[j]:g} K at [Fe/H] {feh[i]:g}, as at the other metallicities",
            "Add it or leave that temperature out.",
        )
    for i, j, k in np.argwhere(filled):
        known = np.flatnonzero(~filled[i, j])
        ln_flux[i, j, k] = ln_flux[i, j, known[np.argmin(np.abs(known - k))]]
    return {"teff_k": teff, "logg": logg, "feh": feh, "ln_flux": ln_flux, "filled": filled}


def on_shipped_nodes(folder: Path, model: Model, shipped: Atmospheres) -> FloatArray:
    """Return the surface flux (nw,) of one model on the shipped wavelengths.

    Where a node's bin holds three or more samples it takes their mean, else ln(F lambda^4) is interpolated in
    ln lambda. Raises InputError when the spectrum is too short or its total is far from sigma Teff^4.
    """
    node, wave = shipped.wavelength_angstrom, model.wavelength_angstrom
    key = f"model {model.teff_k:g} K, log g {model.logg:g}, [Fe/H] {model.feh:g}"
    if wave[0] > COVERED_ANGSTROM[0] or wave[-1] < COVERED_ANGSTROM[1]:
        expected = f"a spectrum from {COVERED_ANGSTROM[0]:g} to {COVERED_ANGSTROM[1]:g} angstrom at least"
        raise InputError.single(str(folder), key, f"{wave[0]:g} to {wave[-1]:g} angstrom", expected)
    smooth = np.log(np.maximum(model.flux, _LEAST_FLUX) * wave**4)
    flux = np.exp(np.interp(np.log(node), np.log(wave), smooth)) / node**4
    edges = np.concatenate([node[:1], np.sqrt(node[1:] * node[:-1]), node[-1:]])
    summed = np.concatenate([[0.0], np.cumsum(0.5 * (model.flux[1:] + model.flux[:-1]) * np.diff(wave))])
    fine = np.diff(np.searchsorted(wave, edges)) >= 3
    flux[fine] = (np.diff(np.interp(edges, wave, summed)) / np.diff(edges))[fine]
    flux = _continued(node, flux, (wave[0], wave[-1]), surface_flux(shipped, model.teff_k, model.logg))
    total = float(np.trapezoid(flux, node)) / (STEFAN_BOLTZMANN * model.teff_k**4)
    if not TOTAL_FLUX_RANGE[0] <= total <= TOTAL_FLUX_RANGE[1]:
        raise InputError.single(
            str(folder),
            key,
            f"{total:.3g} sigma Teff^4",
            "a surface flux in erg s-1 cm-2 A-1, whose total is sigma Teff^4",
            "Fluxes per steradian are pi times too small, Eddington fluxes 4 times.",
        )
    return flux


def _continued(node: FloatArray, flux: FloatArray, ends: tuple[float, float], shipped: FloatArray) -> FloatArray:
    """Return the flux with the nodes beyond its ends taken from the shipped spectrum, joined to its outermost part."""
    inside = (node >= ends[0]) & (node <= ends[1])
    first, last = np.flatnonzero(inside)[[0, -1]]
    out = flux.copy()
    for outside, near in (
        (slice(0, first), inside & (node <= node[first] * (1.0 + _JOIN_SHARE))),
        (slice(last + 1, None), inside & (node >= node[last] * (1.0 - _JOIN_SHARE))),
    ):
        out[outside] = shipped[outside] * (flux[near].sum() / shipped[near].sum())
    return out


def _stored(name: str) -> Mapping[str, Any]:
    """Return the arrays of one of the user's tables.

    Raises InputError naming the tables there are, or when the file is not a table that this version made.
    """
    path = grids_folder() / f"{name}.npz"
    if not path.is_file():
        there = ", ".join([SHIPPED, *own_grids()])
        raise InputError.single("grids", "grid", name, f"one of: {there}", "Make one with `vetter grids add DIR`.")
    expected, mend = "a table made by this version of vetter", "Make it again with `vetter grids add DIR`."
    try:
        with np.load(path, allow_pickle=False) as archive:
            stored = {key: archive[key] for key in ARRAYS}
    except (OSError, ValueError, KeyError, EOFError, AttributeError, BadZipFile) as error:
        raise InputError.single(str(path), "", None, f"{expected} ({error})", mend) from error
    if stored["ln_flux"].shape[-1:] != load_tables().atmospheres.wavelength_angstrom.shape:
        raise InputError.single(str(path), "ln_flux", stored["ln_flux"].shape, expected, mend)
    return stored


def own_grids() -> list[str]:
    """Return the names of the user's own tables, in alphabetical order."""
    folder = grids_folder()
    return sorted(path.stem for path in folder.glob("*.npz")) if folder.is_dir() else []


def with_user_grid(tables: LightTables, name: str) -> LightTables:
    """Return the tables with the user's own atmospheres beside the shipped ones; "shipped" changes nothing.

    Raises InputError when there is no table of that name.
    """
    if name == SHIPPED:
        return tables
    stored = _stored(name)
    wavelength = tables.atmospheres.wavelength_angstrom
    slices = tuple(
        (float(feh), Atmospheres(wavelength, stored["teff_k"], stored["logg"], ln_flux, filled))
        for feh, ln_flux, filled in zip(stored["feh"], stored["ln_flux"], stored["filled"], strict=True)
    )
    return replace(tables, slices=slices)


def _record(name: str, arrays: Mapping[str, Any]) -> dict[str, Any]:
    """Return one line of :func:`grids_report`."""
    return {
        "name": name,
        "teff_k": [float(arrays["teff_k"][0]), float(arrays["teff_k"][-1])],
        "logg": [float(arrays["logg"][0]), float(arrays["logg"][-1])],
        "feh": [float(value) for value in np.atleast_1d(arrays["feh"])],
        "models": int(np.size(arrays["filled"]) - np.count_nonzero(arrays["filled"])),
    }


def grids_report() -> list[dict[str, Any]]:
    """Return one record per table, the shipped one first: name, range of Teff and log g, [Fe/H], models."""
    shipped = load_tables().atmospheres
    first = _record(SHIPPED, {**vars(shipped), "feh": np.zeros(1)})
    return [first, *(_record(name, _stored(name)) for name in own_grids())]


def render_grids(records: Sequence[Mapping[str, Any]]) -> str:
    """Return :func:`grids_report`'s records as a table."""
    lines = [f"{'grid':<24}{'Teff (K)':>16}{'log g':>12}{'models':>8}  [Fe/H]"]
    for record in records:
        teff, logg = ("{:g} - {:g}".format(*record[key]) for key in ("teff_k", "logg"))
        feh = ", ".join(f"{value:g}" for value in record["feh"])
        lines.append(f"{record['name']:<24}{teff:>16}{logg:>12}{record['models']:>8}  {feh}")
    return "\n".join(lines) + "\n"
