"""Numbers of one project as text, and tables of steps that several sections share."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import replace

from supplycheck.report.document import Column, Row, Table
from supplycheck.results.display import left_text, nominal_text, residual_text, step_text, value_text
from supplycheck.results.records import HandStep, Result
from supplycheck.units import UNIT_SETS, UnitSet


class Show:
    """Displays SI values in the units of one project."""

    def __init__(self, units: UnitSet) -> None:
        self.units = units

    @classmethod
    def of(cls, result: Result) -> Show:
        """Return the display of ``result``'s project."""
        return cls(UNIT_SETS[result.project.units])

    def n(self, value: float | None, kind: str, decimals: int | None = None) -> str:
        """Return the number without its unit."""
        return self.units.number(value, kind, decimals)

    def t(self, value: float | None, kind: str, decimals: int | None = None) -> str:
        """Return the number with its unit."""
        if kind not in self.units.units:
            return value_text(value, kind, self.units)
        return self.units.text(value, kind, decimals)

    def left(self, value: float | None) -> str:
        """Return a pressure that is left at a flow without its unit; none below zero."""
        return left_text(value, self.units, unit=False)

    def left_t(self, value: float | None) -> str:
        """Return a pressure that is left at a flow with its unit; none below zero."""
        return left_text(value, self.units)

    def signed(self, value: float | None, kind: str) -> str:
        """Return the number with its unit and its sign, also where it is positive."""
        text = self.t(value, kind)
        return f"+{text}" if value is not None and value > 0 and text[:1].isdigit() else text

    def s(self, kind: str) -> str:
        """Return the symbol of the unit."""
        return self.units.symbol(kind)

    def nominal(self, nominal: str) -> str:
        """Return a nominal size that cannot be misread, ``DN 100`` or ``4 in`` in a metric project."""
        return nominal_text(nominal, self.units)

    def small(self, value: float, kind: str) -> str:
        """Return a residual of the calculation with its unit."""
        return residual_text(value, kind, self.units)


def told_apart(pressures: Sequence[float], units: UnitSet) -> int:
    """Return the decimals of pressures: one more where two [Pa] that differ would be printed alike."""
    usual = units.unit("pressure").decimals
    alike = len({units.number(one, "pressure") for one in pressures}) < len(pressures)
    finer = {units.number(one, "pressure", usual + 1) for one in pressures}
    return usual + 1 if alike and len(finer) > 1 else usual


def column(title: str, unit: str = "") -> Column:
    """Return a column of numbers."""
    return Column(title, unit, right=True)


def words(title: str) -> Column:
    """Return a column of text that may be broken."""
    return Column(title, wrap=True)


def without_empty(table: Table, *titles: str) -> Table:
    """Return ``table`` without those of the columns named ``titles`` in which no row holds a value."""
    kept = [
        place
        for place, one in enumerate(table.columns)
        if one.title not in titles or any(row.cells[place].strip() not in {"", "–"} for row in table.rows)
    ]
    rows = tuple(replace(row, cells=tuple(row.cells[place] for place in kept)) for row in table.rows)
    return replace(table, columns=tuple(table.columns[place] for place in kept), rows=rows)


def steps_table(title: str, steps: Iterable[HandStep], show: Show) -> Table:
    """Return steps as a table: what is worked out, the formula with its numbers, the result."""
    rows = tuple(Row((step.step, step.formula, _step_result(step, show)), note=step.note) for step in steps)
    columns = (
        Column("Step", wrap=True, share=0.34),
        Column("Formula and numbers", wrap=True, share=0.5),
        Column("Result", right=True, share=0.16),
    )
    return Table(title, columns, rows, empty="no steps recorded")


def _step_result(step: HandStep, show: Show) -> str:
    if step.decimals is None:
        return step_text(step.value, step.kind, show.units)
    return show.t(step.value, step.kind, step.decimals)


def given(text: str) -> str:
    """Return ``text``, or the words that nothing was given."""
    return text if text.strip() else "not given"
