"""Neutral drawing primitives: what a figure or a page consists of, before any writer.

Lengths in points (1/72 in), origin at the lower left, y upwards. Colours are ``#rrggbb``.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from supplycheck.report.theme import INK

Anchor = Literal["start", "middle", "end"]


@dataclass(frozen=True, slots=True)
class Line:
    """A line through ``points``; ``dash`` is (on, off), ``fill`` closes and fills it."""

    points: tuple[tuple[float, float], ...]
    stroke: str | None = INK
    width: float = 0.7
    dash: tuple[float, ...] = ()
    fill: str | None = None


@dataclass(frozen=True, slots=True)
class Box:
    """A rectangle with its lower left corner at (``x``, ``y``)."""

    x: float
    y: float
    width: float
    height: float
    fill: str | None = None
    stroke: str | None = None
    line: float = 0.6
    dash: tuple[float, ...] = ()


@dataclass(frozen=True, slots=True)
class Dot:
    """A circle round (``x``, ``y``)."""

    x: float
    y: float
    radius: float
    fill: str | None = INK
    stroke: str | None = None
    line: float = 0.6


@dataclass(frozen=True, slots=True)
class Label:
    """Text on one line with its baseline at ``y``; ``angle`` in degrees; ``behind`` paints a ground."""

    x: float
    y: float
    text: str
    size: float = 7.0
    anchor: Anchor = "start"
    bold: bool = False
    colour: str = INK
    angle: float = 0.0
    behind: str | None = None


Item = Line | Box | Dot | Label


@dataclass(frozen=True, slots=True)
class Drawing:
    """A figure: its size in points, what is on it, and a sentence that says what it shows."""

    width: float
    height: float
    items: tuple[Item, ...]
    shows: str = ""
