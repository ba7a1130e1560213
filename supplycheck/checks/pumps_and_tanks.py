"""Rules on how long the supply lasts and on pumps."""

from __future__ import annotations

from supplycheck.checks import limits
from supplycheck.checks.context import CheckContext, PumpRating
from supplycheck.checks.rule import About, Rule, some
from supplycheck.findings import Finding, Measure
from supplycheck.model import Device, Tank
from supplycheck.supply.beyond import beyond_words

DURATION = About(
    "duration",
    "whether the time that the supply must last is given",
    ("ok", "fail", "ask authority", "missing"),
    "duration of the hazard class in the adopted standard",
)
STORAGE = About(
    "water storage",
    "usable volume of each tank and its refill against demand times duration",
    ("ok", "fail", "ask authority", "missing", "not applicable"),
    "demand times duration (UFC practice 2006)",
    weight=3,
)
REFILL = About(
    "tank refill",
    "time in which the refill fills each empty tank",
    ("ok", "ask authority", "missing", "not applicable"),
    "UFC practice (2006): within 48 h, or 24 h where operations would be curtailed",
)
PUMP = About(
    "pump curve",
    "churn and the point at 150 % of rated flow against the rated point",
    ("ok", "fail", "missing", "not applicable"),
    "NFPA 20: churn at most 140 %, at least 65 % of rated pressure at 150 % flow (Huggins)",
)


def duration(context: CheckContext) -> Finding:
    """Given, and no less than the class asks."""
    given, figures = context.project.criteria.duration, context.class_figures
    if given is None:
        criteria = context.project.criteria
        what = criteria.hazard if criteria.has_sprinklers else "what this project asks of it"
        ask = f"How long must the supply last for {what}?"
        return DURATION.says("missing", "Not run: no duration is given.", remedy=ask)
    measured = Measure(given, "time")
    if (
        figures is not None
        and figures.duration is not None
        and given < figures.duration * (1 - limits.ROUND_OFF)
    ):
        text, do = (
            "{measured} is asked of the supply; the class asks {limit}.",
            "Use the duration of the class.",
        )
        limit = Measure(figures.duration, "time")
        return DURATION.says("fail", text, measured=measured, limit=limit, remedy=do, source=figures.source)
    if context.project.supply.tests:
        text = "The supply is to last {measured}; a flow test does not show how long it does."
        ask = "Who says that the main can give the demand for the whole duration?"
        return DURATION.says("ask authority", text, measured=measured, remedy=ask)
    return DURATION.says("ok", "The supply is to last {measured}.", measured=measured)


def storage(context: CheckContext) -> Finding:
    """All tanks together, with the refill that runs meanwhile; a reservoir counts as endless."""
    supply = context.project.supply
    tanks = [tank for tank in supply.tanks if tank.kind != "reservoir"]
    if not tanks:
        return STORAGE.says("not applicable", "No tank feeds this system.")
    if supply.tests or len(tanks) < len(supply.tanks):
        return STORAGE.says(
            "missing",
            "Not run: tanks and other supplies share the demand.",
            tags=tuple(tank.tag for tank in tanks),
            remedy="How much of the demand is each tank to carry, and for how long?",
        )
    seconds = context.project.criteria.duration
    unsaid = tuple(tank.tag for tank in tanks if tank.volume is None)
    if unsaid or seconds is None:
        what = f"the usable volume of {some(unsaid)}" if unsaid else "the duration"
        ask = f"What is {what}?"
        return STORAGE.says("missing", f"Not run: {what} is not given.", tags=unsaid, remedy=ask)
    held = sum((tank.volume or 0.0) + tank.refill * seconds for tank in tanks)
    need = context.comparison.demand_flow * seconds
    measured, limit, values = (
        Measure(held, "volume"),
        Measure(need, "volume"),
        {"time": Measure(seconds, "time")},
    )
    tags = tuple(tank.tag for tank in tanks)
    text = f"{some(tags)} with refill gives {{measured}}; {{time}} of demand takes {{limit}}."
    doubt = "" if context.operating is None else beyond_words(context.operating)
    doubt = f" What really flows is {doubt}." if doubt else ""
    runs = _drawn(context, tanks) * seconds
    if held >= need * (1 - limits.ROUND_OFF) and held < runs * (1 - limits.ROUND_OFF):
        text = f"{some(tags)} gives {{measured}}, enough for the demand; what really runs takes {{limit}}."
        ask = f"Must {some(tags)} last for the flow that really runs, or for the demand alone?"
        limit = Measure(runs, "volume")
        return STORAGE.says(
            "ask authority", text + doubt, measured=measured, limit=limit, tags=tags, remedy=ask
        )
    if held >= need * (1 - limits.ROUND_OFF):
        return STORAGE.says("ok", text + doubt, measured=measured, limit=limit, values=values, tags=tags)
    do = "Enlarge the tank or its refill."
    return STORAGE.says("fail", text, measured=measured, limit=limit, values=values, tags=tags, remedy=do)


def _drawn(context: CheckContext, tanks: list[Tank]) -> float:
    """Return what really runs out of ``tanks`` [m³/s]; 0 where that was not solved."""
    solution = context.operating
    if solution is None:
        return 0.0
    nodes = {tank.node for tank in tanks}
    flows = zip(solution.source_tags, solution.source_flow.tolist(), strict=True)
    return float(sum(flow for tag, flow in flows if tag in nodes))


def refill(context: CheckContext) -> Finding:
    """The slowest tank; one without refill or volume leaves a question."""
    tanks = [tank for tank in context.project.supply.tanks if tank.kind != "reservoir"]
    if not tanks:
        return REFILL.says("not applicable", "No tank feeds this system.")
    unsaid = tuple(tank.tag for tank in tanks if tank.refill <= 0 or tank.volume is None)
    if unsaid:
        text = f"Not run: volume or refill of {some(unsaid)} is not given."
        ask = f"Within what time, and from what, is {some(unsaid)} filled again?"
        return REFILL.says("missing", text, tags=unsaid, remedy=ask)
    times = {tank.tag: (tank.volume or 0.0) / tank.refill for tank in tanks}
    tag = max(times, key=lambda one: times[one])
    values = {"curtailed": Measure(limits.REFILL_CURTAILED, "time")}
    measured, limit = Measure(times[tag], "time"), Measure(limits.REFILL, "time")
    text = f"{tag} is full again {{measured}} after it ran empty; {{limit}} is usual"
    if times[tag] > limits.REFILL * (1 + limits.ROUND_OFF):
        ask = f"Is a refill of {tag} in more than 48 h accepted?"
        return REFILL.says(
            "ask authority", f"{text}.", measured=measured, limit=limit, tags=(tag,), remedy=ask
        )
    text += ", {curtailed} where work would stop."
    return REFILL.says("ok", text, measured=measured, limit=limit, tags=(tag,), values=values)


def _at(curve: tuple[tuple[float, ...], tuple[float, ...]], wanted: float) -> float | None:
    flows, values = curve
    for q1, q2, p1, p2 in zip(flows, flows[1:], values, values[1:], strict=False):
        if q1 <= wanted <= q2 * (1 + limits.ROUND_OFF):
            return p1 + (p2 - p1) * (wanted - q1) / (q2 - q1)
    return None


def _shares(pump: Device, rated: PumpRating) -> tuple[float | None, float | None]:
    """Return pressure without flow and at 150 % of the rated flow over the rated one, where it is told."""
    ends = (_at((pump.flows, pump.values), flow) for flow in (0.0, limits.PUMP_FLOW * rated.flow))
    churn, far = (None if value is None else value / rated.pressure for value in ends)
    return churn, far


def _pump_fault(pump: Device, rated: PumpRating) -> Finding | None:
    curve = (pump.flows, pump.values)
    churn, far = _shares(pump, rated)
    at_rated = _at(curve, rated.flow)
    if churn is None or far is None or at_rated is None:
        ask = f"What does pump {pump.tag} give at no flow and at 150 % of rated flow?"
        text = f"Not run: the curve of {pump.tag} does not reach from no flow to 150 %."
        return PUMP.says("missing", text, tags=(pump.tag,), remedy=ask)
    if churn > limits.PUMP_CHURN + limits.ROUND_OFF:
        share, limit, where = churn, limits.PUMP_CHURN, "without flow"
    elif far < limits.PUMP_PRESSURE - limits.ROUND_OFF:
        share, limit, where = far, limits.PUMP_PRESSURE, "at 150 % flow"
    elif at_rated < rated.pressure * (1 - limits.ROUND_OFF):
        share, limit, where = at_rated / rated.pressure, 1.0, "at rated flow"
    else:
        return None
    return PUMP.says(
        "fail",
        f"Pump {pump.tag} gives {{measured}} of rated pressure {where}; limit {{limit}}.",
        measured=Measure(share, "percent"),
        limit=Measure(limit, "percent"),
        tags=(pump.tag,),
        remedy="Check the curve, or choose another pump.",
    )


def pump_curve(context: CheckContext) -> Finding:
    """The curve's own points, joined by straight lines."""
    used = {tag for pipe in context.project.system.pipes for tag in pipe.devices}
    pumps = [one for tag, one in context.devices.items() if one.kind == "pump" and tag in used]
    if not pumps:
        return PUMP.says("not applicable", "There is no pump.")
    unrated = tuple(one.tag for one in pumps if one.tag not in context.pump_ratings)
    if unrated:
        ask = f"What are the rated flow and pressure of pump {some(unrated)}?"
        return PUMP.says(
            "missing", f"Not run: no rated point for {some(unrated)}.", tags=unrated, remedy=ask
        )
    for one in pumps:
        wrong = _pump_fault(one, context.pump_ratings[one.tag])
        if wrong is not None:
            return wrong
    tags = tuple(one.tag for one in pumps)
    shares = [_shares(one, context.pump_ratings[one.tag]) for one in pumps]
    churn = max(share for share, _ in shares if share is not None)
    values = {
        "churn": Measure(churn, "percent"),
        "most": Measure(limits.PUMP_CHURN, "percent"),
        "far": Measure(min(share for _, share in shares if share is not None), "percent"),
        "least": Measure(limits.PUMP_PRESSURE, "percent"),
    }
    text = f"{some(tags)}: churn {{churn}} of rated pressure (at most {{most}}), {{far}} at 150 % flow "
    text += "(at least {least})"
    text += "." if len(tags) == 1 else "; the worst of all pumps."
    measured, limit = values["churn"], values["most"]
    return PUMP.says("ok", text, measured=measured, limit=limit, tags=tags, values=values)


RULES = (
    Rule(DURATION, duration),
    Rule(STORAGE, storage),
    Rule(REFILL, refill),
    Rule(PUMP, pump_curve),
)
