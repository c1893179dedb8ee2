"""Light of stars: from (Teff, log g, radius) to magnitudes in every band at once, dimmed by distance and dust.

What to use when:

- many stars, many bands, again and again: :class:`LightEngine` (build once, then call ``magnitudes``);
- one or two stars from the command line: :func:`vetter.light.report.light_report`;
- the readable definition of what the engine computes: :mod:`vetter.light.reference`.

The tables themselves (atmospheres, passbands, dust law, white dwarfs) are data in ``vetter.grids``.
"""

from __future__ import annotations

from vetter.light.engine import Component, LightEngine, total_magnitudes

__all__ = ["Component", "LightEngine", "total_magnitudes"]
