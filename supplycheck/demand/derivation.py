"""The derivation of the design area in steps, and in words what was searched."""

from __future__ import annotations

import math

import numpy as np

from supplycheck.demand.heads import Heads
from supplycheck.demand.line import Lines
from supplycheck.demand.runs import ROUND
from supplycheck.model import Criteria
from supplycheck.model.words import Step, Words


def area_steps(criteria: Criteria) -> list[Step]:
    """Return the steps from the density to the required area, each modifier in its order."""
    steps = [
        Step("Density", Words("{hazard}", (("hazard", criteria.hazard, ""),)), criteria.density, "density"),
        Step("Base area", Words("area that goes with the density"), criteria.base_area, "area"),
    ]
    area = criteria.base_area
    for modifier in criteria.modifiers:
        before, area = area, area * modifier.factor
        values = (("before", before, "area"), ("factor", modifier.factor, "ratio"))
        formula = Words("{before} × {factor}", values)
        steps.append(Step(f"Area after {modifier.name}", formula, area, "area", modifier.source))
    product = Words("base area × every modifier")
    steps.append(Step("Required area", product, criteria.required_area, "area"))
    return steps


def whole_up(value: float) -> int:
    """Return ``value`` rounded up to a whole number, forgiving the last digits of a conversion.

    >>> whole_up(11.54), whole_up(12.0 + 1e-12)
    (12, 12)
    """
    return math.ceil(value * (1 - ROUND))


def _head_steps(criteria: Criteria, heads: Heads, own: float) -> list[Step]:
    low, high = float(heads.area.min()), float(heads.area.max())
    equal = math.isclose(low, high, rel_tol=1e-9)
    same = Words("the same at every head")
    spread = Words(
        "from {low} to {high}; the middle value here, each head's own below",
        (("low", low, "area"), ("high", high, "area")),
    )
    required = criteria.required_area
    count = max(whole_up(required / own), criteria.minimum_heads)
    formula = "{area} ÷ {own} = {ratio}, rounded up"
    if count > whole_up(required / own):
        formula += "; at least {least} heads"
    values = (
        ("area", required, "area"),
        ("own", own, "area"),
        ("ratio", required / own, "ratio"),
        ("least", float(criteria.minimum_heads), "count"),
    )
    note = "whole heads are added until the sum of their own areas reaches the required area"
    return [
        Step("Area per head", same if equal else spread, own, "area"),
        Step("Heads in the area", Words(formula, values), float(count), "count", "" if equal else note),
    ]


def shape_steps(criteria: Criteria, length: float, heads: Heads, lines: Lines) -> list[Step]:
    """Return the steps from the area per head to the heads along a line and the lines."""
    own = float(np.median(heads.area))
    steps = _head_steps(criteria, heads, own)
    values = (("factor", criteria.shape_factor, "ratio"), ("area", criteria.required_area, "area"))
    side = Words("{factor} × √({area})", values)
    steps.append(Step("Length along the lines", side, length, "length", "at least"))
    spaced = [line.share for line in lines.sides if len(line) > 1]
    if not spaced:
        return steps
    spacing = float(np.median(np.concatenate(spaced)))
    ratio = length / spacing
    along = whole_up(ratio)
    divided = Words(
        "{length} ÷ {spacing} = {ratio}, rounded up",
        (("length", length, "length"), ("spacing", spacing, "length"), ("ratio", ratio, "ratio")),
    )
    note = "a shorter line is taken whole and the rest made up on further lines"
    steps.append(Step("Heads along a line", divided, float(along), "count", note))
    count = steps[1].value
    rows = Words(
        "{count} heads ÷ {along} a line, rounded up",
        (("count", count, "count"), ("along", float(along), "count")),
    )
    note = "the last line holds the heads that are left over"
    steps.append(Step("Lines", rows, float(whole_up(count / along)), "count", note))
    return steps


def statement_of(count: int, complete: bool, lines: Lines, european: bool, whole: int) -> str:
    """Say in words what was searched, how many placements there are, and what limits the answer."""
    runs = f"{count:,} placement{'s' if count != 1 else ''}"
    parts = []
    if complete:
        parts.append(
            f"The system allows {runs} of the design area by the rules stated here; all are candidates: "
            "every line and every position along it, growing to either hand, with the left-over heads in "
            "every position on the last line."
        )
    else:
        parts.append(
            f"The search stopped at {runs}; the system allows more, so it is not shown that the hardest "
            "of these is the hardest of all."
        )
    if lines.inferred:
        parts.append("Branch lines were inferred from the pipes where none is given.")
    if lines.joined:
        parts.append(
            "Whole lines, pairs of lines, and areas across a main or over lines end to end are tried too."
            if european
            else "An area crosses a main, or goes on over lines that meet end to end, only where one "
            "of them is shorter than the area asks along it (common practice)."
        )
    if whole:
        parts.append(f"In {whole} of them the area is smaller than the design area and all its heads flow.")
    return " ".join(parts)
