"""Rules on the hose allowance: how much, where it joins, and that it is counted once."""

from __future__ import annotations

from supplycheck.checks import limits
from supplycheck.checks.context import CheckContext
from supplycheck.checks.rule import About, Rule, flow, some
from supplycheck.findings import Finding

AMOUNT = About(
    "hose allowance",
    "hose inside and outside together against the hazard class",
    ("ok", "fail", "ask authority", "missing", "not applicable"),
    "hose allowance of the hazard class; NFPA 13: 100, 250, 500 gpm (250 with OH in a published example)",
    weight=3,
)
PLACE = About(
    "where hose joins",
    "outside hose at the main, inside hose in the system",
    ("ok", "ask authority", "missing", "not applicable"),
    "NAVFAC practice: outside hose at the connection to the main or the nearer hydrant",
)
ONCE = About(
    "hose counted once",
    "hose in the demand, and flow drawn at hose nodes, against the allowance",
    ("ok", "fail", "not applicable"),
    "reviewers' practice, no source",
    weight=3,
)


def _hose_nodes(context: CheckContext) -> tuple[str, ...]:
    nodes = context.project.system.nodes
    return tuple(node.tag for node in nodes if node.kind == "hose" and node.fixed_flow > 0)


def amount(context: CheckContext) -> Finding:
    """A zero may be right where hoses use another supply."""
    hose, figures = context.project.hose, context.class_figures
    at_nodes = sum(context.nodes[tag].fixed_flow for tag in _hose_nodes(context))
    total = hose.inside + hose.outside + at_nodes
    measured = flow(total)
    wanted = figures.hose if figures is not None else None
    if wanted is None:
        if context.european:
            return AMOUNT.says("not applicable", "EN 12845 asks no hose allowance.", measured=measured)
        ask = f"How much hose does the adopted edition ask for {context.project.criteria.hazard}?"
        return AMOUNT.says(
            "missing", "Not run: no hose figure for the class.", measured=measured, remedy=ask
        )
    limit = flow(wanted)
    source = figures.source if figures is not None else AMOUNT.source
    values = {"inside": flow(hose.inside), "outside": flow(hose.outside + at_nodes)}
    text = "Hose {inside} inside, {outside} outside: {measured}; the class asks {limit}."
    if total >= wanted * (1 - limits.ROUND_OFF):
        return AMOUNT.says("ok", text, measured=measured, limit=limit, values=values, source=source)
    if total == 0:
        ask = "Do the hoses use another supply, so that none is added here?"
        text = "No hose is added; the class asks {limit}."
        return AMOUNT.says("ask authority", text, measured=measured, limit=limit, remedy=ask, source=source)
    do = "Add the hose of the class."
    return AMOUNT.says(
        "fail", text, measured=measured, limit=limit, values=values, remedy=do, source=source
    )


def _downstream(context: CheckContext) -> set[str]:
    inner = {"branch line", "drop", "riser nipple", "cross main"}
    return {
        tag for pipe in context.project.system.pipes if pipe.role in inner for tag in (pipe.start, pipe.end)
    }


def place(context: CheckContext) -> Finding:
    """Hose taken at the wrong node changes the friction between."""
    hose = context.project.hose
    if hose.inside + hose.outside == 0:
        return PLACE.says("not applicable", "No hose is added.")
    if hose.outside > 0 and hose.outside_node is None:
        ask = "At which node does outside hose join the main?"
        return PLACE.says("missing", "Not run: no node for outside hose.", remedy=ask)
    if hose.inside > 0 and hose.inside_node is None:
        ask = "At which node do inside hoses join the system?"
        return PLACE.says("missing", "Not run: no node for inside hose.", remedy=ask)
    sources = set(context.solution.source_tags)
    if hose.outside > 0 and hose.outside_node in _downstream(context):
        ask = f"Why is outside hose taken at {hose.outside_node}, inside the sprinkler piping?"
        text = f"Outside hose joins at {hose.outside_node}, inside the sprinkler piping."
        return PLACE.says("ask authority", text, tags=(hose.outside_node or "",), remedy=ask)
    if hose.inside > 0 and hose.inside_node in sources:
        ask = "Which pipes feed the inside hoses, if they do not join the system?"
        text = f"Inside hose joins at the supply {hose.inside_node}, so no pipe inside carries it."
        return PLACE.says("ask authority", text, tags=(hose.inside_node or "",), remedy=ask)
    parts = [f"outside hose joins at {hose.outside_node}"] if hose.outside > 0 else []
    parts += [f"inside hose at {hose.inside_node}"] if hose.inside > 0 else []
    text = " and ".join(parts)
    tags = tuple(tag for tag in (hose.outside_node, hose.inside_node) if tag is not None)
    return PLACE.says("ok", f"{text[0].upper()}{text[1:]}.", tags=tags)


def once(context: CheckContext) -> Finding:
    """A hose node with a flow of its own beside an allowance doubles it."""
    hose, facts = context.project.hose, context.comparison
    allowance = hose.inside + hose.outside
    if allowance == 0:
        return ONCE.says("not applicable", "No hose is added.")
    measured, limit = flow(facts.hose_flow), flow(allowance)
    doubled = _hose_nodes(context)
    slack = limits.ROUND_OFF * allowance
    if doubled:
        values = {"own": flow(sum(context.nodes[tag].fixed_flow for tag in doubled))}
        text = f"Hose is counted twice: {{own}} at {some(doubled)} beside an allowance of {{limit}}."
        do = "Keep either the flow at the nodes or the allowance."
        return ONCE.says(
            "fail", text, measured=measured, limit=limit, tags=doubled, values=values, remedy=do
        )
    if abs(facts.hose_flow - allowance) > slack:
        text = "The demand holds {measured} of hose; the allowance is {limit}."
        do = "Count the allowance once, no more and no less."
        return ONCE.says("fail", text, measured=measured, limit=limit, remedy=do)
    other = sum(node.fixed_flow for node in context.project.system.nodes)
    added = facts.sprinkler_flow + facts.hose_flow + other
    if abs(facts.demand_flow - added) > limits.ROUND_OFF * facts.demand_flow:
        values = {
            "total": flow(facts.demand_flow),
            "heads": flow(facts.sprinkler_flow),
            "other": flow(other),
        }
        text = "Heads {heads}, hose {measured} and other {other} do not add up to the demand of {total}."
        do = "Find the flow that is neither head nor hose."
        return ONCE.says("fail", text, measured=measured, limit=limit, values=values, remedy=do)
    return ONCE.says("ok", "The demand holds {measured} of hose, once.", measured=measured, limit=limit)


RULES = (Rule(AMOUNT, amount), Rule(PLACE, place), Rule(ONCE, once))
