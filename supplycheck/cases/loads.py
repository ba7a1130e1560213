"""What a demand case asks of the network: what flows, and which pressures are needed."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, replace
from itertools import chain
from types import MappingProxyType

from supplycheck.model import DemandCase, Project, Scenario
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
        hose = self.hose if case.with_hose else {}
        flows = added(hose.items(), self.fixed.items(), _own(case))
        return LoadCase(case.heads, flows, case.closed_pipes)

    def of_scenario(self, scenario: Scenario, case: DemandCase) -> LoadCase:
        """Return what flows in ``scenario``, which adds to what the nodes draw.

        Where it names no heads, those of ``case`` are open; where ``case`` has none and the scenario names
        no flows either, what ``case`` draws at its outlets flows.
        """
        hose = self.hose if scenario.with_hose else {}
        fixed = self.fixed if scenario.with_node_flows else {}
        asked: Iterable[tuple[str, float]] = scenario.flows
        if scenario.open_heads is None and not case.heads and not scenario.flows:
            asked = _own(case)
        heads = case.heads if scenario.open_heads is None else scenario.open_heads
        return LoadCase(heads, added(hose.items(), fixed.items(), asked), scenario.closed_pipes)


def added(*parts: Iterable[tuple[str, float]]) -> Mapping[str, float]:
    """Return the flows [m³/s] of all ``parts`` by node, added where they share one."""
    flows: dict[str, float] = {}
    for tag, flow in chain.from_iterable(parts):
        flows[tag] = flows.get(tag, 0.0) + flow
    return MappingProxyType(flows)


def _own(case: DemandCase) -> tuple[tuple[str, float], ...]:
    """Return what ``case`` itself draws beside its heads."""
    return (*case.flows, *((one.node, one.flow) for one in case.outlets))


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
