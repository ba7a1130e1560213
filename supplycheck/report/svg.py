"""Figures as SVG: one element on its own, with words for those who cannot see it."""

from __future__ import annotations

from collections.abc import Iterable
from html import escape
from typing import Final

from supplycheck.report.drawing import Box, Dot, Drawing, Item, Label, Line
from supplycheck.report.theme import text_width
from supplycheck.results.display import visible

MOST_TOLD: Final = 40
"""Labels that are read out one by one; a plan has hundreds, and its numbers stand in tables."""


def svg(drawing: Drawing) -> str:
    """Return ``drawing`` as SVG."""
    size = f"{drawing.width:.1f} {drawing.height:.1f}"
    body = "".join(_items(drawing.items, drawing.height))
    shows = _safe(drawing.shows or "figure")
    told = _told(drawing)
    desc = f"<desc>{_safe(told)}</desc>" if told else ""
    return (
        f'<svg xmlns="http://www.w3.org/2000/svg" viewBox="0 0 {size}" width="{drawing.width * 1.7:.0f}" '
        f'role="img" aria-label="{shows}" font-family="Verdana, DejaVu Sans, sans-serif">'
        f"<title>{shows}</title>{desc}{body}</svg>"
    )


def _told(drawing: Drawing) -> str:
    """Return the words that stand in ``drawing``, without the bare numbers of its scales."""
    labels = [item.text for item in drawing.items if isinstance(item, Label)]
    words = [text for text in labels if any(char.isalpha() for char in text)]
    return "; ".join(words) if len(words) <= MOST_TOLD else ""


def _safe(text: str) -> str:
    return escape(visible(text))


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
