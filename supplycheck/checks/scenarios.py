"""Rule on the scenarios of the project: what really flows at the heads of the design area."""

from __future__ import annotations

from supplycheck.checks import limits
from supplycheck.checks.context import CheckContext
from supplycheck.checks.rule import About, Rule, some
from supplycheck.findings import Finding, Measure

SCENARIOS = About(
    "scenarios",
    "discharge of every head of the design area in each scenario against what it needs",
    ("ok", "ask authority", "not applicable"),
    "reviewers' practice, no source: density times area of each head, also in states that nobody requires",
)


def scenarios(context: CheckContext) -> Finding:
    """The scenario with the least share is told; one without a solution comes first."""
    unsolved = tuple(one.name for one in context.scenarios if not one.solved)
    if unsolved:
        text = f"No solution for {some(unsolved)}; the table of scenarios says why."
        ask = f"Must the system still carry the design area in {some(unsolved)}?"
        return SCENARIOS.says("ask authority", text, tags=unsolved, remedy=ask)
    told = [(one.share, one) for one in context.scenarios if one.share is not None]
    if not told:
        text = "No scenario of the project opens a head of the design area."
        return SCENARIOS.says("not applicable", text)
    least, worst = min(told, key=lambda one: one[0])
    measured, limit = Measure(least, "percent"), Measure(1.0, "percent")
    text = f"Least is head {worst.head} in {worst.name}: {{measured}} of what it needs"
    low = [one.name for share, one in told if share < 1 - limits.ROUND_OFF]
    if not low:
        text = f"In every scenario each head of the area gets what it needs. {text}."
        return SCENARIOS.says("ok", text, measured=measured, limit=limit, tags=(worst.head,))
    others = [name for name in low if name != worst.name]
    more = f"; heads are short in {some(others)} too" if others else ""
    return SCENARIOS.says(
        "ask authority",
        f"{text}{more}.",
        measured=measured,
        limit=limit,
        tags=(worst.head,),
        remedy=f"Must the system still carry the design area in {some(low)}?",
    )


RULES = (Rule(SCENARIOS, scenarios),)
