"""Every rule in one tuple, the order of display, and the questions that stay open."""

from __future__ import annotations

from collections.abc import Iterable
from typing import Final

from supplycheck.checks import (
    accuracy,
    area,
    balance,
    basis,
    devices,
    duties,
    fittings,
    flow_record,
    heads,
    hose,
    pipes,
    plausibility,
    pumps,
    pumps_and_tanks,
    readings,
    scenarios,
    sharing,
    sizes,
    standing,
    starter,
    water_supply,
)
from supplycheck.checks.context import CheckContext
from supplycheck.checks.rule import Rule
from supplycheck.findings import Finding, State

RULES: Final[tuple[Rule, ...]] = (
    *starter.RULES,
    *water_supply.RULES,
    *sharing.RULES,
    *standing.RULES,
    *pumps_and_tanks.RULES,
    *pumps.RULES,
    *area.RULES,
    *heads.RULES,
    *scenarios.RULES,
    *duties.RULES,
    *hose.RULES,
    *readings.RULES,
    *accuracy.RULES,
    *flow_record.RULES,
    *devices.RULES,
    *pipes.RULES,
    *sizes.RULES,
    *plausibility.RULES,
    *fittings.RULES,
    *balance.RULES,
    *basis.RULES,
)
"""All rules; what weighs most stands first."""

NO_SPRINKLERS: Final = "No sprinkler is part of the demand."
DISPLAY_ORDER: Final[tuple[State, ...]] = ("fail", "ask authority", "missing", "ok", "not applicable")


def run_checks(context: CheckContext, sprinklers: CheckContext | None = None) -> tuple[Finding, ...]:
    """Return what every rule finds, in display order; no rule is left out.

    ``sprinklers`` is the context of the hardest case of the sprinklers where another duty governs: the
    rules on heads, design area and hose look there. Where no sprinkler is open they are not applicable.
    """
    own = context if sprinklers is None else sprinklers
    on_sprinklers = {rule.about.name for rule in (*area.RULES, *heads.RULES, *scenarios.RULES)}
    on_hose = {rule.about.name for rule in hose.RULES}
    none_there = not context.project.criteria.has_sprinklers
    without = on_sprinklers if not own.case.heads else set()
    if none_there:
        without = on_sprinklers | on_hose | {basis.OCCUPANCY.name}
    return in_display_order(
        rule.about.says("not applicable", NO_SPRINKLERS)
        if rule.about.name in without
        else rule.run(own if rule.about.name in on_sprinklers | on_hose else context)
        for rule in RULES
    )


def in_display_order(findings: Iterable[Finding]) -> tuple[Finding, ...]:
    """Return ``findings`` by state, within a state by weight, otherwise as they came."""
    weight = {rule.about.name: rule.about.weight for rule in RULES}
    return tuple(
        sorted(findings, key=lambda one: (DISPLAY_ORDER.index(one.state), -weight.get(one.check, 0)))
    )


def open_questions(findings: Iterable[Finding]) -> tuple[str, ...]:
    """Return the questions of what is missing or left to the authority, most weighty first, each once."""
    weight = {rule.about.name: rule.about.weight for rule in RULES}
    asking = [one for one in findings if one.state in ("missing", "ask authority") and one.remedy]
    asking.sort(key=lambda one: -weight.get(one.check, 0))
    return tuple({one.remedy: None for one in asking})
