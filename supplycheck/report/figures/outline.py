"""Plane geometry of the plan: windows, clipping, and the outline round a set of heads."""

from __future__ import annotations

import math
from collections.abc import Iterable
from dataclasses import dataclass
from typing import Final

from supplycheck.results.records import NodeRow

Point = tuple[float, float]
Cell = tuple[float, float, float, float]

_REACH: Final = 8.0  # no two neighbouring heads of one area stand farther apart
_MOST: Final = 400


@dataclass(frozen=True, slots=True)
class Window:
    """A part of the plan [m]."""

    x0: float
    y0: float
    x1: float
    y1: float

    def holds(self, x: float | None, y: float | None) -> bool:
        """True where (``x``, ``y``) lies in the window."""
        return x is not None and y is not None and self.x0 <= x <= self.x1 and self.y0 <= y <= self.y1

    def grown(self, by: float) -> Window:
        """Return the window larger by ``by`` on each side."""
        return Window(self.x0 - by, self.y0 - by, self.x1 + by, self.y1 + by)


def clipped(start: Point, end: Point, window: Window) -> tuple[Point, Point] | None:
    """Return the part of the line inside ``window``, or ``None`` where there is none."""
    (x0, y0), (x1, y1) = start, end
    dx, dy = x1 - x0, y1 - y0
    near, far = 0.0, 1.0
    for step, room in (
        (-dx, x0 - window.x0),
        (dx, window.x1 - x0),
        (-dy, y0 - window.y0),
        (dy, window.y1 - y0),
    ):
        if step == 0:
            if room < 0:
                return None
            continue
        share = room / step
        if step < 0:
            near = max(near, share)
        else:
            far = min(far, share)
    if near > far:
        return None
    return (x0 + near * dx, y0 + near * dy), (x0 + far * dx, y0 + far * dy)


def cells_of_heads(nodes: Iterable[NodeRow]) -> list[Cell]:
    """Return for each placed head of the design area a rectangle reaching half way to its neighbours.

    Drawn only to show which heads are in the area; the figures of the area stand in the text.
    """
    placed = [n for n in nodes if n.kind == "sprinkler" and n.x is not None and n.y is not None]
    points = [(node.x or 0.0, node.y or 0.0) for node in placed]
    near = _Near(points)
    cells = []
    for node, (x, y) in zip(placed, points, strict=True):
        if not node.in_design_area:
            continue
        half = math.sqrt(node.area) / 2 if node.area else 1.5
        beside = [(px - x, py - y) for px, py in near.of(x, y)]
        left, right = _halfway([dx for dx, dy in beside if abs(dx) >= 4 * abs(dy)], half)
        low, high = _halfway([dy for dx, dy in beside if abs(dy) >= 4 * abs(dx)], half)
        cells.append((x - left, y - low, x + right, y + high))
    return cells


def _halfway(distances: list[float], otherwise: float) -> tuple[float, float]:
    """Return half the way to the nearest neighbour before and after; one side stands in for the other."""
    before = min((-one for one in distances if one < -0.05), default=None)
    after = min((one for one in distances if one > 0.05), default=None)
    if before is None and after is None:
        return otherwise, otherwise
    first = before if before is not None else after
    last = after if after is not None else before
    return (first or 0.0) / 2, (last or 0.0) / 2


class _Near:
    """Finds the points within a few metres of a place."""

    def __init__(self, points: list[Point]) -> None:
        self.boxes: dict[tuple[int, int], list[Point]] = {}
        for x, y in points:
            self.boxes.setdefault((math.floor(x / _REACH), math.floor(y / _REACH)), []).append((x, y))

    def of(self, x: float, y: float) -> list[Point]:
        """Return the points at most ``_REACH`` [m] away, and some that are a little farther."""
        column, row = math.floor(x / _REACH), math.floor(y / _REACH)
        return [
            point
            for i in (column - 1, column, column + 1)
            for j in (row - 1, row, row + 1)
            for point in self.boxes.get((i, j), ())
        ]


def outline_of(cells: list[Cell]) -> list[tuple[Point, Point]]:
    """Return the edges round the union of ``cells`` as straight pieces; none for very many cells."""
    if not cells or len(cells) > _MOST:
        return []
    xs = _distinct(edge for cell in cells for edge in (cell[0], cell[2]))
    ys = _distinct(edge for cell in cells for edge in (cell[1], cell[3]))
    covered = set()
    for x0, y0, x1, y1 in cells:
        for i in range(_index(xs, x0), _index(xs, x1)):
            for j in range(_index(ys, y0), _index(ys, y1)):
                covered.add((i, j))
    edges: list[tuple[Point, Point]] = []
    for i, j in sorted(covered):
        left, right, low, high = xs[i], xs[i + 1], ys[j], ys[j + 1]
        if (i - 1, j) not in covered:
            edges.append(((left, low), (left, high)))
        if (i + 1, j) not in covered:
            edges.append(((right, low), (right, high)))
        if (i, j - 1) not in covered:
            edges.append(((left, low), (right, low)))
        if (i, j + 1) not in covered:
            edges.append(((left, high), (right, high)))
    return _joined(edges)


def _distinct(values: Iterable[float]) -> list[float]:
    out: list[float] = []
    for value in sorted(values):
        if not out or value - out[-1] > 0.02:
            out.append(value)
    return out


def _index(values: list[float], value: float) -> int:
    return min(range(len(values)), key=lambda place: abs(values[place] - value))


def _joined(edges: list[tuple[Point, Point]]) -> list[tuple[Point, Point]]:
    """Join straight pieces that follow one another, so that dashes run through."""
    out: list[tuple[Point, Point]] = []
    for flat in (0, 1):
        pieces = sorted(
            (e for e in edges if (e[0][1] == e[1][1]) == (flat == 0)),
            key=lambda e: (e[0][1 - flat], e[0][flat]),
        )
        for start, end in pieces:
            if out and out[-1][1] == start and (out[-1][0][1 - flat] == end[1 - flat]):
                out[-1] = (out[-1][0], end)
            else:
                out.append((start, end))
    return out
