"""Readable names of placements: which lines, which heads, counted from where."""

from __future__ import annotations

from collections.abc import Sequence

from supplycheck.demand.lines import Line
from supplycheck.demand.search import Placement, Row


def _span(row: Row) -> str:
    """Heads of one run, counted from the end that no main feeds, else from the low end."""
    line, low, high = row
    if line.fed[0] and not line.fed[1]:
        low, high = len(line) - high, len(line) - low
    if high - low == len(line):
        return "all heads" if len(line) > 1 else "its one head"
    heads = f"heads {low + 1}–{high}" if high - low > 1 else f"head {low + 1}"
    return f"{heads} of {len(line)}"


def _origin(line: Line, tags: Sequence[str]) -> str:
    """From where the heads of a line are counted."""
    if line.fed[0] and not line.fed[1]:
        return f"from the end at {tags[line.heads[-1]]}"
    if line.fed[1] and not line.fed[0]:
        return f"from the end at {tags[line.heads[0]]}"
    return f"from {tags[line.heads[0]]}"


def label(placement: Placement, tags: Sequence[str]) -> str:
    """Return the readable name of a placement, such as "lines 7–9, heads 1–4 of 8 from the end at S71"."""
    groups: list[tuple[str, list[Row]]] = []
    for row in placement.rows:
        span = _span(row)
        if groups and groups[-1][0] == span:
            groups[-1][1].append(row)
        else:
            groups.append((span, [row]))
    parts = []
    for span, rows in groups:
        first, last = rows[0].line, rows[-1].line
        names = f"line {first.name}" if len(rows) == 1 else f"lines {first.name}–{last.name}"
        across = " across the main" if len(first.sides) > 1 else ""
        counted = "" if span.startswith(("all", "its")) else f" {_origin(first, tags)}"
        ends = f" ({tags[first.heads[0]]} to {tags[first.heads[-1]]})" if span.startswith("all") else ""
        parts.append(f"{names}{across}, {span}{counted}{ends}")
    text = "; ".join(parts)
    if placement.extra:
        near = len(placement.extra)
        text += f"; {near} nearest head{'s' if near > 1 else ''} beside it"
    return text


def unique(labels: Sequence[str]) -> list[str]:
    """Return the labels, equal ones told apart by a number."""
    seen: dict[str, int] = {}
    out = []
    for text in labels:
        seen[text] = seen.get(text, 0) + 1
        out.append(text if seen[text] == 1 else f"{text} ({seen[text]})")
    return out
