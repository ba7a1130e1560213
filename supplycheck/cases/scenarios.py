"""What really flows: the open heads on the actual supply curve, and the project's own scenarios."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from types import MappingProxyType
from typing import Final

import numpy as np

from supplycheck.cases.loads import Draws
from supplycheck.demand import required_at_head
from supplycheck.errors import DomainError, NotConvergedError
from supplycheck.model import DemandCase, Project, Scenario
from supplycheck.network import Network, Solution, SourceCurve, solve_operating
from supplycheck.results.records import ScenarioRow
from supplycheck.supply.beyond import beyond_curves

DESIGN_AREA = "design area, actual supply"
AT_REST: Final = 1e-9
"""Flow [m³/s] below which nothing is taken to flow: what the solver leaves."""


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
    reader = _Reader(project, network, case, sources, Draws.of(project))
    name = DESIGN_AREA if case.heads else f"{case.label}, actual supply"
    first = reader.row(_Named(name, case.heads, drawn=reader.draws.load(case).fixed_flows), operating)
    return (first, *(reader.solved(scenario) for scenario in project.scenarios))


@dataclass(frozen=True, slots=True)
class _Named:
    """What one row is about: its name, its open heads, what is said of it beforehand.

    ``drawn`` [m³/s] is drawn at nodes besides what their heads give.
    """

    name: str
    heads: tuple[str, ...]
    note: str = ""
    besides: tuple[tuple[str, float, float], ...] = ()
    drawn: Mapping[str, float] = field(default_factory=lambda: MappingProxyType({}))


@dataclass(frozen=True, slots=True, eq=False)
class _Reader:
    """Solves scenarios and reads their rows."""

    project: Project
    network: Network
    case: DemandCase
    sources: Sequence[SourceCurve]
    draws: Draws

    def solved(self, scenario: Scenario) -> ScenarioRow:
        load = self.draws.of_scenario(scenario, self.case)
        policy = self.project.criteria.velocity_pressure
        try:
            solution = solve_operating(self.network, load, self.sources, velocity_pressure=policy)
        except NotConvergedError as error:
            told = str(error)
            told += "" if error.remedy in told else f"; {error.remedy}"
            return _empty(scenario.name, len(load.open_outlets), f"no solution: {told}")
        besides = self._besides(scenario)
        named = _Named(scenario.name, load.open_outlets, _what(scenario), besides, load.fixed_flows)
        return self.row(named, solution)

    def _besides(self, scenario: Scenario) -> tuple[tuple[str, float, float], ...]:
        """Return node, flow of the scenario and flow of the node table where both run at one node."""
        if not scenario.with_node_flows:
            return ()
        own = self.draws.fixed
        return tuple((tag, flow, own[tag]) for tag, flow in scenario.flows if flow > 0.0 and tag in own)

    def row(self, named: _Named, solution: Solution) -> ScenarioRow:
        index = {tag: row for row, tag in enumerate(solution.node_tags)}
        rows = [index[tag] for tag in named.heads]
        drawn = [named.drawn.get(tag, 0.0) for tag in named.heads]
        flows = tuple(map(_flow, (solution.outflow[rows] - drawn).tolist()))
        needs = self._needs(named.heads)
        judged = [(flow, need) for flow, need in zip(flows, needs, strict=True) if need]
        need = sum(need for _, need in judged)
        lowest = min(rows, key=lambda row: float(solution.pressure[row])) if rows else None
        areas = [self.project.system.nodes[row].area or math.nan for row in rows]
        area = sum(areas) if rows else math.nan
        main = int(np.argmax(solution.source_flow))
        dry = tuple(tag for tag, flow in zip(named.heads, flows, strict=True) if flow == 0.0)
        return ScenarioRow(
            name=named.name,
            total_flow=_flow(float(np.sum(solution.source_flow))),
            supply_pressure=float(solution.source_pressure[main]),
            sprinkler_flow=sum(flows),
            heads_open=len(rows),
            lowest_head=solution.node_tags[lowest] if lowest is not None else "",
            lowest_pressure=float(solution.pressure[lowest]) if lowest is not None else math.nan,
            lowest_ratio=min((flow / need for flow, need in judged), default=None),
            delivered_density=sum(flows) / area if math.isfinite(area) and area > 0 else None,
            over_discharge=sum(flow for flow, _ in judged) / need - 1 if need and not dry else None,
            minutes_of_storage=_storage(self.project, solution),
            note=named.note,
            head_flows=tuple(
                (tag, flow, float(solution.pressure[row]))
                for tag, flow, row in zip(named.heads, flows, rows, strict=True)
            ),
            head_needs=needs,
            dry=dry,
            beyond=beyond_curves(self.project.system.devices, solution),
            besides=named.besides,
            shares=_shares(solution),
        )

    def _needs(self, heads: Sequence[str]) -> tuple[float | None, ...]:
        """Return the flow [m³/s] that each head needs: of the design area, or by its own figures."""
        asked: dict[str, float | None] = dict(zip(self.case.heads, self.case.required_flow, strict=True))
        nodes = {node.tag: node for node in self.project.system.nodes}
        for tag in heads:
            if tag not in asked:
                try:
                    asked[tag] = required_at_head(self.project, nodes[tag])[0]
                except DomainError:
                    asked[tag] = None
        return tuple(asked[tag] for tag in heads)


def _flow(value: float) -> float:
    """Return ``value`` [m³/s]; zero where it is what the solver left."""
    return value if abs(value) > AT_REST else 0.0


def _shares(solution: Solution) -> tuple[tuple[str, float], ...]:
    """Return what each of several supplies gives [m³/s]; nothing for a single one."""
    flows = tuple(map(_flow, solution.source_flow.tolist()))
    return tuple(zip(solution.source_tags, flows, strict=True)) if len(flows) > 1 else ()


def _what(scenario: Scenario) -> str:
    parts = [f"shut: {', '.join(scenario.closed_pipes)}"] if scenario.closed_pipes else []
    parts += [f"drawn at {', '.join(tag for tag, _ in scenario.flows)}"] if scenario.flows else []
    parts += [] if scenario.with_hose else ["without hose"]
    parts += [] if scenario.with_node_flows else ["without the flows of the node table"]
    return "; ".join(parts)


def _empty(name: str, heads: int, note: str) -> ScenarioRow:
    nothing = math.nan
    return ScenarioRow(name, nothing, nothing, nothing, heads, "", nothing, None, None, None, None, note)


def _storage(project: Project, solution: Solution) -> float | None:
    """Return the time until the first tank with a known volume is empty [min], ``None`` without one."""
    flows: Mapping[str, float] = dict(zip(solution.source_tags, solution.source_flow.tolist(), strict=True))
    times = []
    for tank in project.supply.tanks:
        net = flows.get(tank.node, 0.0) - tank.refill
        if tank.volume is not None and net > 0:
            times.append(tank.volume / net)
    return min(times, default=math.inf) / 60 if times else None
