"""Readable names of placements: which lines, which heads, counted from where."""

from __future__ import annotations

import re
from collections.abc import Sequence
from typing import Final

from supplycheck.demand.line import Line
from supplycheck.demand.placement import Placement, Row

ALL: Final = "all heads"


def _span(row: Row) -> str:
    """Heads of one run, counted from the end that no main feeds, else from the low end."""
    line, low, high = row
    if line.fed[0] and not line.fed[1]:
        low, high = len(line) - high, len(line) - low
    if high - low == len(line):
        return ALL
    heads = f"heads {low + 1}–{high}" if high - low > 1 else f"head {low + 1}"
    return f"{heads} of {len(line)}"


def _origin(line: Line, tags: Sequence[str]) -> str:
    """From where the heads of a line are counted."""
    if line.fed[0] and not line.fed[1]:
        return f" from the end at {tags[line.heads[-1]]}"
    if line.fed[1] and not line.fed[0]:
        return f" from the end at {tags[line.heads[0]]}"
    return f" from {tags[line.heads[0]]}"


def _natural(name: str) -> list[tuple[int, str]]:
    """Sort key by which L9 comes before L10."""
    return [(int(part), "") if part.isdecimal() else (0, part) for part in re.split(r"([0-9]+)", name)]


def _names(first: str, last: str) -> str:
    """Name one line, or the first and last of several; names that say "line" already keep their own word.

    >>> _names("L7", "L9"), _names("Line 3", "Line 3")
    ('lines L7–L9', 'Line 3')
    """
    both = first if first == last else f"{first}–{last}"
    if "line" in first.casefold():
        return both
    return f"line {both}" if first == last else f"lines {both}"


class Labels:
    """Names placements such as "lines 7–9, heads 1–4 of 8 from the end at S71"."""

    def __init__(self, tags: Sequence[str]) -> None:
        self._tags = tags
        self._spans: dict[tuple[int, int, int], str] = {}
        self._origins: dict[int, str] = {}

    def _span(self, row: Row) -> str:
        key = (id(row.line), row.low, row.high)
        found = self._spans.get(key)
        if found is None:
            found = self._spans[key] = _span(row)
        return found

    def _counted(self, line: Line, last: Line, span: str) -> str:
        if span is ALL:
            return f" ({self._tags[line.heads[0]]} to {self._tags[last.heads[-1]]})"
        found = self._origins.get(id(line))
        if found is None:
            found = self._origins[id(line)] = _origin(line, self._tags)
        return found

    def of(self, placement: Placement) -> str:
        """Return the readable name of a placement; one that takes every head is named by that alone."""
        if len(placement.heads) == len(self._tags):
            return ALL
        groups: list[tuple[str, Line, Line]] = []
        for row in placement.rows:
            span = self._span(row)
            if groups and groups[-1][0] == span:
                groups[-1] = (span, groups[-1][1], row.line)
            else:
                groups.append((span, row.line, row.line))
        parts = []
        for span, first, last in groups:
            if _natural(last.name) < _natural(first.name):
                first, last = last, first
            names = _names(first.name, last.name)
            across = f" {first.joint}" if first.joint else ""
            parts.append(f"{names}{across}, {span}{self._counted(first, last, span)}")
        text = "; ".join(parts)
        if placement.extra:
            near = len(placement.extra)
            text += f"; {near} nearest head{'s' if near > 1 else ''} beside it"
        return text


def unique(labels: Sequence[str]) -> list[str]:
    """Return the labels, equal ones told apart by a number.

    >>> unique(["a", "b", "a"])
    ['a', 'b', 'a (2)']
    """
    seen: dict[str, int] = {}
    out = []
    for text in labels:
        seen[text] = seen.get(text, 0) + 1
        out.append(text if seen[text] == 1 else f"{text} ({seen[text]})")
    return out
