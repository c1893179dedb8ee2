"""The code that makes the tables: analytic cases for each numerical step, and refusals of wrong archives."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

pytest.importorskip("vetter.grids.recipes", reason="the recipes are part of a source checkout only")

from vetter.grids.build import CHECKSUMS_BEGIN, CHECKSUMS_END, write_checksums
from vetter.grids.recipes import (
    atmospheres,
    blue_correction,
    cool_correction,
    hot_stars,
    metallicity,
    model_error,
    sequence,
)
from vetter.grids.recipes.band_list import BANDS
from vetter.grids.recipes.dwarf_sequence import _value
from vetter.grids.recipes.passbands import Curve, _two_columns, hat_weights, mean_flux, tidy
from vetter.grids.recipes.sources import ARCHIVES, Sources, file_sha256
from vetter.grids.recipes.spectra import (
    STEFAN_BOLTZMANN,
    bin_means,
    normalised,
    planck_flux,
    total_flux,
    with_planck_tails,
)
from vetter.grids.recipes.write import rounded, write_npz

NODES = np.geomspace(1000.0, 300000.0, 3000)


@given(st.floats(2500.0, 10000.0))
def test_planck_flux_integrates_to_sigma_t4(teff_k: float) -> None:
    """Within 0.5 %: the grid starts at 1000 A, below which a 10000 K body still holds 0.3 % of its flux."""
    assert total_flux(NODES, planck_flux(NODES, teff_k)) == pytest.approx(STEFAN_BOLTZMANN * teff_k**4, rel=0.005)


def test_planck_flux_peaks_where_wien_says() -> None:
    wavelength = np.linspace(3000.0, 8000.0, 50001)
    peak = wavelength[np.argmax(planck_flux(wavelength, 5772.0))]
    assert peak == pytest.approx(2.897771955e7 / 5772.0, abs=0.2)  # Wien's constant, CODATA 2018, angstrom K


def test_bin_means_of_a_straight_line_are_its_values_at_bin_centres() -> None:
    nodes = np.array([10.0, 20.0, 30.0, 50.0, 90.0])
    fine = np.linspace(0.0, 200.0, 777)
    edges = np.array([5.0, 15.0, 25.0, 40.0, 70.0, 110.0])
    expected = 3.0 + 0.5 * (edges[1:] + edges[:-1]) / 2
    assert bin_means(fine, 3.0 + 0.5 * fine, nodes) == pytest.approx(expected, rel=1e-12)


def test_bin_means_keep_the_total() -> None:
    rng = np.random.default_rng(3)
    fine = np.linspace(0.0, 100.0, 2001)
    flux = rng.uniform(1.0, 2.0, fine.size)
    nodes = np.arange(5.0, 96.0, 10.0)
    assert bin_means(fine, flux, nodes).sum() * 10.0 == pytest.approx(np.trapezoid(flux, fine), rel=1e-12)


def test_bins_outside_the_spectrum_are_not_invented() -> None:
    means = bin_means(np.linspace(20.0, 40.0, 50), np.ones(50), np.array([10.0, 24.0, 30.0, 36.0, 60.0]))
    assert np.isnan(means).tolist() == [True, True, False, True, True]


def test_planck_tails_restore_a_black_body() -> None:
    truth = planck_flux(NODES, 3500.0)
    cut = np.where((NODES > 4000) & (NODES < 24000), truth, np.nan)
    assert with_planck_tails(NODES, cut, 3500.0) == pytest.approx(truth, rel=1e-12)


def test_normalised_has_the_flux_of_its_temperature() -> None:
    flux = normalised(NODES, 7e-19 * planck_flux(NODES, 4000.0), 4300.0)
    assert total_flux(NODES, flux) == pytest.approx(STEFAN_BOLTZMANN * 4300.0**4, rel=1e-12)


def test_two_columns_skips_words_and_takes_the_first_two_numbers() -> None:
    text = "# a header 1 2\n\nKFILTER 10 0.5\n20.0 0.25 9 9\nlambda pass\n30 0\n"
    assert _two_columns(text).tolist() == [[10.0, 0.5], [20.0, 0.25], [30.0, 0.0]]


def test_tidy_sorts_clips_and_trims() -> None:
    rows = np.array([[50.0, 0.0], [10.0, 0.0], [20.0, 0.0], [30.0, 1.0], [30.0, 7.0], [40.0, -0.1], [60.0, 0.0]])
    curve = tidy(rows)
    assert curve.wavelength.tolist() == [20.0, 30.0, 40.0]
    assert curve.throughput.tolist() == [0.0, 1.0, 0.0]


def test_pivot_and_width_of_a_box() -> None:
    """Pivot of a box: sqrt((b^2 - a^2) / 2 / ln(b / a)); 1e-6 is the trapezoid error of the 10000 steps."""
    wavelength = np.linspace(5000.0, 6000.0, 10001)
    curve = Curve(wavelength, np.full(wavelength.size, 0.3))
    assert curve.pivot_angstrom == pytest.approx(np.sqrt(1.1e7 / 2 / np.log(1.2)), rel=1e-6)
    assert curve.width_angstrom == pytest.approx(1000.0, rel=1e-12)


@given(st.floats(-1.0, 1.0), st.floats(0.0, 3.0))
def test_weights_mean_of_a_line_through_a_symmetric_band(slope: float, level: float) -> None:
    """A flux linear between nodes is integrated without node error: any node spacing gives the same mean."""
    curve = Curve(np.array([400.0, 500.0, 600.0]), np.array([0.0, 1.0, 0.0]))
    coarse, fine = np.array([100.0, 333.0, 512.0, 900.0]), np.linspace(100.0, 900.0, 801)
    flux = lambda wavelength: level + slope * wavelength / 500.0  # noqa: E731
    # 1e-3: the throughput times lambda is a parabola, which the coarse union's trapezoids cut by so much.
    difference = mean_flux(curve, coarse, flux(coarse)) - mean_flux(curve, fine, flux(fine))
    assert difference == pytest.approx(0, abs=1e-3 * max(abs(slope), 1.0) * 10)
    assert hat_weights(curve, coarse).sum() == pytest.approx(1, abs=1e-14)


def test_onto_nodes_follows_a_power_law_between_sparse_nodes() -> None:
    """A Rayleigh-Jeans tail on nodes a factor two apart comes back exactly; linear in F it would be 0.4 mag off."""
    native = np.array([1e4, 2e4, 4e4, 8e4, 1.6e5])
    wanted = np.array([1.3e4, 3e4, 1e5])
    assert np.exp(atmospheres.onto_nodes(native, 5e20 * native**-4.0, wanted)) == pytest.approx(5e20 * wanted**-4.0)


def test_wavelength_nodes_keep_the_published_ones_and_end_at_32_micron() -> None:
    nodes = atmospheres.wavelength_nodes(np.array([1000.0, 5000.0, 19950.0, 20050.0, 40000.0]))
    assert nodes[:3].tolist() == [1000.0, 5000.0, 19950.0]
    assert nodes[-1] == pytest.approx(320000.0)
    assert (np.diff(nodes[2:]) / nodes[2:-1]).max() < 1 / 119


def test_absent_gravities_take_the_nearest() -> None:
    cube = np.array([[[np.nan], [np.nan], [3.0], [4.0], [np.nan]]])
    filled_cube, filled = atmospheres.fill_gravities(cube)
    assert filled_cube[0, :, 0].tolist() == [3.0, 3.0, 3.0, 4.0, 4.0]
    assert filled[0].tolist() == [True, True, False, False, True]


def test_bilinear_interpolation_is_exact_for_a_plane_in_log_teff() -> None:
    teff, logg = np.array([4000.0, 5000.0, 8000.0]), np.array([3.0, 3.5, 4.0])
    plane = 2.0 * np.log(teff)[:, None, None] - 0.3 * logg[None, :, None] + np.zeros(2)
    flux = blue_correction.interpolate(teff, logg, plane, 6123.0, 3.71)
    assert np.log(flux) == pytest.approx(2.0 * np.log(6123.0) - 0.3 * 3.71, rel=1e-12)


def test_hot_block_takes_the_step_and_completes_the_flux() -> None:
    nodes = np.geomspace(91.0, 320000.0, 4000)
    base = np.log(planck_flux(nodes, 50000.0))[None]
    steps = np.full((hot_stars.HOT_TEFF_K.size, nodes.size), -0.4)
    block = hot_stars.hot_block(nodes, base, steps)
    seen = nodes >= hot_stars.LYMAN_ANGSTROM
    assert (block[0, 0] - base[0])[seen] == pytest.approx(0.4 * 0.4 * np.log(10))
    for teff, row in zip(hot_stars.HOT_TEFF_K, block[:, 0], strict=True):
        # 1 %: the one step between the last node below 912 A and the first above is in neither part.
        assert total_flux(nodes, np.exp(row)) == pytest.approx(STEFAN_BOLTZMANN * teff**4, rel=0.01)


def test_local_parabola_keeps_a_parabola_and_refuses_to_extrapolate() -> None:
    x = np.linspace(8.0, 8.5, 40)
    y = 1.0 + 4.0 * (x - 8.2) + 20.0 * (x - 8.2) ** 2
    assert cool_correction.local_parabola(x, y, 8.25) == pytest.approx(1.0 + 4.0 * 0.05 + 20.0 * 0.05**2, rel=1e-9)
    assert np.isnan(cool_correction.local_parabola(x, y, 7.99))
    assert np.isnan(cool_correction.local_parabola(x, np.full_like(x, np.nan), 8.2))


def test_fitted_curve_brings_colours_to_the_targets() -> None:
    """A black body pushed to redder colours in two bands, with loose trust in nothing else: targets met to 0.01 mag."""
    flux = planck_flux(NODES, 4000.0)
    curves = [Curve(np.linspace(c - 300, c + 300, 31), np.ones(31)) for c in (4400.0, 5500.0, 21600.0)]
    weights = np.array([hat_weights(curve, NODES) for curve in curves])
    zero = np.ones(3)
    plain = -2.5 * np.log10(weights @ flux)
    target = plain[:2] - plain[2] + np.array([0.20, 0.10])
    basis = cool_correction.hats(NODES)
    curve_mag = cool_correction.fitted_curve(flux, weights, zero, target, np.array([0.01, 0.01]), basis)
    shaped = -2.5 * np.log10(weights @ (flux * 10 ** (-0.4 * curve_mag)))
    assert shaped[:2] - shaped[2] == pytest.approx(target, abs=0.01)


def test_fitted_curve_without_targets_is_flat() -> None:
    flux, basis = planck_flux(NODES, 4000.0), cool_correction.hats(NODES)
    weights = np.array([hat_weights(Curve(np.array([5000.0, 5500.0, 6000.0]), np.ones(3)), NODES)] * 2)
    curve = cool_correction.fitted_curve(flux, weights, np.ones(2), np.array([np.nan]), np.array([0.01]), basis)
    assert curve == pytest.approx(0, abs=1e-12)


def test_colour_chains_cancel_what_they_share() -> None:
    star = {"V-Ks": np.nan, "H-Ks": 0.07, "J-H": 0.29, "Ks-W1": 0.06, "W1-W2": -0.04, "B-V": 0.65}
    assert sequence.chain_minus(star, "2MASS/2MASS.J", "2MASS/2MASS.Ks") == pytest.approx(0.36)
    assert sequence.chain_minus(star, "WISE/WISE.W2", "2MASS/2MASS.Ks") == pytest.approx(-0.02)
    assert np.isnan(sequence.chain_minus(star, "Generic/Johnson.B", "2MASS/2MASS.Ks"))
    assert sequence.chain_minus(star, "Generic/Johnson.B", "Generic/Johnson.V") == pytest.approx(0.65)


def test_sequence_stars_derive_radius_and_gravity() -> None:
    text = "spectral_type,teff_k,log_luminosity_lsun,mass_msun\nG2V,5772,0.0,1.0\nM9V,2400,-3.5,\nO3V,44900,5.8,59\n"
    sun, late = sequence.sequence_stars(text, 2000.0, 10000.0)
    assert sun["radius"] == pytest.approx(1.0)
    assert sun["logg"] == pytest.approx(4.438, abs=5e-4)  # nominal solar gravity, IAU 2015 resolution B3
    assert np.isnan(late["logg"])


def test_numbers_of_the_sequence_are_kept_as_printed() -> None:
    assert [_value(word) for word in ("0.650", "19.25:", "...", ".....")] == ["0.650", "19.25", "", ""]


def test_windowed_rms_sees_its_own_temperatures_only() -> None:
    teff = np.array([4000.0, 4000.0, 4000.0, 8000.0, 8000.0, 8000.0])
    residuals = np.column_stack([[0.1, -0.1, 0.1, 0.5, 0.5, 0.5], [np.nan] * 3 + [0.2, 0.2, 0.2]])
    assert model_error.windowed_rms(teff, residuals, 4000.0) == pytest.approx([0.1, np.nan], nan_ok=True)
    assert model_error.windowed_rms(teff, residuals, 8000.0) == pytest.approx([0.5, 0.2])


@pytest.mark.parametrize(
    ("pivot", "teff", "expected"),
    [
        (1530, 9000, 0.3), (1530, 4500, 2.0), (2300, 5800, 0.2), (3600, 5800, 0.09),
        (5500, 2500, 0.27), (12400, 2500, 0.05), (33000, 9000, 0.07), (5500, 60000, 0.08),
    ],
)  # fmt: skip
def test_first_found_errors(pivot: float, teff: float, expected: float) -> None:
    assert model_error.first_found_mag(pivot, teff) == expected


def test_largest_residual_of_the_stars_nearby() -> None:
    teff = np.array([5700.0, 5900.0, 9000.0])
    residuals = np.array([[0.01, np.nan, 0.03], [0.04, np.nan, 0.02], [0.5, 0.5, 0.5]])
    assert model_error.largest_near(teff, residuals, 5750.0) == pytest.approx([0.04, np.nan, 0.03], nan_ok=True)
    assert np.isnan(model_error.largest_near(teff, residuals, 20000.0)).all()


def test_metallicity_grid_takes_the_mean_of_two_and_the_nearest_gravity() -> None:
    head = "teff,logg,feh,passband,mag0,mag,A0,Ax"
    rows = [
        f"{teff},{logg},{feh},GAIA_GAIA3.{band},{level + extra},{level + extra},0.0,0.0"
        for teff, logg in ((4000.0, 4.0), (4000.0, 4.5), (5000.0, 4.5))
        for feh, level in ((-1.0, 0.3), (0.0, 0.1))
        for band in ("G", "Gbp", "Grp")
        for extra in ((0.0, 0.02) if feh == -1.0 else (0.0,))
    ]
    rows.append("4000.0,4.0,0.0,GAIA_GAIA3.G,0.1,9.9,1.0,9.8")
    arrays = metallicity.metallicity_arrays([head, *rows])
    assert arrays["feh"].tolist() == [-1.0, 0.0]
    assert arrays["difference_mag"].shape == (2, 2, 2, 3)
    assert arrays["difference_mag"][:, :, 0] == pytest.approx(np.full((2, 2, 3), 0.21), abs=1e-6)
    assert (arrays["difference_mag"][:, :, 1] == 0.0).all()
    with pytest.raises(ValueError, match="the metallicity grid has columns"):
        metallicity.metallicity_arrays(["a,b", *rows])


def test_kinks_are_drawn_to_the_cubic_and_smooth_rows_kept() -> None:
    teff = np.array([2000, 2200, 2400, 2600, 2700, 2800, 2950, 3100, 3200.0])
    logg = np.array([2.0, 4.5])
    smooth = np.log([[planck_flux(NODES, t)] * 2 for t in teff])
    kinked = smooth.copy()
    kinked[4, 1] += 0.1 * np.exp(-(((NODES - 6000.0) / 500.0) ** 2))
    filled = np.zeros((9, 2), dtype=bool)
    drawn = cool_correction.without_kinks(atmospheres.Atmospheres(NODES, teff, logg, kinked, filled)).ln_flux
    before, after = (np.abs(cube[4, 1] - smooth[4, 1]).max() for cube in (kinked, drawn))
    assert after < 0.6 * before
    assert (drawn[:, 0] == kinked[:, 0]).all()
    kept = cool_correction.without_kinks(atmospheres.Atmospheres(NODES, teff, logg, smooth, filled)).ln_flux
    # Black bodies between 2400 and 2950 K: exp(c/T) is not a cubic in ln T by so much at 1000 A.
    assert np.abs(kept - smooth)[:, :, NODES > 4000.0].max() < 0.005


def test_band_list_has_no_repeats_and_known_archives() -> None:
    assert len({band.id for band in BANDS}) == len(BANDS)
    assert {band.package for band in BANDS} <= set(ARCHIVES)


def test_missing_archive_says_how_to_get_it(tmp_path: Path) -> None:
    with pytest.raises(FileNotFoundError, match=r"pip download --no-deps speclite==1\.0\.0"):
        Sources(tmp_path).path("speclite")


def test_changed_archive_is_refused(tmp_path: Path) -> None:
    (tmp_path / ARCHIVES["speclite"].file).write_bytes(b"not the wheel")
    with pytest.raises(ValueError, match="the tables were made from"):
        Sources(tmp_path).read("speclite", "anything")


def test_npz_bytes_depend_on_content_only(tmp_path: Path) -> None:
    arrays = {"b": np.arange(5.0), "a": np.array(["x", "yy"])}
    write_npz(tmp_path / "one.npz", arrays)
    write_npz(tmp_path / "two.npz", arrays)
    assert file_sha256(tmp_path / "one.npz") == file_sha256(tmp_path / "two.npz")
    with np.load(tmp_path / "one.npz", allow_pickle=False) as read:
        assert read.files == ["b", "a"]
        assert read["a"].tolist() == ["x", "yy"]


def test_rounded_keeps_significant_digits() -> None:
    assert rounded(1.23456789e-9, 4) == 1.235e-9


def test_checksums_are_written_between_the_markers(tmp_path: Path) -> None:
    readme = tmp_path / "README.md"
    readme.write_text(f"before\n{CHECKSUMS_BEGIN}\nold\n{CHECKSUMS_END}\nafter\n", encoding="utf-8")
    (tmp_path / "x.csv").write_text("1\n", encoding="utf-8")
    write_checksums(tmp_path)
    text = readme.read_text(encoding="utf-8")
    assert text.startswith("before\n")
    assert text.endswith("after\n")
    assert "old" not in text
    assert f"| x.csv | {file_sha256(tmp_path / 'x.csv')} |" in text
