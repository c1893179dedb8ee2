"""Published formulas for single stars on the main sequence: zero age, lifetime, and L and R at any age.

Sources: zero age, Tout, Pols, Eggleton & Han 1996, MNRAS 281, 257 (eqs. 1, 2); lifetime and change along the main
sequence, Hurley, Pols & Tout 2000, MNRAS 315, 543 (equation numbers below are theirs). Fitted to models of
0.5-50 Msun and Z 1e-4 to 0.03; used here over 0.1-100 Msun.

For the mean properties of real stars use :mod:`vetter.stars.main_sequence`: below 0.7 Msun these formulas are 8-9 %
too small in radius. Everything is vectorised: mass (n,), metal fraction (n,) or one number, life fraction (n,).
A power law that the paper freezes outside a mass range is evaluated at the mass clipped to that range: one power
gives the inner value and both constants.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

from vetter.stars.hpt_coefficients import Metallicity, at_metal_fraction

FloatArray = NDArray[np.float64]

MASS_RANGE_MSUN = (0.1, 100.0)
"""Masses the formulas are used for; outside, the nearer end is used."""

_C1 = -0.08672073


class Evolution(NamedTuple):
    """Luminosity and radius (solar) and main-sequence lifetime (Myr), of the broadcast shape of the inputs."""

    luminosity_lsun: FloatArray
    radius_rsun: FloatArray
    lifetime_myr: FloatArray


class _Mass(NamedTuple):
    """Mass, its logarithm and the integer powers that several formulas share."""

    m: FloatArray
    ln: FloatArray
    m2: FloatArray
    m3: FloatArray
    root: FloatArray

    @classmethod
    def of(cls, mass_msun: ArrayLike) -> _Mass:
        m = np.clip(np.asarray(mass_msun, dtype=float), *MASS_RANGE_MSUN)
        return cls(m, np.log(m), m * m, m * m * m, np.sqrt(m))


def zero_age(mass_msun: ArrayLike, z: ArrayLike) -> tuple[FloatArray, FloatArray]:
    """Return zero-age luminosity and radius (solar); Tout et al. 1996, eqs. 1 and 2."""
    return _zero_age(_Mass.of(mass_msun), at_metal_fraction(z))


def lifetime_myr(mass_msun: ArrayLike, z: ArrayLike) -> FloatArray:
    """Return the main-sequence lifetime in Myr (eqs. 4-7).

    The share of the time to the giant branch (eq. 6) follows the authors' code; see :func:`share_of_giant_branch_time`.
    """
    return _times_myr(_Mass.of(mass_msun), at_metal_fraction(z))[1]


def main_sequence(mass_msun: ArrayLike, z: ArrayLike, life_fraction: ArrayLike) -> Evolution:
    """Return L, R and lifetime at ``life_fraction`` (0-1) of the main-sequence life (eqs. 8-24)."""
    mass, metals = _Mass.of(mass_msun), at_metal_fraction(z)
    tau = np.asarray(life_fraction, dtype=float)
    hook, lifetime = _times_myr(mass, metals)
    luminosity_0, radius_0 = _zero_age(mass, metals)
    luminosity_1, radius_1 = _terminal_age(mass, metals, radius_0)
    age = tau * lifetime
    tau1 = np.minimum(1.0, age / hook)
    tau2 = _ramp((age - 0.99 * hook) / (0.01 * hook))
    square, cube = tau1 * tau1 - tau2 * tau2, tau1 * tau1 * tau1 - tau2 * tau2 * tau2
    tau3 = tau * tau * tau
    tau10 = tau3 * tau3 * tau3 * tau
    tau20 = tau10 * tau10
    # Eq. 12, then eq. 13; alpha and beta are the slopes, delta the hook before core exhaustion.
    alpha, beta = _alpha_l(mass, metals), _beta_l(mass, metals)
    log_l = alpha * tau + beta * _late_rise(tau, tau10, mass, metals) - _delta_l(mass, metals) * square
    log_l += (np.log10(luminosity_1 / luminosity_0) - alpha - beta) * tau * tau
    alpha, beta, gamma = _alpha_r(mass, metals), _beta_r(mass, metals), _gamma(mass, metals)
    log_r = alpha * tau + beta * tau10 + gamma * tau20 * tau20 - _delta_r(mass, metals) * cube
    log_r += (np.log10(radius_1 / radius_0) - alpha - beta - gamma) * tau3
    radius = np.maximum(radius_0 * _exp10(log_r), _degenerate_radius(mass, metals))
    return Evolution(np.asarray(luminosity_0 * _exp10(log_l)), np.asarray(radius), np.asarray(lifetime + 0.0 * age))


def share_of_giant_branch_time(z: ArrayLike) -> FloatArray:
    """Return x of eq. 6: main-sequence lifetime of low-mass stars over the time to the base of the giant branch.

    This is the rule of the authors' published code. The paper prints max(0.95, min(0.95 - 0.03 (zeta + 0.30103),
    0.99)); the two agree at Z <= 0.001 to 0.003 and at Z >= 0.01, and differ by at most 0.9 % between.
    """
    metals = np.asarray(z, dtype=float)
    poor = np.minimum(0.99, 0.98 - (100.0 / 7.0) * (metals - 0.001))
    return np.asarray(np.maximum(0.95, np.maximum(0.95 - (10.0 / 3.0) * (metals - 0.01), poor)))


def hook_mass_msun(zeta: FloatArray) -> FloatArray:
    """Return the mass above which a hook appears on the main sequence (eq. 1)."""
    return np.asarray(1.0185 + 0.16015 * zeta + 0.0892 * zeta**2)


def _ramp(x: FloatArray) -> FloatArray:
    """Hold ``x`` between 0 and 1; twice as fast as numpy's clip on short arrays."""
    return np.asarray(np.minimum(np.maximum(x, 0.0), 1.0))


def _exp10(x: FloatArray) -> FloatArray:
    return np.asarray(np.exp(np.log(10.0) * x))


def _zero_age(mass: _Mass, metals: Metallicity) -> tuple[FloatArray, FloatArray]:
    c, m, root = metals.zero_age, mass.m, mass.root
    m5, m8 = mass.m3 * mass.m2, mass.m3 * mass.m3 * mass.m2
    m11, m19 = m8 * mass.m3, m8 * m8 * mass.m3
    luminosity = (c["L.alpha"] * m5 * root + c["L.beta"] * m11) / (
        c["L.gamma"]
        + mass.m3
        + c["L.delta"] * m5
        + c["L.epsilon"] * m5 * mass.m2
        + c["L.zeta"] * m8
        + c["L.eta"] * m8 * m * root
    )
    radius = (
        root * (c["R.theta"] * mass.m2 + c["R.iota"] * m5 * m)
        + c["R.kappa"] * m11
        + m19 * (c["R.lambda"] + c["R.mu"] * root)
    ) / (c["R.nu"] + c["R.xi"] * mass.m2 + root * (c["R.omicron"] * m8 + m8 * m8 * mass.m2 + c["R.pi"] * m19))
    return np.asarray(luminosity), np.asarray(radius)


def _times_myr(mass: _Mass, metals: Metallicity) -> tuple[FloatArray, FloatArray]:
    """Return the time of the hook and the main-sequence lifetime (eqs. 4-7)."""
    a, m4 = metals.a, mass.m2 * mass.m2
    m7 = m4 * mass.m3
    giant_branch = (a[1] + a[2] * m4 + a[3] * m4 * mass.m * mass.root + m7) / (a[4] * mass.m2 + a[5] * m7)
    decline = np.maximum(a[6] * np.exp(-a[7] * mass.ln), a[8] + a[9] * np.exp(-a[10] * mass.ln))
    hook = giant_branch * np.maximum(0.5, 1.0 - 0.01 * decline)
    return np.asarray(hook), np.maximum(hook, share_of_giant_branch_time(metals.z) * giant_branch)


def _terminal_age(mass: _Mass, metals: Metallicity, radius_0: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return luminosity and radius at the end of the main sequence (eqs. 8 and 9)."""
    a, m = metals.a, mass.m
    m5, power = mass.m3 * mass.m2, np.exp(a[16] * mass.ln)
    luminosity = (a[11] * mass.m3 + a[12] * mass.m3 * m + a[13] * power * np.exp(1.8 * mass.ln)) / (
        a[14] + a[15] * m5 + power
    )
    # Each branch is evaluated no further than its own end, so the linear piece between needs no second evaluation.
    low, high = np.minimum(mass.ln, np.log(a[17])), np.maximum(mass.ln, np.log(a[17] + 0.1))
    small = (a[18] + a[19] * np.exp(a[21] * low)) / (a[20] + np.exp(a[22] * low))
    small = np.where(m < 0.5, np.maximum(small, 1.5 * radius_0), small)
    m_high = np.maximum(m, a[17] + 0.1)
    power = np.exp(a[26] * high)
    large = (_C1 * m_high**3 + a[23] * power + a[24] * power * m_high * np.sqrt(m_high)) / (a[25] + m_high**5)
    weight = _ramp((m - a[17]) / 0.1)
    return np.asarray(luminosity), np.asarray(small + (large - small) * weight)


def _degenerate_radius(mass: _Mass, metals: Metallicity) -> FloatArray:
    """Return the floor of the radius of low-mass stars (eq. 24)."""
    hydrogen = 0.76 - 3.0 * metals.z
    return np.asarray(0.0258 * np.exp((5.0 * np.log1p(hydrogen) - mass.ln) / 3.0))


def _delta_l(mass: _Mass, metals: Metallicity) -> FloatArray:
    """Return the luminosity hook (eq. 16)."""
    a, hook = metals.a, hook_mass_msun(metals.zeta)
    ln = np.maximum(mass.ln, np.log(a[33]))
    large = np.minimum(a[34] * np.exp(-a[35] * ln), a[36] * np.exp(-a[37] * ln))
    return np.asarray(large * _ramp((mass.m - hook) / (a[33] - hook)) ** 0.4)


def _delta_r(mass: _Mass, metals: Metallicity) -> FloatArray:
    """Return the radius hook (eq. 17)."""
    a, hook = metals.a, hook_mass_msun(metals.zeta)
    m = np.maximum(mass.m, 2.0)
    large = (a[38] + a[39] * m**3 * np.sqrt(m)) / (a[40] * m**3 + np.exp(a[41] * np.log(m))) - 1.0
    small = a[43] * np.sqrt(_ramp((mass.m - hook) / (a[42] - hook)))
    middle = (large - a[43]) * _ramp((mass.m - a[42]) / (2.0 - a[42])) ** a[44]
    return np.asarray(small + middle)


def _late_rise(tau: FloatArray, tau10: FloatArray, mass: _Mass, metals: Metallicity) -> FloatArray:
    """Return tau^eta of the late rise in luminosity (eq. 18): eta is 10, up to 20 in metal-poor stars above 1 Msun."""
    poor = metals.z <= 0.0009
    if not np.any(poor):
        return tau10
    eta = 10.0 + 10.0 * _ramp((mass.m - 1.0) / 0.1)
    return np.where(poor, np.maximum(tau, 1e-30) ** eta, tau10)


def _piecewise(m: FloatArray, nodes: list[FloatArray | float], values: list[FloatArray | float]) -> FloatArray:
    """Join (node, value) pairs by straight lines, constant before the first and after the last.

    Nodes may differ from sample to sample and two may coincide (then the value jumps there).
    """
    result = np.asarray(values[0])
    for left, right, low, high in zip(nodes, nodes[1:], values, values[1:], strict=False):
        span = np.maximum(np.subtract(right, left), 1e-300)
        weight = _ramp((m - left) / span)
        result = result + (np.subtract(high, low)) * weight
    return np.asarray(result)


def _alpha_l(mass: _Mass, metals: Metallicity) -> FloatArray:
    """Return the linear term of the luminosity (eq. 19)."""
    a, ln = metals.a, np.maximum(mass.ln, np.log(2.0))
    large = (a[45] + a[46] * np.exp(a[48] * ln)) / (np.exp(0.4 * ln) + a[47] * np.exp(1.9 * ln))
    return _piecewise(mass.m, [0.5, 0.7, a[52], a[53], 2.0], [a[49], 0.3, a[50], a[51], large])


def _beta_l(mass: _Mass, metals: Metallicity) -> FloatArray:
    """Return the late term of the luminosity (eq. 20)."""
    a, ln = metals.a, np.minimum(mass.ln, np.log(metals.a[57]))
    inner = np.maximum(0.0, a[54] - a[55] * np.exp(a[56] * ln))
    return np.asarray(inner * _ramp(1.0 - 10.0 * (mass.m - a[57])))


def _alpha_r(mass: _Mass, metals: Metallicity) -> FloatArray:
    """Return the linear term of the radius (eq. 21)."""
    a = metals.a
    ln = np.log(np.clip(mass.m, a[66], a[67]))
    large = a[58] * np.exp(a[60] * ln) / (a[59] + np.exp(a[61] * ln)) + a[65] * np.maximum(mass.m - a[67], 0.0)
    return _piecewise(mass.m, [0.5, 0.65, a[68], a[66]], [a[62], a[63], a[64], large])


def _beta_r(mass: _Mass, metals: Metallicity) -> FloatArray:
    """Return the late term of the radius (eq. 22)."""
    a, m = metals.a, np.clip(mass.m, 2.0, 16.0)
    large = a[69] * m**3 * np.sqrt(m) / (a[70] + np.exp(a[71] * np.log(m))) + a[73] * np.maximum(mass.m - 16.0, 0.0)
    return _piecewise(mass.m, [1.0, a[74], 2.0], [1.06, a[72], large]) - 1.0


def _gamma(mass: _Mass, metals: Metallicity) -> FloatArray:
    """Return the last term of the radius, of stars with thin convective envelopes (eq. 23)."""
    a = metals.a
    small = a[76] + a[77] * np.abs(np.minimum(mass.m, 1.0) - a[78]) ** a[79]
    wide = a[75] > 1.0
    rise = _ramp((mass.m - 1.0) / np.where(wide, a[75] - 1.0, 1.0)) ** a[81]
    middle = small + (np.where(wide, a[80], small) - small) * rise
    return np.asarray(np.maximum(0.0, middle * _ramp(1.0 - 10.0 * (mass.m - a[75]))))
