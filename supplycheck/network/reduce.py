"""Exact reduction of a network before it is solved.

Two steps alternate until neither changes anything: links that end at a node where nothing is drawn carry
nothing and are dropped, and chains of links through nodes where nothing is drawn carry one flow and are
merged into one link whose loss is the sum. Nothing is approximated; the answer is put back on every
link of the original by :mod:`supplycheck.network.restore`.

References
----------
.. [1] Simpson, A., Elhay, S. and Alexander, B. (2014). Forest-core partitioning algorithm for speeding
   up analysis of water distribution systems. J. Water Resour. Plann. Manage. 140, 435–443.
.. [2] Deuerlein, J., Elhay, S. and Simpson, A. (2016). Fast graph matrix partitioning algorithm for
   solving the water distribution system equations. J. Water Resour. Plann. Manage. 142, 04015037.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

from supplycheck.network.links import BoolArray, Links, sums
from supplycheck.network.records import FloatArray, IntArray

FEW: Final = 50
"""Chains are merged where more than one node in this many lies inside one."""


@dataclass(frozen=True, slots=True, eq=False)
class Reduced:
    """A reduced network between the same node rows, and where its links came from.

    Link ``i`` of the original is part of link ``part[i]`` of ``links`` (−1: dropped, carries nothing)
    and runs with it (``sign`` 1), against it (−1), or carries nothing (0).
    """

    links: Links
    part: IntArray
    sign: FloatArray

    def flow(self, reduced_flow: FloatArray) -> FloatArray:
        """Return the flow in each original link [m³/s] from those of the reduced links."""
        if not len(reduced_flow):
            return np.zeros(len(self.part))
        return self.sign * reduced_flow[np.maximum(self.part, 0)]

    def then(self, later: Reduced) -> Reduced:
        """Return this reduction followed by ``later``, which reduced its links further."""
        inside = self.part >= 0
        row = np.where(inside, self.part, 0)
        part = np.where(inside, later.part[row], -1) if len(later.part) else np.full_like(self.part, -1)
        sign = self.sign * later.sign[row] if len(later.sign) else np.zeros_like(self.sign)
        return Reduced(later.links, part, np.where(part >= 0, sign, 0.0))


def reduce_links(links: Links, keep: BoolArray, shut: BoolArray | None = None) -> Reduced:
    """Return the exact reduction of ``links``.

    Parameters
    ----------
    links : Links (m,) between node rows.
    keep : (n,) nodes that must stay: supplies, open outlets, fixed outflows, nodes asked about. The ends
        of pressure-reducing valves stay too.
    shut : (m,) links that are closed, or ``None``.
    """
    keep = keep.copy()
    for link, law in links.devices:
        if law.setting is not None and not (shut is not None and shut[link]):
            keep[[links.start[link], links.end[link]]] = True
    rows = np.arange(len(links)) if shut is None or not shut.any() else np.flatnonzero(~shut)
    whole = _identity(links, rows)
    while True:
        dropped = _drop_leaves(whole, keep)
        merged = _merge_chains(dropped, keep)
        if len(merged.links) == len(whole.links):
            return merged
        whole = merged


def _identity(links: Links, rows: IntArray) -> Reduced:
    if len(rows) == len(links):
        return Reduced(links, rows, np.ones(len(rows)))
    part = np.full(len(links), -1)
    part[rows] = np.arange(len(rows))
    return Reduced(links.take(rows), part, np.where(part >= 0, 1.0, 0.0))


def _degree(links: Links, nodes: int) -> IntArray:
    return np.bincount(links.start, minlength=nodes) + np.bincount(links.end, minlength=nodes)


def _drop_leaves(whole: Reduced, keep: BoolArray) -> Reduced:
    """Drop links that return to their own node, and those to nodes with nothing beyond."""
    links = whole.links
    leaf = (_degree(links, len(keep)) == 1) & ~keep
    gone = leaf[links.start] | leaf[links.end] | (links.start == links.end)
    if not gone.any():
        return whole
    return whole.then(_identity(links, np.flatnonzero(~gone)))


def _merge_chains(whole: Reduced, keep: BoolArray) -> Reduced:
    links, nodes = whole.links, len(keep)
    fixed = keep.copy()
    marked = links.marked()
    fixed[links.start[marked]] = True
    fixed[links.end[marked]] = True
    inner = (_degree(links, nodes) == 2) & ~fixed
    if int(inner.sum()) * FEW <= len(links):
        return whole
    return whole.then(_chains(links, inner))


def _chains(links: Links, inner: BoolArray) -> Reduced:
    """Return the links with every chain through ``inner`` nodes made one link.

    Each link is walked both ways: walk ``i`` from its start to its end, walk ``count + i`` back. At an
    inner node a walk goes on along the other link there; where it ends says which chain it is in.
    """
    count = len(links)
    ends = np.concatenate([links.start, links.end])
    at_inner = np.flatnonzero(inner[ends])
    pairs = at_inner[np.argsort(ends[at_inner], kind="stable")].reshape(-1, 2)
    onward = np.arange(2 * count)
    onward[(pairs + count) % (2 * count)] = pairs[:, ::-1]
    last = _ends_of(onward)
    ahead, back = last[:count], last[count:]
    live = onward[ahead] == ahead  # a ring of inner nodes never ends, and carries nothing
    way, against = np.minimum(ahead, back), np.maximum(ahead, back)
    is_way = np.zeros(2 * count, dtype=bool)
    is_way[way[live]] = True
    live_chains = int(is_way.sum())
    part = np.where(live, np.cumsum(is_way)[way] - 1, -1)
    come_from = np.empty(live_chains, dtype=np.int64)
    come_from[part[live]] = against[live]
    arrives = np.concatenate([links.end, links.start])
    merged = Links(
        start=arrives[come_from],
        end=arrives[is_way],
        resistance=sums(part[live], links.resistance[live], live_chains),
        exponent=links.exponent,
        minor=sums(part[live], links.minor[live], live_chains),
        least=sums(part[live], links.least[live], live_chains),
        area=_smallest(part[live], links.area[live], live_chains),
        one_way=np.bincount(part[live], links.one_way[live], minlength=live_chains) > 0,
        devices=tuple((int(part[link]), law) for link, law in links.devices if part[link] >= 0),
        terms=links.terms.merged(part) if links.terms is not None else None,
    )
    return Reduced(merged, part, np.where(live, np.where(ahead < back, 1.0, -1.0), 0.0))


def _smallest(part: IntArray, area: FloatArray, count: int) -> FloatArray:
    smallest = np.full(count, np.inf)
    np.minimum.at(smallest, part, area)
    return smallest


def _ends_of(onward: IntArray) -> IntArray:
    """Return where each walk that steps ``onward`` comes to rest; in a ring, some step of the ring."""
    last = onward
    for _ in range(len(onward).bit_length()):
        further = last[last]
        if np.array_equal(further, last):
            break
        last = further
    return last
