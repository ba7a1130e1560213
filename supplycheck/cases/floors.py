"""Margins of many cases that count: no main is lowered below nothing for the sake of a pump."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

from supplycheck.cases.ground import Ground
from supplycheck.cases.loads import Draws, required_of
from supplycheck.model import DemandCase
from supplycheck.network import DemandSummary, solve_demand
from supplycheck.supply.floor import floor_of, pumps_of


def watched(ground: Ground) -> tuple[str, ...]:
    """Return the nodes where nothing less than no pressure may be left: those of mains, and suctions."""
    mains = [one.node for one in ground.curves if one.tank is None]
    if not mains:
        return ()
    return tuple(dict.fromkeys([*mains, *(pipe.start for pipe, _ in pumps_of(ground.project))]))


def counted(
    ground: Ground, cases: Sequence[DemandCase], summaries: Sequence[DemandSummary]
) -> list[DemandSummary]:
    """Return ``summaries`` with the shift that counts as margin in place of that by the numbers.

    Cases with little left at a watched node are solved in full for it, since it matters which pumps run.
    """
    project = ground.project
    by_node = {one.node: one for one in ground.curves}
    before = [sum(max(one.values, default=0.0) for one in devices) for _, devices in pumps_of(project)]
    draws, policy = Draws.of(project), project.criteria.velocity_pressure
    found = []
    for case, summary in zip(cases, summaries, strict=True):
        if summary.lowest < max(before, default=0.0):
            load, need = draws.load(case), required_of(case)
            solution = solve_demand(ground.network, load, need, ground.sources, velocity_pressure=policy)
            floor = floor_of(project, solution, by_node)
            if floor is not None:
                summary = replace(summary, shift=summary.shift - floor.lack)
        found.append(summary)
    return found
