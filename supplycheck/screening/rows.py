"""The rows of the results as text: CSV, the sheet of the workbook, and GeoJSON features.

Each number is written once, to twelve digits, and used by all three. No text that a user typed can be
executed by a spreadsheet: the rule is the one of the other tables.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass
from json import dumps
from typing import TYPE_CHECKING, Final

import numpy as np

from supplycheck.catalogue.water import hydrant_classes
from supplycheck.results.display import visible
from supplycheck.results.tables import disarmed
from supplycheck.screening.marks import marks_texts
from supplycheck.screening.records import Layout, Question
from supplycheck.screening.reduce import MET_WORDS, Reduced
from supplycheck.screening.workbook import number_cells, text_cells

if TYPE_CHECKING:
    from numpy.typing import NDArray

_CARE: Final = re.compile(r'(?:^|\n) *[=+\-@]|[",\r<>&]|[^\x20-\x7e\n\xa1-\u02ff]')
_QUOTED: Final = re.compile(r'[",\r\n]')


@dataclass(frozen=True, slots=True)
class Column:
    """A column of the results; ``texts`` are safe and bare, ``plain`` where no cell needs care."""

    title: str
    texts: list[str]
    is_number: bool
    plain: bool = True


def titles(layout: Layout, question: Question) -> list[str]:
    """Return the headings of the results."""
    units = question.unit_set
    flow, pressure = units.symbol("flow"), units.symbol("pressure")
    names = [
        "hydrant",
        "date",
        f"static [{pressure}]",
        f"residual [{pressure}]",
        "drop [%]",
        f"flow [{flow}]",
        f"flow_at_20_psi [{flow}]",
        "class",
        "colour",
        f"required_flow [{flow}]",
        f"required_at [{pressure}]",
        f"available_flow [{flow}]",
        "required_met",
        "findings",
        *(layout.place or ()),
        "row",
    ]
    return names + [visible(one.title) or "column" for one in layout.others]


def columns(
    one: Reduced, keep: NDArray[np.int64], rows: NDArray[np.int64], question: Question, layout: Layout
) -> list[Column]:
    """Return the columns for the tests at the places ``keep``; ``rows`` are their numbers in the file.

    The columns carried along from the file are added by the caller.
    """
    units = question.unit_set
    flow, pressure = units.unit("flow").factor, units.unit("pressure").factor
    classes = hydrant_classes()
    grades = one.grade[keep].tolist()
    words = iter(titles(layout, question))
    everyone = keep.size == len(one.hydrant)

    def number(values: NDArray[np.float64], factor: float) -> Column:
        return Column(next(words), numbers(values[keep] / factor), True)

    def text(cells: Iterable[str], *, typed: bool = False) -> Column:
        return typed_column(next(words), list(cells)) if typed else Column(next(words), list(cells), False)

    def picked(cells: list[str]) -> list[str]:
        return cells if everyone else [cells[place] for place in keep.tolist()]

    asked = ~np.isnan(one.required)
    found = [
        text(picked(one.hydrant), typed=True),
        text(picked(one.date)),
        number(one.static, pressure),
        number(one.residual, pressure),
        number(one.drop, 0.01),
        number(one.flow, flow),
        number(one.rated, flow),
        text(classes[grade].name for grade in grades),
        text(classes[grade].colour for grade in grades),
        number(one.required, flow),
        number(np.where(asked, question.at_pressure, np.nan), pressure),
        number(np.where(asked, one.available, np.nan), flow),
        text(MET_WORDS[met] for met in one.met[keep].tolist()),
        text(marks_texts(one.marks[keep])),
    ]
    if layout.place is not None:
        found += [number(one.x, 1.0), number(one.y, 1.0)]
    found.append(Column(next(words), list(map(str, rows.tolist())), True))
    return found


def numbers(values: NDArray[np.float64]) -> list[str]:
    """Return numbers to twelve digits, empty for NaN."""
    texts = list(map("%.12g".__mod__, values.tolist()))
    if np.isnan(values).any():
        return ["" if text == "nan" else text for text in texts]
    return texts


def typed_column(title: str, cells: list[str]) -> Column:
    """Return a column of texts that a user typed, made visible; ``plain`` where none needs care."""
    if not _CARE.search("\n".join(cells)):
        return Column(title, cells, False)
    return Column(title, [visible(cell) for cell in cells], False, plain=False)


def csv_rows(found: Sequence[Column]) -> bytes:
    """Return the rows as CSV lines."""
    cells = [
        column.texts if column.plain else [csv_cell(text) for text in column.texts] for column in found
    ]
    return _joined(map(",".join, zip(*cells, strict=True)), "\n")


def csv_cell(text: str) -> str:
    """Return ``text`` as a cell that no spreadsheet executes, quoted where it must be.

    >>> csv_cell('=SUM(A1,"x")')
    '"\\'=SUM(A1,""x"")"'
    """
    safe = disarmed(text)
    return '"' + safe.replace('"', '""') + '"' if _QUOTED.search(safe) else safe


def sheet_rows(found: Sequence[Column]) -> bytes:
    """Return the rows as XML of a sheet."""
    cells = [
        number_cells(column.texts) if column.is_number else text_cells(column.texts, plain=column.plain)
        for column in found
    ]
    return _joined(("<row>" + "".join(row) + "</row>" for row in zip(*cells, strict=True)), "")


_SHOWN: Final = ("date", "flow", "flow_at_20_psi", "class", "required_flow", "required_met", "findings")


def features(found: Sequence[Column], layout: Layout) -> bytes:
    """Return the rows as GeoJSON features, each on a line of its own, with a comma before it.

    A test without coordinates is a feature without geometry. Numbers are in the units that the head of
    the file states.
    """
    by_name = {column.title.split(" [")[0]: column for column in found[: 14 + 2 * bool(layout.place)]}
    names = layout.place or ("", "")
    places = zip(by_name[names[0]].texts, by_name[names[1]].texts, strict=True)
    geometry = [f'{{"type":"Point","coordinates":[{x},{y}]}}' if x and y else "null" for x, y in places]
    parts = [_json(by_name["hydrant"])]
    form = ',\n{"type":"Feature","geometry":%s,"properties":{"hydrant":%s'
    for name in _SHOWN:
        parts.append(_json(by_name[name]))
        form += f',"{name}":%s'
    form += "}}"
    return _joined(map(form.__mod__, zip(geometry, *parts, strict=True)), "", end="")


def _json(column: Column) -> list[str]:
    if column.is_number:
        return [text or "null" for text in column.texts] if "" in column.texts else column.texts
    if column.plain and not any("\\" in text for text in column.texts):
        return [f'"{text}"' for text in column.texts]
    quote: Callable[[str], str] = dumps
    return [quote(text) for text in column.texts]


def _joined(rows: Iterable[str], sign: str, end: str | None = None) -> bytes:
    text = sign.join(rows)
    return (text + (sign if end is None else end)).encode() if text else b""
