"""A star in the Roche potential, integrated numerically: nothing here uses the formulas under test."""

from __future__ import annotations

from collections.abc import Callable
from typing import NamedTuple

import numpy as np
import pytest

DIRECTIONS = 64


class RocheLight(NamedTuple):
    """Filling (volume radius over that of the lobe), volume radius over the separation, and the light's variation."""

    filling: float
    radius: float
    semi_amplitude: float


def _potential(q: float, x: np.ndarray, y: np.ndarray, z: np.ndarray) -> np.ndarray:
    """Roche potential of the star (mass 1) at the origin, companion of mass q at x = 1, turning with the orbit."""
    near, far = np.sqrt(x * x + y * y + z * z), np.sqrt((x - 1.0) ** 2 + y * y + z * z)
    return -1.0 / near - q / far - 0.5 * (1.0 + q) * ((x - q / (1.0 + q)) ** 2 + y * y)


def _gradient(q: float, r: np.ndarray) -> np.ndarray:
    """Gradient of the potential at points r (..., 3)."""
    shift = r - np.array([1.0, 0.0, 0.0])
    near = np.linalg.norm(r, axis=-1, keepdims=True) ** 3
    far = np.linalg.norm(shift, axis=-1, keepdims=True) ** 3
    centre = np.array([q / (1.0 + q), 0.0, 0.0])
    spin = (1.0 + q) * (r - centre) * np.array([1.0, 1.0, 0.0])
    return r / near + q * shift / far - spin


def _surface(q: float, level: float, reach: float) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Return unit directions (n, 3), their weights (n,) and the radius (n,) at which the potential is ``level``."""
    cosines, weights = np.polynomial.legendre.leggauss(DIRECTIONS)
    phi = (np.arange(2 * DIRECTIONS) + 0.5) * np.pi / DIRECTIONS
    # The polar axis is that of the orbit and the phases are steps of the grid: the error of the sum does not vary.
    c, p = (grid.ravel() for grid in np.meshgrid(cosines, phi, indexing="ij"))
    solid = np.repeat(weights, phi.size) * np.pi / DIRECTIONS
    s = np.sqrt(1.0 - c * c)
    way = np.stack([s * np.cos(p), s * np.sin(p), c], axis=1)
    low, high = np.full(c.shape, 1e-4), np.full(c.shape, reach)
    for _ in range(60):
        middle = 0.5 * (low + high)
        inside = _potential(q, *(middle[:, None] * way).T) < level
        low, high = np.where(inside, middle, low), np.where(inside, high, middle)
    return way, solid, low


def _lobe(q: float) -> tuple[float, float]:
    """Return the inner Lagrange point's place on the axis and the potential there."""
    axis = np.linspace(0.01, 0.99, 200001)
    along = _potential(q, axis, 0.0 * axis, 0.0 * axis)
    return float(axis[np.argmax(along)]), float(np.max(along))


def _volume_radius(solid: np.ndarray, radius: np.ndarray) -> float:
    return float(np.cbrt(np.sum(solid * radius**3) / (4.0 * np.pi)))


def _second_harmonic(cosine: np.ndarray, bright: np.ndarray, limb: float, phase: np.ndarray) -> float:
    """Return minus the relative amplitude of cos(2 phase) in the light of elements (n,) seen at cosines (n, phases)."""
    mu = np.maximum(cosine, 0.0)
    flux = np.sum(bright[:, None] * mu * (1.0 - limb + limb * mu), axis=0)
    return float(-2.0 * np.mean(flux * np.cos(2.0 * phase)) / np.mean(flux))


@pytest.fixture(scope="session")
def lobe_radius() -> Callable[[float], float]:
    """Volume radius over the separation of the lobe of a star q times as heavy as the other."""

    def radius(q: float) -> float:
        reach, level = _lobe(1.0 / q)
        _, solid, surface = _surface(1.0 / q, level, reach)
        return _volume_radius(solid, surface)

    return radius


@pytest.fixture(scope="session")
def roche_light() -> Callable[..., RocheLight]:
    """Light curve of a Roche star: its component at half the period."""

    def light(mass_ratio: float, depth: float, limb: float, gravity: float, inclination: float) -> RocheLight:
        # ``depth`` sets the size: where along the axis to the companion the surface lies, over the lobe's tip.
        reach, critical = _lobe(mass_ratio)
        tip = np.array([depth * reach])
        level = float(_potential(mass_ratio, tip, 0.0 * tip, 0.0 * tip)[0])
        way, solid, radius = _surface(mass_ratio, level, depth * reach * (1.0 + 1e-9))
        _, lobe_solid, lobe_surface = _surface(mass_ratio, critical, reach)
        slope = _gradient(mass_ratio, radius[:, None] * way)
        gravity_here = np.linalg.norm(slope, axis=1)
        normal = slope / gravity_here[:, None]
        area = solid * radius**2 / np.sum(normal * way, axis=1)
        bright = gravity_here**gravity * area
        phase = np.arange(16) * 2.0 * np.pi / 16
        slant, high = np.sin(inclination), np.cos(inclination)
        sight = np.stack([np.cos(phase) * slant, np.sin(phase) * slant, np.full(phase.size, high)], axis=1)
        seen = _second_harmonic(normal @ sight.T, bright, limb, phase)
        size = _volume_radius(solid, radius)
        return RocheLight(size / _volume_radius(lobe_solid, lobe_surface), size, seen)

    return light
