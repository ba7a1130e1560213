"""The way from a source to the point of comparison, and what is lost on it."""

from __future__ import annotations

import math
from collections import deque
from collections.abc import Collection
from dataclasses import dataclass, replace
from typing import Final

from supplycheck.errors import DomainError
from supplycheck.hydraulics import Curve
from supplycheck.model import Device, Pipe, System
from supplycheck.network.records import Solution
from supplycheck.supply.curve import SupplyCurve
from supplycheck.supply.standing import is_one_way, standing_pressures

_NO_WAY: Final = "no open pipe leads from supply node {start} to {end}"
STILL: Final = 1.0
"""Difference of pressure [Pa] beyond which a valve is taken to hold it."""


@dataclass(frozen=True, slots=True)
class Route:
    """Pressure lost [Pa] from a source to the point of comparison when the source gives ``flow`` [m³/s].

    pressure at the source = pressure at the point + ``elevation`` + ``friction`` + ``device``.
    ``curves`` are the devices that follow the flow: curve, flow through it [m³/s], sign (+1 loss,
    −1 gain); ``fixed`` is the rest of ``device``, the same at every flow.
    """

    pipes: tuple[str, ...]
    flow: float
    elevation: float
    friction: float
    device: float
    fixed: float
    curves: tuple[tuple[Curve, float, int], ...]
    exponent: float

    def loss_at(self, flow: float) -> float:
        """Return the loss [Pa], height included, when the source gives ``flow`` [m³/s].

        The flow in every pipe of the route is taken in proportion to it; exact at :attr:`flow`. A
        device asked beyond its points is carried on straight (:meth:`within_devices` says so).
        """
        share = flow / self.flow if self.flow > 0.0 else 0.0
        devices = sum(sign * float(curve.carried_on(own * share)[0]) for curve, own, sign in self.curves)
        return self.elevation + self.friction * float(share**self.exponent) + self.fixed + devices

    @property
    def pumps(self) -> tuple[Curve, ...]:
        """The pressure curves of the pumps on the route."""
        return tuple(curve for curve, _, sign in self.curves if sign < 0)

    @property
    def without_pumps(self) -> Route:
        """The same route as if its pumps gave nothing."""
        gains = sum(float(curve.carried_on(own)[0]) for curve, own, sign in self.curves if sign < 0)
        kept = tuple(entry for entry in self.curves if entry[2] > 0)
        return replace(self, curves=kept, device=self.device + gains)

    @property
    def largest_flow(self) -> float:
        """The source flow [m³/s] at which the first of its devices is past its curve."""
        ends = [curve.flows[-1] / own * self.flow for curve, own, _ in self.curves]
        return min(ends, default=math.inf)

    def within_devices(self, flow: float) -> bool:
        """Return whether every device on the route is given up to its share of ``flow`` [m³/s]."""
        share = flow / self.flow if self.flow > 0.0 else 0.0
        return all(own * share <= curve.flows[-1] for curve, own, _ in self.curves)


@dataclass(frozen=True, slots=True)
class CarriedCurve:
    """A supply curve as it is felt at the point of comparison, behind the losses of the route."""

    supply: SupplyCurve
    route: Route

    def pressure_at(self, flow: float) -> float:
        """Return the pressure [Pa] at the point when the source gives ``flow`` [m³/s]."""
        return self.supply.pressure_at(flow) - self.route.loss_at(flow)

    def flow_at(self, pressure: float) -> float | None:
        """Return the flow [m³/s] of the source at which ``pressure`` [Pa] is left at the point.

        0 where it is not there even at no flow; ``None`` where the curve never falls to it.
        """
        if self.pressure_at(0.0) < pressure:
            return 0.0
        low, high = 0.0, max(self.route.flow, 1e-3)
        while self.pressure_at(high) >= pressure:
            low, high = high, 2.0 * high
            if high > 1e3:
                return None
        while high - low > 1e-13 * high:
            middle = 0.5 * (low + high)
            if self.pressure_at(middle) >= pressure:
                low = middle
            else:
                high = middle
        return low


def route(
    system: System, start: str, end: str, closed: Collection[str] = ()
) -> tuple[tuple[Pipe, int], ...]:
    """Return the pipes from ``start`` to ``end`` with the fewest segments, each with its sense (±1).

    No check valve, pump or regulating valve is passed against its direction, none in ``closed`` at all.
    Raises :class:`DomainError` where no open pipe leads there.
    """
    beside: dict[str, list[tuple[Pipe, str, int]]] = {}
    devices = {device.tag: device for device in system.devices}
    for pipe in system.pipes:
        if pipe.valve == "closed" or pipe.tag in closed:
            continue
        beside.setdefault(pipe.start, []).append((pipe, pipe.end, 1))
        if not is_one_way(pipe, devices):
            beside.setdefault(pipe.end, []).append((pipe, pipe.start, -1))
    came: dict[str, tuple[Pipe, str, int]] = {}
    queue, seen = deque([start]), {start}
    while queue and end not in seen:
        here = queue.popleft()
        for pipe, there, sense in beside.get(here, ()):
            if there not in seen:
                seen.add(there)
                came[there] = (pipe, here, sense)
                queue.append(there)
    if end not in seen:
        raise DomainError(_NO_WAY.format(start=start, end=end))
    found: list[tuple[Pipe, int]] = []
    while end != start:
        pipe, end, sense = came[end]
        found.append((pipe, sense))
    return tuple(reversed(found))


def solved_route(
    system: System, solution: Solution, start: str, end: str, flow: float, exponent: float
) -> Route:
    """Return the route from ``start`` to ``end`` with its losses in ``solution``.

    ``flow`` [m³/s] is what the source at ``start`` gives; friction follows flow**exponent. A valve that is
    shut by the pressure behind it is passed only where there is no other way.
    """
    row = {tag: index for index, tag in enumerate(solution.pipe_tags)}
    shut = {tag for tag, index in row.items() if solution.friction[index] != solution.friction[index]}
    devices = {device.tag: device for device in system.devices}
    elevation = friction = device_loss = following = 0.0
    curves: list[tuple[Curve, float, int]] = []
    try:
        steps = route(system, start, end, shut | holding_pipes(system, solution))
    except DomainError:
        steps = route(system, start, end, shut)
    for pipe, sense in steps:
        index = row[pipe.tag]
        elevation += sense * float(solution.elevation_loss[index])
        friction += sense * float(solution.friction[index])
        device_loss += sense * float(solution.device_loss[index])
        own = sense * float(solution.pipe_flow[index])
        for device in (devices[tag] for tag in pipe.devices):
            curve, sign = _following(device), -1 if device.kind == "pump" else 1
            if curve is not None and own > 0.0:
                curves.append((curve, own, sign))
                following += sign * float(curve.carried_on(own)[0])
    return Route(
        tuple(pipe.tag for pipe, _ in steps),
        flow,
        elevation,
        friction,
        device_loss,
        device_loss - following,
        tuple(curves),
        exponent,
    )


def holding_pipes(system: System, solution: Solution) -> set[str]:
    """Return the pipes in which a valve holds a difference of pressure in ``solution``.

    They are one-way pipes shut by the pressure behind them, and regulating valves that hold their setting.
    What is lost there is no loss of the flow.
    """
    devices = {device.tag: device for device in system.devices}
    row = {tag: index for index, tag in enumerate(solution.pipe_tags)}
    found = set()
    for pipe in system.pipes:
        if pipe.valve == "closed" or not is_one_way(pipe, devices):
            continue
        index, own = row[pipe.tag], 0.0
        flow = max(float(solution.pipe_flow[index]), 0.0)
        for device in (devices[tag] for tag in pipe.devices if flow > 0.0 and devices[tag].flows):
            sign = -1.0 if device.kind == "pump" else 1.0
            own += sign * float(Curve(device.flows, device.values).carried_on(flow)[0])
        if abs(float(solution.device_loss[index]) - own) > STILL:
            found.add(pipe.tag)
    return found


def _following(device: Device) -> Curve | None:
    """Return the curve of a device whose loss or gain follows the flow."""
    follows = device.kind in {"loss", "check valve", "pump"} and len(device.flows) > 1
    return Curve(device.flows, device.values) if follows else None


def no_flow_pressure(system: System, static: float, start: str, end: str, unit_weight: float) -> float:
    """Return the pressure [Pa] at ``end`` with nothing flowing and ``static`` [Pa] at ``start`` alone.

    Pumps on the way add their pressure at no flow; a regulating valve holds its setting.
    Raises :class:`DomainError` where no open pipe leads there.
    """
    standing = standing_pressures(system, {start: static}, unit_weight)
    if end not in standing:
        raise DomainError(_NO_WAY.format(start=start, end=end))
    return standing[end]
