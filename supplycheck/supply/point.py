"""What stands at the point of comparison: demanded, available, without flow; and how it was found.

Where one source feeds the point and no valve holds a pressure on the way, the sum along the route is exact:
what is left over at the source is left over at the point. With several sources or a regulating valve the
network is solved, see :mod:`supplycheck.supply.states`.
"""

from __future__ import annotations

from collections.abc import Collection, Mapping, Sequence
from dataclasses import dataclass, replace
from typing import Final

from supplycheck.errors import DomainError, NotConvergedError
from supplycheck.model import Pipe, Project, System
from supplycheck.model.words import Step, Words
from supplycheck.network import Network
from supplycheck.network.records import Solution
from supplycheck.supply.narration import (
    arrival_steps,
    behind_valve_steps,
    scaled_step,
    shown_step,
    state_sharing_step,
    way_in_steps,
)
from supplycheck.supply.route import (
    STILL,
    CarriedCurve,
    Route,
    holding_pipes,
    route,
    solved_route,
)
from supplycheck.supply.shares import SourceShare
from supplycheck.supply.sources import NodeSupply
from supplycheck.supply.standing import is_one_way, standing_pressures
from supplycheck.supply.states import States, least_flow, shut_pipes, static_at

NOTABLE: Final = 350.0
"""Difference [Pa] between margin and what is left at the point that is worth a note, 0.05 psi."""
MOST_NAMED: Final = 5
"""Most pipes named where no water comes to the point."""


@dataclass(frozen=True, slots=True)
class Point:
    """The point of comparison; pressures [Pa], flow [m³/s].

    ``available`` is what a gauge there shows with the demand drawn from the supplies as they are;
    ``unadjusted`` the same before the adjustments of the project. ``held_back`` says that by a
    regulating valve it is not demand and margin together. ``states`` is ``None`` where the sum along the
    route is exact at every flow.
    """

    demand: float
    available: float
    unadjusted: float
    available_flow: float | None
    static: float
    highest_static: float
    held_back: bool
    carried: CarriedCurve
    carried_unadjusted: CarriedCurve
    steps: tuple[Step, ...]
    notes: tuple[Words, ...]
    states: States | None


def point_of(
    project: Project,
    solution: Solution,
    by_node: Mapping[str, NodeSupply],
    shares: Sequence[SourceShare],
    margin: float,
    network: Network | None = None,
) -> Point:
    """Return the point of comparison in the demand ``solution``, with ``margin`` [Pa] left at the sources.

    Raises :class:`DomainError` where no water comes to the point, :class:`NotConvergedError` where the
    network without adjustments has no solution.
    """
    return _Finder(project, solution, by_node, tuple(shares), margin, network).point()


@dataclass(frozen=True, slots=True, eq=False)
class _Finder:
    project: Project
    solution: Solution
    by_node: Mapping[str, NodeSupply]
    shares: tuple[SourceShare, ...]
    margin: float
    network: Network | None

    @property
    def at(self) -> str:
        return self.project.supply.compare_at

    @property
    def several(self) -> bool:
        return len(self.shares) > 1

    def point(self) -> Point:
        demand = float(self.solution.pressure[self.solution.node(self.at)])
        given = {share.node: share.flow for share in self.shares}
        start = start_of(self.project.system, self.solution, given, self.at)
        supply, path = self.by_node[start], self._route(self.solution, start, given[start])
        states = self._states()
        available, state, notes = self._available(demand, states)
        held_back = state is not None
        summed = not held_back and not self._held(self.solution, path)
        exact = summed and not self._regulated(path) and not (self.several and given[start] <= 0.0)
        static, highest = self._statics(states)
        carried = CarriedCurve(supply.curve, path)
        by_route = states is None or (exact and not self.several)
        if by_route or states is None:
            unadjusted = available + self._adjusted_by(start)
            flow, sure = carried.flow_at(demand), True
        else:
            unadjusted = self._unadjusted(states, available)
            flow, sure = states.flow_at(demand, static)
        if flow is not None and not sure:
            notes += (Words(_BOUND, (("flow", flow, "flow"),)),)
        if abs(available - demand - self.margin) > NOTABLE:
            notes += (self._held_note(available, demand),)
        if self.several and not given[start] > least_flow(given):
            notes += (self._idle_note(start, given),)
        if summed:
            steps = arrival_steps(supply, given[start], path, self.at, demand, self.margin)
        else:
            steps = self._state_steps(states, state, available, demand)
        if flow and sure and sum(given.values()) > 0.0:
            steps += (scaled_step(self.at, demand, given, flow),)
        return Point(
            demand=demand,
            available=available,
            unadjusted=unadjusted,
            available_flow=flow,
            static=static,
            highest_static=highest,
            held_back=held_back,
            carried=carried,
            carried_unadjusted=CarriedCurve(supply.unadjusted, path),
            steps=steps,
            notes=notes,
            states=None if exact else states,
        )

    def _route(self, solution: Solution, start: str, flow: float) -> Route:
        exponent = self.project.law.flow_exponent
        return solved_route(self.project.system, solution, start, self.at, flow, exponent)

    def _states(self) -> States | None:
        if not self.several and not _regulating(self.project.system):
            return None
        return States.of(self.project, self.solution, tuple(self.by_node.values()), self.network)

    def _available(
        self, demand: float, states: States | None
    ) -> tuple[float, Solution | None, tuple[Words, ...]]:
        """Return what is available, the state that shows it where a valve holds some back, and notes.

        Only a regulating valve knows a pressure of its own: without one all pressures rise with the
        supplies alike, and what is left over at the sources is left over everywhere.
        """
        alike = demand + self.margin
        if states is None or not _regulating(self.project.system):
            return alike, None, ()
        try:
            state = states.state()
        except NotConvergedError:
            return alike, None, (Words(_UNSOLVED, (("at", self.at, ""),)),)
        shown = states.shown(state)
        return (alike, None, ()) if abs(shown - alike) <= STILL else (shown, state, ())

    def _unadjusted(self, states: States, available: float) -> float:
        if all(one.curve == one.unadjusted for one in self.by_node.values()):
            return available
        return states.pressure(adjusted=False)

    def _adjusted_by(self, start: str) -> float:
        share = next(share for share in self.shares if share.node == start)
        return share.unadjusted - share.available

    def _statics(self, states: States | None) -> tuple[float, float]:
        curves, closed = tuple(self.by_node.values()), shut_pipes(self.solution)
        static = static_at(self.project, curves, states if self.several else None, self.at, closed)
        highest = {one.node: max(curve.static for curve in one.measured) for one in curves}
        weight = self.project.fluid.unit_weight
        return static, standing_pressures(self.project.system, highest, weight, closed)[self.at]

    def _held(self, solution: Solution, path: Route) -> list[Pipe]:
        """Return the pipes on ``path`` in which a valve holds a difference in ``solution``."""
        pipes = {pipe.tag: pipe for pipe in self.project.system.pipes}
        held = holding_pipes(self.project.system, solution)
        return [pipes[tag] for tag in path.pipes if tag in held]

    def _regulated(self, path: Route) -> bool:
        return not _regulating(self.project.system).keys().isdisjoint(path.pipes)

    def _held_note(self, available: float, demand: float) -> Words:
        text = (
            "With the demand drawn a gauge at {at} would show {available}, {left} above the demand there. "
            "The supply could be lowered by {margin} with the demand still met. The two differ because a "
            "regulating valve throttles more while the supply is not lowered."
        )
        values = (
            ("at", self.at, ""),
            ("available", available, "pressure"),
            ("left", available - demand, "pressure"),
            ("margin", self.margin, "pressure"),
        )
        return Words(text, values)

    def _idle_note(self, start: str, given: Mapping[str, float]) -> Words:
        text = (
            "{node} gives no water to this demand: a stronger supply holds it back. The demand at {at} is "
            "what stands there with all supplies lowered by the margin; compare at {main}, which gives "
            "most, to see what the demand asks of the supply."
        )
        main = max(given, key=lambda tag: given[tag])
        return Words(text, (("node", start, ""), ("at", self.at, ""), ("main", main, "")))

    def _state_steps(
        self, states: States | None, state: Solution | None, available: float, demand: float
    ) -> tuple[Step, ...]:
        """Return how the pressure at the point follows in the solved state."""
        steps: list[Step] = []
        if states is not None and state is None:
            try:
                state = states.state()
            except NotConvergedError:
                state = None
        if state is not None:
            given = dict(zip(state.source_tags, state.source_flow.tolist(), strict=True))
            if self.several:
                steps.append(state_sharing_step(tuple(given.items())))
            steps += self._way_in(state, given)
        left = available - demand if abs(available - demand - self.margin) > STILL else None
        steps += shown_step(self.at, available, demand, left)
        return tuple(steps)

    def _way_in(self, state: Solution, given: Mapping[str, float]) -> tuple[Step, ...]:
        """Return the steps to the point from the last valve that holds its setting, or from the source."""
        system, exponent = self.project.system, self.project.law.flow_exponent
        start = start_of(system, state, given, self.at)
        path = self._route(state, start, given[start])
        held = self._held(state, path)
        if not held:
            supply = self.by_node[start]
            return way_in_steps(supply, given[start], path, self.at)
        valves, last = _regulating(system), held[-1]
        row = state.pipe_tags.index(last.tag)
        if last.tag not in valves or not state.pipe_flow[row] > 0.0:
            return ()
        tag, setting = valves[last.tag]
        before = float(state.pressure[state.node(last.start)]) - setting
        way = solved_route(system, state, last.end, self.at, 1.0, exponent)
        way = replace(  # the valve stands at the start of its pipe
            way,
            elevation=way.elevation + float(state.elevation_loss[row]),
            friction=way.friction + float(state.friction[row]),
            device=way.device + float(state.device_loss[row]) - before,
            pipes=(last.tag, *way.pipes),
        )
        return behind_valve_steps(tag, setting, way, self.at)


_UNSOLVED = (
    "With the demand drawn from the supplies as they are the network has no solution: what is available at "
    "{at} is taken as demand and margin together, and a regulating valve may hold it lower."
)
_BOUND = "Beyond {flow} the network has no solution: the flow at the demand pressure is at least that."


def _regulating(system: System) -> dict[str, tuple[str, float]]:
    """Return tag and setting [Pa] of the regulating valve in each open pipe that has one."""
    devices = {
        device.tag: (device.tag, device.setting)
        for device in system.devices
        if device.kind == "pressure-reducing valve" and device.setting is not None
    }
    return {
        pipe.tag: devices[tag]
        for pipe in system.pipes
        if pipe.valve != "closed"
        for tag in pipe.devices
        if tag in devices
    }


def start_of(system: System, solution: Solution, given: Mapping[str, float], at: str) -> str:
    """Return the source from which water comes to ``at``.

    That is one that stands there and gives water, else of those that reach it the one that gives most.
    ``given`` is what each source gives [m³/s]. One whose way no valve holds shut goes before the others.
    Raises :class:`DomainError`, with the valves in the way, where none reaches it.
    """
    shut = set(shut_pipes(solution))
    for closed in (shut | holding_pipes(system, solution), shut):
        for tag in sorted(
            given, key=lambda tag: (tag == at and given[tag] > 0.0, given[tag]), reverse=True
        ):
            try:
                route(system, tag, at, closed)
            except DomainError:
                continue
            return tag
    raise DomainError(_cut_off(system, tuple(given), at, shut))


def _cut_off(system: System, sources: Sequence[str], at: str, shut: Collection[str]) -> str:
    """Return in words which valves keep the water of ``sources`` from ``at``."""
    devices = {device.tag: device for device in system.devices}
    reached = set(standing_pressures(system, dict.fromkeys(sources, 0.0), 0.0, shut))
    around, row = {at}, [at]
    while row:
        here = row.pop()
        for pipe in system.pipes:
            for one, other in ((pipe.start, pipe.end), (pipe.end, pipe.start)):
                if one == here and other not in around | reached:
                    around.add(other)
                    row.append(other)
    named = []
    for pipe in system.pipes:
        inside, outside = {pipe.start, pipe.end} & around, {pipe.start, pipe.end} & reached
        if inside and outside:
            closed = pipe.valve == "closed" or pipe.tag in shut
            why = "closed" if closed else "one-way against it" if is_one_way(pipe, devices) else ""
            tags = f" ({', '.join(pipe.devices)})" if pipe.devices else ""
            named.append(f"{pipe.tag}{tags} is {why}")
    ways = ", ".join(named[:MOST_NAMED]) or "no pipe leads there"
    return (
        f"no open pipe leads from supply node {', '.join(sources)} to the point of comparison "
        f"{at}: {ways}. Compare at a node that the supply reaches (compare_at under [supply]), open the "
        "valve, or turn the pipe round: a one-way pipe runs from 'from' to 'to'."
    )
