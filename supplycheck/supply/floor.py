"""How far mains can be lowered: not until less than nothing is left where their water is taken over.

A pump may be strong enough to carry the demand from a main without pressure, or from less than that by the
numbers. A main has no such pressure to give, so it does not count as margin. A tank is not lowered by a bad
day of a main; what a pump has to spare behind it stays margin.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from typing import Final

from supplycheck.hydraulics import Curve
from supplycheck.model import Device, Pipe, Project
from supplycheck.network.records import Solution
from supplycheck.supply.sources import NodeSupply
from supplycheck.supply.states import least_flow

ROUND_OFF: Final = 1.0
"""Pressure below nothing that is not told [Pa]."""


@dataclass(frozen=True, slots=True)
class Floor:
    """The ``node`` at which the demand by its numbers leaves less than nothing, by ``lack`` [Pa]."""

    node: str
    lack: float


def floor_of(project: Project, solution: Solution, by_node: Mapping[str, NodeSupply]) -> Floor | None:
    """Return where the demand ``solution`` asks less than nothing of a main, or ``None``.

    Looked at are the nodes of mains that give water, and the suction of every pump that runs on water of
    mains alone.
    """
    given = dict(zip(solution.source_tags, solution.source_flow.tolist(), strict=True))
    least = least_flow(given)
    mains = {tag for tag, flow in given.items() if flow > least and by_node[tag].tank is None}
    tanks = {tag for tag, flow in given.items() if flow > least and by_node[tag].tank is not None}
    left = {tag: float(solution.pressure[solution.node(tag)]) for tag in sorted(mains)}
    flows = dict(zip(solution.pipe_tags, solution.pipe_flow.tolist(), strict=True))
    for pipe, before in pumps_of(project):
        flow = flows[pipe.tag]
        fed_by = _upstream(project, flows, pipe.start, least) if flow > least else set()
        if mains & fed_by and not tanks & fed_by:
            suction = float(solution.pressure[solution.node(pipe.start)]) - lost_in(before, flow)
            left[pipe.start] = min(suction, left.get(pipe.start, suction))
    if not left:
        return None
    worst = min(left, key=lambda node: left[node])
    return Floor(worst, -left[worst]) if left[worst] < -ROUND_OFF else None


def pumps_of(project: Project) -> Iterator[tuple[Pipe, tuple[Device, ...]]]:
    """Yield every pipe with a pump, and the devices that stand before its first pump."""
    devices = {one.tag: one for one in project.system.devices}
    for pipe in project.system.pipes:
        kinds = [devices[tag].kind for tag in pipe.devices]
        if "pump" in kinds:
            yield pipe, tuple(devices[tag] for tag in pipe.devices[: kinds.index("pump")])


def lost_in(devices: tuple[Device, ...], flow: float) -> float:
    """Return what ``devices`` lose together at ``flow`` [Pa], pumps gaining; reducing valves apart."""
    total = 0.0
    for device in devices:
        sign = -1.0 if device.kind == "pump" else 1.0
        if device.kind != "pressure-reducing valve" and device.flows:
            total += sign * float(Curve(device.flows, device.values).carried_on(flow)[0])
    return total


def _upstream(project: Project, flows: Mapping[str, float], node: str, least: float) -> set[str]:
    """Return the nodes from which water comes to ``node``, itself among them."""
    into: dict[str, list[str]] = {}
    for pipe in project.system.pipes:
        flow = flows[pipe.tag]
        if abs(flow) > least:
            start, end = (pipe.start, pipe.end) if flow > 0 else (pipe.end, pipe.start)
            into.setdefault(end, []).append(start)
    found, row = {node}, [node]
    for here in row:
        for before in into.get(here, ()):
            if before not in found:
                found.add(before)
                row.append(before)
    return found
