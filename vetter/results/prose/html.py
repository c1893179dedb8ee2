"""The section as one HTML file: no script, no network, readable on a phone, and on paper."""

from __future__ import annotations

import base64
from collections.abc import Mapping
from html import escape

from vetter.results.prose.bibliography import WORKS, cited_as, plain_entry
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

STYLE = """
:root { color-scheme: light; }
* { box-sizing: border-box; }
body { margin: 0; background: #fff; color: #1a1a1a; font: 1rem/1.55 Georgia, "Times New Roman", serif; }
main { max-width: 44rem; margin: 0 auto; padding: 1.5rem 1rem 4rem; overflow-wrap: break-word; }
header p { margin: 0; color: #555; font-family: system-ui, sans-serif; font-size: .9rem; }
h1 { font-size: 1.5rem; line-height: 1.2; margin: .2rem 0 1rem; }
h2 { font-size: 1.1rem; margin: 2rem 0 .5rem; }
.headline { border-left: .25rem solid #1a1a1a; padding: .1rem 0 .1rem .8rem; font-size: 1.05rem; }
.scroll { overflow-x: auto; }
table { border-collapse: collapse; font: .85rem/1.35 system-ui, sans-serif; width: 100%; min-width: 34rem; }
th, td { text-align: left; vertical-align: top; padding: .3rem .6rem .3rem 0; border-bottom: 1px solid #ddd; }
thead th { border-bottom: 2px solid #1a1a1a; }
tbody th { font-weight: normal; }
td.number, th.number { text-align: right; white-space: nowrap; font-variant-numeric: tabular-nums; }
.excluded { color: #555; }
.allowed { font-weight: bold; }
figure { margin: 2rem 0; }
figure img { display: block; max-width: 100%; height: auto; margin: 0 auto .6rem; }
figcaption, .caption, .references { font: .85rem/1.45 system-ui, sans-serif; color: #333; }
.references { padding-left: 1.2rem; }
sup, sub { line-height: 0; }
.whole { white-space: nowrap; }
.errors { display: inline-block; vertical-align: -.35em; font-size: .7em; line-height: 1.1; }
.errors span { display: block; }
@media print {
  body { font-size: 10pt; }
  main { max-width: none; padding: 0; }
  .scroll { overflow: visible; }
  table { min-width: 0; }
  figure, tr { break-inside: avoid; }
}
"""


def render_html(
    document: Document, system: str, headline: Sentence, spelling: str, keys: list[str], pictures: Mapping[str, bytes]
) -> str:
    """Return the whole page; ``pictures`` holds the PNG of every figure by label."""
    title = escape(spelled(document.title, spelling))
    parts = [
        f'<!DOCTYPE html>\n<html lang="en">\n<head>\n<meta charset="utf-8">\n<title>{escape(system)}: {title}</title>',
        '<meta name="viewport" content="width=device-width, initial-scale=1">',
        f"<style>{STYLE}</style>\n</head>\n<body>\n<main>",
        f"<header><p>{escape(system)}</p><h1>{title}</h1></header>",
        f'<p class="headline">{render_sentence(headline, spelling)}</p>',
        render_table(document.table, spelling),
        *(render_paragraph(paragraph, spelling) for paragraph in document.paragraphs),
        *(
            render_picture(picture, number, spelling, pictures[picture.label])
            for number, picture in enumerate(document.pictures, start=1)
        ),
        '<h2>References</h2>\n<ul class="references">',
        *(f"<li>{escape(plain_entry(WORKS[key]))}</li>" for key in keys),
        "</ul>\n</main>\n</body>\n</html>\n",
    ]
    return "\n".join(parts)


def render_paragraph(paragraph: Paragraph, spelling: str) -> str:
    """Return one paragraph under its heading."""
    text = " ".join(render_sentence(sentence, spelling) for sentence in paragraph.sentences)
    heading = f"<h2>{escape(spelled(paragraph.heading, spelling))}</h2>\n" if paragraph.heading else ""
    return f"{heading}<p>{text}</p>"


def render_sentence(sentence: Sentence, spelling: str) -> str:
    """Return one sentence."""
    return "".join(_inline(part, spelling) for part in sentence)


def _inline(part: Inline, spelling: str) -> str:
    match part:
        case Text(words):
            return escape(spelled(words, spelling)).replace("--", "–")
        case Name(words):
            return escape(words)
        case Symbol(key):
            return SYMBOLS[key].html
        case Number():
            return _number(part)
        case Citation():
            return escape(cited_as(part))
        case Reference(kind, label, number):
            return f'<a href="#{label}">{kind} {number}</a>'


def _number(number: Number) -> str:
    text = number.shown.replace("-", "−")
    if number.minus is not None and number.plus is not None:
        if number.plus == number.minus:
            text += f" ± {number.plus}"
        else:
            text += f'<span class="errors"><span>+{number.plus}</span><span>−{number.minus}</span></span>'
    if number.plus is not None:
        text = f'<span class="whole">{text}</span>'
    if not number.unit:
        return text
    space = "" if number.unit in TIGHT_UNITS else "&nbsp;"
    return f"{text}{space}{SYMBOLS[number.unit].html}"


def render_table(table: Table, spelling: str) -> str:
    """Return the table in a box that scrolls sideways on a narrow screen."""
    numeric = (False, False, True, True, True, False)

    def cell(tag: str, content: Sentence, number: bool) -> str:
        text = render_sentence(content, spelling)
        verdict = text if text in ("excluded", "allowed") else ""
        names = " ".join(name for name in ("number" if number else "", verdict) if name)
        scope = ' scope="col"' if tag == "head" else ' scope="row"' if tag == "row" else ""
        element = "td" if tag == "cell" else "th"
        return f"<{element}{scope}{f' class={chr(34)}{names}{chr(34)}' if names else ''}>{text}</{element}>"

    head = "".join(cell("head", text, number) for text, number in zip(table.heads, numeric, strict=True))
    body = "\n".join(
        "<tr>"
        + "".join(
            cell("cell" if place else "row", text, number)
            for place, (text, number) in enumerate(zip(row, numeric, strict=True))
        )
        + "</tr>"
        for row in table.rows
    )
    caption = " ".join(render_sentence(sentence, spelling) for sentence in table.caption)
    return (
        f'<div class="scroll" id="{table.label}" tabindex="0"><table><thead><tr>{head}</tr></thead>\n<tbody>\n{body}\n'
        f'</tbody></table></div>\n<p class="caption"><b>Table 1.</b> {caption}</p>'
    )


def render_picture(picture: Picture, number: int, spelling: str, png: bytes) -> str:
    """Return one figure with its image inside the page."""
    caption = " ".join(render_sentence(sentence, spelling) for sentence in picture.caption)
    image = base64.b64encode(png).decode()
    words = escape(spelled(picture.words, spelling), quote=True)
    return (
        f'<figure id="{picture.label}"><img alt="{words}" src="data:image/png;base64,{image}">'
        f"<figcaption><b>Figure {number}.</b> {caption}</figcaption></figure>"
    )
