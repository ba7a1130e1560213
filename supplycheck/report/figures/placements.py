"""The map of required pressure by placement of the design area."""

from __future__ import annotations

import math
from dataclasses import dataclass
from itertools import pairwise
from typing import Final

from supplycheck.report.drawing import Anchor, Box, Dot, Drawing, Item, Label, Line
from supplycheck.report.figures.axes import Taken
from supplycheck.report.figures.outline import Window, clipped
from supplycheck.report.figures.plan import Scale, places_of
from supplycheck.report.show import told_apart
from supplycheck.report.theme import CLAY, INK, PAPER, PETROL, RULE, SLATE, text_width
from supplycheck.results.records import Placement, Result
from supplycheck.units import UnitSet

MOST_NUMBERS: Final = 40
MOST_STRETCH: Final = 2.5
"""The map is stretched to the width by so much at most: it compares placements and measures nothing."""

_AROUND: Final = 4.0  # m
_SIZE: Final = 6.6
_LINE: Final = 5.6
_CLEAR: Final = 5.0
"""Room between a ring and the text that names it [points]."""
_SHADES: Final = ("#e3eef0", "#b5d3d9", "#7fb2bd", "#3f8797", "#0b4a5a")


def placement_map(result: Result, units: UnitSet, size: tuple[float, float]) -> Drawing | None:
    """Return the map, or ``None`` where fewer than two placements have a place."""
    area = result.design_area
    spots = [one for one in area.placements if one.x is not None and one.y is not None]
    if len(spots) < 2:
        return None
    nodes = places_of(result)
    heads = [nodes[node.tag] for node in result.nodes if node.kind == "sprinkler" and node.tag in nodes]
    window = _window(heads, spots)
    wide, high = max(window.x1 - window.x0, 1e-6), max(window.y1 - window.y0, 1e-6)
    factor = min((size[0] - 32) / wide, (size[1] - 60) / high)
    height = max(high * factor, 30.0) + 60
    across = min(MOST_STRETCH, (size[0] - 32) / (wide * factor))
    left = (size[0] - wide * factor * across) / 2
    scale = Scale(window, factor, left, 34 + (height - 50 - high * factor) / 2, across)
    items: list[Item] = [Box(0, 24, size[0], height - 24, PAPER, SLATE, 0.5)]
    for pipe in result.pipes:
        start, end = nodes.get(pipe.start), nodes.get(pipe.end)
        cut = clipped(start, end, window) if start and end and start != end else None
        if cut is not None:
            items.append(Line((scale.at(*cut[0]), scale.at(*cut[1])), RULE, 0.4))
    items += _spots(spots, result, scale, units, (size[0], height))
    items += _key(spots, units, size[0], runner_up=area.runner_up is not None)
    return Drawing(size[0], height, tuple(items), "required pressure by placement of the design area")


def _window(heads: list[tuple[float, float]], spots: list[Placement]) -> Window:
    """Return the part to draw: the spots and what lies round them, not farther than the heads reach."""
    xs, ys = [one.x or 0.0 for one in spots], [one.y or 0.0 for one in spots]
    round_about = max(_AROUND, 0.12 * max(max(xs) - min(xs), max(ys) - min(ys)))
    all_x, all_y = xs + [x for x, _ in heads], ys + [y for _, y in heads]
    return Window(
        max(min(xs) - round_about, min(all_x)),
        max(min(ys) - round_about, min(all_y)),
        min(max(xs) + round_about, max(all_x)),
        min(max(ys) + round_about, max(all_y)),
    ).grown(1.5)


def _classes(spots: list[Placement]) -> list[float]:
    low = min(one.required_pressure for one in spots)
    high = max(one.required_pressure for one in spots)
    return [low + (high - low) * place / len(_SHADES) for place in range(len(_SHADES) + 1)]


def _closest(spots: list[Placement]) -> float:
    """Return the smallest distance [m] between rows or columns of spots."""
    gaps = [
        after - before
        for values in ({one.x or 0.0 for one in spots}, {one.y or 0.0 for one in spots})
        for before, after in pairwise(sorted(values))
        if after - before > 0.05
    ]
    return min(gaps, default=10.0)


def _shade(value: float, bounds: list[float]) -> int:
    return next((i for i in range(len(_SHADES) - 1) if value < bounds[i + 1]), len(_SHADES) - 1)


@dataclass(frozen=True, slots=True)
class _Named:
    """A placement that is named: where it stands, how far its ring reaches, what is written beside it."""

    x: float
    y: float
    reach: float
    text: str


def _rings(result: Result, scale: Scale, units: UnitSet, radius: float) -> tuple[list[Item], list[_Named]]:
    """Return the rings round the governing placement and the runner-up, one in the other at one place."""
    area = result.design_area
    chosen = [(area.governing, "governing", radius + 3.2), (area.runner_up, "runner-up", radius + 2.2)]
    both = [one.required_pressure for one, _, _ in chosen if one is not None]
    decimals = told_apart(both, units)
    rings: list[Item] = []
    named: list[_Named] = []
    for spot, word, reach in chosen:
        if spot is None or spot.x is None or spot.y is None:
            continue
        x, y = scale.at(spot.x, spot.y)
        over = [one.reach for one in named if math.hypot(x - one.x, y - one.y) < reach + one.reach]
        if any(math.hypot(x - one.x, y - one.y) < 2.0 for one in named):
            reach = max(over) + 2.4
        governs = word == "governing"
        rings.append(Dot(x, y, reach, None, CLAY if governs else INK, 1.8 if governs else 1.0))
        text = f"{word} {units.text(spot.required_pressure, 'pressure', decimals)}"
        named.append(_Named(x, y, max([reach, *over]), text))
    return rings, named


def _named(mark: _Named, taken: Taken) -> list[Item]:
    """Return the text beside a ring, clear of it, and a line to it where it had to stand apart."""
    gap = mark.reach + _CLEAR
    found = taken.place(mark.x, mark.y, mark.text, _SIZE, gap=gap, bold=True, reach="far", pad=_CLEAR / 2)
    if found is None:
        return []
    at_x, at_y, anchor = found
    wide = text_width(mark.text, _SIZE, bold=True)
    left = at_x - {"start": 0.0, "middle": wide / 2, "end": wide}[anchor]
    near = (min(max(mark.x, left), left + wide), min(max(mark.y, at_y), at_y + 0.75 * _SIZE))
    far = math.hypot(near[0] - mark.x, near[1] - mark.y)
    items: list[Item] = []
    if far > 1.5 * gap:
        share = (mark.reach + 0.9) / far
        start = (mark.x + (near[0] - mark.x) * share, mark.y + (near[1] - mark.y) * share)
        items.append(Line((start, near), INK, 0.4))
    return [*items, Label(at_x, at_y, mark.text, _SIZE, anchor, True, INK, 0.0, PAPER)]


def _spots(
    spots: list[Placement], result: Result, scale: Scale, units: UnitSet, size: tuple[float, float]
) -> list[Item]:
    bounds = _classes(spots)
    radius = max(1.4, min(4.5, 0.42 * scale.factor * _closest(spots)))
    area = result.design_area
    taken = Taken(2, 26, size[0] - 2, size[1] - 2)
    items: list[Item] = []
    for one in sorted(spots, key=lambda spot: spot.required_pressure):
        x, y = scale.at(one.x or 0.0, one.y or 0.0)
        taken.take((x - radius, y - radius, x + radius, y + radius))
        items.append(Dot(x, y, radius, _SHADES[_shade(one.required_pressure, bounds)], INK, 0.4))
    rings, named = _rings(result, scale, units, radius)
    for mark in named:
        x, y, reach = mark.x, mark.y, mark.reach + 1
        taken.take((x - reach, y - reach, x + reach, y + reach))
    labels = [item for mark in named for item in _named(mark, taken)]
    if len(spots) <= MOST_NUMBERS:
        for one in spots:
            if one in {area.governing, area.runner_up}:
                continue
            x, y = scale.at(one.x or 0.0, one.y or 0.0)
            text = units.number(one.required_pressure, "pressure")
            found = taken.place(x, y, text, 5.6, gap=radius + 2.0, reach="beside")
            if found:
                labels.append(Label(found[0], found[1], text, 5.6, found[2], colour=SLATE))
    labels += _line_names(result, scale, taken)
    return [*items, *labels, *rings]


def _line_names(result: Result, scale: Scale, taken: Taken) -> list[Item]:
    """Return the tag of each branch line beyond one of its ends, where there is room."""
    nodes = places_of(result)
    ends: dict[str, list[tuple[float, float]]] = {}
    for node in result.nodes:
        at = nodes.get(node.tag)
        if node.branch_line and at is not None and scale.window.holds(*at):
            ends.setdefault(node.branch_line, []).append(at)
    found = (_line_name(tag, [scale.at(*at) for at in places], taken) for tag, places in ends.items())
    return [label for label in found if label is not None]


def _line_name(tag: str, places: list[tuple[float, float]], taken: Taken) -> Label | None:
    """Return ``tag`` just beyond an end of the line through ``places``, the outer end first."""
    wide, middle = text_width(tag, _LINE), (taken.left + taken.right) / 2
    (x0, y0), (x1, y1) = min(places), max(places)
    tries: list[tuple[float, float, Anchor]] = [
        (x0 - _LINE, y0 - 0.36 * _LINE, "end"),
        (x1 + _LINE, y1 - 0.36 * _LINE, "start"),
    ]
    if abs(y1 - y0) > x1 - x0:  # the line runs up and down
        tries = [(x1, max(y0, y1) + 4, "middle"), (x0, min(y0, y1) - 4 - 0.75 * _LINE, "middle")]
    else:
        tries.sort(key=lambda one: -abs(one[0] - middle))
    for x, y, anchor in tries:
        left = x - {"start": 0.0, "middle": wide / 2, "end": wide}[anchor]
        box = (left - 1, y - 0.22 * _LINE, left + wide + 1, y + 0.8 * _LINE)
        if taken.is_free(box):
            taken.take(box)
            return Label(x, y, tag, _LINE, anchor, colour=PETROL, behind=PAPER)
    return None


def _key(spots: list[Placement], units: UnitSet, width: float, *, runner_up: bool) -> list[Item]:
    bounds = _classes(spots)
    items: list[Item] = [Label(0, 8, f"required pressure, {units.symbol('pressure')}", 6.8, colour=SLATE)]
    x = text_width("required pressure, L/min", 6.8) + 14
    for place, shade in enumerate(_SHADES):
        text = f"{units.number(bounds[place], 'pressure')} to {units.number(bounds[place + 1], 'pressure')}"
        items.append(Dot(x + 4, 10.4, 4.0, shade, INK, 0.4))
        items.append(Label(x + 11, 8, text, 6.4))
        x += 22 + text_width(text, 6.4)
    x = min(x, width - 52)
    rings = [("governing", CLAY, 1.8), ("runner-up", INK, 1.0)]
    for place, (word, colour, line) in enumerate(rings if runner_up else rings[:1]):
        y = 13.0 - 11.0 * place if runner_up else 8.0
        items += [Dot(x + 4, y + 2.4, 3.8, None, colour, line), Label(x + 12, y, word, 6.4)]
    return items
