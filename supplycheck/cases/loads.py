"""What a demand case asks of the network: what flows, and which pressures are needed."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from types import MappingProxyType

from supplycheck.model import DemandCase, Project
from supplycheck.network import LoadCase
from supplycheck.supply import hose_loads


@dataclass(frozen=True, slots=True)
class Draws:
    """What a project draws whatever its case [m³/s]: hose where a case takes it, and outflows at nodes."""

    hose: Mapping[str, float]
    fixed: Mapping[str, float]

    @classmethod
    def of(cls, project: Project) -> Draws:
        """Return the draws of ``project``; raises :class:`DomainError` where its hose joins nowhere."""
        fixed = {node.tag: node.fixed_flow for node in project.system.nodes if node.fixed_flow}
        return cls(hose_loads(project), MappingProxyType(fixed))

    def load(self, case: DemandCase) -> LoadCase:
        """Return what flows in ``case``: heads, outlets, hose, and all fixed outflows, each once."""
        flows: dict[str, float] = dict(self.hose) if case.with_hose else {}
        outlets = ((one.node, one.flow) for one in case.outlets)
        for tag, flow in (*self.fixed.items(), *case.flows, *outlets):
            flows[tag] = flows.get(tag, 0.0) + flow
        return LoadCase(case.heads, MappingProxyType(flows), case.closed_pipes)


def load_of(project: Project, case: DemandCase) -> LoadCase:
    """Return what flows in the one ``case`` of ``project``."""
    return Draws.of(project).load(case)


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
