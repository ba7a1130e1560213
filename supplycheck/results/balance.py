"""Balance of the reported numbers, recomputed from the rows alone."""

from __future__ import annotations

from collections import defaultdict

import numpy as np

from supplycheck.model import Project
from supplycheck.results.records import BalanceRecord, NodeRow, PipeRow
from supplycheck.results.rows import friction_of


def balance_of(
    project: Project,
    nodes: tuple[NodeRow, ...],
    pipes: tuple[PipeRow, ...],
    source_flow: dict[str, float],
    iterations: int,
) -> BalanceRecord:
    """Return the largest imbalances of flow at a node [m³/s] and of pressure along a pipe [Pa].

    Friction is computed anew from each row's flow by the project's law, so the disagreement round
    any loop is at most the sum of what its pipes show here.
    """
    net: dict[str, float] = defaultdict(float)
    for tag, flow in source_flow.items():
        net[tag] += flow
    for node in nodes:
        net[node.tag] -= node.discharge
    for pipe in pipes:
        net[pipe.start] -= pipe.flow
        net[pipe.end] += pipe.flow
    flow_node = max(net, key=lambda tag: abs(net[tag]))
    total = sum(source_flow.values())

    flows = np.array([pipe.flow for pipe in pipes])
    friction = friction_of(project.system.pipes, law=project.law, fluid=project.fluid, flow=flows)
    level = {node.tag: node.elevation for node in nodes}
    worst, pressure_pipe = 0.0, pipes[0].tag
    for row, loss in zip(pipes, friction.tolist(), strict=True):
        if row.valve == "closed" or not np.isfinite(row.friction_loss):
            continue
        rise = project.fluid.unit_weight * (level[row.end] - level[row.start])
        gap = abs(row.start_pressure - row.end_pressure - loss - rise - row.device_loss)
        if gap > worst:
            worst, pressure_pipe = gap, row.tag
    return BalanceRecord(
        largest_flow_imbalance=abs(net[flow_node]),
        largest_pressure_imbalance=worst,
        total_flow=total,
        flow_node=flow_node,
        pressure_pipe=pressure_pipe,
        iterations=iterations,
    )
