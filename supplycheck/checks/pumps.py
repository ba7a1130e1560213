"""Rules on fire pumps: suction, main, discharge, the share of the rating, the pump that would be needed."""

from __future__ import annotations

import math

from supplycheck.checks import limits
from supplycheck.checks.context import CheckContext
from supplycheck.checks.rule import About, Rule, flow, pressure
from supplycheck.checks.water_supply import floor_words
from supplycheck.findings import Finding, Measure
from supplycheck.supply.pumping import PumpAnswer, PumpState

SUCTION = About(
    "pump suction",
    "pressure at the suction of each pump at the demand, at the flow that really runs and at 150 % flow",
    ("ok", "fail", "missing", "not applicable"),
    "NFPA 20: no less than 0 psi at the suction, −3 psi from a tank (published guidance)",
    weight=3,
)
MAIN = About(
    "main at the greatest pump flow",
    "pressure left in the main when a pump gives 150 % of its rated flow, against the floor of the main",
    ("ok", "fail", "ask authority", "missing", "not applicable"),
    "floor given by the project, else assumed: 20 psi by practice of water utilities, no source",
    weight=3,
)
DISCHARGE = About(
    "pump pressure without flow",
    "churn on the highest pressure without flow at the suction, against the rating of the components",
    ("ok", "fail", "ask authority", "not applicable"),
    "NFPA 13: 175 psi; EN 12845: 12 bar (both from memory), or the rating given",
    weight=3,
)
SHARE = About(
    "demand on the pump",
    "the demand and the flow that really runs against 150 % of the rated flow",
    ("ok", "fail", "ask authority", "missing", "not applicable"),
    "NFPA 20: a pump is rated up to 150 % of its rated flow (published guidance)",
    weight=3,
)
LIMITS = About(
    "pump curve from limits",
    "whether the curve of a pump is stated or only bounded by its rating",
    ("ok", "ask authority", "not applicable"),
    "NFPA 20 bounds a curve, it does not give one",
    weight=3,
)
NEEDED = About(
    "pump that would be needed",
    "rated flow and pressure of a pump that would close the gap where the supply falls short",
    ("ask authority", "not applicable"),
    "every pump within the limits of NFPA 20 has enough; ratings in which pumps are made",
    weight=3,
)
_NONE = "There is no pump."
_STATES = {
    "demand": "at the demand",
    "actual supply": "at the flow that really runs",
    "150 % of rated flow": "at 150 % flow",
}


def _ask_rating(about: About, tag: str) -> Finding:
    ask = f"What are the rated flow and pressure of pump {tag}?"
    return about.says("missing", f"Not run: no rated point for {tag}.", tags=(tag,), remedy=ask)


def _unrated(context: CheckContext) -> str:
    return next((pump.tag for pump in context.pumps if pump.rating is None), "")


def suction(context: CheckContext) -> Finding:
    """The state with the least to spare of every pump."""
    found = [
        (pump, state, limits.SUCTION_TANK if pump.from_tank else limits.SUCTION_MAIN)
        for pump in context.pumps
        for state in pump.states
    ]
    if not found:
        return SUCTION.says("not applicable", "No pump runs." if context.pumps else _NONE)
    pump, state, limit = min(found, key=lambda one: one[1].suction - one[2])
    past = ", beyond the end of its curve" if state.flow > pump.curve_end * (1 + limits.ROUND_OFF) else ""
    text = f"Pump {pump.tag} takes in at {{measured}} {_STATES[state.name]} ({{flow}}{past})"
    measured, allowed, values = pressure(state.suction), pressure(limit), {"flow": flow(state.flow)}
    tags = (pump.tag,)
    if state.suction < limit - limits.PSI * limits.ROUND_OFF:
        do = "Lower the flow or the loss before the pump; it must not draw its suction below the limit."
        return SUCTION.says(
            "fail",
            f"{text}; no less than {{limit}}.",
            measured=measured,
            limit=allowed,
            values=values,
            tags=tags,
            remedy=do,
        )
    if _unrated(context):
        return _ask_rating(SUCTION, _unrated(context))
    return SUCTION.says("ok", f"{text}.", measured=measured, limit=allowed, values=values, tags=tags)


def main(context: CheckContext) -> Finding:
    """The floor of the project; where none is given, 20 psi by practice."""
    pumps = [pump for pump in context.pumps if not pump.from_tank]
    if not pumps:
        return MAIN.says("not applicable", "No pump draws from a main." if context.pumps else _NONE)
    unrated = next((pump.tag for pump in pumps if pump.rating is None), "")
    if unrated:
        return _ask_rating(MAIN, unrated)
    states = [(pump, state) for pump in pumps if (state := pump.state("150 % of rated flow"))]
    if not states:
        text = f"Not run: 150 % of the rated flow of {pumps[0].tag} could not be drawn."
        ask = f"What pressure is left in the main when {pumps[0].tag} gives 150 % of its rated flow?"
        return MAIN.says("missing", text, tags=(pumps[0].tag,), remedy=ask)
    pump, state = min(states, key=lambda one: one[1].main)
    given = context.project.supply.main_floor_pressure
    limit = limits.MAIN_FLOOR if given is None else given
    measured, allowed, values = pressure(state.main), pressure(limit), {"flow": flow(state.flow)}
    text, tags = f"{{measured}} is left in the main when {pump.tag} gives {{flow}}", (pump.tag,)
    if state.main >= limit - limits.ROUND_OFF * abs(limit):
        text += f"; {floor_words(given)} {{limit}}."
        return MAIN.says("ok", text, measured=measured, limit=allowed, values=values, tags=tags)
    if given is None:
        ask = "How much pressure must stay in the main when the pump gives 150 % of its rated flow?"
        text += "; {limit} is usual."
        return MAIN.says(
            "ask authority", text, measured=measured, limit=allowed, values=values, tags=tags, remedy=ask
        )
    do = "Use a smaller pump, a break tank, or a second supply."
    text += "; the floor is {limit}."
    return MAIN.says("fail", text, measured=measured, limit=allowed, values=values, tags=tags, remedy=do)


def discharge(context: CheckContext) -> Finding:
    """The highest of all pumps."""
    fed = [pump for pump in context.pumps if math.isfinite(pump.highest_discharge)]
    if not fed:
        return DISCHARGE.says("not applicable", "No pump is fed." if context.pumps else _NONE)
    criteria = context.project.criteria
    given = criteria.maximum_pressure
    limit = limits.COMPONENT_RATING[criteria.standard] if given is None else given
    pump = max(fed, key=lambda one: one.highest_discharge)
    measured, allowed, tags = pressure(pump.highest_discharge), pressure(limit), (pump.tag,)
    values = {"churn": pressure(pump.churn), "static": pressure(pump.highest_suction)}
    text = f"{pump.tag}: churn {{churn}} on {{static}} is {{measured}} without flow; components "
    if pump.highest_discharge <= limit * (1 + limits.ROUND_OFF):
        text += "stand {limit}."
        return DISCHARGE.says("ok", text, measured=measured, limit=allowed, values=values, tags=tags)
    if given is None:
        ask = f"What pressure are the components behind pump {pump.tag} rated for?"
        text += "usually stand {limit}."
        return DISCHARGE.says(
            "ask authority", text, measured=measured, limit=allowed, values=values, tags=tags, remedy=ask
        )
    do = "Use components of a higher rating, a pump of lower churn, or a pressure-reducing valve."
    text += "stand {limit}."
    return DISCHARGE.says(
        "fail", text, measured=measured, limit=allowed, values=values, tags=tags, remedy=do
    )


def share(context: CheckContext) -> Finding:
    """A demand beyond 150 % fails; what really runs beyond it is left to the authority."""
    running = [pump for pump in context.pumps if pump.states]
    if not running:
        return SHARE.says("not applicable", "No pump runs." if context.pumps else _NONE)
    if _unrated(context):
        return _ask_rating(SHARE, _unrated(context))

    def of(pump: PumpAnswer, state: PumpState | None) -> float:
        return 0.0 if state is None or pump.rating is None else state.flow / pump.rating.flow

    pump = max(running, key=lambda one: of(one, one.state("demand")))
    asked = of(pump, pump.state("demand"))
    limit, tags = Measure(limits.PUMP_FLOW, "percent"), (pump.tag,)
    text = f"The demand is {{measured}} of the rated flow of pump {pump.tag}"
    if asked > limits.PUMP_FLOW * (1 + limits.ROUND_OFF):
        do = "Choose a pump of a greater rated flow."
        text += "; at most {limit}."
        return SHARE.says(
            "fail", text, measured=Measure(asked, "percent"), limit=limit, tags=tags, remedy=do
        )
    most = max(running, key=lambda one: of(one, one.state("actual supply")))
    runs = of(most, most.state("actual supply"))
    if runs > limits.PUMP_FLOW * (1 + limits.ROUND_OFF):
        text = f"{{measured}} of the rated flow of pump {most.tag} really runs, over {{limit}}."
        ask = f"May pump {most.tag} run beyond 150 % of its rated flow with the design area open?"
        measured = Measure(runs, "percent")
        return SHARE.says(
            "ask authority", text, measured=measured, limit=limit, tags=(most.tag,), remedy=ask
        )
    values = {"runs": Measure(runs, "percent")}
    text += "; {runs} really runs."
    measured = Measure(asked, "percent")
    return SHARE.says("ok", text, measured=measured, limit=limit, values=values, tags=tags)


def from_limits(context: CheckContext) -> Finding:
    """A rating with the limits of the standard is no curve."""
    bounded = tuple(pump.tag for pump in context.pumps if pump.from_limits)
    if not context.pumps:
        return LIMITS.says("not applicable", _NONE)
    if bounded:
        text = f"The curve of {bounded[0]} is the weakest that its rating allows, not the curve of a pump."
        ask = f"What is the curve of pump {bounded[0]}, at no flow, rated flow and 150 % flow?"
        return LIMITS.says("ask authority", text, tags=bounded, remedy=ask)
    tags = tuple(pump.tag for pump in context.pumps)
    return LIMITS.says("ok", "The curve of each pump is stated.", tags=tags)


def needed(context: CheckContext) -> Finding:
    """The smallest pump whose suction holds; the smallest of all where none does."""
    pump = context.needed_pump
    if pump is None or not pump.options:
        return NEEDED.says("not applicable", "The supply does not fall short.")
    option = next((one for one in pump.options if one.suction_holds), pump.options[0])
    where = f"in place of {pump.instead_of}" if pump.instead_of else f"behind {pump.node}"
    values = {
        "flow": flow(option.rating.flow),
        "net": pressure(option.rating.pressure),
        "left": pressure(option.suction_at_overload),
    }
    text = f"A pump of {{flow}} at {{net}} {where} would close the gap; {{left}} of suction at 150 % flow."
    ask = "May a pump draw from this supply, and what suction must it leave?"
    return NEEDED.says(
        "ask authority", text, limit=pressure(pump.floor), values=values, tags=(pump.node,), remedy=ask
    )


RULES = (
    Rule(SUCTION, suction),
    Rule(MAIN, main),
    Rule(DISCHARGE, discharge),
    Rule(SHARE, share),
    Rule(LIMITS, from_limits),
    Rule(NEEDED, needed),
)
