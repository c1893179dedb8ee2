"""Evaluate the golden systems anew and rewrite their saved verdicts and words.

Run `python tests/results/prose/rewrite_golden.py` after a change of words or verdicts, read the difference, and say in
the commit what changed and why: these are paragraphs that an astronomer would sign. With `--words` the saved verdicts
stay and only the words are written.
"""

from __future__ import annotations

import json
import sys
from pathlib import Path
from typing import Any

from vetter import evaluate, read_system
from vetter.evaluation import prepare
from vetter.results.prose.bibliography import cited
from vetter.results.prose.document import sentences_of
from vetter.results.prose.markdown import render_markdown
from vetter.results.prose.material import Material
from vetter.results.prose.saved import read_verdicts
from vetter.results.prose.section import write_document

ROOT = Path(__file__).parents[3]
GOLDEN = Path(__file__).parent / "golden"
SYSTEMS = {
    path.stem: path
    for path in (
        ROOT / "examples" / "dark_companion.toml",
        ROOT / "examples" / "hidden_star.toml",
        ROOT / "tests" / "outside" / "systems" / "ai_phe.toml",
        ROOT / "tests" / "outside" / "systems" / "yz_cas.toml",
        ROOT / "tests" / "outside" / "published" / "v404_cyg.toml",
    )
}


def shortened(value: Any) -> Any:  # noqa: ANN401
    """Return JSON content with six significant digits, more than any word shows."""
    if isinstance(value, float):
        return float(f"{value:.6g}")
    if isinstance(value, dict):
        return {key: shortened(item) for key, item in value.items()}
    return [shortened(item) for item in value] if isinstance(value, list) else value


def material_of(name: str) -> Material:
    """Return one golden system with its saved verdicts."""
    system = read_system(SYSTEMS[name])
    context, observations = prepare(system)
    return Material(context, read_verdicts(GOLDEN / f"{name}.json", system.name, observations))


def words(name: str) -> str:
    """Return the section on one golden system as Markdown, without figures."""
    document = write_document(material_of(name))
    return render_markdown(document, "british", cited(sentences_of(document)))


def rewrite(anew: bool) -> None:
    """Write every golden file."""
    for name, path in SYSTEMS.items():
        if anew:
            content = json.dumps(shortened(evaluate(read_system(path)).to_dict()), separators=(",", ":"))
            (GOLDEN / f"{name}.json").write_text(content + "\n")
        (GOLDEN / f"{name}.md").write_text(words(name))


if __name__ == "__main__":
    rewrite("--words" not in sys.argv)
