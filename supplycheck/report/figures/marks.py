"""The marked points of the supply graph: named beside the point, or numbered with a key below."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Final

from supplycheck.report.drawing import Anchor, Box, Dot, Item, Label, Line
from supplycheck.report.figures.axes import Taken, short
from supplycheck.report.theme import CLAY, INK, PETROL, SAND, SLATE, text_width

KEY_ROW: Final = 9.6
"""Height of a row of the key [points]."""

_SIZE: Final = 6.6
_HALF: Final = 4.2
_NEAR: Final = 42.0
_TOGETHER: Final = 6.0
_KEY_SIZE: Final = 6.4
_KEY_INDENT: Final = 22.0


@dataclass(frozen=True, slots=True)
class Mark:
    """A point on the graph: flow and pressure in the display unit and what is written about it."""

    name: str
    style: str
    flow: float
    pressure: float
    text: str


def symbol(style: str, x: float, y: float) -> list[Item]:
    """Return the symbol of a mark of ``style`` at (``x``, ``y``)."""
    if style == "test":
        return [Dot(x, y, 2.8, "#ffffff", SLATE, 1.2)]
    if style == "demand":
        return [Line(((x, y + 3.4), (x + 3.4, y), (x, y - 3.4), (x - 3.4, y)), CLAY, 0.8, (), "#ffffff")]
    if style == "demand with hose":
        return [Line(((x, y + 4), (x + 4, y), (x, y - 4), (x - 4, y)), CLAY, 0.8, (), CLAY)]
    if style == "available":
        return [Dot(x, y, 3.0, PETROL)]
    return [Box(x - 2.8, y - 2.8, 5.6, 5.6, SAND, INK, 0.8)]


def names_beside(marks: list[Mark], at: list[tuple[float, float]], taken: Taken) -> list[Item] | None:
    """Return the texts beside their marks, or ``None`` where one of them finds no free place near."""
    _take_symbols(at, taken)
    items: list[Item] = []
    for mark, (x, y) in zip(marks, at, strict=True):
        under = any(abs(other - x) < 70 and up > y for other, up in at)
        found = taken.place(x, y, mark.text, _SIZE, gap=6.0, reach="far", down=under, pad=3.0)
        if found is None or math.hypot(found[0] - x, found[1] - y) > _NEAR:
            return None
        at_x, at_y, anchor = found
        near = (at_x, at_y - 2.0 if at_y > y else at_y + 6.0)
        if math.hypot(near[0] - x, near[1] - y) > 13.0:
            items.append(Line(((x, y), near), SLATE, 0.4))
        items.append(Label(at_x, at_y, mark.text, _SIZE, anchor, False, INK, 0.0, "#ffffff"))
    return items


def numbers_beside(at: list[tuple[float, float]], taken: Taken) -> list[Item]:
    """Return the numbers of the marks; marks that stand on each other share a label."""
    _take_symbols(at, taken)
    items: list[Item] = []
    for group in _groups(at):
        x, y = at[group[0]]
        text = ", ".join(str(place + 1) for place in group)
        around = [up - y for other, up in at if abs(other - x) < 40 and up != y]
        above = bool(around) and max(around) < 0
        found = taken.place(
            x, y, text, _SIZE, gap=5.6, bold=True, down=bool(around) and not above, up=above
        ) or _nearest(x, y, text, taken)
        if found is None:
            continue
        at_x, at_y, anchor = found
        near = (at_x, at_y - 1.5 if at_y > y else at_y + 5.5)
        if math.hypot(near[0] - x, near[1] - y) > 11.0:
            items.append(Line(((x, y), near), SLATE, 0.4))
        items.append(Label(at_x, at_y, text, _SIZE, anchor, True, INK, 0.0, "#ffffff"))
    return items


def _take_symbols(at: list[tuple[float, float]], taken: Taken) -> None:
    for x, y in at:
        taken.take((x - _HALF, y - _HALF, x + _HALF, y + _HALF))


def _groups(at: list[tuple[float, float]]) -> list[list[int]]:
    groups: list[list[int]] = []
    for place, (x, y) in enumerate(at):
        for group in groups:
            first = at[group[0]]
            if math.hypot(first[0] - x, first[1] - y) < _TOGETHER:
                group.append(place)
                break
        else:
            groups.append([place])
    return groups


def _nearest(x: float, y: float, text: str, taken: Taken) -> tuple[float, float, Anchor] | None:
    """Return the free place for ``text`` nearest to (``x``, ``y``) anywhere on the drawing."""
    across, down = int((taken.right - taken.left) / 6.0), int((taken.top - taken.bottom) / 4.0)
    spots = [
        (taken.left + 6.0 * (column + 0.5), taken.bottom + 4.0 * (row + 0.5))
        for column in range(across)
        for row in range(down)
    ]
    half = text_width(text, _SIZE, bold=True) / 2 + 1.0
    for px, py in sorted(spots, key=lambda spot: math.hypot(spot[0] - x, spot[1] - y)):
        box = (px - half, py - _SIZE * 0.22, px + half, py + _SIZE * 0.8)
        if taken.is_free(box):
            taken.take(box)
            return px, py, "middle"
    return None


def key_rows(marks: list[Mark], width: float) -> list[list[tuple[float, int]]]:
    """Return the rows of the key for ``width``: of every entry its indent and the place of its mark."""
    widest = max((text_width(mark.text, _KEY_SIZE) for mark in marks), default=0.0) + _KEY_INDENT + 4.0
    columns = max(1, min(3, int(width / widest)))
    share = width / columns
    return [
        [(share * column, place) for column, place in enumerate(range(first, last))]
        for first in range(0, len(marks), columns)
        for last in (min(first + columns, len(marks)),)
    ]


def key(marks: list[Mark], rows: list[list[tuple[float, int]]], top: float) -> list[Item]:
    """Return the key: number, symbol, name, flow and pressure of every mark, the first row at ``top``."""
    items: list[Item] = []
    room = (rows[0][1][0] if rows and len(rows[0]) > 1 else 505.0) - _KEY_INDENT - 2.0
    for number, row in enumerate(rows):
        y = top - number * KEY_ROW
        for indent, place in row:
            x = indent
            items.append(Label(x, y, str(place + 1), _KEY_SIZE, bold=True))
            items += symbol(marks[place].style, x + 15.0, y + 2.3)
            items.append(Label(x + _KEY_INDENT, y, short(marks[place].text, room, _KEY_SIZE), _KEY_SIZE))
    return items
