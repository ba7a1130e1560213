"""Legends of the plans: a word for every symbol that is drawn, and the line of every pipe size."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import replace
from typing import Final

from supplycheck.report.drawing import Box, Dot, Drawing, Item, Label, Line
from supplycheck.report.figures.axes import short
from supplycheck.report.theme import CLAY, INK, PAPER, PETROL, SAND, SLATE, text_width
from supplycheck.results.display import nominal_text
from supplycheck.results.records import NodeRow, PipeRow
from supplycheck.units import UnitSet

_RAMP: Final = ("#7fb2bd", "#4f94a3", "#2b7787", "#0b4a5a", "#16262e")
Symbol = Line | Box | Dot


def outlet_words(nodes: Iterable[NodeRow]) -> str:
    """Return in words which of hose points, hydrants and outlets are among ``nodes``; empty for none."""
    kinds = {node.kind for node in nodes}
    return ", ".join(kind for kind in ("hose", "hydrant", "outlet") if kind in kinds)


def plan_legend(inside: Sequence[NodeRow], shut: bool) -> list[Item]:
    """Return a symbol and its word for everything that is drawn, and for nothing else.

    ``inside`` are the nodes drawn; ``shut`` says whether a shut pipe is.
    """
    return in_a_row(_drawn(inside, shut), 5.5)


def in_a_row(entries: Iterable[tuple[Symbol, float, str]], y: float) -> list[Item]:
    """Return symbols, each drawn at the left end, set in a row with their words ``y`` above the foot.

    An entry holds its symbol, how far its word stands from it [points], and the word.
    """
    items: list[Item] = []
    x = 0.0
    for symbol, shift, text in entries:
        items += [_shifted(symbol, x), Label(x + shift, y, text, 6.4)]
        x += shift + text_width(text, 6.4) + 12
    return items


def _shifted(symbol: Symbol, x: float) -> Symbol:
    if isinstance(symbol, Line):
        return replace(symbol, points=tuple((px + x, py) for px, py in symbol.points))
    return replace(symbol, x=symbol.x + x)


def _drawn(inside: Sequence[NodeRow], shut: bool) -> list[tuple[Symbol, float, str]]:
    """Return symbols at the left end of the legend, and the words for them."""
    heads = [node for node in inside if node.kind == "sprinkler"]
    area = any(node.in_design_area for node in heads)
    outlets = outlet_words(inside)
    supply = any(node.kind == "supply" for node in inside)
    wanted: tuple[tuple[bool, Symbol, str], ...] = (
        (area, Dot(4, 8, 2.3, CLAY, INK, 0.5), "head in the design area"),
        (
            any(not node.in_design_area for node in heads),
            Dot(4, 8, 2.3, PAPER, INK, 0.5),
            "other head" if area else "head",
        ),
        (supply, Line(((0, 5), (8, 5), (4, 12)), PAPER, 0.5, (), PETROL), "supply"),
        (bool(outlets), Box(2, 5, 6, 6, SAND, INK, 0.6), outlets),
        (area, Line(((0, 8), (14, 8)), CLAY, 1.2, (5.0, 2.5)), "design area"),
        (shut, Line(((0, 8), (14, 8)), SLATE, 1.2, (2.0, 2.0)), "shut pipe"),
    )
    return [
        (symbol, 18.0 if isinstance(symbol, Line) and symbol.fill is None else 11.0, text)
        for is_drawn, symbol, text in wanted
        if is_drawn
    ]


def pipe_strokes(pipes: tuple[PipeRow, ...]) -> dict[str, tuple[float, str]]:
    """Return line width and colour by nominal size, wider and darker for a larger bore."""
    bores: dict[str, float] = {}
    for pipe in pipes:
        bores[pipe.nominal] = max(bores.get(pipe.nominal, 0.0), pipe.bore)
    ordered = sorted(bores, key=lambda nominal: (bores[nominal], nominal))
    last = max(len(ordered) - 1, 1)
    return {
        nominal: (0.6 + 2.6 * place / last, _RAMP[round((len(_RAMP) - 1) * place / last)])
        for place, nominal in enumerate(ordered)
    }


def size_legend(pipes: tuple[PipeRow, ...], units: UnitSet, width: float) -> Drawing:
    """Return the legend of pipe sizes: a sample of the line, the nominal size, the bore or bores."""
    strokes = pipe_strokes(pipes)
    items: list[Item] = []
    x, rows = 0.0, 1
    placed: list[tuple[float, int, str, str]] = []
    for nominal in strokes:
        bores = sorted({pipe.bore for pipe in pipes if pipe.nominal == nominal})
        inside = " / ".join(units.text(bore, "size") for bore in bores[:3])
        text = f"{short(nominal_text(nominal, units), 120, 6.6)} ({inside})"
        wide = 32 + text_width(text, 6.6)
        if x + wide > width and x > 0:
            x, rows = 0.0, rows + 1
        placed.append((x, rows, nominal, text))
        x += wide + 8
    height = rows * 11.0 + 2
    for x, row, nominal, text in placed:
        y = height - row * 11.0
        stroke, colour = strokes[nominal]
        items.append(Line(((x, y + 2.4), (x + 22, y + 2.4)), colour, stroke))
        items.append(Label(x + 27, y, text, 6.6))
    return Drawing(width, height, tuple(items), "line by pipe size")
