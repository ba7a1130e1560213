"""A branch line as the search sees it, and when lines and heads are neighbours."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

from supplycheck.demand.heads import FloatArray

STEP_HEIGHT: Final = 0.9144
"""A step in height of more than 36 in [m] parts two levels (NFPA 13, ceiling steps; from memory)."""

SLOPE: Final = 0.5
STOREY: Final = 2.0
"""Heads under a slope stay on one level up to a rise of 1 in 2 and of 2 m from one to the next."""

TOUCH: Final = 1.75
"""Heads further apart than this many times the strip or the length they cover do not touch."""

SAME_ROW: Final = 0.25
"""Lines closer across than this part of the width they cover stand in one row."""


def same_level(rise: float, distance: float) -> bool:
    """Say whether two neighbouring heads with this rise [m] at this distance in plan [m] share a level.

    >>> same_level(0.3, 3.0), same_level(3.0, 3.0)
    (True, False)
    """
    return abs(rise) <= max(STEP_HEIGHT, min(SLOPE * abs(distance), STOREY)) + 1e-9


def steps_apart(rise: float) -> int:
    """Return how many level steps a rise [m] holds: of two neighbours the one with fewer comes first.

    >>> steps_apart(0.5), steps_apart(-1.2)
    (0, 1)
    """
    return int(abs(rise) / STEP_HEIGHT)


@dataclass(frozen=True, slots=True, eq=False)
class Line:
    """A branch line, or one side of it.

    ``heads`` are row numbers in order along the line; ``along`` [m] their coordinates, ``share`` [m] the
    length of line that each stands for, ``across`` [m] the line's coordinate, ``sums`` the running sums
    of area [m²], ``heights`` of elevation [m], ``width`` [m] how wide a strip its heads cover. ``fed``
    says whether pipe goes on beyond its low and its high end. ``sides`` are the lines it joins, ``joint``
    says how: across a main, or end to end.
    """

    name: str
    heads: tuple[int, ...]
    bay: int
    along: FloatArray
    across: float
    share: FloatArray
    sums: tuple[float, ...]
    heights: tuple[float, ...]
    width: float
    fed: tuple[bool, bool]
    sides: tuple[int, ...] = ()
    joint: str = ""

    def __len__(self) -> int:
        return len(self.heads)


@dataclass(frozen=True, slots=True)
class Lines:
    """All lines: the sides, and what they make when joined across a main or end to end.

    The ``sides`` of a joined line are row numbers of :attr:`sides`.
    """

    sides: tuple[Line, ...]
    joined: tuple[Line, ...]
    inferred: bool
