"""Reading and checking a system file: what was measured, in stated units, with every fault reported at once.

Use :func:`read_system` for a file and :func:`check_system` for the same content already in memory.
"""

from __future__ import annotations

from vetter.system.bands import canonical_band, nearest_bands, usual_system
from vetter.system.model import System
from vetter.system.reader import check_system, read_system

__all__ = ["System", "canonical_band", "check_system", "nearest_bands", "read_system", "usual_system"]
