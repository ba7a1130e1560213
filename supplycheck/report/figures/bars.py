"""Bars: where the pressure goes on the way to the supply, and demand against supply at a glance."""

from __future__ import annotations

from collections.abc import Callable
from typing import Final

from supplycheck.report.drawing import Box, Drawing, Item, Label, Line
from supplycheck.report.figures.axes import finite, plain, round_steps, short
from supplycheck.report.theme import CLAY, INK, LAGOON, MIST, PETROL, RULE, SAND, SLATE, text_width
from supplycheck.results.display import nominal_text
from supplycheck.results.records import PathStep, Result
from supplycheck.units import UnitSet

_ROW: Final = 15.0
_NAMES: Final = 178.0
_ENDS: Final = 88.0
_SEEN: Final = 100.0  # Pa

Scale = Callable[[float], float]

# what, colour; the lightness falls in this order too
_PARTS: Final = (
    ("required at the outlet", MIST),
    ("friction in pipe", PETROL),
    ("fittings", LAGOON),
    ("elevation", SAND),
    ("devices", CLAY),
)
_GAIN: Final = "gain, to the left"


def pressure_bars(
    path: tuple[PathStep, ...], first: int, result: Result, units: UnitSet, width: float
) -> Drawing:
    """Return bars for ``path``; ``first`` is the place of its first segment in the whole path."""
    rows = len(path) + (1 if first == 0 else 0)
    height = rows * _ROW + 52
    every = [finite(value) for step in result.path for value in (step.pressure_start, step.pressure_end)]
    top = max([*every, finite(result.supply.available_pressure)], default=0.0)
    steps = round_steps(units.from_si(top, "pressure") * 1.02, 8)
    right = width - _ENDS
    scale = (right - _NAMES) / steps[-1]

    def x(pressure: float) -> float:
        return _NAMES + scale * max(units.from_si(finite(pressure), "pressure"), 0.0)

    bottom = 30.0
    items: list[Item] = []
    for pressure in steps:
        at = _NAMES + scale * pressure
        items.append(Line(((at, bottom), (at, height - 18)), RULE, 0.35))
        items.append(Label(at, bottom - 9, plain(pressure), 6.4, "middle", colour=SLATE))
    beside = right + 4 + text_width(plain(steps[-1]), 6.4) / 2
    items.append(Label(beside, bottom - 9, units.symbol("pressure"), 6.4, colour=SLATE))
    y = height - 18 - _ROW
    if first == 0 and path:
        items += _head_row(result.demand.governing_name, path[0], x, y, units)
        y -= _ROW
    for number, step in enumerate(path, start=first + 1):
        items += _step_row(number, step, x, y, units)
        y -= _ROW
    items += _available(path, first, result, units, x(result.supply.available_pressure), (width, height))
    items.sort(key=lambda item: isinstance(item, Label) and item.behind is not None)  # texts over the line
    gains = any(_is_gain(part) for step in path for part in (step.elevation, step.device))
    return Drawing(width, height, (*items, *_key(width, gains=gains)), "pressure needed along the path")


def _is_gain(part: float) -> bool:
    return finite(part) < -_SEEN


def _available(
    path: tuple[PathStep, ...],
    first: int,
    result: Result,
    units: UnitSet,
    at: float,
    size: tuple[float, float],
) -> list[Item]:
    """Return the line of what is available, down to the segment that ends at the point of comparison."""
    width, height = size
    node = result.demand.node
    ends = [step.end for step in result.path]
    last = ends.index(node) if node in ends else len(ends) - 1
    if last < first:
        return []
    whole = last >= first + len(path) - 1
    rows = last - first + (2 if first == 0 else 1)
    bottom = 30.0 if whole else height - 18 - rows * _ROW
    available = _given(result.supply.available_pressure, units)
    text = f"available {available} at {short(node, 90, 6.6)}"
    half = text_width(text, 6.6, bold=True) / 2
    items: list[Item] = [
        Line(((at, bottom), (at, height - 14)), INK, 1.3, (5.0, 2.0)),
        Label(min(at, width - half), height - 10, text, 6.6, "middle", True),
    ]
    if not whole:
        items.append(Line(((0, bottom), (width, bottom)), INK, 0.6, (1.5, 1.5)))
        told = short(f"dotted: {node}, where both are compared", max(at - half - 6, 60.0), 6.0)
        items.append(Label(0, height - 10, told, 6.0, colour=SLATE))
    return items


def _head_row(name: str, step: PathStep, x: Scale, y: float, units: UnitSet) -> list[Item]:
    left, end = x(0.0), x(step.pressure_start)
    return [
        Label(0, y + 3.5, short(name, _NAMES - 10, 6.8), 6.8, bold=True),
        Box(left, y + 2, end - left, _ROW - 5, MIST, INK, 0.5),
        Label(end + 4, y + 3.5, units.text(step.pressure_start, "pressure"), 6.6, behind="#ffffff"),
    ]


def _step_row(number: int, step: PathStep, x: Scale, y: float, units: UnitSet) -> list[Item]:
    parts = [finite(one) for one in (step.friction, step.fitting_friction, step.elevation, step.device)]
    name = f"{number}  {short(step.start, 58, 6.6)} to {short(step.end, 58, 6.6)}"
    items: list[Item] = [
        Label(0, y + 3.5, name, 6.6),
        Label(
            _NAMES - 8, y + 3.5, short(nominal_text(step.nominal, units), 34, 6.6), 6.6, "end", colour=SLATE
        ),
    ]
    at = finite(step.pressure_start)
    reach = x(at)
    half = (_ROW - 5) / 2 if any(map(_is_gain, parts)) else 0.0  # gains stand below what they run back over
    for (_, colour), part in zip(_PARTS[1:], parts, strict=True):
        start, end = sorted((x(at), x(at + part)))
        if end - start > 0.05:
            if _is_gain(part):
                items += _hatched(start, y + 2, end - start, half)
            else:
                items.append(Box(start, y + 2 + half, end - start, _ROW - 5 - half, colour))
        at += part
        reach = max(reach, end)
    left = x(step.pressure_start)
    items.append(Line(((left, y + 2), (left, y + _ROW)), SLATE, 0.5))
    items.append(_end_label(step, x, y, reach, units))
    return items


def _end_label(step: PathStep, x: Scale, y: float, reach: float, units: UnitSet) -> Label:
    """Return the pressure at the end of a segment; after a gain left of the bar, where the value lies."""
    text, end = units.text(step.pressure_end, "pressure"), x(step.pressure_end)
    if reach - end > 1.0 and end - 6 - text_width(text, 6.6) > x(0.0):
        return Label(end - 4, y + 3.5, text, 6.6, "end", behind="#ffffff")
    return Label(reach + 4, y + 3.5, text, 6.6, behind="#ffffff")


def _hatched(left: float, bottom: float, width: float, height: float) -> list[Item]:
    """Return a box with slanting lines: a gain, told from a loss without colour."""
    items: list[Item] = [Box(left, bottom, width, height, "#ffffff", INK, 0.5)]
    at = left
    while at + height <= left + width:
        items.append(Line(((at, bottom), (at + height, bottom + height)), INK, 0.5))
        at += 3.0
    return items


def _key(width: float, *, gains: bool) -> list[Item]:
    items: list[Item] = []
    x = 0.0
    for name, colour in _PARTS:
        items.append(Box(x, 3, 9, 8, colour, INK, 0.4))
        items.append(Label(x + 13, 4.2, name, 6.8))
        x += 26 + text_width(name, 6.8)
    if gains:
        items += [*_hatched(x, 4, 12, 6), Label(x + 16, 4.2, _GAIN, 6.8)]
        x += 29 + text_width(_GAIN, 6.8)
    items.append(Line(((x, 7), (x + 16, 7)), INK, 1.3, (5.0, 2.0)))
    told = "available" if gains else "available at the demand flow"
    items.append(Label(min(x + 20, width), 4.2, told, 6.8))
    return items


def _given(pressure: float, units: UnitSet) -> str:
    """Return the pressure [Pa] available at a flow; none where the supply cannot give the flow at all."""
    return "none" if pressure < 0 else units.text(pressure, "pressure")


def answer_bars(result: Result, units: UnitSet, width: float) -> Drawing:
    """Return two bars: the pressure needed, with what the margin rule adds, and the one available."""
    demand, supply, margin = result.demand, result.supply, result.margin
    need = finite(demand.pressure) + finite(margin.required)
    available = finite(supply.available_pressure)
    most = max(need, available, finite(supply.static_at_comparison), 1.0)
    left, right = 82.0, width - 130.0
    scale = (right - left) / most
    x = [left + scale * max(value, 0.0) for value in (finite(demand.pressure), need, available)]
    items: list[Item] = [
        Label(0, 29, "needed", 7.4, colour=SLATE),
        Box(left, 25, x[0] - left, 12, CLAY),
    ]
    text = units.text(demand.pressure, "pressure")
    if margin.required:
        items.append(Box(x[0], 25, x[1] - x[0], 12, "#ffffff", CLAY, 1.0, (2.0, 1.5)))
        text = f"{text} + {units.text(margin.required, 'pressure')} by the rule"
    items.append(Label(max(x[1], x[2]) + 5, 28.5, text, 7.0))
    items += [
        Label(0, 11, "available", 7.4, colour=SLATE),
        Box(left, 7, x[2] - left, 12, PETROL),
        Label(x[2] + 5, 10.5, _given(supply.available_pressure, units), 7.0),
        Line(((left, 2), (left, 42)), INK, 0.8),
        Line(((x[2], 2), (x[2], 42)), PETROL, 0.6, (1.5, 1.5)),
    ]
    return Drawing(width, 44, tuple(items), "pressure needed and available at the demand flow")
