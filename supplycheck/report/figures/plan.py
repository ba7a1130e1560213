"""The plan of the system drawn from its coordinates, whole and with the design area enlarged."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Final

from supplycheck.report.drawing import Box, Dot, Drawing, Item, Label, Line
from supplycheck.report.figures.axes import Reach, Taken, plain, put_label, round_steps, short
from supplycheck.report.figures.legends import pipe_strokes, plan_legend
from supplycheck.report.figures.outline import Window, cells_of_heads, clipped, outline_of
from supplycheck.report.theme import CLAY, INK, PAPER, PETROL, SAND, SLATE
from supplycheck.results.records import NodeRow, PipeRow, Result
from supplycheck.units import UnitSet

Places = dict[str, tuple[float, float]]

CROWDED: Final = 2500
"""Above so many nodes only the tags of the design area, the supply and hose points are tried."""

_EDGE: Final = 16.0
_BAR_ROOM: Final = 20.0
_RING: Final = 3.6


@dataclass(frozen=True, slots=True)
class PlanView:
    """A drawing of the plan and what could not be shown on it."""

    drawing: Drawing
    tags_shown: int
    tags_wanted: int
    without_place: tuple[str, ...]
    upright: tuple[str, ...]
    factor: float
    outside: tuple[str, ...]
    window: Window


@dataclass(frozen=True, slots=True)
class Scale:
    """Places coordinates [m] on the drawing [points]; ``across`` stretches it from left to right."""

    window: Window
    factor: float
    left: float
    bottom: float
    across: float = 1.0

    def at(self, x: float, y: float) -> tuple[float, float]:
        """Return the place of (``x``, ``y``)."""
        return (
            self.left + (x - self.window.x0) * self.factor * self.across,
            self.bottom + (y - self.window.y0) * self.factor,
        )


@dataclass(frozen=True, slots=True)
class _Ground:
    """What everything on one plan is drawn with."""

    scale: Scale
    places: Places
    taken: Taken
    units: UnitSet
    enlarged: bool
    crowded: bool
    size: float
    ringed: frozenset[str]

    def of(self, tag: str) -> tuple[float, float]:
        """Return where node ``tag`` stands on the drawing."""
        return self.scale.at(*self.places[tag])


def places_of(result: Result) -> Places:
    """Return the coordinates [m] of every node that has them."""
    return {n.tag: (n.x, n.y) for n in result.nodes if n.x is not None and n.y is not None}


def has_plan(result: Result) -> bool:
    """True where at least two nodes at different places have coordinates."""
    return len({(node.x, node.y) for node in result.nodes if node.x is not None and node.y is not None}) > 1


def whole_plan(result: Result, units: UnitSet, size: tuple[float, float]) -> PlanView:
    """Return the plan of everything that has coordinates.

    Where a long main under ground would make the rest small, it leaves the view at its edge.
    """
    places = places_of(result)
    inner = {tag for pipe in result.pipes if pipe.role != "underground" for tag in (pipe.start, pipe.end)}
    whole = _round(list(places.values()), result)
    core = _round([place for tag, place in places.items() if tag in inner], result)
    window = core if _factor(core, size) > 1.3 * _factor(whole, size) else whole
    return _view(result, units, window, size, enlarged=False)


def _round(points: list[tuple[float, float]], result: Result) -> Window:
    """Return the window round ``points`` and the design area."""
    xs, ys = [x for x, _ in points], [y for _, y in points]
    for x0, y0, x1, y1 in cells_of_heads(result.nodes):
        xs += [x0, x1]
        ys += [y0, y1]
    if not xs:
        return Window(-1e9, -1e9, 1e9, 1e9)
    return Window(min(xs), min(ys), max(xs), max(ys))


def area_plan(result: Result, units: UnitSet, size: tuple[float, float]) -> PlanView | None:
    """Return the design area enlarged, or ``None`` where it is (nearly) the whole plan or unplaced."""
    heads = [n for n in result.nodes if n.in_design_area and n.x is not None and n.y is not None]
    if not heads:
        return None
    xs, ys = [node.x or 0.0 for node in heads], [node.y or 0.0 for node in heads]
    for x0, y0, x1, y1 in cells_of_heads(result.nodes):
        xs += [x0, x1]
        ys += [y0, y1]
    reach = 0.04 * max(max(xs) - min(xs), max(ys) - min(ys), 3.0) + 0.5
    window = Window(min(xs) - reach, min(ys) - reach, max(xs) + reach, max(ys) + reach)
    whole = _round(list(places_of(result).values()), result).grown(reach)
    return _view(result, units, _within(_filling(window, size), whole), size, enlarged=True)


def _filling(window: Window, size: tuple[float, float]) -> Window:
    """Return ``window`` widened to the shape of the frame, so that the neighbourhood is seen as well."""
    shape = (size[0] - 2 * _EDGE) / (size[1] - 2 * _EDGE - _BAR_ROOM)
    wide, high = window.x1 - window.x0, window.y1 - window.y0
    more_x = max(high * shape - wide, 0.0) / 2
    more_y = max(min(wide / shape, 2 * high) - high, 0.0) / 2
    return Window(window.x0 - more_x, window.y0 - more_y, window.x1 + more_x, window.y1 + more_y)


def _within(window: Window, whole: Window) -> Window:
    """Return ``window`` moved up or down, then cut, so that it shows nothing beyond ``whole``."""
    over, under = max(window.y1 - whole.y1, 0.0), max(whole.y0 - window.y0, 0.0)
    move = under if under else -over
    low, high = max(window.y0 + move, whole.y0), min(window.y1 + move, whole.y1)
    return Window(window.x0, low, window.x1, high)


def _factor(window: Window, size: tuple[float, float]) -> float:
    """Return the points that a metre takes when ``window`` fills the frame."""
    wide, high = max(window.x1 - window.x0, 1e-6), max(window.y1 - window.y0, 1e-6)
    return min((size[0] - 2 * _EDGE) / wide, (size[1] - 2 * _EDGE - _BAR_ROOM) / high)


def _scale(window: Window, size: tuple[float, float]) -> tuple[Scale, float, float]:
    """Return the scale and the width and height that the drawing really takes."""
    wide, high = max(window.x1 - window.x0, 1e-6), max(window.y1 - window.y0, 1e-6)
    factor = _factor(window, size)
    height = max(high * factor, 24.0) + 2 * _EDGE + _BAR_ROOM
    left = (size[0] - wide * factor) / 2
    bottom = _BAR_ROOM + _EDGE + (height - 2 * _EDGE - _BAR_ROOM - high * factor) / 2
    return Scale(window, factor, left, bottom), size[0], height


def _view(
    result: Result, units: UnitSet, window: Window, size: tuple[float, float], *, enlarged: bool
) -> PlanView:
    scale, width, height = _scale(window, size)
    places = places_of(result)
    inside = [n for n in result.nodes if n.tag in places and window.holds(*places[n.tag])]
    taken = Taken(2.0, _BAR_ROOM + 2, width - 2, height - 2)
    items: list[Item] = [Box(0, _BAR_ROOM, width, height - _BAR_ROOM, PAPER, SLATE, 0.5)]
    items += _area(result, scale, taken)
    strokes = pipe_strokes(result.pipes)
    size_of = 2.3 if enlarged else max(0.8, min(2.0, 0.16 * scale.factor + 0.5))
    rings, upright, ringed = _upright(result.pipes, places, window, scale)
    ground = _Ground(scale, places, taken, units, enlarged, len(inside) > CROWDED, size_of, ringed)
    for tag in ringed:
        x, y = ground.of(tag)
        taken.take((x - _RING, y - _RING, x + _RING, y + _RING))
    for pipe in result.pipes:
        items += _pipe(pipe, ground, strokes)
    for node in inside:
        items += _symbol(node, ground.of(node.tag), size_of, taken)
    tags, shown, wanted = _tags(result, inside, ground)
    items += tags
    items += _scale_bar(scale, units, width)
    items += plan_legend(inside, _some_shut(result, places, window))
    items += rings
    missing = tuple(node.tag for node in result.nodes if node.tag not in places)
    outside = tuple(tag for tag, place in places.items() if not window.holds(*place))
    what = "design area enlarged" if enlarged else "plan of the system"
    return PlanView(
        Drawing(width, height, tuple(items), what),
        shown,
        wanted,
        missing,
        upright,
        scale.factor,
        outside,
        window,
    )


def _some_shut(result: Result, places: Places, window: Window) -> bool:
    """True where a shut pipe is drawn."""
    ends = [
        (places.get(pipe.start), places.get(pipe.end)) for pipe in result.pipes if pipe.valve == "closed"
    ]
    return any(start and end and start != end and clipped(start, end, window) for start, end in ends)


def _area(result: Result, scale: Scale, taken: Taken) -> list[Item]:
    """Return the ground and the outline of the design area."""
    boxes = cells_of_heads(result.nodes)
    items: list[Item] = []
    for x0, y0, x1, y1 in boxes:
        left, low = scale.at(max(x0, scale.window.x0 - 2), max(y0, scale.window.y0 - 2))
        right, high = scale.at(min(x1, scale.window.x1 + 2), min(y1, scale.window.y1 + 2))
        items.append(Box(left, low, right - left, high - low, "#f4e9d2"))
    for start, end in outline_of(boxes):
        edge = (scale.at(*start), scale.at(*end))
        taken.take_line(*edge)
        items.append(Line(edge, CLAY, 1.2, (5.0, 2.5)))
    return items


def _pipe(pipe: PipeRow, ground: _Ground, strokes: dict[str, tuple[float, str]]) -> list[Item]:
    places, scale, taken = ground.places, ground.scale, ground.taken
    start, end = places.get(pipe.start), places.get(pipe.end)
    if start is None or end is None or start == end:
        return []
    cut = clipped(start, end, scale.window.grown(12.0 / scale.factor))
    if cut is None:
        return []
    a, b = scale.at(*cut[0]), scale.at(*cut[1])
    width, colour = strokes[pipe.nominal]
    dash = (2.0, 2.0) if pipe.valve == "closed" else ()
    items: list[Item] = [Line((a, b), colour, width, dash)]
    if ground.crowded:
        return items
    taken.take_line(a, b, width / 2 + 0.6)
    long = math.hypot(b[0] - a[0], b[1] - a[1])
    if ground.enlarged and long > 26 and pipe.flow > 0:
        middle = ((a[0] + b[0]) / 2, (a[1] + b[1]) / 2)
        taken.take((middle[0] - 3.5, middle[1] - 3.0, middle[0] + 3.5, middle[1] + 3.0))
        items.append(_arrow(a, b, long))
    return items


def _upright(
    pipes: tuple[PipeRow, ...], places: Places, window: Window, scale: Scale
) -> tuple[list[Item], tuple[str, ...], frozenset[str]]:
    """Return rings where pipes run upright (drops to heads apart), the ends of those pipes, their nodes."""
    items: list[Item] = []
    names: list[str] = []
    nodes: set[str] = set()
    for pipe in pipes:
        at = places.get(pipe.start)
        if at is None or at != places.get(pipe.end) or pipe.role == "drop" or not window.holds(*at):
            continue
        items.append(Dot(*scale.at(*at), 3.6, None, INK, 0.9))
        names.append(f"{pipe.start} to {pipe.end}")
        nodes |= {pipe.start, pipe.end}
    return items, tuple(names), frozenset(nodes)


def _arrow(a: tuple[float, float], b: tuple[float, float], long: float) -> Line:
    """Return a small head in the middle of the pipe that points where the water goes."""
    ux, uy = (b[0] - a[0]) / long, (b[1] - a[1]) / long
    x, y = a[0] + 0.5 * (b[0] - a[0]), a[1] + 0.5 * (b[1] - a[1])
    tip = (x + 3.4 * ux, y + 3.4 * uy)
    left = (x - 2.6 * ux - 2.4 * uy, y - 2.6 * uy + 2.4 * ux)
    right = (x - 2.6 * ux + 2.4 * uy, y - 2.6 * uy - 2.4 * ux)
    return Line((tip, left, right), PAPER, 0.4, (), INK)


def _reach_of(node: NodeRow, size: float) -> float:
    """Return how far the symbol of ``node`` reaches from its place [points]."""
    more = {"junction": 0.2, "sprinkler": 0.4, "supply": 2.4}.get(node.kind, 1.4)
    return size + more


def _symbol(node: NodeRow, at: tuple[float, float], size: float, taken: Taken) -> list[Item]:
    x, y = at
    if node.kind == "junction":
        return [Dot(x, y, size * 0.45, INK)]
    reach = _reach_of(node, size)
    taken.take((x - reach, y - reach, x + reach, y + reach))
    if node.kind == "sprinkler":
        fill = CLAY if node.in_design_area else PAPER
        return [Dot(x, y, size, fill, INK, 0.5)]
    if node.kind == "supply":
        big = size + 2.4
        return [Line(((x - big, y - big), (x + big, y - big), (x, y + big)), PAPER, 0.6, (), PETROL)]
    half = size + 1.2
    return [Box(x - half, y - half, 2 * half, 2 * half, SAND, INK, 0.6)]


def _tags(result: Result, inside: list[NodeRow], ground: _Ground) -> tuple[list[Item], int, int]:
    """Return the tags that fit, the most wanted first, and how many were placed and wanted."""

    def rank(node: NodeRow) -> int:
        first = {result.demand.governing_head, result.demand.node}
        if node.tag in first or node.kind in {"supply", "hose", "hydrant", "outlet"}:
            return 0
        return 1 if node.in_design_area else 3 if node.kind == "sprinkler" else 2

    enlarged, units = ground.enlarged, ground.units
    style = Label(0, 0, "", 5.8 if enlarged else 5.2)
    strong = Label(0, 0, "", 6.4, bold=True)
    items: list[Item] = []
    shown = 0
    for node in sorted(inside, key=rank):
        if ground.crowded and rank(node) > 1:
            break
        text = short(node.tag, 70, style.size)
        if enlarged and node.in_design_area:
            text = f"{short(node.tag, 46, style.size)}  {units.number(node.pressure, 'pressure')}"
        first = rank(node) == 0
        reach: Reach = "around" if first or enlarged else "beside"
        at = ground.of(node.tag)
        around = _RING - 0.3 if node.tag in ground.ringed else 0.0
        gap = max(_reach_of(node, ground.size), around) + 1.4
        label = put_label(ground.taken, at, text, strong if first else style, reach, gap)
        if label is not None:
            items += _leader(label, at, gap)
            items.append(label)
            shown += 1
    return items, shown, len(inside)


def _leader(label: Label, at: tuple[float, float], gap: float) -> list[Item]:
    """Return a thin line from a label that had to stand apart to its symbol."""
    x, y = at
    near = label.y + label.size * (0.75 if label.y < y else 0.0)
    if abs(label.x - x) <= 1.5 * gap and abs(near - y) <= 2 * gap:
        return []
    return [Line(((x, y), (label.x, near)), SLATE, 0.3)]


def _scale_bar(scale: Scale, units: UnitSet, width: float) -> list[Item]:
    per_unit = scale.factor * units.to_si(1.0, "length")
    length = round_steps(90.0 / per_unit, 1)[1]
    if length * per_unit > 150:
        length /= 2
    right = width - 4
    left = right - length * per_unit
    text = f"{plain(length)} {units.symbol('length')}"
    return [
        Line(((left, 8), (right, 8)), INK, 1.6),
        Line(((left, 5), (left, 11)), INK, 0.8),
        Line(((right, 5), (right, 11)), INK, 0.8),
        Label(left - 5, 5.5, text, 6.6, "end"),
    ]
