"""Sums that are printed under a table, so that every writer shows the same ones."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

from supplycheck.results.records import PathStep


@dataclass(frozen=True, slots=True)
class PathTotals:
    """Where the pressure of the path goes, summed over its segments; all [Pa].

    ``head`` + ``friction`` + ``fittings`` + ``elevation`` + ``devices`` = ``supply``.
    """

    head: float
    friction: float
    fittings: float
    elevation: float
    devices: float
    supply: float


def path_totals(path: Iterable[PathStep]) -> PathTotals | None:
    """Return the sums of ``path`` [Pa], or ``None`` where there is no path."""
    steps = list(path)
    if not steps:
        return None
    return PathTotals(
        head=steps[0].pressure_start,
        friction=sum(step.friction for step in steps),
        fittings=sum(step.fitting_friction for step in steps),
        elevation=sum(step.elevation for step in steps),
        devices=sum(step.device for step in steps),
        supply=steps[-1].pressure_end,
    )
