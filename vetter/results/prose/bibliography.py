"""Full entries of the published methods and data that the words cite. A work that is not cited is not listed."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

from vetter.results.prose.document import Citation, Sentence

OTHERS = "others"
"""Stands for the authors left out of a long list, as BibTeX writes it."""


@dataclass(frozen=True)
class Work:
    """A published work: ``authors`` as ``Last, F. M.``; ``journal`` is empty for a work that is none."""

    authors: tuple[str, ...]
    year: int
    title: str
    journal: str = ""
    volume: str = ""
    pages: str = ""
    published: str = ""

    @property
    def short(self) -> str:
        """The authors as in a sentence: one, two, or the first with ``et al.``."""
        last = [author.split(",")[0] for author in self.authors]
        if len(last) > 2:
            return f"{last[0]} et al."
        return " & ".join(last)


def _work(authors: str, year: int, title: str, journal: str, volume: str, pages: str) -> Work:
    return Work(tuple(authors.split("; ")), year, title, journal, volume, pages)


WORKS = {
    "bailerjones2015": _work(
        "Bailer-Jones, C. A. L.", 2015, "Estimating Distances from Parallaxes", "PASP", "127", "994"
    ),
    "bedard2020": _work(
        "Bédard, A.; Bergeron, P.; Brassard, P.; Fontaine, G.",
        2020,
        "On the Spectral Evolution of Hot White Dwarf Stars. I. A Detailed Model Atmosphere Analysis of Hot White "
        "Dwarfs from SDSS DR12",
        "ApJ",
        "901",
        "93",
    ),
    "bessell1990": _work("Bessell, M. S.", 1990, "UBVRI Passbands", "PASP", "102", "1181"),
    "bessell2000": _work(
        "Bessell, M. S.", 2000, "The Hipparcos and Tycho Photometric System Passbands", "PASP", "112", "961"
    ),
    "bessell2011": _work(
        "Bessell, M.; Bloxham, G.; Schmidt, B.; Keller, S.; Tisserand, P.; Francis, P.",
        2011,
        "SkyMapper Filter Set: Design and Fabrication of Large-Scale Optical Filters",
        "PASP",
        "123",
        "789",
    ),
    "breeveld2011": _work(
        "Breeveld, A. A.; Landsman, W.; Holland, S. T.; Roming, P.; Kuin, N. P. M.; Page, M. J.",
        2011,
        "An Updated Ultraviolet Calibration for the Swift/UVOT",
        "AIP Conf. Proc.",
        "1358",
        "373",
    ),
    "cohen2003": _work(
        "Cohen, M.; Wheaton, Wm. A.; Megeath, S. T.",
        2003,
        "Spectral Irradiance Calibration in the Infrared. XIV. The Absolute Calibration of 2MASS",
        "AJ",
        "126",
        "1090",
    ),
    "doi2010": _work(
        "Doi, M.; Tanaka, M.; Fukugita, M.; Gunn, J. E.; Yasuda, N.; others",
        2010,
        "Photometric Response Functions of the Sloan Digital Sky Survey Imager",
        "AJ",
        "139",
        "1628",
    ),
    "eggleton1983": _work("Eggleton, P. P.", 1983, "Approximations to the Radii of Roche Lobes", "ApJ", "268", "368"),
    "gordon2023": _work(
        "Gordon, K. D.; Clayton, G. C.; Decleir, M.; Fitzpatrick, E. L.; Massa, D.; Misselt, K. A.; Tollerud, E. J.",
        2023,
        "One Relation for All Wavelengths: The Far-ultraviolet to Mid-infrared Milky Way Spectroscopic "
        "R(V)-dependent Dust Extinction Relationship",
        "ApJ",
        "950",
        "86",
    ),
    "hurley2000": _work(
        "Hurley, J. R.; Pols, O. R.; Tout, C. A.",
        2000,
        "Comprehensive Analytic Formulae for Stellar Evolution as a Function of Mass and Metallicity",
        "MNRAS",
        "315",
        "543",
    ),
    "kurucz1993": Work(
        ("Kurucz, R. L.",),
        1993,
        "ATLAS9 Stellar Atmosphere Programs and 2 km/s Grid",
        published="Kurucz CD-ROM No. 13, Smithsonian Astrophysical Observatory, Cambridge, MA",
    ),
    "lejeune1997": _work(
        "Lejeune, Th.; Cuisinier, F.; Buser, R.",
        1997,
        "Standard Stellar Library for Evolutionary Synthesis. I. Calibration of Theoretical Spectra",
        "A&AS",
        "125",
        "229",
    ),
    "morris1985": _work("Morris, S. L.", 1985, "The Ellipsoidal Variable Stars", "ApJ", "295", "143"),
    "morrissey2007": _work(
        "Morrissey, P.; Conrow, T.; Barlow, T. A.; Small, T.; Seibert, M.; others",
        2007,
        "The Calibration and Data Products of GALEX",
        "ApJS",
        "173",
        "682",
    ),
    "pecaut2013": _work(
        "Pecaut, M. J.; Mamajek, E. E.",
        2013,
        "Intrinsic Colors, Temperatures, and Bolometric Corrections of Pre-main-sequence Stars",
        "ApJS",
        "208",
        "9",
    ),
    "pickles1998": _work("Pickles, A. J.", 1998, "A Stellar Spectral Flux Library: 1150-25000 Å", "PASP", "110", "863"),
    "quijada2004": _work(
        "Quijada, M. A.; Marx, C. T.; Arendt, R. G.; Moseley, S. H.",
        2004,
        "Angle-of-incidence Effects in the Spectral Performance of the Infrared Array Camera of the Spitzer Space "
        "Telescope",
        "Proc. SPIE",
        "5487",
        "244",
    ),
    "ricker2015": _work(
        "Ricker, G. R.; Winn, J. N.; Vanderspek, R.; Latham, D. W.; Bakos, G. Á.; others",
        2015,
        "Transiting Exoplanet Survey Satellite (TESS)",
        "JATIS",
        "1",
        "014003",
    ),
    "riello2021": _work(
        "Riello, M.; De Angeli, F.; Evans, D. W.; Montegriffo, P.; Carrasco, J. M.; others",
        2021,
        "Gaia Early Data Release 3. Photometric Content and Validation",
        "A&A",
        "649",
        "A3",
    ),
    "tonry2012": _work(
        "Tonry, J. L.; Stubbs, C. W.; Lykke, K. R.; Doherty, P.; Shivvers, I. S.; others",
        2012,
        "The Pan-STARRS1 Photometric System",
        "ApJ",
        "750",
        "99",
    ),
    "torres2010": _work(
        "Torres, G.; Andersen, J.; Giménez, A.",
        2010,
        "Accurate Masses and Radii of Normal Stars: Modern Results and Applications",
        "A&ARv",
        "18",
        "67",
    ),
    "tout1996": _work(
        "Tout, C. A.; Pols, O. R.; Eggleton, P. P.; Han, Z.",
        1996,
        "Zero-age Main-sequence Radii and Luminosities as Analytic Functions of Mass and Metallicity",
        "MNRAS",
        "281",
        "257",
    ),
    "vehtari2024": _work(
        "Vehtari, A.; Simpson, D.; Gelman, A.; Yao, Y.; Gabry, J.",
        2024,
        "Pareto Smoothed Importance Sampling",
        "J. Mach. Learn. Res.",
        "25(72)",
        "1",
    ),
    "vynatheya2022": _work(
        "Vynatheya, P.; Hamers, A. S.; Mardling, R. A.; Bellinger, E. P.",
        2022,
        "Algebraic and Machine Learning Approach to Hierarchical Triple-star Stability",
        "MNRAS",
        "516",
        "4146",
    ),
    "wright2010": _work(
        "Wright, E. L.; Eisenhardt, P. R. M.; Mainzer, A. K.; Ressler, M. E.; Cutri, R. M.; others",
        2010,
        "The Wide-field Infrared Survey Explorer (WISE): Mission Description and Initial On-orbit Performance",
        "AJ",
        "140",
        "1868",
    ),
}
"""Works by key, compiled from the published papers; the same references stand in the code beside what uses them."""

PASSBAND_WORKS = {
    "Generic/Johnson": "bessell1990",
    "Generic/Cousins": "bessell1990",
    "TYCHO/TYCHO": "bessell2000",
    "Hipparcos/Hipparcos": "bessell2000",
    "SLOAN/SDSS": "doi2010",
    "PAN-STARRS/PS1": "tonry2012",
    "SkyMapper/SkyMapper": "bessell2011",
    "GAIA/GAIA3": "riello2021",
    "2MASS/2MASS": "cohen2003",
    "WISE/WISE": "wright2010",
    "Spitzer/IRAC": "quijada2004",
    "GALEX/GALEX": "morrissey2007",
    "Swift/UVOT": "breeveld2011",
    "TESS/TESS": "ricker2015",
}
"""Who published the passbands, by the group of their identifiers."""


def passband_works(bands: Iterable[str]) -> tuple[str, ...]:
    """Return the keys of the works that published these bands, each once, in order of the bands."""
    groups = [band.rpartition(".")[0] for band in bands]
    return tuple(dict.fromkeys(PASSBAND_WORKS[group] for group in groups if group in PASSBAND_WORKS))


def cited(sentences: Iterable[Sentence]) -> list[str]:
    """Return the keys that sentences cite, each once, in alphabetical order of authors and year."""
    keys = {key for sentence in sentences for part in sentence if isinstance(part, Citation) for key in part.keys}
    return sorted(keys, key=lambda key: (WORKS[key].short.lower(), WORKS[key].year))


def plain_entry(work: Work) -> str:
    """Return a work as one line of a reference list."""
    authors = ", ".join("et al." if author == OTHERS else author for author in work.authors)
    where = f"{work.journal}, {work.volume}, {work.pages}" if work.journal else work.published
    return f"{authors} {work.year}, {work.title}, {where}"


def cited_as(citation: Citation) -> str:
    """Return a citation as plain text: ``Torres et al. (2010)`` or ``(Torres et al. 2010)``."""
    works = [WORKS[key] for key in citation.keys]
    if citation.in_text:
        return " and ".join(f"{work.short} ({work.year})" for work in works)
    return "(" + "; ".join(f"{work.short} {work.year}" for work in works) + ")"
