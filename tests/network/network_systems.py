"""Systems made for the tests of the network: random trees, loops and grids, and short-hand builders."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import replace
from typing import Any

import numpy as np

from supplycheck.model import (
    DARCY,
    HW_METRIC,
    HW_US,
    Device,
    Fitting,
    Fluid,
    FrictionLaw,
    Node,
    Pipe,
    System,
)
from supplycheck.network import LoadCase, Network, SourceCurve, build_network
from supplycheck.units import BAR, FOOT, GPM, INCH, LPM, PSI

WATER_US = Fluid("water", 998.2, 1.002e-3, 0.433 * PSI / FOOT, None, "")
WATER_METRIC = Fluid("water", 998.2, 1.002e-3, 9800.0, None, "")
K_US = GPM / PSI**0.5
K_METRIC = LPM / BAR**0.5
LAWS: dict[str, FrictionLaw] = {"hazen-williams": HW_US, "metric": HW_METRIC, "darcy": DARCY}
BORES_MM = (27.3, 36.0, 41.9, 53.0, 68.8, 80.8, 105.3, 155.4)


def node(tag: str, elevation: float = 0.0, k_factor: float | None = None) -> Node:
    return Node(tag, elevation, kind="junction" if k_factor is None else "sprinkler", k_factor=k_factor)


def pipe(tag: str, start: str, end: str, length: float, bore: float, **more: Any) -> Pipe:
    """Pipe of ``length`` [m] and ``bore`` [m]; C 120, roughness 0.05 mm unless given."""
    settings: dict[str, Any] = {"nominal": "", "kind": "pipe", "c_factor": 120.0, "roughness": 5e-5, **more}
    return Pipe(tag, start, end, length, bore, **settings)


def us_pipe(
    tag: str, start: str, end: str, feet: float, inches: float, extra_feet: float = 0.0, **more: Any
) -> Pipe:
    """Pipe in feet and inches with ``extra_feet`` of equivalent length."""
    fittings = ()
    if extra_feet:
        fittings = (Fitting("fittings", 1, extra_feet * FOOT, extra_feet * FOOT, 0.0, "given", "case"),)
    return pipe(tag, start, end, feet * FOOT, inches * INCH, fittings=fittings, **more)


def system(nodes: Sequence[Node], pipes: Sequence[Pipe], devices: Sequence[Device] = ()) -> System:
    return System(tuple(nodes), tuple(pipes), (), (), tuple(devices))


def network(made: System, law: str = "hazen-williams", fluid: Fluid = WATER_US) -> Network:
    return build_network(made, law=LAWS[law], fluid=fluid)


def random_system(rng: np.random.Generator, kind: str, size: int, *, heads: float = 0.5) -> System:
    """Return a random tree, loop or grid of about ``size`` nodes, fed at node ``S``."""
    edges = {"tree": _tree_edges, "loop": _loop_edges, "grid": _grid_edges}[kind](rng, size)
    count = 1 + max(max(edge) for edge in edges)
    nodes = [node("S", float(rng.uniform(-2, 2)))]
    for row in range(1, count):
        k_factor = (
            float(rng.choice([57.0, 80.0, 115.0, 160.0])) * K_METRIC if rng.random() < heads else None
        )
        nodes.append(node(f"n{row}", float(rng.uniform(0, 8)), k_factor))
    pipes = [_random_pipe(rng, nodes, row, a, b) for row, (a, b) in enumerate(edges)]
    return system(nodes, pipes)


def _random_pipe(rng: np.random.Generator, nodes: Sequence[Node], row: int, a: int, b: int) -> Pipe:
    if rng.random() < 0.5:
        a, b = b, a
    extra = float(rng.uniform(0, 5)) if rng.random() < 0.3 else 0.0
    minor_k = float(rng.uniform(0, 3)) if rng.random() < 0.2 else 0.0
    fittings = (Fitting("some", 1, extra, extra, minor_k, "given", ""),) if extra or minor_k else ()
    return pipe(
        f"p{row}",
        nodes[a].tag,
        nodes[b].tag,
        float(rng.uniform(0.3, 40)),
        float(rng.choice(BORES_MM)) * 1e-3,
        c_factor=float(rng.choice([100.0, 120.0, 150.0])),
        roughness=float(rng.choice([1.5e-6, 4.6e-5, 2.6e-4])),
        fittings=fittings,
    )


def _tree_edges(rng: np.random.Generator, size: int) -> list[tuple[int, int]]:
    return [(int(rng.integers(max(0, row - 6), row)), row) for row in range(1, size)]


def _loop_edges(rng: np.random.Generator, size: int) -> list[tuple[int, int]]:
    edges = _tree_edges(rng, size)
    for _ in range(max(1, size // 5)):
        a, b = rng.choice(size, 2, replace=False)
        edges.append((int(a), int(b)))
    return edges


def _grid_edges(rng: np.random.Generator, size: int) -> list[tuple[int, int]]:
    along = max(2, int(size**0.5))
    lines = max(2, size // along)
    edges = [(0, 1)]
    for line in range(lines):
        first = 1 + line * along
        edges += [(first + i, first + i + 1) for i in range(along - 1)]
        if line:
            edges += [(first - along, first), (first - 1, first + along - 1)]
    return edges


def random_load(
    rng: np.random.Generator, made: System, most: int = 12
) -> tuple[LoadCase, dict[str, float]]:
    """Return a random load case on ``made`` and a required pressure at each open outlet."""
    outlets = [n.tag for n in made.nodes if n.k_factor is not None]
    count = min(len(outlets), int(rng.integers(1, most + 1)))
    chosen = [outlets[i] for i in rng.choice(len(outlets), count, replace=False)] if outlets else []
    others = [n.tag for n in made.nodes[1:]]
    flows = (
        {str(rng.choice(others)): float(rng.uniform(0, 20e-3))} if rng.random() < 0.5 or not chosen else {}
    )
    required = {tag: float(rng.uniform(0.35e5, 2e5)) for tag in chosen} or {next(iter(flows)): 1e5}
    return LoadCase(tuple(chosen), flows), required


def supply(tag: str = "S", static: float = 6e5, residual: float = 4e5, flow: float = 0.06) -> SourceCurve:
    """Supply with ``residual`` [Pa] at ``flow`` [m³/s]."""
    return SourceCurve(tag, static, (static - residual) / flow**1.85)


def flipped(made: System, tags: Mapping[str, bool] | Sequence[str]) -> System:
    """Return the system with the pipes named in ``tags`` written from end to start."""
    turned = [replace(p, start=p.end, end=p.start) if p.tag in tags else p for p in made.pipes]
    return replace(made, pipes=tuple(turned))
