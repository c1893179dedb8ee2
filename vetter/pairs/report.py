"""The contrast on the terminal: plain words, readable by someone who has never seen the program."""

from __future__ import annotations

import json
import textwrap

from vetter.pairs.plane import REASONS
from vetter.pairs.result import Contrast, Explanation, PairDetail
from vetter.pairs.reveal import PRECISION_FLOOR_KM_S, Reveal

WIDE, NARROW = 120, 78


def render(found: Contrast, width: int = WIDE) -> str:
    """Return the whole report for ``width`` columns."""
    width = max(NARROW, min(width, WIDE))
    lines = [
        found.system,
        *_epochs_words(found, width),
        "",
        *_table(found, width),
        "",
        *_wrapped(found.headline, width),
    ]
    for detail in found.details:
        lines += ["", *_detail(detail, found, width)]
    lines += ["", "Cautions"]
    for caution in found.cautions:
        lines += _wrapped(caution, width, "- ")
    return "\n".join(lines) + "\n"


def files(found: Contrast) -> dict[str, str | bytes]:
    """Return the files that `vetter contrast --out` writes, by name."""
    from vetter.pairs.figures import contrast_figure
    from vetter.results.figures.style import figure_bytes

    figure = contrast_figure(found)
    return {
        "contrast.json": json.dumps(found.to_dict(), indent=1, allow_nan=False) + "\n",
        "contrast.txt": render(found),
        "contrast.png": figure_bytes(figure, "png"),
        "contrast.pdf": figure_bytes(figure, "pdf"),
    }


def _epochs_words(found: Contrast, width: int) -> list[str]:
    if found.epochs is None:
        return ["epoch velocities: none used"]
    data, orbit = found.epochs.data, found.epochs.orbit
    return _wrapped(
        f"{data.count} epoch velocities over {data.baseline_d:.0f} d, error "
        f"{speed(sorted(data.error_km_s)[data.count // 2])}; orbit P {orbit.period_d:.6g} d, "
        f"e {orbit.eccentricity:.3g}",
        width,
    )


def _table(found: Contrast, width: int) -> list[str]:
    """One row per explanation."""
    heads = f"{'explanation':<36}{'sigma':>7}{'ln Z light':>12}{'ln Z epochs':>13}  {'ln B':<18}"
    lines = [heads.rstrip(), "-" * min(width, 88)]
    for row in found.explanations:
        lines.append(
            f"{row.title:<36}{_number(row.sigma):>7}{_number(row.ln_light):>12}{_number(row.ln_velocities):>13}"
            f"  {_bayes(row, found):<18}".rstrip()
        )
        if row.closed_because is not None:
            lines += _wrapped(row.closed_because, width, "    ")
    return lines


def _number(value: float | None) -> str:
    return "-" if value is None else f"{value:.1f}"


def _bayes(row: Explanation, found: Contrast) -> str:
    """Ln Bayes factor of a pair, or the side that it is counted against."""
    if row.ln_bayes is not None:
        return f"{row.ln_bayes:+.1f} +- {row.ln_bayes_error:.1f}"
    if row.ln_bayes_max is not None:
        return f"below {row.ln_bayes_max:+.0f}"
    return "reference" if row is found.explanations[0] and row.ln_evidence is not None else "-"


def _detail(detail: PairDetail, found: Contrast, width: int) -> list[str]:
    """What is left of one kind of pair."""
    title = found.explanation(detail.name).title
    lines = [title]
    plane = detail.plane
    span = plane.allowed_range()
    if span is None:
        lines.append("    no inner period and mass ratio is left")
    else:
        lines += _wrapped(
            f"left: inner period {span[0]:.3g} - {span[1]:.3g} d, mass ratio {span[2]:.2g} - {span[3]:.2g} "
            f"({100.0 * plane.allowed_share:.0f} % of the cells between the walls)",
            width,
            "    ",
        )
    closed = {reason: int((plane.reason == place).sum()) for place, reason in enumerate(REASONS) if place > 0}
    words = ", ".join(
        f"{reason} {100.0 * count / plane.reason.size:.0f} %" for reason, count in closed.items() if count
    )
    if words:
        lines.append(f"    closed cells of the plane: {words}")
    if detail.inner_period_d is not None:
        period, error = detail.inner_period_d
        lines.append(f"    inner period {period:.6g} +- {error:.2g} d from the wave")
    if detail.semi_amplitude_km_s is not None:
        words = f"most favourable pair: P {plane.best_period_d:.4g} d, mass ratio {plane.best_mass_ratio:.3g}, wave of "
        words += speed(detail.semi_amplitude_km_s)
        if detail.apsidal_deg is not None:
            words += f", turning the outer orbit by {detail.apsidal_deg:.2g} deg over the epochs"
        lines += _wrapped(words, width, "    ")
    lines += _reveal_lines(detail, width)
    lines += _n_body_lines(detail, width)
    return lines


def _n_body_lines(detail: PairDetail, width: int) -> list[str]:
    """The check by integration, where it was asked for."""
    check = detail.n_body
    if check is None:
        return []
    words = (
        f"N-body check of that pair: wave of {speed(check.integrated_km_s)} against {speed(check.predicted_km_s)} "
        f"predicted, {speed(check.left_km_s)} rms left of {speed(check.without_wave_km_s)}; "
        f"{'it lasts' if check.lasts else 'it breaks up'} over the six outer turns integrated"
    )
    return _wrapped(words, width, "    ")


def _reveal_lines(detail: PairDetail, width: int) -> list[str]:
    return [line for entry in detail.reveal for line in _wrapped(reveal_words(entry), width, "    ")]


def reveal_words(entry: Reveal) -> str:
    """Return in one sentence what would reveal or exclude a share of what is left."""
    start = f"to reveal or exclude {100.0 * entry.share:.0f} % of what is left (waves above "
    start += f"{speed(entry.semi_amplitude_km_s)}): {entry.epochs} epochs of {speed(entry.precision_km_s)}"
    if not entry.in_reach:
        return f"{start}, which is out of reach (below {speed(PRECISION_FLOOR_KM_S)})"
    if entry.epochs_needed is None:
        return start
    if entry.epochs_needed <= entry.epochs:
        return f"{start}: these epochs are good enough for that"
    return f"{start}, or {entry.epochs_needed} epochs as good as these"


def speed(km_s: float) -> str:
    """Return a velocity in words with a fitting unit."""
    if km_s >= 1.0:
        return f"{km_s:.3g} km/s"
    return f"{1e3 * km_s:.3g} m/s" if km_s >= 1e-4 else f"{1e6 * km_s:.2g} mm/s"


def _wrapped(text: str, width: int, indent: str = "") -> list[str]:
    return textwrap.wrap(
        text, width, initial_indent=indent, subsequent_indent=" " * len(indent), break_on_hyphens=False
    )
