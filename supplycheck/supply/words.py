"""Sentences with numbers left open, so that display can fill them in the project's units."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

Show = Callable[[float, str], str]
"""Shows a value [SI] of a kind of quantity as text with its unit, such as ``UnitSet.text``."""


@dataclass(frozen=True, slots=True)
class Words:
    """A text with ``{names}`` in braces and the (name, value [SI], kind) that fill them."""

    template: str
    values: tuple[tuple[str, float, str], ...] = ()

    def fill(self, show: Show) -> str:
        """Return the text with every value shown by ``show``.

        >>> Words("lowered by {drop}", (("drop", 2.0, "pressure"),)).fill(lambda v, k: f"{v} Pa")
        'lowered by 2.0 Pa'
        """
        text = self.template
        for name, value, kind in self.values:
            text = text.replace("{" + name + "}", show(value, kind))
        return text


@dataclass(frozen=True, slots=True)
class Step:
    """One line of a calculation that can be followed by hand: title, formula, result [SI], its kind."""

    step: str
    formula: Words
    value: float
    kind: str
    note: str = ""


def escaped(text: str) -> str:
    """Return a user's text with braces made harmless inside a template."""
    return text.replace("{", "(").replace("}", ")")
