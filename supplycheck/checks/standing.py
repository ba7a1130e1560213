"""Rules on pressures without flow: what stands at the nodes and at the sprinklers."""

from __future__ import annotations

from typing import Final

from supplycheck.checks import limits
from supplycheck.checks.context import CheckContext
from supplycheck.checks.rule import About, Rule, pressure, some
from supplycheck.findings import Finding, State
from supplycheck.supply import supply_curves
from supplycheck.supply.standing import standing_pressures

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


_TAKEN: Final = "supplies as measured, no loss taken off"
"""What makes the pressure the highest there can be, and another than that of the adjusted supply."""


def no_flow_pressures(context: CheckContext) -> dict[str, float]:
    """Return the highest pressure [Pa] at each node without flow, from every source of pressure.

    These are the nodes of the sources with their own statics; where the project does not place them, the
    point of comparison. A pump adds its churn, a pressure-reducing valve holds its setting; shut pipes are
    not passed, one-way ones only forwards: behind one the higher pressure stands.
    """
    if context.no_flow is not None:
        return dict(context.no_flow)
    at, found = context.comparison.node, statics(context)
    if at in found or not found:
        found[at] = context.comparison.static_at_compare
    return standing_pressures(context.project.system, found, context.project.fluid.unit_weight)


def statics(context: CheckContext) -> dict[str, float]:
    """Return the highest measured static [Pa] at each source node that does not lie at the point compared.

    Nothing where a single source feeds the point at which it is compared, or one stands at no node.
    """
    project, compared = context.project, context.comparison.node
    placed = {test.node for test in project.supply.tests} | {tank.node for tank in project.supply.tanks}
    if placed <= {compared} or not placed <= set(context.nodes):
        return {}
    return {one.node: max(curve.static for curve in one.measured) for one in supply_curves(project)}


def no_flow(context: CheckContext) -> Finding:
    """The lowest node usually stands highest in pressure."""
    criteria = context.project.criteria
    given = criteria.maximum_pressure
    limit = limits.COMPONENT_RATING[criteria.standard] if given is None else given
    pressures = no_flow_pressures(context)
    worst = max(pressures, key=lambda tag: pressures[tag])
    over = [tag for tag, value in pressures.items() if value > limit * (1 + limits.ROUND_OFF)]
    measured, allowed = pressure(pressures[worst]), pressure(limit)
    text = f"Without flow {{measured}} stands at {worst} ({_TAKEN}); components "
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


RULES = (Rule(NO_FLOW, no_flow), Rule(SPRINKLER_MAXIMUM, sprinkler_maximum))
