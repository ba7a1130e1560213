"""How nodes and pipes hang together: which pipes alone lead to the supply, what is cut off."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Tree:
    """A depth-first view of the system from its supplies, by node index.

    ``order`` is the rank at which a node is met (−1: cut off), ``parent`` the pipe through which it was met
    (−1 at a supply), ``sole`` whether all water for the node must come through that pipe, ``depth`` the
    number of pipes to the nearest supply.
    """

    order: list[int]
    parent: list[int]
    sole: list[bool]
    depth: list[int]


def neighbours(count: int, pipes: Sequence[tuple[int, int]]) -> list[list[tuple[int, int]]]:
    """Return for each node the pipes at it with the node at their other end."""
    found: list[list[tuple[int, int]]] = [[] for _ in range(count)]
    for number, (a, b) in enumerate(pipes):
        found[a].append((number, b))
        found[b].append((number, a))
    return found


def _depths(around: list[list[tuple[int, int]]], roots: Sequence[int]) -> list[int]:
    depth = [-1] * len(around)
    ring = list(dict.fromkeys(roots))
    for root in ring:
        depth[root] = 0
    while ring:
        beyond = []
        for node in ring:
            for _, other in around[node]:
                if depth[other] < 0:
                    depth[other] = depth[node] + 1
                    beyond.append(other)
        ring = beyond
    return depth


def tree_from(count: int, pipes: Sequence[tuple[int, int]], roots: Sequence[int]) -> Tree:
    """Return the view from the supplies ``roots``. Several supplies count as joined to each other.

    The bridges are found with the lowest rank that can be reached (Tarjan 1974), without recursion.
    """
    around = neighbours(count, pipes)
    order, low = [-1] * count, [0] * count
    parent, sole = [-1] * count, [False] * count
    rank = 0
    root_set = set(roots)
    for root in roots:
        if order[root] >= 0:
            continue
        order[root] = low[root] = rank
        rank += 1
        stack = [(root, iter(around[root]))]
        while stack:
            node, rest = stack[-1]
            for number, other in rest:
                if number == parent[node]:
                    continue
                if order[other] < 0:
                    parent[other] = number
                    # another supply is as good as the first one: water may come from there
                    order[other], low[other] = rank, 0 if other in root_set else rank
                    rank += 1
                    stack.append((other, iter(around[other])))
                    break
                low[node] = min(low[node], order[other])
            else:
                stack.pop()
                if stack:
                    above = stack[-1][0]
                    low[above] = min(low[above], low[node])
                    sole[node] = low[node] == order[node]
    return Tree(order, parent, sole, _depths(around, roots))


def islands(count: int, pipes: Sequence[tuple[int, int]], reached: Sequence[int]) -> list[list[int]]:
    """Return the groups of nodes that hang together but are not ``reached`` (rank −1)."""
    around = neighbours(count, pipes)
    seen = [rank >= 0 for rank in reached]
    groups = []
    for start in range(count):
        if seen[start]:
            continue
        seen[start] = True
        group, stack = [], [start]
        while stack:
            node = stack.pop()
            group.append(node)
            for _, other in around[node]:
                if not seen[other]:
                    seen[other] = True
                    stack.append(other)
        groups.append(sorted(group))
    return groups
