"""LaTeX compiles without a warning, references hold what is cited and no more, HTML is one file that fits a phone."""

from __future__ import annotations

import re
import shutil
import subprocess
from pathlib import Path

import pytest

from vetter.results.prose import latex
from vetter.results.prose.bibliography import PASSBAND_WORKS, WORKS, cited, plain_entry
from vetter.results.prose.document import Document, Picture, say, sentences_of
from vetter.results.prose.html import render_html
from vetter.results.prose.markdown import render_markdown
from vetter.results.prose.material import Material
from vetter.results.prose.section import POINTED, write_document

PNG = bytes.fromhex(
    "89504e470d0a1a0a0000000d49484452000000010000000108000000003a7e9b55"
    "0000000a49444154789c6360000000020001e221bc330000000049454e44ae426082"
)
"""One grey pixel."""

pictures = tuple(Picture(label, (say("A caption."),), "Words for those who cannot see it.") for label in POINTED)


def page(document: Document, material: Material) -> str:
    keys = cited(sentences_of(document))
    headline = say("A headline.")
    images = {picture.label: PNG for picture in document.pictures}
    return render_html(document, material.system.name, headline, "british", keys, images)


def write_latex(material: Material, folder: Path) -> None:
    document = write_document(material)
    (folder / "alternatives.tex").write_text(latex.render_section(document, "british"))
    (folder / "table.tex").write_text(latex.render_table(document.table, "british"))
    (folder / "wrapper.tex").write_text(latex.wrapper(material.system.name))
    (folder / "references.bib").write_text(latex.render_bibliography(cited(sentences_of(document))))


@pytest.mark.skipif(not (shutil.which("pdflatex") and shutil.which("bibtex")), reason="no TeX engine")
def test_latex_compiles_without_a_warning(material: Material, tmp_path: Path) -> None:
    write_latex(material, tmp_path)
    tex = ["pdflatex", "-interaction=nonstopmode", "-halt-on-error", "wrapper"]
    for command in (tex, ["bibtex", "wrapper"], tex, tex, tex):
        done = subprocess.run(command, cwd=tmp_path, capture_output=True, text=True, timeout=120, check=False)
        assert done.returncode == 0, done.stdout[-2000:]
    log = (tmp_path / "wrapper.log").read_text(errors="replace")
    assert not re.findall(r"(?i)warning.*|(?:over|under)full.*", log)
    assert "warning" not in (tmp_path / "wrapper.blg").read_text().lower().replace("warning$", "")
    assert (tmp_path / "wrapper.pdf").stat().st_size > 10000


def test_references_hold_what_is_cited_and_no_more(material: Material) -> None:
    document = write_document(material)
    text = latex.render_section(document, "british") + latex.render_table(document.table, "british")
    in_text = {key for match in re.findall(r"\\cite[tp]\{([^}]*)\}", text) for key in match.split(",")}
    entries = latex.render_bibliography(cited(sentences_of(document)))
    assert set(re.findall(r"^@\w+\{(\w+),", entries, re.MULTILINE)) == in_text


def test_works_are_whole() -> None:
    assert set(PASSBAND_WORKS.values()) <= set(WORKS)
    for key, work in WORKS.items():
        assert key.endswith(str(work.year))
        assert work.published or (work.journal and work.volume and work.pages), key
        assert plain_entry(work).count(str(work.year)) >= 1
        assert latex.render_bibliography([key]).isascii(), key


def test_latex_is_balanced_and_ascii(material: Material) -> None:
    document = write_document(material, pictures=pictures)
    for text in (
        latex.render_section(document, "british"),
        latex.render_table(document.table, "british"),
        latex.render_table(document.table, "british", journal=True),
    ):
        body = re.sub(r"\\[{}$%]", "", text)
        assert body.count("{") == body.count("}")
        assert body.count("$") % 2 == 0
        assert text.isascii()


def test_a_journal_table_is_a_deluxetable(material: Material) -> None:
    table = write_document(material).table
    text = latex.render_table(table, "british", journal=True)
    assert text.startswith(r"\begin{deluxetable*}")
    assert text.count(r"\colhead{") == len(table.heads)
    data = text.split(r"\startdata")[1].split(r"\enddata")[0]
    rows = [row for row in data.strip().split("\\\\\n") if row]
    assert len(rows) == len(table.rows)
    assert all(row.count(" & ") == len(table.heads) - 1 for row in rows)


def test_names_are_escaped() -> None:
    assert latex.escape("A_1 & 50% #2 {x}") == r"A\_1 \& 50\% \#2 \{x\}"
    assert latex.escape("Bédard") == r"B{\'e}dard"


def test_markdown_has_its_table_and_figures(material: Material) -> None:
    document = write_document(material, title="A title", pictures=pictures)
    text = render_markdown(document, "british", cited(sentences_of(document)))
    assert text.startswith("# A title\n")
    rows = [line for line in text.splitlines() if line.startswith("|")]
    assert len(rows) == 2 + len(document.table.rows)
    assert {line.replace("\\|", "").count("|") for line in rows} == {len(document.table.heads) + 1}
    for picture in pictures:
        assert f"]({picture.label}.png)" in text
    for heading in ("**Data.**", "**Method.**", "**What remains.**", "**Limits.**"):
        assert heading in text


def test_american_spelling_reaches_every_word(material: Material) -> None:
    document = write_document(material)
    keys = cited(sentences_of(document))
    british, american = (render_markdown(document, spelling, keys) for spelling in ("british", "american"))
    assert "favour" in british
    assert not re.search(r"favour|photocentre|analyse|colour", american.split("## References")[0])


def test_only_the_explanations_asked_for_are_written_about(material: Material) -> None:
    document = write_document(material, only=("main_sequence", "black_hole"))
    assert [p.about for p in document.paragraphs if p.about] == ["main_sequence", "black_hole"]
    assert len(document.table.rows) == 2


def test_html_is_one_file_without_network_or_script(material: Material) -> None:
    text = page(write_document(material, pictures=pictures), material)
    assert not re.search(r"https?://|<script|<link|@import|url\(", text)
    assert text.count("<img ") == len(pictures)
    assert all(source.startswith("data:image/png;base64,") for source in re.findall(r'<img [^>]*src="([^"]*)"', text))
    assert re.search(r'<img alt="[^"]+"', text)
    for tag in ("p", "table", "figure", "section", "tr", "td", "th", "span", "ul", "li", "sub", "sup", "i", "div"):
        assert len(re.findall(rf"<{tag}[ >]", text)) == text.count(f"</{tag}>"), tag


@pytest.mark.skipif(not shutil.which("chromium"), reason="no chromium")
@pytest.mark.parametrize("width", [360, 1280])
def test_html_does_not_overflow(width: int, materials: dict[str, Material], tmp_path: Path) -> None:
    material = materials["dark_companion"]
    text = page(write_document(material, pictures=pictures), material)
    # The width is asked for inside a frame, because a browser's own window may not be made as narrow as a phone.
    measure = (
        "<script>onload=()=>{const d=document.querySelector('iframe').contentDocument.documentElement;"
        "document.title=d.clientWidth+' '+d.scrollWidth}</script>"
    )
    srcdoc = text.replace("&", "&amp;").replace('"', "&quot;")
    frame = f'<iframe style="width:{width}px;height:900px;border:0" srcdoc="{srcdoc}"></iframe>'
    path = tmp_path / "page.html"
    path.write_text(f"<!DOCTYPE html><html><head><title>-</title></head><body>{frame}{measure}</body></html>")
    options = ["--headless", "--no-sandbox", "--disable-gpu", f"--user-data-dir={tmp_path}/profile"]
    done = subprocess.run(
        ["chromium", *options, "--window-size=1400,1000", "--dump-dom", path.as_uri()],
        capture_output=True,
        text=True,
        timeout=120,
        check=False,
    )
    title = re.search(r"<title>(\d+) (\d+)</title>", done.stdout)
    assert title is not None, done.stderr[-500:]
    inner, needed = int(title[1]), int(title[2])
    assert width - 20 <= inner <= width
    assert needed <= inner
