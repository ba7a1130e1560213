"""Speed of the network as ratios within one run, so that they hold on any machine.

The yardstick is one sparse LU factorisation (``scipy.sparse.linalg.splu`` as it comes) of the full nodal
matrix of the same network. Each ratio compares the least processor time of several runs taken in turns,
so that other work on the machine counts as little as possible.
"""

from __future__ import annotations

import math
import sys
import time
from collections.abc import Callable
from itertools import pairwise
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from network_systems import K_US, network, node, supply, system, us_pipe
from peak_memory import peak_memory
from scipy.optimize import root
from scipy.sparse import csc_array
from scipy.sparse.linalg import splu

from supplycheck.model import System
from supplycheck.network import LoadCase, Network, demand_many, solve_demand
from supplycheck.units import PSI

K56 = 5.6 * K_US
SOURCE = [supply(static=100 * PSI, residual=60 * PSI)]


def grid(lines: int, heads: int) -> System:
    """Gridded system: ``lines`` branch lines of ``heads`` heads between a near and a far main."""
    nodes, pipes = [], []
    for i in range(lines):
        tags = [f"n{i}", *(f"h{i}.{j}" for j in range(heads)), f"f{i}"]
        nodes += [node(tags[0], 6.0), *(node(tag, 6.0, K56) for tag in tags[1:-1]), node(tags[-1], 6.0)]
        pipes += [us_pipe(f"{a}-{b}", a, b, 12, 1.61) for a, b in pairwise(tags)]
        if i:
            pipes.append(us_pipe(f"near{i}", f"n{i - 1}", f"n{i}", 10, 4.026))
            pipes.append(us_pipe(f"far{i}", f"f{i - 1}", f"f{i}", 10, 3.068))
    return system([*nodes, node("S")], [*pipes, us_pipe("feed", "S", "n0", 100, 6.065)])


def tree(lines: int, heads: int) -> System:
    """Tree of ``lines`` branch lines of ``heads`` heads on one main."""
    nodes, pipes = [], []
    for i in range(lines):
        tags = [f"n{i}", *(f"h{i}.{j}" for j in range(heads))]
        nodes += [node(tags[0], 6.0), *(node(tag, 6.0, K56) for tag in tags[1:])]
        pipes += [us_pipe(f"{a}-{b}", a, b, 10, 2.635) for a, b in pairwise(tags)]
        if i:
            pipes.append(us_pipe(f"main{i}", f"n{i - 1}", f"n{i}", 10, 20.0))
    return system([*nodes, node("S")], [*pipes, us_pipe("feed", "S", "n0", 100, 20.0)])


def area(line: int, head: int, lines: int = 5, heads: int = 6) -> tuple[LoadCase, dict[str, float]]:
    tags = tuple(f"h{i}.{j}" for i in range(line, line + lines) for j in range(head, head + heads))
    return LoadCase(tags), dict.fromkeys(tags, 15 * PSI)


def full_matrix(made: Network) -> csc_array:
    """Return the nodal matrix of all nodes but the supply, with conductances near one."""
    links, free = made.links, len(made.node_tags) - 1
    g = np.random.default_rng(0).uniform(0.5, 1.5, len(links))
    rows = np.concatenate([links.start, links.end, links.start, links.end])
    cols = np.concatenate([links.start, links.end, links.end, links.start])
    values = np.concatenate([g, g, -g, -g])
    keep = (rows < free) & (cols < free)
    return csc_array((values[keep], (rows[keep], cols[keep])), (free, free))


def quickest(*calls: Callable[[], Any], rounds: int) -> list[float]:
    """Return the least processor time of each call [s], taken in turns."""
    best = [math.inf] * len(calls)
    for _ in range(rounds):
        for i, call in enumerate(calls):
            begin = time.process_time()
            call()
            best[i] = min(best[i], time.process_time() - begin)
    return best


@pytest.mark.parametrize("law", ["hazen-williams", "darcy"])
def test_demand_on_a_grid_of_ten_thousand_pipes(law: str, record_property: Callable[..., None]) -> None:
    made = network(grid(100, 98), law)
    load, required = area(90, 46)
    matrix = full_matrix(made)
    ours, factor = quickest(
        lambda: solve_demand(made, load, required, SOURCE), lambda: splu(matrix), rounds=15
    )
    record_property("ratio", ours / factor)
    assert ours / factor <= 3.0


@pytest.mark.slow
@pytest.mark.parametrize("law", ["hazen-williams", "darcy"])
def test_search_over_five_hundred_placements(law: str, record_property: Callable[..., None]) -> None:
    made = network(grid(100, 98), law)
    cases = [area(i, j) for i in range(0, 96, 4) for j in range(0, 93, 4)][:500]
    assert len(cases) == 500
    matrix = full_matrix(made)
    ours, factor = quickest(lambda: demand_many(made, cases, SOURCE), lambda: splu(matrix), rounds=6)
    record_property("ratio", ours / factor)
    assert ours / factor <= 100.0


def test_tree_of_a_thousand_open_heads(record_property: Callable[..., None]) -> None:
    made = network(tree(100, 10))
    tags = tuple(tag for tag in made.node_tags if tag.startswith("h"))
    assert len(tags) == 1000
    required = dict.fromkeys(tags, 7 * PSI)
    matrix = full_matrix(made)
    ours, factor = quickest(
        lambda: solve_demand(made, LoadCase(tags), required, SOURCE), lambda: splu(matrix), rounds=30
    )
    record_property("ratio", ours / factor)
    assert ours / factor <= 15.0


@pytest.mark.slow
def test_time_grows_with_size_no_faster_than_the_power_1_1(record_property: Callable[..., None]) -> None:
    times, sizes = [], []
    for lines, heads, first in ((30, 31, 12), (100, 98, 46), (316, 314, 150)):
        made = network(grid(lines, heads))
        load, required = area(lines - 8, first)
        times += quickest(lambda: solve_demand(made, load, required, SOURCE), rounds=5)  # noqa: B023
        sizes.append(len(made.pipe_tags))
    assert sizes[-1] >= 100_000
    exponent = math.log(times[-1] / times[0]) / math.log(sizes[-1] / sizes[0])
    record_property("exponent", exponent)
    assert exponent <= 1.1


@pytest.mark.slow
@pytest.mark.skipif(sys.platform != "linux", reason="the peak is read from /proc")
def test_memory_for_a_hundred_thousand_pipes(record_property: Callable[..., None]) -> None:
    """Peak resident memory of a process that builds and solves the grid, 500 MB at most."""
    here = Path(__file__)
    paths = [str(here.parent), str(here.parents[1] / "network"), str(here.parents[2])]
    code = (
        f"import sys; sys.path[:0] = {paths!r}\n"
        "import test_network_bench as b\n"
        "made = b.network(b.grid(316, 314)); load, required = b.area(300, 150)\n"
        "b.solve_demand(made, load, required, b.SOURCE)"
    )
    megabytes = peak_memory(code, [])
    record_property("megabytes", megabytes)
    assert 50.0 < megabytes <= 500.0


@pytest.mark.slow
def test_against_a_general_root_finder(record_property: Callable[..., None]) -> None:
    """scipy.optimize.root on the same equations of 500 nodes (heads as unknowns, its own Jacobian)."""
    made = network(grid(25, 18))
    load, required = area(15, 6)
    solution = solve_demand(made, load, required, SOURCE)
    links, nodes = made.links, len(made.node_tags)
    assert 500 <= nodes <= 510
    free = np.arange(nodes) != made.node_rows["S"]
    rows = [made.node_rows[tag] for tag in load.open_outlets]
    supplied = float(solution.source_pressure[0])

    def residual(x: np.ndarray) -> np.ndarray:
        head = np.empty(nodes)
        head[free], head[~free] = 1e5 * x, supplied + made.base[~free]
        fall = head[links.start] - head[links.end]
        flow = np.sign(fall) * (np.abs(fall) / links.resistance) ** (1 / links.exponent)
        net = np.bincount(links.start, flow, nodes) - np.bincount(links.end, flow, nodes)
        pressure = np.maximum((head - made.base)[rows], 0.0)
        net[rows] += made.k_factor[rows] * np.sqrt(pressure)
        return 1e3 * net[free]

    begin = (
        (solution.pressure + made.base)[free]
        / 1e5
        * np.random.default_rng(0).uniform(0.99, 1.01, nodes - 1)
    )
    times = []
    for method, options in (("krylov", {"fatol": 1e-9, "maxiter": 400}), ("hybr", {"maxfev": 20000})):
        begin_at = time.process_time()
        root(residual, begin, method=method, options=options)
        times.append(time.process_time() - begin_at)  # whether it got there or not
    (ours,) = quickest(lambda: solve_demand(made, load, required, SOURCE), rounds=10)
    rival = min(times)
    record_property("ratio", rival / ours)
    assert rival / ours >= 50.0
