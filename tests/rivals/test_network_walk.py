"""The walk back from the remote head is the rival of the Newton core on trees."""

from __future__ import annotations

import numpy as np
import pytest
from network_systems import (
    K_US,
    WATER_US,
    network,
    node,
    random_load,
    random_system,
    supply,
    system,
    us_pipe,
)

from supplycheck.errors import NoSolutionError
from supplycheck.model import Device
from supplycheck.network import LoadCase, NotApplicableError, solve_demand, walk_back
from supplycheck.units import FOOT, PSI


@pytest.mark.parametrize("law", ["hazen-williams", "darcy"])
@pytest.mark.parametrize("seed", range(60))
def test_random_trees(seed: int, law: str) -> None:
    rng = np.random.default_rng(seed)
    made_system = random_system(rng, "tree", int(rng.integers(4, 40)))
    made = network(made_system, law)
    load, required = random_load(rng, made_system, 8)
    if not load.open_outlets:
        pytest.skip("no open head")
    solution = solve_demand(made, load, required, [supply()])
    walk = walk_back(made, load, required, "S")
    assert walk.supply_pressure == pytest.approx(solution.source_pressure[0], rel=1e-9)
    assert walk.supply_flow == pytest.approx(solution.source_flow[0], rel=1e-9)
    assert walk.remote == solution.governing
    for tag, pressure in walk.head_pressures:
        assert pressure == pytest.approx(solution.pressure[solution.node(tag)], rel=1e-8)


def test_steps_add_up_and_start_at_the_remote_head() -> None:
    heads = [node(f"{side}{i}", 5.0, 5.6 * K_US) for side in "ab" for i in range(3)]
    pipes = [
        us_pipe(f"{s}{i}", f"{s}{i}", f"{s}{i + 1}" if i < 2 else "T", 12, 1.38, 3)
        for s in "ab"
        for i in range(3)
    ]
    bf = Device("bf", "loss", (0.0, 0.02), (2e4, 6e4), "")
    made = network(
        system(
            [node("S"), node("T", 4.5), *heads],
            [*pipes, us_pipe("m", "T", "S", 60, 2.067, devices=("bf",))],
            [Device("bf", bf.kind, bf.flows, bf.values, "")],
        )
    )
    tags = tuple(head.tag for head in heads)
    walk = walk_back(made, LoadCase(tags), dict.fromkeys(tags, 15 * PSI), "S")
    assert walk.remote in {"a0", "b0"}
    assert walk.steps[0].start == walk.remote
    assert walk.steps[0].pressure_start == pytest.approx(15 * PSI)
    assert walk.steps[-1].end == "S"
    assert walk.steps[-1].pressure_end == walk.supply_pressure
    for before, after in zip(walk.steps, walk.steps[1:], strict=False):
        assert after.pressure_start == before.pressure_end
        assert after.flow == pytest.approx(before.flow + after.flow_added)
    for step in walk.steps:
        assert step.pressure_end == pytest.approx(
            step.pressure_start + step.friction + step.elevation + step.device
        )
    main = walk.steps[-1]
    other = main.flow - walk.steps[-2].flow
    assert main.branch_k == pytest.approx(other / main.pressure_start**0.5)
    assert main.elevation == pytest.approx(4.5 * 0.433 * PSI / FOOT)
    assert main.device > 2e4
    assert made.fluid is WATER_US


def test_does_not_apply_to_loops_cut_off_parts_and_set_pressures() -> None:
    heads = [node("A", 0.0, K_US), node("B", 0.0, K_US)]
    ends = [us_pipe("1", "S", "A", 10, 1), us_pipe("2", "A", "B", 10, 1), us_pipe("3", "B", "S", 10, 1)]
    ring = network(system([node("S"), *heads], ends))
    with pytest.raises(NotApplicableError, match="loop"):
        walk_back(ring, LoadCase(("A",)), {"A": 1e5}, "S")
    assert walk_back(ring, LoadCase(("A",), {}, ("3",)), {"A": 1e5}, "S").steps
    with pytest.raises(NotApplicableError, match="not joined"):
        walk_back(ring, LoadCase(("B",), {}, ("3", "2")), {"B": 1e5}, "S")
    valve = Device("v", "pressure-reducing valve", (), (), "", setting=2e5)
    fed = network(system([node("S"), heads[0]], [us_pipe("1", "S", "A", 10, 1, devices=("v",))], [valve]))
    with pytest.raises(NotApplicableError, match="sets a pressure"):
        walk_back(fed, LoadCase(("A",)), {"A": 1e5}, "S")


def test_lets_nothing_pass_a_check_valve_backwards() -> None:
    made = network(
        system([node("S"), node("A", 0.0, K_US)], [us_pipe("1", "A", "S", 10, 1, valve="check")])
    )
    with pytest.raises(NoSolutionError, match="no flow pass"):
        walk_back(made, LoadCase(("A",)), {"A": 1e5}, "S")
