"""A complete system file, a least one, and the files that they name."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import pytest

from vetter.errors import Fault, InputError
from vetter.system import System, read_system

FULL = """\
name = "Marlow 7"
photometry_file = "more.csv"
[sky]
ra_deg = 281.12
dec_deg = -12.50
[distance]
parallax_mas = 1.73
parallax_error_mas = 0.02
parallax_zero_point_mas = -0.03
[extinction]
ebv_mag = 0.12
ebv_error_mag = 0.02
r_v = 3.1
[primary]
teff_k = 5960
teff_error_k = 80
logg = 4.30
logg_error = 0.10
feh = 0.10
feh_error = 0.10
vsini_km_s = 4.0
mass_msun = 1.02
mass_error_msun = 0.05
[orbit]
period_d = 212.4
period_error_d = 0.05
eccentricity = 0.31
eccentricity_error = 0.01
k1_km_s = 53.2
k1_error_km_s = 0.6
inclination_deg = 58.0
inclination_error_deg = 0.5
photocentre_mas = 2.02
photocentre_error_mas = 0.03
photocentre_band = "GAIA/GAIA3.G"
[[photometry]]
band = "GAIA/GAIA3.G"
mag = 12.914
error_mag = 0.003
system = "Vega"
[[photometry]]
band = "GALEX/GALEX.NUV"
fainter_than_mag = 21.5
confidence = 0.95
[[photometry]]
band = "own.H"
mag = 11.0
error_mag = 0.02
[[light_limit]]
wavelength_nm = [ 480.0, 520.0 ]
ratio_max = 0.03
confidence = 0.95
vsini_max_km_s = 100
teff_range_k = [4000, 9000]
[velocities]
file = "marlow7_rv.csv"
[variability]
band = "TESS/TESS.Red"
ellipsoidal_max_mag = 0.002
eclipses = "none"
eclipse_depth_min_mag = 0.005
[x_ray]
luminosity_max_erg_s = 3e30
confidence = 0.95
[imaging]
band = "2MASS/2MASS.Ks"
separation_mas = [50, 100, 200]
contrast_mag = [3.0, 4.5, 6.0]
[assumptions]
white_dwarf_max_msun = 1.40
neutron_star_min_msun = 1.2
neutron_star_max_msun = 2.2
black_hole_min_msun = 2.5
companion_to_seen_light_max = 2
[prior_odds]
black_hole = 0.5
inner_pair = 2
[[passband]]
id = "own.H"
file = "own_h.txt"
system = "AB"
zero_point_jy = 3631
"""

LEAST = """\
name = "Least"
[distance]
distance_pc = 578
distance_error_pc = 7
[orbit]
period_d = 3
k1_km_s = 40
k1_error_km_s = 1
[[photometry]]
band = "B"
mag = 12
error_mag = 0.1
[[photometry]]
band = "V"
mag = 11
error_mag = 0.1
[[photometry]]
band = "Ks"
mag = 10
error_mag = 0.1
"""

FILES = {
    "more.csv": "band,mag,error_mag,system\n2MASS/2MASS.J,11.5,0.02,\nSLOAN/SDSS.r,13.1,0.03,Vega\n",
    "marlow7_rv.csv": "time_bjd,rv_km_s,rv_error_km_s\n2459000.5,-10.5,0.1\n2459010.5,12,0.2\n2459020.5,40.25,0.1\n",
    "own_h.txt": "# angstrom, throughput\n15000 0.0\n16000 0.8\n18000 0.0\n",
}

Read = Callable[..., System]


@pytest.fixture
def full_text() -> str:
    return FULL


@pytest.fixture
def least_text() -> str:
    return LEAST


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    for name, text in FILES.items():
        (tmp_path / name).write_text(text, encoding="utf-8")
    return tmp_path


@pytest.fixture
def read(folder: Path) -> Read:
    """Write the text as a system file beside the data files, with other files on top, and read it."""

    def write_and_read(text: str, **files: str) -> System:
        for name, content in files.items():
            (folder / name.replace("__", ".")).write_text(content, encoding="utf-8")
        path = folder / "system.toml"
        path.write_text(text, encoding="utf-8")
        return read_system(path)

    return write_and_read


@pytest.fixture
def faults(read: Read) -> Callable[..., tuple[Fault, ...]]:
    """Return the faults that reading the text ends in."""

    def collect(text: str, **files: str) -> tuple[Fault, ...]:
        with pytest.raises(InputError) as caught:
            read(text, **files)
        assert caught.value.source.endswith("system.toml")
        return caught.value.faults

    return collect
