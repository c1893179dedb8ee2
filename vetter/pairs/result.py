"""The result of a contrast as plain records, and its machine-readable form."""

from __future__ import annotations

from dataclasses import asdict, dataclass
from typing import Any

from vetter.pairs.epochs import Epochs
from vetter.pairs.evidence import WaveEvidence
from vetter.pairs.members import PAIRS
from vetter.pairs.n_body import NBodyCheck
from vetter.pairs.plane import REASONS, Plane
from vetter.pairs.reveal import DECISIVE_LN, Reveal


@dataclass(frozen=True)
class Explanation:
    """One side of the contrast.

    Attributes
    ----------
    name, title : of the scenario
    sigma : how much worse its best case fits than the best of all; None where it is walled off
    ln_evidence : of light, orbit and epochs relative to a single companion's orbit; None where it was not sampled
    ln_evidence_error : its standard error
    ln_light : the part of light and orbit alone
    ln_velocities : what the epochs add; 0 for a single companion, None without epochs
    ln_apsidal : the part of that which the apsidal motion carries without the wave
    ln_bayes, ln_bayes_error : against the best single companion (or the other of two named explanations)
    ln_bayes_max : a bound, where it was too far behind to be sampled
    closed_because : the wall in words
    """

    name: str
    title: str
    sigma: float | None
    ln_evidence: float | None
    ln_evidence_error: float | None
    ln_light: float | None
    ln_velocities: float | None
    ln_apsidal: float | None
    ln_bayes: float | None
    ln_bayes_error: float | None
    ln_bayes_max: float | None
    closed_because: str | None

    @property
    def pair(self) -> bool:
        """Whether the unseen mass is a pair in it."""
        return self.name in PAIRS


@dataclass(frozen=True)
class PairDetail:
    """What is known of the pairs of one explanation.

    Attributes
    ----------
    name : of the scenario
    plane : of inner period and mass ratio
    wave : the epochs against it, None without epochs
    inner_period_d : inner period with its error where a wave is found (ln B of the velocities above 5), else None
    semi_amplitude_km_s : of the wave at the most favourable allowed cell
    apsidal_deg : apsidal motion of the outer orbit over the span of the epochs there
    masses : of the seen star and of the pair there, Msun
    reveal : what would reveal or exclude the rest
    n_body : the check by integration, None when not asked for
    """

    name: str
    plane: Plane
    wave: WaveEvidence | None
    inner_period_d: tuple[float, float] | None
    semi_amplitude_km_s: float | None
    apsidal_deg: float | None
    masses: tuple[float, float] | None
    reveal: tuple[Reveal, ...]
    n_body: NBodyCheck | None = None


@dataclass(frozen=True)
class Contrast:
    """Inner pair versus single companion.

    Attributes
    ----------
    system, version, seed : what was run
    explanations : best single companion first, then the pairs
    details : one per pair that was sampled
    epochs : the epochs about their orbit, None without them
    cautions : sentences
    """

    system: str
    version: str
    seed: int
    explanations: tuple[Explanation, ...]
    details: tuple[PairDetail, ...]
    epochs: Epochs | None
    cautions: tuple[str, ...]

    def detail(self, name: str) -> PairDetail | None:
        """Return the detail of a pair, None where it was not sampled."""
        return next((detail for detail in self.details if detail.name == name), None)

    def explanation(self, name: str) -> Explanation:
        """Return one explanation. KeyError for an unknown name."""
        found = next((row for row in self.explanations if row.name == name), None)
        if found is None:
            raise KeyError(name)
        return found

    @property
    def best_pair(self) -> Explanation | None:
        """The pair with the largest evidence, None where every one is out."""
        pairs = [row for row in self.explanations if row.pair and row.ln_evidence is not None]
        return max(pairs, key=lambda row: row.ln_evidence or -1e300, default=None)

    @property
    def headline(self) -> str:
        """What the data say, in one sentence."""
        best = self.best_pair
        if best is None:
            return "Every pair tried is excluded."
        if best.ln_bayes is None:
            return "No single companion tried fits: a pair is all that is left of what was tried."
        factor = f"ln B = {best.ln_bayes:+.1f} +- {best.ln_bayes_error:.1f} for {best.title.lower()}"
        if best.ln_bayes > DECISIVE_LN:
            return f"The data prefer a pair: {factor}."
        if best.ln_bayes < -DECISIVE_LN:
            return f"The data prefer a single companion: {factor}."
        return f"These data cannot tell one body from two: {factor}."

    def to_dict(self) -> dict[str, Any]:
        """Return what `vetter contrast --json` prints: plain numbers, text and lists."""
        return {
            "system": self.system,
            "version": self.version,
            "seed": self.seed,
            "headline": self.headline,
            "explanations": [asdict(row) | {"pair": row.pair} for row in self.explanations],
            "pairs": [_detail_dict(detail) for detail in self.details],
            "cautions": list(self.cautions),
        }


def _detail_dict(detail: PairDetail) -> dict[str, Any]:
    plane, wave = detail.plane, detail.wave
    return {
        "name": detail.name,
        "inner_period_d": None if detail.inner_period_d is None else list(detail.inner_period_d),
        "most_telling_period_d": None if wave is None else wave.best_period_d,
        "semi_amplitude_km_s": detail.semi_amplitude_km_s,
        "apsidal_motion_deg": detail.apsidal_deg,
        "allowed_range": plane.allowed_range(),
        "allowed_share": plane.allowed_share,
        "plane": {
            "inner_period_edge_d": plane.period_edge_d.tolist(),
            "mass_ratio": plane.mass_ratio.tolist(),
            "reasons": list(REASONS),
            "reason": plane.reason.tolist(),
            "shortest_d": plane.shortest_d.tolist(),
            "stable_d": plane.stable_d.tolist(),
        },
        "reveal": [asdict(reveal) | {"in_reach": reveal.in_reach} for reveal in detail.reveal],
        "n_body": None if detail.n_body is None else asdict(detail.n_body),
    }
