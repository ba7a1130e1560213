"""The checks: one small pure function a rule, from a frozen context to a finding."""

from supplycheck.checks.context import (
    CheckContext,
    ClassFigures,
    ComparisonFacts,
    PumpRating,
    ScenarioFacts,
)
from supplycheck.checks.registry import RULES, in_display_order, open_questions, run_checks
from supplycheck.checks.rule import About, Rule

__all__ = [
    "RULES",
    "About",
    "CheckContext",
    "ClassFigures",
    "ComparisonFacts",
    "PumpRating",
    "Rule",
    "ScenarioFacts",
    "in_display_order",
    "open_questions",
    "run_checks",
]
