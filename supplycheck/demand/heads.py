"""What each head needs: flow by density over its own floor area, and the minimum pressures.

References
----------
.. [1] NFPA 13 (2022), density/area method: every head of the design area discharges at least the density
   over its own area and at least its minimum pressure (from memory; the published practice item with
   26.0 gpm at 130 ft² states the same).
.. [2] EN 12845 (2015), 13.4: minimum pressure at the head by hazard class (from memory).
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from supplycheck.errors import DomainError
from supplycheck.model import Node, Project, Sprinkler

Governing = Literal["density", "listing", "minimum pressure"]
FloatArray = NDArray[np.float64]


@dataclass(frozen=True, slots=True, eq=False)
class Heads:
    """All heads of the system as parallel sequences: areas [m²] twice, flows [m³/s], pressures [Pa]."""

    nodes: tuple[Node, ...]
    tags: tuple[str, ...]
    area: FloatArray
    areas: tuple[float, ...]
    flow: tuple[float, ...]
    pressure: tuple[float, ...]
    by: tuple[str, ...]

    def __len__(self) -> int:
        return len(self.tags)


def floor_area(node: Node, kind: Sprinkler | None) -> float:
    """Return the floor area [m²] of a head: its own, else the coverage of its type.

    Raises
    ------
    DomainError
        Where neither is given, or the area is not a positive number.
    """
    area = node.area if node.area is not None else (kind.coverage_area if kind else None)
    if area is None:
        raise DomainError(
            f"head {node.tag}: no floor area is known, so density gives no flow; "
            "give its area, or the coverage of its sprinkler type"
        )
    if not (math.isfinite(area) and area > 0):
        raise DomainError(f"head {node.tag}: its floor area must be greater than zero")
    return area


def required_at_head(project: Project, node: Node) -> tuple[float, float, Governing]:
    """Return what a head needs when it is part of the design area.

    The flow by density is density × the head's own area; the pressure is the largest of (flow/K)², the
    minimum of its listing and the general minimum of the criteria; the flow is then K√pressure.

    Returns
    -------
    tuple
        Required flow [m³/s], required pressure [Pa], and which of ``"density"``, ``"minimum pressure"``
        and ``"listing"`` governs (the first named where they are equal).

    Raises
    ------
    DomainError
        Where the node is no head, or its K-factor or its floor area is missing.
    """
    kinds = {kind.tag: kind for kind in project.system.sprinklers}
    return _required(project, node, kinds)


def _required(project: Project, node: Node, kinds: dict[str, Sprinkler]) -> tuple[float, float, Governing]:
    if node.kind != "sprinkler":
        raise DomainError(f"node {node.tag} is a {node.kind}, not a sprinkler: no density applies to it")
    kind = kinds.get(node.sprinkler) if node.sprinkler is not None else None
    k_factor = node.k_factor if node.k_factor is not None else (kind.k_factor if kind else None)
    if k_factor is None or not k_factor > 0:
        raise DomainError(
            f"head {node.tag}: no K-factor greater than zero; give it or name a sprinkler type"
        )
    flow = project.criteria.density * floor_area(node, kind)
    listing = max(kind.minimum_pressure if kind else 0.0, node.minimum_pressure or 0.0)
    choices: tuple[tuple[Governing, float], ...] = (
        ("density", (flow / k_factor) ** 2),
        ("minimum pressure", project.criteria.minimum_pressure),
        ("listing", listing),
    )
    by, pressure = max(choices, key=lambda choice: choice[1])
    return (flow if by == "density" else k_factor * math.sqrt(pressure)), pressure, by


def all_heads(project: Project) -> Heads:
    """Return every head of the system with what it needs.

    Raises
    ------
    DomainError
        Where there is no head, or a head lacks its K-factor or its floor area.
    """
    nodes = tuple(node for node in project.system.nodes if node.kind == "sprinkler")
    if not nodes:
        raise DomainError(
            "the system has no sprinkler, so no design area can be formed; add sprinkler nodes"
        )
    kinds = {kind.tag: kind for kind in project.system.sprinklers}
    needs = [_required(project, node, kinds) for node in nodes]
    areas = [floor_area(node, kinds.get(node.sprinkler or "")) for node in nodes]
    return Heads(
        nodes,
        tuple(node.tag for node in nodes),
        np.array(areas, dtype=np.float64),
        tuple(areas),
        tuple(need[0] for need in needs),
        tuple(need[1] for need in needs),
        tuple(need[2] for need in needs),
    )
