"""Sentences with numbers left open, so that display can fill them in the project's units."""

from __future__ import annotations

import re
from collections.abc import Callable
from dataclasses import dataclass
from typing import Final

_NAME: Final = re.compile(r"\{(\w+)\}")

Show = Callable[[float, str], str]
"""Shows a value [SI] of a kind of quantity as text with its unit, such as ``UnitSet.text``."""


Value = tuple[str, float | str, str]
"""A name, what fills it and its kind of quantity: ``"count"`` for whole numbers, ``""`` for a text."""


@dataclass(frozen=True, slots=True)
class Words:
    """A text with ``{names}`` in braces and the (name, value [SI] or text, kind) that fill them."""

    template: str
    values: tuple[Value, ...] = ()

    def fill(self, show: Show) -> str:
        """Return the text with every value shown by ``show``; a text put in is not read again.

        >>> values = (("drop", 2.0, "pressure"), ("why", "{drop}", ""))
        >>> Words("lowered by {drop} ({why})", values).fill(lambda value, kind: f"{value} Pa")
        'lowered by 2.0 Pa ({drop})'
        """
        shown = {name: _shown(value, kind, show) for name, value, kind in self.values}
        return _NAME.sub(lambda found: shown.get(found[1], found[0]), self.template)


def _shown(value: float | str, kind: str, show: Show) -> str:
    if isinstance(value, str):
        return value
    return f"{value:.0f}" if kind == "count" else show(value, kind)


@dataclass(frozen=True, slots=True)
class Step:
    """One line of a calculation that can be followed by hand: title, formula, result [SI], its kind.

    ``kind`` is a kind of quantity, or ``"count"`` for whole numbers.
    """

    step: str
    formula: Words
    value: float
    kind: str
    note: str = ""
