"""What a demand case asks of the network: what flows, and which pressures are needed."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace
from types import MappingProxyType

from supplycheck.model import DemandCase, Project
from supplycheck.network import LoadCase
from supplycheck.supply import hose_loads


def load_of(project: Project, case: DemandCase) -> LoadCase:
    """Return what flows in ``case``: heads, outlets, hose, and all other fixed outflows, each once."""
    flows: dict[str, float] = dict(hose_loads(project)) if case.with_hose else {}
    drawn = [(node.tag, node.fixed_flow) for node in project.system.nodes if node.fixed_flow]
    for tag, flow in (*drawn, *case.flows, *((one.node, one.flow) for one in case.outlets)):
        flows[tag] = flows.get(tag, 0.0) + flow
    return LoadCase(case.heads, MappingProxyType(flows), case.closed_pipes)


def required_of(case: DemandCase) -> Mapping[str, float]:
    """Return the pressure [Pa] that ``case`` asks at each of its heads and outlets."""
    return {
        **dict(zip(case.heads, case.required_pressure, strict=True)),
        **{outlet.node: outlet.minimum_pressure for outlet in case.outlets},
    }


def without_hose(project: Project, case: DemandCase) -> Project:
    """Return ``project`` without its hose allowance where ``case`` does not draw it."""
    if case.with_hose:
        return project
    return replace(project, hose=replace(project.hose, inside=0.0, outside=0.0))
