"""Demand of fixed outflows, and the pressures that nodes ask for in every case.

That every outflow runs at once, and that water leaves nowhere below the pressure of the air around it:
common practice, no source.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import replace

from supplycheck.demand.duties import DutyCase, fixed_case, merged
from supplycheck.model import DemandCase, FixedOutlet, Node
from supplycheck.model.duty import OutflowDuty

LABEL = "all fixed outflows"


def asked_at_nodes(nodes: Iterable[Node]) -> tuple[FixedOutlet, ...]:
    """Return the pressures [Pa] that nodes other than sprinklers ask for, without what they draw."""
    return tuple(
        FixedOutlet(node.tag, 0.0, node.minimum_pressure, name_of(node))
        for node in nodes
        if node.kind != "sprinkler" and node.minimum_pressure is not None
    )


def name_of(node: Node) -> str:
    """Return a node in words, by its kind.

    >>> name_of(Node("B", 0.0, kind="hose")), name_of(Node("C", 0.0))
    ('hose B', 'node C')
    """
    return f"node {node.tag}" if node.kind in ("junction", "sprinkler") else f"{node.kind} {node.tag}"


def with_asked(case: DemandCase, asked: tuple[FixedOutlet, ...]) -> DemandCase:
    """Return ``case`` with the pressures of ``asked`` required too."""
    return replace(case, outlets=merged((*case.outlets, *asked))) if asked else case


def outflow_cases(duty: OutflowDuty, nodes: Iterable[Node]) -> tuple[DutyCase, ...]:
    """Return the one case of ``duty``: all that ``nodes`` draw, and what each of them must be left.

    A node of ``duty.unstated`` is asked for 0 Pa. The flows are those of the nodes, which every case draws,
    so that the outlets add none.
    """
    bare = set(duty.unstated)
    listed = tuple(nodes)
    zero = [FixedOutlet(node.tag, 0.0, 0.0, name_of(node)) for node in listed if node.tag in bare]
    case = fixed_case(LABEL, "outflows", (*asked_at_nodes(listed), *zero))
    return (DutyCase(replace(case, with_hose=True), "outflows", True, duty.drawn),)
