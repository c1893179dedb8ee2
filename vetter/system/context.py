"""What the reader of any table needs to know beside the table: where files are, which bands exist, the fault log."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from pathlib import Path

from vetter.system.bands import canonical_band, nearest_bands, usual_system
from vetter.system.faults import FaultLog
from vetter.system.fields import Checked, Table, read_table
from vetter.system.keys import HOMES


@dataclass(frozen=True)
class Context:
    """Shared by the readers of all tables of one file.

    Attributes
    ----------
    log : collects the faults
    folder : where the names of other files start from
    custom_bands : identifiers of the user's own passbands with their magnitude systems
    """

    log: FaultLog
    folder: Path
    custom_bands: Mapping[str, str] = field(default_factory=dict)

    def read(self, table: Table, raw: Mapping[str, object], where: str) -> Checked:
        """Return what a table at this place holds; its faults go to the log."""
        return read_table(table, raw, where, self.log, HOMES)

    def band(self, text: object, key: str) -> str | None:
        """Return the identifier of a band as the user wrote it; record a fault and return None when unknown.

        ``text`` that is not text at all has been recorded already and is passed over.
        """
        if not isinstance(text, str):
            return None
        if text.strip() in self.custom_bands:
            return text.strip()
        band = canonical_band(text)
        if band is None:
            near = () if self.log.is_full else (*nearest_bands(text, 4), *self.custom_bands)
            mend = f"Did you mean {' or '.join(near)}? A passband of your own needs a [[passband]] table."
            self.log.add(key, text, "a known band", mend)
        return band

    def usual_system(self, band: str) -> str:
        """Return the magnitude system of a band that :meth:`band` has returned."""
        return self.custom_bands[band] if band in self.custom_bands else usual_system(band)
