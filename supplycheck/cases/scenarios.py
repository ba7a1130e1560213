"""What really flows: the open heads on the actual supply curve, and the project's own scenarios."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence

import numpy as np

from supplycheck.errors import NotConvergedError
from supplycheck.model import DemandCase, Project, Scenario
from supplycheck.network import LoadCase, Network, Solution, SourceCurve, solve_operating
from supplycheck.results.records import ScenarioRow
from supplycheck.supply import hose_loads

DESIGN_AREA = "design area, actual supply"


def scenario_rows(
    project: Project,
    network: Network,
    case: DemandCase,
    sources: Sequence[SourceCurve],
    operating: Solution,
) -> tuple[ScenarioRow, ...]:
    """Return the design area (or the governing case) on the actual supply, then each scenario.

    A scenario that has no solution keeps its row, with the reason in its note.
    """
    name = DESIGN_AREA if case.heads else f"{case.label}, actual supply"
    first = _row(project, name, operating, case, case.heads, "")
    named = (_solve(project, network, case, sources, scenario) for scenario in project.scenarios)
    return (first, *named)


def _solve(
    project: Project,
    network: Network,
    case: DemandCase,
    sources: Sequence[SourceCurve],
    scenario: Scenario,
) -> ScenarioRow:
    heads = case.heads if scenario.open_heads is None else scenario.open_heads
    flows: dict[str, float] = dict(hose_loads(project)) if scenario.with_hose else {}
    for tag, flow in scenario.flows:
        flows[tag] = flows.get(tag, 0.0) + flow
    load = LoadCase(heads, flows, scenario.closed_pipes)
    policy = project.criteria.velocity_pressure
    try:
        solution = solve_operating(network, load, sources, velocity_pressure=policy)
    except NotConvergedError as error:
        told = str(error)
        told += "" if error.remedy in told else f"; {error.remedy}"
        return _empty(scenario.name, len(heads), f"no solution: {told}")
    return _row(project, scenario.name, solution, case, heads, _what(scenario))


def _what(scenario: Scenario) -> str:
    parts = [f"shut: {', '.join(scenario.closed_pipes)}"] if scenario.closed_pipes else []
    parts += [f"drawn at {', '.join(tag for tag, _ in scenario.flows)}"] if scenario.flows else []
    parts += [] if scenario.with_hose else ["without hose"]
    return "; ".join(parts)


def _empty(name: str, heads: int, note: str) -> ScenarioRow:
    nothing = math.nan
    return ScenarioRow(name, nothing, nothing, nothing, heads, "", nothing, None, None, None, None, note)


def _row(
    project: Project,
    name: str,
    solution: Solution,
    case: DemandCase,
    heads: Sequence[str],
    note: str,
) -> ScenarioRow:
    index = {tag: row for row, tag in enumerate(solution.node_tags)}
    rows = [index[tag] for tag in heads]
    nodes = project.system.nodes
    discharge = solution.outflow[rows]
    asked = dict(zip(case.heads, case.required_flow, strict=True))
    area = sum(nodes[row].area or math.nan for row in rows)
    inside = [
        (row, flow) for row, flow in zip(rows, discharge.tolist(), strict=True) if nodes[row].tag in asked
    ]
    ratios = [flow / asked[nodes[row].tag] for row, flow in inside]
    need = sum(asked[nodes[row].tag] for row, _ in inside)
    lowest = min(rows, key=lambda row: float(solution.pressure[row])) if rows else None
    total = float(np.sum(solution.source_flow))
    main = int(np.argmax(solution.source_flow))
    return ScenarioRow(
        name=name,
        total_flow=total,
        supply_pressure=float(solution.source_pressure[main]),
        sprinkler_flow=float(discharge.sum()),
        heads_open=len(rows),
        lowest_head=solution.node_tags[lowest] if lowest is not None else "",
        lowest_pressure=float(solution.pressure[lowest]) if lowest is not None else math.nan,
        lowest_ratio=min(ratios) if ratios else None,
        delivered_density=float(discharge.sum()) / area
        if rows and math.isfinite(area) and area > 0
        else None,
        over_discharge=sum(flow for _, flow in inside) / need - 1 if need else None,
        minutes_of_storage=_storage(project, solution),
        note=note,
        head_flows=tuple(
            (solution.node_tags[row], float(solution.outflow[row]), float(solution.pressure[row]))
            for row in rows
        ),
    )


def _storage(project: Project, solution: Solution) -> float | None:
    """Return the time until the first tank with a known volume is empty [min], ``None`` without one."""
    flows: Mapping[str, float] = dict(zip(solution.source_tags, solution.source_flow.tolist(), strict=True))
    times = []
    for tank in project.supply.tanks:
        net = flows.get(tank.node, 0.0) - tank.refill
        if tank.volume is not None and net > 0:
            times.append(tank.volume / net)
    return min(times, default=math.inf) / 60 if times else None
