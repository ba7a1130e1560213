"""What a date that is not written year-month-day most likely says, for the message about it."""

from __future__ import annotations

import datetime as dt
import re
from typing import Final

ALLOWED: Final = "year-month-day, the year in four digits, for example 2026-06-01"
_MONTHS: Final = (
    *("January", "February", "March", "April", "May", "June"),
    *("July", "August", "September", "October", "November", "December"),
)
_NUMBERS: Final = r"\d{1,4}\s?[/.-]\s?\d{1,2}\s?[/.-]\s?\d{1,4}"
_UNQUOTED: Final = re.compile(rf"=\s*({_NUMBERS})\s*(?:[,}}\]#].*)?$")
CENTURY: Final = 2000
"""A year of two digits is one of this century: flow tests of the last one are long out of date."""


def unquoted_date(line: str) -> str:
    """Return what looks like a date in a line of a project file, empty where there is none.

    >>> unquoted_date("date = 08/12/2026  # of the form"), unquoted_date("flow = 10 20")
    ('08/12/2026', '')
    """
    match = _UNQUOTED.search(line)
    return match[1] if match else ""


def _day(year: int, month: int, day: int) -> dt.date | None:
    try:
        return dt.date(year + CENTURY if year < 100 else year, month, day)
    except ValueError:
        return None


def _named_month(text: str) -> list[dt.date]:
    month = next((n for n, name in enumerate(_MONTHS, 1) if re.search(rf"(?i)\b{name[:3]}", text)), 0)
    numbers = sorted((int(one) for one in re.findall(r"\d+", text)), reverse=True)
    if not month or len(numbers) != 2:
        return []
    found = _day(numbers[0], month, numbers[1])
    return [found] if found and numbers[0] > 31 else []


def possible_days(text: str) -> list[dt.date]:
    """Return the days that ``text`` may mean, each once; none where it cannot be told.

    >>> [day.isoformat() for day in possible_days("08/12/2026")]
    ['2026-08-12', '2026-12-08']
    """
    parts = re.fullmatch(r"\s*(\d+)\s?[/. -]\s?(\d+)\s?[/. -]\s?(\d+)\s*", text)
    if not parts:
        return _named_month(text)
    first, second, third = parts.groups()
    if len(first) == 4:
        days = [_day(int(first), int(second), int(third))]
    elif len(third) in (2, 4):
        a, b, year = int(first), int(second), int(third)
        days = [_day(year, a, b), _day(year, b, a)]
    else:
        days = []
    return list(dict.fromkeys(day for day in days if day is not None))


def date_problem(text: str) -> str:
    """Return what is wrong with ``text`` as a date.

    >>> date_problem("2026-02-30"), date_problem("08/12/2026")
    ('is no day of the calendar', 'is not a date as it must be written')
    """
    shaped = re.fullmatch(rf"\s*{_NUMBERS}\s*", text)
    none = shaped and not possible_days(text)
    return "is no day of the calendar" if none else "is not a date as it must be written"


def date_remedy(text: str) -> str:
    """Return what to write instead of ``text``, empty where it cannot be told.

    >>> date_remedy("13/06/2026")
    'write 2026-06-13'
    """
    days = possible_days(text)
    if not days:
        return ""
    if len(days) == 1:
        return f"write {days[0].isoformat()}"
    told = " or ".join(f"{day.isoformat()} for {day.day} {_MONTHS[day.month - 1]}" for day in days)
    return f"write {told}: the order of day and month cannot be told from what is written"
