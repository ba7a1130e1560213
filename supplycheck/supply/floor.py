"""How far mains can be lowered: not until less than nothing is left where their water is taken over.

A pump may be strong enough to carry the demand from a main without pressure, or from less than that by the
numbers. A main has no such pressure to give, so it does not count as margin. A tank is not lowered by a bad
day of a main; what a pump has to spare behind it stays margin.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Final

from supplycheck.model import Project
from supplycheck.network.records import Solution
from supplycheck.supply.shares import SourceShare
from supplycheck.supply.sources import NodeSupply

ROUND_OFF: Final = 1.0
"""Pressure below nothing that is not told [Pa]."""


@dataclass(frozen=True, slots=True)
class Floor:
    """The ``node`` at which the demand by its numbers leaves less than nothing, by ``lack`` [Pa]."""

    node: str
    lack: float


def floor_of(
    project: Project,
    solution: Solution,
    by_node: Mapping[str, NodeSupply],
    shares: Sequence[SourceShare],
) -> Floor | None:
    """Return where the demand ``solution`` asks less than nothing of a main, or ``None``.

    Looked at are the nodes of mains that give water, and where all sources are mains the suction of every
    pump that runs.
    """
    nodes = [share.node for share in shares if share.flow > 0.0 and by_node[share.node].tank is None]
    if len(nodes) == len(shares):
        pumps = {one.tag for one in project.system.devices if one.kind == "pump"}
        flows = dict(zip(solution.pipe_tags, solution.pipe_flow, strict=True))
        nodes += [
            pipe.start
            for pipe in project.system.pipes
            if pumps.intersection(pipe.devices) and flows[pipe.tag] > 0.0
        ]
    if not nodes:
        return None
    left = {node: float(solution.pressure[solution.node(node)]) for node in nodes}
    worst = min(left, key=lambda node: left[node])
    return Floor(worst, -left[worst]) if left[worst] < -ROUND_OFF else None
