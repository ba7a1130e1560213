"""The small graph searches against the library's, which serve above that size (scipy.sparse.csgraph)."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.sparse import coo_array
from scipy.sparse.csgraph import breadth_first_order, connected_components

from supplycheck.network.graphs import parts_of, spread_from


@pytest.mark.parametrize("seed", range(40))
def test_parts_and_spread(seed: int) -> None:
    rng = np.random.default_rng(seed)
    size = int(rng.integers(1, 600))
    links = int(rng.integers(0, 2 * size))
    start, end = rng.integers(0, size, links), rng.integers(0, size, links)
    graph = coo_array((np.ones(links), (start, end)), (size, size)).tocsr()
    count, label = parts_of(start, end, size)
    rival_count, rival = connected_components(graph, directed=False)
    assert count == rival_count
    assert len(set(zip(label.tolist(), rival.tolist(), strict=True))) == count
    root = int(rng.integers(0, size))
    reached, before = spread_from(start, end, np.array([root]), size)
    expected = breadth_first_order(graph, root, directed=False, return_predecessors=False)
    assert set(reached.tolist()) == set(expected.tolist())
    joined = {frozenset(pair) for pair in zip(start.tolist(), end.tolist(), strict=True)}
    for node in reached.tolist():
        assert before[node] == -1 if node == root else frozenset((node, int(before[node]))) in joined
    assert (before[np.setdiff1d(np.arange(size), reached)] == -1).all()
