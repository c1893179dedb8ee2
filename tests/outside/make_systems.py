"""Write the system files whose light is made from published parameters by a route that is not our tables.

Run `python tests/outside/make_systems.py` to write `published/`, `binaries/` and `invented/` anew; a test compares.
Nothing of `vetter` is used here. The routes, in words that also stand in each file:

- dwarfs and subgiants: the surface brightness of the mean dwarf of the same Teff (Pecaut & Mamajek 2013, ApJS 208, 9,
  version 2022.04.16), scaled with the star's own radius. Gravity changes it by less than the 0.02 mag quoted.
- giants: colours of Ramirez & Melendez 2005, ApJ 626, 465 (tables 3 and 5, looked up in public code), and surface
  brightness S_V = 2.656 + 1.483 (V-K) - 0.044 (V-K)^2 of Di Benedetto 2005, MNRAS 357, 174 (from memory).
- the Sun and a hot white dwarf: measured spectra (CALSPEC, Bohlin et al.; the Sun and GD 71).
- dust: A_V = 3.1 E(B-V), other bands by the ratios of Schlafly & Finkbeiner 2011, ApJ 737, 103, table 6.

Magnitudes are given without noise and with 0.02 mag of error, so that a verdict hangs on the physics, not on a draw.
"""

from __future__ import annotations

import csv
import json
import textwrap
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from functools import cache
from pathlib import Path

import numpy as np

HERE = Path(__file__).parent
GRIDS = HERE.parent.parent / "grids"
MAG_ERROR = 0.02
LOG_G_SUN = 4.438
TEFF_SUN_K = 5772.0
K_SUN_KM_S = 212.91  # (2 pi G Msun / day)^(1/3)
SUN_ANGULAR_MAS = 9.3009  # diameter of one solar radius seen from 1 pc

OPTICAL = ("Generic/Johnson.B", "Generic/Johnson.V", "Generic/Cousins.I")
INFRARED = ("2MASS/2MASS.J", "2MASS/2MASS.H", "2MASS/2MASS.Ks")
HOT = ("Generic/Johnson.U", "Generic/Johnson.B", "Generic/Johnson.V")
FUV = "GALEX/GALEX.FUV"
DUST = {
    "Generic/Johnson.U": 4.334, "Generic/Johnson.B": 3.626, "Generic/Johnson.V": 2.742, "Generic/Cousins.I": 1.505,
    "2MASS/2MASS.J": 0.709, "2MASS/2MASS.H": 0.449, "2MASS/2MASS.Ks": 0.302,
}  # fmt: skip
# Ramirez & Melendez 2005, giants, [Fe/H] about zero: a0-a5 of table 3, then the polynomial of table 5.
GIANT_COLOURS = {
    "Generic/Johnson.B": ((0.5737, 0.4882, -0.0149, 0.0563, -0.1160, -0.0114),
                          (112.116, -372.622, 67.1254, 395.333, -203.471)),
    "Generic/Cousins.I": ((0.3575, 0.9069, -0.2025, 0.0395, -0.0551, -0.0061), (0.42933,)),
    "2MASS/2MASS.J": ((0.2943, 0.5604, -0.0677, 0.0179, -0.0532, -0.0088), (-122.595, 76.4847)),
    "2MASS/2MASS.H": ((0.4354, 0.3405, -0.0263, -0.0012, -0.0049, -0.0027), (-377.022, 334.733, -69.8093)),
    "2MASS/2MASS.Ks": ((0.4405, 0.3272, -0.0252, -0.0016, -0.0053, -0.0040), (-72.6664, 36.5361)),
}  # fmt: skip
GIANT_COLOUR_RANGE = {
    "Generic/Johnson.B": (0.3, 1.668), "Generic/Cousins.I": (0.573, 2.0), "2MASS/2MASS.J": (1.259, 2.4),
    "2MASS/2MASS.H": (1.194, 3.059), "2MASS/2MASS.Ks": (1.244, 3.286),
}  # fmt: skip


@dataclass(frozen=True)
class Star:
    """One star: Msun, Rsun, K; ``route`` is "dwarf" or "giant"."""

    mass: float
    radius: float
    teff: float
    route: str = "dwarf"

    @property
    def logg(self) -> float:
        """Surface gravity, log10 of cm/s2."""
        return LOG_G_SUN + float(np.log10(self.mass / self.radius**2))


@dataclass(frozen=True)
class Orbit:
    """Period (d), eccentricity, inclination (deg), K1 (km/s) and errors; without K1 it follows from the masses."""

    period: float
    e: float = 0.0
    inclination: float = 90.0
    k1: float | None = None
    k1_error: float | None = None
    inclination_error: float | None = 0.5


@dataclass(frozen=True)
class Made:
    """One system to write: the seen star first, then whatever hides, with the words that stand in the file."""

    file: str
    name: str
    truth: str
    words: str
    seen: Star
    hidden: tuple[Star, ...]
    hidden_mass: float
    orbit: Orbit
    teff_error: float
    logg_error: float
    feh: float = 0.0
    feh_error: float = 0.1
    v_mag: float | None = None
    distance_pc: float | None = None
    distance_error: float = 0.01
    ebv: float = 0.0
    ebv_error: float = 0.01
    bands: Sequence[str] = (*OPTICAL, *INFRARED)
    mag_error: float = MAG_ERROR
    logg: float | None = None
    extra: Mapping[str, float] = field(default_factory=dict)
    tail: str = ""


@cache
def sequence() -> dict[str, np.ndarray]:
    """Columns of the mean dwarf sequence, coolest first; nan where the table has no value."""
    with (GRIDS / "dwarf_sequence.csv").open(encoding="utf-8") as stream:
        rows = list(csv.DictReader(stream))[::-1]
    names = [name for name in rows[0] if name != "spectral_type"]
    return {name: np.array([float(row[name] or "nan") for row in rows]) for name in names}


def dwarf_mag(star: Star, band: str) -> float:
    """Absolute magnitude of a dwarf or subgiant: the mean dwarf of its Teff, scaled with the radius."""
    table = sequence()
    radius = 10.0 ** (0.5 * table["log_luminosity_lsun"]) * (TEFF_SUN_K / table["teff_k"]) ** 2
    colour = {
        "Generic/Johnson.U": table["U-B"] + table["B-V"], "Generic/Johnson.B": table["B-V"],
        "Generic/Johnson.V": 0.0 * table["B-V"], "Generic/Cousins.I": -table["V-I"],
        "2MASS/2MASS.J": -table["V-Ks"] + table["J-H"] + table["H-Ks"],
        "2MASS/2MASS.H": -table["V-Ks"] + table["H-Ks"], "2MASS/2MASS.Ks": -table["V-Ks"],
    }[band]  # fmt: skip
    surface = table["M_V"] + colour + 5.0 * np.log10(radius)
    return float(np.interp(np.log(star.teff), np.log(table["teff_k"]), surface) - 5.0 * np.log10(star.radius))


def giant_colour(teff: float, feh: float, band: str) -> float:
    """V minus band (B-V with its sign turned) of a giant: the relation solved for the colour."""
    (a0, a1, a2, a3, a4, a5), polynomial = GIANT_COLOURS[band]
    x = np.linspace(*GIANT_COLOUR_RANGE[band], 4001)
    theta = a0 + a1 * x + a2 * x**2 + a3 * x * feh + a4 * feh + a5 * feh**2
    temperature = 5040.0 / theta + np.polynomial.polynomial.polyval(x, polynomial)
    order = np.argsort(temperature)
    if not temperature.min() < teff < temperature.max():
        raise ValueError(f"{teff} K is outside the colours of {band}")
    found = float(np.interp(teff, temperature[order], x[order]))
    return -found if band == "Generic/Johnson.B" else found


def giant_mag(star: Star, feh: float, band: str) -> float:
    """Absolute magnitude of a giant."""
    v_ks = giant_colour(star.teff, feh, "2MASS/2MASS.Ks")
    brightness = 2.656 + 1.483 * v_ks - 0.044 * v_ks**2
    absolute_v = brightness - 5.0 * np.log10(star.radius * SUN_ANGULAR_MAS / 10.0)
    return float(absolute_v - (0.0 if band == "Generic/Johnson.V" else giant_colour(star.teff, feh, band)))


def star_mag(star: Star, feh: float, band: str) -> float:
    """Absolute magnitude by the star's own route."""
    return giant_mag(star, feh, band) if star.route == "giant" else dwarf_mag(star, band)


def total_mag(made: Made, band: str) -> float:
    """Absolute magnitude of everything together."""
    return -2.5 * float(np.log10(sum(10.0 ** (-0.4 * star_mag(s, made.feh, band)) for s in (made.seen, *made.hidden))))


def v_ratio(made: Made) -> float:
    """Light of what hides over that of the seen star, in V."""
    seen = star_mag(made.seen, made.feh, "Generic/Johnson.V")
    return sum(10.0 ** (-0.4 * (star_mag(s, made.feh, "Generic/Johnson.V") - seen)) for s in made.hidden)


def k1_km_s(made: Made) -> float:
    """Semi-amplitude of the seen star from the masses."""
    orbit = made.orbit
    total = made.seen.mass + made.hidden_mass
    sine = np.sin(np.radians(orbit.inclination)) / np.sqrt(1.0 - orbit.e**2)
    return float(K_SUN_KM_S * made.hidden_mass * sine / (total ** (2.0 / 3.0) * orbit.period ** (1.0 / 3.0)))


def spectrum_mag(star: str, band: str) -> float:
    """Magnitude, in the band's usual system, of a measured spectrum of `standard_stars.npz`."""
    entries = json.loads((GRIDS / "passbands.json").read_text(encoding="utf-8"))
    place = next(i for i, entry in enumerate(entries) if entry["id"] == band)
    with np.load(GRIDS / "passbands.npz", allow_pickle=False) as archive:
        wavelength, throughput = archive[f"wavelength_{place}"], archive[f"throughput_{place}"]
    with np.load(HERE / "standard_stars.npz", allow_pickle=False) as archive:
        x, flux = (archive[f"{star}_{part}"].astype(np.float64) for part in ("wavelength", "flux"))
    union = np.union1d(wavelength, x[(x > wavelength[0]) & (x < wavelength[-1])])
    kernel = np.interp(union, wavelength, throughput) * union
    mean = np.trapezoid(kernel * np.interp(union, x, flux), union) / np.trapezoid(kernel, union)
    return float(-2.5 * np.log10(mean / entries[place][f"zero_flux_{entries[place]['usual_system'].lower()}"]))


def dimming_mag(ebv: float, band: str) -> float:
    """Extinction in a band."""
    return 3.1 * ebv * DUST[band] / DUST["Generic/Johnson.V"]


def distance_pc(made: Made) -> float:
    """The given distance, or the one at which the made light has the catalogued V."""
    if made.distance_pc is not None or made.v_mag is None:
        return float(made.distance_pc or 0.0)
    dust = dimming_mag(made.ebv, "Generic/Johnson.V")
    return float(10.0 ** (0.2 * (made.v_mag - dust - total_mag(made, "Generic/Johnson.V") + 5.0)))


def magnitudes(made: Made) -> dict[str, float]:
    """Apparent magnitudes of the whole system, with dust."""
    modulus = 5.0 * np.log10(distance_pc(made) / 10.0)
    light = {band: float(total_mag(made, band) + modulus + dimming_mag(made.ebv, band)) for band in made.bands}
    return light | dict(made.extra)


def text(made: Made) -> str:
    """The system file."""
    pc, orbit = distance_pc(made), made.orbit
    k1 = k1_km_s(made) if orbit.k1 is None else orbit.k1
    error = max(0.002 * k1, 0.05) if orbit.k1_error is None else orbit.k1_error
    seen = made.seen
    logg = seen.logg if made.logg is None else made.logg
    lines = [
        *textwrap.wrap(" ".join(made.words.split()), 118, initial_indent="# ", subsequent_indent="# "),
        f"# Truth: {made.truth}",
        f'name = "{made.name}"', "", "[distance]", f"distance_pc = {pc:.6g}",
        f"distance_error_pc = {made.distance_error * pc:.4g}", "",
        "[extinction]", f"ebv_mag = {made.ebv:.4g}", f"ebv_error_mag = {made.ebv_error:.3g}", "",
        "[primary]", f"teff_k = {seen.teff:g}", f"teff_error_k = {made.teff_error:g}",
        f"logg = {logg:.4g}", f"logg_error = {made.logg_error:g}",
        f"feh = {made.feh:g}", f"feh_error = {made.feh_error:g}", "",
        "[orbit]", f"period_d = {orbit.period:g}", f"eccentricity = {orbit.e:g}",
        f"k1_km_s = {k1:.5g}", f"k1_error_km_s = {error:.3g}",
    ]  # fmt: skip
    if orbit.inclination_error is not None:
        lines += [f"inclination_deg = {orbit.inclination:g}", f"inclination_error_deg = {orbit.inclination_error:g}"]
    for band, mag in magnitudes(made).items():
        lines += ["", "[[photometry]]", f'band = "{band}"', f"mag = {mag:.3f}", f"error_mag = {made.mag_error:g}"]
    return "\n".join(lines) + "\n" + made.tail


def files() -> dict[Path, str]:
    """Every file with its content."""
    folders = {"published": published(), "binaries": binaries(), "invented": invented()}
    made = {HERE / folder / f"{each.file}.toml": text(each) for folder, many in folders.items() for each in many}
    return made | {HERE / "invented" / "sun_like.toml": sun_like()}


MADE_DWARFS = """Light: made, surface brightness of mean dwarfs of the same Teff (Pecaut & Mamajek 2013, ApJS 208, 9,
version 2022.04.16) scaled with both published radii; {anchor}."""
ANCHORED = "the distance is the one at which it has the catalogued V (0.01 error, judgement)"
DEBCAT = """{name} with its fainter star hidden. Masses, radii, Teff, log g, period, V: DEBCat (Southworth 2015,
ASPC 496, 164, copy of 2019-20), [Fe/H] the same where given, else 0.0 +- 0.2. K1: derived from the masses,
so it is no independent check of the mass."""


def published() -> list[Made]:
    """Published systems without photometry in hand."""
    return [v530_ori(), kic_8410637(), v404_cyg(), vfts_243()]


def v530_ori() -> Made:
    """A G dwarf with an M dwarf."""
    words = DEBCAT.format(name="V530 Ori") + "\nEccentricity and inclination: from memory.\n"
    words += MADE_DWARFS.format(anchor=ANCHORED)
    seen, hidden = Star(1.0037, 0.9799, 5984.0), Star(0.5955, 0.5874, 3882.0)
    orbit = Orbit(6.111, 0.088, 89.8, inclination_error=0.2)
    return Made("v530_ori", "V530 Ori, fainter star hidden", "main_sequence", words, seen, (hidden,), 0.5955, orbit,
                96.0, 0.012, -0.12, 0.08, v_mag=9.96, logg=4.457)  # fmt: skip


def kic_8410637() -> Made:
    """A red giant with an F dwarf."""
    words = """KIC 8410637 with its F dwarf hidden. Masses, radii, Teff, log g, [Fe/H], period, V: DEBCat (Southworth
2015, ASPC 496, 164). K1: derived from the masses; eccentricity and inclination: from memory.
Light: made. Giant: colours of Ramirez & Melendez 2005, ApJ 626, 465, and surface brightness of Di Benedetto 2005, MNRAS
357, 174; F dwarf: mean dwarf of its Teff (Pecaut & Mamajek 2013, ApJS 208, 9) scaled with its radius; the distance is
the one at which both have the catalogued V (0.01 error, judgement)."""
    seen, hidden = Star(1.472, 10.595, 4603.0, "giant"), Star(1.3089, 1.556, 6067.0)
    orbit = Orbit(408.324, 0.686, 89.6, inclination_error=0.1)
    return Made("kic_8410637", "KIC 8410637, F dwarf hidden", "main_sequence", words, seen, (hidden,), 1.3089, orbit,
                85.0, 0.003, 0.02, 0.08, v_mag=11.33, logg=2.556)  # fmt: skip


def v404_cyg() -> Made:
    """A stripped giant that fills its Roche lobe beside a black hole."""
    words = """V404 Cyg in quiescence. K1, period: Casares & Charles 1994; inclination: Khargharia et al. 2010;
distance: Miller-Jones et al. 2009; A_V 4.0; Teff, log g, [Fe/H]: an encyclopedia table; errors of the last
four: judgement. Log g 3.5 does not agree with the 0.7 Msun and 6.0 Rsun of the same table (2.73), hence its
error of 0.5. Light: made from 4800 K and 6.0 Rsun. Colours of giants of Ramirez & Melendez 2005, ApJ 626, 465,
surface brightness of Di Benedetto 2005, MNRAS 357, 174, dust of
Schlafly & Finkbeiner 2011; 0.1 mag of error for the light of the disc."""
    orbit = Orbit(6.4714, 0.0, 67.0, k1=208.4, k1_error=0.6, inclination_error=2.0)
    return Made("v404_cyg", "V404 Cyg", "black_hole", words, Star(0.7, 6.0, 4800.0, "giant"), (), 9.0, orbit,
                100.0, 0.5, 0.23, 0.19, distance_pc=2390.0, distance_error=0.0586, ebv=1.29, ebv_error=0.1,
                bands=("Generic/Johnson.V", "Generic/Cousins.I", *INFRARED), mag_error=0.1, logg=3.5)  # fmt: skip


def vfts_243() -> Made:
    """An O star with a black hole, in the Large Magellanic Cloud."""
    words = """VFTS 243. Orbit, Teff, log g, radius: Shenar et al. 2022, Nature Astronomy 6, 1085; errors of Teff and
log g: judgement; no inclination. V 15.26: Evans et al. 2011. Distance: Pietrzynski et al. 2013. [Fe/H] of the
cloud: -0.35. Light: made, surface brightness of the mean dwarf of that Teff (Pecaut & Mamajek 2013, ApJS 208, 9)
scaled with the published radius of the O star alone, reddened by what the catalogued V asks for (Schlafly &
Finkbeiner 2011)."""
    seen = Star(25.0, 10.3, 36000.0)
    ebv = (15.26 - dwarf_mag(seen, "Generic/Johnson.V") - 5.0 * np.log10(4997.0)) / 3.1
    orbit = Orbit(10.4031, 0.017, k1=81.4, k1_error=1.3, inclination_error=None)
    return Made("vfts_243", "VFTS 243", "black_hole", words, seen, (), 10.1, orbit, 1000.0, 0.1, -0.35, 0.1,
                distance_pc=49970.0, distance_error=0.0224, ebv=round(float(ebv), 3), ebv_error=0.05, bands=HOT,
                logg=3.7)  # fmt: skip


def binaries() -> list[Made]:
    """More detached eclipsing binaries, fainter star hidden, in DEBCat's numbers."""
    rows = {  # seen star, hidden star, log g and its error, error of Teff, [Fe/H] and its error, period, V
        "EF Aqr": (Star(1.244, 1.338, 6152), Star(0.946, 0.956, 5188), 4.280, 0.007, 85, 0.0, 0.1, 2.854, 9.89),
        "LL Aqr": (Star(1.196, 1.321, 6081), Star(1.034, 1.002, 5702), 4.274, 0.004, 42, 0.02, 0.04, 20.178, 9.32),
        "WASP 0639-32":
            (Star(1.155, 1.834, 6324), Star(0.783, 0.729, 5395), 3.974, 0.011, 44, -0.33, 0.1, 11.658, 10.66),
        "EPIC 219568666":
            (Star(1.121, 1.178, 6138), Star(0.733, 0.640, 4498), 4.346, 0.005, 99, 0.07, 0.03, 11.991, 11.86),
        "ASAS J065134-2211.5":
            (Star(0.956, 0.997, 5495), Star(0.674, 0.690, 3972), 4.421, 0.003, 101, 0.09, 0.13, 8.220, 9.83),
        "V2365 Oph": (Star(1.965, 2.190, 9506), Star(1.056, 0.934, 6397), 4.051, 0.003, 197, 0.0, 0.2, 4.866, 8.86),
        "TZ Men": (Star(2.487, 2.016, 10399), Star(1.504, 1.432, 7194), 4.225, 0.011, 407, 0.0, 0.2, 8.570, 6.19),
    }  # fmt: skip
    made = []
    for name, (seen, hidden, logg, logg_error, teff_error, feh, feh_error, period, v_mag) in rows.items():
        words = DEBCAT.format(name=name) + " Taken as circular and seen edge on. " + MADE_DWARFS.format(anchor=ANCHORED)
        file = name.lower().replace(" ", "_").replace("-", "_").replace(".", "_")
        made.append(Made(file, f"{name}, fainter star hidden", "main_sequence", words, seen, (hidden,), hidden.mass,
                         Orbit(period), teff_error, logg_error, feh, feh_error, v_mag=v_mag, logg=logg))  # fmt: skip
    return made


def invented() -> list[Made]:
    """Invented systems after published refutations."""
    return [stripped_giant(), stripped_b_star(), pair_of_k_dwarfs(), hot_white_dwarf(), o_star()]


GIANT_ROUTE = "Giant: Ramirez & Melendez 2005 and Di Benedetto 2005. Others: mean dwarfs of the same Teff."


def stripped_giant() -> Made:
    """A stripped giant beside a subgiant that weighs six times as much and shines as brightly."""
    words = f"""An invented system: what looks like a red giant of a solar mass has 0.45 Msun, and the unseen mass is a
subgiant of 2.7 Msun that gives more than half of the light. {GIANT_ROUTE}"""
    seen, hidden = Star(0.45, 19.0, 4150.0, "giant"), Star(2.7, 8.8, 5900.0)
    return Made("stripped_giant", "Ashgrove 4", "stripped_primary", words, seen, (hidden,), 2.7,
                Orbit(58.0, 0.0, 78.0, inclination_error=3.0), 100.0, 0.15, distance_pc=900.0)  # fmt: skip


def stripped_b_star() -> Made:
    """A stripped B star beside a B star that rotates so fast that no line of it is seen."""
    words = """An invented system: what looks like a B giant of 5 Msun has 1.2 Msun, and the unseen mass is an ordinary
B star of 5.5 Msun that rotates so fast that a search for narrow lines misses it. Light: mean dwarfs of the same
Teff."""
    tail = """
[[light_limit]]  # a search for lines as narrow as the seen star's
wavelength_nm = [440.0, 460.0]
ratio_max = 0.05
confidence = 0.95
vsini_max_km_s = 100.0
"""
    seen, hidden = Star(1.2, 5.0, 13000.0), Star(5.5, 3.5, 17000.0)
    return Made("stripped_b_star", "Pell 19", "stripped_primary", words, seen, (hidden,), 5.5,
                Orbit(41.0, 0.0, 60.0, inclination_error=None), 500.0, 0.1, distance_pc=1600.0, tail=tail)  # fmt: skip


def pair_of_k_dwarfs() -> Made:
    """A red giant with two K dwarfs that give half a per cent of its light."""
    words = f"""An invented system: a red giant of 1.2 Msun, and two K dwarfs of 0.75 and 0.70 Msun in a tight orbit.
{GIANT_ROUTE}"""
    seen = Star(1.2, 11.0, 4750.0, "giant")
    hidden = (Star(0.75, 0.715, 4760.0), Star(0.70, 0.67, 4450.0))
    return Made("pair_of_k_dwarfs", "Tarn 2", "inner_pair", words, seen, hidden, 1.45,
                Orbit(310.0, 0.15, 70.0, inclination_error=None), 80.0, 0.08, distance_pc=700.0)  # fmt: skip


def hot_white_dwarf() -> Made:
    """An F star with a white dwarf that only the far ultraviolet shows."""
    pc = 150.0
    fuv = spectrum_mag("gd71", FUV) + 5.0 * float(np.log10(pc / 51.1))
    words = """An invented system: an F dwarf of 1.3 Msun and a twin of the white dwarf GD 71, which gives all of the
far ultraviolet. Light: mean dwarf of that Teff; FUV of the measured spectrum of GD 71 (CALSPEC), moved from 51.1 pc
(parallax from memory). The F star's own FUV is left out: its photosphere adds less than a per cent there."""
    return Made("hot_white_dwarf", "Quill 8", "white_dwarf", words, Star(1.3, 1.4, 6500.0), (), 0.62,
                Orbit(120.0, 0.0, 75.0, inclination_error=None), 80.0, 0.07, distance_pc=pc,
                extra={FUV: fuv})  # fmt: skip


def o_star() -> Made:
    """An O star whose ordinary companion gives 9 % of V."""
    words = """An invented system: an O9 dwarf of 20 Msun with an ordinary B star of 6.7 Msun that gives 9 % of its V
light. Light: mean dwarfs of the same Teff; dust of Schlafly & Finkbeiner 2011."""
    seen, hidden = Star(20.0, 7.9, 33000.0), Star(6.7, 3.95, 19600.0)
    return Made("o_star", "Harrow 31", "main_sequence", words, seen, (hidden,), 6.7,
                Orbit(14.0, 0.1, 70.0, inclination_error=3.0), 700.0, 0.1, distance_pc=2000.0, distance_error=0.03,
                ebv=0.3, ebv_error=0.03)  # fmt: skip


def sun_like() -> str:
    """A Sun-like star of V 13.77 at 1550 light-years with 9.6 Msun of darkness; its light is the Sun's."""
    pc = 1550.0 / 3.26156
    at_sun = 5.0 * np.log10(pc * 206264.806)
    dust = 13.77 - spectrum_mag("sun", "Generic/Johnson.V") - at_sun
    extra = {
        band: float(spectrum_mag("sun", band) + at_sun + dust * DUST[band] / DUST["Generic/Johnson.V"])
        for band in (*OPTICAL, *INFRARED)
    }
    words = """An invented system with the brightness, distance and masses of a fact of the trade (common practice, no
source): a Sun-like star of V 13.77 at 1550 light-years, circled by 9.6 Msun that adds no light; orbit invented.
Light: the measured spectrum of the Sun (CALSPEC) at that distance behind the dust that V asks for."""
    made = Made("sun_like", "Wick 5", "black_hole", words, Star(1.0, 1.0, 5772.0), (), 9.6,
                Orbit(240.0, 0.3, 65.0, inclination_error=2.0), 80.0, 0.08, distance_pc=pc, bands=(),
                extra=extra)  # fmt: skip
    return text(made).replace("ebv_mag = 0\nebv_error_mag = 0.01", "ebv_max_mag = 0.5")


if __name__ == "__main__":
    for path, content in files().items():
        path.write_text(content, encoding="utf-8")
