"""The fire pumps of a project: what each gives and draws in the demand state and in what really flows.

Suction is read where the pipe of the pump starts, behind the devices that stand before the pump in that
pipe. At the demand flow it is what the supply gives there, not what the demand asks for: the difference
is the margin, and where the supply falls short the suction is lower than the demand state says.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Final, Literal

from supplycheck.errors import DomainError, NotConvergedError
from supplycheck.hydraulics import Curve
from supplycheck.model import DemandCase, Device, Pipe, Project
from supplycheck.network import LoadCase, Network, solve_operating
from supplycheck.network.records import Solution
from supplycheck.supply.comparison import Comparison
from supplycheck.supply.floor import lost_in
from supplycheck.supply.graph import CurveLine, MarkedPoint
from supplycheck.supply.pump import PumpRating
from supplycheck.supply.route import Route, no_flow_pressure, solved_route
from supplycheck.supply.sources import NodeSupply, source_curves

StateName = Literal["demand", "actual supply", "150 % of rated flow"]
_SAMPLES: Final = 24
_TURNS: Final = 20
_CLOSE: Final = 1e-6
_AT_REST: Final = 1e-9
"""Flow [m³/s] below which a pump is taken to stand still."""


@dataclass(frozen=True, slots=True)
class PumpState:
    """A pump in one state: flow [m³/s], pressures [Pa], ``share`` of the rated flow [-].

    ``main`` is the pressure at the source that feeds it. ``net`` and ``discharge`` are ``None`` beyond the
    end of the curve. ``at_header`` is what is left at the end of the test header, where its loss is told.
    """

    name: StateName
    flow: float
    suction: float
    net: float | None
    discharge: float | None
    main: float
    share: float | None
    at_header: float | None = None


@dataclass(frozen=True, slots=True)
class PumpAnswer:
    """The facts of one pump device; pressures [Pa], flows [m³/s], shares of the rating [-].

    ``fed_by`` names the source that feeds it and ``from_tank`` says that this is a tank. ``discharge`` in
    ``highest_discharge`` is churn on the highest pressure without flow at the suction. ``net_at_rated`` is
    the curve at the rated flow. ``lines`` and ``points`` are the graph at the pump: suction, pump and both
    together against the flow through the pump, with ``drawn_before`` [m³/s] drawn before it.
    """

    tag: str
    title: str
    source: str
    pipe: str
    inlet: str
    outlet: str
    fed_by: str
    from_tank: bool
    arrangement: str
    from_limits: bool
    rating: PumpRating | None
    churn: float
    net_at_rated: float | None
    net_at_overload: float | None
    curve_end: float
    highest_suction: float
    highest_discharge: float
    states: tuple[PumpState, ...]
    drawn_before: float
    lines: tuple[CurveLine, ...]
    points: tuple[MarkedPoint, ...]
    note: str = ""

    @property
    def churn_share(self) -> float | None:
        """Churn over rated pressure."""
        return None if self.rating is None else self.churn / self.rating.pressure

    @property
    def overload_share(self) -> float | None:
        """Net pressure at 150 % of the rated flow over rated pressure."""
        if self.rating is None or self.net_at_overload is None:
            return None
        return self.net_at_overload / self.rating.pressure

    @property
    def lowest_suction(self) -> PumpState | None:
        """The state in which the suction is lowest; ``None`` where the pump stands still."""
        return min(self.states, key=lambda state: state.suction, default=None)

    def state(self, name: StateName) -> PumpState | None:
        """Return the state of that name, ``None`` where it was not solved."""
        return next((state for state in self.states if state.name == name), None)


@dataclass(frozen=True, slots=True, eq=False)
class Stages:
    """What the pipeline knows when it asks for the pumps."""

    project: Project
    network: Network
    case: DemandCase
    solution: Solution
    operating: Solution
    comparison: Comparison
    curves: Sequence[NodeSupply]


def pump_answers(stages: Stages) -> tuple[PumpAnswer, ...]:
    """Return the facts of every pump that stands in an open pipe, in the order of the pipes."""
    devices = {device.tag: device for device in stages.project.system.devices}
    found = []
    for pipe in stages.project.system.pipes:
        for place, tag in enumerate(pipe.devices):
            device = devices[tag]
            if device.kind == "pump" and pipe.valve != "closed":
                before = tuple(devices[one] for one in pipe.devices[:place])
                found.append(_Reader(stages, pipe, device, before).answer())
    return tuple(found)


@dataclass(frozen=True, slots=True)
class _Reader:
    """Reads one pump out of the solved states."""

    stages: Stages
    pipe: Pipe
    device: Device
    before: tuple[Device, ...]

    @property
    def curve(self) -> Curve:
        return Curve(self.device.flows, self.device.values)

    @property
    def rating(self) -> PumpRating | None:
        told = self.device.pump
        if told is None or told.rated_flow is None or told.rated_pressure is None:
            return None
        return PumpRating(told.rated_flow, told.rated_pressure)

    def answer(self) -> PumpAnswer:
        curve, rating, told = self.curve, self.rating, self.device.pump
        supply = self._feeding()
        states = self._states(supply)
        highest = self._highest_suction()
        demand = next((state for state in states if state.name == "demand"), None)
        lines, drawn = self._lines(supply, demand)
        return PumpAnswer(
            tag=self.device.tag,
            title=self.device.title or self.device.tag,
            source=self.device.source,
            pipe=self.pipe.tag,
            inlet=self.pipe.start,
            outlet=self.pipe.end,
            fed_by=supply.tank.tag if supply.tank is not None else supply.node,
            from_tank=supply.tank is not None,
            arrangement=_arrangement(self.device),
            from_limits=told is not None and told.from_limits,
            rating=rating,
            churn=float(curve.values[0]),
            net_at_rated=None if rating is None else self._net(rating.flow),
            net_at_overload=None if rating is None else self._net(rating.overload_flow),
            curve_end=curve.flows[-1],
            highest_suction=highest,
            highest_discharge=highest + float(curve.values[0]),
            states=states,
            drawn_before=drawn,
            lines=lines,
            points=self._points(states, rating),
            note="" if demand is not None else "The pump stands still at the demand.",
        )

    def _net(self, flow: float) -> float | None:
        curve = self.curve
        if not curve.flows[0] <= flow <= curve.flows[-1] * (1 + 1e-9):
            return None
        return float(curve.at(min(flow, curve.flows[-1]))[0])

    def _feeding(self) -> NodeSupply:
        """Return the source nearest to the suction; the principal one where no open way leads there."""
        system, solution = self.stages.project.system, self.stages.solution
        ways = []
        for one in self.stages.curves:
            try:
                way = solved_route(system, solution, one.node, self.pipe.start, 1.0, 1.0)
            except DomainError:
                continue
            if self.device.tag not in _devices_on(way, system.pipes):
                ways.append((len(way.pipes), one))
        if ways:
            return min(ways, key=lambda way: way[0])[1]
        return next(one for one in self.stages.curves if one.node == self.stages.comparison.principal)

    def _highest_suction(self) -> float:
        """Return the highest pressure without flow at the suction [Pa], pumps before it running."""
        project, found = self.stages.project, []
        for one in self.stages.curves:
            top = max(curve.static for curve in one.measured)
            weight = project.fluid.unit_weight
            try:
                found.append(no_flow_pressure(project.system, top, one.node, self.pipe.start, weight))
            except DomainError:
                continue
        return max(found, default=math.nan)

    def _suction(self, solution: Solution, flow: float) -> float:
        return float(solution.pressure[solution.node(self.pipe.start)]) - lost_in(self.before, flow)

    def _states(self, supply: NodeSupply) -> tuple[PumpState, ...]:
        stages = self.stages
        states = [
            self._state("demand", stages.solution, supply, stages.comparison.shift),
            self._state("actual supply", stages.operating, supply, 0.0),
        ]
        solution = self._overload()
        if solution is not None:
            states.append(self._state("150 % of rated flow", solution, supply, 0.0))
        return tuple(state for state in states if state is not None)

    def _overload(self) -> Solution | None:
        """Return the state in which this pump gives 150 % of its rated flow, drawn behind it.

        Where others feed the same node (a second pump, a tank) more is drawn until it does; ``None`` where
        the supply cannot give it.
        """
        if self.rating is None:
            return None
        wanted = drawn = self.rating.overload_flow
        sources, closed = source_curves(self.stages.curves), self.stages.case.closed_pipes
        for _ in range(_TURNS):
            load = LoadCase((), {self.pipe.end: drawn}, closed)
            try:
                solution = solve_operating(self.stages.network, load, sources)
            except (NotConvergedError, DomainError):
                return None
            flow = self._flow(solution)
            if abs(flow - wanted) <= _CLOSE * wanted:
                return solution
            if not flow > _AT_REST:
                return None
            drawn *= min(max(wanted / flow, 0.5), 4.0)
        return None

    def _flow(self, solution: Solution) -> float:
        return float(solution.pipe_flow[solution.pipe_tags.index(self.pipe.tag)])

    def _state(
        self, name: StateName, solution: Solution, supply: NodeSupply, more: float
    ) -> PumpState | None:
        flow = self._flow(solution)
        if not flow > _AT_REST:
            return None
        suction, net = self._suction(solution, flow) + more, self._net(flow)
        discharge = None if net is None else suction + net
        row = solution.source_tags.index(supply.node)
        return PumpState(
            name=name,
            flow=flow,
            suction=suction,
            net=net,
            discharge=discharge,
            main=float(solution.source_pressure[row]) + more,
            share=None if self.rating is None else flow / self.rating.flow,
            at_header=self._at_header(flow, discharge),
        )

    def _at_header(self, flow: float, discharge: float | None) -> float | None:
        told = self.device.pump
        if told is None or not told.test_flows or discharge is None:
            return None
        loss = Curve(told.test_flows, told.test_losses)
        return discharge - float(loss.carried_on(flow)[0]) if flow <= told.test_flows[-1] else None

    def _lines(self, supply: NodeSupply, demand: PumpState | None) -> tuple[tuple[CurveLine, ...], float]:
        curve, solution = self.curve, self.stages.solution
        if demand is None:
            return (), 0.0
        project = self.stages.project
        given = float(solution.source_flow[solution.source_tags.index(supply.node)])
        drawn = max(given - demand.flow, 0.0)
        exponent = project.law.flow_exponent
        way = solved_route(project.system, solution, supply.node, self.pipe.start, demand.flow, exponent)

        def suction(flow: float) -> float:
            return supply.curve.pressure_at(flow + drawn) - way.loss_at(flow) - lost_in(self.before, flow)

        end = curve.flows[-1]
        flows = tuple(end * (index / _SAMPLES) ** (1 / exponent) for index in range(_SAMPLES + 1))
        kept = tuple(sorted({*flows, *(flow for flow in curve.flows if flow >= 0.0)}))
        below = tuple(suction(flow) for flow in kept)
        gains = tuple(float(curve.carried_on(flow)[0]) for flow in kept)
        tested = supply.curve.tested_flow - drawn
        carried = max(tested, 0.0) if tested < end else None
        both = tuple(low + gain for low, gain in zip(below, gains, strict=True))
        style: Literal["tank", "measured"] = "tank" if supply.tank is not None else "measured"
        name = f"{supply.tank.tag} at the suction" if supply.tank is not None else "main at the suction"
        return (
            CurveLine(name, style, kept, below, carried),
            CurveLine("pump", "pump", kept, gains),
            CurveLine("both together", "combined", kept, both, carried),
        ), drawn

    def _points(self, states: tuple[PumpState, ...], rating: PumpRating | None) -> tuple[MarkedPoint, ...]:
        points = []
        if rating is not None:
            points.append(MarkedPoint("rated", "test", rating.flow, rating.pressure))
            overload = self._net(rating.overload_flow)
            if overload is not None:
                points.append(MarkedPoint("150 %", "test", rating.overload_flow, overload))
        for state in states:
            if state.discharge is None or state.net is None:  # beyond the end of the curve
                continue
            if state.name == "demand":
                asked = self._suction(self.stages.solution, state.flow) + state.net
                points.append(MarkedPoint("demand", "demand", state.flow, asked))
                points.append(MarkedPoint("available", "available", state.flow, state.discharge))
            elif state.name == "actual supply":
                points.append(MarkedPoint("operating", "operating", state.flow, state.discharge))
        return tuple(points)


def _devices_on(way: Route, pipes: Sequence[Pipe]) -> set[str]:
    on: Mapping[str, Pipe] = {pipe.tag: pipe for pipe in pipes}
    return {device for tag in way.pipes for device in on[tag].devices}


def _arrangement(device: Device) -> str:
    told = device.pump
    if told is None or told.count == 1:
        words = "one pump"
    else:
        words = f"{told.count} like pumps in {told.arrangement}"
    if told is not None and told.speed_ratio != 1.0:
        words += f", at {100 * told.speed_ratio:.1f} % of the speed of the curve"
    return words
