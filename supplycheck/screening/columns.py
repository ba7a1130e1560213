"""The heading of a file of tests: which columns it has, in which units, and what is wrong with it."""

from __future__ import annotations

import csv
import difflib
import re
from collections import Counter
from dataclasses import dataclass
from types import MappingProxyType
from typing import Final

from supplycheck.screening.records import Heading, Layout, ScreeningError
from supplycheck.units import find_unit

MOST_OUTLETS: Final = 4


@dataclass(frozen=True, slots=True)
class Known:
    """A column that the screening uses; ``kind`` names its quantity, empty for text."""

    name: str
    kind: str
    meaning: str


_OUTLET: Final = (
    Known("diameter", "size", "inside diameter of the flowing outlet"),
    Known("coefficient", "", "its coefficient, or its shape (smooth and rounded, …)"),
    Known("pitot", "pressure", "pitot reading at the outlet"),
    Known("pumper_factor", "", "factor of an outlet of 4 in and more: a number, 1 for none, or `table`"),
)
COLUMNS: Final = (
    Known("hydrant", "", "tag of the hydrant, kept as text"),
    Known("date", "", "day of the test, YYYY-MM-DD"),
    Known("units", "", "`us` or `metric`: units of the bare numbers of this row"),
    Known("static", "pressure", "pressure before flowing"),
    Known("residual", "pressure", "pressure while water flows"),
    Known("flow", "flow", "total flow, where it is known; else the outlets"),
    *_OUTLET,
    Known("required_flow", "flow", "flow that this hydrant must give"),
    Known("longitude", "angle", "degrees east, WGS 84"),
    Known("latitude", "angle", "degrees north, WGS 84"),
    Known("x", "plane", "east on a plane, instead of longitude and latitude"),
    Known("y", "plane", "north on a plane"),
)
KINDS: Final = MappingProxyType(
    {one.name: one.kind for one in COLUMNS}
    | {f"{one.name}_{number}": one.kind for one in _OUTLET for number in range(2, MOST_OUTLETS + 1)}
)
REQUIRED: Final = ("hydrant", "static", "residual")
_WITH_UNIT: Final = re.compile(r"(.*?)\s*[(\[]([^)\]]+)[)\]]\s*")
_SAME: Final = MappingProxyType({"lon": "longitude", "lat": "latitude", "tag": "hydrant"})


def outlet_names(number: int) -> tuple[str, str, str, str]:
    """Return the four columns of outlet ``number``, counted from 1.

    >>> outlet_names(2)
    ('diameter_2', 'coefficient_2', 'pitot_2', 'pumper_factor_2')
    """
    tail = "" if number == 1 else f"_{number}"
    return f"diameter{tail}", f"coefficient{tail}", f"pitot{tail}", f"pumper_factor{tail}"


def read_layout(row: bytes, delimiter: str, file: str) -> Layout:
    """Return the columns that the heading ``row`` names.

    Raises :class:`ScreeningError` with everything that is wrong with the heading.
    """
    try:
        text = row.decode("utf-8")
    except UnicodeDecodeError as error:
        raise ScreeningError(
            (f"{file}: row 1: the heading is not UTF-8 (0x{row[error.start]:02X}). Save as CSV UTF-8.",)
        ) from None
    titles = [title.strip() for title in next(csv.reader([text], delimiter=delimiter), [])]
    problems: list[str] = []
    headings = tuple(_heading(title, problems) for title in titles)
    named = {heading.name for heading in headings if heading.known}
    counts = Counter(heading.name for heading in headings)
    problems += [f"the column {name!r} stands {count} times" for name, count in counts.items() if count > 1]
    others = [heading.title for heading in headings if not heading.known]
    claimed: set[str] = set()
    for name in REQUIRED:
        if name not in named:
            close = _near(name, others)
            claimed.update(close)
            asked = f"; is it {close[0]!r}?" if close else ""
            problems.append(f"the column {name!r} is missing{asked}")
    for title in others:
        close = [one for one in _near(_folded(title), [*KINDS], 0.82) if one not in named]
        if close and title not in claimed:
            problems.append(f"the column {title!r} is not known; did you mean {close[0]!r}?")
    if not problems and not ("flow" in named or {"diameter", "pitot"} <= named):
        problems.append(
            "there is neither a column 'flow' nor the columns 'diameter', 'coefficient', 'pitot'"
        )
    if problems:
        have = ", ".join(repr(title) for title in titles if title) or "nothing"
        found = f"found {have if len(have) < 400 else have[:400] + ' …'}"
        raise ScreeningError(tuple(f"{file}: row 1: {problem}; {found}." for problem in problems))
    return Layout(headings, delimiter)


def _folded(title: str) -> str:
    return re.sub(r"[\s\-]+", "_", title.strip().casefold())


def _near(name: str, names: list[str], cutoff: float = 0.6) -> list[str]:
    by_fold = {_folded(one): one for one in names}
    return [by_fold[one] for one in difflib.get_close_matches(name, list(by_fold), n=1, cutoff=cutoff)]


def _heading(title: str, problems: list[str]) -> Heading:
    """Return the column of ``title``; a wrong unit is noted in ``problems``."""
    match = _WITH_UNIT.fullmatch(title)
    name = _folded(match[1] if match else title)
    name = _SAME.get(name, name)
    kind = KINDS.get(name)
    if kind is None:
        return Heading(title, title, known=False)
    if match is None or not kind or kind in ("angle", "plane"):
        return Heading(name, title)
    unit = find_unit(match[2])
    if unit is None or (unit.kind != kind and {unit.kind, kind} != {"size", "length"}):
        problems.append(f"the heading {title!r} states {match[2]!r}, which is no unit of {kind}")
    return Heading(name, title, unit)
