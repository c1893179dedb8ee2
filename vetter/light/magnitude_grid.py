"""The fast kernel: magnitudes of thousands of stars in all columns at once.

A grid holds, at every node of (log Teff, log g), a polynomial in A_V per column (band or window). A star's magnitude
is the bilinear mean of the four corners' polynomials. :mod:`vetter.light.reference` is the readable twin.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from vetter.light.tables import FloatArray

CHUNK = 1024
"""Stars per pass: the working set then stays in a core's cache."""


@dataclass(frozen=True, eq=False)
class MagnitudeGrid:
    """Surface magnitudes on a grid.

    Attributes
    ----------
    ln_teff : (nt,) ascending, at least 2
    logg : (ng,) ascending, at least 2
    coefficients : (nt, ng, n_power, k) contiguous; column magnitude = sum over p of coefficients[..., p, :] A_V^p
    """

    ln_teff: FloatArray
    logg: FloatArray
    coefficients: FloatArray

    def evaluate(self, teff_k: FloatArray, logg: FloatArray, a_v_mag: FloatArray) -> FloatArray:
        """Return magnitudes (n, k) from three (n,) arrays; outside the grid the nearest edge stands in.

        NaN in gives NaN out. The range of ``a_v_mag`` is the caller's to check.
        """
        out = np.empty((len(teff_k), self.coefficients.shape[3]))
        for start in range(0, len(teff_k), CHUNK):
            part = slice(start, start + CHUNK)
            polynomials = self.polynomials(teff_k[part], logg[part])
            magnitudes, a_v = out[part], a_v_mag[part, None]
            magnitudes[:] = polynomials[:, -1]
            for power in range(polynomials.shape[1] - 2, -1, -1):
                magnitudes *= a_v
                magnitudes += polynomials[:, power]
        return out

    def polynomials(self, teff_k: FloatArray, logg: FloatArray) -> FloatArray:
        """Return the interpolated coefficients (n, n_power, k): the mean of the four corners, gathered as rows."""
        nt, ng, n_power, k = self.coefficients.shape
        rows = self.coefficients.reshape(nt * ng, n_power * k)
        t_low, t_share = bracket(self.ln_teff, np.log(teff_k))
        g_low, g_share = bracket(self.logg, logg)
        corner = t_low * ng + g_low
        mean = rows.take(corner, axis=0)
        mean *= (1.0 - t_share) * (1.0 - g_share)
        for offset, share in (
            (1, (1.0 - t_share) * g_share),
            (ng, t_share * (1.0 - g_share)),
            (ng + 1, t_share * g_share),
        ):
            term = rows.take(corner + offset, axis=0)
            term *= share
            mean += term
        return np.asarray(mean.reshape(-1, n_power, k), dtype=float)


def bracket(nodes: FloatArray, value: FloatArray) -> tuple[NDArray[np.intp], FloatArray]:
    """Return the lower node's index (n,) and the share (n, 1) of the upper one; values are clamped to the nodes."""
    low = np.minimum(np.searchsorted(nodes[1:], value, side="right"), len(nodes) - 2)
    share = (value - nodes[low]) / (nodes[low + 1] - nodes[low])
    return low, np.clip(share, 0.0, 1.0)[:, None]
