"""The supply graph: pressure against flow, the flow axis linear in flow to the power 1.85."""

from __future__ import annotations

import itertools
import math
from typing import Final

from supplycheck.report.drawing import Box, Dot, Drawing, Item, Label, Line
from supplycheck.report.figures.axes import Taken, plain, round_steps
from supplycheck.report.theme import CLAY, INK, LAGOON, PETROL, PLUM, RULE, SAND, SLATE, text_width
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
_Mark = tuple[str, str, float, float]
_FAR_DASH: Final = (3.5, 2.5)


class _Frame:
    """Places flows [display unit] and pressures [display unit] on the drawing."""

    def __init__(self, width: float, height: float, flow: float, steps: list[float]) -> None:
        self.right, self.top = width - 14.0, height - 10.0
        self.flow, self.steps = flow, steps
        self.low, self.high = steps[0], steps[-1]

    def x(self, flow: float) -> float:
        share = math.pow(max(flow, 0.0) / self.flow, EXPONENT)
        return _LEFT + (self.right - _LEFT) * share

    def y(self, pressure: float) -> float:
        return _BOTTOM + (self.top - _BOTTOM) * (pressure - self.low) / (self.high - self.low)


def supply_graph(
    curves: tuple[CurvePoints, ...],
    points: tuple[GraphPoint, ...],
    units: UnitSet,
    size: tuple[float, float],
) -> Drawing:
    """Return the graph; a curve is dashed beyond the flow up to which it was tested."""
    width, height = size
    lines = [_in_units(curve, units) for curve in curves]
    marks: list[_Mark] = [
        (p.name, p.style, units.from_si(p.flow, "flow"), units.from_si(p.pressure, "pressure"))
        for p in points
    ]
    frame = _frame(lines, marks, width, height)
    if frame is None:
        return Drawing(width, 20.0, (Label(0, 6, "no curve to draw"),), "no curve to draw")
    taken = Taken(_LEFT, _BOTTOM, frame.right, frame.top)
    items: list[Item] = [*_grid(frame, units)]
    for curve, line in zip(curves, lines, strict=True):
        items += _curve(curve, line, frame, units, taken)
    items += _marks(marks, frame, units, taken)
    items += _legend(curves, width)
    return Drawing(width, height, tuple(items), "supply and demand against flow")


def _in_units(curve: CurvePoints, units: UnitSet) -> list[tuple[float, float]]:
    return [
        (units.from_si(flow, "flow"), units.from_si(pressure, "pressure"))
        for flow, pressure in zip(curve.flows, curve.pressures, strict=True)
        if math.isfinite(flow) and math.isfinite(pressure)
    ]


def _frame(
    lines: list[list[tuple[float, float]]],
    marks: list[_Mark],
    width: float,
    height: float,
) -> _Frame | None:
    every = [point for line in lines for point in line] + [(q, p) for _, _, q, p in marks]
    flow = max((q for q, _ in every), default=0.0)
    if flow <= 0:
        return None
    steps = round_steps(max(p for _, p in every) * 1.06, max(4, round(height / 30)))
    lowest = min(p for _, p in every)
    if lowest < 0:
        step = steps[1]
        below = math.ceil(min(-lowest, 3 * step) / step)
        steps = [-step * place for place in range(below, 0, -1)] + steps
    return _Frame(width, height, flow * 1.02, steps)


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
        items.append(Line(((x, _BOTTOM), (x, frame.top)), RULE, 0.35 if labelled else 0.15))
        if labelled:
            items.append(Label(x, _BOTTOM - 9, text, 6.6, "middle"))
            last = x + half
    items.append(Box(_LEFT, _BOTTOM, frame.right - _LEFT, frame.top - _BOTTOM, None, SLATE, 0.7))
    title = f"flow, {units.symbol('flow')} (scale linear in flow to the power 1.85)"
    middle = (_LEFT + frame.right) / 2
    items.append(Label(middle, _BOTTOM - 20, title, 6.8, "middle", colour=SLATE))
    y = (_BOTTOM + frame.top) / 2
    pressure_title = f"pressure, {units.symbol('pressure')}"
    items.append(Label(10, y, pressure_title, 6.8, "middle", False, SLATE, 90.0))
    return items


def _curve(
    curve: CurvePoints, line: list[tuple[float, float]], frame: _Frame, units: UnitSet, taken: Taken
) -> list[Item]:
    colour, width, dash = _CURVES[curve.style]
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


def _marks(marks: list[_Mark], frame: _Frame, units: UnitSet, taken: Taken) -> list[Item]:
    items: list[Item] = []
    for _, _, flow, pressure in marks:
        x, y = frame.x(flow), frame.y(pressure)
        taken.take((x - 3.4, y - 3.4, x + 3.4, y + 3.4))
    left_out: list[str] = []
    for name, style, flow, pressure in marks:
        x, y = frame.x(flow), frame.y(pressure)
        items += _mark(style, x, y)
        flow_text = f"{flow:.{units.unit('flow').decimals}f} {units.symbol('flow')}"
        pressure_text = f"{pressure:.{units.unit('pressure').decimals}f} {units.symbol('pressure')}"
        numbers = f"{flow_text}, {pressure_text}".replace("-", "−")
        text = f"{name}: {numbers}"
        found = taken.place(
            x, y, text, 6.6, gap=6.0, reach="far", down=_is_below(flow, pressure, marks, frame)
        )
        if found is None:
            left_out.append(text)
        else:
            at_x, at_y, anchor = found
            if abs(at_y - y) > 17 or abs(at_x - x) > 17:
                near = at_y - 2 if at_y > y else at_y + 6
                items.append(Line(((x, y), (at_x, near)), SLATE, 0.4))
            items.append(Label(at_x, at_y, text, 6.6, anchor, False, INK, 0.0, "#ffffff"))
    for place, text in enumerate(left_out):
        items.append(Label(_LEFT + 6, _BOTTOM + 6 + place * 8, text, 6.2, behind="#ffffff"))
    return items


def _is_below(flow: float, pressure: float, marks: list[_Mark], frame: _Frame) -> bool:
    """True where another mark stands over this one, so that its label had better go down."""
    x = frame.x(flow)
    return any(abs(frame.x(q) - x) < 70 and p > pressure for _, _, q, p in marks)


def _mark(style: str, x: float, y: float) -> list[Item]:
    if style == "test":
        return [Dot(x, y, 2.8, "#ffffff", SLATE, 1.2)]
    if style == "demand":
        return [Line(((x, y + 3.4), (x + 3.4, y), (x, y - 3.4), (x - 3.4, y)), CLAY, 0.8, (), "#ffffff")]
    if style == "demand with hose":
        return [Line(((x, y + 4), (x + 4, y), (x, y - 4), (x - 4, y)), CLAY, 0.8, (), CLAY)]
    if style == "available":
        return [Dot(x, y, 3.0, PETROL)]
    return [Box(x - 2.8, y - 2.8, 5.6, 5.6, SAND, INK, 0.8)]


def _legend(curves: tuple[CurvePoints, ...], width: float) -> list[Item]:
    items: list[Item] = []
    x, y = _LEFT, 13.0
    entries = [(curve.name, *_CURVES[curve.style]) for curve in curves]
    if any(curve.extrapolated_from is not None for curve in curves):
        entries.append(("beyond the tested flow", INK, 1.2, _FAR_DASH))
    for name, colour, line, dash in entries:
        wide = 34 + text_width(name, 6.8)
        if x + wide > width and x > _LEFT:
            x, y = _LEFT, y - 11
        items.append(Line(((x, y + 2.2), (x + 22, y + 2.2)), colour, line, dash))
        items.append(Label(x + 26, y, name, 6.8))
        x += wide + 10
    return items
