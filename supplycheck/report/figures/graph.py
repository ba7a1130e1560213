"""The supply graph: pressure against flow, the flow axis linear in flow to the power 1.85."""

from __future__ import annotations

import itertools
import math
from itertools import compress
from typing import Final

from supplycheck.report.drawing import Box, Drawing, Item, Label, Line
from supplycheck.report.figures.axes import Taken, plain, round_steps, short
from supplycheck.report.figures.marks import (
    KEY_ROW,
    Mark,
    key,
    key_rows,
    names_beside,
    numbers_beside,
    symbol,
)
from supplycheck.report.theme import CLAY, INK, LAGOON, PETROL, PLUM, RULE, SLATE, text_width
from supplycheck.results.display import NONE_LEFT
from supplycheck.results.records import CurvePoints, GraphPoint
from supplycheck.units import UnitSet

EXPONENT: Final = 1.85
_LEFT: Final = 40.0
_BOTTOM: Final = 53.0

# style: (colour, width, dash)
_CURVES: Final[dict[str, tuple[str, float, tuple[float, ...]]]] = {
    "measured": (SLATE, 1.1, ()),
    "adjusted": (PETROL, 2.0, ()),
    "combined": (PETROL, 2.4, ()),
    "demand": (CLAY, 1.4, (7.0, 2.0, 1.5, 2.0)),
    "tank": (LAGOON, 1.4, ()),
    "pump": (PLUM, 1.4, ()),
}
_FAR_DASH: Final = (3.5, 2.5)
_LONG_DASH: Final = (12.0, 3.0)
_Stroke = tuple[str, float, tuple[float, ...]]


class _Frame:
    """Places flows [display unit] and pressures [display unit] on the drawing."""

    def __init__(self, size: tuple[float, float], bottom: float, flow: float, steps: list[float]) -> None:
        self.right, self.top, self.bottom = size[0] - 14.0, size[1] - 10.0, bottom
        self.flow, self.steps = flow, steps
        self.low, self.high = steps[0], steps[-1]

    def x(self, flow: float) -> float:
        share = math.pow(max(flow, 0.0) / self.flow, EXPONENT)
        return _LEFT + (self.right - _LEFT) * share

    def y(self, pressure: float) -> float:
        return self.bottom + (self.top - self.bottom) * (pressure - self.low) / (self.high - self.low)


def supply_graph(
    curves: tuple[CurvePoints, ...],
    points: tuple[GraphPoint, ...],
    units: UnitSet,
    size: tuple[float, float],
) -> Drawing:
    """Return the graph; a curve is dashed beyond the flow up to which it was tested.

    Where the marks stand too close to be named beside them they are numbered, and the drawing grows by
    the rows of a key below.
    """
    lines = [_in_units(curve, units) for curve in curves]
    marks = [_mark_of(point, units) for point in points]
    drawn = [_has_pressure(curve, line) for curve, line in zip(curves, lines, strict=True)]
    curves, lines = tuple(compress(curves, drawn)), list(compress(lines, drawn))
    strokes = _strokes(curves)
    plain_bottom = _BOTTOM + 11.0 * (_legend_rows(curves, strokes, size[0]) - 1)
    for numbered in (False, True):
        rows = key_rows(marks, size[0]) if numbered else []
        size = (size[0], size[1] + KEY_ROW * len(rows))
        frame = _frame(curves, lines, marks, size, plain_bottom + KEY_ROW * len(rows))
        if frame is None:
            return Drawing(size[0], 20.0, (Label(0, 6, "no curve to draw"),), "no curve to draw")
        taken = Taken(_LEFT, frame.bottom, frame.right, frame.top)
        items: list[Item] = [*_grid(frame, units)]
        for curve, line, stroke in zip(curves, lines, strokes, strict=True):
            items += _curve(curve, line, stroke, frame, units, taken)
        at = [(frame.x(mark.flow), frame.y(mark.pressure)) for mark in marks]
        names = numbers_beside(at, taken) if numbered else names_beside(marks, at, taken)
        if names is not None:
            break
    symbols = [item for mark, place in zip(marks, at, strict=True) for item in symbol(mark.style, *place)]
    legend_top = plain_bottom - 40.0 + KEY_ROW * len(rows)
    items += [*(names or []), *symbols, *_legend(curves, strokes, size[0], legend_top)]
    items += key(marks, rows, legend_top - 11.0 * _legend_rows(curves, strokes, size[0]))
    return Drawing(*size, tuple(items), "supply and demand against flow")


def _has_pressure(curve: CurvePoints, line: list[tuple[float, float]]) -> bool:
    """True where something of ``line`` can be drawn: a supply below zero at every flow cannot."""
    return curve.style == "demand" or not line or max(pressure for _, pressure in line) > 0.0


def _mark_of(point: GraphPoint, units: UnitSet) -> Mark:
    """Return a mark; where no pressure is left it stands on the line of zero and says so."""
    flow, pressure = units.from_si(point.flow, "flow"), units.from_si(point.pressure, "pressure")
    numbers = f"{units.text(point.flow, 'flow')}, {units.text(point.pressure, 'pressure')}"
    if pressure < 0 and not point.style.startswith("demand"):
        numbers, pressure = f"{NONE_LEFT} at {units.text(point.flow, 'flow')}", 0.0
    return Mark(point.name, point.style, flow, pressure, f"{point.name}: {numbers}")


def _strokes(curves: tuple[CurvePoints, ...]) -> list[_Stroke]:
    """Return the stroke of each curve: of several alike, long dashes and weight tell them apart."""
    found: list[_Stroke] = []
    for place, curve in enumerate(curves):
        colour, width, dash = _CURVES[curve.style]
        before = sum(one.style == curve.style for one in curves[:place])
        if before % 2:
            dash = _LONG_DASH
        found.append((colour, width * (1 + 0.9 * (before // 2)), dash))
    return found


def _in_units(curve: CurvePoints, units: UnitSet) -> list[tuple[float, float]]:
    return [
        (units.from_si(flow, "flow"), units.from_si(pressure, "pressure"))
        for flow, pressure in zip(curve.flows, curve.pressures, strict=True)
        if math.isfinite(flow) and math.isfinite(pressure)
    ]


def _frame(
    curves: tuple[CurvePoints, ...],
    lines: list[list[tuple[float, float]]],
    marks: list[Mark],
    size: tuple[float, float],
    bottom: float,
) -> _Frame | None:
    every = [point for line in lines for point in line] + [(m.flow, m.pressure) for m in marks]
    flow = max((q for q, _ in every), default=0.0)
    if flow <= 0:
        return None
    steps = round_steps(max(p for _, p in every) * 1.06, max(4, round(size[1] / 30)))
    needed = [line for curve, line in zip(curves, lines, strict=True) if curve.style == "demand"]
    lowest = min([p for line in needed for _, p in line] + [m.pressure for m in marks], default=0.0)
    if lowest < 0:
        step = steps[1]
        below = math.ceil(min(-lowest, 3 * step) / step)
        steps = [-step * place for place in range(below, 0, -1)] + steps
    return _Frame(size, bottom, flow * 1.02, steps)


def _grid(frame: _Frame, units: UnitSet) -> list[Item]:
    items: list[Item] = []
    for pressure in frame.steps:
        y = frame.y(pressure)
        strong = pressure == 0
        items.append(
            Line(((_LEFT, y), (frame.right, y)), SLATE if strong else RULE, 0.8 if strong else 0.35)
        )
        items.append(Label(_LEFT - 4, y - 2.4, plain(pressure), 6.6, "end"))
    flows = round_steps(frame.flow, 20)
    last = -1e9
    for flow in flows:
        x = frame.x(flow)
        if x > frame.right + 0.1:
            break
        text = plain(flow)
        half = text_width(text, 6.6) / 2
        labelled = x - half > last + 5
        items.append(Line(((x, frame.bottom), (x, frame.top)), RULE, 0.35 if labelled else 0.15))
        if labelled:
            items.append(Label(x, frame.bottom - 9, text, 6.6, "middle"))
            last = x + half
    items.append(Box(_LEFT, frame.bottom, frame.right - _LEFT, frame.top - frame.bottom, None, SLATE, 0.7))
    title = f"flow, {units.symbol('flow')} (scale linear in flow to the power 1.85)"
    middle = (_LEFT + frame.right) / 2
    items.append(Label(middle, frame.bottom - 20, title, 6.8, "middle", colour=SLATE))
    y = (frame.bottom + frame.top) / 2
    pressure_title = f"pressure, {units.symbol('pressure')}"
    items.append(Label(10, y, pressure_title, 6.8, "middle", False, SLATE, 90.0))
    return items


def _curve(
    curve: CurvePoints,
    line: list[tuple[float, float]],
    stroke: _Stroke,
    frame: _Frame,
    units: UnitSet,
    taken: Taken,
) -> list[Item]:
    colour, width, dash = stroke
    inside = [(q, p) for q, p in _clipped(line, frame.low)]
    if len(inside) < 2:
        return []
    until = math.inf
    if curve.extrapolated_from is not None:
        until = units.from_si(curve.extrapolated_from, "flow")
    near, far = _split(inside, until)
    items: list[Item] = []
    for part, how in ((near, dash), (far, _FAR_DASH)):
        if len(part) > 1:
            path = tuple((frame.x(q), frame.y(p)) for q, p in part)
            items.append(Line(path, colour, width, how))
            for start, end in itertools.pairwise(path):
                taken.take_line(start, end)
    return items


def _clipped(line: list[tuple[float, float]], low: float) -> list[tuple[float, float]]:
    """Return ``line`` down to the pressure ``low``, cut where it falls below."""
    out: list[tuple[float, float]] = []
    for place, (flow, pressure) in enumerate(line):
        if pressure >= low:
            out.append((flow, pressure))
        elif place and line[place - 1][1] > low:
            share = (line[place - 1][1] - low) / (line[place - 1][1] - pressure)
            out.append((_between(line[place - 1][0], flow, share), low))
    return out


def _split(
    line: list[tuple[float, float]], flow: float
) -> tuple[list[tuple[float, float]], list[tuple[float, float]]]:
    """Return the parts of ``line`` up to ``flow`` and beyond it, joined there."""
    near = [point for point in line if point[0] <= flow]
    far = [point for point in line if point[0] > flow]
    if near and far:
        (q0, p0), (q1, p1) = near[-1], far[0]
        share = (flow**EXPONENT - q0**EXPONENT) / (q1**EXPONENT - q0**EXPONENT)
        joint = (flow, p0 + (p1 - p0) * share)
        return [*near, joint], [joint, *far]
    return near, far


def _between(start: float, end: float, share: float) -> float:
    power = start**EXPONENT + (end**EXPONENT - start**EXPONENT) * share
    return float(power ** (1 / EXPONENT))


def _legend_entries(curves: tuple[CurvePoints, ...], strokes: list[_Stroke]) -> list[tuple[str, _Stroke]]:
    entries = [(curve.name, stroke) for curve, stroke in zip(curves, strokes, strict=True)]
    if any(curve.extrapolated_from is not None for curve in curves):
        entries.append(("beyond the tested flow", (INK, 1.2, _FAR_DASH)))
    return entries


def _legend_rows(curves: tuple[CurvePoints, ...], strokes: list[_Stroke], width: float) -> int:
    return len({item.y for item in _legend(curves, strokes, width, 0.0) if isinstance(item, Label)}) or 1


def _legend(
    curves: tuple[CurvePoints, ...], strokes: list[_Stroke], width: float, top: float
) -> list[Item]:
    """Return the names of the curves in rows from ``top`` down."""
    items: list[Item] = []
    x, y = _LEFT, top
    for name, (colour, line, dash) in _legend_entries(curves, strokes):
        text = short(name, width - _LEFT - 34, 6.8)
        wide = 36 + text_width(text, 6.8)
        if x + wide > width and x > _LEFT:
            x, y = _LEFT, y - 11
        items.append(Line(((x, y + 2.2), (x + 26, y + 2.2)), colour, line, dash))
        items.append(Label(x + 30, y, text, 6.8))
        x += wide + 10
    return items
