"""Tanks: how much water a demand needs, how long the water lasts, how long the refill takes.

References
----------
.. [1] Storage = demand × duration, less the refill that may be counted (UFC 3-600-01, 2006, which also
   asks for a refill within 48 h, or 24 h where operations would be curtailed).
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from supplycheck.errors import DomainError
from supplycheck.model import Tank


@dataclass(frozen=True, slots=True)
class TankTime:
    """One tank against one demand; volumes [m³], flows [m³/s], times [s].

    ``nominal_volume`` is what the demand asks for over ``duration`` (``None`` where no duration is given)
    and ``actual_volume`` the same with the flow that really runs. ``lasts`` and ``actual_lasts`` are the
    times until empty (``None``: no volume is given; infinite: the refill keeps up). ``spare_volume`` is the
    volume less the larger of the two. ``refill_time`` fills the empty tank (``None`` without refill or
    volume).
    """

    tag: str
    volume: float | None
    refill: float
    duration: float | None
    nominal_flow: float
    actual_flow: float | None
    nominal_volume: float | None
    actual_volume: float | None
    lasts: float | None
    actual_lasts: float | None
    spare_volume: float | None
    refill_time: float | None


def _checked(**values: float) -> None:
    for name, value in values.items():
        if not (math.isfinite(value) and value >= 0.0):
            raise DomainError(f"the {name} of a tank must be 0 or more, found {value:g}")


def needed_volume(*, flow: float, duration: float, refill: float = 0.0) -> float:
    """Return the volume [m³] that ``flow`` [m³/s] takes in ``duration`` [s] beyond ``refill`` [m³/s].

    Raises :class:`DomainError` for a number that is negative or not finite.

    >>> round(needed_volume(flow=550.0, duration=60.0))
    33000
    """
    _checked(flow=flow, duration=duration, refill=refill)
    return max(flow - refill, 0.0) * duration


def time_until_empty(*, volume: float, flow: float, refill: float = 0.0) -> float:
    """Return how long [s] ``volume`` [m³] gives ``flow`` [m³/s]; infinite where the refill keeps up.

    Raises :class:`DomainError` for a number that is negative or not finite, or a volume of 0.
    """
    _checked(volume=volume, flow=flow, refill=refill)
    if volume == 0.0:
        raise DomainError("the volume of a tank must be above 0")
    return volume / (flow - refill) if flow > refill else math.inf


def refill_time(*, volume: float, refill: float) -> float:
    """Return how long [s] ``refill`` [m³/s] takes to fill ``volume`` [m³].

    Raises :class:`DomainError` for a volume or a refill that is not above 0.
    """
    _checked(volume=volume, refill=refill)
    if volume == 0.0 or refill == 0.0:
        raise DomainError("the time of refill needs a volume and a refill above 0")
    return volume / refill


def tank_time(
    tank: Tank, *, nominal_flow: float, duration: float | None, actual_flow: float | None = None
) -> TankTime:
    """Return ``tank`` against a demand; flows [m³/s], duration [s].

    ``actual_flow`` is what really runs with the actual supply, more than nominal where heads give more.
    Raises :class:`DomainError` like the functions above.
    """
    flows = [nominal_flow] if actual_flow is None else [nominal_flow, actual_flow]
    needs = (
        []
        if duration is None
        else [needed_volume(flow=flow, duration=duration, refill=tank.refill) for flow in flows]
    )
    times = (
        []
        if tank.volume is None
        else [time_until_empty(volume=tank.volume, flow=flow, refill=tank.refill) for flow in flows]
    )
    return TankTime(
        tag=tank.tag,
        volume=tank.volume,
        refill=tank.refill,
        duration=duration,
        nominal_flow=nominal_flow,
        actual_flow=actual_flow,
        nominal_volume=needs[0] if needs else None,
        actual_volume=needs[1] if len(needs) > 1 else None,
        lasts=times[0] if times else None,
        actual_lasts=times[1] if len(times) > 1 else None,
        spare_volume=tank.volume - max(needs) if tank.volume is not None and needs else None,
        refill_time=tank.volume / tank.refill if tank.volume is not None and tank.refill > 0.0 else None,
    )


@dataclass(frozen=True, slots=True)
class TankLine:
    """What is left [m³] in a tank against time [s]: ``name`` says at which flow."""

    name: str
    flow: float
    times: tuple[float, ...]
    volumes: tuple[float, ...]


@dataclass(frozen=True, slots=True)
class TankAnswer:
    """One tank of a project: its times, its levels [m], the refill credit [m³] and its time line.

    ``credit`` is what the refill brings while the supply must last (``None`` where no duration is given).
    ``note`` says what makes the flow that really runs doubtful.
    """

    kind: str
    node: str
    water_level: float
    low_level: float | None
    credit: float | None
    time: TankTime
    lines: tuple[TankLine, ...]
    note: str = ""


def tank_answers(
    tanks: Sequence[Tank],
    duration: float | None,
    nominal: Mapping[str, float],
    actual: Mapping[str, float],
    note: str = "",
) -> tuple[TankAnswer, ...]:
    """Return every tank against what is drawn from its node; flows [m³/s] by node, ``duration`` [s].

    ``note`` is what is to be said of the ``actual`` flows. Raises :class:`DomainError` for a volume of 0.
    """
    found = []
    for tank in tanks:
        flows = (max(nominal[tank.node], 0.0), max(actual[tank.node], 0.0))
        time = tank_time(tank, nominal_flow=flows[0], duration=duration, actual_flow=flows[1])
        names = ("at the demand", "with the flow that really runs")
        end = _end(duration, time)
        lines = [_line(name, tank, flow, end) for name, flow in zip(names, flows, strict=True) if end]
        found.append(
            TankAnswer(
                kind=tank.kind,
                node=tank.node,
                water_level=tank.water_level,
                low_level=tank.low_level,
                credit=None if duration is None else tank.refill * duration,
                time=time,
                lines=tuple(line for line in lines if line is not None),
                note=note,
            )
        )
    return tuple(found)


def _end(duration: float | None, time: TankTime) -> float | None:
    """Return how far the time line runs [s]: past the duration and past the last finite emptying."""
    ends = [
        value
        for value in (duration, time.lasts, time.actual_lasts)
        if value is not None and math.isfinite(value)
    ]
    return max(ends) if ends else None


def _line(name: str, tank: Tank, flow: float, end: float) -> TankLine | None:
    if tank.volume is None:
        return None
    net = max(flow - tank.refill, 0.0)
    empty = tank.volume / net if net > 0.0 else math.inf
    times = (0.0, end) if empty >= end else (0.0, empty)
    return TankLine(name, flow, times, tuple(max(tank.volume - net * time, 0.0) for time in times))
