"""Every rule of the system file has a breach here: the fault names the key, shows the value and says how to mend it."""

from __future__ import annotations

from collections.abc import Callable

import pytest

from vetter.errors import Fault, InputError
from vetter.system import System

Faults = Callable[..., tuple[Fault, ...]]

# In the full file, (what is replaced, by what, key, value, a word of what is expected, a word of the mend).
BREACHES = [
    # Top of the file.
    ('name = "Marlow 7"\n', "", "name", "", "missing", "Add name"),
    ('name = "Marlow 7"', 'name = "  "', "name", "'  '", "not blank", ""),
    ('name = "Marlow 7"', 'name = "a\\nb"', "name", r"'a\nb'", "one line", ""),
    ('name = "Marlow 7"', "name = 7", "name", "7", "in quotes", "double quotes"),
    ('name = "Marlow 7"', "name = 2020-01-01", "name", "the date or time 2020-01-01", "in quotes", "double quotes"),
    # Sky.
    ("ra_deg = 281.12", "ra_deg = 360", "sky.ra_deg", "360", "below 360 deg", "in deg"),
    ("ra_deg = 281.12\n", "", "sky.ra_deg", "", "missing", "Add ra_deg"),
    ("dec_deg = -12.50", "dec_deg = -90.5", "sky.dec_deg", "-90.5", "at least -90", "in deg"),
    # Distance.
    ("parallax_mas = 1.73\nparallax_error_mas = 0.02\n", "", "distance", "", "exactly one", "Add one"),
    ("parallax_error_mas = 0.02\n", "", "distance.parallax_mas", "1.73", "parallax_error_mas", "Add parallax_error"),
    (
        "parallax_mas = 1.73\n",
        "",
        "distance.parallax_error_mas",
        "0.02",
        "parallax_mas beside it",
        "Add parallax_mas",
    ),
    ("parallax_mas = 1.73", "parallax_mas = nan", "distance.parallax_mas", "nan", "a number", "Leave the key out"),
    ("parallax_mas = 1.73", "parallax_mas = true", "distance.parallax_mas", "true", "a number", "Write one number"),
    ("parallax_mas = 1.73", 'parallax_mas = "1.73"', "distance.parallax_mas", "'1.73'", "a number", "without quotes"),
    ("parallax_mas = 1.73", "parallax_mas = 1e4", "distance.parallax_mas", "10000.0", "at most 1000", "in mas"),
    ("parallax_error_mas = 0.02", "parallax_error_mas = 0", "distance.parallax_error_mas", "0", "above 0", "in mas"),
    ("parallax_error_mas = 0.02", "parallax_error_mas = -0.0", "distance.parallax_error_mas", "-0.0", "above 0", ""),
    ("point_mas = -0.03", "point_mas = -inf", "distance.parallax_zero_point_mas", "-inf", "a number", "Leave"),
    ("[sky]", "[distance.deep]\n[sky]", "distance.deep", "a table", "[distance]", "use one of"),
    (
        "parallax_mas = 1.73",
        "parallax_mas = 1.73\ndistance_pc = 578\ndistance_error_pc = 7",
        "distance",
        "",
        "exactly one",
        "Remove one",
    ),
    (
        "parallax_mas = 1.73\nparallax_error_mas = 0.02",
        "distance_pc = 578\ndistance_error_pc = 7",
        "distance.parallax_zero_point_mas",
        "-0.03",
        "to correct",
        "Remove it",
    ),
    (
        "parallax_mas = 1.73\nparallax_error_mas = 0.02\nparallax_zero_point_mas = -0.03",
        "distance_pc = 0\ndistance_error_pc = 7",
        "distance.distance_pc",
        "0",
        "above 0",
        "in pc",
    ),
    # Dust.
    ("ebv_mag = 0.12", "ebv_mag = -0.01", "extinction.ebv_mag", "-0.01", "at least 0", "in mag"),
    ("ebv_mag = 0.12", "ebv_mag = 11", "extinction.ebv_mag", "11", "at most 10", "in mag"),
    ("ebv_mag = 0.12\n", "ebv_mag = 0.12\nebv_max_mag = 1\n", "extinction", "", "alone", "Remove one"),
    ("ebv_mag = 0.12\nebv_error_mag = 0.02\n", "", "extinction", "", "either", "Add one"),
    ("r_v = 3.1", "r_v = 1.9", "extinction.r_v", "1.9", "at least 2", "Check the value"),
    ("r_v = 3.1", "r_v = 6.6", "extinction.r_v", "6.6", "at most 5.6", "Check the value"),
    # The seen star.
    ("teff_k = 5960", "teff_k = 499", "primary.teff_k", "499", "at least 500", "in K"),
    ("teff_k = 5960", "teff_k = 500001", "primary.teff_k", "500001", "at most 500000", "in K"),
    ("teff_error_k = 80\n", "", "primary.teff_k", "5960", "teff_error_k", "Add teff_error_k"),
    ("logg = 4.30", "logg = 10.5", "primary.logg", "10.5", "at most 10", "Check"),
    ("logg = 4.30", "logg = -2.1", "primary.logg", "-2.1", "at least -2", "Check"),
    ("feh = 0.10", "feh = 1.6", "primary.feh", "1.6", "at most 1.5", "Check"),
    ("feh = 0.10", "feh = -6.1", "primary.feh", "-6.1", "at least -6", "Check"),
    ("vsini_km_s = 4.0", "vsini_km_s = -1", "primary.vsini_km_s", "-1", "at least 0", "km/s"),
    ("mass_msun = 1.02", "mass_msun = 0", "primary.mass_msun", "0", "above 0", "Msun"),
    ("mass_error_msun = 0.05\n", "", "primary.mass_msun", "1.02", "mass_error_msun", "Add mass_error_msun"),
    # Orbit.
    ("period_d = 212.4", "period_d = 0", "orbit.period_d", "0", "above 0", "in d"),
    ("period_d = 212.4", "period_d = -212.4", "orbit.period_d", "-212.4", "above 0", "in d"),
    ("period_d = 212.4\nperiod_error_d = 0.05\n", "", "orbit.period_d", "", "missing", "Add period_d"),
    ("period_d = 212.4\n", "", "orbit.period_error_d", "0.05", "period_d beside it", "Add period_d"),
    ("period_error_d = 0.05", "period_error_d = 0", "orbit.period_error_d", "0", "above 0", "in d"),
    ("eccentricity = 0.31", "eccentricity = 1", "orbit.eccentricity", "1", "below 1", "Check"),
    ("eccentricity = 0.31", "eccentricity = -0.1", "orbit.eccentricity", "-0.1", "at least 0", "Check"),
    ("eccentricity = 0.31\n", "", "orbit.eccentricity_error", "0.01", "beside it", "remove eccentricity_error"),
    ("k1_km_s = 53.2", "k1_km_s = 0", "orbit.k1_km_s", "0", "above 0", "km/s"),
    ("k1_error_km_s = 0.6\n", "", "orbit.k1_km_s", "53.2", "k1_error_km_s", "Add k1_error_km_s"),
    ("inclination_deg = 58.0", "inclination_deg = 180.5", "orbit.inclination_deg", "180.5", "at most 180", "deg"),
    ("inclination_deg = 58.0", "inclination_deg = -1", "orbit.inclination_deg", "-1", "at least 0", "deg"),
    ("photocentre_mas = 2.02", "photocentre_mas = -2", "orbit.photocentre_mas", "-2", "above 0", "mas"),
    ('photocentre_band = "GAIA/GAIA3.G"\n', "", "orbit.photocentre_band", "", "missing", "Add photocentre_band"),
    (
        'photocentre_band = "GAIA/GAIA3.G"',
        'photocentre_band = "GAIA"',
        "orbit.photocentre_band",
        "'GAIA'",
        "known band",
        "GAIA/GAIA3.G",
    ),
    (
        "photocentre_mas = 2.02\nphotocentre_error_mas = 0.03\n",
        "",
        "orbit.photocentre_band",
        "'GAIA/GAIA3.G'",
        "photocentre_mas",
        "remove this",
    ),
    # Photometry.
    ("mag = 12.914", "mag = 60.5", "photometry[1].mag", "60.5", "at most 60", "mag"),
    ("mag = 12.914", "mag = -30.5", "photometry[1].mag", "-30.5", "at least -30", "mag"),
    ("error_mag = 0.003\n", "", "photometry[1].mag", "12.914", "error_mag", "Add error_mag"),
    ("mag = 12.914\n", "", "photometry[1].error_mag", "0.003", "mag beside it", "Add mag"),
    ("mag = 12.914\nerror_mag = 0.003\n", "", "photometry[1]", "", "either", "Add one"),
    ("mag = 12.914", "mag = 12.914\nfainter_than_mag = 12", "photometry[1]", "", "either", "Keep one"),
    ("mag = 12.914", "mag = 12.914\nconfidence = 0.9", "photometry[1].confidence", "0.9", "no conf", "Remove it"),
    ('system = "Vega"', 'system = "ST"', "photometry[1].system", "'ST'", '"Vega" or "AB"', "one of these"),
    ('band = "GAIA/GAIA3.G"\nmag', "mag", "photometry[1].band", "", "missing", "Add band"),
    ("21.5\nconfidence = 0.95", "21.5", "photometry[2].confidence", "", "confidence", "Add confidence"),
    ("21.5\nconfidence = 0.95", "21.5\nconfidence = 0.5", "photometry[2].confidence", "0.5", "above 0.5", "Check"),
    ("21.5\nconfidence = 0.95", "21.5\nconfidence = 1", "photometry[2].confidence", "1", "below 1", "Check"),
    ('"GALEX/GALEX.NUV"', '"GALEX/GALEX.XUV"', "photometry[2].band", "'GALEX/GALEX.XUV'", "known", "GALEX.FUV"),
    ('"GALEX/GALEX.NUV"', '"J"', "photometry[2].band", "'2MASS/2MASS.J'", "not both", "more.csv, row 1"),
    ('"GALEX/GALEX.NUV"', '"G"', "photometry[2].band", "'GAIA/GAIA3.G'", "not both", "photometry[1]"),
    ('band = "own.H"', 'band = "gaia G"', "photometry[3].band", "'GAIA/GAIA3.G'", "one measurement", "average"),
    # Light limits.
    ("[ 480.0, 520.0 ]", "[520, 480]", "light_limit[1].wavelength_nm", "[520, 480]", "rising", "rising order"),
    ("[ 480.0, 520.0 ]", "[480, 480]", "light_limit[1].wavelength_nm", "[480, 480]", "rising", "rising order"),
    ("[ 480.0, 520.0 ]", "[80, 480]", "light_limit[1].wavelength_nm", "[80, 480]", "at least 90", "in nm"),
    ("[ 480.0, 520.0 ]", "[480, 30001]", "light_limit[1].wavelength_nm", "[480, 30001]", "30000", "in nm"),
    ("[ 480.0, 520.0 ]", "[480]", "light_limit[1].wavelength_nm", "[480]", "list of 2", ""),
    ("[ 480.0, 520.0 ]", "480", "light_limit[1].wavelength_nm", "480", "list of 2", "square brackets"),
    ("[ 480.0, 520.0 ]", '[480, "520"]', "light_limit[1].wavelength_nm", "[480, '520']", "list", "without quotes"),
    ("ratio_max = 0.03", "ratio_max = 0", "light_limit[1].ratio_max", "0", "above 0", "Check"),
    ("ratio_max = 0.03\n", "", "light_limit[1].ratio_max", "", "missing", "Add ratio_max"),
    ("vsini_max_km_s = 100", "vsini_max_km_s = 0", "light_limit[1].vsini_max_km_s", "0", "above 0", "km/s"),
    ("[4000, 9000]", "[9000, 4000]", "light_limit[1].teff_range_k", "[9000, 4000]", "rising", "rising order"),
    # Velocities, variability, X-rays, imaging.
    ('file = "marlow7_rv.csv"', 'file = "none.csv"', "velocities.file", "'none.csv'", "exists", "relative"),
    ('file = "marlow7_rv.csv"', 'file = "."', "velocities.file", "'.'", "ordinary file", "Name the file"),
    ('file = "marlow7_rv.csv"\n', "", "velocities.file", "", "missing", "Add file"),
    ('"TESS/TESS.Red"', '"TESS/TESS.Blue"', "variability.band", "'TESS/TESS.Blue'", "known", "TESS/TESS.Red"),
    ('eclipses = "none"', 'eclipses = "no"', "variability.eclipses", "'no'", '"none" or "seen"', "one of these"),
    ("l_max_mag = 0.002", "l_max_mag = 0", "variability.ellipsoidal_max_mag", "0", "above 0", "mag"),
    ("h_min_mag = 0.005", "h_min_mag = -1", "variability.eclipse_depth_min_mag", "-1", "above 0", "mag"),
    ("ellipsoidal_max_mag = 0.002",
     "ellipsoidal_max_mag = 0.002\nellipsoidal_mag = 0.01\nellipsoidal_error_mag = 0.001",
     "variability.ellipsoidal_max_mag", "0.002", "not both", "Keep one"),
    ("ellipsoidal_max_mag = 0.002", "ellipsoidal_mag = 0.01", "variability.ellipsoidal_mag", "0.01", "one-sigma error",
     "Add ellipsoidal_error_mag"),
    ("erg_s = 3e30", "erg_s = 0.0", "x_ray.luminosity_max_erg_s", "0.0", "above 0", "erg/s"),
    ("3e30\nconfidence = 0.95", "3e30", "x_ray.confidence", "", "missing", "Add confidence"),
    ("[50, 100, 200]", "[50, 100]", "imaging.contrast_mag", "'3 values'", "as many", "one contrast"),
    ("[50, 100, 200]", "[50, 200, 100]", "imaging.separation_mas", "[50, 200, 100]", "rising", ""),
    ("[50, 100, 200]", "[]", "imaging.separation_mas", "[]", "at least one", ""),
    ("[3.0, 4.5, 6.0]", "[3.0, 4.5, nan]", "imaging.contrast_mag", "[3.0, 4.5, nan]", "numbers", "Leave"),
    # Assumptions, prior odds, passbands.
    ("dwarf_max_msun = 1.40", "dwarf_max_msun = 1.5", "assumptions.white_dwarf_max_msun", "1.5", "1.44", "Msun"),
    ("star_min_msun = 1.2", "star_min_msun = 2.2", "assumptions.neutron_star_min_msun", "2.2", "less than", "Lower"),
    ("light_max = 2", "light_max = 0", "assumptions.companion_to_seen_light_max", "0", "above 0", "Check"),
    ("black_hole = 0.5", "black_hole = -1", "prior_odds.black_hole", "-1", "at least 0", "Check"),
    ("black_hole = 0.5", "black_holes = 1", "prior_odds.black_holes", "1", "[prior_odds]", "Did you mean black_hole?"),
    ("[[passband]]", '[[passband]]\nid = "2MASS H"\nfile = "own_h.txt"\nsystem = "AB"\n[[passband]]', "passband[1].id",
     "'2MASS H'", "not built in", "another"),
    ("[[passband]]", '[[passband]]\nid = "own.H"\nfile = "own_h.txt"\nsystem = "AB"\n[[passband]]', "passband[2].id",
     "'own.H'", "different identifier", "Change one"),
    ('file = "own_h.txt"', 'file = "no.txt"', "passband[1].file", "'no.txt'", "exists", "relative"),
    ('system = "AB"\nzero_point_jy = 3631', "", "passband[1].system", "", "zero_point_jy", "Add system"),
    ("zero_point_jy = 3631", "zero_point_jy = 0", "passband[1].zero_point_jy", "0", "above 0", "Jy"),
    # Tables where keys are expected, and the reverse.
    ("[sky]", "[[sky]]", "sky", "a list of 1 tables", "one table [sky]", "single brackets"),
    ("[[light_limit]]", "[light_limit]", "light_limit", "a table", "[[light_limit]]", "double brackets"),
    ("k1_km_s = 53.2", "k1_km_s = {value = 53.2}", "orbit.k1_km_s", "a table", "a number", "Write one number"),
    ("k1_km_s = 53.2", "k1_km_s = [53.2]", "orbit.k1_km_s", "[53.2]", "a number", "Write one number"),
    ("k1_km_s = 53.2", "k1_km_s = 07:32:00", "orbit.k1_km_s", "the date or time 07:32:00", "a number", ""),
    ("k1_km_s = 53.2", f"k1_km_s = 1{'0' * 400}", "orbit.k1_km_s", "an integer of more", "a number", "Leave"),
    ("k1_km_s = 53.2", f"k1_km_s = 0x{'f' * 9000}", "orbit.k1_km_s", "an integer of more", "a number", "Leave"),
    # Names that are nearly right, or in the wrong table.
    ("r_v = 3.1", "rv = 3.1", "extinction.rv", "3.1", "[extinction]", "Did you mean r_v?"),
    ("teff_error_k", "teff_k_error", "primary.teff_k_error", "80", "[primary]", "Did you mean teff_error_k?"),
    ("logg_error = 0.10", "LOGG_ERROR = 0.1", "primary.LOGG_ERROR", "0.1", "[primary]", "Did you mean logg_error?"),
    ("[imaging]", "[imagin]", "imagin", "a table", "the top of the file", "Did you mean imaging?"),
    ("r_v = 3.1", "teff_k = 3", "extinction.teff_k", "3", "[extinction]", "Move it to [primary]."),
    ("r_v = 3.1", "colour = 3", "extinction.colour", "3", "[extinction]", "use one of: ebv_mag"),
    ("r_v = 3.1", '"a\\nb" = 3', r"extinction.'a\nb'", "3", "[extinction]", "use one of"),
    ("r_v = 3.1", "x_ray = 3", "extinction.x_ray", "3", "[extinction]", "Move it to the top of the file."),
]  # fmt: skip


@pytest.mark.parametrize(("old", "new", "key", "value", "expected", "mend"), BREACHES)
def test_a_breach_is_one_fault_with_key_value_and_mend(
    faults: Faults, full_text: str, old: str, new: str, key: str, value: str, expected: str, mend: str
) -> None:
    assert full_text.count(old) >= 1
    (fault,) = faults(full_text.replace(old, new, 1))
    assert (fault.key, fault.value[: len(value)]) == (key, value)
    assert bool(fault.value) == bool(value)
    assert expected in fault.expected
    assert mend in fault.mend


@pytest.mark.parametrize(
    ("old", "new", "key", "expected"),
    [
        ("k1_km_s = 40\nk1_error_km_s = 1\n", "", "orbit", "one of k1_km_s, photocentre_mas"),
        ('[[photometry]]\nband = "Ks"\nmag = 10\nerror_mag = 0.1\n', "", "photometry", "got 2"),
        ("mag = 10\nerror_mag = 0.1\n", "fainter_than_mag = 10\nconfidence = 0.9\n", "photometry", "got 2"),
        ("[distance]\ndistance_pc = 578\ndistance_error_pc = 7\n", "", "distance", "missing"),
        ("[orbit]\nperiod_d = 3\nk1_km_s = 40\nk1_error_km_s = 1\n", "", "orbit", "missing"),
    ],
)
def test_what_is_required_is_missed(
    faults: Faults, least_text: str, old: str, new: str, key: str, expected: str
) -> None:
    assert old in least_text
    (fault,) = faults(least_text.replace(old, new, 1))
    assert fault.key == key
    assert expected in fault.expected
    assert fault.mend


ELEMENTS = "[orbit.thiele_innes]\na_mas = 1\nb_mas = 2\nf_mas = 3\ng_mas = 4\ncovariance = {}\n"
UNIT = "[[1, 0, 0, 0], [0, 1, 0, 0], [0, 0, 1, 0], [0, 0, 0, 1]]"


@pytest.mark.parametrize("name", ["photocentre_mas", "inclination_deg"])
def test_thiele_innes_elements_exclude_what_they_contain(faults: Faults, least_text: str, name: str) -> None:
    error = name.replace("_mas", "_error_mas").replace("_deg", "_error_deg")
    extra = f'{name} = 2.5\n{error} = 0.1\nphotocentre_band = "G"\n' + ELEMENTS.format(UNIT)
    (fault,) = faults(least_text.replace("[[photometry]]", extra + "[[photometry]]", 1))
    assert (fault.key, fault.value) == (f"orbit.{name}", "2.5")
    assert "same thing" in fault.mend


@pytest.mark.parametrize(
    ("matrix", "mend"),
    [
        ("[[1, 0], [0, 1]]", "4 rows of 4"),
        ("[[1, 0, 0, 0], [0, 1, 0, 0], [0, 0, 1, 0]]", "4 rows of 4"),
        (UNIT.replace("[1, 0, 0, 0]", "1"), "4 rows of 4"),
        (UNIT.replace("[1, 0, 0, 0]", "[nan, 0, 0, 0]"), "finite"),
        (UNIT.replace("[1, 0, 0, 0]", "[1, 0.5, 0, 0]"), "row i, column j"),
        (UNIT.replace("[1, 0, 0, 0]", "[-1, 0, 0, 0]"), "variances on the diagonal"),
        ("[[1, 1, 0, 0], [1, 1, 0, 0], [0, 0, 1, 0], [0, 0, 0, 1]]", "none may reach 1"),
    ],
)
def test_a_matrix_that_is_no_covariance_is_refused(faults: Faults, least_text: str, matrix: str, mend: str) -> None:
    text = least_text.replace("[[photometry]]", ELEMENTS.format(matrix) + "[[photometry]]", 1)
    (fault,) = faults(text)
    assert fault.key == "orbit.thiele_innes.covariance"
    assert mend in fault.mend


def test_an_element_cannot_be_left_out(faults: Faults, least_text: str) -> None:
    elements = ELEMENTS.format(UNIT).replace("f_mas = 3\n", "")
    (fault,) = faults(least_text.replace("[[photometry]]", elements + "[[photometry]]", 1))
    assert (fault.key, fault.mend) == ("orbit.thiele_innes.f_mas", "Add f_mas.")


def test_prior_odds_that_are_all_zero_are_refused(faults: Faults, least_text: str) -> None:
    # The names are the contract's, written out again here.
    names = [
        "main_sequence",
        "evolved_star",
        "inner_pair",
        "inner_pair_with_white_dwarf",
        "stripped_companion",
        "stripped_primary",
        "white_dwarf",
        "neutron_star",
        "black_hole",
        "compact_pair",
    ]
    odds = "".join(f"{name} = 0\n" for name in names)
    (fault,) = faults(f"{least_text}[prior_odds]\n{odds}")
    assert (fault.key, fault.expected) == ("prior_odds", "at least one weight above zero")


def test_all_faults_are_reported_together(read: Callable[..., System], full_text: str) -> None:
    text = (
        full_text.replace("parallax_mas = 1.73", "parallax_mas = nan")
        .replace("eccentricity = 0.31", "eccentricity = 1.31")
        .replace("mag = 12.914", 'mag = "bright"')
        .replace('"TESS/TESS.Red"', '"TSS"')
        .replace("r_v = 3.1", "rrv = 3.1")
        .replace('"own_h.txt"', '"gone.txt"')
    )
    with pytest.raises(InputError) as caught:
        read(text, more__csv="band,mag,error_mag\nJ,11,0\nH,x,0.1\n")
    assert {fault.key for fault in caught.value.faults} == {
        "distance.parallax_mas",
        "orbit.eccentricity",
        "photometry[1].mag",
        "variability.band",
        "extinction.rrv",
        "passband[1].file",
        "more.csv, row 1, error_mag",
        "more.csv, row 2, mag",
    }
    message = str(caught.value)
    assert "8 faults" in message
    assert "orbit.eccentricity is 1.31: expected a number at least 0 and below 1. Check the value." in message
    assert "extinction.rrv is 3.1: expected a key that [extinction] has. Did you mean r_v?" in message


def test_a_required_key_with_a_slip_of_the_pen_is_one_fault_not_two(faults: Faults, least_text: str) -> None:
    assert [fault.key for fault in faults(least_text.replace("period_d", "perod_d"))] == ["orbit.perod_d"]
    assert [fault.key for fault in faults(least_text.replace("[orbit]", "[orbits]"))] == ["orbits"]


def test_the_order_of_faults_does_not_change(faults: Faults) -> None:
    text = "[orbit]\n" + "".join(f"{name} = true\n" for name in ("period_d", "k1_km_s", "eccentricity"))
    assert len({tuple(faults(text)) for _ in range(5)}) == 1


def test_very_many_faults_are_counted_not_listed(faults: Faults, least_text: str) -> None:
    found = faults(least_text + "".join(f"key{n} = {n}\n" for n in range(300)))
    assert len(found) == 41
    assert found[-1].expected == "no faults, but there are 260 more"


def test_faults_in_many_rows_are_counted_and_do_not_take_long(faults: Faults, full_text: str) -> None:
    rows = "band,mag,error_mag\n" + "nonsense,11,0.1\n" * 5000
    found = faults(full_text, more__csv=rows)
    assert found[0].key == "more.csv, row 1, band"
    assert found[-1].expected == "no faults, but there are 4960 more"


def test_faults_in_many_rows_of_a_second_file_are_counted(faults: Faults, full_text: str) -> None:
    found = faults(full_text, marlow7_rv__csv="time_bjd,rv_km_s,rv_error_km_s\n" + "1,1,0\n" * 2000)
    assert (found[-1].key, found[-1].value) == ("velocities.file", "'marlow7_rv.csv'")
    assert found[-1].expected == "no faults, but there are 1980 more"


def test_an_enormous_key_is_cut_in_the_message(faults: Faults, least_text: str) -> None:
    (fault,) = faults(least_text.replace("[orbit]", f"[orbit]\n{'x' * 100000} = 1"))
    assert len(fault.key) < 80
