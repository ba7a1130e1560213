"""Rule on the scenarios of the project: what really flows at the heads that are open in each."""

from __future__ import annotations

from collections.abc import Sequence

from supplycheck.checks import limits
from supplycheck.checks.context import CheckContext, ScenarioFacts
from supplycheck.checks.rule import About, Rule, some
from supplycheck.findings import Finding, Measure

SCENARIOS = About(
    "scenarios",
    "discharge of every open head in each scenario against what that head needs",
    ("ok", "fail", "ask authority", "not applicable"),
    "reviewers' practice, no source: density times area of each head, or its minimum pressure, also in "
    "states that nobody requires",
)


def scenarios(context: CheckContext) -> Finding:
    """Heads that run dry come first, then scenarios without a solution, then the least share of all."""
    dry = [one for one in context.scenarios if one.dry]
    unsolved = tuple(one.name for one in context.scenarios if not one.solved)
    if dry:
        return _dry(dry, unsolved)
    if unsolved:
        text = f"No solution for {some(unsolved)}; the table of scenarios says why."
        ask = (
            f"Must the open heads still get what they need in {some(unsolved)}, which could not be solved?"
        )
        return SCENARIOS.says("ask authority", text, tags=unsolved, remedy=ask)
    told = [(one.share, one) for one in context.scenarios if one.share is not None]
    if not told:
        text = "No scenario of the project opens a head."
        return SCENARIOS.says("not applicable", text)
    least, worst = min(told, key=lambda one: one[0])
    measured, limit = Measure(least, "percent"), Measure(1.0, "percent")
    text = f"Least is head {worst.head} in {worst.name}: {{measured}} of what it needs"
    low = [one.name for share, one in told if share < 1 - limits.ROUND_OFF]
    if not low:
        text = f"In every scenario each open head gets what it needs. {text}."
        return SCENARIOS.says("ok", text, measured=measured, limit=limit, tags=(worst.head,))
    others = [name for name in low if name != worst.name]
    at_worst = f" (in {worst.name})" if others else ""
    more = f"; heads are short in {some(others)} too" if others else ""
    return SCENARIOS.says(
        "ask authority",
        f"{text}{more}.",
        measured=measured,
        limit=limit,
        tags=(worst.head,),
        remedy=f"Must the open heads still get what they need in {some(low)}, where {worst.head} "
        f"gets {{measured}} of it{at_worst}?",
    )


def _dry(dry: Sequence[ScenarioFacts], unsolved: Sequence[str]) -> Finding:
    """Return the open heads that give nothing, scenarios with the same dry heads together."""
    by_heads: dict[tuple[str, ...], list[str]] = {}
    for one in dry:
        by_heads.setdefault(one.dry, []).append(one.name)
    parts = [
        f"{some(heads)} {'runs' if len(heads) == 1 else 'run'} dry in {some(names)}"
        for heads, names in by_heads.items()
    ]
    text = "; ".join(parts[:3])
    text += "; the table of scenarios says where else" if len(parts) > 3 else ""
    text += f"; no solution for {some(unsolved)}" if unsolved else ""
    return SCENARIOS.says(
        "fail",
        f"{text}.",
        measured=Measure(0.0, "percent"),
        limit=Measure(1.0, "percent"),
        tags=tuple(dict.fromkeys(tag for one in dry for tag in one.dry)),
        remedy="Give these heads more pressure, or take out a scenario that nobody asks for.",
    )


RULES = (Rule(SCENARIOS, scenarios),)
