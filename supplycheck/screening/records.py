"""What a screening is asked, and what it cannot go on with."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass
from typing import Final

from supplycheck.errors import SupplyCheckError
from supplycheck.units import PSI, UNIT_SETS, Unit, UnitSet

RATING_PRESSURE: Final = 20.0 * PSI
"""Pressure [Pa] at which a hydrant is classed, 20 psi (NFPA 291)."""


class ScreeningError(SupplyCheckError):
    """The file of tests cannot be screened at all; ``problems`` holds everything that is wrong with it."""

    def __init__(self, problems: tuple[str, ...]) -> None:
        super().__init__("; ".join(problems))
        self.problems = problems


@dataclass(frozen=True, slots=True)
class Question:
    """What is asked of every test.

    ``row_units`` are the units of rows that name none (empty: such rows are rejected), ``units`` those of
    the answer. ``required_flow`` [m³/s] holds for rows that state none. ``at_pressure`` [Pa] is where the
    required flow is wanted. Tests before ``stale_before`` are stale; ``None`` where no limit was given.
    """

    row_units: str
    units: str
    as_of: dt.date
    required_flow: float | None = None
    at_pressure: float = RATING_PRESSURE
    maximum_age: int | None = None

    @property
    def unit_set(self) -> UnitSet:
        """The units of the answer."""
        return UNIT_SETS[self.units]

    @property
    def stale_before(self) -> dt.date | None:
        """The first day on which a test is still young enough; ``None`` without a limit."""
        if self.maximum_age is None:
            return None
        return months_before(self.as_of, self.maximum_age)


@dataclass(frozen=True, slots=True)
class Heading:
    """One column of the file: its name here, its title there, and the unit the title states."""

    name: str
    title: str
    unit: Unit | None = None
    known: bool = True


@dataclass(frozen=True, slots=True)
class Layout:
    """The columns of the file in their order, and the sign between its cells."""

    headings: tuple[Heading, ...]
    delimiter: str

    def has(self, name: str) -> bool:
        """Return whether the file has the column ``name``."""
        return any(heading.known and heading.name == name for heading in self.headings)

    def unit(self, name: str) -> Unit | None:
        """Return the unit that the title of the column ``name`` states."""
        return next((one.unit for one in self.headings if one.known and one.name == name), None)

    @property
    def others(self) -> tuple[Heading, ...]:
        """The columns that the screening does not use and carries along."""
        return tuple(heading for heading in self.headings if not heading.known)

    @property
    def geographic(self) -> bool:
        """True for longitude and latitude, false for x and y on a plane (or no place at all)."""
        return self.has("longitude") and self.has("latitude")

    @property
    def place(self) -> tuple[str, str] | None:
        """The two columns that tell where a hydrant stands."""
        if self.geographic:
            return "longitude", "latitude"
        return ("x", "y") if self.has("x") and self.has("y") else None


def months_before(day: dt.date, months: int) -> dt.date:
    """Return the day ``months`` before ``day``; the last of the month where it has no such day.

    >>> months_before(dt.date(2026, 5, 31), 3)
    datetime.date(2026, 2, 28)
    """
    place = max(day.year * 12 + day.month - 1 - months, 12)
    year, month = divmod(place, 12)
    for number in range(day.day, 27, -1):
        try:
            return dt.date(year, month + 1, number)
        except ValueError:
            continue
    return dt.date(year, month + 1, min(day.day, 28))
