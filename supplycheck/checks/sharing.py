"""A rule on several supplies: whether water runs from one into another."""

from __future__ import annotations

from supplycheck.checks.context import CheckContext
from supplycheck.checks.rule import About, Rule, flow, some
from supplycheck.findings import Finding
from supplycheck.supply import supply_curves
from supplycheck.supply.states import fed_at_rest, fed_sources

INTO_SUPPLY = About(
    "water running into a supply",
    "where several supplies feed the system, whether one runs into another: at the demand, really, at rest",
    ("ok", "ask authority", "not applicable"),
    "common practice, no source: check valves keep water from running back into a public main or a tank",
)
APART = About(
    "mains tested apart",
    "where mains are tested at different nodes, whether one draws down the other",
    ("ask authority", "not applicable"),
    "reviewers' practice, no source: two taps of one network are not two independent supplies",
)


def into_supply(context: CheckContext) -> Finding:
    """The strongest run into a supply is told; at rest it is enough that a stronger one is open to it."""
    if len(context.solution.source_tags) < 2:
        return INTO_SUPPLY.says("not applicable", "One supply feeds this system.")
    states = [("At the demand", context.solution)]
    states += [("On the actual supply", context.operating)] if context.operating is not None else []
    fed = [(amount, tag, when) for when, one in states for tag, amount in fed_sources(one).items()]
    if fed:
        amount, tag, when = max(fed)
        text = f"{when} {{measured}} run into {tag} from another supply."
        tags = tuple(dict.fromkeys([tag, *(one[1] for one in sorted(fed, reverse=True))]))
        return INTO_SUPPLY.says(
            "ask authority", text, measured=flow(amount), tags=tags, remedy=_asked(context, tags)
        )
    resting = _at_rest(context)
    if resting:
        text = f"With nothing drawn water runs into {some(resting)}: a stronger supply is open to it."
        return INTO_SUPPLY.says("ask authority", text, tags=resting, remedy=_asked(context, resting))
    return INTO_SUPPLY.says("ok", "No supply runs into another, neither at the demand nor at rest.")


def _at_rest(context: CheckContext) -> tuple[str, ...]:
    project = context.project
    placed = {test.node for test in project.supply.tests} | {tank.node for tank in project.supply.tanks}
    if len(placed) < 2 or not placed <= set(context.nodes):
        return ()
    return fed_at_rest(project, supply_curves(project), context.case.closed_pipes)


def _asked(context: CheckContext, tags: tuple[str, ...]) -> str:
    """Return what to ask and to do; a tank fills and spills, a main takes what stood in the system."""
    tanks = {tank.node for tank in context.project.supply.tanks}
    where = some(tags)
    if set(tags) <= tanks:
        return (
            f"May the tank at {where} fill and overflow this way, or is the check valve in its connection "
            "missing from the layout (valve = check)?"
        )
    return (
        f"May water run back into {where}? Back-flow into a public main is normally prevented: is the "
        "check valve or backflow preventer in that connection missing from the layout?"
    )


def apart(context: CheckContext) -> Finding:
    """Each main is read by its own test; that none draws down another was not measured."""
    tests = {test.node: test.tag for test in context.project.supply.tests}
    if len(tests) < 2:
        return APART.says("not applicable", "No two mains are tested at different nodes.")
    where = some(tests)
    return APART.says(
        "ask authority",
        f"The mains at {where} are taken as independent: what one gives does not lower the other.",
        tags=tuple(tests.values()),
        remedy=f"Do the mains at {where} affect one another: was one flowing while the other was tested?",
    )


RULES = (Rule(INTO_SUPPLY, into_supply), Rule(APART, apart))
