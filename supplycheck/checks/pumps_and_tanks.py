"""Rules on how long the supply lasts and on pumps."""

from __future__ import annotations

from supplycheck.checks import limits
from supplycheck.checks.context import CheckContext, PumpRating
from supplycheck.checks.rule import About, Rule, pressure, some
from supplycheck.findings import Finding, Measure
from supplycheck.model import Device

DURATION = About(
    "duration",
    "whether the time that the supply must last is given",
    ("ok", "fail", "missing"),
    "duration of the hazard class in the adopted standard",
)
STORAGE = About(
    "storage",
    "usable volume of each tank and its refill against demand times duration",
    ("ok", "fail", "missing", "not applicable"),
    "demand times duration (UFC practice 2006)",
    weight=3,
)
SUCTION = About(
    "pump suction",
    "pressure at the inlet of each pump at the demand flow, which must not fall below zero",
    ("ok", "fail", "not applicable"),
    "NFPA 20: no less than 0 psi at the inlet (published guidance)",
    weight=3,
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
        ask = f"How long must the supply last for {context.project.criteria.hazard}?"
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
    text = "The supply is to last {measured}; a flow test does not show how long it does."
    if not context.project.supply.tests:
        text = "The supply is to last {measured}."
    return DURATION.says("ok", text, measured=measured)


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
    if held >= need * (1 - limits.ROUND_OFF):
        return STORAGE.says("ok", text, measured=measured, limit=limit, values=values, tags=tags)
    do = "Enlarge the tank or its refill."
    return STORAGE.says("fail", text, measured=measured, limit=limit, values=values, tags=tags, remedy=do)


def suction(context: CheckContext) -> Finding:
    """Lowest inlet pressure of all pumps in the demand state."""
    inlets = {
        tag: pipe.start
        for pipe in context.project.system.pipes
        for tag in pipe.devices
        if context.devices[tag].kind == "pump"
    }
    if not inlets:
        return SUCTION.says("not applicable", "There is no pump.")
    tag = min(inlets, key=lambda one: context.pressure(inlets[one]))
    value = context.pressure(inlets[tag])
    measured, limit = pressure(value), pressure(0.0)
    text = f"Pump {tag} takes in at {{measured}} at {inlets[tag]} at the demand flow."
    if value < 0:
        do = "Lower the flow or the loss before the pump; it must not draw the main into suction."
        return SUCTION.says("fail", text, measured=measured, limit=limit, tags=(tag,), remedy=do)
    return SUCTION.says("ok", text, measured=measured, limit=limit, tags=(tag,))


def _at(curve: tuple[tuple[float, ...], tuple[float, ...]], wanted: float) -> float | None:
    flows, values = curve
    for q1, q2, p1, p2 in zip(flows, flows[1:], values, values[1:], strict=False):
        if q1 <= wanted <= q2 * (1 + limits.ROUND_OFF):
            return p1 + (p2 - p1) * (wanted - q1) / (q2 - q1)
    return None


def _pump_fault(pump: Device, rated: PumpRating) -> Finding | None:
    curve = (pump.flows, pump.values)
    churn, far = _at(curve, 0.0), _at(curve, limits.PUMP_FLOW * rated.flow)
    if churn is None or far is None:
        ask = f"What does pump {pump.tag} give at no flow and at 150 % of rated flow?"
        text = f"Not run: the curve of {pump.tag} does not reach from no flow to 150 %."
        return PUMP.says("missing", text, tags=(pump.tag,), remedy=ask)
    churn, far = churn / rated.pressure, far / rated.pressure
    if churn > limits.PUMP_CHURN + limits.ROUND_OFF:
        share, limit, where = churn, limits.PUMP_CHURN, "without flow"
    elif far < limits.PUMP_PRESSURE - limits.ROUND_OFF:
        share, limit, where = far, limits.PUMP_PRESSURE, "at 150 % flow"
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
    values = {
        "churn": Measure(limits.PUMP_CHURN, "percent"),
        "far": Measure(limits.PUMP_PRESSURE, "percent"),
    }
    text = f"{some(tags)}: churn at most {{churn}} and at 150 % flow at least {{far}} of rated pressure."
    return PUMP.says("ok", text, tags=tags, values=values)


RULES = (
    Rule(DURATION, duration),
    Rule(STORAGE, storage),
    Rule(SUCTION, suction),
    Rule(PUMP, pump_curve),
)
