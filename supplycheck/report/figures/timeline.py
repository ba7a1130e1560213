"""The time line of a tank: what is left in it against the time since the water began to flow."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Final

from supplycheck.report.drawing import Box, Dot, Drawing, Item, Label, Line
from supplycheck.report.figures.axes import plain, round_steps
from supplycheck.report.theme import CLAY, INK, PETROL, RULE, SLATE, text_width
from supplycheck.results.records import TankLine, TankRecord
from supplycheck.units import UnitSet

_LEFT: Final = 46.0
_BOTTOM: Final = 52.0
_HOW: Final[tuple[tuple[str, float, tuple[float, ...]], ...]] = (
    (PETROL, 2.0, ()),
    (CLAY, 1.6, (7.0, 2.0, 1.5, 2.0)),
)


@dataclass(frozen=True, slots=True)
class _Frame:
    """Places minutes and volumes [display units] on the drawing."""

    right: float
    top: float
    times: list[float]
    volumes: list[float]

    def x(self, time: float) -> float:
        return _LEFT + (self.right - _LEFT) * time / self.times[-1]

    def y(self, volume: float) -> float:
        return _BOTTOM + (self.top - _BOTTOM) * volume / self.volumes[-1]


def tank_time_line(tank: TankRecord, units: UnitSet, size: tuple[float, float]) -> Drawing | None:
    """Return the time line of ``tank``; ``None`` where its volume is not given."""
    if tank.time.volume is None or not tank.lines:
        return None
    width, height = size
    duration = tank.time.duration
    ends = [time for line in tank.lines for time in line.times]
    last = units.from_si(max([*ends, duration or 0.0]), "time")
    frame = _Frame(
        width - 14.0,
        height - 12.0,
        round_steps(last * 1.12, 14),
        round_steps(units.from_si(tank.time.volume, "volume") * 1.08, 7),
    )
    items = _grid(frame, units)
    if duration is not None:
        items += _duration(frame, duration, units)
    for line, how in zip(tank.lines, _HOW, strict=False):
        items += _line(frame, line, how, units)
    items += _ends(frame, tank, units)
    items += _legend(tank, units)
    return Drawing(width, height, tuple(items), f"volume left in {tank.time.tag} against time")


def _grid(frame: _Frame, units: UnitSet) -> list[Item]:
    items: list[Item] = [
        Line(((frame.x(at), _BOTTOM), (frame.x(at), frame.top)), RULE, 0.35) for at in frame.times
    ]
    items += [Line(((_LEFT, frame.y(at)), (frame.right, frame.y(at))), RULE, 0.35) for at in frame.volumes]
    items += [Label(frame.x(at), _BOTTOM - 9, plain(at), 6.6, "middle") for at in frame.times]
    items += [Label(_LEFT - 4, frame.y(at) - 2.4, plain(at), 6.6, "end") for at in frame.volumes]
    items.append(Box(_LEFT, _BOTTOM, frame.right - _LEFT, frame.top - _BOTTOM, None, SLATE, 0.7))
    below = f"time since the water began to flow, {units.symbol('time')}"
    items.append(Label((_LEFT + frame.right) / 2, _BOTTOM - 20, below, 6.8, "middle", colour=SLATE))
    beside = f"left in the tank, {units.symbol('volume')}"
    items.append(Label(10, (_BOTTOM + frame.top) / 2, beside, 6.8, "middle", False, SLATE, 90.0))
    return items


def _duration(frame: _Frame, duration: float, units: UnitSet) -> list[Item]:
    x = frame.x(units.from_si(duration, "time"))
    text = f"must last {units.text(duration, 'time')}"
    return [
        Line(((x, _BOTTOM), (x, frame.top)), INK, 0.9, (2.0, 2.0)),
        Label(x + 4, frame.top - 10, text, 6.6, behind="#ffffff"),
    ]


def _line(
    frame: _Frame,
    line: TankLine,
    how: tuple[str, float, tuple[float, ...]],
    units: UnitSet,
) -> list[Item]:
    path = tuple(
        (frame.x(units.from_si(time, "time")), frame.y(units.from_si(volume, "volume")))
        for time, volume in zip(line.times, line.volumes, strict=True)
    )
    colour, width, dash = how
    return [Line(path, colour, width, dash)]


def _ends(frame: _Frame, tank: TankRecord, units: UnitSet) -> list[Item]:
    """Mark where the tank runs empty."""
    times = (tank.time.lasts, tank.time.actual_lasts)
    return [
        Dot(frame.x(units.from_si(time, "time")), _BOTTOM, 2.6, "#ffffff", how[0], 1.2)
        for time, line, how in zip(times, tank.lines, _HOW, strict=False)
        if time is not None and line.volumes[-1] <= 0.0
    ]


def _legend(tank: TankRecord, units: UnitSet) -> list[Item]:
    items: list[Item] = []
    x = _LEFT
    times = (tank.time.lasts, tank.time.actual_lasts)
    for line, time, (colour, width, dash) in zip(tank.lines, times, _HOW, strict=False):
        empty = "never empty" if time == math.inf else f"empty after {units.text(time, 'time')}"
        text = f"{line.name}, {units.text(line.flow, 'flow')}: {empty}"
        items.append(Line(((x, 14.2), (x + 22, 14.2)), colour, width, dash))
        items.append(Label(x + 26, 12, text, 6.8))
        x += 44 + text_width(text, 6.8)
    return items
