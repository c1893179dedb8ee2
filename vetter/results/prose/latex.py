r"""The section as plain LaTeX: natbib citations, booktabs, graphicx, and no package for units.

``alternatives.tex`` is a fragment for ``\input``; ``wrapper`` compiles it on its own.
"""

from __future__ import annotations

from vetter.results.prose.bibliography import WORKS, Work
from vetter.results.prose.document import (
    Citation,
    Document,
    Inline,
    Name,
    Number,
    Paragraph,
    Picture,
    Reference,
    Sentence,
    Symbol,
    Table,
    Text,
)
from vetter.results.prose.spelling import spelled
from vetter.results.prose.symbols import SYMBOLS, TIGHT_UNITS

ESCAPES = {
    "\\": r"\textbackslash{}",
    "&": r"\&",
    "%": r"\%",
    "$": r"\$",
    "#": r"\#",
    "_": r"\_",
    "{": r"\{",
    "}": r"\}",
    "~": r"\textasciitilde{}",
    "^": r"\textasciicircum{}",
    "<": r"$<$",
    ">": r"$>$",
    "é": r"{\'e}",
    "á": r"{\'a}",
    "Á": r"{\'A}",
    "ö": r"{\"o}",
    "ü": r"{\"u}",
    "Å": r"{\AA}",
    "−": r"$-$",
    "°": r"$^\circ$",
    "µ": r"$\mu$",
}
"""Characters that LaTeX reads otherwise."""

_COLUMNS = "llrrrl"


def escape(words: str) -> str:
    """Return words that LaTeX prints as they are; what has no ASCII form is left for a Unicode engine."""
    return "".join(ESCAPES.get(character, character) for character in words)


def render_section(document: Document, spelling: str) -> str:
    """Return the fragment: section, paragraphs, table and figures."""
    lines = [
        "% Needs \\usepackage{natbib,booktabs,graphicx}; the entries are in references.bib.",
        rf"\section{{{escape(spelled(document.title, spelling))}}}",
        r"\label{sec:alternatives}",
        "",
    ]
    for paragraph in document.paragraphs:
        lines += [render_paragraph(paragraph, spelling), ""]
    lines += [r"\input{table}", ""]
    for picture in document.pictures:
        lines += [*render_picture(picture, spelling), ""]
    return "\n".join(lines)


ARTICLE = (
    r"\documentclass[11pt]{article}",
    r"\usepackage[utf8]{inputenc}",
    r"\usepackage[margin=25mm]{geometry}",
    r"\usepackage[round]{natbib}",
    r"\usepackage{booktabs,graphicx}",
)
JOURNAL = (r"\documentclass[twocolumn]{aastex631}", r"\usepackage{booktabs}")


def wrapper(system: str, journal: bool = False) -> str:
    r"""Return a document that compiles the fragment on its own: pdflatex, bibtex, pdflatex three times."""
    return "\n".join(
        [
            *(JOURNAL if journal else ARTICLE),
            r"\emergencystretch=3em",
            rf"\title{{{escape(system)}}}",
            r"\begin{document}",
            r"\input{alternatives}",
            rf"\bibliographystyle{{{'aasjournal' if journal else 'plainnat'}}}",
            r"\bibliography{references}",
            r"\end{document}",
            "",
        ]
    )


def render_paragraph(paragraph: Paragraph, spelling: str) -> str:
    """Return one paragraph with its run-in heading, one sentence per line."""
    lines = [render_sentence(sentence, spelling) for sentence in paragraph.sentences]
    if paragraph.heading:
        lines.insert(0, rf"\paragraph{{{escape(spelled(paragraph.heading, spelling))}.}}")
    return "\n".join(lines)


def render_sentence(sentence: Sentence, spelling: str) -> str:
    """Return one sentence."""
    return "".join(_inline(part, spelling) for part in sentence)


def _inline(part: Inline, spelling: str) -> str:
    match part:
        case Text(words):
            return escape(spelled(words, spelling))
        case Name(words):
            return escape(words)
        case Symbol(key):
            return SYMBOLS[key].latex
        case Number():
            return _number(part)
        case Citation(keys, in_text):
            return rf"\cite{'t' if in_text else 'p'}{{{','.join(keys)}}}"
        case Reference(kind, label):
            return rf"{kind}~\ref{{{'tab' if kind == 'Table' else 'fig'}:{label}}}"


def _number(number: Number) -> str:
    text = number.shown
    if number.minus is not None and number.plus is not None:
        errors = rf" \pm {number.plus}" if number.plus == number.minus else rf"^{{+{number.plus}}}_{{-{number.minus}}}"
        text = f"${text}{errors}$"
    elif text.startswith("-") or text.startswith("+"):
        text = f"${text}$"
    if not number.unit:
        return text
    space = "" if number.unit in TIGHT_UNITS else r"\,"
    return f"{text}{space}{SYMBOLS[number.unit].latex}"


def render_table(table: Table, spelling: str, journal: bool = False) -> str:
    """Return the table with booktabs, or as a deluxetable of the AAS journals."""
    caption = " ".join(render_sentence(sentence, spelling) for sentence in table.caption)
    heads = [render_sentence(head, spelling) for head in table.heads]
    rows = [[render_sentence(cell, spelling) for cell in row] for row in table.rows]
    body = " \\\\\n".join(" & ".join(row) for row in rows)
    if journal:
        short, _, comments = caption.partition(". ")
        head = " & ".join(rf"\colhead{{{text}}}" for text in heads)
        return (
            f"\\begin{{deluxetable*}}{{{_COLUMNS}}}\n\\tablecaption{{{short}.\\label{{tab:{table.label}}}}}\n"
            f"\\tablehead{{{head}}}\n\\startdata\n{body}\n\\enddata\n\\tablecomments{{{comments}}}\n\\end{{deluxetable*}}\n"
        )
    return (
        f"\\begin{{table*}}\n\\centering\n\\caption{{{caption}}}\n\\label{{tab:{table.label}}}\n\\footnotesize\n"
        f"\\setlength{{\\tabcolsep}}{{4pt}}\n\\begin{{tabular}}{{{_COLUMNS}}}\n\\toprule\n{' & '.join(heads)} \\\\\n"
        f"\\midrule\n{body} \\\\\n\\bottomrule\n\\end{{tabular}}\n\\end{{table*}}\n"
    )


def render_picture(picture: Picture, spelling: str) -> list[str]:
    """Return one float."""
    caption = " ".join(render_sentence(sentence, spelling) for sentence in picture.caption)
    return [
        r"\begin{figure}",
        r"\centering",
        rf"\includegraphics{{{picture.label}}}",
        rf"\caption{{{caption}}}",
        rf"\label{{fig:{picture.label}}}",
        r"\end{figure}",
    ]


def render_bibliography(keys: list[str]) -> str:
    """Return references.bib with these works."""
    return "\n".join(_entry(key, WORKS[key]) for key in keys)


def _entry(key: str, work: Work) -> str:
    fields = {"author": " and ".join(_author(author) for author in work.authors), "title": f"{{{escape(work.title)}}}"}
    if work.journal:
        fields |= {"journal": escape(work.journal), "volume": work.volume, "pages": work.pages}
    else:
        fields["howpublished"] = escape(work.published)
    fields["year"] = str(work.year)
    body = ",\n".join(f"  {name} = {{{text}}}" for name, text in fields.items())
    return f"@{'article' if work.journal else 'misc'}{{{key},\n{body}\n}}\n"


def _author(author: str) -> str:
    last, _, first = author.partition(", ")
    # Two-word names are held together.
    return f"{{{escape(last)}}}, {escape(first)}" if first else escape(last)
