"""What the rules on flow tests share."""

from __future__ import annotations

import calendar
import datetime as dt
from typing import Final

from supplycheck.checks import limits
from supplycheck.checks.context import CheckContext
from supplycheck.checks.rule import About
from supplycheck.findings import Finding, Measure
from supplycheck.model import FlowTest, Outlet
from supplycheck.supply.margin import age_in_years

NO_TEST: Final = "No flow test feeds this system."
_NO_READING: Final = "No field reading to check: the values were computed by the utility."


def field_tests(context: CheckContext) -> list[FlowTest]:
    """Return the tests that were read in the field."""
    return [test for test in context.project.supply.tests if not test.model]


def no_reading(about: About, context: CheckContext) -> Finding:
    """Return that ``about`` has no field test to look at."""
    return about.says("not applicable", _NO_READING if context.project.supply.tests else NO_TEST)


def outlets_of(tests: list[FlowTest]) -> list[tuple[FlowTest, Outlet]]:
    """Return every flowing outlet with its test."""
    return [(test, outlet) for test in tests for point in test.points for outlet in point.outlets]


def last_day(tested: dt.date, months: float) -> dt.date:
    """Return the last day on which a test of day ``tested`` is at most ``months`` old.

    >>> last_day(dt.date(2026, 8, 31), 6)
    datetime.date(2027, 2, 28)
    """
    whole = int(months)
    year, month = divmod(tested.year * 12 + tested.month - 1 + whole, 12)
    day = min(tested.day, calendar.monthrange(year, month + 1)[1])
    rest = round((months - whole) * limits.YEAR_DAYS / 12)
    return dt.date(year, month + 1, day) + dt.timedelta(days=rest)


def age(first: dt.date, last: dt.date) -> Measure:
    """Return the time between two days as a measure."""
    return Measure(age_in_years(first, last), "age")
