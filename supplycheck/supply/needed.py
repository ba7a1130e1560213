"""What pump would be needed where the supply falls short, as rated flow and pressure."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Final

from supplycheck.hydraulics.pump import OVERLOAD_FLOW
from supplycheck.model import Project
from supplycheck.network.records import Solution
from supplycheck.supply.comparison import Comparison
from supplycheck.supply.curve import EXPONENT, SupplyCurve
from supplycheck.supply.pump import PumpOption, needed_pumps
from supplycheck.supply.pumping import PumpAnswer
from supplycheck.supply.sources import NodeSupply

MOST_OPTIONS: Final = 4
USUAL_FLOOR: Final = 20.0 * 0.45359237 * 9.80665 / 0.0254**2
"""Pressure [Pa] kept in a main, 20 psi (common practice of utilities, no source)."""


@dataclass(frozen=True, slots=True)
class NeededPump:
    """A pump that would close the gap; flows [m³/s], pressures [Pa].

    It stands behind ``node``, or in place of the pump named ``instead_of``. ``flow`` is what passes it at
    the demand, ``suction`` what the supply leaves there, ``net`` the pressure that it must add and
    ``missing`` the gap that this closes (the margin that the rule asks is part of it). ``floor`` is what
    150 % of its rated flow must leave at the suction.
    """

    node: str
    instead_of: str
    flow: float
    suction: float
    net: float
    missing: float
    floor: float
    options: tuple[PumpOption, ...]


def needed_pump(
    project: Project,
    solution: Solution,
    comparison: Comparison,
    curves: Sequence[NodeSupply],
    pumps: Sequence[PumpAnswer],
    rated_flows: Sequence[float] = (),
) -> NeededPump | None:
    """Return the pump that would close the gap, ``None`` where the supply is enough or none helps.

    ``rated_flows`` [m³/s] are the sizes in which pumps are made; where none is given or none reaches, the
    pump is rated at the demand flow itself. It stands behind the principal source, after what is drawn at
    its node, or takes the place of the pump that carries most.
    """
    missing = (comparison.required or 0.0) - comparison.shift  # no pump helps where the main itself ends
    if missing <= 0.0:
        return None
    supply = next(one for one in curves if one.node == comparison.principal)
    floor = 0.0 if supply.tank is not None else project.supply.main_floor_pressure
    floor = USUAL_FLOOR if floor is None else floor
    replaced = _carrying_most(pumps)
    if replaced is None:
        node, net = comparison.principal, missing
        given = float(solution.source_flow[solution.source_tags.index(node)])
        drawn = float(solution.outflow[solution.node(node)])
        flow = given - drawn
        if flow <= 0.0:  # another source feeds what is drawn here: a pump behind this one moves nothing
            return None
        asked = {0.0, flow, *(OVERLOAD_FLOW * rated for rated in (*rated_flows, flow))}
        below = _curve(node, [(q, supply.curve.pressure_at(q + drawn)) for q in sorted(asked)])
    else:
        pump, flow, added = replaced
        node, net = pump.inlet, added + missing
        below = _curve(node, list(zip(pump.lines[0].flows, pump.lines[0].pressures, strict=True)))
    suction = below.pressure_at(flow)
    options = _options(below, flow, suction + net, rated_flows, floor)
    instead = "" if replaced is None else replaced[0].tag
    return NeededPump(node, instead, flow, suction, net, missing, floor, options)


def _carrying_most(pumps: Sequence[PumpAnswer]) -> tuple[PumpAnswer, float, float] | None:
    """Return the pump that carries most of the demand, its flow and what it adds; ``None`` without one."""
    carrying = [
        (pump, state.flow, state.net)
        for pump in pumps
        if pump.lines and (state := pump.state("demand")) is not None and state.net is not None
    ]
    return max(carrying, key=lambda one: one[1], default=None)


def _curve(node: str, points: Sequence[tuple[float, float]]) -> SupplyCurve:
    flows = tuple(flow for flow, _ in points)
    pressures = tuple(pressure for _, pressure in points)
    step = flows[-1] ** EXPONENT - flows[-2] ** EXPONENT
    tail = min((pressures[-1] - pressures[-2]) / step, 0.0)
    return SupplyCurve("suction", node, flows, pressures, tail, ("suction",) * len(flows), flows[-1])


def _options(
    suction: SupplyCurve, flow: float, pressure: float, rated_flows: Sequence[float], floor: float
) -> tuple[PumpOption, ...]:
    for sizes in (rated_flows, (flow,)):
        found = needed_pumps(
            suction=suction, flow=flow, pressure=pressure, rated_flows=sizes, suction_floor=floor
        )
        if found:
            return found[:MOST_OPTIONS]
    return ()
