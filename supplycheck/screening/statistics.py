"""What the report tells of all tests, gathered row by row in memory that does not grow with the file."""

from __future__ import annotations

import heapq
from collections import Counter
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Final

import numpy as np

from supplycheck.catalogue.water import hydrant_classes
from supplycheck.screening.marks import MARKS
from supplycheck.screening.reduce import NOT_MET

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Floats = NDArray[np.float64]
    Ints = NDArray[np.int64]

BINS: Final = 16
MOST_POINTS: Final = 1500
"""Points that the map shows."""
MOST_LISTED: Final = 40
"""Hydrants and rejected rows that the report lists by name."""
FINEST: Final = 2.0**-20
"""Size of the first map cells, in the unit of the coordinates."""


@dataclass(frozen=True, slots=True)
class Spot:
    """One hydrant that the report names; SI. ``grade`` counts from the best class."""

    row: int
    hydrant: str
    date: str
    rated: float
    required: float
    available: float
    grade: int
    met: int
    marks: int
    x: float
    y: float


@dataclass(frozen=True, slots=True)
class Kept:
    """The accepted tests of one block, one element a row; SI."""

    rows: Ints
    hydrant: list[str]
    date: list[str]
    flow: Floats
    rated: Floats
    required: Floats
    available: Floats
    grade: Ints
    met: Ints
    marks: Ints
    x: Floats
    y: Floats

    def spot(self, at: int) -> Spot:
        """Return the test at the place ``at``."""
        return Spot(
            int(self.rows[at]),
            self.hydrant[at],
            self.date[at],
            float(self.rated[at]),
            float(self.required[at]),
            float(self.available[at]),
            int(self.grade[at]),
            int(self.met[at]),
            int(self.marks[at]),
            float(self.x[at]),
            float(self.y[at]),
        )


@dataclass(slots=True)
class MapPoints:
    """The poorest hydrant of each cell of a square grid, the finest with at most :data:`MOST_POINTS` cells.

    Cells start at :data:`FINEST` and double; each lies whole in one of the next size, so that the points
    do not depend on the order of the rows.
    """

    size: float = FINEST
    points: dict[tuple[int, int], Spot] = field(default_factory=dict)
    placed: int = 0
    left: float = np.inf
    right: float = -np.inf
    low: float = np.inf
    high: float = -np.inf

    def add(self, kept: Kept) -> None:
        """Add the tests that have coordinates."""
        at = np.flatnonzero(~np.isnan(kept.x))
        if not at.size:
            return
        self.placed += int(at.size)
        x, y, rated = kept.x[at], kept.y[at], kept.rated[at]
        self.left, self.right = min(self.left, float(x.min())), max(self.right, float(x.max()))
        self.low, self.high = min(self.low, float(y.min())), max(self.high, float(y.max()))
        span = max(self.right - self.left, self.high - self.low)
        while span / self.size > 2 * MOST_POINTS:  # a row of cells alone would be too many, or nearly
            self._coarser()
        while True:
            column, line = np.floor(x / self.size), np.floor(y / self.size)
            order = np.lexsort((kept.rows[at], rated, line, column))
            fresh = np.ones(order.size, dtype=bool)
            fresh[1:] = (np.diff(column[order]) != 0) | (np.diff(line[order]) != 0)
            if np.count_nonzero(fresh) <= MOST_POINTS:
                break
            self._coarser()
        for place in order[fresh].tolist():
            self._keep((int(column[place]), int(line[place])), kept.spot(int(at[place])))
        while len(self.points) > MOST_POINTS:
            self._coarser()

    def _keep(self, cell: tuple[int, int], spot: Spot) -> None:
        old = self.points.get(cell)
        if old is None or (spot.rated, spot.row) < (old.rated, old.row):
            self.points[cell] = spot

    def _coarser(self) -> None:
        self.size *= 2
        old, self.points = self.points, {}
        for (column, line), spot in old.items():
            self._keep((column // 2, line // 2), spot)


@dataclass(slots=True)
class Statistics:
    """Counts, sums and extremes of all accepted tests; ``step`` is the width of a histogram bar [m³/s]."""

    step: float
    done: int = 0
    rejected: int = 0
    without_place: int = 0
    by_class: Counter[int] = field(default_factory=Counter)
    by_met: Counter[int] = field(default_factory=Counter)
    by_mark: Counter[int] = field(default_factory=Counter)
    bars: Ints = field(default_factory=lambda: np.zeros(BINS + 1, dtype=np.int64))
    total_rated: float = 0.0
    least: float = np.inf
    most: float = -np.inf
    beyond: int = 0
    points: MapPoints = field(default_factory=MapPoints)
    reasons: list[tuple[int, str]] = field(default_factory=list)
    _poorest: list[tuple[float, int, Spot]] = field(default_factory=list)
    _short: list[tuple[float, int, Spot]] = field(default_factory=list)

    def add(self, kept: Kept) -> None:
        """Add the accepted tests of a block."""
        count = len(kept.rows)
        if not count:
            return
        self.done += count
        self.without_place += int(np.isnan(kept.x).sum())
        self._count(self.by_class, kept.grade, len(hydrant_classes()))
        self._count(self.by_met, kept.met, 3)
        for place in range(len(MARKS)):
            self.by_mark[place] += int(np.count_nonzero(kept.marks & (1 << place)))
        bars = np.minimum(kept.rated * (1 + 1e-12) // self.step, BINS).astype(np.int64)
        self.bars += np.bincount(bars, minlength=BINS + 1)
        self.total_rated += float(kept.rated.sum())
        self.least, self.most = (
            min(self.least, float(kept.rated.min())),
            max(self.most, float(kept.rated.max())),
        )
        self.beyond += int(np.count_nonzero(kept.rated > kept.flow * (1 + 1e-9)))
        self._lowest(self._poorest, kept, kept.rated)
        short = np.flatnonzero(kept.met == NOT_MET)
        if short.size:
            ratio = np.full(count, np.inf)
            ratio[short] = kept.available[short] / kept.required[short]
            self._lowest(self._short, kept, ratio)
        self.points.add(kept)

    def reject(self, row: int, reason: str) -> None:
        """Count a rejected row; the first ones are kept for the report."""
        self.rejected += 1
        if len(self.reasons) < MOST_LISTED:
            self.reasons.append((row, reason))

    @property
    def poorest(self) -> list[Spot]:
        """The hydrants with the least flow at 20 psi, the poorest first."""
        return [spot for _, _, spot in sorted(self._poorest, reverse=True, key=lambda one: one[:2])]

    @property
    def short(self) -> list[Spot]:
        """The hydrants furthest below their required flow, the furthest first."""
        return [spot for _, _, spot in sorted(self._short, reverse=True, key=lambda one: one[:2])]

    def _count(self, counter: Counter[int], values: Ints, size: int) -> None:
        for value, number in enumerate(np.bincount(values, minlength=size).tolist()):
            counter[value] += number

    def _lowest(self, heap: list[tuple[float, int, Spot]], kept: Kept, values: Floats) -> None:
        """Keep in ``heap`` the tests with the lowest of ``values``; equal ones in the order of the file."""
        order = (
            np.lexsort((kept.rows, values))[:MOST_LISTED]
            if len(values) > MOST_LISTED
            else range(len(values))
        )
        for at in order:
            if not np.isfinite(values[at]):
                continue
            rank = (-float(values[at]), -int(kept.rows[at]))
            if len(heap) < MOST_LISTED:
                heapq.heappush(heap, (*rank, kept.spot(int(at))))
            elif rank > heap[0][:2]:
                heapq.heapreplace(heap, (*rank, kept.spot(int(at))))
