"""Tables in CSV or XLSX, read as text so that a tag `001` stays `001`, each row with its number."""

from __future__ import annotations

import csv
import io
import itertools
import math
import re
from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass
from typing import Final

from supplycheck.findings import Place
from supplycheck.project.faults import FaultList, listed, near, quoted
from supplycheck.project.files import Folder
from supplycheck.project.quantity import LARGEST, NumberError, Sign, read_number
from supplycheck.project.workbook import MERGED, UNSTORED, sheet_rows
from supplycheck.units import METRIC, US, Unit, UnitSet, find_unit

LONGEST_CELL: Final = 10_000
MOST_ROWS: Final = 1_000_000
_COMMA: Final = re.compile(r"[+\-−]?\d*,\d+(?:[^\d,.][^,.]*)?")
"""A number with a decimal comma, and perhaps a unit behind it; thousands are never separated."""
_WITH_UNIT: Final = re.compile(r"(.*?)\s*[(\[]([^)\]]+)[)\]]\s*")


@dataclass(frozen=True, slots=True)
class Column:
    """A column that a table may have; ``kind`` names its quantity, empty for texts."""

    name: str
    description: str
    kind: str = ""
    required: bool = False


@dataclass(frozen=True, slots=True)
class Row:
    """One row: its cells by column name, and its number as a spreadsheet counts it."""

    file: str
    number: int
    cells: Mapping[str, str]

    def place(self, column: str = "") -> Place:
        """Return the place of the row, or of one of its cells."""
        return Place(self.file, f"row {self.number}" + (f", column {column}" if column else ""))

    def get(self, column: str) -> str:
        """Return the cell, empty where there is none."""
        return self.cells.get(column, "")


@dataclass(frozen=True, slots=True)
class RowTable:
    """A table as read: its rows and the unit that a heading states for a column.

    A table is not ``whole`` where it could not be read to its end; its rows then say nothing about what is
    missing. ``decimal_comma`` says that numbers may be written `10,5`, ``comma_read`` that some are.
    """

    file: str
    columns: frozenset[str]
    rows: tuple[Row, ...]
    units: Mapping[str, Unit]
    whole: bool = True
    decimal_comma: bool = False
    comma_read: bool = False

    def unit_set(self, column: str, default: UnitSet) -> UnitSet:
        """Return the unit set to which the unit of ``column`` belongs: ``default`` without one."""
        unit = self.units.get(column)
        return next((one for one in (US, METRIC) if unit and one.units.get(unit.kind) == unit), default)

    def number(
        self, row: Row, column: str, kind: str, default: UnitSet, faults: FaultList, sign: Sign = "positive"
    ) -> float | None:
        """Return the cell in SI; ``None`` where it is empty, NaN with a fault noted where it is wrong."""
        text = row.cells.get(column, "")
        if not text:
            return None
        if self.decimal_comma and _COMMA.fullmatch(text):
            text = text.replace(",", ".")
        unit = self.units.get(column) or default.unit(kind)
        try:
            value = float(text)
            if abs(value) <= LARGEST and (
                value > 0 or sign == "any" or (value == 0 and sign != "positive")
            ):
                return unit.to_si(value)
        except ValueError:
            pass
        try:
            written = read_number(text, kind, sign)
        except NumberError as fault:
            faults.add(
                row.place(column),
                fault.problem,
                found=quoted(text),
                allowed=fault.allowed,
                remedy=fault.remedy,
            )
            return math.nan
        return (written.unit or unit).to_si(written.number)


def _csv_rows(text: str, name: str, faults: FaultList) -> Iterator[tuple[int, list[str]]]:
    reader = csv.reader(io.StringIO(text, newline=""), delimiter=_delimiter(text), strict=True)
    number = line = 0
    try:
        for cells in reader:
            number, line = number + 1, reader.line_num
            yield number, cells
    except csv.Error as caught:
        too_long = "field limit" in str(caught)
        begins = next(itertools.islice(io.StringIO(text), line, None), "").rstrip("\r\n")
        long = f"more than {csv.field_size_limit()} characters"
        faults.add(
            Place(name, f"row {number + 1}"),
            "a cell is too long" if too_long else f"cannot be read as CSV ({caught})",
            found=long if too_long else quoted(begins),
            allowed=f"at most {LONGEST_CELL} characters in a cell" if too_long else "quotes in pairs",
            remedy="look for a quote that is opened and not closed, here or in a row above",
        )


def _delimiter(text: str) -> str:
    """Return what separates the cells: of comma, semicolon and tab the one met most in the first line."""
    head = text.split("\n", 1)[0]
    return max(",;\t", key=head.count)


def _note_marks(cells: list[str], place: Place, names: list[str], faults: FaultList) -> list[str]:
    """Return the ``cells`` of a row without their marks, each noted that stands in a named column."""
    for position, text in enumerate(cells):
        column = names[position] if position < len(names) else ""
        if text == UNSTORED and column:
            faults.add(
                Place(place.file, f"{place.where}, column {column}"),
                "holds a formula without a stored result",
                allowed="a value, or a formula with its result",
                remedy="open it in the spreadsheet program and save it",
            )
        elif text.startswith(MERGED) and column:
            merged = text.removeprefix(MERGED)
            faults.add(
                Place(place.file, f"cells {merged}"),
                "cells are merged",
                found=merged,
                allowed="a cell for each value",
                remedy="unmerge them and fill in every cell",
            )
    return ["" if text == UNSTORED or text.startswith(MERGED) else text for text in cells]


def _heading(cell: str) -> tuple[str, str]:
    """Return the name in a heading and the unit in brackets behind it."""
    text = " ".join(cell.replace("\n", " ").split())
    match = _WITH_UNIT.fullmatch(text)
    name, unit = match.groups() if match else (text, "")
    return name.casefold().replace("-", "_").replace(" ", "_"), unit


def _headings(
    cells: list[str], number: int, name: str, columns: Mapping[str, Column], faults: FaultList
) -> tuple[list[str], dict[str, Unit]]:
    """Return the column name for each cell of the heading row (empty: to be skipped) and stated units."""
    found: list[str] = []
    units: dict[str, Unit] = {}
    place = Place(name, f"row {number}")
    for cell in cells:
        key, unit_text = _heading(cell)
        if not key:
            found.append("")
            continue
        if key not in columns:
            close = near(key, columns)
            faults.add(
                Place(name, f"row {number}, column {key}"),
                "unknown column",
                found=quoted(cell),
                allowed=listed(columns, 30),
                remedy=f"did you mean {close}?" if close else "take the column out or rename it",
            )
            found.append("")
            continue
        if key in found:
            faults.add(place, "a column stands twice", found=quoted(cell), remedy="keep one of them")
        found.append(key)
        if unit_text:
            unit = find_unit(unit_text)
            kind = columns[key].kind
            if unit is None or not (unit.kind == kind or {unit.kind, kind} <= {"length", "size"}):
                faults.add(
                    Place(name, f"row {number}, column {key}"),
                    "the unit in the heading does not fit",
                    found=quoted(cell),
                    allowed=f"a unit of {kind.replace('_', ' ')}" if kind else "no unit",
                )
            else:
                units[key] = unit
    missing = [column.name for column in columns.values() if column.required and column.name not in found]
    if missing:
        faults.add(
            place, "columns are missing", found=listed(filter(None, found), 30), allowed=listed(missing, 30)
        )
    return found, units


def _body(
    raw: Iterable[tuple[int, list[str]]], name: str, names: list[str], faults: FaultList
) -> Iterator[Row]:
    for number, cells in raw:
        if number > MOST_ROWS:
            faults.add(Place(name), "the table is too long", allowed=f"at most {MOST_ROWS} rows")
            return
        if any(cell.startswith("\0") for cell in cells):
            cells = _note_marks(cells, Place(name, f"row {number}"), names, faults)
        if not any(cells):
            continue
        texts = [cell.strip() for cell in cells]
        for text in texts:
            if len(text) > LONGEST_CELL:
                faults.add(
                    Place(name, f"row {number}"),
                    "a cell is too long",
                    found=f"{len(text)} characters",
                    allowed=f"at most {LONGEST_CELL} characters in a cell",
                )
                return
        if len(texts) > len(names) and any(texts[len(names) :]):
            faults.add(
                Place(name, f"row {number}"),
                "has more cells than the heading has columns",
                found=f"{len(texts)} cells",
                allowed=f"{len(names)} cells",
                remedy="put quotes round a text that holds the separator",
            )
        yield Row(
            name, number, {key: text for key, text in zip(names, texts, strict=False) if key and text}
        )


def read_table(
    folder: Folder, name: str, place: Place, columns: tuple[Column, ...], faults: FaultList
) -> RowTable | None:
    """Return the table ``name`` (``book.xlsx#Sheet`` for a sheet); ``None`` with faults noted."""
    by_name = {column.name: column for column in columns}
    before = len(faults)
    file, mark, sheet = name.partition("#")
    comma = False
    if file.casefold().endswith(".xlsx"):
        data = folder.read(file, place)
        if data is None:
            return None
        raw = sheet_rows(data, file, sheet.strip(), place, faults)
    elif file.casefold().endswith((".csv", ".txt", ".tsv")):
        if mark:
            faults.add(
                place,
                "names a sheet of a text file, which has none",
                found=quoted(name),
                allowed="a sheet of a workbook, book.xlsx#Sheet",
                remedy=f"write {quoted(file)} alone",
            )
            return None
        text = folder.read_text(file, place)
        if text is None:
            return None
        comma = _delimiter(text) == ";"
        raw = _csv_rows(text, file, faults)
    else:
        faults.add(
            place, "is not a table that can be read", found=quoted(name), allowed="a file .csv or .xlsx"
        )
        return None
    head = next(((number, cells) for number, cells in raw if any(cells)), None)
    if head is None:
        if len(faults) == before:
            faults.add(
                place, "the table is empty", found=quoted(name), allowed="a heading row and rows below it"
            )
        return None
    numbered = [str(number) for number, _ in enumerate(head[1], start=1)]
    cells = _note_marks(head[1], Place(name, f"row {head[0]}"), numbered, faults)
    names, units = _headings(cells, head[0], name, by_name, faults)
    if any(column.required and column.name not in names for column in columns):
        return None
    headed = len(faults)
    rows = tuple(_body(raw, name, names, faults))
    if not rows and len(faults) == before:
        faults.add(place, "the table has no rows", found=quoted(name), allowed="rows below the heading row")
        return None
    numbers = [key for key in names if key and by_name[key].kind]
    return RowTable(
        name,
        frozenset(filter(None, names)),
        rows,
        units,
        whole=len(faults) == headed,
        decimal_comma=comma,
        comma_read=comma and any(_COMMA.fullmatch(row.get(key)) for row in rows for key in numbers),
    )
