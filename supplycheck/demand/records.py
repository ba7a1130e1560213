"""What the search for the design area hands on: the cases and how they were found."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Literal

from supplycheck.model import DemandCase


@dataclass(frozen=True, slots=True)
class Step:
    """One line of the derivation: its name, its formula, its value [SI] and the kind of quantity.

    ``formula`` holds names in braces for the numbers of ``values`` (name, value [SI], kind), so that
    whoever prints it chooses the unit. ``kind`` is a kind of quantity or ``"count"`` for whole numbers.
    """

    text: str
    formula: str
    value: float
    kind: str
    values: tuple[tuple[str, float, str], ...] = ()
    note: str = ""

    def filled(self, display: Callable[[float, str], str]) -> str:
        """Return the formula with its numbers; ``display(value, kind)`` gives their text.

        >>> step = Step("area", "{a} × 1.3", 130.0, "area", (("a", 100.0, "area"),))
        >>> step.filled(lambda value, kind: f"{value:.0f} m²")
        '100 m² × 1.3'
        """
        texts = {
            name: f"{value:.0f}" if kind == "count" else display(value, kind)
            for name, value, kind in self.values
        }
        return self.formula.format(**texts)


@dataclass(frozen=True, slots=True)
class Candidates:
    """The candidate design areas of a project, how they were found, and in words what was tried.

    ``complete`` is false where the search stopped at its cap: the hardest area is then not proven.
    """

    cases: tuple[DemandCase, ...]
    steps: tuple[Step, ...]
    statement: str
    mode: Literal["given", "search"]
    complete: bool = True
