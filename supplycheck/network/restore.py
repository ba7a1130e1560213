"""Heads at every node of the original from those of the reduced network and the losses of its links."""

from __future__ import annotations

import numpy as np

from supplycheck.network.graphs import spread_from
from supplycheck.network.links import BoolArray, Links
from supplycheck.network.records import FloatArray, IntArray


def spread_heads(links: Links, head: FloatArray, known: BoolArray, loss: FloatArray) -> FloatArray:
    """Return the head at every node (n,), NaN where no open link leads to a known one.

    Parameters
    ----------
    links : Open links (m,) of the original.
    head : (n,) heads, read where ``known``.
    known : (n,) nodes of the reduced network.
    loss : (m,) loss of head from start to end of each link [Pa].
    """
    nodes = len(head)
    roots = np.flatnonzero(known)
    if len(roots) == nodes:
        return head.copy()
    unknown = ~(known[links.start] & known[links.end])
    seen, parent = spread_from(links.start[unknown], links.end[unknown], roots, nodes)
    grown = parent >= 0
    gain = _gain(links, loss, parent, grown)
    jump = np.where(grown, parent, np.arange(nodes))
    while True:
        further = jump[jump]
        if np.array_equal(further, jump):
            break
        gain = gain + gain[jump]
        jump = further
    result = np.full(nodes, np.nan)
    result[seen] = head[jump[seen]] + gain[seen]
    return result


def _gain(links: Links, loss: FloatArray, parent: IntArray, grown: BoolArray) -> FloatArray:
    """Return for each node its head less that of its parent, along one link between them."""
    nodes = len(parent)
    gain = np.zeros(nodes)
    down = grown[links.end] & (parent[links.end] == links.start)
    up = grown[links.start] & (parent[links.start] == links.end)
    gain[links.start[up]] = loss[up]
    gain[links.end[down]] = -loss[down]
    return gain
