"""Hose streams: how much is drawn where, each allowance exactly once."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from types import MappingProxyType

from supplycheck.errors import DomainError
from supplycheck.model import Project


@dataclass(frozen=True, slots=True)
class HoseLoad:
    """One hose allowance: ``inside`` or ``outside``, its node and its flow [m³/s]."""

    name: str
    node: str
    flow: float


def hose_parts(project: Project) -> tuple[HoseLoad, ...]:
    """Return the hose allowances that are not zero, inside first.

    Raises :class:`DomainError` where an allowance has no node or a node that does not exist.
    """
    hose = project.hose
    known = {node.tag for node in project.system.nodes}
    parts = []
    for name, flow, node in (
        ("inside", hose.inside, hose.inside_node),
        ("outside", hose.outside, hose.outside_node),
    ):
        if flow < 0.0:
            raise DomainError(f"the {name} hose allowance is negative")
        if flow == 0.0:
            continue
        if node is None or node not in known:
            raise DomainError(f"the {name} hose allowance joins at no known node (found {node!r})")
        parts.append(HoseLoad(name, node, flow))
    return tuple(parts)


def hose_loads(project: Project) -> Mapping[str, float]:
    """Return the hose flow [m³/s] drawn at each node, inside and outside added where they share one."""
    loads: dict[str, float] = {}
    for part in hose_parts(project):
        loads[part.node] = loads.get(part.node, 0.0) + part.flow
    return MappingProxyType(loads)
