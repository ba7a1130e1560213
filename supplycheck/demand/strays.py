"""Heads that stand in no regular placement: each gets one made up with the heads nearest to it."""

from __future__ import annotations

import heapq
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from supplycheck.demand.heads import FloatArray, Heads
from supplycheck.demand.line import SLOPE, STEP_HEIGHT, STOREY, TOUCH, Lines, steps_apart
from supplycheck.demand.placement import Bag, Placement, Row, Rule


@dataclass(frozen=True, slots=True, eq=False)
class _Ground:
    """Where all heads stand: plan [m], elevation [m], area [m²], how far each touches [m]."""

    tags: tuple[str, ...]
    xy: FloatArray
    z: FloatArray
    area: FloatArray
    reach: FloatArray

    def near(self, row: int) -> list[tuple[int, float, str, int]]:
        """Return the heads that touch head ``row`` on its level: steps between, distance [m], tag, row."""
        apart = np.hypot(*(self.xy - self.xy[row]).T)
        rise = np.abs(self.z - self.z[row])
        level = rise <= np.maximum(STEP_HEIGHT, np.minimum(SLOPE * apart, STOREY)) + 1e-9
        rows = np.flatnonzero(level & (apart <= (self.reach + self.reach[row]) / 2)).tolist()
        return [
            (steps_apart(float(rise[i])), max(round(float(apart[i]), 3), 1e-9), self.tags[i], i)
            for i in rows
        ]


def _gather_near(ground: _Ground, seed: Sequence[int], rule: Rule) -> list[int]:
    """Return ``seed`` and the nearest heads that make up the area, each touching another on its level."""
    chosen: dict[int, None] = {}
    area = 0.0
    waiting = [(0, 0.0, "", row) for row in seed]
    heapq.heapify(waiting)
    while waiting:
        _, apart, _, row = heapq.heappop(waiting)
        if row in chosen:
            continue
        if apart > 0 and rule.reached(area, len(chosen)):
            break
        chosen[row] = None
        area += float(ground.area[row])
        for other in ground.near(row):
            if other[3] not in chosen:
                heapq.heappush(waiting, other)
    return list(chosen)


def add_strays(heads: Heads, lines: Lines, rule: Rule, bag: Bag) -> None:
    """Give the heads that still stand in no placement one made up with the heads nearest to them."""
    xy = np.array([(node.x, node.y) for node in heads.nodes], dtype=np.float64)
    z = np.array([node.elevation for node in heads.nodes], dtype=np.float64)
    ground = _Ground(heads.tags, xy, z, heads.area, TOUCH * np.sqrt(heads.area))
    covered = frozenset(bag.covered)
    for line in lines.sides:
        missing = [i for i, row in enumerate(line.heads) if row not in covered]
        if not missing:
            continue
        own = Row(line, missing[0], missing[-1] + 1)
        members = _gather_near(ground, line.heads[own.low : own.high], rule)
        extra = tuple(members[own.high - own.low :])
        short = not rule.reached(float(heads.area[members].sum()), len(members))
        note = "area smaller than the design area: all heads" if short else ""
        bag.put(Placement(tuple(members), (own,), extra, note))
