"""What must hold for every network, whatever its shape: found by search over random ones."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from network_systems import flipped, network, node, pipe, random_load, random_system, supply, system

from supplycheck.model import System
from supplycheck.network import LoadCase, Network, Solution, solve_demand, solve_operating
from supplycheck.units import PSI

QUIET = settings(
    max_examples=40,
    deadline=None,
    derandomize=True,
    suppress_health_check=[HealthCheck.too_slow, HealthCheck.data_too_large],
)
SEEDS = st.integers(0, 2**31)
KINDS = st.sampled_from(["tree", "loop", "grid"])
LAWS = st.sampled_from(["hazen-williams", "metric", "darcy"])


def made_case(seed: int, kind: str) -> tuple[System, LoadCase, dict[str, float]]:
    rng = np.random.default_rng(seed)
    made_system = random_system(rng, kind, int(rng.integers(4, 60)))
    load, required = random_load(rng, made_system)
    return made_system, load, required


def same(one: Solution, other: Solution, *, but: str = "") -> None:
    """Assert that two solutions of systems with the same node tags agree to 1e-9."""
    assert other.source_flow == pytest.approx(one.source_flow, rel=1e-9)
    assert other.source_pressure == pytest.approx(one.source_pressure, rel=1e-9)
    rows = [other.node(tag) for tag in one.node_tags]
    assert other.pressure[rows] == pytest.approx(one.pressure, rel=1e-9, abs=1e-3), but


def assert_balanced(made: Network, solution: Solution) -> None:
    """Recompute both balances from the reported arrays alone."""
    nodes = len(solution.node_tags)
    net = np.bincount(made.links.start, solution.pipe_flow, nodes)
    net -= np.bincount(made.links.end, solution.pipe_flow, nodes)
    for tag, flow in zip(solution.source_tags, solution.source_flow, strict=True):
        net[solution.node(tag)] -= flow
    assert np.abs(net + solution.outflow).max() <= 1e-9 * max(abs(solution.source_flow.sum()), 1e-6)
    fall = solution.pressure[made.links.start] - solution.pressure[made.links.end]
    loss = solution.friction + solution.elevation_loss + solution.device_loss
    assert np.nanmax(np.abs(fall - loss)) <= 1e-6 * PSI
    law, _ = made.links.friction_law()(solution.pipe_flow)
    assert solution.friction == pytest.approx(law, rel=1e-12, abs=1e-9)


@QUIET
@given(seed=SEEDS, kind=KINDS, law=LAWS)
def test_balance_and_requirement(seed: int, kind: str, law: str) -> None:
    made_system, load, required = made_case(seed, kind)
    made = network(made_system, law)
    solution = solve_demand(made, load, required, [supply()])
    assert_balanced(made, solution)
    slack = {tag: solution.pressure[solution.node(tag)] - p for tag, p in required.items()}
    assert min(slack.values()) == pytest.approx(0.0, abs=1e-3)
    assert slack[solution.governing] == min(slack.values())
    assert_balanced(made, solve_operating(made, load, [supply()]))


@pytest.mark.slow
@pytest.mark.parametrize("block", range(20))
def test_thousands_of_networks_all_converge(block: int) -> None:
    for seed in range(500 * block, 500 * (block + 1)):
        made_system, load, required = made_case(seed, ("tree", "loop", "grid")[seed % 3])
        made = network(made_system, ("hazen-williams", "metric", "darcy")[seed // 3 % 3])
        assert_balanced(made, solve_demand(made, load, required, [supply()]))
        weak = supply(static=float(10 ** (4 + seed % 7 / 3)), residual=5e3, flow=0.03)
        assert_balanced(made, solve_operating(made, load, [weak]))


@QUIET
@given(seed=SEEDS, kind=KINDS, law=LAWS)
def test_a_pipe_written_the_other_way_changes_only_its_signs(seed: int, kind: str, law: str) -> None:
    made_system, load, required = made_case(seed, kind)
    turned = [p.tag for p in made_system.pipes[:: 1 + seed % 3]]
    one = solve_demand(network(made_system, law), load, required, [supply()])
    other = solve_demand(network(flipped(made_system, turned), law), load, required, [supply()])
    same(one, other)
    sign = np.array([-1.0 if tag in turned else 1.0 for tag in one.pipe_tags])
    scale = np.abs(one.pipe_flow).max()
    assert other.pipe_flow * sign == pytest.approx(one.pipe_flow, rel=1e-9, abs=1e-9 * scale)
    assert other.elevation_loss * sign == pytest.approx(one.elevation_loss)


@QUIET
@given(seed=SEEDS, kind=KINDS, law=LAWS)
def test_other_tags_and_another_order_change_nothing(seed: int, kind: str, law: str) -> None:
    made_system, load, required = made_case(seed, kind)
    rng = np.random.default_rng(seed)
    one = solve_demand(network(made_system, law), load, required, [supply()])

    def name(tag: str) -> str:
        return tag if tag == "S" else f"{tag[::-1]}-x"

    nodes = [replace(n, tag=name(n.tag)) for n in made_system.nodes]
    pipes = [replace(p, tag=f"q{p.tag}", start=name(p.start), end=name(p.end)) for p in made_system.pipes]
    shuffled = system(
        [nodes[i] for i in rng.permutation(len(nodes))], [pipes[i] for i in rng.permutation(len(pipes))]
    )
    renamed = LoadCase(
        tuple(map(name, reversed(load.open_outlets))), {name(t): q for t, q in load.fixed_flows.items()}
    )
    other = solve_demand(
        network(shuffled, law), renamed, {name(t): p for t, p in required.items()}, [supply()]
    )
    assert other.source_pressure == pytest.approx(one.source_pressure, rel=1e-10)
    assert other.source_flow == pytest.approx(one.source_flow, rel=1e-10)
    for tag, pressure in zip(one.node_tags, one.pressure, strict=True):
        assert other.pressure[other.node(name(tag))] == pytest.approx(pressure, rel=1e-9, abs=1e-3)


@QUIET
@given(seed=SEEDS, kind=KINDS, law=LAWS, part=st.floats(0.05, 0.95))
def test_a_pipe_cut_in_two_changes_nothing(seed: int, kind: str, law: str, part: float) -> None:
    made_system, load, required = made_case(seed, kind)
    chosen = made_system.pipes[seed % len(made_system.pipes)]
    heights = {n.tag: n.elevation for n in made_system.nodes}
    between = (1 - part) * heights[chosen.start] + part * heights[chosen.end]
    first = replace(chosen, tag="first", end="mid", length=part * chosen.length)
    second = replace(chosen, tag="second", start="mid", length=(1 - part) * chosen.length, fittings=())
    others = [p for p in made_system.pipes if p.tag != chosen.tag]
    cut = system([*made_system.nodes, node("mid", between)], [*others, first, second])
    one = solve_demand(network(made_system, law), load, required, [supply()])
    other = solve_demand(network(cut, law), load, required, [supply()])
    same(one, other)
    flow = one.pipe_flow[one.pipe_tags.index(chosen.tag)]
    for tag in ("first", "second"):
        assert other.pipe_flow[other.pipe_tags.index(tag)] == pytest.approx(
            flow, rel=1e-9, abs=1e-9 * np.abs(one.pipe_flow).max()
        )


@QUIET
@given(seed=SEEDS, kind=KINDS)
def test_smoother_pipes_never_need_more_pressure_on_a_tree(seed: int, kind: str) -> None:
    """On a tree with one head. (Elsewhere smoother pipes can raise the flow of heads nearer the supply.)"""
    made_system, load, required = made_case(seed, kind)
    if not load.open_outlets:
        return
    load = LoadCase(load.open_outlets[:1], load.fixed_flows)
    required = {load.open_outlets[0]: required[load.open_outlets[0]]}
    smooth = replace(
        made_system, pipes=tuple(replace(p, c_factor=(p.c_factor or 0) + 10) for p in made_system.pipes)
    )
    rough = solve_demand(network(made_system), load, required, [supply()])
    better = solve_demand(network(smooth), load, required, [supply()])
    assert better.source_pressure[0] <= rough.source_pressure[0] * (1 + 1e-12)


@QUIET
@given(seed=SEEDS, kind=KINDS, law=LAWS)
def test_dead_ends_carry_nothing_and_change_nothing(seed: int, kind: str, law: str) -> None:
    made_system, load, required = made_case(seed, kind)
    at = made_system.nodes[seed % len(made_system.nodes)]
    dead = system(
        [*made_system.nodes, node("d1", at.elevation + 2), node("d2", at.elevation - 1, 1e-5)],
        [*made_system.pipes, pipe("x1", at.tag, "d1", 5, 0.05), pipe("x2", "d2", "d1", 5, 0.05)],
    )
    one = solve_demand(network(made_system, law), load, required, [supply()])
    other = solve_demand(network(dead, law), load, required, [supply()])
    same(one, other)
    assert not other.pipe_flow[-2:].any()
    rise = network(made_system, law).fluid.unit_weight
    static = other.pressure[other.node(at.tag)]
    assert other.pressure[other.node("d1")] == pytest.approx(static - 2 * rise)
    assert other.pressure[other.node("d2")] == pytest.approx(static + rise)


@QUIET
@given(seed=SEEDS, kind=KINDS, law=LAWS)
def test_demand_pressure_reproduces_itself_as_a_supply(seed: int, kind: str, law: str) -> None:
    made_system, load, required = made_case(seed, kind)
    made = network(made_system, law)
    demand = solve_demand(made, load, required, [supply()])
    held = replace(supply(), static=float(demand.source_pressure[0]), resistance=0.0)
    same(demand, solve_operating(made, load, [held]))
