"""Fittings from geometry: which turn or tee is charged to which pipe.

At a node where two pipes meet, a turn of 22.5° to 67.5° is a 45° elbow and a sharper one a 90° elbow; it
is charged to the smaller pipe (the smaller outlet of a reducing elbow), between equal ones to the one
farther from the supply. Where three or more meet, or two and an outlet, it is a tee or cross:

- where all water for the node comes through one pipe, each other pipe that does not lead straight on (of
  several the straightest does) is charged the tee at its own size (so the tee on top of a riser nipple goes
  to the branch lines, that at its bottom to the riser nipple, and that of a feed main to the cross main);
- in a loop, where water may come from more than one side, the pipes of a straight run are not charged
  and each leg is charged the tee at its own size; where two runs cross, the smaller one counts as legs,
  between equal ones that farther from the supply; without a straight run all but the largest are charged.

The fitting into which a head screws is not charged. Vertical pieces count through elevation.

References
----------
.. [1] NFPA 13 (2022), rules on what to include with each fitting (from memory, not verified).
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from itertools import combinations
from typing import Final

from supplycheck.model import Node
from supplycheck.project.drafts import DraftPipe
from supplycheck.project.faults import FaultList, listed
from supplycheck.project.graph import neighbours, tree_from

STRAIGHT: Final = math.cos(math.radians(22.5))
HALF_TURN: Final = math.cos(math.radians(67.5))

Vector = tuple[float, float, float]


@dataclass(frozen=True, slots=True)
class Charge:
    """A fitting charged to pipe number ``pipe`` for what happens at ``node``."""

    pipe: int
    fitting: str
    node: str


def _direction(a: Node, b: Node) -> Vector | None:
    """Return the unit vector from ``a`` to ``b``; ``None`` where it cannot be known."""
    dz = b.elevation - a.elevation
    if a.x is None or a.y is None or b.x is None or b.y is None:
        return None
    dx, dy = b.x - a.x, b.y - a.y
    length = math.sqrt(dx * dx + dy * dy + dz * dz)
    return (dx / length, dy / length, dz / length) if length > 0 else None


def _cosine(a: Vector, b: Vector) -> float:
    """Return the cosine of the turn of water that comes in along ``a`` and leaves along ``b``.

    Both vectors point away from the node.
    """
    return -(a[0] * b[0] + a[1] * b[1] + a[2] * b[2])


@dataclass(frozen=True, slots=True)
class _Leg:
    pipe: int
    away: Vector
    bore: float
    depth: int


def _elbow(legs: Sequence[_Leg], cosine: float, node: str) -> list[Charge]:
    if cosine > STRAIGHT:
        return []
    charged = min(legs, key=lambda leg: (leg.bore, -leg.depth))
    return [Charge(charged.pipe, "elbow 45" if cosine > HALF_TURN else "elbow 90", node)]


def _tee_from(incoming: _Leg, legs: Sequence[_Leg], node: str) -> list[Charge]:
    onward = [leg for leg in legs if leg is not incoming]
    run = max(onward, key=lambda leg: (_cosine(incoming.away, leg.away), leg.bore))
    straight = _cosine(incoming.away, run.away) > STRAIGHT
    return [Charge(leg.pipe, "tee", node) for leg in onward if leg is not run or not straight]


def _tee_in_loop(legs: Sequence[_Leg], node: str) -> list[Charge]:
    runs = [pair for pair in combinations(legs, 2) if _cosine(pair[0].away, pair[1].away) > STRAIGHT]
    if runs:
        largest = max(runs, key=lambda pair: (pair[0].bore + pair[1].bore, -min(leg.depth for leg in pair)))
        run = {leg.pipe for leg in largest}
    else:
        run = {max(legs, key=lambda leg: (leg.bore, -leg.depth)).pipe}
    return [Charge(leg.pipe, "tee", node) for leg in legs if leg.pipe not in run]


def _charges_at(node: Node, legs: Sequence[_Leg], incoming: int | None) -> list[Charge]:
    outlet = node.kind in ("sprinkler", "hose", "hydrant", "outlet")
    if len(legs) < 2:
        return []
    if len(legs) == 2:
        cosine = _cosine(legs[0].away, legs[1].away)
        if not outlet:
            return _elbow(legs, cosine, node.tag)
        if cosine > STRAIGHT:
            return []
        farther = max(legs, key=lambda leg: leg.depth)
        return [Charge(farther.pipe, "tee", node.tag)]
    source = next((leg for leg in legs if leg.pipe == incoming), None)
    return _tee_from(source, legs, node.tag) if source is not None else _tee_in_loop(legs, node.tag)


def infer(
    nodes: Sequence[Node], pipes: Sequence[DraftPipe], bores: Sequence[float], faults: FaultList
) -> list[Charge]:
    """Return the fittings that follow from geometry, for pipes that ask for it.

    ``bores`` [m] stand in the order of ``pipes``. Nodes without coordinates are noted as faults.
    """
    index = {node.tag: number for number, node in enumerate(nodes)}
    ends = [(index[pipe.start], index[pipe.end]) for pipe in pipes]
    directions = [_direction(nodes[a], nodes[b]) for a, b in ends]
    unknown = [pipe for pipe, way in zip(pipes, directions, strict=True) if way is None and pipe.infer]
    if unknown:
        tags = listed([pipe.tag for pipe in unknown])
        faults.add(
            unknown[0].place,
            "the direction of a pipe is not known, so that its fittings cannot be inferred",
            found=f"{len(unknown)} pipes: {tags}",
            allowed="coordinates x and y at both ends, and two different points",
            remedy='fill in the coordinates, or set fittings = "as written"',
        )
        return []
    tree = tree_from(len(nodes), ends, [n for n, node in enumerate(nodes) if node.kind == "supply"])
    around = neighbours(len(nodes), ends)
    charges: list[Charge] = []
    for number, node in enumerate(nodes):
        legs = []
        for pipe, other in around[number]:
            way = directions[pipe]
            if way is None:
                continue
            away = way if ends[pipe][0] == number else (-way[0], -way[1], -way[2])
            legs.append(_Leg(pipe, away, bores[pipe], tree.depth[other]))
        incoming = tree.parent[number] if tree.sole[number] else None
        charges += [charge for charge in _charges_at(node, legs, incoming) if pipes[charge.pipe].infer]
    return charges
