"""Lengths of pipe against the coordinates of their ends: nothing is shorter than the straight line."""

from __future__ import annotations

import math
import re
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Final

from supplycheck.findings import Place
from supplycheck.model import Node
from supplycheck.model.slips import likely_slip
from supplycheck.project.faults import FaultList
from supplycheck.project.tables import RowTable
from supplycheck.units import INCH, UnitSet

_PLAIN: Final = re.compile(r"[+\-−]?\d*(?:[.,](\d*))?")
_ROUND_OFF: Final = 1e-9


def distance(a: Node, b: Node) -> float | None:
    """Return the distance of two nodes [m], height included; ``None`` where it is not known."""
    if a.x is None or a.y is None or b.x is None or b.y is None:
        return None
    return math.dist((a.x, a.y, a.elevation), (b.x, b.y, b.elevation))


def last_place(table: RowTable, column: str, units: UnitSet) -> float:
    """Return one unit [m] of the last decimal place to which a column of lengths is written.

    The finest number counts. Feet and inches count as rounded to the inch, fractions to the sixteenth.
    """
    unit = table.units.get(column) or units.unit("length")
    finest = math.inf
    for row in table.rows:
        text = row.get(column)
        number = _PLAIN.fullmatch(text)
        if text and number:
            finest = min(finest, unit.to_si(10.0 ** -len(number[1] or "")))
        elif text:
            finest = min(finest, INCH / 16 if "/" in text else INCH)
    return finest if math.isfinite(finest) else 0.0


@dataclass(frozen=True, slots=True)
class Rounding:
    """Last places [m] to which lengths, and the coordinates of the nodes by column, are written."""

    length: float
    nodes: Mapping[str, float]

    def least(self, a: Node, b: Node, apart: float) -> float:
        """Return the least length [m] that coordinates ``apart`` [m] and rounding allow.

        Each coordinate is off by half its last place at most, so a difference of two by one of it.
        """
        ways = ((a.x, b.x, "x"), (a.y, b.y, "y"), (a.elevation, b.elevation, "elevation"))
        off = sum(abs((far or 0.0) - (near or 0.0)) / apart * self.nodes[name] for near, far, name in ways)
        return apart - off - self.length / 2


def read_rounding(nodes: RowTable, pipes: RowTable, units: UnitSet) -> Rounding:
    """Return how finely the two tables are written."""
    return Rounding(
        last_place(pipes, "length", units),
        {column: last_place(nodes, column, units) for column in ("x", "y", "elevation")},
    )


@dataclass(frozen=True, slots=True)
class GivenLength:
    """A length of pipe [m] as a table gives it, and where."""

    length: float
    start: Node
    end: Node
    place: Place


def check_length(given: GivenLength, rounding: Rounding, units: UnitSet, faults: FaultList) -> None:
    """Note a length below the rise, or below the distance of its ends by more than is rounded."""
    length, start, end = given.length, given.start, given.end
    rise = abs(start.elevation - end.elevation)
    if length < rise * 0.99:
        faults.add(
            given.place,
            f"is shorter than the difference of elevation between {start.tag} and {end.tag}",
            found=units.text(length, "length"),
            allowed=f"at least {units.text(rise, 'length')}",
            remedy="correct the length or the elevations",
        )
        return
    apart = distance(start, end)
    if apart is None or not apart > 0 or not length < rounding.least(start, end, apart) - _ROUND_OFF:
        return
    slip = likely_slip(length / apart)
    faults.add(
        given.place,
        "is shorter than the distance between its ends",
        found=f"{units.text(length, 'length')}; {start.tag} and {end.tag} are "
        f"{units.text(apart, 'length')} apart; {length / apart:.3g} times as long"
        + (f": {slip}" if slip else ""),
        allowed=f"at least {units.text(apart, 'length')}, or an empty cell for the distance itself",
        remedy="lengths run from centre to centre; correct the length or the coordinates",
    )
