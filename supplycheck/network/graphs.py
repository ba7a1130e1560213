"""Undirected graphs for :mod:`scipy.sparse.csgraph`, built without its checks of general input."""

from __future__ import annotations

from typing import Any, Final

import numpy as np
from scipy.sparse import csr_array

from supplycheck.network.records import IntArray

SMALL: Final = 300
"""Most nodes searched here: to load the library's graph searches takes as long as a small check."""


def one_way_graph(start: IntArray, end: IntArray, size: int) -> Any:
    """Return the adjacency of ``size`` nodes with an edge from each of ``start`` to its ``end``."""
    order = np.argsort(start, kind="stable")  # quick where whole runs are in order, as in tables
    pointers = np.zeros(size + 1, dtype=np.int32)
    np.cumsum(np.bincount(start, minlength=size), out=pointers[1:])
    return csr_array((np.ones(len(start)), end[order].astype(np.int32), pointers), (size, size))


def two_way_graph(start: IntArray, end: IntArray, size: int) -> Any:
    """Return the adjacency of ``size`` nodes with every edge both ways."""
    return one_way_graph(np.concatenate([start, end]), np.concatenate([end, start]), size)


def parts_of(start: IntArray, end: IntArray, size: int) -> tuple[int, IntArray]:
    """Return how many connected parts there are, and the part of each of ``size`` nodes."""
    if size > SMALL:
        from scipy.sparse.csgraph import connected_components

        count, label = connected_components(one_way_graph(start, end, size), directed=False)
        return int(count), np.asarray(label, dtype=np.int64)
    lowest = np.arange(size)
    while True:
        linked = np.minimum(lowest[start], lowest[end])
        lower = lowest.copy()
        np.minimum.at(lower, lowest[start], linked)
        np.minimum.at(lower, lowest[end], linked)
        lower = lower[lower]
        if np.array_equal(lower, lowest):
            break
        lowest = lower
    roots, label = np.unique(lowest, return_inverse=True)
    return len(roots), label.astype(np.int64)


def spread_from(start: IntArray, end: IntArray, roots: IntArray, size: int) -> tuple[IntArray, IntArray]:
    """Return the nodes reached from ``roots`` and for each of ``size`` nodes the one before it on the way.

    Before a root stands −1, and before a node that is not reached. With the edges both ways a directed
    search does, which spares turning the graph round.
    """
    if size <= SMALL:
        return _spread_small(start.tolist(), end.tolist(), roots.tolist(), size)
    from scipy.sparse.csgraph import breadth_first_order

    row, column = np.concatenate([start, np.full(len(roots), size)]), np.concatenate([end, roots])
    graph = two_way_graph(row, column, size + 1)
    reached, before = breadth_first_order(graph, size, return_predecessors=True)
    before = before[:size].astype(np.int64)
    before[(before < 0) | (before == size)] = -1
    return np.asarray(reached[1:], dtype=np.int64), before


def _spread_small(
    start: list[int], end: list[int], roots: list[int], size: int
) -> tuple[IntArray, IntArray]:
    beside: list[list[int]] = [[] for _ in range(size)]
    for one, other in zip(start, end, strict=True):
        beside[one].append(other)
        beside[other].append(one)
    before = [-1] * size
    reached = list(dict.fromkeys(roots))
    seen = [False] * size
    for root in reached:
        seen[root] = True
    for here in reached:
        for there in beside[here]:
            if not seen[there]:
                seen[there] = True
                before[there] = here
                reached.append(there)
    return np.array(reached, dtype=np.int64), np.array(before, dtype=np.int64)
