"""Rules on supply against demand: tested range, adjustments, pressure left in the main, margin."""

from __future__ import annotations

from dataclasses import dataclass

from supplycheck.checks import limits
from supplycheck.checks.context import CheckContext
from supplycheck.checks.rule import About, Rule, flow, named, pressure, some
from supplycheck.findings import Finding, Measure, State
from supplycheck.model import FlowTest
from supplycheck.supply import supply_curves
from supplycheck.supply.point import NOTABLE

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
FLOOR = About(
    "pressure left in the main",
    "pressure in the main at the demand flow against its floor (20 psi by practice)",
    ("ok", "fail", "ask authority", "missing", "not applicable"),
    "floor given by the project, else assumed: 20 psi by practice of water utilities, no source",
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


@dataclass(frozen=True, slots=True)
class Share:
    """What one source with flow tests gives [m³/s], and that over the largest flow of its least test."""

    node: str
    tests: tuple[FlowTest, ...]
    flow: float
    ratio: float | None


def tested_shares(context: CheckContext) -> tuple[Share, ...]:
    """Return every source with flow tests at its own flow; a single source gives the whole demand."""
    facts, solution = context.comparison, context.solution
    by_node: dict[str, tuple[FlowTest, ...]] = {}
    for test in context.project.supply.tests:
        by_node[test.node] = (*by_node.get(test.node, ()), test)
    given = {
        tag: max(float(amount), 0.0)
        for tag, amount in zip(solution.source_tags, solution.source_flow, strict=True)
    }
    principal = max(given, key=lambda tag: given[tag], default="")
    shares = []
    for node, tests in by_node.items():
        amount = given.get(node, 0.0) if len(given) > 1 else facts.demand_flow
        least = min(max((point.flow for point in test.points), default=0.0) for test in tests)
        ratio = amount / least if least > 0 else None
        if facts.tested_flow_ratio is not None and (len(given) < 2 or node == principal):
            ratio = facts.tested_flow_ratio
        shares.append(Share(node, tests, amount, ratio))
    return tuple(shares)


def tested_range(context: CheckContext) -> Finding:
    """Ratio of what each source gives to its tested flow; the greatest is told."""
    tests = context.project.supply.tests
    if not tests:
        return RANGE.says("not applicable", "No flow test feeds this system.")
    shares = tested_shares(context)
    unread = [test.tag for share in shares if share.ratio is None for test in share.tests]
    if unread:
        tags = tuple(unread)
        ask = f"What was the largest flow of {named(*tags)}?"
        return RANGE.says("missing", "Not run: the test has no point with flow.", tags=tags, remedy=ask)
    worst = max(shares, key=lambda share: share.ratio or 0.0)
    ratio = worst.ratio or 0.0
    one, values = Measure(1.0, "percent"), {"demand": flow(worst.flow)}
    who = (
        "The demand of {demand}"
        if len(context.solution.source_tags) < 2
        else (f"What {worst.node} gives of the demand, {{demand}},")
    )
    tags = tuple(test.tag for test in (tests if len(shares) == 1 else worst.tests))
    text = f"{who} is {{measured}} of the tested flow"
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
    readable = [
        (share, [test for test in share.tests if test.points and test.static > 0])
        for share in tested_shares(context)
        if share.ratio is not None
    ]
    if not any(tests for _, tests in readable):
        return SMALL_DROP.says("not applicable", "No flow test with a point to carry on from.")
    beyond = [(one, test) for one, tests in readable for test in tests if _is_beyond(one)]
    if not beyond:
        return SMALL_DROP.says("not applicable", "The demand lies within the tested flow.")

    def drop(test: FlowTest) -> float:
        return 1 - min(point.residual for point in test.points) / test.static

    share, test = min(beyond, key=lambda one: drop(one[1]))
    tag, least = test.tag, drop(test)
    measured, limit = Measure(least, "percent"), Measure(limits.DROP_NOW, "percent")
    values = {"ratio": Measure(share.ratio or 0.0, "percent")}
    text = f"The curve of {named(tag)} is carried on to {{ratio}} of its flow from a drop of {{measured}}"
    if least < limits.DROP_NOW * (1 - limits.ROUND_OFF):
        do = "Have the main tested at the demand flow: the extrapolated pressure is not reliable."
        return SMALL_DROP.says(
            "fail", f"{text}.", measured=measured, limit=limit, values=values, tags=(tag,), remedy=do
        )
    return SMALL_DROP.says("ok", f"{text}.", measured=measured, limit=limit, values=values, tags=(tag,))


def _is_beyond(share: Share) -> bool:
    return share.ratio is not None and share.ratio > 1 + limits.ROUND_OFF


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


def left_in_main(context: CheckContext) -> tuple[float | None, str]:
    """Return the least pressure [Pa] left in a main, and where of several sources it stands."""
    solution, project = context.solution, context.project
    given = dict(zip(solution.source_tags, solution.source_flow.tolist(), strict=True))
    if len(given) < 2 or not given.keys() <= context.nodes.keys():
        return context.comparison.main_pressure_at_demand, ""
    left = [
        (one.curve.pressure_at(max(given[one.node], 0.0)), f" at {one.node}")
        for one in supply_curves(project)
        if one.tests and one.node in given
    ]
    return min(left, default=(None, ""))


def floor_words(given: float | None) -> str:
    """Return how a floor that is kept is named: of the project, or assumed."""
    return "the floor is" if given is not None else "the project gives no floor, assumed is"


def floor(context: CheckContext) -> Finding:
    """The floor of the project; where none is given, 20 psi by practice."""
    if not context.project.supply.tests:
        return FLOOR.says("not applicable", "No street main feeds this system.")
    left, where = left_in_main(context)
    given = context.project.supply.main_floor_pressure
    limit = limits.MAIN_FLOOR if given is None else given
    if left is None:
        ask = "What is the pressure in the main at the demand flow?"
        return FLOOR.says("missing", "Not run: the pressure left in the main is not known.", remedy=ask)
    allowed = pressure(limit)
    measured: Measure | None = pressure(left)
    if left >= limit - limits.ROUND_OFF * abs(limit):
        text = (
            f"{{measured}} is left in the main{where} at the demand flow; {floor_words(given)} {{limit}}."
        )
        return FLOOR.says("ok", text, measured=measured, limit=allowed)
    only = f"Only {{measured}} is left in the main{where} at the demand flow"
    if left < 0:  # the curve carried on beyond its zero is no pressure that anybody could read
        measured, only = None, f"No pressure is left in the main{where} at the demand flow"
    if given is None:
        text = f"{only}; {{limit}} is usual."
        ask = "How much pressure must stay in the main at the demand flow?"
        return FLOOR.says("ask authority", text, measured=measured, limit=allowed, remedy=ask)
    text = f"{only}; the floor is {{limit}}."
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
    has = "more than it can give" if facts.available_pressure < 0 else "{available} available"
    at = f"at {facts.node}, {{flow}}: {has}, {{demand}} needed"
    ends = f" (lowered further, nothing is left at {facts.limited_at})" if facts.limited_at else ""
    if not ends and _throttled(context):
        at = f"at the supply; with a regulating valve, {at}"
    source = rule.source if rule is not None and rule.source else MARGIN.source
    raise_it = "Enlarge pipes, cut the demand, or raise the supply."
    if facts.margin < 0:
        text = f"The supply falls short by {{short}}{ends} {at}."
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
        text = f"Not run: no margin rule. {{measured}} is left{ends} {at}."
        ask = "Which margin between supply and demand does the authority ask for (or none)?"
        return MARGIN.says(
            "missing", text, measured=measured, values=values, tags=(facts.node,), remedy=ask
        )
    state: State = "ok" if facts.margin >= facts.required else "fail"
    asked = "no margin" if facts.required == 0 else "{limit}"
    text = f"{{measured}} is left{ends}, {asked} is asked, {at}."
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


def _throttled(context: CheckContext) -> bool:
    """Return whether a regulating valve makes what is left at the point another figure than the margin."""
    facts = context.comparison
    valves = any(one.kind == "pressure-reducing valve" for one in context.devices.values())
    kept = facts.margin - (facts.available_pressure - facts.demand_pressure)
    return valves and abs(kept) > NOTABLE


RULES = (
    Rule(MARGIN, margin),
    Rule(RANGE, tested_range),
    Rule(SMALL_DROP, small_drop),
    Rule(ADJUSTMENT, adjustment),
    Rule(FLOOR, floor),
    Rule(CARRIED, carried),
)
