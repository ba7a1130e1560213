"""The HTML writer: one page on its own, figures as SVG, no script, nothing fetched from anywhere.

Headings form one outline, tables name their column and row headings, figures tell what they show, and what
scrolls can be reached by the keyboard. On paper sections keep the paper and the direction of the PDF.
"""

from __future__ import annotations

from collections.abc import Iterable
from html import escape
from itertools import groupby
from typing import Final

from supplycheck.report.document import (
    BlankLines,
    Block,
    Column,
    Document,
    Facts,
    Figure,
    Heading,
    Listing,
    Paragraph,
    Row,
    Table,
    Verdict,
    without_rows,
)
from supplycheck.report.svg import svg
from supplycheck.report.theme import CLAY, INK, MIST, PETROL, RULE, SLATE, VERDICT_COLOURS
from supplycheck.results.display import visible

_VERDICTS: Final = "\n".join(
    f".verdict.{word.replace(' ', '-')} {{ background: {colour}; }}"
    for word, colour in VERDICT_COLOURS.items()
)
_STYLE: Final = f"""
:root {{ color-scheme: light; }}
body {{ font: 15px/1.5 Verdana, "DejaVu Sans", sans-serif; color: {INK}; background: #fff; margin: 0 auto;
  max-width: 64em; padding: 1.5em; }}
h1 {{ font-size: 1.9em; line-height: 1.2; margin: 0; overflow-wrap: anywhere; }}
h2 {{ color: {PETROL}; border-bottom: 2px solid {PETROL}; margin-top: 2.2em; }}
h3, caption {{ color: {PETROL}; font-weight: bold; font-size: 1em; text-align: left; padding: .4em 0; }}
a {{ color: {PETROL}; }}
a:focus-visible, .wide:focus-visible {{ outline: 3px solid {CLAY}; outline-offset: 2px; }}
.skip {{ position: absolute; left: -99em; }} .skip:focus {{ left: 1em; top: .3em; }}
.quiet, footer {{ color: {SLATE}; font-size: .85em; }}
.standing, .caution {{ border-left: 5px solid {CLAY}; padding: .3em .8em; }}
.standing {{ font-weight: bold; }}
nav ol {{ columns: 16em; padding-left: 1.6em; margin: .4em 0; }} nav li {{ break-inside: avoid; }}
.verdict {{ color: #fff; padding: .8em 1.1em; margin-top: 1em; }}
.verdict strong {{ font-size: 1.7em; display: block; }}
{_VERDICTS}
.tiles {{ display: flex; flex-wrap: wrap; background: {MIST}; }}
.tiles div {{ flex: 1 1 11em; padding: .7em 1.1em; }}
.tiles b {{ display: block; font-size: 1.5em; }}
.wide {{ overflow-x: auto; }}
table {{ border-collapse: collapse; font-size: .82em; width: 100%; margin-bottom: 1em; }}
thead th {{ background: {MIST}; vertical-align: bottom; }}
th {{ text-align: left; }} tbody th {{ font-weight: normal; }}
th, td {{ padding: .22em .5em; border-bottom: 1px solid {RULE}; vertical-align: top; }}
th small {{ display: block; font-weight: normal; color: {SLATE}; }}
.n {{ text-align: right; white-space: nowrap; font-variant-numeric: tabular-nums; }}
.n + td:not(.n), .n + th:not(.n) {{ padding-left: 1.2em; }}
.noted > * {{ border-bottom: 0; }} .note td {{ color: {SLATE}; padding-left: 1.6em; }}
.strong > * {{ font-weight: bold; }}
dl {{ display: grid; grid-template-columns: minmax(9em, max-content) 1fr; gap: .1em 1em; }}
dt {{ color: {SLATE}; }} dd {{ margin: 0; overflow-wrap: anywhere; }}
ul.told {{ list-style: none; padding: 0; }} ul.told li {{ margin: .5em 0; }}
figure {{ margin: 1em 0; }}
pre {{ white-space: pre-wrap; overflow-wrap: anywhere; font-size: .8em; background: {MIST};
  padding: .8em; }}
.blank {{ border-bottom: 1px solid {SLATE}; min-height: 2em; color: {SLATE}; }}
.kept {{ white-space: nowrap; }}
svg {{ max-width: 100%; height: auto; }}
@media (min-width: 50em) {{ dl.two {{ grid-template-columns: max-content 1fr max-content 1fr; }} }}
@media print {{
  body {{ font-size: 8.5pt; line-height: 1.35; max-width: none; padding: 0; }}
  .skip, nav {{ display: none; }}
  a {{ color: inherit; text-decoration: none; }}
  dl.two {{ grid-template-columns: max-content 1fr max-content 1fr; }}
  section.turned {{ page: turned; }} .if-room {{ display: none; }} h2 {{ margin-top: 1.2em; }}
  h2, h3, caption, .noted {{ break-after: avoid; }}
  figure, tr, .verdict, .tiles, li, .blank {{ break-inside: avoid; }}
  thead {{ display: table-header-group; }}
  .wide {{ overflow: visible; }}
  table {{ font-size: 7pt; line-height: 1.25; }} th, td {{ padding: .15em .35em; }}
  pre {{ font-size: 7pt; padding: 0; }}
  .verdict {{ background: none !important; color: {INK}; border: 2.5pt solid {INK}; }}
  .tiles, thead th, pre {{ background: none; }} thead th {{ border-bottom: 1pt solid {INK}; }}
  svg {{ width: auto; max-width: 100%; max-height: 22cm; }}
}}
"""
_SHORT: Final = 16
"""Letters of a cell that is never broken, such as a tag with a hyphen in it."""
_PAPERS: Final = {"letter": "letter", "a4": "A4"}
_SEALED: Final = "default-src 'none'; style-src 'unsafe-inline'"
"""What the page may load: nothing but its own style."""


def html_text(document: Document) -> str:
    """Return ``document`` as one HTML page."""
    title = _safe(document.title)
    entries = "".join(
        f'<li><a href="#s{number}">{_safe(section.title)}</a></li>'
        for number, section in enumerate(document.sections)
    )
    parts = [
        '<!DOCTYPE html>\n<html lang="en"><head><meta charset="utf-8">',
        f'<meta name="generator" content="{_safe(document.producer)}">',
        f'<meta http-equiv="Content-Security-Policy" content="{_SEALED}">',
        '<meta name="viewport" content="width=device-width, initial-scale=1">',
        f"<title>{title}</title><style>{_STYLE}{_pages(document)}</style></head><body>",
        '<a class="skip" href="#s0">To the answer</a>',
        f'<header><h1>{title}</h1><p class="quiet">{_safe(document.subtitle)}</p>',
        f'<p class="standing" role="note">{_standing(document)}</p>',
        f'<nav aria-label="Contents"><ol>{entries}</ol></nav></header><main>',
    ]
    for number, section in enumerate(document.sections):
        named = ' class="turned"' if section.landscape else ""
        parts.append(f'<section id="s{number}"{named} aria-labelledby="h{number}">')
        parts.append(f'<h2 id="h{number}">{_safe(section.title)}</h2>')
        parts += _blocks(section.blocks)
        parts.append("</section>")
    standing = f"{_standing(document)} · {_safe(document.date)} · {_safe(document.producer)}"
    parts.append(f"</main><footer><p>{standing}</p></footer></body></html>")
    return "\n".join(parts) + "\n"


def _standing(document: Document) -> str:
    text = _safe(document.standing)
    return text[:1].upper() + text[1:]


def _pages(document: Document) -> str:
    """Return the paper, and what stands below each printed page where the browser prints that."""
    paper = _PAPERS[document.paper]
    standing = document.standing.translate({ord(char): None for char in '\\"<>\n'})
    foot = (
        f'@bottom-left {{ content: "{standing}"; font: 7pt sans-serif; white-space: nowrap; }} '
        '@bottom-right { content: counter(page) " / " counter(pages); font: 7pt sans-serif; }'
    )
    return (
        f"@page {{ size: {paper} portrait; margin: 14mm 13mm 16mm; {foot} }}\n"
        f"@page turned {{ size: {paper} landscape; }}\n"
    )


def _safe(text: str) -> str:
    return escape(visible(text))


def _blocks(blocks: Iterable[Block]) -> list[str]:
    """Return the blocks in order; paragraphs with a bullet that follow each other make one list."""
    parts: list[str] = []
    for listed, run in groupby(blocks, lambda block: isinstance(block, Paragraph) and bool(block.bullet)):
        texts = [_block(block) for block in run]
        parts += ['<ul class="told" role="list">', *texts, "</ul>"] if listed else texts
    return parts


def _block(block: Block) -> str:
    match block:
        case Heading():
            return f"<h3>{_safe(block.text)}</h3>"
        case Paragraph():
            return _paragraph(block)
        case Facts():
            pairs = (f"<dt>{_safe(label)}</dt><dd>{_safe(value)}</dd>" for label, value in block.pairs)
            two = ' class="two"' if block.columns > 1 else ""
            return f"<dl{two}>{''.join(pairs)}</dl>"
        case Table():
            return _table(block)
        case Figure():
            return _figure(block)
        case Verdict():
            return _verdict(block)
        case BlankLines():
            lines = "".join(f'<div class="blank">{_safe(label)}</div>' for label in block.labels)
            rest = '<div class="blank"></div>' * block.remarks
            return f"<h3>{_safe(block.title)}</h3>{lines}{rest}"
        case Listing():
            note = f'<p class="quiet">{_safe(block.note)}</p>' if block.note else ""
            lines = "\n".join(_safe(line) for line in block.lines)
            return f"<h3>{_safe(block.title)}</h3>{note}<pre>{lines}</pre>"


def _paragraph(block: Paragraph) -> str:
    text = _safe(block.text)
    if block.bullet:
        return f"<li{_look(block)}><b>{_safe(block.bullet)}</b> {text}</li>"
    if block.tone == "lead":
        return f"<p><strong>{text}</strong></p>"
    return f"<p{_look(block)}>{text}</p>"


def _look(block: Paragraph) -> str:
    return {"small": ' class="quiet"', "caution": ' class="caution"'}.get(block.tone, "")


def _verdict(block: Verdict) -> str:
    tiles = "".join(
        f"<div>{_safe(tile.label)}<b>{_safe(tile.value)}</b>"
        f'<span class="quiet">{_safe(tile.detail)}</span></div>'
        for tile in block.tiles
    )
    return (
        f'<div class="verdict {block.word.replace(" ", "-")}"><strong>{_safe(block.title)}</strong>'
        f'{_safe(block.sentence)}</div><div class="tiles">{tiles}</div>'
    )


def _table(block: Table) -> str:
    if not block.rows:
        return f"<p>{_safe(without_rows(block))}</p>"
    head = "".join(
        f'<th{_side(column)} scope="col">{_safe(column.title)}'
        + (f"<small>{_safe(column.unit)}</small>" if column.unit else "")
        + "</th>"
        for column in block.columns
    )
    caption = f"<caption>{_safe(block.title)}</caption>" if block.title else ""
    note = f'<p class="quiet">{_safe(block.note)}</p>' if block.note else ""
    body = "\n".join(_row(row, block.columns) for row in block.rows)
    table = f"<table>{caption}<thead><tr>{head}</tr></thead><tbody>{body}</tbody></table>"
    label = _safe(block.title or f"Table: {block.columns[0].title}")
    return f'<div class="wide" role="region" tabindex="0" aria-label="{label}">{table}</div>{note}'


def _side(column: Column) -> str:
    return ' class="n"' if column.right else ""


def _row(row: Row, columns: tuple[Column, ...]) -> str:
    """Return a row, whose first cell names it, and the row of its note."""
    looks = [name for name, on in (("strong", row.strong), ("noted", bool(row.note))) if on]
    named = f' class="{" ".join(looks)}"' if looks else ""
    cells = "".join(
        f'<th{_kept(column, cell)} scope="row">{_safe(cell)}</th>'
        if place == 0
        else f"<td{_kept(column, cell)}>{_safe(cell)}</td>"
        for place, (column, cell) in enumerate(zip(columns, row.cells, strict=True))
    )
    text = f"<tr{named}>{cells}</tr>"
    if row.note:
        text += f'\n<tr class="note"><td colspan="{len(columns)}">{_safe(row.note)}</td></tr>'
    return text


def _kept(column: Column, cell: str) -> str:
    """Return the class of a cell: numbers stand right, short words are not broken."""
    if column.right:
        return _side(column)
    return ' class="kept"' if not column.wrap and "-" in cell and len(cell) <= _SHORT else ""


def _figure(block: Figure) -> str:
    title = f"<h3>{_safe(block.title)}</h3>" if block.title else ""
    caption = f'<figcaption class="quiet">{_safe(block.caption)}</figcaption>' if block.caption else ""
    named = ' class="if-room"' if block.if_room else ""
    label = _safe(f"Figure: {block.title or block.drawing.shows}")
    drawn = f'<div class="wide" role="region" tabindex="0" aria-label="{label}">{svg(block.drawing)}</div>'
    return f"<figure{named}>{title}{drawn}{caption}</figure>"
