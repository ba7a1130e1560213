"""Distances between heads, recomputed from their coordinates in plan. Lengths [m]."""

from __future__ import annotations

import math
from collections import defaultdict
from collections.abc import Iterable
from dataclasses import dataclass

from supplycheck.checks.context import CheckContext
from supplycheck.checks.rule import some
from supplycheck.model import Node

_COLLINEAR = 0.3
"""Lines nearer than this run one behind the other, not side by side [m]."""


@dataclass(frozen=True, slots=True)
class Gap:
    """Distance [m] between two heads of a line, or between two neighbouring lines."""

    first: str
    second: str
    distance: float


@dataclass(frozen=True, slots=True)
class _Line:
    tag: str
    heads: tuple[Node, ...]
    direction: tuple[float, float]
    level: float


def _place(node: Node) -> tuple[float, float]:
    return (node.x or 0.0, node.y or 0.0)


def distance(one: Node, other: Node) -> float | None:
    """Return the distance of two nodes [m], height included; ``None`` where it is not known."""
    if one.x is None or one.y is None or other.x is None or other.y is None:
        return None
    return math.dist((one.x, one.y, one.elevation), (other.x, other.y, other.elevation))


def _lines(heads: Iterable[Node]) -> list[_Line]:
    by_line: dict[str, list[Node]] = defaultdict(list)
    for node in heads:
        if node.branch_line is not None and node.x is not None and node.y is not None:
            by_line[node.branch_line].append(node)
    lines = []
    for tag, members in by_line.items():
        xs, ys = [_place(node)[0] for node in members], [_place(node)[1] for node in members]
        axis = 0 if max(xs) - min(xs) >= max(ys) - min(ys) else 1
        ordered = sorted(members, key=lambda node: _place(node)[axis])
        (x1, y1), (x2, y2) = _place(ordered[0]), _place(ordered[-1])
        run = math.hypot(x2 - x1, y2 - y1)
        direction = ((x2 - x1) / run, (y2 - y1) / run) if run > 0 else (0.0, 0.0)
        level = sum(node.elevation for node in members) / len(members)
        lines.append(_Line(tag, tuple(ordered), direction, level))
    return lines


def gaps_along(heads: Iterable[Node]) -> list[Gap]:
    """Return the distance between each two neighbours of a branch line."""
    return [
        Gap(one.tag, two.tag, math.dist(_place(one), _place(two)))
        for line in _lines(heads)
        for one, two in zip(line.heads, line.heads[1:], strict=False)
    ]


def gaps_between(heads: Iterable[Node]) -> list[Gap]:
    """Return the distance between each two neighbouring parallel lines of one level that overlap."""
    groups: dict[tuple[int, int], list[_Line]] = defaultdict(list)
    for line in _lines(heads):
        if line.direction != (0.0, 0.0):
            turn = round(math.atan2(line.direction[1], line.direction[0]) / 0.1)
            groups[(abs(turn) if abs(turn) == 16 else turn, round(line.level))].append(line)
    return [gap for group in groups.values() for gap in _neighbours(group)]


def _neighbours(group: list[_Line]) -> list[Gap]:
    ux, uy = group[0].direction
    spans = []
    for line in group:
        along = [ux * _place(node)[0] + uy * _place(node)[1] for node in line.heads]
        across = [ux * _place(node)[1] - uy * _place(node)[0] for node in line.heads]
        spans.append((sum(across) / len(across), min(along), max(along), line.tag))
    spans.sort()
    gaps = []
    for row, (here, low, high, tag) in enumerate(spans):
        for there, other_low, other_high, other in spans[row + 1 :]:
            if there - here > _COLLINEAR and other_low <= high and other_high >= low:
                gaps.append(Gap(tag, other, there - here))
                break
    return gaps


def largest_per_tag(gaps: Iterable[Gap]) -> dict[str, float]:
    """Return the larger of the distances to its neighbours for each head or line."""
    most: dict[str, float] = {}
    for gap in gaps:
        for tag in (gap.first, gap.second):
            most[tag] = max(most.get(tag, 0.0), gap.distance)
    return most


def lines_note(context: CheckContext) -> str:
    """Return what a finding on lines says where they are inferred, empty where all are given."""
    if not context.inferred_lines:
        return ""
    lone = [node.tag for node in context.all_heads if node.branch_line is None]
    left = f" {some(lone)} is on none and left out." if lone else ""
    return f" Lines are inferred from pipes and coordinates.{left}"


def no_lines(context: CheckContext) -> tuple[str, str]:
    """Return why no rule on lines could be run, and what is to be added, as a question."""
    unplaced = [node.tag for node in context.all_heads if node.x is None or node.y is None]
    if unplaced:
        ask = f"Where in plan do {some(unplaced)} stand (x and y of the nodes)?"
        return f"Not run: no coordinates for {some(unplaced)}.", ask
    lone = [node.tag for node in context.all_heads if node.branch_line is None]
    if lone:
        text = f"Not run: no branch line is given for {some(lone)}; none could be inferred from the pipes."
        ask = f"On which branch line does each of {some(lone)} stand "
        return text, ask + "(column line of the nodes, the same text for all heads of a line)?"
    return (
        "Not run: no two heads stand on one branch line.",
        "Does each head really stand alone on its branch line?",
    )
