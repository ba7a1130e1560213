"""Runs of consecutive heads on one line, and how the runs of two lines face each other."""

from __future__ import annotations

from bisect import bisect_left, bisect_right
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from supplycheck.demand.heads import FloatArray
from supplycheck.demand.line import Line

IntArray = NDArray[np.int64]
ROUND = 1e-9
"""Relative slack on lengths and areas: converting units must not ask for one more head."""

LEAST = 1e-6
"""Runs that lie side by side over less than this [m] do not face each other."""


@dataclass(frozen=True, slots=True, eq=False)
class Runs:
    """All runs of one line: heads ``low`` up to, not including, ``high``; from ``begin`` to ``end`` [m]."""

    low: tuple[int, ...]
    high: tuple[int, ...]
    begin: FloatArray
    end: FloatArray

    def __len__(self) -> int:
        return len(self.low)


def minimal_runs(sums: Sequence[float], needed: float, count: int = 1) -> list[tuple[int, int]]:
    """Return every run over running sums ``sums`` that holds ``needed`` in at least ``count`` items.

    A run is kept when it would fall short without its first or without its last item: counted from either
    of its ends it goes no further than it must.

    >>> minimal_runs([0.0, 3.0, 6.0, 9.0], 6.0)
    [(0, 2), (1, 3)]
    """
    items = len(sums) - 1
    goal = needed * (1 - ROUND) - ROUND * sums[-1]
    found = []
    for low in range(items):
        high = max(bisect_left(sums, sums[low] + goal, low), low + count)
        if high > items:
            break
        found.append((low, high))
    for high in range(items, 0, -1):
        low = min(bisect_right(sums, sums[high] - goal, 0, high + 1) - 1, high - count)
        if low < 0:
            break
        found.append((low, high))
    return sorted(set(found))


def runs_of(line: Line, length: float, count: int) -> Runs:
    """Return the runs of ``line`` that reach ``length`` [m] along it with at least ``count`` heads.

    A line too short for that is taken whole.
    """
    along = [0.0, *np.cumsum(line.share).tolist()]
    pairs = minimal_runs(along, length, count) or [(0, len(line))]
    low = np.array([pair[0] for pair in pairs], dtype=np.int64)
    high = np.array([pair[1] for pair in pairs], dtype=np.int64)
    begin = line.along[low] - line.share[low] / 2
    end = line.along[high - 1] + line.share[high - 1] / 2
    return Runs(tuple(low.tolist()), tuple(high.tolist()), begin, end)


@dataclass(frozen=True, slots=True, eq=False)
class Facing:
    """For each run of one line the run of another that faces it; −1 where none does.

    ``first`` and ``last`` differ where two runs lie equally near on either hand (staggered heads): there
    the run is ``tied``. ``overlap`` [m] is how far they lie side by side, ``distance`` [m] how far apart
    their middles lie along the line.
    """

    first: tuple[int, ...]
    last: tuple[int, ...]
    overlap: tuple[float, ...]
    distance: tuple[float, ...]
    tied: frozenset[int]


def facing(own: Runs, other: Runs) -> Facing:
    """Return which run of ``other`` faces each run of ``own``: the one whose middle is nearest.

    A run faces only where the two lie side by side over some length.
    """
    middle = (own.begin + own.end) / 2
    centres = (other.begin + other.end) / 2
    order = np.argsort(centres, kind="stable")
    ranked = centres[order]
    right = np.minimum(np.searchsorted(ranked, middle), len(ranked) - 1)
    left = np.maximum(right - 1, 0)
    to_right, to_left = np.abs(ranked[right] - middle), np.abs(ranked[left] - middle)
    near = np.minimum(to_left, to_right)
    tie = 0.02 * (own.end - own.begin)
    first = order[np.where(to_left <= near + tie, left, right)]
    last = order[np.where(to_right <= near + tie, right, left)]

    def beside(chosen: IntArray) -> FloatArray:
        side = np.minimum(own.end, other.end[chosen]) - np.maximum(own.begin, other.begin[chosen])
        return np.asarray(side, dtype=np.float64)

    first_side, last_side = beside(first), beside(last)
    first = np.where(first_side > LEAST, first, np.where(last_side > LEAST, last, -1))
    last = np.where(last_side > LEAST, last, first)
    return Facing(
        tuple(first.tolist()),
        tuple(last.tolist()),
        tuple(np.maximum(first_side, last_side).tolist()),
        tuple(near.tolist()),
        frozenset(np.flatnonzero(first != last).tolist()),
    )


def extent(line: Line, low: int, high: int) -> tuple[float, float]:
    """Return where the run of heads ``low`` up to ``high`` begins and ends along the line [m]."""
    begin = line.along[low] - line.share[low] / 2
    return float(begin), float(line.along[high - 1] + line.share[high - 1] / 2)
