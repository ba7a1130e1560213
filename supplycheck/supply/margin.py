"""The authority's margin rule, in words and in numbers.

A rule asks for a number of pascals between the available and the demand pressure. Percentages of the
supply are taken at the height of the test gauge and at the source, as the test was read, so that the
answer does not depend on the datum or on where demand and supply are set side by side.

References
----------
.. [1] Rules of this shape are published by authorities, for example Maine 16-219 ch. 4 §5 (test age),
   Prince George's County MD (larger of), Bellevue WA BCC 23.10.903.3.1 (static band). Examples of a
   shape, not current law.
"""

from __future__ import annotations

import datetime as dt
import math
from dataclasses import dataclass

from supplycheck.errors import DomainError
from supplycheck.model import MarginRule
from supplycheck.model.words import Step, Value, Words
from supplycheck.supply.curve import SupplyCurve


@dataclass(frozen=True, slots=True)
class MarginCase:
    """What a rule may look at.

    ``curve`` is the compared curve of the governing test or tank, ``flow`` [m³/s] what it delivers,
    ``demand_pressure`` [Pa] what the demand needs at the source, ``measured_static`` [Pa] the
    static of the test as read. ``test_date`` is ``None`` for a tank; ``reference_date`` is the day
    of submittal or, where none is given, of the project.
    """

    curve: SupplyCurve
    flow: float
    demand_pressure: float
    measured_static: float
    test_date: dt.date | None
    reference_date: dt.date

    @property
    def gauge_available(self) -> float:
        """Pressure at the height of the gauge [Pa] at the demand flow."""
        return self.curve.pressure_at(self.flow) - self.curve.offset


@dataclass(frozen=True, slots=True)
class RequiredMargin:
    """The margin a rule asks for [Pa] and the steps that lead to it, in order."""

    required: float
    steps: tuple[Step, ...]


def age_in_years(since: dt.date, until: dt.date) -> float:
    """Return the age in calendar years: whole anniversaries and the share of the year after the last.

    >>> age_in_years(dt.date(2020, 2, 29), dt.date(2025, 2, 28))
    5.0
    """
    if until < since:
        return -age_in_years(until, since)
    whole = until.year - since.year
    if _anniversary(since, until.year) > until:
        whole -= 1
    last = _anniversary(since, since.year + whole)
    following = _anniversary(since, since.year + whole + 1)
    return whole + (until - last).days / (following - last).days


def _anniversary(day: dt.date, year: int) -> dt.date:
    try:
        return day.replace(year=year)
    except ValueError:
        return day.replace(year=year, day=28)


def rule_words(rule: MarginRule | None) -> Words:
    """Return the rule in words with its own numbers."""
    if rule is None:
        return Words("no margin rule is given")
    values: list[Value] = []
    return Words(_phrase(rule, values), tuple(values))


def _phrase(rule: MarginRule, values: list[Value]) -> str:
    def number(value: float, kind: str) -> str:
        name = f"v{len(values)}"
        values.append((name, value, kind))
        return "{" + name + "}"

    if rule.kind == "none":
        return "none: the available pressure need only reach the demand"
    if rule.kind == "fixed":
        return f"at least {number(rule.pressure, 'pressure')} above the demand"
    if rule.kind == "percent":
        share = number(rule.percent, "percent")
        return {
            "static lowered": f"the whole supply curve lowered by {share} of its static pressure",
            "pressure scaled": f"every pressure on the supply curve reduced by {share}",
            "flow scaled": f"every flow on the supply curve reduced by {share}",
        }[_reading(rule)]
    if rule.kind == "of demand":
        least = f", at least {number(rule.pressure, 'pressure')}" if rule.pressure else ""
        return f"{number(rule.percent, 'percent')} of the demand pressure at the supply{least}"
    if rule.kind == "larger of":
        return "the larger of (" + "; ".join(_phrase(part, values) for part in _parts(rule)) + ")"
    if rule.kind == "by static":
        bands = [
            (f"static below {number(limit, 'pressure')}: " if math.isfinite(limit) else "otherwise: ")
            + _phrase(part, values)
            for limit, part in rule.bands
        ]
        return "by the static pressure of the test (" + "; ".join(bands) + ")"
    fixed, yearly = number(rule.pressure, "pressure"), number(rule.per_year, "pressure")
    free = number(rule.free_years, "age")
    return f"{fixed} above the demand, and {yearly} more for each full year of test age beyond {free}"


def _reading(rule: MarginRule) -> str:
    if rule.reading is None:
        raise DomainError("a percent margin must say how it is read: static, pressures or flows")
    return rule.reading


def _parts(rule: MarginRule) -> tuple[MarginRule, ...]:
    if not rule.parts:
        raise DomainError("a margin rule 'larger of' needs its parts")
    return rule.parts


def required_margin(rule: MarginRule, case: MarginCase) -> RequiredMargin:
    """Return what ``rule`` asks for in ``case``.

    Raises :class:`DomainError` for a rule that lacks its numbers, or one by test age without a test.
    """
    if rule.kind == "none":
        return RequiredMargin(0.0, (Step("Margin rule", Words("no margin is asked"), 0.0, "pressure"),))
    if rule.kind == "fixed":
        return _one("Margin rule, fixed", "{p}", (("p", rule.pressure, "pressure"),), rule.pressure)
    if rule.kind == "percent":
        return _percent(rule, case)
    if rule.kind == "of demand":
        return _of_demand(rule, case)
    if rule.kind == "larger of":
        return _larger(rule, case)
    if rule.kind == "by static":
        return _by_static(rule, case)
    return _by_age(rule, case)


def _one(step: str, formula: str, values: tuple[Value, ...], required: float) -> RequiredMargin:
    return RequiredMargin(required, (Step(step, Words(formula, values), required, "pressure"),))


def _percent(rule: MarginRule, case: MarginCase) -> RequiredMargin:
    reading, share = _reading(rule), rule.percent
    available = case.gauge_available
    if not 0.0 <= share < 1.0:
        raise DomainError(f"a percent margin lies between 0 and 100 %, found {share * 100:g} %")
    values: tuple[Value, ...] = (("share", share, "percent"), ("available", available, "pressure"))
    if reading == "static lowered":
        static = case.curve.gauge_static
        formula = "{share} × static {static}"
        return _one(
            "Margin rule, static lowered",
            formula,
            (*values, ("static", static, "pressure")),
            share * max(static, 0.0),
        )
    if reading == "pressure scaled":
        formula = "{share} × available {available} at the gauge"
        return _one("Margin rule, pressures scaled", formula, values, share * max(available, 0.0))
    scaled = case.curve.pressure_at(case.flow / (1.0 - share)) - case.curve.offset
    values += (("flow", case.flow, "flow"), ("larger", case.flow / (1.0 - share), "flow"))
    return _one(
        "Margin rule, flows scaled",
        "available {available} at {flow} − {scaled} on the curve at {flow} / (1 − {share}) = {larger}",
        (*values, ("scaled", scaled, "pressure")),
        available - scaled,
    )


def _of_demand(rule: MarginRule, case: MarginCase) -> RequiredMargin:
    values = (
        ("share", rule.percent, "percent"),
        ("demand", case.demand_pressure, "pressure"),
        ("least", rule.pressure, "pressure"),
    )
    least = ", at least {least}" if rule.pressure else ""
    required = max(rule.percent * max(case.demand_pressure, 0.0), rule.pressure)
    return _one(
        "Margin rule, of the demand", "{share} × demand {demand} at the supply" + least, values, required
    )


def _larger(rule: MarginRule, case: MarginCase) -> RequiredMargin:
    parts = [required_margin(part, case) for part in _parts(rule)]
    required = max(part.required for part in parts)
    names = [f"p{index}" for index in range(len(parts))]
    formula = Words(
        "the larger of " + " and ".join("{" + name + "}" for name in names),
        tuple((name, part.required, "pressure") for name, part in zip(names, parts, strict=True)),
    )
    steps = tuple(step for part in parts for step in part.steps)
    return RequiredMargin(required, (*steps, Step("Margin rule, larger of", formula, required, "pressure")))


def _by_static(rule: MarginRule, case: MarginCase) -> RequiredMargin:
    static = case.measured_static
    for limit, part in rule.bands:
        if static < limit:
            below = "below {limit}" if math.isfinite(limit) else "in the last band"
            words = Words(
                "static {static} of the test is " + below,
                (("static", static, "pressure"), ("limit", limit, "pressure")),
            )
            inner = required_margin(part, case)
            return RequiredMargin(
                inner.required, (Step("Margin rule, static band", words, static, "pressure"), *inner.steps)
            )
    raise DomainError("the bands of the margin rule by static stop below the static of the test")


def _by_age(rule: MarginRule, case: MarginCase) -> RequiredMargin:
    if case.test_date is None:
        raise DomainError("a margin rule by test age needs a flow test with its date")
    age = age_in_years(case.test_date, case.reference_date)
    years = max(math.floor(age - rule.free_years + 1e-9), 0)
    required = rule.pressure + years * rule.per_year
    values = (
        ("age", age, "age"),
        ("free", rule.free_years, "age"),
        ("fixed", rule.pressure, "pressure"),
        ("yearly", rule.per_year, "pressure"),
    )
    formula = f"test of {case.test_date.isoformat()} is " + (
        "{age} old on "
        + case.reference_date.isoformat()
        + f": {years} full years beyond "
        + "{free}; {fixed} + "
        + f"{years} × "
        + "{yearly}"
    )
    return _one("Margin rule, test age", formula, values, required)
