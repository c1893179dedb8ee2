"""Which passband comes from which file, and what its zero point is tied to."""

from __future__ import annotations

from dataclasses import dataclass

_SEDPY = "sedpy/data/filters/{}.par"
_SPECLITE = "speclite/data/filters/{}.ecsv"
_PYPHOT = "pyphot/libs/new_filters.hd5"


@dataclass(frozen=True)
class Band:
    """Recipe of one passband.

    Attributes
    ----------
    id : identifier of the IVOA photometry standard
    package, member : archive key and file inside it
    dataset : name inside an HDF5 file, else empty
    usual_system : "Vega" or "AB"
    vega_mag : magnitude of Vega in the band's Vega system
    vega : which spectrum of Vega, "stis" or "gaia"
    ab_offset_mag : magnitude in the band's own AB system minus true AB
    reference : who published the response curve, and the zero point where it needs a word
    synonyms : other identifiers of the same band
    """

    id: str
    package: str
    member: str
    reference: str
    usual_system: str = "Vega"
    vega_mag: float = 0.0
    vega: str = "stis"
    ab_offset_mag: float = 0.0
    dataset: str = ""
    synonyms: tuple[str, ...] = ()


_BESSELL = "Bessell 1990, PASP 102, 1181"
_TYCHO = "Bessell 2000, PASP 112, 961"
_SDSS = "Doi et al. 2010, AJ 139, 1628 (airmass 1.3 curves of Gunn, Doi and Eisenstein)"
_PS1 = "Tonry et al. 2012, ApJ 750, 99"
_SKYMAPPER = "Bessell et al. 2011, PASP 123, 789"
_GAIA = "Riello et al. 2021, A&A 649, A3"
_2MASS = "Cohen, Wheaton & Megeath 2003, AJ 126, 1090"
_WISE = "Wright et al. 2010, AJ 140, 1868"
_IRAC = "Quijada et al. 2004, SPIE 5487, 244"
_GALEX = "Morrissey et al. 2007, ApJS 173, 682"
_UVOT = "Breeveld et al. 2011, AIP Conf. Proc. 1358, 373"
_TESS = "Ricker et al. 2015, JATIS 1, 014003"

# Magnitudes of Vega: Johnson-Cousins from Bessell, Castelli & Plez 1998, A&A 333, 231 (V 0.03, V-R -0.009, V-I -0.005;
# from memory), which seven Landolt stars with CALSPEC spectra confirm to 0.01. Tycho B, Hipparcos: measured on CALSPEC
# stars and on the colours of B dwarfs. 2MASS H and WISE W1: the catalogues differ from Vega = 0 by a constant, seen
# alike in the mean dwarf sequence from 5000 to 25000 K (H +0.029, W1 -0.038) and in solar twins (+0.032, -0.028;
# Casagrande et al. 2012, ApJ 761, 16, from memory), while the spectrum of the Sun itself agrees with the models there.
BANDS: tuple[Band, ...] = (
    Band("GALEX/GALEX.FUV", "speclite", _SPECLITE.format("galex-fuv"), _GALEX, "AB"),
    Band("GALEX/GALEX.NUV", "speclite", _SPECLITE.format("galex-nuv"), _GALEX, "AB"),
    Band("Swift/UVOT.UVW2", "sedpy", _SEDPY.format("uvot_w2"), _UVOT),
    Band("Swift/UVOT.UVM2", "sedpy", _SEDPY.format("uvot_m2"), _UVOT),
    Band("Swift/UVOT.UVW1", "sedpy", _SEDPY.format("uvot_w1"), _UVOT),
    *(Band(f"Swift/UVOT.{b}", "piscola", f"piscola/filters/Swift/uvot_{b.lower()}.dat", _UVOT) for b in "UBV"),
    Band(
        "Generic/Johnson.U",
        "sedpy",
        _SEDPY.format("bessell_U"),
        _BESSELL,
        vega_mag=0.025,
        synonyms=("Generic/Bessell.U",),
    ),
    Band(
        "Generic/Johnson.B",
        "sedpy",
        _SEDPY.format("bessell_B"),
        _BESSELL,
        vega_mag=0.03,
        synonyms=("Generic/Bessell.B",),
    ),
    Band(
        "Generic/Johnson.V",
        "sedpy",
        _SEDPY.format("bessell_V"),
        _BESSELL,
        vega_mag=0.03,
        synonyms=("Generic/Bessell.V",),
    ),
    Band(
        "Generic/Cousins.R",
        "sedpy",
        _SEDPY.format("bessell_R"),
        _BESSELL,
        vega_mag=0.039,
        synonyms=("Generic/Bessell.R",),
    ),
    Band(
        "Generic/Cousins.I",
        "sedpy",
        _SEDPY.format("bessell_I"),
        _BESSELL,
        vega_mag=0.035,
        synonyms=("Generic/Bessell.I",),
    ),
    Band("TYCHO/TYCHO.B", "sedpy", _SEDPY.format("hipparcos_B"), _TYCHO, vega_mag=0.04),
    Band("TYCHO/TYCHO.V", "sedpy", _SEDPY.format("hipparcos_V"), _TYCHO, vega_mag=0.03),
    Band("Hipparcos/Hipparcos.Hp", "sedpy", _SEDPY.format("hipparcos_H"), _TYCHO, vega_mag=0.04),
    Band("SLOAN/SDSS.u", "sedpy", _SEDPY.format("sdss_u0"), _SDSS, "AB", ab_offset_mag=0.04),
    Band("SLOAN/SDSS.g", "sedpy", _SEDPY.format("sdss_g0"), _SDSS, "AB"),
    Band("SLOAN/SDSS.r", "sedpy", _SEDPY.format("sdss_r0"), _SDSS, "AB"),
    Band("SLOAN/SDSS.i", "sedpy", _SEDPY.format("sdss_i0"), _SDSS, "AB"),
    Band("SLOAN/SDSS.z", "sedpy", _SEDPY.format("sdss_z0"), _SDSS, "AB", ab_offset_mag=-0.02),
    *(Band(f"PAN-STARRS/PS1.{b}", "speclite", _SPECLITE.format(f"panstarrs-{b}"), _PS1, "AB") for b in "grizy"),
    *(
        Band(f"SkyMapper/SkyMapper.{b}", "pyphot", _PYPHOT, _SKYMAPPER, "AB", dataset=f"SkyMapper_{b}")
        for b in "uvgriz"
    ),
    Band("GAIA/GAIA3.G", "speclite", _SPECLITE.format("gaiadr3-G"), _GAIA, vega="gaia"),
    Band("GAIA/GAIA3.Gbp", "speclite", _SPECLITE.format("gaiadr3-BP"), _GAIA, vega="gaia"),
    Band("GAIA/GAIA3.Grp", "speclite", _SPECLITE.format("gaiadr3-RP"), _GAIA, vega="gaia"),
    Band("TESS/TESS.Red", "pyphot", _PYPHOT, _TESS, dataset="TESS"),
    Band("2MASS/2MASS.J", "speclite", _SPECLITE.format("twomass-J"), _2MASS),
    Band("2MASS/2MASS.H", "speclite", _SPECLITE.format("twomass-H"), _2MASS, vega_mag=0.03),
    Band("2MASS/2MASS.Ks", "speclite", _SPECLITE.format("twomass-Ks"), _2MASS),
    Band("WISE/WISE.W1", "speclite", _SPECLITE.format("wise2010-W1"), _WISE, vega_mag=-0.033),
    *(Band(f"WISE/WISE.W{i}", "speclite", _SPECLITE.format(f"wise2010-W{i}"), _WISE) for i in range(2, 5)),
    Band("Spitzer/IRAC.I1", "sedpy", _SEDPY.format("spitzer_irac_ch1"), _IRAC),
    Band("Spitzer/IRAC.I2", "sedpy", _SEDPY.format("spitzer_irac_ch2"), _IRAC),
)
