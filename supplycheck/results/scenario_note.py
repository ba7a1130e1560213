"""What is said of a scenario beside its numbers: dry heads, curves read past their end, what is shut."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Final

from supplycheck.results.records import ScenarioRow
from supplycheck.units import UnitSet

MOST_NAMED: Final = 12
"""Dry heads, or devices read past their curve, that a note names."""


def scenario_note(row: ScenarioRow, units: UnitSet) -> str:
    """Return the remarks on ``row`` with their numbers, what weighs most first."""
    parts = ["nothing flows"] if row.total_flow == 0.0 else []
    parts += [_dry(row.dry)] if row.dry else []
    parts += [_beyond(row, units)] if row.beyond else []
    parts += [row.note] if row.note else []
    parts += [_shared(row.shares, units)] if row.shares and row.total_flow else []
    parts += [
        f"{units.text(flow, 'flow')} at {node} besides the {units.text(own, 'flow')} of the node table"
        for node, flow, own in row.besides
    ]
    return "; ".join(parts)


def _shared(shares: Sequence[tuple[str, float]], units: UnitSet) -> str:
    """Return what each supply gives; one that gives nothing says so, one that is fed too."""
    return ", ".join(
        f"{units.text(abs(flow), 'flow')} {'from' if flow > 0.0 else 'run into'} {tag}"
        if flow
        else f"nothing from {tag}"
        for tag, flow in shares
    )


def _dry(tags: Sequence[str]) -> str:
    return f"{_first(tags)} {'runs' if len(tags) == 1 else 'run'} dry"


def _beyond(row: ScenarioRow, units: UnitSet) -> str:
    passing = [
        f"{units.text(one.flow, 'flow')} pass {one.device}, whose curve {one.side} "
        f"{units.text(one.end, 'flow')}"
        for one in row.beyond
    ]
    return f"{_first(passing)}: flows, densities and times of this row are not to be relied on"


def _first(texts: Sequence[str]) -> str:
    more = f" and {len(texts) - MOST_NAMED} more" if len(texts) > MOST_NAMED else ""
    return ", ".join(texts[:MOST_NAMED]) + more
