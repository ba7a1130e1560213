"""The point of comparison in solved states of the network, for what no sum along a route can tell.

With several sources, or behind a valve that holds a pressure, the pressure at a point is what the whole
network gives there. The states here draw what the demand draws, at the same nodes, from the supplies as
they are: a gauge at the point would show their pressure.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Final

import numpy as np

from supplycheck.errors import NotConvergedError
from supplycheck.model import Project
from supplycheck.network import LoadCase, Network, SourceCurve, build_network, solve_operating
from supplycheck.network.records import Solution
from supplycheck.supply.sources import NodeSupply, source_curves
from supplycheck.supply.standing import standing_pressures

TRICKLE: Final = 1e-10
"""Flow [m³/s] drawn at the point of a state without flow, so that shut valves take one side."""
RUNS: Final = 1e-6
"""Share of the whole flow beyond which water is said to run into a source."""
MOST_FLOW: Final = 10.0
"""Flow [m³/s] beyond which a supply is said to have no limit."""
_CLOSE: Final = 1e-9


@dataclass(frozen=True, slots=True, eq=False)
class States:
    """What is solved again and again: network, draws of the demand [m³/s] by node, shut pipes, supplies.

    ``at`` is the point of comparison; ``adjusted`` and ``measured`` are the curves with and without the
    adjustments of the project.
    """

    network: Network
    at: str
    drawn: Mapping[str, float]
    closed: tuple[str, ...]
    adjusted: tuple[SourceCurve, ...]
    measured: tuple[SourceCurve, ...]

    @classmethod
    def of(
        cls, project: Project, solution: Solution, curves: Sequence[NodeSupply], network: Network | None
    ) -> States:
        """Return the states of the demand ``solution``; ``network`` is built where it is not given."""
        by_node = {one.node: one for one in curves}
        ordered = [by_node[tag] for tag in solution.source_tags]
        drawn = zip(solution.node_tags, solution.outflow.tolist(), strict=True)
        return cls(
            network or build_network(project.system, law=project.law, fluid=project.fluid),
            project.supply.compare_at,
            {tag: flow for tag, flow in drawn if flow > 0.0},
            shut_pipes(solution),
            source_curves(ordered),
            source_curves(ordered, adjusted=False),
        )

    @property
    def total(self) -> float:
        """All that is drawn [m³/s]."""
        return sum(self.drawn.values())

    def state(self, share: float = 1.0, *, adjusted: bool = True) -> Solution:
        """Return the state in which ``share`` of every draw runs; raises :class:`NotConvergedError`."""
        load = LoadCase((), {tag: share * flow for tag, flow in self.drawn.items()}, self.closed)
        return solve_operating(self.network, load, self.adjusted if adjusted else self.measured)

    def at_rest(self) -> Solution:
        """Return the state in which nothing is drawn; raises :class:`NotConvergedError`."""
        load = LoadCase((), {self.at: TRICKLE}, self.closed)
        return solve_operating(self.network, load, self.adjusted)

    def pressure(self, share: float = 1.0, *, adjusted: bool = True) -> float:
        """Return the pressure [Pa] at the point; raises :class:`NotConvergedError`."""
        return self.shown(self.state(share, adjusted=adjusted))

    def shown(self, state: Solution) -> float:
        """Return what a gauge at the point shows in ``state`` [Pa]."""
        return float(state.pressure[state.node(self.at)])

    def flow_at(self, pressure: float, static: float) -> tuple[float | None, bool]:
        """Return the flow of all sources [m³/s] at which ``pressure`` [Pa] is left at the point.

        Every draw of the demand grows or shrinks alike. 0 where ``static`` [Pa], what stands there without
        flow, is below it; ``None`` where the pressure never falls to it. The second value is false where
        the network has no solution at more than the flow returned, which is then a lower bound.
        """
        from scipy.optimize import brentq

        if static < pressure:
            return 0.0, True
        if any(curve.node == self.at and _is_level(curve) for curve in self.adjusted):
            return None, True

        def left(share: float) -> float:
            return (self.pressure(share) if share > 0.0 else static) - pressure

        low, high = 0.0, 1.0
        try:
            while left(high) >= 0.0:
                low, high = high, 2.0 * high
                if high * self.total > MOST_FLOW:
                    return None, True
            share = float(brentq(left, low, high, xtol=_CLOSE, rtol=_CLOSE)) if left(low) > 0.0 else low
        except NotConvergedError:
            return low * self.total, False
        return share * self.total, True


def _is_level(curve: SourceCurve) -> bool:
    """Return whether ``curve`` holds its pressure at every flow, as a tank does."""
    return not curve.flows and curve.resistance == 0.0


def shut_pipes(solution: Solution) -> tuple[str, ...]:
    """Return the tags of the pipes that are shut in ``solution``."""
    return tuple(solution.pipe_tags[row] for row in np.flatnonzero(np.isnan(solution.friction)).tolist())


def fed_sources(solution: Solution) -> dict[str, float]:
    """Return the sources into which water runs in ``solution``, and how much [m³/s]."""
    flows = dict(zip(solution.source_tags, solution.source_flow.tolist(), strict=True))
    least = least_flow(flows)
    return {tag: -flow for tag, flow in flows.items() if -flow > least}


def least_flow(given: Mapping[str, float]) -> float:
    """Return the flow [m³/s] up to which a source is said to give or take nothing."""
    return RUNS * max(given.values(), default=0.0)


def fed_at_rest(
    project: Project, curves: Sequence[NodeSupply], closed: Sequence[str] = ()
) -> tuple[str, ...]:
    """Return the sources into which water runs while nothing is drawn: a stronger one is open to them."""
    statics = {one.node: one.curve.static for one in curves}
    standing = standing_pressures(project.system, statics, project.fluid.unit_weight, closed)
    return tuple(tag for tag, static in statics.items() if standing[tag] > static + 1.0)


def static_at(
    project: Project, curves: Sequence[NodeSupply], states: States | None, at: str, closed: Sequence[str]
) -> float:
    """Return what a gauge at ``at`` shows with nothing drawn [Pa].

    Where water runs from one source into another even then, the network is solved; else nothing flows and
    the highest pressure that comes there stands. NaN where none does.
    """
    statics = {one.node: one.curve.static for one in curves}
    standing = standing_pressures(project.system, statics, project.fluid.unit_weight, closed)
    if states is not None and any(standing[tag] > static + 1.0 for tag, static in statics.items()):
        try:
            return states.shown(states.at_rest())
        except NotConvergedError:
            pass  # the highest that can stand there is on the safe side of every rating
    return standing.get(at, float("nan"))
