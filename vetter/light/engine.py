"""The light engine: built once for the bands and windows of a fit, then magnitudes of thousands of stars per call."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import ArrayLike, NDArray

from vetter.errors import InputError
from vetter.light import model_error
from vetter.light.extinction import extinction_curve
from vetter.light.magnitude_grid import MagnitudeGrid
from vetter.light.metallicity import MetallicityCorrection, StarGrid, follows_metallicity
from vetter.light.passbands import custom_passband, find_band, window_weights
from vetter.light.synthesis import Columns, magnitude_grid
from vetter.light.tables import FloatArray, LightTables, ModelErrorTable, Passband, load_tables
from vetter.light.user_grids import SHIPPED, with_user_grid
from vetter.light.white_dwarfs import column_magnitudes, white_dwarf_grid, with_hot_end

if TYPE_CHECKING:
    from vetter.system.model import CustomPassband

Window = tuple[float, float]

KINDS = ("star", "white_dwarf", "helium_white_dwarf")
MIN_A_V_MAX_MAG = 0.1


@dataclass(frozen=True)
class Component:
    """One kind of body, n samples of it; every array has shape (n,).

    ``kind`` is "star" (any photosphere, helium stars too), "white_dwarf" (hydrogen surface, DA) or
    "helium_white_dwarf" (DB). Units: K, log10 of cm/s2, dex, solar radii; a radius of zero is no light. ``feh`` of a
    star changes its light between 4700 and 10000 A with the shipped atmospheres and everywhere with a grid that has a
    metallicity axis; elsewhere it only enlarges the model error.
    """

    kind: str
    teff_k: FloatArray
    logg: FloatArray
    feh: FloatArray
    radius_rsun: FloatArray

    def __post_init__(self) -> None:
        """Raise ValueError for an unknown kind."""
        if self.kind not in KINDS:
            raise ValueError(f"component kind {self.kind!r}: expected one of {', '.join(KINDS)}")


@dataclass(frozen=True, eq=False)
class LightEngine:
    """Magnitudes in fixed columns: the bands in their order, then the windows.

    Attributes
    ----------
    bands : canonical identifiers
    windows_nm : (low, high) in nm
    systems : "Vega" or "AB", one per band
    pivots_angstrom : pivot wavelength per column; the middle for a window
    r_v, a_v_max_mag : shape of the dust law and largest dust column the engine was built for
    grid : name of the atmospheres
    """

    bands: tuple[str, ...]
    windows_nm: tuple[Window, ...]
    systems: tuple[str, ...]
    pivots_angstrom: tuple[float, ...]
    r_v: float
    a_v_max_mag: float
    grid: str
    _stars: StarGrid = field(repr=False)
    _white_dwarfs: Mapping[str, MagnitudeGrid] = field(repr=False)
    _passbands: Mapping[str, Passband] = field(repr=False)
    _model_errors: ModelErrorTable = field(repr=False)

    @property
    def columns(self) -> tuple[str | Window, ...]:
        """The columns of every magnitude array, in order."""
        return (*self.bands, *self.windows_nm)

    @classmethod
    def build(
        cls,
        bands: Sequence[str],
        windows_nm: Sequence[Window] = (),
        r_v: float = 3.1,
        a_v_max_mag: float = 3.0,
        systems: Mapping[str, str] | None = None,
        passbands: Sequence[CustomPassband] = (),
        tables: LightTables | None = None,
        grid: str | None = None,
    ) -> LightEngine:
        """Make an engine for these bands (identifiers or synonyms) and windows (nm).

        ``systems`` maps a band to "Vega" or "AB" where not its usual one; ``passbands`` are the user's own, named in
        ``bands`` like the others; ``tables`` default to the shipped ones; ``grid`` names atmospheres of the user's own
        (see :mod:`vetter.light.user_grids`). Raises InputError for an unknown band or grid, a window outside the
        tables, R_V outside the law, or a system that a band has no zero point in.
        """
        tables = tables or load_tables()
        grid = SHIPPED if grid is None else grid
        tables = with_user_grid(tables, grid)
        wavelength = tables.atmospheres.wavelength_angstrom
        known = {**tables.passbands, **{own.id: custom_passband(own, wavelength) for own in passbands}}
        chosen = [find_band(name, known) for name in bands]
        asked = {find_band(name, known).id: system for name, system in (systems or {}).items()}
        in_system = tuple(asked.get(band.id, band.usual_system) for band in chosen)
        windows = tuple((float(low), float(high)) for low, high in windows_nm)
        if not chosen and not windows:
            raise ValueError("an engine needs at least one band or window")
        weights = [band.weights for band in chosen] + [window_weights(wavelength, window) for window in windows]
        zero_flux = [_zero_flux(band, system) for band, system in zip(chosen, in_system, strict=True)]
        pivots = [band.pivot_angstrom for band in chosen] + [5.0 * (low + high) for low, high in windows]
        columns = Columns(
            np.array(weights),
            np.array(zero_flux + [1.0] * len(windows)),
            np.array(pivots),
            extinction_curve(tables.dust, wavelength, r_v),
        )
        names = tuple(band.id for band in chosen)
        a_v_max_mag = max(float(a_v_max_mag), MIN_A_V_MAX_MAG)
        stars, dwarfs = _grids(tables, columns, names, a_v_max_mag)
        errors = tables.model_errors
        return cls(names, windows, in_system, tuple(pivots), r_v, a_v_max_mag, grid, stars, dwarfs, known, errors)

    def magnitudes(self, component: Component, distance_pc: ArrayLike, a_v_mag: ArrayLike) -> FloatArray:
        """Return apparent magnitudes (n, n_columns) of n bodies at ``distance_pc`` (> 0) behind ``a_v_mag``.

        Both broadcast to (n,). A window's column is -2.5 log10 of the mean F_lambda (erg s-1 cm-2 A-1) in it, so the
        light ratio of two bodies is 10^(-0.4 (m2 - m1)). Temperature and gravity outside the tables are clamped (see
        :meth:`inside`); NaN in gives NaN out. Raises ValueError when ``a_v_mag`` leaves the range built for.
        """
        n = len(component.teff_k)
        a_v = np.broadcast_to(np.asarray(a_v_mag, dtype=float), n)
        if n and (a_v.min() < 0.0 or a_v.max() > self.a_v_max_mag * (1.0 + 1e-12)):
            raise ValueError(f"a_v_mag {a_v.min()} to {a_v.max()}: the engine was built for 0 to {self.a_v_max_mag}")
        if component.kind == "star":
            feh = np.broadcast_to(np.asarray(component.feh, dtype=float), n)
            magnitudes = self._stars.evaluate(component.teff_k, component.logg, feh, a_v)
        else:
            magnitudes = self._white_dwarf_grid(component.kind).evaluate(component.teff_k, component.logg, a_v)
        with np.errstate(divide="ignore"):
            dilution = 5.0 * np.log10(np.asarray(distance_pc, dtype=float) / (10.0 * component.radius_rsun))
        magnitudes += np.broadcast_to(dilution, n)[:, None]
        return magnitudes

    def inside(self, component: Component) -> NDArray[np.bool_]:
        """Return (n,) True where the tables reach: those of the user's own where the engine was built with them.

        Stars above log g 5 count as inside: their light is that of log g 5. White dwarfs of any gravity do too.
        """
        if component.kind == "star":
            return self._stars.reaches(component.teff_k, component.logg)
        grid, ln_teff = self._white_dwarf_grid(component.kind), np.log(component.teff_k)
        return np.asarray((ln_teff >= grid.ln_teff[0]) & (ln_teff <= grid.ln_teff[-1]))

    def _white_dwarf_grid(self, kind: str) -> MagnitudeGrid:
        """Return the grid of one kind of white dwarf. Raises ValueError when the tables lack it."""
        if kind not in self._white_dwarfs:
            raise ValueError(f"component kind {kind!r}: these tables have none")
        return self._white_dwarfs[kind]

    def model_error_mag(self, band: str, teff_k: ArrayLike, logg: ArrayLike, feh: ArrayLike = 0.0) -> FloatArray:
        """Return the one-sigma error (mag) of a synthetic magnitude in ``band``; the arrays broadcast."""
        teff, gravity, metals = (np.asarray(value, dtype=float) for value in (teff_k, logg, feh))
        found = find_band(band, self._passbands)
        known = self.metallicity_known(found.id)
        return model_error.model_error_mag(
            self._model_errors, found, self._passbands, teff, gravity, metals, metallicity_known=known
        )

    def metallicity_known(self, band: str) -> bool:
        """Return whether [Fe/H] changes the light of stars in this band."""
        if len(self._stars.slices) > 1:
            return True
        return self._stars.correction is not None and follows_metallicity(
            find_band(band, self._passbands).pivot_angstrom
        )

    def zero_flux(self, band: str) -> float:
        """Return the flux (erg s-1 cm-2 A-1) of magnitude zero in one of the engine's bands, in its system here."""
        return _zero_flux(self._passbands[band], self.systems[self.bands.index(band)])

    def total_magnitudes(self, magnitudes: Sequence[FloatArray]) -> FloatArray:
        """Return the magnitudes (n, k) of the summed light; see :func:`total_magnitudes`."""
        return total_magnitudes(magnitudes)


def total_magnitudes(magnitudes: Sequence[FloatArray]) -> FloatArray:
    """Return the magnitudes (n, k) of the summed light of bodies whose magnitudes are (n, k) each.

    Raises ValueError when the list is empty.
    """
    if not magnitudes:
        raise ValueError("the sum of no light has no magnitude")
    to_ln = -0.4 * np.log(10.0)
    total = to_ln * np.asarray(magnitudes[0], dtype=float)
    for magnitude in magnitudes[1:]:
        total = np.logaddexp(total, to_ln * magnitude)
    return np.asarray(total / to_ln)


def _grids(
    tables: LightTables, columns: Columns, bands: tuple[str, ...], a_v_max_mag: float
) -> tuple[StarGrid, dict[str, MagnitudeGrid]]:
    """Return the grids of stars and, by kind, of white dwarfs; where the user's own end, the shipped ones stand in."""
    solar = magnitude_grid(tables.atmospheres, columns, a_v_max_mag)
    wavelength = tables.atmospheres.wavelength_angstrom
    dwarfs = {
        kind: white_dwarf_grid(table, column_magnitudes(table, bands, columns, tables.passbands, wavelength), solar)
        for kind, table in (("white_dwarf", tables.white_dwarfs), ("helium_white_dwarf", tables.helium_white_dwarfs))
        if table is not None
    }
    table, names = tables.metallicity, (*bands, *[""] * (len(columns.pivot_angstrom) - len(bands)))
    correction = (
        None
        if table is None
        else MetallicityCorrection.of(table, names, columns.pivot_angstrom.tolist(), tables.passbands)
    )
    shipped = StarGrid(np.zeros(1), (with_hot_end(solar, dwarfs["white_dwarf"]),), correction)
    if not tables.slices:
        return shipped, dwarfs
    slices = tuple(magnitude_grid(part, columns, a_v_max_mag) for _, part in tables.slices)
    return StarGrid(np.array([feh for feh, _ in tables.slices]), slices, beyond=shipped), dwarfs


def _zero_flux(band: Passband, system: str) -> float:
    """Return the flux of magnitude zero of a band in a system."""
    if system not in band.zero_flux:
        expected = " or ".join(band.zero_flux)
        raise InputError.single("light", f"system of {band.id}", system, f"{expected} for this band")
    return band.zero_flux[system]
