"""The map of the hydrants and the histogram of their flows."""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import Final

from supplycheck.catalogue.water import hydrant_classes
from supplycheck.report.drawing import Box, Dot, Drawing, Item, Label, Line
from supplycheck.report.figures.axes import Taken, plain, round_steps, short
from supplycheck.report.theme import CLAY, INK, LAGOON, MIST, PAPER, PETROL, RULE, SAND, SLATE, text_width
from supplycheck.screening.reduce import NOT_MET
from supplycheck.screening.run import Screening
from supplycheck.screening.statistics import BINS, Spot

SHADES: Final = (PETROL, LAGOON, SAND, CLAY)
"""One colour a class, from the best; the radius of a dot tells the class as well."""
_RADII: Final = (2.0, 2.4, 2.9, 3.4)
MOST_NAMED: Final = 60
MOST_DOTS: Final = 300
"""Dots that stand in full size and with names; more are drawn smaller."""


def histogram(answer: Screening, width: float) -> Drawing:
    """Return how many hydrants give how much at 20 psi; limits of the classes stand as dashed lines."""
    statistics, units = answer.statistics, answer.question.unit_set
    left, foot, high = 46.0, 34.0, 138.0
    room = width - left - 8
    top = round_steps(float(max(statistics.bars.max(), 1)), 5)
    step = room / (BINS + 1)
    items: list[Item] = [Box(left, foot, room, high, PAPER, SLATE, 0.5)]
    for value in top:
        if value == int(value):
            y = foot + high * value / top[-1]
            items.append(Line(((left, y), (left + room, y)), RULE, 0.3))
            items.append(Label(left - 4, y - 2.4, f"{value:,.0f}", 6.6, "end", colour=SLATE))
    for place, count in enumerate(statistics.bars.tolist()):
        if count:
            tall = high * count / top[-1]
            grade = _grade_of(place * statistics.step)
            items.append(Box(left + place * step + 1, foot, step - 2, tall, SHADES[grade], INK, 0.3))
            text = f"{count:,}"
            if text_width(text, 5.8) < step + 3:
                items.append(Label(left + (place + 0.5) * step, foot + tall + 2, text, 5.8, "middle"))
    for place in range(0, BINS + 1, 2):
        x = left + place * step
        items.append(Line(((x, foot), (x, foot - 3)), SLATE, 0.5))
        text = plain(round(units.from_si(place * statistics.step, "flow")))
        items.append(
            Label(x, foot - 11, text + ("+" if place == BINS else ""), 6.6, "middle", colour=SLATE)
        )
    for row in hydrant_classes():
        x = left + row.flow_from / statistics.step * step
        if row.flow_from and x < left + room:
            items.append(Line(((x, foot), (x, foot + high)), INK, 0.7, (2.5, 2.0)))
    title = f"flow at 20 psi [{units.symbol('flow')}]"
    items.append(Label(left + room / 2, foot - 23, title, 7.2, "middle"))
    items.append(Label(10, foot + high / 2, "hydrants", 7.2, "middle", angle=90))
    return Drawing(width, foot + high + 12, tuple(items), "hydrants by flow at 20 psi")


def _grade_of(flow: float) -> int:
    rows = hydrant_classes()
    return next((at for at, row in enumerate(rows) if flow >= row.flow_from * (1 - 1e-9)), len(rows) - 1)


def hydrant_map(answer: Screening, width: float, height: float) -> Drawing | None:
    """Return the map of the hydrants kept for it, north up; ``None`` where no test has coordinates."""
    points = answer.statistics.points
    if not points.points:
        return None
    spots = sorted(points.points.values(), key=lambda one: (-one.grade, one.row), reverse=True)
    middle = (points.low + points.high) / 2
    shrink = max(math.cos(math.radians(middle)), 0.01) if answer.layout.geographic else 1.0
    least = 1e-4 if answer.layout.geographic else 1.0
    wide = max((points.right - points.left) * shrink, least)
    tall = max(points.high - points.low, least)
    inset = 22.0
    ground = 40.0  # the scale bar stands below the hydrants
    factor = min((width - 2 * inset) / wide, (height - 24 - inset - ground) / tall)
    shift_x = (width - (points.right - points.left) * shrink * factor) / 2
    deep = max(tall * factor, 60.0) + inset + ground
    shift_y = 24 + ground + (deep - ground - inset - (points.high - points.low) * factor) / 2

    def at(one: Spot) -> tuple[float, float]:
        x = (one.x - points.left) * shrink * factor + shift_x
        return x, (one.y - points.low) * factor + shift_y

    items: list[Item] = [Box(0, 24, width, deep, MIST, SLATE, 0.5)]
    taken = Taken(2, 26, width - 2, 24 + deep - 2)
    scale = min(1.0, max(0.45, math.sqrt(MOST_DOTS / len(spots))))
    for one in spots:
        x, y = at(one)
        radius = _RADII[one.grade] * scale
        taken.take((x - radius, y - radius, x + radius, y + radius))
        if one.met == NOT_MET:
            items.append(Dot(x, y, radius + 1.9 * scale, None, INK, 0.9 * scale))
        items.append(Dot(x, y, radius, SHADES[one.grade], INK, 0.35 * scale))
    items += _bar(answer, factor, shrink, deep, taken)
    if len(spots) <= MOST_DOTS:
        items += _names(spots, at, taken)
    items += _key(width)
    return Drawing(width, 24 + deep, tuple(items), "map of the hydrants, north up")


def _names(spots: list[Spot], at: Callable[[Spot], tuple[float, float]], taken: Taken) -> list[Item]:
    """Return the tags that fit beside their dots, those of short and poor hydrants first."""
    items: list[Item] = []
    ranked = sorted(spots, key=lambda one: (one.met != NOT_MET, -one.grade, one.rated, one.row))
    for one in ranked[: 4 * MOST_NAMED]:
        text = short(one.hydrant, 70, 6.0)
        found = taken.place(*at(one), text, 6.0, gap=6.0, reach="beside")
        if found:
            x, y, anchor = found
            items.append(Label(x, y, text, 6.0, anchor))
        if len(items) >= MOST_NAMED:
            break
    return items


def _bar(answer: Screening, factor: float, shrink: float, deep: float, taken: Taken) -> list[Item]:
    """Return a bar that tells distances: degrees of longitude, or units of x."""
    each = factor * shrink
    size = 10.0 ** math.floor(math.log10(110.0 / each))
    size = next(size * lead for lead in (5, 2, 1) if size * lead * each <= 110.0)
    long, x, y = size * each, 10.0, 32.0
    name = f"{size:g}° of longitude" if answer.layout.geographic else f"{size:g} units of x"
    taken.take((x, y - 2, x + max(long, text_width(name, 6.4)), y + 14))
    return [
        Line(((x, y), (x + long, y)), INK, 1.4),
        Line(((x, y - 2), (x, y + 2)), INK, 0.7),
        Line(((x + long, y - 2), (x + long, y + 2)), INK, 0.7),
        Label(x, y + 5, name, 6.4, behind=MIST),
        Line(((10, 24 + deep - 26), (10, 24 + deep - 10)), INK, 0.9),
        Label(10, 24 + deep - 8, "N", 6.4, "middle", bold=True),
    ]


def _key(width: float) -> list[Item]:
    items: list[Item] = []
    share = width / 5
    for place, row in enumerate(hydrant_classes()):
        x = place * share + 6
        items.append(Dot(x, 10, _RADII[place], SHADES[place], INK, 0.35))
        items.append(Label(x + 7, 7.6, f"class {row.name} ({row.colour})", 6.8))
    x = 4 * share + 6
    items.append(Dot(x, 10, 4.4, None, INK, 0.9))
    items.append(Label(x + 8, 7.6, "short of required", 6.8))
    return items
