"""The reduction is exact: the same answer on every pipe as without it."""

from __future__ import annotations

import numpy as np
import pytest
from network_systems import network, node, pipe, random_load, random_system, supply, system

from supplycheck.network import LoadCase, solve, solve_demand
from supplycheck.network.reduce import reduce_links


def unreduced(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(
        solve, "reduce_links", lambda links, keep, shut: reduce_links(links, np.ones_like(keep), shut)
    )


@pytest.mark.parametrize("law", ["hazen-williams", "darcy"])
@pytest.mark.parametrize("kind", ["tree", "loop", "grid"])
def test_equal_to_the_whole_network(kind: str, law: str, monkeypatch: pytest.MonkeyPatch) -> None:
    for seed in range(12):
        rng = np.random.default_rng(seed)
        made_system = random_system(rng, kind, int(rng.integers(6, 70)))
        made = network(made_system, law)
        load, required = random_load(rng, made_system, 5)
        reduced = solve_demand(made, load, required, [supply()])
        with monkeypatch.context() as patch:
            unreduced(patch)
            whole = solve_demand(made, load, required, [supply()])
        scale = np.abs(whole.pipe_flow).max()
        assert reduced.pipe_flow == pytest.approx(whole.pipe_flow, abs=1e-9 * scale, rel=1e-9)
        assert reduced.pressure == pytest.approx(whole.pressure, rel=1e-9, abs=1e-3)
        assert reduced.friction == pytest.approx(whole.friction, rel=1e-8, abs=1e-3)
        assert reduced.governing == whole.governing


def test_a_grid_shrinks_to_its_open_part() -> None:
    rng = np.random.default_rng(0)
    made = network(random_system(rng, "grid", 400, heads=1.0))
    keep = np.zeros(len(made.node_tags), dtype=bool)
    keep[[0, 37]] = True
    reduced = reduce_links(made.links, keep)
    assert len(reduced.links) < 0.2 * len(made.links)
    assert reduced.links.resistance.sum() <= made.links.resistance.sum()


def test_rings_and_dead_branches_without_use_vanish() -> None:
    made = network(
        system(
            [node(tag) for tag in ("S", "A", "B", "C", "D", "E", "F")],
            [
                pipe("1", "S", "A", 5, 0.05),
                pipe("2", "A", "B", 5, 0.05),
                pipe("3", "C", "B", 5, 0.05),
                pipe("4", "C", "D", 5, 0.05),
                pipe("5", "B", "D", 5, 0.05),
                pipe("6", "A", "E", 5, 0.05),
                pipe("7", "F", "E", 5, 0.05),
            ],
        )
    )
    solution = solve_demand(made, LoadCase((), {"E": 0.01}), {"E": 1e5}, [supply()])
    flow = dict(zip(solution.pipe_tags, solution.pipe_flow, strict=True))
    assert flow == pytest.approx({"1": 0.01, "2": 0, "3": 0, "4": 0, "5": 0, "6": 0.01, "7": 0})
    at_a = solution.pressure[solution.node("A")]
    assert [solution.pressure[solution.node(tag)] for tag in "BCD"] == pytest.approx([at_a] * 3)
