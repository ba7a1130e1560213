"""Rules on supply against demand: tested range, adjustments, pressures with and without flow, margin."""

from __future__ import annotations

from supplycheck.checks import limits
from supplycheck.checks.context import CheckContext
from supplycheck.checks.rule import About, Rule, flow, named, pressure, some
from supplycheck.findings import Finding, Measure, State
from supplycheck.model import Pipe

RANGE = About(
    "demand within the tested flow",
    "total demand against the largest flow of the test",
    ("ok", "ask authority", "missing", "not applicable"),
    "reviewers' practice, no source: beyond the tested flow the curve is an extrapolation",
)
SMALL_DROP = About(
    "extrapolation from a small drop",
    "demand beyond the tested flow while the test pulled the static down by less than 10 %",
    ("ok", "fail", "not applicable"),
    "NFPA 291, 10 % drop in later editions (from memory)",
    weight=3,
)
ADJUSTMENT = About(
    "low-supply adjustment",
    "whether the measured curve is lowered to the worst supply of day and year",
    ("ok", "ask authority", "not applicable"),
    "reviewers' practice, no source",
)
NO_FLOW = About(
    "pressure without flow",
    "static pressure at every node against the rating of the components",
    ("ok", "fail", "ask authority"),
    "NFPA 13: 175 psi; EN 12845: 12 bar (both from memory), or the rating given",
    weight=3,
)
SPRINKLER_MAXIMUM = About(
    "maximum sprinkler pressure",
    "static pressure at every sprinkler against the maximum that its type states",
    ("ok", "fail", "not applicable"),
    "listing of the sprinkler",
)
FLOOR = About(
    "pressure left in the main",
    "pressure in the main at the demand flow against its floor (20 psi by practice)",
    ("ok", "fail", "ask authority", "missing", "not applicable"),
    "practice of water utilities, no source; the floor given by the project",
    weight=3,
)
CARRIED = About(
    "calculation carried to the test",
    "whether the pipe between the test and the system is part of the calculation",
    ("ok", "ask authority", "missing", "not applicable"),
    "reviewers' practice, no source",
)
MARGIN = About(
    "margin",
    "pressure left over at the demand flow against what the margin rule asks",
    ("ok", "fail", "missing"),
    "margin rule of the authority",
    weight=3,
)


def tested_ratio(context: CheckContext) -> float | None:
    """Return demand over the largest flow of the least test, ``None`` without a test."""
    if context.comparison.tested_flow_ratio is not None:
        return context.comparison.tested_flow_ratio
    flows = [
        max((point.flow for point in test.points), default=0.0) for test in context.project.supply.tests
    ]
    if not flows or min(flows) <= 0:
        return None
    return context.comparison.demand_flow / min(flows)


def tested_range(context: CheckContext) -> Finding:
    """Ratio of demand to tested flow."""
    if not context.project.supply.tests:
        return RANGE.says("not applicable", "No flow test feeds this system.")
    ratio = tested_ratio(context)
    tags = tuple(test.tag for test in context.project.supply.tests)
    if ratio is None:
        ask = f"What was the largest flow of {named(*tags)}?"
        return RANGE.says("missing", "Not run: the test has no point with flow.", tags=tags, remedy=ask)
    one, values = Measure(1.0, "percent"), {"demand": flow(context.comparison.demand_flow)}
    text = "The demand of {demand} is {measured} of the tested flow"
    measured = Measure(ratio, "percent")
    if ratio <= 1 + limits.ROUND_OFF:
        return RANGE.says("ok", f"{text}.", measured=measured, limit=one, values=values, tags=tags)
    ask = "May the curve be carried beyond the tested flow, or is a test at a greater flow wanted?"
    return RANGE.says(
        "ask authority",
        f"{text}: extrapolated.",
        measured=measured,
        limit=one,
        values=values,
        tags=tags,
        remedy=ask,
    )


def small_drop(context: CheckContext) -> Finding:
    """Pressure inside the range is robust; flow carried on from a small drop is not."""
    ratio = tested_ratio(context)
    tests = [test for test in context.project.supply.tests if test.points and test.static > 0]
    if ratio is None or not tests:
        return SMALL_DROP.says("not applicable", "No flow test with a point to carry on from.")
    if ratio <= 1 + limits.ROUND_OFF:
        return SMALL_DROP.says("not applicable", "The demand lies within the tested flow.")

    def share(static: float, residuals: list[float]) -> float:
        return 1 - min(residuals) / static

    shares = {test.tag: share(test.static, [point.residual for point in test.points]) for test in tests}
    tag = min(shares, key=lambda one: shares[one])
    measured, limit = Measure(shares[tag], "percent"), Measure(limits.DROP_NOW, "percent")
    values = {"ratio": Measure(ratio, "percent")}
    text = f"The curve of {named(tag)} is carried on to {{ratio}} of its flow from a drop of {{measured}}"
    if shares[tag] < limits.DROP_NOW * (1 - limits.ROUND_OFF):
        do = "Have the main tested at the demand flow: the extrapolated pressure is not reliable."
        return SMALL_DROP.says(
            "fail", f"{text}.", measured=measured, limit=limit, values=values, tags=(tag,), remedy=do
        )
    return SMALL_DROP.says("ok", f"{text}.", measured=measured, limit=limit, values=values, tags=(tag,))


def adjustment(context: CheckContext) -> Finding:
    """An adjustment that lowers the curve, or a rule of the authority that none is asked."""
    supply = context.project.supply
    if not supply.tests:
        return ADJUSTMENT.says("not applicable", "No flow test feeds this system.")
    lowering = [one for one in supply.adjustments if one.kind != "static cap"]
    if not lowering:
        ask = "Which low-supply adjustment (day, season, growth) and which static cap apply to the test?"
        return ADJUSTMENT.says(
            "ask authority", "The measured curve is used as it was on the day of the test.", remedy=ask
        )
    first = lowering[0]
    if first.kind == "percent":
        text, measured = "Every supply pressure is taken at {measured}.", Measure(first.factor, "percent")
    else:
        text, measured = "The measured curve is lowered by {measured}.", pressure(first.pressure)
    return ADJUSTMENT.says("ok", text, measured=measured)


def no_flow_pressures(context: CheckContext) -> dict[str, float]:
    """Return the pressure [Pa] at each node without flow, walked from the point of comparison.

    A pump adds its churn, a pressure-reducing valve holds its setting; shut pipes are not passed.
    """
    if context.no_flow is not None:
        return dict(context.no_flow)
    weight, found = context.project.fluid.unit_weight, {}
    joined: dict[str, list[Pipe]] = {tag: [] for tag in context.nodes}
    for pipe in context.project.system.pipes:
        if pipe.valve != "closed":
            joined[pipe.start].append(pipe)
            joined[pipe.end].append(pipe)
    found[context.comparison.node] = context.comparison.static_at_compare
    row = [context.comparison.node]
    for here in row:
        for pipe in joined[here]:
            there = pipe.end if pipe.start == here else pipe.start
            if there not in found:
                beyond = _past_devices(context, pipe, found[here], onward=pipe.start == here)
                rise = context.nodes[there].elevation - context.nodes[here].elevation
                found[there] = beyond - weight * rise
                row.append(there)
    return found


def _past_devices(context: CheckContext, pipe: Pipe, value: float, *, onward: bool) -> float:
    for tag in pipe.devices if onward else reversed(pipe.devices):
        device = context.devices[tag]
        if device.kind == "pump":
            value += max(device.values, default=0.0) * (1 if onward else -1)
        elif device.kind == "pressure-reducing valve" and device.setting is not None and onward:
            value = min(value, device.setting)
    return value


def no_flow(context: CheckContext) -> Finding:
    """The lowest node usually stands highest in pressure."""
    criteria = context.project.criteria
    given = criteria.maximum_pressure
    limit = limits.COMPONENT_RATING[criteria.standard] if given is None else given
    pressures = no_flow_pressures(context)
    worst = max(pressures, key=lambda tag: pressures[tag])
    over = [tag for tag, value in pressures.items() if value > limit * (1 + limits.ROUND_OFF)]
    measured, allowed = pressure(pressures[worst]), pressure(limit)
    text = f"Without flow {{measured}} stands at {worst}; components "
    if not over:
        return NO_FLOW.says(
            "ok", f"{text}stand {{limit}}.", measured=measured, limit=allowed, tags=(worst,)
        )
    tags = tuple(sorted(over, key=lambda tag: -pressures[tag]))
    if given is None:
        ask = f"What pressure are the components at {some(tags)} rated for?"
        return NO_FLOW.says(
            "ask authority",
            f"{text}usually stand {{limit}}.",
            measured=measured,
            limit=allowed,
            tags=tags,
            remedy=ask,
        )
    do = "Use components of a higher rating there, or a pressure-reducing valve."
    return NO_FLOW.says(
        "fail", f"{text}stand {{limit}}.", measured=measured, limit=allowed, tags=tags, remedy=do
    )


def sprinkler_maximum(context: CheckContext) -> Finding:
    """Only types that state a maximum of their own."""
    standing = no_flow_pressures(context)
    most = {tag: one.maximum_pressure for tag, one in context.sprinklers.items()}
    heads = [
        (node.tag, limit)
        for node in context.all_heads
        if node.sprinkler and (limit := most.get(node.sprinkler)) is not None and node.tag in standing
    ]
    if not heads:
        return SPRINKLER_MAXIMUM.says("not applicable", "No sprinkler type states a maximum of its own.")
    tag, limit = max(heads, key=lambda one: standing[one[0]] / one[1])
    over = tuple(one for one, most_ in heads if standing[one] > most_ * (1 + limits.ROUND_OFF))
    state: State = "fail" if over else "ok"
    do = "Use a sprinkler listed for that pressure, or reduce it." if over else ""
    text = f"Without flow {{measured}} stands at sprinkler {tag}; its type is listed to {{limit}}."
    measured, allowed = pressure(standing[tag]), pressure(limit)
    return SPRINKLER_MAXIMUM.says(
        state, text, measured=measured, limit=allowed, tags=over or (tag,), remedy=do
    )


def floor(context: CheckContext) -> Finding:
    """The floor of the project; where none is given, 20 psi by practice."""
    if not context.project.supply.tests:
        return FLOOR.says("not applicable", "No street main feeds this system.")
    left, given = context.comparison.main_pressure_at_demand, context.project.supply.main_floor_pressure
    limit = limits.MAIN_FLOOR if given is None else given
    if left is None:
        ask = "What is the pressure in the main at the demand flow?"
        return FLOOR.says("missing", "Not run: the pressure left in the main is not known.", remedy=ask)
    measured, allowed = pressure(left), pressure(limit)
    if left >= limit - limits.ROUND_OFF * abs(limit):
        text = "{measured} is left in the main at the demand flow; the floor is {limit}."
        return FLOOR.says("ok", text, measured=measured, limit=allowed)
    if given is None:
        text = "Only {measured} is left in the main at the demand flow; {limit} is usual."
        ask = "How much pressure must stay in the main at the demand flow?"
        return FLOOR.says("ask authority", text, measured=measured, limit=allowed, remedy=ask)
    text = "Only {measured} is left in the main at the demand flow; the floor is {limit}."
    do = "Lower the demand or use a second supply: a main must not be drawn below its floor."
    return FLOOR.says("fail", text, measured=measured, limit=allowed, remedy=do)


def carried(context: CheckContext) -> Finding:
    """A test applied at the base of the riser leaves out the pipe in the street."""
    tests = context.project.supply.tests
    if not tests:
        return CARRIED.says("not applicable", "No flow test feeds this system.")
    outside = tuple(test.tag for test in tests if test.node not in context.nodes)
    if outside:
        text = f"Not run: {named(*outside)} stands at no node of the calculation."
        ask = f"At which node of the calculation does {named(*outside)} apply?"
        return CARRIED.says("missing", text, tags=outside, remedy=ask)
    buried = {
        tag
        for pipe in context.project.system.pipes
        if pipe.role == "underground"
        for tag in (pipe.start, pipe.end)
    }
    bare = {test.node: 0 for test in tests if test.node not in buried}
    if bare and not any(context.nodes[tag].kind == "hydrant" for tag in bare):
        text = f"No underground pipe joins test node {some(bare)}: is its loss left out?"
        ask = f"What pipe, of what length and height, lies between the test hydrant and {some(bare)}?"
        return CARRIED.says("ask authority", text, tags=tuple(bare), remedy=ask)
    where = tuple({test.node: 0 for test in tests})
    return CARRIED.says("ok", f"The calculation runs to the test at {some(where)}.", tags=where)


def margin(context: CheckContext) -> Finding:
    """What is left against what is asked; without a rule nothing is proven."""
    facts, rule = context.comparison, context.project.supply.margin
    measured = pressure(facts.margin)
    values = {
        "available": pressure(facts.available_pressure),
        "demand": pressure(facts.demand_pressure),
        "flow": flow(facts.demand_flow),
    }
    at = f"at {facts.node}, {{flow}}: {{available}} available, {{demand}} needed"
    source = rule.source if rule is not None and rule.source else MARGIN.source
    raise_it = "Enlarge pipes, cut the demand, or raise the supply."
    if facts.margin < 0:
        text = f"The supply falls short by {{short}} {at}."
        values["short"] = pressure(-facts.margin)
        limit = None if facts.required is None else pressure(facts.required)
        return MARGIN.says(
            "fail",
            text,
            measured=measured,
            limit=limit,
            values=values,
            tags=(facts.node,),
            remedy=raise_it,
            source=source,
        )
    if facts.required is None:
        text = f"Not run: no margin rule. {{measured}} is left {at}."
        ask = "Which margin between supply and demand does the authority ask for (or none)?"
        return MARGIN.says(
            "missing", text, measured=measured, values=values, tags=(facts.node,), remedy=ask
        )
    state: State = "ok" if facts.margin >= facts.required else "fail"
    asked = "no margin" if facts.required == 0 else "{limit}"
    text = f"{{measured}} is left, {asked} is asked, {at}."
    return MARGIN.says(
        state,
        text,
        measured=measured,
        limit=pressure(facts.required),
        values=values,
        tags=(facts.node,),
        remedy="" if state == "ok" else raise_it,
        source=source,
    )


RULES = (
    Rule(MARGIN, margin),
    Rule(RANGE, tested_range),
    Rule(SMALL_DROP, small_drop),
    Rule(ADJUSTMENT, adjustment),
    Rule(FLOOR, floor),
    Rule(CARRIED, carried),
    Rule(NO_FLOW, no_flow),
    Rule(SPRINKLER_MAXIMUM, sprinkler_maximum),
)
