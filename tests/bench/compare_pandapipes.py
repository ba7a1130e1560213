"""Time and answer of this package against pandapipes on the same Darcy networks with fixed outflow.

pandapipes (a general pipe-flow library) asks for an older pandas than this package, so it is no test
dependency but an extra, for an environment of its own:

    python -m venv rival && rival/bin/pip install -e .[rivals]
    rival/bin/python -m pytest tests/bench/test_pandapipes_bench.py
    PYTHONPATH=tests/network rival/bin/python tests/bench/compare_pandapipes.py

The second line judges, the third prints the table. Timed are ``solve_operating`` here and ``pipeflow``
there, in turns, the least processor time of each; building either network is left out.
"""

from __future__ import annotations

import math
import sys
import time
import warnings
from dataclasses import dataclass, replace
from itertools import pairwise

import numpy as np
from network_systems import WATER_METRIC, node, pipe, system

from supplycheck.model import DARCY, System
from supplycheck.network import LoadCase, SourceCurve, build_network, solve_operating


def mesh(side: int, *, dead: int = 0) -> System:
    """Square mesh of ``side`` × ``side`` nodes fed at a corner, with ``dead`` branches without flow."""
    rng = np.random.default_rng(side)
    nodes = [node(f"{i},{j}") for i in range(side) for j in range(side)]
    pipes = []
    for i in range(side):
        for j in range(side):
            for k, m in ((i + 1, j), (i, j + 1)):
                if k < side and m < side:
                    length, bore = rng.uniform(40, 120), rng.choice([0.1, 0.15, 0.2, 0.3])
                    tag = f"{i},{j}-{k},{m}"
                    pipes.append(pipe(tag, f"{i},{j}", f"{k},{m}", length, bore, roughness=1e-4))
    for i in range(dead):
        nodes.append(node(f"d{i}"))
        pipes.append(pipe(f"dead{i}", f"{i % side},{side - 1}", f"d{i}", 30.0, 0.1, roughness=1e-4))
    return system([*nodes, node("S")], [*pipes, pipe("feed", "S", "0,0", 50.0, 0.5, roughness=1e-4)])


def gridded(lines: int, heads: int, *, drops: bool = False) -> System:
    """Branch lines between a near and a far main, with a dead drop at every head where ``drops``."""
    nodes, pipes = [node("S")], [pipe("feed", "S", "n0", 30.0, 0.154, roughness=1e-4)]
    for i in range(lines):
        tags = [f"n{i}", *(f"h{i}.{j}" for j in range(heads)), f"f{i}"]
        nodes += [node(tag) for tag in tags]
        pipes += [pipe(f"{a}-{b}", a, b, 3.6, 0.041, roughness=1e-4) for a, b in pairwise(tags)]
        if i:
            pipes.append(pipe(f"near{i}", f"n{i - 1}", f"n{i}", 3.0, 0.1, roughness=1e-4))
            pipes.append(pipe(f"far{i}", f"f{i - 1}", f"f{i}", 3.0, 0.08, roughness=1e-4))
        if drops:
            nodes += [node(f"d{i}.{j}") for j in range(heads)]
            pipes += [
                pipe(f"drop{i}.{j}", f"h{i}.{j}", f"d{i}.{j}", 0.3, 0.0273, roughness=1e-4)
                for j in range(heads)
            ]
    return system(nodes, pipes)


def area(line: int, head: int) -> dict[str, float]:
    """Outflow of 1.2 L/s at 5 lines of 6 heads."""
    return {f"h{i}.{j}": 1.2e-3 for i in range(line, line + 5) for j in range(head, head + 6)}


def draws(made: System, count: int) -> dict[str, float]:
    """Outflows at ``count`` random nodes."""
    rng = np.random.default_rng(count)
    tags = [n.tag for n in made.nodes if n.tag[0] not in "Sd"]
    return {tags[i]: float(rng.uniform(1e-3, 6e-3)) for i in rng.choice(len(tags), count, replace=False)}


def rival_network(made: System, flows: dict[str, float], bar: float):  # type: ignore[no-untyped-def]
    import pandapipes as pp

    net = pp.create_empty_network(fluid="water")
    rows = pp.create_junctions(net, len(made.nodes), pn_bar=bar, tfluid_k=293.15)
    row = dict(zip((n.tag for n in made.nodes), rows, strict=True))
    density = float(net.fluid.get_density(293.15))
    pp.create_ext_grid(net, row["S"], p_bar=bar, t_k=293.15)
    pp.create_sinks(net, [row[t] for t in flows], [q * density for q in flows.values()])
    pp.create_pipes_from_parameters(
        net,
        [row[p.start] for p in made.pipes],
        [row[p.end] for p in made.pipes],
        [p.length / 1e3 for p in made.pipes],
        inner_diameter_mm=[p.bore * 1e3 for p in made.pipes],
        # 3.71 there, 3.7 (as Colebrook printed it) here: with this factor both solve the same equation
        k_mm=[(p.roughness or 0) * 1e3 * 3.71 / 3.7 for p in made.pipes],
    )
    return net, density, float(net.fluid.get_viscosity(293.15))


@dataclass(frozen=True)
class Comparison:
    """Quickest times [s], whether pandapipes converged, and the largest difference of pressure [-] as a
    part of the largest loss (NaN where it did not converge); ``balance`` is ours [m³/s]."""

    pipes: int
    ours: float
    rival: float
    converged: bool
    apart: float
    balance: float

    @property
    def ratio(self) -> float:
        return self.rival / self.ours


OPTIONS = {
    "mode": "hydraulics",
    "friction_model": "colebrook",
    "max_iter_hyd": 100,
    "max_iter_colebrook": 100,
}
"""Tolerances are pandapipes' own; more steps are allowed than its ten, in which it would not converge."""


def compare(made: System, flows: dict[str, float], rounds: int = 9) -> Comparison:
    import pandapipes as pp

    bar = 10.0
    net, density, viscosity = rival_network(made, flows, bar)
    fluid = replace(WATER_METRIC, density=density, viscosity=viscosity, unit_weight=9.81 * density)
    ours = build_network(made, law=DARCY, fluid=fluid)
    source, load = [SourceCurve("S", bar * 1e5)], LoadCase((), flows)
    our_time = rival_time = math.inf
    converged = True
    for _ in range(rounds):
        begin = time.process_time()
        solution = solve_operating(ours, load, source)
        our_time = min(our_time, time.process_time() - begin)
        begin = time.process_time()
        try:
            pp.pipeflow(net, **OPTIONS)
        except pp.PipeflowNotConverged:
            converged = False
        rival_time = min(rival_time, time.process_time() - begin)
        if not converged:
            break
    theirs = net.res_junction["p_bar"].to_numpy() * 1e5
    fall = float(np.ptp(solution.pressure))
    apart = float(np.abs(theirs - solution.pressure).max()) / fall if converged else math.nan
    return Comparison(len(made.pipes), our_time, rival_time, converged, apart, solution.mass_residual)


def networks() -> dict[str, tuple[System, dict[str, float]]]:
    """Return every network compared, with its outflows."""
    drawn = {8: 40, 23: 45, 30: 60, 50: 120, 70: 150}
    dead = mesh(70, dead=70)
    found = {
        "grid of 25 lines of 38": (gridded(25, 38), area(15, 15)),
        "grid of 100 lines of 98": (gridded(100, 98), area(90, 46)),
        "the same with a dead drop at each head": (gridded(100, 98, drops=True), area(90, 46)),
    }
    for side, count in drawn.items():
        made = mesh(side)
        found[f"square mesh {side} × {side}"] = (made, draws(made, count))
    found["square mesh 70 × 70 with 70 dead ends"] = (dead, draws(dead, 150))
    return found


def main() -> None:
    """Print one row of the table for each network."""
    warnings.simplefilter("ignore")
    for title, (made, flows) in networks().items():
        got = compare(made, flows)
        row = f"| {title} | {got.pipes:,} | {got.ours * 1e3:.1f} ms | "
        if got.converged:
            row += f"{got.rival * 1e3:.0f} ms | {got.ratio:.0f} | {got.apart:.0e} |"
        else:
            row += "– | did not converge in 100 steps | – |"
        sys.stdout.write(row + "\n")


if __name__ == "__main__":
    main()
