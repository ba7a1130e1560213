"""Rules on the design area: size, shape, place, modifiers, and the criteria behind it."""

from __future__ import annotations

import math
from collections import defaultdict

from supplycheck.checks import limits
from supplycheck.checks.context import CheckContext
from supplycheck.checks.geometry import gaps_along, lines_note, no_lines
from supplycheck.checks.rule import About, Rule, count, some
from supplycheck.findings import Finding, Measure, State

CLASS = About(
    "density and area of the class",
    "density and base area of the project against those of the hazard class",
    ("ok", "fail", "ask authority", "missing"),
    "hazard class of the adopted standard",
    weight=3,
)
AREA = About(
    "size of the design area",
    "floor area and number of heads against what is required after all modifiers",
    ("ok", "fail", "ask authority", "missing"),
    "NFPA 13 (from memory): whole heads, never less than the area; EN 12845 table 3",
    weight=3,
)
SHAPE = About(
    "shape of the design area",
    "length along the branch lines against 1.2√A",
    ("ok", "fail", "missing", "not applicable"),
    "NFPA 13, 1.2√A along the lines (annex example: 12 heads, 4 a line; from memory)",
)
PROOF = About(
    "most demanding area",
    "whether other placements of the design area were tried",
    ("ok", "ask authority"),
    "reviewers' practice: the most demanding area is not always the most distant",
    weight=3,
)
FAVOURABLE = About(
    "most favourable area",
    "whether the area of the greatest flow was found too",
    ("ok", "missing", "not applicable"),
    "CEA 4001 3.4 and EN 12845: both areas are reported",
)
MODIFIERS = About(
    "modifiers of the area",
    "stated modifiers, multiplied, against the required area; 1.3 for dry and double interlock systems",
    ("ok", "fail"),
    "NFPA 13: 1,500 × 1.3 × 1.3 = 2,535 ft² (Anvil, 2020); dry 1.3 (published example)",
    weight=3,
)
SMALL_ROOMS = About(
    "small rooms",
    "whether small rooms were dropped from the area",
    ("not applicable",),
    "NFPA 13 (from memory): rooms of 55 ft² and less, only against the unreduced area",
)
QUICK = About(
    "quick-response reduction",
    "ceiling, system, hazard, heads and amount behind a reduction for quick response",
    ("ok", "fail", "missing", "not applicable"),
    "NFPA 13: y = −3x/2 + 55 up to 20 ft, wet, light or ordinary hazard, five heads (from memory)",
    weight=3,
)


def class_figures(context: CheckContext) -> Finding:
    """A hazard set too low is the commonest real error."""
    criteria, figures = context.project.criteria, context.class_figures
    if figures is None or figures.density is None or figures.area is None:
        ask = f"Which density and area does the adopted edition ask for {criteria.hazard}?"
        return CLASS.says("missing", f"Not run: no figures on record for {criteria.hazard}.", remedy=ask)
    values = {
        "density": Measure(criteria.density, "density"),
        "area": Measure(criteria.base_area, "area"),
        "class_density": Measure(figures.density, "density"),
        "class_area": Measure(figures.area, "area"),
    }
    text = f"{{density}} over {{area}}; {criteria.hazard} asks {{class_density}} over {{class_area}}."
    measured, limit = values["density"], values["class_density"]
    low = criteria.density < figures.density * (1 - limits.ROUND_OFF)
    small = criteria.base_area < figures.area * (1 - limits.ROUND_OFF)
    if low and criteria.base_area > figures.area * (1 + limits.ROUND_OFF) and not context.european:
        ask = "Which edition's density/area curve allows a lower density over a larger area here?"
        return CLASS.says(
            "ask authority",
            text,
            measured=measured,
            limit=limit,
            values=values,
            remedy=ask,
            source=figures.source,
        )
    state: State = "fail" if low or small else "ok"
    if small and not low:
        measured, limit = values["area"], values["class_area"]
    do = (
        "Use the figures of the class, or state the class that fits the occupancy."
        if state == "fail"
        else ""
    )
    return CLASS.says(
        state, text, measured=measured, limit=limit, values=values, remedy=do, source=figures.source
    )


def size(context: CheckContext) -> Finding:
    """Floor areas of the heads added up anew."""
    criteria, heads = context.project.criteria, context.case_heads
    unsaid = tuple(node.tag for node in heads if node.area is None)
    if unsaid:
        ask = f"What floor area does each of {some(unsaid)} cover?"
        return AREA.says("missing", f"Not run: no area for {some(unsaid)}.", tags=unsaid, remedy=ask)
    total = sum(node.area or 0.0 for node in heads)
    measured, limit = Measure(total, "area"), Measure(criteria.required_area, "area")
    values = {"heads": count(len(heads)), "least": count(criteria.minimum_heads)}
    text = "{heads} heads cover {measured}; {limit} is required."
    large_enough = total >= criteria.required_area * (1 - limits.ROUND_OFF)
    if large_enough and len(heads) >= criteria.minimum_heads:
        return AREA.says("ok", text, measured=measured, limit=limit, values=values)
    if len(heads) == len(context.all_heads):
        text = "All {heads} heads of the layout cover {measured}; {limit} is required."
        ask = "Is the whole compartment shown, and may the area be smaller than required here?"
        return AREA.says("ask authority", text, measured=measured, limit=limit, values=values, remedy=ask)
    if large_enough:
        text = "{heads} heads are in the area; at least {least} are required."
        measured, limit = values["heads"], values["least"]
    do = "Add whole heads until the area is reached."
    return AREA.says("fail", text, measured=measured, limit=limit, values=values, remedy=do)


def shape(context: CheckContext) -> Finding:
    """Heads on each line against length over spacing; a line taken whole can give no more."""
    criteria = context.project.criteria
    if context.european and criteria.design_area == "search":
        text = "1.2√A is asked by NFPA 13 only; areas √A along the lines, whole lines and pairs were tried."
        return SHAPE.says("not applicable", text)
    if context.european or criteria.shape_factor <= 0:
        return SHAPE.says("not applicable", "1.2√A along the lines is asked by NFPA 13 only.")
    on_line: dict[str, list[str]] = defaultdict(list)
    for node in context.case_heads:
        if node.branch_line is not None:
            on_line[node.branch_line].append(node.tag)
    in_case = set(context.case.heads)
    gaps = [gap.distance for gap in gaps_along(context.case_heads)]
    if sum(map(len, on_line.values())) < len(context.case.heads) or not gaps:
        text, ask = no_lines(context)
        return SHAPE.says("missing", text, remedy=ask)
    pitch = sum(gaps) / len(gaps)
    length = criteria.shape_factor * math.sqrt(criteria.required_area)
    needed = math.ceil(length / pitch - limits.ROUND_OFF)
    spare = {node.branch_line for node in context.all_heads if node.tag not in in_case}
    short = [line for line, tags in on_line.items() if len(tags) < needed and line in spare]
    most = max(len(tags) for tags in on_line.values())
    values = {"most": count(most), "needed": count(needed), "pitch": Measure(pitch, "length")}
    measured, limit = Measure(most * pitch, "length"), Measure(length, "length")
    text = "{most} heads at {pitch} along the line reach {measured}; {limit} asks {needed}."
    if len(short) > 1 or len(short) == len(on_line):
        tags = tuple(tag for line in short for tag in on_line[line])
        text = f"Short of the {{needed}} heads that {{limit}} along the lines asks: line {some(short)}."
        text += lines_note(context)
        do = f"Take {needed} heads on each line before going to the next."
        return SHAPE.says("fail", text, measured=measured, limit=limit, values=values, tags=tags, remedy=do)
    if most < needed:
        text = "{needed} heads along the line are asked by {limit}; the lines are shorter and taken whole."
    text += lines_note(context)
    return SHAPE.says("ok", text, measured=measured, limit=limit, values=values)


def proof(context: CheckContext) -> Finding:
    """Tried exhaustively, or not proven."""
    tried, heads = context.placements_tried, len(context.case.heads)
    measured = count(tried)
    if context.searched and (tried > 1 or heads == len(context.all_heads)):
        text = f"Most demanding of {{measured}} placements tried: {context.case.label}."
        if tried <= 1:
            text = "The area takes in every head of the layout."
        return PROOF.says("ok", text, measured=measured)
    text = "The design area is given; it is not proven to be the most demanding."
    if context.project.criteria.design_area == "search":
        text = "{measured} placements were tried, not all; the area is not proven to be the most demanding."
    ask = "Is the chosen area accepted, or are other areas (on a grid, shifted both ways) to be shown?"
    return PROOF.says("ask authority", text, measured=measured, remedy=ask)


def favourable(context: CheckContext) -> Finding:
    """EN 12845 sizes pump and storage on the greatest flow."""
    if not context.european:
        return FAVOURABLE.says("not applicable", "Asked by EN 12845 only.")
    if context.most_favourable_found:
        return FAVOURABLE.says("ok", "The area through which most water really flows was found too.")
    ask = "Which area gives the greatest flow, and what does it need?"
    return FAVOURABLE.says("missing", "Not run: the area of the greatest flow was not sought.", remedy=ask)


def modifiers(context: CheckContext) -> Finding:
    """Multiplied, never added."""
    criteria = context.project.criteria
    product = criteria.base_area * math.prod(one.factor for one in criteria.modifiers)
    listed = "; ".join(f"{one.name} ×{one.factor:.4g}" for one in criteria.modifiers) or "none"
    measured, limit = Measure(criteria.required_area, "area"), Measure(product, "area")
    values = {"base": Measure(criteria.base_area, "area")}
    dry = criteria.system.casefold() in {"dry", "double interlock preaction"} and not context.european
    raised = any(
        one.factor >= limits.DRY_FACTOR - limits.ROUND_OFF and ("dry" in words or "interlock" in words)
        for one in criteria.modifiers
        for words in (one.name.casefold(),)
    )
    if dry and not raised:
        text = f"A {criteria.system} system takes 1.3 times the area; modifiers stated: {listed}."
        do = "Multiply the area by 1.3."
        return MODIFIERS.says("fail", text, measured=measured, values=values, remedy=do)
    if criteria.required_area < product * (1 - limits.ROUND_OFF):
        text = f"{{base}} with modifiers ({listed}) is {{limit}}; {{measured}} is used."
        do = "Multiply the base area by every modifier."
        return MODIFIERS.says("fail", text, measured=measured, limit=limit, values=values, remedy=do)
    text = f"{{base}}, modifiers: {listed}; {{measured}} required."
    return MODIFIERS.says("ok", text, measured=measured, limit=limit, values=values)


def small_rooms(context: CheckContext) -> Finding:
    """This calculation never drops a room."""
    del context
    return SMALL_ROOMS.says("not applicable", "No small room is dropped from the area.")


def _broken_condition(context: CheckContext, slow: tuple[str, ...]) -> str:
    """Return the first condition of the reduction that is broken, empty where none is."""
    criteria, heads = context.project.criteria, len(context.case.heads)
    height = criteria.ceiling_height
    conditions = {
        "EN 12845 has no such reduction": context.european,
        f"the system is {criteria.system}, not wet": criteria.system.casefold() != "wet",
        f"{criteria.hazard} is neither light nor ordinary": context.hazard not in {"light", "ordinary"},
        "the ceiling is at {height}, above {highest}": height is not None
        and height > limits.QUICK_CEILING + limits.TYPED_LENGTH,
        f"{some(slow)} are not quick response": bool(slow),
        "fewer than five heads are in the area": heads < min(limits.QUICK_HEADS, len(context.all_heads)),
    }
    return next((reason for reason, broken in conditions.items() if broken), "")


def quick_response(context: CheckContext) -> Finding:
    """Every condition in turn; the first broken one is told."""
    used = next((one for one in context.project.criteria.modifiers if "quick" in one.name.casefold()), None)
    if used is None:
        return QUICK.says("not applicable", "No reduction for quick response is taken.")
    height, measured = context.project.criteria.ceiling_height, Measure(used.factor, "percent")
    values = {"highest": Measure(limits.QUICK_CEILING, "length")}
    if height is not None:
        values["height"] = Measure(height, "length")
    kinds = {node.tag: context.sprinklers.get(node.sprinkler or "") for node in context.all_heads}
    slow = tuple(tag for tag, kind in kinds.items() if kind is not None and kind.response == "standard")
    unsaid = tuple(tag for tag, kind in kinds.items() if kind is None or kind.response is None)
    reason = _broken_condition(context, slow)
    if reason:
        text = f"The area is taken at {{measured}} for quick response, but {reason}."
        do = "Take the area without this reduction."
        return QUICK.says("fail", text, measured=measured, tags=slow, remedy=do, values=values)
    if height is None or unsaid:
        what = "the ceiling height" if height is None else f"the response of {some(unsaid)}"
        text = f"Not run: {what} is not given."
        return QUICK.says("missing", text, measured=measured, tags=unsaid, remedy=f"What is {what}?")
    least = 1 - (55 - 1.5 * max(height / limits.FOOT, 10.0)) / 100
    limit = Measure(least, "percent")
    text = "For quick response at {height} the area is taken at {measured}; not below {limit}."
    if used.factor < least - limits.ROUND_OFF:
        do = "Reduce by no more than 55 − 1.5 × height in feet, in percent."
        return QUICK.says("fail", text, measured=measured, limit=limit, values=values, remedy=do)
    return QUICK.says("ok", text, measured=measured, limit=limit, values=values)


RULES = (
    Rule(CLASS, class_figures),
    Rule(AREA, size),
    Rule(SHAPE, shape),
    Rule(PROOF, proof),
    Rule(FAVOURABLE, favourable),
    Rule(MODIFIERS, modifiers),
    Rule(SMALL_ROOMS, small_rooms),
    Rule(QUICK, quick_response),
)
