"""The pipe that alone feeds a node, against the definition: without it no supply reaches the node."""

from __future__ import annotations

import random
from dataclasses import replace

import pytest
from check_factory import sound

from supplycheck.checks.sizes import sole_feeds
from supplycheck.model import Node, System

PIPE = replace(sound().project.system.pipes[0], devices=())


def reached(edges: list[tuple[int, int]], roots: list[int]) -> set[int]:
    seen = set(roots)
    while True:
        more = {b for a, b in edges if a in seen} | {a for a, b in edges if b in seen}
        if more <= seen:
            return seen
        seen |= more


@pytest.mark.parametrize("seed", range(60))
def test_no_other_way_leads_to_the_node(seed: int) -> None:
    chance = random.Random(seed)
    count = chance.randint(3, 9)
    edges = [(chance.randrange(i), i) for i in range(1, count)]
    edges += [
        (i, j) for i, j in [chance.sample(range(count), 2) for _ in range(chance.choice((0, 0, 1, 2)))]
    ]
    roots = list(range(chance.choice((1, 1, 2))))
    pipes = tuple(replace(PIPE, tag=f"{row}", start=str(a), end=str(b)) for row, (a, b) in enumerate(edges))
    nodes = tuple(Node(str(i), 0.0, kind="supply" if i in roots else "junction") for i in range(count))
    found = sole_feeds(System(nodes, pipes, (), (), ()))
    for node, pipe in found.items():
        rest = [edge for row, edge in enumerate(edges) if f"{row}" != pipe.tag]
        assert int(node) not in reached(rest, roots)
    if len(edges) == count - 1 and len(roots) == 1:
        assert set(found) == {str(i) for i in range(1, count)}
