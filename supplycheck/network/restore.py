"""Heads at every node of the original from those of the reduced network and the losses of its links."""

from __future__ import annotations

import numpy as np
from scipy.sparse import csr_array
from scipy.sparse.csgraph import breadth_first_order

from supplycheck.network.links import BoolArray, Links
from supplycheck.network.records import FloatArray


def spread_heads(links: Links, head: FloatArray, known: BoolArray, loss: FloatArray) -> FloatArray:
    """Return the head at every node (n,), NaN where no open link leads to a known one.

    Parameters
    ----------
    links : Open links (m,) of the original.
    head : (n,) heads, read where ``known``.
    known : (n,) nodes of the reduced network.
    loss : (m,) loss of head from start to end of each link [Pa].
    """
    nodes, count = len(head), len(links)
    roots = np.flatnonzero(known)
    if len(roots) == nodes:
        return head.copy()
    unknown = ~(known[links.start] & known[links.end])
    rows = np.concatenate([links.start[unknown], np.full(len(roots), nodes)])
    cols = np.concatenate([links.end[unknown], roots])
    graph = csr_array((np.ones(len(rows)), (rows, cols)), (nodes + 1, nodes + 1))
    reached, before = breadth_first_order(graph, nodes, directed=False, return_predecessors=True)
    parent = before[:nodes].astype(np.int64)
    grown = (parent >= 0) & (parent < nodes)
    gain = _gain(links, loss, parent, grown, count)
    jump = np.where(grown, parent, np.arange(nodes))
    while True:
        further = jump[jump]
        if np.array_equal(further, jump):
            break
        gain = gain + gain[jump]
        jump = further
    result = np.full(nodes, np.nan)
    seen = reached[reached < nodes]
    result[seen] = head[jump[seen]] + gain[seen]
    return result


def _gain(links: Links, loss: FloatArray, parent: FloatArray, grown: BoolArray, count: int) -> FloatArray:
    """Return for each node its head less that of its parent, along one link between them."""
    nodes = len(parent)
    gain = np.zeros(nodes)
    down = grown[links.end] & (parent[links.end] == links.start)
    up = grown[links.start] & (parent[links.start] == links.end)
    gain[links.start[up]] = loss[up]
    gain[links.end[down]] = -loss[down]
    del count
    return gain
