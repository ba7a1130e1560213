"""Rules on each head: pressure, flow, coverage, spacing. Recomputed from the reported numbers."""

from __future__ import annotations

import math

from supplycheck.checks import limits
from supplycheck.checks.context import CheckContext
from supplycheck.checks.geometry import gaps_along, gaps_between, largest_per_tag, lines_note, no_lines
from supplycheck.checks.rule import About, Rule, flow, pressure, some
from supplycheck.findings import Finding, Measure, State
from supplycheck.model import Node

MINIMUM = About(
    "minimum pressure at heads",
    "pressure at every head of the design area against the largest of class, listing and node minimum",
    ("ok", "fail"),
    "NFPA 13: 7 psi (from memory); EN 12845: LH 0.70, OH 0.35, high hazard 0.50 bar; listing",
)
CLASS_MINIMUM = About(
    "minimum pressure of the class",
    "the project's own minimum against that of the standard",
    ("ok", "fail", "not applicable"),
    "NFPA 13: 7 psi (from memory); EN 12845: OH 0.35 bar (published), LH 0.70, HH 0.50 (from memory)",
)
DENSITY = About(
    "density at every head",
    "discharge of every head of the design area against density times its own floor area",
    ("ok", "fail", "missing"),
    "density of the hazard class; NFPA 13-2007 11.2.3.1.1 (no head below density times its area)",
)
DISCHARGE = About(
    "discharge from pressure",
    "reported discharge of every head against K√p of its reported pressure",
    ("ok", "fail", "not applicable"),
    "q = K√p; normal pressure where velocity pressure is used (NFPA 13, EN 12845)",
)
COVERAGE = About(
    "coverage of the class",
    "floor area of every head against the limit of the hazard class",
    ("ok", "fail", "missing"),
    "NFPA 13: LH 225, OH 130, EH 100 ft² (secondary source); EN 12845: LH 21, OH 12, HH 9 m² (from memory)",
)
LISTED = About(
    "coverage of the listing",
    "floor area of every head against the coverage stated for its type",
    ("ok", "fail", "missing"),
    "listing of the sprinkler",
)
SPACING = About(
    "spacing of the class",
    "distance along and between branch lines against the limit of the hazard class",
    ("ok", "fail", "missing"),
    "NFPA 13: 15 ft, EH 12 ft (from memory); EN 12845: limits of the class (from memory)",
)
CLOSE = About(
    "heads too close",
    "least distance between heads of a branch line: 6 ft (2 m) without baffles",
    ("ok", "fail", "missing"),
    "NFPA 13: 6 ft; EN 12845: 2 m (both from memory)",
)
OWN_AREA = About(
    "area per head",
    "stated floor area of every head against spacing along times spacing between lines",
    ("ok", "ask authority", "missing"),
    "NFPA 13: S × L (from memory)",
)


def _needed(context: CheckContext, node: Node) -> float:
    kind = context.sprinklers.get(node.sprinkler or "")
    return max(
        context.project.criteria.minimum_pressure,
        kind.minimum_pressure if kind is not None else 0.0,
        node.minimum_pressure or 0.0,
    )


def minimum(context: CheckContext) -> Finding:
    """The head nearest to its own minimum is shown."""
    needed = {node.tag: _needed(context, node) for node in context.case_heads}
    low = [tag for tag, least in needed.items() if context.pressure(tag) < least * (1 - limits.ROUND_OFF)]
    tag = min(needed, key=lambda one: context.pressure(one) - needed[one])
    measured, limit = pressure(context.pressure(tag)), pressure(needed[tag])
    if low:
        text, do = f"{tag} has {{measured}}; {{limit}} is its minimum.", "Raise the demand pressure."
        return MINIMUM.says(
            "fail",
            text,
            measured=measured,
            limit=limit,
            tags=(tag, *(o for o in low if o != tag)),
            remedy=do,
        )
    text = f"Nearest to its minimum is {tag}: {{measured}} against {{limit}}."
    return MINIMUM.says("ok", text, measured=measured, limit=limit, tags=(tag,))


def class_minimum(context: CheckContext) -> Finding:
    """An override may raise the figure of the standard, not lower it."""
    criteria = context.project.criteria
    least: float | None = limits.MINIMUM_PRESSURE_NFPA
    if context.european:
        least = limits.MINIMUM_PRESSURE_EN.get(context.hazard)
    if least is None:
        return CLASS_MINIMUM.says("not applicable", f"No minimum is on record for {criteria.hazard}.")
    measured, limit = pressure(criteria.minimum_pressure), pressure(least)
    if criteria.minimum_pressure < least * (1 - limits.ROUND_OFF):
        text = "The project asks {measured} at each head; the standard asks {limit}."
        return CLASS_MINIMUM.says(
            "fail", text, measured=measured, limit=limit, remedy="Use the minimum of the standard."
        )
    text = "The project asks {measured} at each head, the standard {limit}."
    return CLASS_MINIMUM.says("ok", text, measured=measured, limit=limit)


def density(context: CheckContext) -> Finding:
    """Density times the head's own area, whatever the demand case says was required."""
    unsaid = tuple(node.tag for node in context.case_heads if node.area is None)
    if unsaid:
        ask = f"What floor area does each of {some(unsaid)} cover?"
        return DENSITY.says("missing", f"Not run: no area for {some(unsaid)}.", tags=unsaid, remedy=ask)
    needed = {
        node.tag: context.project.criteria.density * (node.area or 0.0) for node in context.case_heads
    }
    short = [tag for tag, least in needed.items() if context.outflow(tag) < least * (1 - limits.ROUND_OFF)]
    tag = min(needed, key=lambda one: context.outflow(one) / needed[one] if needed[one] else math.inf)
    measured, limit = flow(context.outflow(tag)), flow(needed[tag])
    values = {"density": Measure(context.project.criteria.density, "density")}
    if short:
        text = f"{tag} gives {{measured}}; {{density}} on its area takes {{limit}}."
        tags = (tag, *(one for one in short if one != tag))
        do = "Raise the pressure at these heads: the required flow does not fit density times area."
        return DENSITY.says(
            "fail", text, measured=measured, limit=limit, tags=tags, values=values, remedy=do
        )
    text = f"Least over its need is {tag}: {{measured}} against {{limit}} for {{density}}."
    return DENSITY.says("ok", text, measured=measured, limit=limit, tags=(tag,), values=values)


def discharge(context: CheckContext) -> Finding:
    """By the normal-pressure method what the solver took off is taken off here too."""
    taken_off = context.solution.outlet_velocity_pressure
    heads = [node for node in context.case_heads if node.k_factor]
    if not heads:
        return DISCHARGE.says("not applicable", "No head of the area has a K-factor.")

    def due(node: Node) -> float:
        less = float(taken_off[context.node_rows[node.tag]]) if len(taken_off) else 0.0
        return (node.k_factor or 0.0) * math.sqrt(max(context.pressure(node.tag) - less, 0.0))

    worst = max(heads, key=lambda node: abs(context.outflow(node.tag) - due(node)))
    off = abs(context.outflow(worst.tag) - due(worst)) > limits.ROUND_OFF * max(due(worst), 1e-9)
    measured, limit = flow(context.outflow(worst.tag)), flow(due(worst))
    if off:
        text = f"{worst.tag} is reported at {{measured}}; K√p of its pressure is {{limit}}."
        do = "Do not use these results: the calculation contradicts itself."
        return DISCHARGE.says("fail", text, measured=measured, limit=limit, tags=(worst.tag,), remedy=do)
    text = f"Every head discharges K√p, all {len(heads)} to within rounding; {worst.tag}: {{measured}}."
    return DISCHARGE.says("ok", text, measured=measured, limit=limit, tags=(worst.tag,))


def _widest(about: About, covered: dict[str, tuple[float, float]], whose: str) -> Finding:
    over = [tag for tag, (area, limit) in covered.items() if area > limit * (1 + limits.ROUND_OFF)]
    tag = max(covered, key=lambda one: covered[one][0] / covered[one][1])
    measured, limit = Measure(covered[tag][0], "area"), Measure(covered[tag][1], "area")
    state: State = "fail" if over else "ok"
    text = f"{tag} covers {{measured}}; {whose} allows {{limit}}."
    do = "Space the heads closer." if over else ""
    tags = (tag, *(one for one in over if one != tag))
    return about.says(state, text, measured=measured, limit=limit, tags=tags, remedy=do)


def coverage(context: CheckContext) -> Finding:
    """All heads of the layout whose area is known."""
    limit = context.project.criteria.maximum_coverage
    hazard = context.project.criteria.hazard
    if limit is None:
        ask = f"What floor area may one head cover for {hazard}?"
        return COVERAGE.says("missing", f"Not run: no coverage limit for {hazard}.", remedy=ask)
    covered = {node.tag: (node.area, limit) for node in context.all_heads if node.area is not None}
    if not covered:
        ask = "What floor area does each head cover?"
        return COVERAGE.says("missing", "Not run: no head has an area.", remedy=ask)
    return _widest(COVERAGE, covered, hazard)


def listed(context: CheckContext) -> Finding:
    """Types without a stated coverage leave the question open."""
    covered = {}
    unsaid: dict[str, int] = {}
    for node in context.all_heads:
        kind = context.sprinklers.get(node.sprinkler or "")
        if kind is None or kind.coverage_area is None:
            unsaid[node.sprinkler or node.tag] = 0
        elif node.area is not None:
            covered[node.tag] = (node.area, kind.coverage_area)
    over = any(area > limit * (1 + limits.ROUND_OFF) for area, limit in covered.values())
    if (unsaid and not over) or not covered:
        names = f"sprinkler type {some(unsaid)}" if unsaid else "any sprinkler type"
        ask = f"What floor area is {names} listed to cover?"
        return LISTED.says(
            "missing", f"Not run: no listed coverage for {names}.", tags=tuple(unsaid), remedy=ask
        )
    return _widest(LISTED, covered, "its listing")


def spacing(context: CheckContext) -> Finding:
    """Along the lines and between them, over the whole layout."""
    limit = context.project.criteria.maximum_spacing
    gaps = gaps_along(context.all_heads) + gaps_between(context.all_heads)
    if limit is None or not gaps:
        text = "Not run: a spacing limit not given."
        ask = f"What is the greatest distance between heads for {context.project.criteria.hazard}?"
        if limit is not None:
            text, ask = no_lines(context)
        return SPACING.says("missing", text, remedy=ask)
    worst = max(gaps, key=lambda gap: gap.distance)
    measured, allowed = Measure(worst.distance, "length"), Measure(limit, "length")
    text = f"{worst.first} and {worst.second} are {{measured}} apart; {{limit}} is allowed."
    text += lines_note(context)
    if worst.distance > limit + limits.TYPED_LENGTH:
        over = [gap for gap in gaps if gap.distance > limit + limits.TYPED_LENGTH]
        over.sort(key=lambda gap: -gap.distance)
        tags = tuple({tag: 0 for gap in over for tag in (gap.first, gap.second)})
        do = "Close up the heads, or show the wall that stands between them."
        return SPACING.says("fail", text, measured=measured, limit=allowed, tags=tags, remedy=do)
    return SPACING.says("ok", text, measured=measured, limit=allowed, tags=(worst.first, worst.second))


def close(context: CheckContext) -> Finding:
    """One head may wet and so delay the next."""
    gaps = gaps_along(context.all_heads)
    if not gaps:
        text, ask = no_lines(context)
        return CLOSE.says("missing", text, remedy=ask)
    limit = limits.CLOSEST_HEADS[context.project.criteria.standard]
    least = min(gaps, key=lambda gap: gap.distance)
    measured, allowed = Measure(least.distance, "length"), Measure(limit, "length")
    text = f"{least.first} and {least.second} are {{measured}} apart; {{limit}} is the least."
    text += lines_note(context)
    state: State = "ok" if least.distance >= limit - limits.TYPED_LENGTH else "fail"
    do = "" if state == "ok" else "Move one of them, or put a baffle between them."
    return CLOSE.says(
        state, text, measured=measured, limit=allowed, tags=(least.first, least.second), remedy=do
    )


def own_area(context: CheckContext) -> Finding:
    """Too small an area understates the flow of the head; 1 % covers rounding of typed areas."""
    along = largest_per_tag(gaps_along(context.all_heads))
    between = largest_per_tag(gaps_between(context.all_heads))
    known = {
        node.tag: (node.area, along[node.tag] * between[node.branch_line or ""])
        for node in context.case_heads
        if node.area is not None and node.tag in along and (node.branch_line or "") in between
    }
    if not known:
        if along and between:
            text = "Not run: no head of the area has neighbours along and across, and an area of its own."
            ask = "What floor area does each head cover, and which lines lie beside its own?"
        else:
            text, ask = no_lines(context)
        return OWN_AREA.says("missing", text, remedy=ask)
    tag = min(known, key=lambda one: known[one][0] / known[one][1] if known[one][1] else math.inf)
    measured, limit = Measure(known[tag][0], "area"), Measure(known[tag][1], "area")
    low = tuple(one for one, (area, product) in known.items() if area < 0.99 * product)
    if low:
        text = f"{tag} is said to cover {{measured}}; its spacing gives {{limit}}.{lines_note(context)}"
        ask = f"Why do {some(low)} cover less than spacing along times between lines?"
        return OWN_AREA.says("ask authority", text, measured=measured, limit=limit, tags=low, remedy=ask)
    text = f"No head covers less than its spacing gives; nearest is {tag}: {{measured}} against {{limit}}."
    text += lines_note(context)
    return OWN_AREA.says("ok", text, measured=measured, limit=limit, tags=(tag,))


RULES = (
    Rule(MINIMUM, minimum),
    Rule(CLASS_MINIMUM, class_minimum),
    Rule(DENSITY, density),
    Rule(DISCHARGE, discharge),
    Rule(COVERAGE, coverage),
    Rule(LISTED, listed),
    Rule(SPACING, spacing),
    Rule(CLOSE, close),
    Rule(OWN_AREA, own_area),
)
