"""The HTML writer: one page on its own, figures as SVG, no script, nothing fetched from anywhere."""

from __future__ import annotations

from collections.abc import Iterable
from html import escape
from typing import Final

from supplycheck.report.document import (
    BlankLines,
    Block,
    Document,
    Facts,
    Figure,
    Heading,
    Listing,
    Paragraph,
    Table,
    Verdict,
    without_rows,
)
from supplycheck.report.drawing import Box, Dot, Drawing, Item, Label, Line
from supplycheck.report.theme import INK, MIST, PETROL, RULE, SLATE, VERDICT_COLOURS, text_width
from supplycheck.results.display import visible

_STYLE: Final = f"""
body {{ font: 15px/1.5 Verdana, "DejaVu Sans", sans-serif; color: {INK}; margin: 0 auto; max-width: 64em;
  padding: 1.5em; }}
h1 {{ font-size: 1.9em; line-height: 1.2; margin: 0; overflow-wrap: anywhere; }}
h2 {{ color: {PETROL}; border-bottom: 2px solid {PETROL}; margin-top: 2.2em; }}
h3, caption {{ color: {PETROL}; font-weight: bold; font-size: 1em; text-align: left; padding: .4em 0; }}
.quiet, footer {{ color: {SLATE}; font-size: .85em; }}
.verdict {{ color: #fff; padding: .8em 1.1em; margin-top: 1em; }}
.verdict strong {{ font-size: 1.7em; display: block; }}
.tiles {{ display: flex; flex-wrap: wrap; background: {MIST}; }}
.tiles div {{ flex: 1 1 11em; padding: .7em 1.1em; }}
.tiles b {{ display: block; font-size: 1.5em; }}
.wide {{ overflow-x: auto; }}
table {{ border-collapse: collapse; font-size: .82em; width: 100%; margin-bottom: 1em; }}
th {{ background: {MIST}; text-align: left; vertical-align: bottom; }}
th, td {{ padding: .22em .5em; border-bottom: 1px solid {RULE}; vertical-align: top; }}
th small {{ display: block; font-weight: normal; color: {SLATE}; }}
.n {{ text-align: right; white-space: nowrap; font-variant-numeric: tabular-nums; }}
.note td {{ color: {SLATE}; padding-left: 1.6em; }}
.strong td {{ font-weight: bold; }}
dl {{ display: grid; grid-template-columns: minmax(9em, max-content) 1fr; gap: .1em 1em; }}
dt {{ color: {SLATE}; }} dd {{ margin: 0; overflow-wrap: anywhere; }}
pre {{ white-space: pre-wrap; overflow-wrap: anywhere; font-size: .8em; background: {MIST};
  padding: .8em; }}
.blank {{ border-bottom: 1px solid {SLATE}; min-height: 2em; color: {SLATE}; }}
svg {{ max-width: 100%; height: auto; }}
@media print {{ h2 {{ break-after: avoid; }} figure, tr {{ break-inside: avoid; }} }}
"""


def html_text(document: Document) -> str:
    """Return ``document`` as one HTML page."""
    title = _safe(document.title)
    parts = [
        '<!DOCTYPE html>\n<html lang="en"><head><meta charset="utf-8">',
        '<meta name="viewport" content="width=device-width, initial-scale=1">',
        f"<title>{title}</title><style>{_STYLE}</style></head><body>",
        f'<header><h1>{title}</h1><p class="quiet">{_safe(document.subtitle)}</p></header>',
    ]
    for number, section in enumerate(document.sections):
        parts.append(f'<section id="s{number}">')
        if number:
            parts.append(f"<h2>{_safe(section.title)}</h2>")
        parts += [_block(block) for block in section.blocks]
        parts.append("</section>")
    standing = f"{_safe(document.standing)} · {_safe(document.date)} · {_safe(document.producer)}"
    parts.append(f"<footer><p>{standing}</p></footer></body></html>")
    return "\n".join(parts) + "\n"


def _safe(text: str) -> str:
    return escape(visible(text))


def _block(block: Block) -> str:
    match block:
        case Heading():
            return f"<h3>{_safe(block.text)}</h3>"
        case Paragraph():
            return _paragraph(block)
        case Facts():
            pairs = (f"<dt>{_safe(label)}</dt><dd>{_safe(value)}</dd>" for label, value in block.pairs)
            return f"<dl>{''.join(pairs)}</dl>"
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
        text = f"<b>{_safe(block.bullet)}</b> {text}"
    if block.tone == "lead":
        return f"<p><strong>{text}</strong></p>"
    return f'<p class="quiet">{text}</p>' if block.tone == "small" else f"<p>{text}</p>"


def _verdict(block: Verdict) -> str:
    tiles = "".join(
        f"<div>{_safe(tile.label)}<b>{_safe(tile.value)}</b>"
        f'<span class="quiet">{_safe(tile.detail)}</span></div>'
        for tile in block.tiles
    )
    colour = VERDICT_COLOURS[block.word]
    return (
        f'<div class="verdict" style="background:{colour}"><strong>{_safe(block.title)}</strong>'
        f'{_safe(block.sentence)}</div><div class="tiles">{tiles}</div>'
    )


def _table(block: Table) -> str:
    if not block.rows:
        return f"<p>{_safe(without_rows(block))}</p>"
    head = "".join(
        f'<th class="{"n" if column.right else ""}" scope="col">{_safe(column.title)}'
        + (f"<small>{_safe(column.unit)}</small>" if column.unit else "")
        + "</th>"
        for column in block.columns
    )
    span = len(block.columns)
    rows = []
    for row in block.rows:
        cells = "".join(
            f'<td class="{"n" if column.right else ""}">{_safe(cell)}</td>'
            for column, cell in zip(block.columns, row.cells, strict=True)
        )
        rows.append(f'<tr class="{"strong" if row.strong else ""}">{cells}</tr>')
        if row.note:
            rows.append(f'<tr class="note"><td colspan="{span}">{_safe(row.note)}</td></tr>')
    caption = f"<caption>{_safe(block.title)}</caption>" if block.title else ""
    note = f'<p class="quiet">{_safe(block.note)}</p>' if block.note else ""
    body = "\n".join(rows)
    table = f"<table>{caption}<thead><tr>{head}</tr></thead><tbody>{body}</tbody></table>"
    return f'<div class="wide">{table}</div>{note}'


def _figure(block: Figure) -> str:
    title = f"<h3>{_safe(block.title)}</h3>" if block.title else ""
    caption = f'<figcaption class="quiet">{_safe(block.caption)}</figcaption>' if block.caption else ""
    return f'<figure style="margin:1em 0">{title}{svg(block.drawing)}{caption}</figure>'


def svg(drawing: Drawing) -> str:
    """Return ``drawing`` as SVG."""
    size = f"{drawing.width:.1f} {drawing.height:.1f}"
    body = "".join(_items(drawing.items, drawing.height))
    return (
        f'<svg xmlns="http://www.w3.org/2000/svg" viewBox="0 0 {size}" width="{drawing.width * 1.7:.0f}" '
        f'role="img" font-family="Verdana, DejaVu Sans, sans-serif"><title>{_safe(drawing.shows)}</title>'
        f"{body}</svg>"
    )


def _items(items: Iterable[Item], height: float) -> Iterable[str]:
    for item in items:
        match item:
            case Line():
                points = " ".join(f"{x:.2f},{height - y:.2f}" for x, y in item.points)
                kind = "polygon" if item.fill else "polyline"
                look = _look(item.fill, item.stroke, item.width, item.dash)
                yield f'<{kind} points="{points}" {look} stroke-linejoin="round"/>'
            case Box():
                look = _look(item.fill, item.stroke, item.line, item.dash)
                yield (
                    f'<rect x="{item.x:.2f}" y="{height - item.y - item.height:.2f}" '
                    f'width="{max(item.width, 0):.2f}" height="{max(item.height, 0):.2f}" {look}/>'
                )
            case Dot():
                look = _look(item.fill, item.stroke, item.line, ())
                yield f'<circle cx="{item.x:.2f}" cy="{height - item.y:.2f}" r="{item.radius:.2f}" {look}/>'
            case Label():
                yield _label(item, height)


def _look(fill: str | None, stroke: str | None, width: float, dash: tuple[float, ...]) -> str:
    parts = [f'fill="{fill or "none"}"']
    if stroke:
        parts.append(f'stroke="{stroke}" stroke-width="{width:g}"')
    if dash:
        parts.append(f'stroke-dasharray="{" ".join(f"{one:g}" for one in dash)}"')
    return " ".join(parts)


def _label(item: Label, height: float) -> str:
    x, y = item.x, height - item.y
    text = _safe(item.text)
    turned = f' transform="rotate({-item.angle:g} {x:.2f} {y:.2f})"' if item.angle else ""
    weight = ' font-weight="bold"' if item.bold else ""
    ground = ""
    if item.behind:
        wide = text_width(item.text, item.size, bold=item.bold)
        left = x - {"start": 0.0, "middle": wide / 2, "end": wide}[item.anchor]
        ground = (
            f'<rect x="{left - 1:.2f}" y="{y - item.size * 0.86:.2f}" width="{wide + 2:.2f}" '
            f'height="{item.size * 1.1:.2f}" fill="{item.behind}"{turned}/>'
        )
    return (
        f'{ground}<text x="{x:.2f}" y="{y:.2f}" font-size="{item.size:g}" text-anchor="{item.anchor}" '
        f'fill="{item.colour}"{weight}{turned}>{text}</text>'
    )
