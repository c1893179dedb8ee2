"""The format of the system file: every table, every key, its range, unit and meaning, in one place.

Nothing else in the package lists keys; the reader, the did-you-mean and the documentation all follow this module.
"""

from __future__ import annotations

from typing import Final

from vetter.system.fields import Key, Table, measured
from vetter.system.kinds import Choice, Covariance, Flag, ManyTables, Number, Numbers, OneTable, Text

SCENARIO_NAMES: Final = (
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
)
"""The names of the rival explanations; the words that ``[prior_odds]`` may use."""

BAND: Final = Text("a band identifier")
FILE: Final = Text("a file name")
SYSTEM: Final = Choice(("Vega", "AB"))
CONFIDENCE: Final = Number(0.5, 1.0, open_low=True, open_high=True)
MAGNITUDE: Final = Number(-30.0, 60.0, "mag")
MAGNITUDE_ERROR: Final = Number(0.0, 10.0, "mag", open_low=True)
TEFF: Final = Number(500.0, 500000.0, "K")
WAVELENGTH: Final = Number(90.0, 30000.0, "nm")
VELOCITY: Final = Number(-100000.0, 100000.0, "km/s")
_ELEMENT: Final = Number(-1e5, 1e5, "mas")


def _above_zero(high: float, unit: str = "") -> Number:
    """Return the kind of a quantity that must be above zero and at most ``high``."""
    return Number(0.0, high, unit, open_low=True)


SKY: Final = Table(
    "sky",
    "Position (ICRS).",
    (
        Key("ra_deg", Number(0.0, 360.0, "deg", open_high=True), "right ascension", required=True),
        Key("dec_deg", Number(-90.0, 90.0, "deg"), "declination", required=True),
    ),
)
DISTANCE: Final = Table(
    "distance",
    "Parallax or distance, one of them.",
    (
        measured("parallax_mas", "parallax_error_mas", Number(-1000.0, 1000.0, "mas"), "parallax; may be negative"),
        Key("parallax_zero_point_mas", Number(-10.0, 10.0, "mas"), "zero point, subtracted from the parallax"),
        measured("distance_pc", "distance_error_pc", _above_zero(1e8, "pc"), "distance"),
    ),
)
EXTINCTION: Final = Table(
    "extinction",
    "Reddening: a measurement, or an upper bound alone.",
    (
        measured("ebv_mag", "ebv_error_mag", Number(0.0, 10.0, "mag"), "E(B-V)"),
        Key("ebv_max_mag", _above_zero(10.0, "mag"), "upper bound of a flat prior on E(B-V)"),
        Key("r_v", Number(2.3, 5.6), "A(V) / E(B-V); 3.1 when not given"),
    ),
)
PRIMARY: Final = Table(
    "primary",
    "The star that is seen.",
    (
        measured("teff_k", "teff_error_k", TEFF, "effective temperature"),
        measured("logg", "logg_error", Number(-2.0, 10.0), "log10 of the surface gravity in cm/s2"),
        measured("feh", "feh_error", Number(-6.0, 1.5), "metallicity [Fe/H]"),
        Key("vsini_km_s", Number(0.0, 3000.0, "km/s"), "projected rotation"),
        measured("mass_msun", "mass_error_msun", _above_zero(1000.0, "Msun"), "outside estimate of its mass"),
        Key("emission_lines", Flag(), "whether it has emission lines: gas around it then adds light beyond 3 micron"),
    ),
)
THIELE_INNES: Final = Table(
    "orbit.thiele_innes",
    "Thiele-Innes elements of the photocentre's orbit, instead of photocentre_mas and inclination_deg.",
    (
        *(Key(f"{name}_mas", _ELEMENT, f"element {name.upper()}", required=True) for name in "abfg"),
        Key("covariance", Covariance(4, Number(-1e10, 1e10, "mas2")), "covariance, order A B F G", required=True),
    ),
)
ORBIT: Final = Table(
    "orbit",
    "The seen star's orbit: the period and at least one of amplitude, photocentre, elements, epoch velocities. With "
    "enough epoch velocities it may be left out.",
    (
        measured(
            "period_d",
            "period_error_d",
            _above_zero(1e7, "d"),
            "period; searched in the epoch velocities when not given",
            error_optional=True,
        ),
        measured(
            "eccentricity",
            "eccentricity_error",
            Number(0.0, 1.0, open_high=True),
            "eccentricity; taken as 0 with a caution when not given",
            error_optional=True,
        ),
        measured("k1_km_s", "k1_error_km_s", _above_zero(1e5, "km/s"), "velocity semi-amplitude of the seen star"),
        measured("inclination_deg", "inclination_error_deg", Number(0.0, 180.0, "deg"), "inclination"),
        measured(
            "photocentre_mas", "photocentre_error_mas", _above_zero(1e5, "mas"), "semi-major axis of the photocentre"
        ),
        Key("photocentre_band", BAND, "band in which the photocentre was measured"),
        Key("thiele_innes", OneTable("orbit.thiele_innes"), "see [orbit.thiele_innes]"),
    ),
)
PHOTOMETRY: Final = Table(
    "photometry",
    "A magnitude of the whole system, or a limit on it.",
    (
        Key("band", BAND, "band identifier", required=True),
        Key("mag", MAGNITUDE, "magnitude", error="error_mag", error_kind=MAGNITUDE_ERROR),
        Key("fainter_than_mag", MAGNITUDE, "the system is fainter than this"),
        Key("confidence", CONFIDENCE, "confidence of the limit"),
        Key("system", SYSTEM, "magnitude system; the band's usual one when not given"),
    ),
    repeated=True,
)
LIGHT_LIMIT: Final = Table(
    "light_limit",
    "Upper limit on the companion's light in the spectrum.",
    (
        Key("wavelength_nm", Numbers(WAVELENGTH, 2, ascending=True), "window, from and to", required=True),
        Key("ratio_max", _above_zero(1e6), "companion's flux / seen star's flux", required=True),
        Key("confidence", CONFIDENCE, "confidence of the limit", required=True),
        Key("vsini_max_km_s", _above_zero(3000.0, "km/s"), "the search would have missed faster rotators"),
        Key("teff_range_k", Numbers(TEFF, 2, ascending=True), "temperatures that were searched, from and to"),
    ),
    repeated=True,
)
VELOCITIES: Final = Table(
    "velocities",
    "Epoch velocities of the seen star.",
    (
        Key(
            "file",
            FILE,
            "CSV or ECSV with columns time_bjd, rv_km_s, rv_error_km_s and, optionally, instrument",
            required=True,
        ),
    ),
)
VARIABILITY: Final = Table(
    "variability",
    "What a light curve allows.",
    (
        Key("band", BAND, "band of the light curve", required=True),
        Key("ellipsoidal_max_mag", _above_zero(10.0, "mag"), "95 % limit on the semi-amplitude at half the period"),
        measured(
            "ellipsoidal_mag",
            "ellipsoidal_error_mag",
            _above_zero(10.0, "mag"),
            "semi-amplitude at half the period, where it was measured",
        ),
        Key("eclipses", Choice(("none", "seen", "unknown")), "whether eclipses are seen, at the orbital period"),
        Key("eclipse_depth_min_mag", _above_zero(10.0, "mag"), "depth that would have been noticed; 0.01"),
    ),
)
X_RAY: Final = Table(
    "x_ray",
    "Upper limit on the X-ray luminosity.",
    (
        Key("luminosity_max_erg_s", _above_zero(1e45, "erg/s"), "luminosity, 0.5-7 keV", required=True),
        Key("confidence", CONFIDENCE, "confidence of the limit", required=True),
    ),
)
IMAGING: Final = Table(
    "imaging",
    "No resolved source brighter than the contrast at each separation.",
    (
        Key("band", BAND, "band of the images", required=True),
        Key("separation_mas", Numbers(_above_zero(1e7, "mas"), ascending=True), "separations, rising", required=True),
        Key("contrast_mag", Numbers(Number(-30.0, 60.0, "mag")), "contrast at each separation", required=True),
    ),
)
ASSUMPTIONS: Final = Table(
    "assumptions",
    "Mass walls between kinds of remnant, and how bright a companion may be.",
    (
        Key("white_dwarf_max_msun", Number(0.2, 1.44, "Msun"), "heaviest white dwarf; 1.38"),
        Key("neutron_star_min_msun", Number(0.1, 5.0, "Msun"), "lightest neutron star; 1.1"),
        Key("neutron_star_max_msun", Number(0.1, 5.0, "Msun"), "heaviest neutron star; 2.3"),
        Key("black_hole_min_msun", Number(0.1, 100.0, "Msun"), "lightest black hole; 2.3"),
        Key("companion_to_seen_light_max", _above_zero(1e6), "brightest companion / seen star, optical; 3"),
    ),
)
PRIOR_ODDS: Final = Table(
    "prior_odds",
    "Weight of each explanation before the data; 1 when not given.",
    tuple(Key(name, Number(0.0, 1e12), "weight") for name in SCENARIO_NAMES),
)
PASSBAND: Final = Table(
    "passband",
    "A passband of your own.",
    (
        Key("id", BAND, "its identifier, to be used as a band", required=True),
        Key("file", FILE, "two columns, wavelength in angstrom and throughput, or a FITS table", required=True),
        Key("system", SYSTEM, "magnitude system; may be left out when the zero point is given"),
        Key("zero_point_jy", _above_zero(1e6, "Jy"), "flux density of magnitude 0"),
    ),
    repeated=True,
)

TABLES: Final = (
    SKY, DISTANCE, EXTINCTION, PRIMARY, ORBIT, THIELE_INNES, PHOTOMETRY, LIGHT_LIMIT, VELOCITIES, VARIABILITY,
    X_RAY, IMAGING, ASSUMPTIONS, PRIOR_ODDS, PASSBAND,
)  # fmt: skip
"""Every table below the top level, in the order of the documentation."""

TOP: Final = Table(
    "",
    "The system.",
    (
        Key("name", Text("the system's name", 200), "the system's name", required=True),
        Key("photometry_file", FILE, "CSV or ECSV with columns band, mag, error_mag and, optionally, system"),
        *(
            Key(t.name, ManyTables(t.name) if t.repeated else OneTable(t.name), t.meaning)
            for t in TABLES
            if t is not THIELE_INNES
        ),
    ),
)
"""The top level of the file."""

_HEADINGS: Final = [(name, table.heading) for table in (TOP, *TABLES) for name in table.kinds()]

HOMES: Final = {name: home for name, home in _HEADINGS if [other for other, _ in _HEADINGS].count(name) == 1}
"""The one table that each key belongs to; keys that several tables have are left out."""
