"""From rows as bytes to columns: numbers in SI, texts as written, and what cannot be read."""

from __future__ import annotations

import csv
import io
import math
from collections.abc import Sequence
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any, Final

import numpy as np
import pandas as pd

from supplycheck.screening.columns import KINDS
from supplycheck.screening.records import Layout
from supplycheck.units import METRIC, UNIT_SETS, US

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Floats = NDArray[np.float64]
    Mask = NDArray[np.bool_]

LARGEST: Final = 1e12
"""Largest number read, in any unit."""


@dataclass(slots=True)
class Problems:
    """Why rows of a block cannot be used, by the place of the row in the block."""

    reasons: dict[int, list[str]] = field(default_factory=dict)

    def add(self, place: int | np.integer[Any], reason: str) -> None:
        """Note ``reason`` for the row at ``place``."""
        self.reasons.setdefault(int(place), []).append(reason)

    def told(self, place: int | np.integer[Any], name: str) -> bool:
        """Return whether a reason about the column ``name`` was noted for the row at ``place``."""
        return any(one.startswith((f"{name}:", f"{name} ")) for one in self.reasons.get(int(place), ()))

    def where(self, mask: Mask, reason: str) -> None:
        """Note ``reason`` for every row of ``mask``."""
        for place in np.flatnonzero(mask):
            self.add(place, reason)


class Cells:
    """The cells of one block of rows by column."""

    def __init__(self, rows: Sequence[bytes], layout: Layout, row_units: str, problems: Problems) -> None:
        self.layout = layout
        self.problems = problems
        self.count = len(rows)
        self._frame = _frame(rows, layout)
        self._places = {one.name: place for place, one in enumerate(layout.headings) if one.known}
        self.metric = self._metric(row_units)

    def text(self, name: str) -> list[str]:
        """Return the cells of a known column as written, without blanks round them."""
        return self.text_at(self._places[name])

    def text_at(self, place: int) -> list[str]:
        """Return the cells of the column at ``place``."""
        return [cell.strip() for cell in self._frame[place].tolist()]

    def number(self, name: str, *, sign: str = "any") -> Floats:
        """Return the numbers of a column [SI], NaN where a cell is empty or wrong (noted as a problem)."""
        place = self._places.get(name)
        if place is None:
            return np.full(self.count, np.nan)
        column = self._frame[place]
        kind = KINDS[name]
        written: dict[int, float] = {}
        if column.dtype.kind in "fiu":
            values = column.to_numpy(dtype=np.float64)
        else:
            values, written = self._slowly(name, kind, [str(cell) for cell in column.tolist()])
        with np.errstate(invalid="ignore"):
            wild = np.isinf(values) | (np.abs(values) > LARGEST)
        self._wild(name, wild)
        values = np.where(wild, np.nan, values) * self._factor(name, kind)
        for at, value in written.items():
            values[at] = value
        if sign != "any":
            self._signs(name, values, zero=sign == "zero or more")
        return values

    def mixed(self, name: str) -> tuple[Floats, list[tuple[int, str]]]:
        """Return a column that holds numbers or words: the numbers, and the words with their places."""
        if name not in self._places:
            return np.full(self.count, np.nan), []
        cells = self.text(name)
        values = pd.to_numeric(pd.Series(cells, dtype=object), errors="coerce").to_numpy(dtype=np.float64)
        values = np.where(np.isinf(values), np.nan, values)
        return values, [(int(at), cells[at]) for at in np.flatnonzero(np.isnan(values)) if cells[at]]

    def _wild(self, name: str, wild: Mask) -> None:
        self.problems.where(wild, f"{name}: is not a finite number below {LARGEST:g}")

    def _signs(self, name: str, values: Floats, *, zero: bool) -> None:
        with np.errstate(invalid="ignore"):
            bad = values < 0 if zero else values <= 0
        if not bad.any():
            return
        allowed = "zero or more" if zero else "above 0"
        for at in np.flatnonzero(bad):
            found = "is zero" if values[at] == 0 else "is negative"
            self.problems.add(at, f"{name} {found}; allowed: {allowed}")
            values[at] = np.nan

    def _slowly(self, name: str, kind: str, cells: list[str]) -> tuple[Floats, dict[int, float]]:
        """Return a column in which some cells are no plain numbers, and those with a unit of their own."""
        values = pd.to_numeric(pd.Series(cells, dtype=object), errors="coerce").to_numpy(dtype=np.float64)
        values = values.copy()
        written: dict[int, float] = {}
        known: dict[str, float | str] = {}
        for at in np.flatnonzero(np.isnan(values)):
            cell = cells[at].strip()
            if not cell:
                continue
            key = f"{cell}\n{self.metric[at]}"
            if key not in known:
                known[key] = _written(cell, name, kind, "metric" if self.metric[at] else "us")
            found = known[key]
            if isinstance(found, str):
                self.problems.add(at, found)
            else:
                written[int(at)] = found
        return values, written

    def _factor(self, name: str, kind: str) -> Floats | float:
        if kind in ("angle", "plane"):
            return 1.0
        unit = self.layout.unit(name)
        if unit is not None:
            return unit.factor
        us, metric = US.unit(kind).factor, METRIC.unit(kind).factor
        if not self.metric.any():
            return us
        return metric if self.metric.all() else np.where(self.metric, metric, us)

    def _metric(self, row_units: str) -> Mask:
        """Return which rows are metric; a row whose units nobody tells is a problem."""
        default = row_units == "metric"
        if "units" not in self._places:
            return np.full(self.count, default)
        cells = [cell.casefold() for cell in self.text("units")]
        wrong: dict[str, str] = {}
        for word in set(cells) - set(UNIT_SETS):
            if word == "" and row_units:
                continue
            said = "is empty and --units is not given" if not word else f"is {_short(word)}"
            wrong[word] = f"units {said}; allowed: us, metric"
        if wrong:
            for at, cell in enumerate(cells):
                if cell in wrong:
                    self.problems.add(at, wrong[cell])
        return np.fromiter(
            (cell == "metric" or (default and not cell) for cell in cells), dtype=bool, count=self.count
        )


def _frame(rows: Sequence[bytes], layout: Layout) -> pd.DataFrame:
    """Return the cells by place of the column: number columns as pandas reads them, the others as text."""
    places = range(len(layout.headings))
    numeric = {at for at in places if layout.headings[at].known and KINDS[layout.headings[at].name]}
    if not rows:
        return pd.DataFrame([], columns=places, dtype=object)
    try:
        frame = pd.read_csv(
            io.BytesIO(b"\n".join(rows) + b"\n"),
            header=None,
            names=[str(at) for at in places],
            index_col=False,
            sep=layout.delimiter,
            lineterminator="\n",
            dtype={str(at): object for at in places if at not in numeric},
            keep_default_na=False,
            na_values={str(at): [""] for at in numeric},
            skip_blank_lines=False,
            low_memory=False,
            encoding="utf-8",
        )
        frame.columns = pd.Index(places)
    except (ValueError, pd.errors.ParserError):
        frame = pd.DataFrame()
    if len(frame) == len(rows):
        for at in numeric:
            if frame[at].dtype.kind not in "fiu":
                frame[at] = frame[at].astype(object).where(frame[at].notna(), "")
        return frame
    return _frame_by_row(rows, layout)


def _frame_by_row(rows: Sequence[bytes], layout: Layout) -> pd.DataFrame:
    """Return the same, row by row: slow, for what the fast reader splits otherwise."""
    cells = [next(csv.reader([row.decode("utf-8")], delimiter=layout.delimiter)) for row in rows]
    return pd.DataFrame(cells, columns=range(len(layout.headings)), dtype=object)


def _written(cell: str, name: str, kind: str, units: str) -> float | str:
    """Return the number [SI] that ``cell`` states with its unit or as a fraction, or what is wrong."""
    if kind in ("angle", "plane"):
        return f"{name}: {_short(cell)} is not a number"
    from supplycheck.project.quantity import NumberError, read_number

    try:
        value = read_number(cell, kind, "any").si(UNIT_SETS[units])
    except NumberError as fault:
        remedy = f"; {fault.remedy}" if fault.remedy else ""
        return f"{name}: {_short(cell)} {fault}; allowed: {fault.allowed}{remedy}"
    return value if math.isfinite(value) else f"{name}: {_short(cell)} is not a finite number"


def _short(text: Any) -> str:
    from supplycheck.project.faults import quoted

    return quoted(text)
