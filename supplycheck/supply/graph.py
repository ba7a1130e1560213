"""Lines and points of the supply graph, at the point of comparison.

On a flow axis spaced as Q^1.85 the supply lines are straight between their points.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import Literal

from supplycheck.errors import DomainError, NotConvergedError
from supplycheck.model import Project
from supplycheck.network.records import Solution
from supplycheck.supply.comparison import Comparison
from supplycheck.supply.curve import EXPONENT, SupplyCurve
from supplycheck.supply.route import CarriedCurve, Route, holding_pipes, solved_route
from supplycheck.supply.shares import SourceShare
from supplycheck.supply.sources import NodeSupply
from supplycheck.supply.states import States, fed_sources

LineStyle = Literal["measured", "adjusted", "demand", "combined", "tank", "pump"]
PointStyle = Literal["test", "demand", "demand with hose", "available", "operating"]
_SAMPLES = 25
_SOLVED = 12
_MOST_REACH = 3.0
_MOVED = 1.0  # Pa


@dataclass(frozen=True, slots=True)
class CurveLine:
    """A line of the graph: flows [m³/s] and pressures [Pa] of equal length.

    Beyond ``extrapolated_from`` [m³/s] it is carried on past what was measured.
    """

    name: str
    style: LineStyle
    flows: tuple[float, ...]
    pressures: tuple[float, ...]
    extrapolated_from: float | None = None


@dataclass(frozen=True, slots=True)
class MarkedPoint:
    """A marked point of the graph: flow [m³/s], pressure [Pa]."""

    name: str
    style: PointStyle
    flow: float
    pressure: float


@dataclass(frozen=True, slots=True)
class GraphData:
    """All that the supply graph shows."""

    lines: tuple[CurveLine, ...]
    points: tuple[MarkedPoint, ...]


def curve_points(
    project: Project, solution: Solution, curves: Sequence[NodeSupply], comparison: Comparison
) -> GraphData:
    """Return the graph of ``comparison``: supply as measured and as compared, demand, marked points.

    The supply lines are those of the source whose water comes to the point of comparison, carried there
    with the losses of the demand solution; where pumps stand on the way, the supply is shown without
    them, then the pumps by themselves, then both together as far as the curves go. Test points are
    carried like the lines, and named so where that moves them. Where several sources give water, every
    line and point stands at the flow of its own source, and the lines of the others follow: at the point
    of comparison, or at their own node where their water cannot come there. Where no sum along a route
    holds, the line at the point of comparison is solved: all supplies together against all that is drawn;
    each source has its own lines at its own node.
    """
    by_node = {one.node: one for one in curves}
    start = comparison.carried.supply.node
    if comparison.states is not None:
        lines, points = [_solved_line(comparison, comparison.states)], _whole_points(comparison)
        others = comparison.sources
    else:
        supply, path = by_node[start], comparison.carried.route
        lines = _supply_lines(supply, path, _reach(supply, comparison), comparison.node)
        points = [*_test_points(supply, path, comparison.node), *_demand_points(comparison)]
        others = tuple(share for share in comparison.sources if share.node != start)
    for share in others:
        more = _of_another(project, solution, comparison, share, by_node[share.node])
        lines, points = [*lines, *more.lines], [*points, *more.points]
    return GraphData((*lines, _demand_line(project, solution, comparison)), tuple(points))


def _solved_line(comparison: Comparison, states: States) -> CurveLine:
    """Return what all supplies together leave at the point of comparison against all that is drawn."""
    most = comparison.available_flow or 0.0
    tested = {share.node: share.tested_flow for share in comparison.sources}
    known_to = [flow for flow in tested.values() if math.isfinite(flow)]
    far = max([_MOST_REACH * comparison.demand_flow, *known_to])
    reach = 1.1 * max(comparison.demand_flow, min(most, far))
    kept, known = [(0.0, comparison.static)], reach
    for index in range(1, _SOLVED + 1):
        flow = reach * (index / _SOLVED) ** (1 / EXPONENT)
        try:
            state = states.state(flow / states.total)
        except NotConvergedError:
            break
        pressure = states.shown(state)
        if pressure < 0.0:
            break
        given = zip(state.source_tags, state.source_flow.tolist(), strict=True)
        if any(amount > tested[tag] for tag, amount in given):
            known = min(known, kept[-1][0])
        kept.append((flow, pressure))
    flows, pressures = zip(*kept, strict=True)
    end = known if 0.0 < known < flows[-1] else None
    return CurveLine(f"supply at {comparison.node}, network solved", "combined", flows, pressures, end)


def _of_another(
    project: Project, solution: Solution, comparison: Comparison, share: SourceShare, supply: NodeSupply
) -> GraphData:
    """Return lines and points of a source that is not the one carried to the point of comparison."""
    way, demanded, at = _way(project, solution, comparison, share)
    place = f" at {at}" + (f", {share.node}" if share.node != at else "")
    into = ", water runs into it" if share.node in fed_sources(solution) else ""
    lines = _supply_lines(supply, way, _reach(supply, comparison), at)
    points = [*_test_points(supply, way, at), *_share_points(share, demanded, comparison.shift, place)]
    return GraphData(
        tuple(replace(line, name=_placed(line.name, place, at) + into) for line in lines), tuple(points)
    )


def _placed(name: str, place: str, at: str) -> str:
    """Return ``name`` with its ``place`` " at …", which begins with the node to which it may be carried."""
    carried = f"carried to {at}"
    return name + (place.removeprefix(f" at {at}") if name.endswith(carried) else place)


def _test_label(curve: SupplyCurve, path: Route, at: str) -> str:
    """Return ", carried to …" where a reading is shown there with height, losses or devices taken off."""
    most = curve.tested_flow if math.isfinite(curve.tested_flow) else path.flow
    moved = (curve.offset, path.loss_at(0.0), path.loss_at(most))
    return f", carried to {at}" if any(abs(one) >= _MOVED for one in moved) else ""


def _way(
    project: Project, solution: Solution, comparison: Comparison, share: SourceShare
) -> tuple[Route, float, str]:
    """Return the route of another source, the demand [Pa] at its end, and the node of that end.

    It ends at the point of comparison where water of this source can come there and the sum along the way
    holds, else at its own node.
    """
    at, exponent = comparison.node, project.law.flow_exponent
    if share.flow > 0.0 and comparison.states is None:
        try:
            way = solved_route(project.system, solution, share.node, at, share.flow, exponent)
        except DomainError:
            pass
        else:
            if holding_pipes(project.system, solution).isdisjoint(way.pipes):
                return way, comparison.demand_pressure, at
    own = Route((), max(share.flow, 0.0), 0.0, 0.0, 0.0, 0.0, (), exponent)
    return own, share.demand_pressure, share.node


def _share_points(share: SourceShare, demanded: float, margin: float, place: str) -> list[MarkedPoint]:
    """Return what one of several sources is asked for and what it has, at its own flow."""
    if share.flow <= 0.0:
        return []
    return [
        MarkedPoint(f"demand{place}", "demand with hose", share.flow, demanded),
        MarkedPoint(f"available{place}", "available", share.flow, demanded + margin),
    ]


def _reach(supply: NodeSupply, comparison: Comparison) -> float:
    """Return how far the lines of a source go [m³/s]: past its tests and past what it gives."""
    tested = [curve.tested_flow for curve in supply.measured if math.isfinite(curve.tested_flow)]
    given = max(next(one.flow for one in comparison.sources if one.node == supply.node), 0.0)
    return 1.1 * (max([given, *tested]) or comparison.demand_flow)


def _supply_lines(supply: NodeSupply, path: Route, reach: float, at: str) -> list[CurveLine]:
    alone = path.without_pumps if path.pumps else path
    if supply.tank is not None:
        lines = [_line(f"{supply.tank.tag}, tank", "tank", supply.curve, alone, reach)]
    else:
        lines = [
            _line(
                one.name + (_test_label(one, alone, at) or ", as measured"), "measured", one, alone, reach
            )
            for one in supply.measured
        ]
        if len(supply.measured) > 1:
            lines.append(_line("low-supply curve", "measured", supply.unadjusted, alone, reach))
        if len(supply.stages) > 1:
            lines.append(_line("adjusted curve", "adjusted", supply.curve, alone, reach))
    if path.pumps:
        end = min(reach, path.largest_flow)
        lines.append(_pump_line(path, end))
        lines.append(_line("supply and pump", "combined", supply.curve, path, end))
    return lines


def _pump_line(path: Route, reach: float) -> CurveLine:
    """Return what the pumps on the route add at each flow of the source."""
    flows = tuple(reach * index / _SAMPLES for index in range(_SAMPLES + 1))
    gains = tuple(path.without_pumps.loss_at(flow) - path.loss_at(flow) for flow in flows)
    whole = all(math.isclose(own, path.flow, rel_tol=1e-9) for _, own, sign in path.curves if sign < 0)
    name = "pump" if whole else "pump, at its share of the flow"
    return CurveLine(name, "pump", flows, gains)


def _line(name: str, style: LineStyle, curve: SupplyCurve, path: Route, reach: float) -> CurveLine:
    carried = CarriedCurve(curve, path)
    flows = {flow for flow in curve.flows if flow <= reach} | {0.0, reach}
    flows |= {curve.tested_flow} if 0.0 < curve.tested_flow <= reach else set()
    if path.curves:
        flows |= {reach * (index / _SAMPLES) ** (1 / EXPONENT) for index in range(1, _SAMPLES)}
    ordered = sorted(flows)
    kept = [(flow, carried.pressure_at(flow)) for flow in ordered]
    kept = _cut_at_zero(kept, carried)
    tested = curve.tested_flow if 0.0 < curve.tested_flow < kept[-1][0] else None
    return CurveLine(name, style, tuple(flow for flow, _ in kept), tuple(p for _, p in kept), tested)


def _cut_at_zero(points: list[tuple[float, float]], carried: CarriedCurve) -> list[tuple[float, float]]:
    """End a line where no pressure is left."""
    above = [point for point in points if point[1] >= 0.0]
    if len(above) == len(points) or not above:
        return points
    end = carried.flow_at(0.0)
    return above if end is None or end <= above[-1][0] else [*above, (end, carried.pressure_at(end))]


def _demand_line(project: Project, solution: Solution, comparison: Comparison) -> CurveLine:
    """Return the system's demand: from its height at no flow to the demand, then on by the hose."""
    levels = {node.tag: node.elevation for node in project.system.nodes}
    height = levels.get(solution.governing, levels[comparison.node]) - levels[comparison.node]
    several = len(comparison.sources) > 1 and comparison.states is None
    given = _carried_share(comparison).flow if several else comparison.demand_flow
    hose = 0.0 if several else comparison.hose_flow
    flow = given - hose
    start, end = project.fluid.unit_weight * height, comparison.demand_pressure
    flows: tuple[float, ...] = (0.0, flow)
    pressures: tuple[float, ...] = (start, end)
    if hose > 0.0:
        flows, pressures = (*flows, given), (*pressures, end)
    return CurveLine("demand", "demand", flows, pressures)


def _test_points(supply: NodeSupply, path: Route, at: str) -> list[MarkedPoint]:
    alone = path.without_pumps if path.pumps else path
    points = []
    for test, curve in zip(supply.tests, supply.measured, strict=False):  # a tank has no readings
        readings = [(f"{test.tag} static", 0.0, test.static)]
        readings += [(f"{test.tag} residual", one.flow, one.residual) for one in test.points]
        points += [
            MarkedPoint(
                name + _test_label(curve, alone, at),
                "test",
                flow,
                pressure + curve.offset - alone.loss_at(flow),
            )
            for name, flow, pressure in readings
        ]
    return points


def _carried_share(comparison: Comparison) -> SourceShare:
    """Return the share of the source that is carried to the point of comparison."""
    start = comparison.carried.supply.node
    return next(share for share in comparison.sources if share.node == start)


def _demand_points(comparison: Comparison) -> list[MarkedPoint]:
    if len(comparison.sources) == 1:
        return _whole_points(comparison)
    share = _carried_share(comparison)
    place = f" at {comparison.node}" + (f", {share.node}" if share.node != comparison.node else "")
    return _share_points(share, comparison.demand_pressure, comparison.shift, place)


def _whole_points(comparison: Comparison) -> list[MarkedPoint]:
    """Return demand and supply at the point of comparison at the flow of the whole demand."""
    pressure, total = comparison.demand_pressure, comparison.demand_flow
    points = [MarkedPoint("demand", "demand", total - comparison.hose_flow, pressure)]
    if comparison.hose_flow > 0.0:
        points.append(MarkedPoint("demand with hose", "demand with hose", total, pressure))
    points.append(MarkedPoint("available", "available", total, comparison.available_pressure))
    return points
