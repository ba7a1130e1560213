"""Undirected graphs for :mod:`scipy.sparse.csgraph`, built without its checks of general input."""

from __future__ import annotations

from typing import Any

import numpy as np
from scipy.sparse import csr_array
from scipy.sparse.csgraph import breadth_first_order, connected_components

from supplycheck.network.records import IntArray


def one_way_graph(start: IntArray, end: IntArray, size: int) -> Any:
    """Return the adjacency of ``size`` nodes with an edge from each of ``start`` to its ``end``."""
    order = np.argsort(start)
    pointers = np.zeros(size + 1, dtype=np.int32)
    np.cumsum(np.bincount(start, minlength=size), out=pointers[1:])
    return csr_array((np.ones(len(start)), end[order].astype(np.int32), pointers), (size, size))


def two_way_graph(start: IntArray, end: IntArray, size: int) -> Any:
    """Return the adjacency of ``size`` nodes with every edge both ways."""
    return one_way_graph(np.concatenate([start, end]), np.concatenate([end, start]), size)


def parts_of(start: IntArray, end: IntArray, size: int) -> tuple[int, IntArray]:
    """Return how many connected parts there are, and the part of each of ``size`` nodes."""
    count, label = connected_components(one_way_graph(start, end, size), directed=False)
    return int(count), np.asarray(label, dtype=np.int64)


def spread_from(start: IntArray, end: IntArray, roots: IntArray, size: int) -> tuple[IntArray, IntArray]:
    """Return the nodes reached from ``roots`` and for each of ``size`` nodes the one before it on the way.

    Before a root stands −1, and before a node that is not reached. With the edges both ways a directed
    search does, which spares turning the graph round.
    """
    row, column = np.concatenate([start, np.full(len(roots), size)]), np.concatenate([end, roots])
    graph = two_way_graph(row, column, size + 1)
    reached, before = breadth_first_order(graph, size, return_predecessors=True)
    before = before[:size].astype(np.int64)
    before[(before < 0) | (before == size)] = -1
    return np.asarray(reached[1:], dtype=np.int64), before
