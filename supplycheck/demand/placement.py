"""One placement of the design area, what it must reach, and the collection without duplicates."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from typing import NamedTuple

from supplycheck.demand.line import Line
from supplycheck.demand.runs import ROUND


class Row(NamedTuple):
    """Heads ``low`` up to, not including, ``high`` of a line."""

    line: Line
    low: int
    high: int


@dataclass(frozen=True, slots=True)
class Placement:
    """One placement: its heads (row numbers), the runs it is made of, heads added singly, a note."""

    heads: tuple[int, ...]
    rows: tuple[Row, ...]
    extra: tuple[int, ...] = ()
    note: str = ""


@dataclass(frozen=True, slots=True)
class Rule:
    """What a placement must reach: area [m²], length along the lines [m], heads, heads in a run."""

    area: float
    length: float
    heads: int
    run: int = 1

    def reached(self, area: float, heads: int) -> bool:
        """Say whether ``area`` [m²] with so many heads is enough."""
        return area >= self.area * (1 - ROUND) and heads >= self.heads


class CapReachedError(Exception):
    """The search holds as many placements as it may."""


@dataclass(slots=True)
class Bag:
    """Placements without duplicates, in the order found, and the heads that stand in any of them."""

    cap: int
    found: dict[frozenset[int], Placement] = field(default_factory=dict)
    covered: set[int] = field(default_factory=set)

    def add(self, rows: Sequence[Row]) -> None:
        """Keep the placement made of ``rows``."""
        heads: list[int] = []
        for line, low, high in rows:
            heads += line.heads[low:high]
        self.put(Placement(tuple(heads), tuple(rows)))

    def put(self, placement: Placement) -> None:
        """Keep a placement unless its heads are there already.

        Raises
        ------
        CapReachedError
            There is no room for another one.
        """
        key = frozenset(placement.heads)
        if key not in self.found:
            if len(self.found) >= self.cap:
                raise CapReachedError
            self.found[key] = placement
            self.covered.update(key)
