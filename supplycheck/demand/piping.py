"""Reads from the pipes which heads follow one another along a branch line, and where a main passes.

Common practice, no source: a head on a drop or sprig belongs to the point of the branch line that it hangs
from; a branch line runs on as long as its pipes run straight; a main or a riser nipple that joins between
two heads divides the line in two sides.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Final

from supplycheck.model import Node, Pipe, System

STRAIGHT: Final = math.cos(math.radians(15))
"""Two pipes run straight on when they turn by less than 15° in plan."""

SHORT_ARM: Final = 0.65
"""Longest horizontal arm [m] from a tee to a head that still hangs from the line (24 in, rounded up)."""

PLAN_TOLERANCE: Final = 0.02
"""Points closer than this in plan [m] stand above one another."""

LINE_ROLES: Final = frozenset({"branch line", "pipe"})


@dataclass(frozen=True, slots=True)
class Link:
    """Two heads that follow one another: row numbers of the heads, and what lies between them.

    ``crossing`` says that another pipe (a main, a riser nipple) joins between them, ``bent`` that the
    line turns between them.
    """

    first: int
    second: int
    crossing: bool
    bent: bool


@dataclass(frozen=True, slots=True)
class Piping:
    """Links between heads, and for each head how many pipes leave its line point without meeting a head."""

    links: tuple[Link, ...]
    open_ends: tuple[int, ...]


@dataclass(frozen=True, slots=True)
class _Graph:
    nodes: dict[str, Node]
    pipes: dict[str, list[tuple[Pipe, str]]]

    def direction(self, start: str, end: str) -> tuple[float, float] | None:
        """Unit vector in plan from ``start`` to ``end``; None where unknown or vertical."""
        a, b = self.nodes.get(start), self.nodes.get(end)
        if a is None or b is None or a.x is None or a.y is None or b.x is None or b.y is None:
            return None
        dx, dy = b.x - a.x, b.y - a.y
        length = math.hypot(dx, dy)
        return (dx / length, dy / length) if length > PLAN_TOLERANCE else None

    def distance(self, start: str, end: str) -> float:
        """Distance in plan [m]; infinite where a coordinate is missing."""
        a, b = self.nodes.get(start), self.nodes.get(end)
        if a is None or b is None or a.x is None or a.y is None or b.x is None or b.y is None:
            return math.inf
        return math.hypot(b.x - a.x, b.y - a.y)


def _graph(system: System) -> _Graph:
    pipes: dict[str, list[tuple[Pipe, str]]] = {node.tag: [] for node in system.nodes}
    for pipe in system.pipes:
        pipes.setdefault(pipe.start, []).append((pipe, pipe.end))
        pipes.setdefault(pipe.end, []).append((pipe, pipe.start))
    return _Graph({node.tag: node for node in system.nodes}, pipes)


def _straight(a: tuple[float, float] | None, b: tuple[float, float] | None) -> bool:
    return a is not None and b is not None and a[0] * b[0] + a[1] * b[1] >= STRAIGHT


def _hangs(graph: _Graph, node: str, pipe: Pipe, other: str, came_by: Pipe | None) -> bool:
    """Say whether ``node`` hangs from ``other`` by ``pipe``: a drop, a sprig, a short arm off a tee."""
    if pipe.role == "drop" or graph.distance(node, other) <= PLAN_TOLERANCE:
        return pipe.role in LINE_ROLES or pipe.role == "drop"
    if came_by is not None or pipe.role != "pipe" or graph.distance(node, other) > SHORT_ARM:
        return False
    rest = [graph.direction(other, end) for through, end in graph.pipes[other] if through is not pipe]
    return any(
        a is not None and b is not None and _straight(a, (-b[0], -b[1]))
        for i, a in enumerate(rest)
        for b in rest[i + 1 :]
    )


def _line_points(graph: _Graph, heads: tuple[Node, ...]) -> tuple[list[str], set[str]]:
    """Return the point of the branch line that each head hangs from, and the nodes in between."""
    points: list[str] = []
    hanging: set[str] = set()
    for head in heads:
        node, came_by = head.tag, None
        while True:
            onward = [(pipe, end) for pipe, end in graph.pipes[node] if pipe is not came_by]
            if len(onward) != 1 or (node != head.tag and graph.nodes[node].kind == "sprinkler"):
                break
            pipe, end = onward[0]
            if end not in graph.nodes or not _hangs(graph, node, pipe, end, came_by):
                break
            hanging.add(node)
            node, came_by = end, pipe
        points.append(node)
    return points, hanging


def _onward(
    graph: _Graph,
    node: str,
    ways: list[tuple[Pipe, str]],
    heading: tuple[float, float] | None,
) -> tuple[Pipe, str] | None:
    """Return the pipe by which a branch line runs straight on through ``node``, or None."""
    lines = [(pipe, end) for pipe, end in ways if pipe.role in LINE_ROLES]
    for pipe, end in lines:
        if _straight(heading, graph.direction(node, end)):
            return pipe, end
    unknown = [(p, e) for p, e in lines if p.role == "branch line" and graph.direction(node, e) is None]
    return unknown[0] if len(unknown) == 1 and len(lines) == 1 else None


def _walk(
    graph: _Graph, start: str, first: tuple[Pipe, str], points: dict[str, int], hanging: set[str]
) -> tuple[int, bool, bool] | None:
    """Follow a line from ``start`` to the next head: its row number, crossing, bent; None without one."""
    pipe, node = first
    heading = graph.direction(start, node)
    crossing = bent = False
    seen = {start}
    while node not in points:
        if node in seen or node not in graph.pipes:
            return None
        seen.add(node)
        ways = [(p, e) for p, e in graph.pipes[node] if p is not pipe and e not in hanging]
        step = _onward(graph, node, ways, heading)
        if step is None and len(ways) == 1 and ways[0][0].role in LINE_ROLES:
            step, bent = ways[0], bent or graph.direction(node, ways[0][1]) is not None
        if step is None:
            return None
        crossing = crossing or len(ways) > 1
        heading = graph.direction(node, step[1]) or heading
        pipe, node = step
    return (points[node], crossing, bent) if node not in seen else None


def read_piping(system: System, heads: tuple[Node, ...]) -> Piping:
    """Return which heads follow one another along the pipes.

    Heads that hang from the same point count as neighbours of each other's neighbours; the link names the
    first of them.
    """
    graph = _graph(system)
    names, hanging = _line_points(graph, heads)
    points: dict[str, int] = {}
    for row, name in enumerate(names):
        points.setdefault(name, row)
    links: dict[tuple[int, int], Link] = {}
    open_ends = [0] * len(heads)
    for name, row in points.items():
        for pipe, end in graph.pipes[name]:
            if end in hanging:
                continue
            met = _walk(graph, name, (pipe, end), points, hanging) if pipe.role in LINE_ROLES else None
            if met is None:
                open_ends[row] += 1
                continue
            pair = (min(row, met[0]), max(row, met[0]))
            found = Link(*pair, met[1], met[2])
            known = links.get(pair)
            if known is None or (known.crossing, known.bent) > (found.crossing, found.bent):
                links[pair] = found
    for row, name in enumerate(names):
        if points[name] != row:
            links[points[name], row] = Link(points[name], row, crossing=False, bent=False)
            open_ends[row] = open_ends[points[name]]
    return Piping(tuple(links.values()), tuple(open_ends))
