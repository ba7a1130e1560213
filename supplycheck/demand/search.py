"""Every placement of the design area that the rules allow.

A placement is a group of runs on consecutive lines. The run on the first line reaches 1.2√A along it (or
is the whole of a shorter line); each further line adds the run that faces the first; the last line adds
only as many heads as the area still asks, in every position that touches the group. Both
directions across are tried from every run of every line.

Sources: 1.2√A parallel to the lines and whole heads up, NFPA 13 (2007), 11.2.3.1.1 and 22.4.4.1 (from
memory); that the left-over heads may take any position is wider than the common practice of placing them
nearest the cross main. A run crosses a main, or goes on over lines that meet end to end, only where one of
them is shorter than 1.2√A (common practice, no source). EN 12845 (2015), 13.4.4 (from memory): whole
lines and pairs of lines either side of a main, and areas as near square as can be for the most favourable
one, are tried as well.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, replace
from typing import Final

import numpy as np

from supplycheck.demand.heads import Heads
from supplycheck.demand.line import (
    SAME_ROW,
    TOUCH,
    Line,
    Lines,
    same_level,
    steps_apart,
)
from supplycheck.demand.placement import Bag, CapReachedError, Placement, Row, Rule
from supplycheck.demand.runs import (
    LEAST,
    ROUND,
    Facing,
    IntArray,
    Runs,
    extent,
    facing,
    minimal_runs,
    runs_of,
)
from supplycheck.demand.strays import add_strays

CAP: Final = 200_000
"""Placements after which the search stops and says so."""


@dataclass(frozen=True, slots=True)
class Found:
    """All placements, and whether the search was complete."""

    placements: tuple[Placement, ...]
    complete: bool


class _Field:
    """A set of lines with their runs under one rule; looks up what faces what, each once.

    Lines with the same spacing share their runs, and what faces them.
    """

    def __init__(self, lines: Sequence[Line], rule: Rule, most: int) -> None:
        self.lines = lines
        self.rule = rule
        self.tied: list[set[int]] = [set() for _ in lines]
        known: dict[bytes, Runs] = {}
        self.runs: list[Runs] = []
        for line in lines:
            key = line.along.tobytes() + line.share.tobytes()
            if key not in known:
                known[key] = runs_of(line, rule.length, rule.run)
            self.runs.append(known[key])
        self._across = np.array([line.across for line in lines])
        self._begin = np.array([line.along[0] - line.share[0] / 2 for line in lines])
        self._end = np.array([line.along[-1] + line.share[-1] / 2 for line in lines])
        self._reach = most * TOUCH * max((line.width for line in lines), default=0.0)
        self._rows: dict[int, IntArray] = {}
        for bay in {line.bay for line in lines}:
            rows = np.array([i for i, line in enumerate(lines) if line.bay == bay], dtype=np.int64)
            self._rows[bay] = rows[np.argsort(self._across[rows], kind="stable")]
        self._same: dict[tuple[int, int], Facing] = {}
        self._facing: dict[tuple[int, int], Facing] = {}
        self._ahead: dict[tuple[int, int], list[list[int]]] = {}

    def facing(self, own: int, other: int) -> Facing:
        """Return which runs of line ``other`` face the runs of line ``own``."""
        found = self._facing.get((own, other))
        if found is None:
            key = (id(self.runs[own]), id(self.runs[other]))
            if key not in self._same:
                self._same[key] = facing(self.runs[own], self.runs[other])
            found = self._facing[own, other] = self._same[key]
            self.tied[own].update(found.tied)
        return found

    def rows_ahead(self, own: int, sign: int) -> list[list[int]]:
        """Return the lines that lie beside line ``own`` on one hand, row by row outwards."""
        if (own, sign) not in self._ahead:
            self._ahead[own, sign] = self._look(own, sign)
        return self._ahead[own, sign]

    def _look(self, own: int, sign: int) -> list[list[int]]:
        line = self.lines[own]
        step = SAME_ROW * line.width
        order = self._rows[line.bay]
        ranked = self._across[order]
        near, far = line.across + sign * step, line.across + sign * self._reach
        low, high = np.searchsorted(ranked, [min(near, far), max(near, far)])
        rows = order[low:high]
        beside = np.minimum(self._end[rows], self._end[own]) - np.maximum(
            self._begin[rows], self._begin[own]
        )
        rows = rows[beside > 1e-6]
        away = sign * (self._across[rows] - line.across)
        groups: list[list[int]] = []
        edge = -math.inf
        for i in np.argsort(away, kind="stable").tolist():
            if float(away[i]) > edge + step:
                groups.append([])
            edge = float(away[i])
            groups[-1].append(int(rows[i]))
        return groups


def _height(row: Row) -> float:
    return (row.line.heights[row.high] - row.line.heights[row.low]) / (row.high - row.low)


def _next_row(space: _Field, own: int, run: int, group: list[int], last: Row, late: bool) -> Row | None:
    """Return the run in one row of lines that best faces run ``run`` of line ``own``, on its level."""
    best: Row | None = None
    nearest = (math.inf, math.inf, math.inf)
    for other in group:
        line = space.lines[other]
        face = space.facing(own, other)
        chosen = (face.last if late else face.first)[run]
        if chosen < 0:
            continue
        row = Row(line, space.runs[other].low[chosen], space.runs[other].high[chosen])
        gap = abs(line.across - last.line.across)
        rise = _height(row) - _height(last)
        if gap > TOUCH * max(line.width, last.line.width) or not same_level(rise, gap):
            continue
        key = (steps_apart(rise), -round(face.overlap[run], 4), round(face.distance[run], 4))
        if key == nearest:
            space.tied[own].add(run)
        if key < nearest or (late and key == nearest):
            best, nearest = row, key
    return best


def _touches(row: Row, others: Sequence[Row]) -> bool:
    """Say whether a run lies beside one of ``others`` over some length."""
    begin, end = extent(*row)
    return any(min(end, b) - max(begin, a) > LEAST for a, b in (extent(*other) for other in others))


def _grow(space: _Field, own: int, run: int, sign: int, late: bool, bag: Bag) -> None:
    """Add the placements that start with one run and grow to one hand.

    Where two runs of a line face the first equally, ``late`` takes the further one.
    """
    rule = space.rule
    first = Row(space.lines[own], space.runs[own].low[run], space.runs[own].high[run])
    rows = [first]
    area = first.line.sums[first.high] - first.line.sums[first.low]
    count = first.high - first.low
    if rule.reached(area, count):
        bag.add(rows)
        return
    for group in space.rows_ahead(own, sign):
        row = _next_row(space, own, run, group, rows[-1], late)
        if row is None:
            if abs(space.lines[group[0]].across - rows[-1].line.across) > TOUCH * rows[-1].line.width:
                return
            continue
        base = row.line.sums[row.low]
        more = row.line.sums[row.high] - base
        if rule.reached(area + more, count + row.high - row.low):
            sums = [total - base for total in row.line.sums[row.low : row.high + 1]]
            for low, high in minimal_runs(sums, rule.area - area, max(1, rule.heads - count)):
                part = Row(row.line, row.low + low, row.low + high)
                if _touches(part, (rows[0], rows[-1])):
                    bag.add([*rows, part])
            return
        rows.append(row)
        area += more
        count += row.high - row.low


def _fill(space: _Field, bag: Bag, starts: Iterable[int]) -> None:
    """Add every placement that starts on one of the lines ``starts``."""
    for own in starts:
        for run in range(len(space.runs[own])):
            for sign in (1, -1):
                _grow(space, own, run, sign, False, bag)
                if run in space.tied[own]:
                    _grow(space, own, run, sign, True, bag)


def _is_short(line: Line, rule: Rule) -> bool:
    return float(line.share.sum()) < rule.length * (1 - ROUND)


def _needs_all(line: Line, rule: Rule) -> bool:
    """Say whether a whole line is no more than the area asks: it falls short without one of its ends."""
    least = min(line.sums[-2], line.sums[-1] - line.sums[1])
    return not rule.reached(least, len(line) - 1)


def _spanning(lines: Lines, rule: Rule, everywhere: bool) -> tuple[Line, ...]:
    """Return the lines, joined with their neighbours in the row where one is too short (or everywhere)."""
    chosen = [
        line
        for line in lines.joined
        if everywhere or any(_is_short(lines.sides[side], rule) for side in line.sides)
    ]
    if not chosen:
        return ()
    taken = {side for line in chosen for side in line.sides}
    return (*chosen, *(line for i, line in enumerate(lines.sides) if i not in taken))


def _can_grow(space: _Field, own: int) -> bool:
    """Say whether a line with all that lies beside it on one hand could make up the area."""
    for sign in (1, -1):
        lines = [space.lines[other] for group in space.rows_ahead(own, sign) for other in group]
        lines.append(space.lines[own])
        if space.rule.reached(sum(line.sums[-1] for line in lines), sum(len(line) for line in lines)):
            return True
    return False


def _lengthen(lines: Sequence[Line], rule: Rule, bag: Bag, most: int) -> None:
    """Let runs grow along the lines for heads that no placement holds: too few lines lie side by side."""
    space = _Field(lines, rule, most)
    starts = [
        i for i, line in enumerate(lines) if not bag.covered.issuperset(line.heads) and _can_grow(space, i)
    ]
    shares = [rule.length / max(float(np.median(lines[i].share)), 1e-6) for i in starts]
    run = min(most, max(1, math.ceil(min(shares, default=0.0))))
    while run < most:
        starts = [i for i in starts if not bag.covered.issuperset(lines[i].heads)]
        if not starts:
            return
        run += 1
        _fill(_Field(lines, replace(rule, run=run), most), bag, starts)


def search(heads: Heads, lines: Lines, rule: Rule, *, european: bool, cap: int = CAP) -> Found:
    """Return every placement of the design area that the rules allow, without duplicates.

    Parameters
    ----------
    heads, lines
        All heads, and the lines they stand on.
    rule
        Area [m²], length along the lines [m] and number of heads that a placement must reach.
    european
        Also try whole lines and pairs of lines, areas near a square, and areas across a main anywhere.
    cap
        Number of placements after which the search stops.
    """
    bag = Bag(cap)
    most = max(rule.heads, math.ceil(rule.area / float(heads.area.min())))
    try:
        rules = [rule]
        if european:
            rules += [replace(rule, length=math.sqrt(rule.area)), replace(rule, length=math.inf)]
        for each in rules:
            for chosen in (lines.sides, _spanning(lines, each, european)):
                space = _Field(chosen, each, most)
                whole = math.isinf(each.length)
                starts = [i for i, line in enumerate(chosen) if not whole or _needs_all(line, rule)]
                _fill(space, bag, starts)
        for chosen in (lines.sides, _spanning(lines, rule, everywhere=True)):
            _lengthen(chosen, rule, bag, most)
        add_strays(heads, lines, rule, bag)
    except CapReachedError:
        return Found(tuple(bag.found.values()), complete=False)
    return Found(tuple(bag.found.values()), complete=True)
