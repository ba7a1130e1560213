"""The key plan: the whole system small, where the large plan leaves out the far end of a main."""

from __future__ import annotations

from typing import Final

from supplycheck.report.drawing import Box, Dot, Drawing, Item, Label, Line
from supplycheck.report.figures.axes import Taken, plain, put_label, round_steps, short
from supplycheck.report.figures.legends import in_a_row, outlet_words
from supplycheck.report.figures.outline import Window
from supplycheck.report.figures.plan import places_of
from supplycheck.report.theme import CLAY, INK, PAPER, PETROL, SAND, SLATE
from supplycheck.results.records import NodeRow, Result
from supplycheck.units import UnitSet

_EDGE: Final = 26.0
_FOOT: Final = 16.0
_MARKED: Final = frozenset({"supply", "hose", "hydrant", "outlet"})


def key_plan(result: Result, units: UnitSet, shown: Window, size: tuple[float, float]) -> Drawing:
    """Return everything that has coordinates; ``shown`` is the part that the large plan shows."""
    places = places_of(result)
    xs = [x for x, _ in places.values()] + [shown.x0, shown.x1]
    ys = [y for _, y in places.values()] + [shown.y0, shown.y1]
    wide, high = max(max(xs) - min(xs), 1e-6), max(max(ys) - min(ys), 1e-6)
    factor = min((size[0] - 2 * _EDGE) / wide, (size[1] - 2 * _EDGE - _FOOT) / high)
    height = max(high * factor, 12.0) + 2 * _EDGE + _FOOT
    left = (size[0] - wide * factor) / 2
    bottom = _FOOT + (height - _FOOT - high * factor) / 2

    def at(x: float, y: float) -> tuple[float, float]:
        return left + (x - min(xs)) * factor, bottom + (y - min(ys)) * factor

    taken = Taken(2.0, _FOOT + 2, size[0] - 2, height - 2)
    items: list[Item] = [Box(0, _FOOT, size[0], height - _FOOT, PAPER, SLATE, 0.5)]
    low, top = at(shown.x0, shown.y0), at(shown.x1, shown.y1)
    items.append(Box(*low, top[0] - low[0], top[1] - low[1], "#f4e9d2", CLAY, 0.6, (3.0, 2.0)))
    for pipe in result.pipes:
        start, end = places.get(pipe.start), places.get(pipe.end)
        if start is not None and end is not None and start != end:
            main = pipe.role == "underground"
            a, b = at(*start), at(*end)
            items.append(Line((a, b), PETROL if main else SLATE, 1.3 if main else 0.35))
            if main:
                taken.take_line(a, b)
    marked = [node for node in result.nodes if node.tag in places and _is_marked(node, result)]
    for node in marked:
        x, y = at(*places[node.tag])
        items += _mark(node, x, y)
        taken.take((x - 5, y - 5, x + 5, y + 5))
    style = Label(0, 0, "", 6.4, bold=True)
    named = {result.demand.node, *(node.tag for node in marked if node.kind == "supply")}
    for node in marked:
        if shown.holds(*places[node.tag]) and node.tag not in named:
            continue  # the large plan names it
        label = put_label(taken, at(*places[node.tag]), short(node.tag, 80, 6.4), style, "far", 6.5)
        if label is not None:
            items.append(label)
    return Drawing(
        size[0], height, (*items, *_foot(factor, units, size[0], marked)), "key plan of the whole system"
    )


def _is_marked(node: NodeRow, result: Result) -> bool:
    return node.kind in _MARKED or node.tag == result.demand.node


def _mark(node: NodeRow, x: float, y: float) -> list[Item]:
    if node.kind == "supply":
        return [Line(((x - 4.5, y - 4.5), (x + 4.5, y - 4.5), (x, y + 4.5)), PAPER, 0.6, (), PETROL)]
    if node.kind in _MARKED:
        return [Box(x - 2.8, y - 2.8, 5.6, 5.6, SAND, INK, 0.6)]
    return [Dot(x, y, 2.0, INK)]


def _foot(factor: float, units: UnitSet, width: float, marked: list[NodeRow]) -> list[Item]:
    per_unit = factor * units.to_si(1.0, "length")
    length = round_steps(70.0 / per_unit, 1)[1]
    if length * per_unit > 130:
        length /= 2
    right = width - 4
    left = right - length * per_unit
    outlets = outlet_words(marked)
    entries: list[tuple[Line | Box, float, str]] = []
    if any(node.kind == "supply" for node in marked):
        entries.append((Line(((0, 3), (7, 3), (3.5, 10)), PAPER, 0.5, (), PETROL), 11.0, "supply"))
    if outlets:
        entries.append((Box(0, 3, 6, 6, SAND, INK, 0.6), 10.0, outlets))
    entries.append((Box(0, 3, 12, 6, "#f4e9d2", CLAY, 0.6, (3.0, 2.0)), 16.0, "part shown in the plan"))
    return [
        Line(((left, 6), (right, 6)), INK, 1.4),
        Label(left - 5, 3.5, f"{plain(length)} {units.symbol('length')}", 6.4, "end"),
        *in_a_row(entries, 3.5),
    ]
