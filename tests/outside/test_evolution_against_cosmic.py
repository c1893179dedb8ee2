"""Published formulas of stellar evolution against the package cosmic-popsynth (Breivik et al. 2020, ApJ 898, 71).

Single stars without wind, solar metal fraction 0.02. The package codes the same papers (Tout et al. 1996; Hurley, Pols
& Tout 2000) in Fortran. One rule of the paper is not that of its authors' code: the share x of eq. 6. The package and
this project take the code's; ``tests/stars/test_hpt.py`` states by how much the paper's changes a lifetime (0.9 %).
"""

from __future__ import annotations

import ast
import json
import operator
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from vetter.stars import evolved, helium, hpt
from vetter.stars.hpt_coefficients import Z_SUN
from vetter.stars.properties import teff_from_luminosity_k

pytestmark = [pytest.mark.slow, pytest.mark.filterwarnings("ignore")]

STARS = 200
MAIN_SEQUENCE, GAP, GIANT_BRANCH, CORE_HELIUM, HELIUM_STAR, NO_STAR = (0, 1), 2, 3, 4, 7, 15
LIGHTEST_QUIET_IGNITION_MSUN = 2.2
"""Above this mass (1.7-2.1 Msun, eq. 2) helium ignites without a flash and the package shows L at ignition."""


def _number(text: str) -> Any:  # noqa: ANN401 - numbers and nested lists of them
    """Return the value of a setting; some are written as fractions."""

    def value(node: ast.expr) -> Any:  # noqa: ANN401
        if isinstance(node, ast.List):
            return [value(item) for item in node.elts]
        if isinstance(node, ast.BinOp) and isinstance(node.op, ast.Div):
            return operator.truediv(value(node.left), value(node.right))
        return ast.literal_eval(node)

    return value(ast.parse(text, mode="eval").body)


@pytest.fixture(autouse=True)
def _elsewhere(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """The package leaves files where it runs."""
    monkeypatch.chdir(tmp_path)


@pytest.fixture(scope="module")
def settings() -> dict[str, Any]:
    """Return the package's own default settings, without wind and for the papers' solar metal fraction."""
    cosmic = pytest.importorskip("cosmic")
    sections = json.loads((Path(cosmic.__file__).parent / "data" / "cosmic-settings.json").read_text())
    entries = next(section["settings"] for section in sections if section["category"] == "bse")
    chosen = {e["name"]: next(o["name"] for o in e["options"] if o.get("default")) for e in entries}
    numbers = {name: _number(value) if isinstance(value, str) else value for name, value in chosen.items()}
    return {**numbers, "windflag": -1, "zsun": 0.02, "pts1": 0.001}


def _evolve(settings: dict[str, Any], mass: np.ndarray, z: np.ndarray, end_myr: np.ndarray, kind: int, rows: int):  # noqa: ANN202
    """Return the package's tables of turning points and of ``rows`` times along each star's life."""
    from cosmic.evolve import INITIAL_CONDITIONS_PASS_COLUMNS, Evolve
    from cosmic.sample.initialbinarytable import InitialBinaryTable

    n = mass.size
    stars = InitialBinaryTable.InitialBinaries(
        m1=mass,
        m2=np.zeros(n),
        porb=np.full(n, -1.0),
        ecc=np.full(n, -1.0),
        tphysf=end_myr,
        kstar1=np.full(n, kind),
        kstar2=np.full(n, NO_STAR),
        metallicity=z,
    )
    step_column = next(name for name in INITIAL_CONDITIONS_PASS_COLUMNS if name.startswith("dt"))
    stars[step_column] = end_myr / rows
    turning, along, *_ = Evolve.evolve(
        initialbinarytable=stars, BSEDict=settings, SSEDict={"stellar_engine": "sse"}, nproc=1
    )
    return turning, along


def _sample(seed: int, low: float, high: float) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Return masses (log-uniform between the limits), metal fractions and life fractions."""
    rng = np.random.default_rng(seed)
    mass, z = (np.exp(rng.uniform(*np.log(ends), STARS)) for ends in ((low, high), (1e-4, 0.03)))
    return mass, z, rng.uniform(0.0, 1.0, STARS)


def _worst(found: np.ndarray, expected: np.ndarray) -> float:
    return float(np.max(np.abs(np.asarray(found) / np.asarray(expected) - 1.0)))


def test_main_sequence_at_two_hundred_stars(settings: dict[str, Any]) -> None:
    mass, z, tau = _sample(1, 0.1, 100.0)
    ours = hpt.main_sequence(mass, z, tau)
    _, along = _evolve(settings, mass, z, tau * ours.lifetime_myr, 1, 1)
    last = along.groupby("bin_num").last()
    assert last.kstar_1.isin(MAIN_SEQUENCE).all()
    worst = _worst(ours.luminosity_lsun, last.lum_1), _worst(ours.radius_rsun, last.rad_1)
    print("main sequence, largest relative difference of L and R:", worst)
    assert max(worst) < 1e-6


def test_lifetimes_of_two_hundred_stars(settings: dict[str, Any]) -> None:
    mass, z, _ = _sample(2, 0.1, 100.0)
    ours = hpt.lifetime_myr(mass, z)
    turning, _ = _evolve(settings, mass, z, 1.2 * ours, 1, 1)
    end = turning[turning.kstar_1 == GAP].groupby("bin_num").first()
    assert len(end) == STARS
    worst = _worst(ours, end.tphys)
    print("lifetime, largest relative difference:", worst)
    assert worst < 1e-6


def test_giant_branch_and_ignition_of_two_hundred_stars(settings: dict[str, Any]) -> None:
    mass, z, _ = _sample(3, 0.5, 60.0)
    turning, along = _evolve(settings, mass, z, 1.3 * hpt.lifetime_myr(mass, z), 1, 400)
    branch = along[along.kstar_1 == GIANT_BRANCH]
    place = branch.bin_num.to_numpy()
    radius = evolved.giant_branch_radius_rsun(mass[place], branch.lum_1.to_numpy(), z[place])
    ignition = turning[turning.kstar_1 == CORE_HELIUM].groupby("bin_num").first()
    quiet = ignition[mass[ignition.index] > LIGHTEST_QUIET_IGNITION_MSUN]
    burning = evolved.helium_ignition_lsun(mass[quiet.index], z[quiet.index])
    worst = _worst(radius, branch.rad_1), _worst(burning, quiet.lum_1)
    print(f"giant branch: R at {len(branch)} points, L at ignition of {len(quiet)} stars: {worst}")
    assert min(len(branch), len(quiet)) > 50
    assert max(worst) < 1e-6


def test_base_of_the_giant_branch_of_two_hundred_stars(settings: dict[str, Any]) -> None:
    mass, z, _ = _sample(3, 0.5, 60.0)
    turning, _ = _evolve(settings, mass, z, 1.3 * hpt.lifetime_myr(mass, z), 1, 1)
    base = turning[turning.kstar_1 == GIANT_BRANCH].groupby("bin_num").first()
    left = turning[(turning.kstar_1 != GIANT_BRANCH) & (turning.tphys > base.tphys.reindex(turning.bin_num).to_numpy())]
    base = base.loc[base.index.isin(left.bin_num)]
    duration = left.groupby("bin_num").tphys.first().loc[base.index] - base.tphys
    light = evolved.giant_branch_base_lsun(mass[base.index], z[base.index])
    off = np.abs(light / base.lum_1.to_numpy() - 1.0)
    # The package steps 1e-7 of the age beyond a turning point before it prints it; meanwhile a star on a short giant
    # branch has brightened by that share of the branch, at most.
    growth = np.log(evolved.helium_ignition_lsun(mass[base.index], z[base.index]) / light)
    step = 1e-7 * base.tphys / duration * np.maximum(growth, 0.0)
    print(f"base of the giant branch of {len(base)}: L within 1e-6 for {np.sum(off < 1e-6)}, worst {off.max()}")
    assert len(base) > 50
    assert np.median(off) < 1e-12
    assert np.all(off < 1e-6 + step)


def test_hertzsprung_gap_lies_in_the_region_offered(settings: dict[str, Any]) -> None:
    # Where a star stands in the gap is a matter of its age, which the region leaves free: every point must lie in it.
    mass, z, _ = _sample(5, 0.5, 60.0)
    _, along = _evolve(settings, mass, z, 1.3 * hpt.lifetime_myr(mass, z), 1, 400)
    gap = along[along.kstar_1 == GAP]
    place, light = gap.bin_num.to_numpy(), gap.lum_1.to_numpy()
    borders = evolved.region(mass[place], np.log10(z[place] / Z_SUN))
    teff = teff_from_luminosity_k(light, gap.rad_1.to_numpy())
    inside = np.log10(light) > borders.log_luminosity_low - 1e-9
    inside &= np.log10(light) < borders.log_luminosity_high
    inside &= teff < borders.teff_hot_k * (1.0 + 1e-9)
    print(f"Hertzsprung gap: {inside.sum()} of {inside.size} points inside the region offered")
    assert inside.size > 200
    assert inside.all()


def test_helium_main_sequence_of_two_hundred_stars(settings: dict[str, Any]) -> None:
    mass, z, tau = _sample(4, 0.35, 12.0)
    ours = helium.pure_helium(mass, tau)
    _, along = _evolve(settings, mass, z, tau * ours.lifetime_myr, HELIUM_STAR, 1)
    last = along.groupby("bin_num").last()
    assert (last.kstar_1 == HELIUM_STAR).all()
    worst = _worst(ours.luminosity_lsun, last.lum_1), _worst(ours.radius_rsun, last.rad_1)
    print("helium main sequence, largest relative difference of L and R:", worst)
    assert max(worst) < 1e-6
