"""Round numbers for axes, and labels that keep out of each other's way."""

from __future__ import annotations

import math
from dataclasses import dataclass, field
from typing import Final, Literal

from supplycheck.report.drawing import Anchor, Label
from supplycheck.report.theme import text_width

CELL: Final = 24.0

Reach = Literal["beside", "around", "far"]
_SIDES: Final[tuple[tuple[float, Anchor], ...]] = ((0.0, "middle"), (1.0, "start"), (-1.0, "end"))


def round_steps(top: float, most: int) -> list[float]:
    """Return 0 and round numbers up to the first at or above ``top``, at most ``most`` steps.

    >>> round_steps(78.0, 5)
    [0.0, 20.0, 40.0, 60.0, 80.0]
    """
    if not math.isfinite(top) or top <= 0:
        return [0.0, 1.0]
    least = top / most
    power = 10.0 ** math.floor(math.log10(least))
    step = next(power * lead for lead in (1, 2, 2.5, 5, 10) if power * lead >= least * (1 - 1e-9))
    return [step * place for place in range(math.ceil(top / step - 1e-9) + 1)]


def finite(value: float | None) -> float:
    """Return ``value``, or 0 where there is none or it is not finite: a figure must still be drawn."""
    return value if value is not None and math.isfinite(value) else 0.0


def plain(number: float) -> str:
    """Return a gridline's number without a trailing zero, thousands as digits.

    >>> plain(1250.0), plain(2.5)
    ('1250', '2.5')
    """
    return f"{number:.6g}".replace("-", "−")


@dataclass(slots=True)
class Taken:
    """The places on a drawing that are covered already, and the bounds of the drawing."""

    left: float
    bottom: float
    right: float
    top: float
    cells: dict[tuple[int, int], list[tuple[float, float, float, float]]] = field(default_factory=dict)

    def is_free(self, box: tuple[float, float, float, float]) -> bool:
        """True where ``box`` (left, bottom, right, top) lies inside and covers nothing taken."""
        x0, y0, x1, y1 = box
        if x0 < self.left or y0 < self.bottom or x1 > self.right or y1 > self.top:
            return False
        return not any(
            x0 < other[2] and x1 > other[0] and y0 < other[3] and y1 > other[1]
            for cell in _cells(box)
            for other in self.cells.get(cell, ())
        )

    def take(self, box: tuple[float, float, float, float]) -> None:
        """Cover ``box``."""
        for cell in _cells(box):
            self.cells.setdefault(cell, []).append(box)

    def take_line(self, start: tuple[float, float], end: tuple[float, float], half: float = 1.2) -> None:
        """Cover the way from ``start`` to ``end``."""
        (x0, y0), (x1, y1) = start, end
        count = max(1, math.ceil(math.hypot(x1 - x0, y1 - y0) / 4.0))
        for place in range(count + 1):
            x, y = x0 + (x1 - x0) * place / count, y0 + (y1 - y0) * place / count
            self.take((x - half, y - half, x + half, y + half))

    def place(
        self,
        x: float,
        y: float,
        text: str,
        size: float,
        *,
        gap: float = 4.0,
        bold: bool = False,
        reach: Reach = "around",
        down: bool = False,
        up: bool = False,
        pad: float = 1.0,
    ) -> tuple[float, float, Anchor] | None:
        """Return where ``text`` fits beside (``x``, ``y``) and cover that place; ``None`` if nowhere.

        ``reach`` says how far from the point it may stand; ``down`` tries the places below first,
        ``up`` those above; ``pad`` is left free on either side.
        """
        wide = text_width(text, size, bold=bold)
        tries: tuple[tuple[float, float, Anchor], ...] = (
            (x + gap, y + gap * 0.6, "start"),
            (x - gap, y + gap * 0.6, "end"),
            (x + gap, y - gap * 0.6 - size * 0.75, "start"),
            (x - gap, y - gap * 0.6 - size * 0.75, "end"),
            (x, y + gap, "middle"),
            (x, y - gap - size * 0.75, "middle"),
            (x + 3 * gap, y + 3 * gap, "start"),
            (x - 3 * gap, y - 3 * gap - size * 0.75, "end"),
            (x - 3 * gap, y + 3 * gap, "end"),
            (x + 3 * gap, y - 3 * gap - size * 0.75, "start"),
        )
        if reach == "beside":
            tries = tries[:6]
        if reach == "far":
            tries += tuple(
                (x + side * step, y + way * step - (size * 0.75 if way < 0 else 0.0), anchor)
                for step in (gap * times for times in range(3, 22, 2))
                for way in (1, -1)
                for side, anchor in _SIDES
            )
        if down:
            tries = tuple(sorted(tries, key=lambda one: one[1] > y))
        if up:
            tries = tuple(sorted(tries, key=lambda one: one[1] < y))
        for at_x, at_y, anchor in tries:
            left = at_x - {"start": 0.0, "middle": wide / 2, "end": wide}[anchor]
            box = (left - pad, at_y - size * 0.22, left + wide + pad, at_y + size * 0.8)
            if self.is_free(box):
                self.take(box)
                return at_x, at_y, anchor
        return None


def _cells(box: tuple[float, float, float, float]) -> list[tuple[int, int]]:
    x0, y0, x1, y1 = (math.floor(edge / CELL) for edge in box)
    return [(x, y) for x in range(x0, x1 + 1) for y in range(y0, y1 + 1)]


def short(text: str, room: float, size: float) -> str:
    """Return ``text`` cut with three dots where it is wider than ``room``."""
    if text_width(text, size) <= room:
        return text
    cut = text
    while cut and text_width(cut + "…", size) > room:
        cut = cut[:-1]
    return cut.rstrip() + "…"


def put_label(
    taken: Taken,
    point: tuple[float, float],
    text: str,
    style: Label,
    reach: Reach = "around",
    gap: float = 5.5,
) -> Label | None:
    """Return ``style`` with ``text`` placed ``gap`` beside ``point``, or ``None`` where it does not fit."""
    found = taken.place(*point, text, style.size, gap=gap, bold=style.bold, reach=reach)
    if found is None:
        return None
    x, y, anchor = found
    return Label(x, y, text, style.size, anchor, style.bold, style.colour, 0.0, style.behind)
