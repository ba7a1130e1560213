"""Many tests at once: flow of the outlets, flow at 20 psi, class, quality, requirement met or not.

References
----------
.. [1] NFPA 291: Q = 29.84 c d² √p; Q at 20 psi = Q ((S − 20) / (S − R))^(1/1.85) (from memory; 0.54 is
   printed for 1/1.85).
"""

from __future__ import annotations

import datetime as dt
from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Final

import numpy as np
import pandas as pd

from supplycheck.catalogue.tables import si, table
from supplycheck.catalogue.water import hydrant_classes, outlet_coefficient, outlet_shapes
from supplycheck.errors import NotInCatalogueError
from supplycheck.hydraulics import pitot_discharge
from supplycheck.screening.cells import Cells, Problems
from supplycheck.screening.columns import MOST_OUTLETS, outlet_names
from supplycheck.screening.marks import BIT
from supplycheck.screening.records import RATING_PRESSURE, Question
from supplycheck.supply.curve import EXPONENT
from supplycheck.supply.quality import HIGHEST_PITOT, LARGE_OUTLET, LOWEST_PITOT
from supplycheck.units import INCH, PSI

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Floats = NDArray[np.float64]
    Mask = NDArray[np.bool_]

NO_DAY: Final = -10_000_000
EPOCH: Final = dt.date(1970, 1, 1).toordinal()
FLOW_SLACK: Final = 0.02
"""How far a given flow may be off the outlets' readings [-]: rounding to 10 gpm at 500 gpm."""
HIGHEST_STATIC: Final = 300.0 * PSI
NOT_ASKED, NOT_MET, MET = 0, 1, 2
MET_WORDS: Final = ("not asked", "no", "yes")


@dataclass(frozen=True, slots=True)
class Reduced:
    """The tests of one block, one element a row; SI. ``met`` counts into :data:`MET_WORDS`."""

    hydrant: list[str]
    date: list[str]
    days: NDArray[np.int64]
    static: Floats
    residual: Floats
    flow: Floats
    drop: Floats
    rated: Floats
    required: Floats
    available: Floats
    grade: NDArray[np.int64]
    met: NDArray[np.int64]
    marks: NDArray[np.int64]
    x: Floats
    y: Floats


def reduce_cells(cells: Cells, question: Question, cut_short: bool) -> Reduced:
    """Return every test of the block; rows that cannot be used are noted in ``cells.problems``.

    Numbers of such rows are meaningless and left out by the caller.
    """
    problems = cells.problems
    marks = np.zeros(cells.count, dtype=np.int64)
    hydrant = cells.text("hydrant")
    problems.where(
        np.fromiter((not tag for tag in hydrant), bool, cells.count), "hydrant: the tag is empty"
    )
    date, days = _days(cells)
    static = _pressure(cells, "static", "positive")
    residual = _pressure(cells, "residual", "zero or more")
    _check_drop(static, residual, problems, question)
    flow = _flow(cells, static, marks)
    with np.errstate(all="ignore"):
        drop = (static - residual) / static
        rated = flow_at(static, residual, flow, RATING_PRESSURE)
        if question.at_pressure == RATING_PRESSURE:
            available = rated
        else:
            available = flow_at(static, residual, flow, question.at_pressure)
        required = cells.number("required_flow", sign="positive")
        if question.required_flow is not None:
            required = np.where(np.isnan(required), question.required_flow, required)
        enough = available >= required * (1 - 1e-9)
        met = np.where(np.isnan(required), NOT_ASKED, np.where(enough, MET, NOT_MET))
        _mark(marks, drop < 0.10 * (1 - 1e-9), "drop under 10 %")
        _mark(marks, (drop >= 0.10 * (1 - 1e-9)) & (drop < 0.25 * (1 - 1e-9)), "drop under 25 %")
        _mark(marks, required > flow * (1 + 1e-9), "required beyond tested")
        _mark(marks, residual < RATING_PRESSURE * (1 - 1e-9), "residual below 20 psi")
        _mark(marks, static < RATING_PRESSURE * (1 - 1e-9), "static below 20 psi")
        _mark(marks, static > HIGHEST_STATIC * (1 + 1e-9), "unlikely reading")
    _mark_days(marks, days, question)
    if cut_short and cells.count:
        marks[-1] |= BIT["no line end"]
    x, y = _place(cells)
    return Reduced(
        hydrant=hydrant,
        date=date,
        days=days,
        static=static,
        residual=residual,
        flow=flow,
        drop=drop,
        rated=rated,
        required=required,
        available=available,
        grade=_grades(rated),
        met=met,
        marks=marks,
        x=x,
        y=y,
    )


def flow_at(static: Floats, residual: Floats, flow: Floats, pressure: float) -> Floats:
    """Return the flow [m³/s] at ``pressure`` [Pa] on each test's curve; 0 where static is not above it.

    ``static``, ``residual`` [Pa] and ``flow`` [m³/s] have one element a test.
    """
    ratio = np.maximum(static - pressure, 0.0) / (static - residual)
    return np.asarray(flow * ratio ** (1 / EXPONENT))


def _mark(marks: NDArray[np.int64], mask: Mask, words: str) -> None:
    marks[mask] |= BIT[words]


def _pressure(cells: Cells, name: str, sign: str) -> Floats:
    """Return a pressure that every row must have."""
    values = cells.number(name, sign=sign)
    for at in np.flatnonzero(np.isnan(values)):
        if not cells.problems.told(at, name):
            cells.problems.add(at, f"{name}: the cell is empty")
    return values


def _check_drop(static: Floats, residual: Floats, problems: Problems, question: Question) -> None:
    units = question.unit_set
    for at in np.flatnonzero(residual >= static):
        low, high = units.text(residual[at], "pressure"), units.text(static[at], "pressure")
        problems.add(
            at,
            f"residual {low} is not below static {high}; check that they are not swapped and water flowed",
        )


def _flow(cells: Cells, static: Floats, marks: NDArray[np.int64]) -> Floats:
    """Return the flow of each test: of its outlets, or as given where no outlet was read."""
    given = cells.number("flow", sign="positive")
    total = np.zeros(cells.count)
    read = np.zeros(cells.count, dtype=bool)
    for number in range(1, MOST_OUTLETS + 1):
        if any(cells.layout.has(name) for name in outlet_names(number)[:3]):
            flow, flows = _outlet(cells, number, static, marks)
            total += flow
            read |= flows
    for at in np.flatnonzero(~read & np.isnan(given)):
        if int(at) not in cells.problems.reasons:
            cells.problems.add(at, "neither a flow nor an outlet with its pitot reading is given")
    _mark(marks, ~read, "no pitot reading")
    with np.errstate(invalid="ignore"):
        _mark(marks, read & (np.abs(given - total) > FLOW_SLACK * total), "flow differs from readings")
    return np.where(read, total, given)


def _outlet(cells: Cells, number: int, static: Floats, marks: NDArray[np.int64]) -> tuple[Floats, Mask]:
    """Return the flow of one outlet (0 where a row has none) and which rows have it."""
    problems = cells.problems
    names = outlet_names(number)
    diameter = cells.number(names[0], sign="positive")
    pitot = cells.number(names[2], sign="positive")
    coefficient, shapes = cells.mixed(names[1])
    _shapes(coefficient, shapes, names[1], problems)
    flows = ~np.isnan(diameter) | ~np.isnan(pitot)
    for name, values in zip(names, (diameter, coefficient, pitot), strict=False):
        for at in np.flatnonzero(flows & np.isnan(values)):
            if not problems.told(at, name):
                problems.add(at, f"{name}: the cell is empty; an outlet needs diameter, coefficient, pitot")
    _between(coefficient, names[1], flows, problems)
    factor = _pumper(cells, names[3], pitot, flows & (diameter >= LARGE_OUTLET))
    with np.errstate(invalid="ignore"):
        _mark(marks, pitot < LOWEST_PITOT * (1 - 1e-9), "pitot under 10 psi")
        high = (pitot > HIGHEST_PITOT * (1 + 1e-9)) & (diameter < LARGE_OUTLET)
        _mark(marks, high, "pitot over 30 psi")
        _mark(marks, pitot > static, "pitot above static")
        odd = (diameter < 0.99 * INCH) | (diameter > 8.01 * INCH)
        _mark(marks, odd, "unlikely reading")
    whole = flows & ~np.isnan(diameter + pitot + coefficient + factor)
    flow = np.zeros(cells.count)
    if whole.any():
        value, _ = pitot_discharge(
            pitot=pitot[whole], diameter=diameter[whole], coefficient=(coefficient * factor)[whole]
        )
        flow[whole] = value
    return flow, flows


def _shapes(values: Floats, words: Sequence[tuple[int, str]], name: str, problems: Problems) -> None:
    known: dict[str, float | None] = {}
    for at, word in words:
        if word not in known:
            try:
                known[word] = outlet_coefficient(word).value
            except NotInCatalogueError:
                known[word] = None
        value = known[word]
        if value is None:
            allowed = ", ".join(outlet_shapes())
            problems.add(at, f"{name}: {word[:40]!r} is no outlet shape; allowed: a number or {allowed}")
        else:
            values[at] = value


def _between(values: Floats, name: str, flows: Mask, problems: Problems) -> None:
    with np.errstate(invalid="ignore"):
        bad = flows & ((values <= 0) | (values > 1))
    for at in np.flatnonzero(bad).tolist():
        problems.add(at, f"{name} is {values[at]:g}; allowed: above 0 and at most 1")
        values[at] = np.nan


def _pumper(cells: Cells, name: str, pitot: Floats, large: Mask) -> Floats:
    """Return the factor of each outlet: 1 for small ones that state none; large ones must state it."""
    problems = cells.problems
    factor, words = cells.mixed(name)
    for at, word in words:
        if word.casefold() == "table":
            factor[at] = _pumper_table(float(pitot[at]), int(at), name, problems)
        else:
            problems.add(at, f"{name}: {word[:40]!r}; allowed: a number, 1 for none, or table")
    told = {at for at, _ in words}
    for at in np.flatnonzero(large & np.isnan(factor)).tolist():
        if at not in told:
            problems.add(
                at,
                f"{name}: the cell is empty for an outlet of 4 in or more, which would be credited with "
                "about a fifth too much flow; write the factor, 1 for none, or table",
            )
    _between(factor, name, ~np.isnan(factor), problems)
    return np.where(np.isnan(factor) & ~large, 1.0, factor)


def _pumper_table(pitot: float, at: int, name: str, problems: Problems) -> float:
    """Return the published factor at ``pitot`` [Pa], straight between the readings of the table."""
    rows = table("pumper_factors")
    readings = [si(row, "pitot_psi", "psi") for row in rows]
    if not pitot >= readings[0] * (1 - 1e-9):
        problems.add(at, f"{name}: the table starts at a pitot reading of {readings[0] / PSI:g} psi")
        return float("nan")
    return float(np.interp(pitot, readings, [float(row["factor"]) for row in rows]))


def _days(cells: Cells) -> tuple[list[str], NDArray[np.int64]]:
    """Return the dates as written and as days since 1970; :data:`NO_DAY` where none is given."""
    if not cells.layout.has("date"):
        return [""] * cells.count, np.full(cells.count, NO_DAY, dtype=np.int64)
    texts = cells.text("date")
    known = {text: _day(text) for text in set(texts)}
    if None in known.values():
        for at, text in enumerate(texts):
            if known[text] is None:
                cells.problems.add(at, f"date: {text[:40]!r} is not a day; allowed: YYYY-MM-DD")
    days = (known[text] for text in texts)
    return texts, np.fromiter((NO_DAY if day is None else day for day in days), np.int64, cells.count)


def _day(text: str) -> int | None:
    """Return the days since 1970 of a date as YYYY-MM-DD, :data:`NO_DAY` for none, ``None`` for no date."""
    if not text:
        return NO_DAY
    try:
        return dt.date.fromisoformat(text).toordinal() - EPOCH if len(text) == 10 else None
    except ValueError:
        return None


def _mark_days(marks: NDArray[np.int64], days: NDArray[np.int64], question: Question) -> None:
    _mark(marks, days == NO_DAY, "no date")
    today = question.as_of.toordinal() - EPOCH
    _mark(marks, days > today, "test in the future")
    if question.stale_before is not None:
        limit = question.stale_before.toordinal() - EPOCH
        _mark(marks, (days != NO_DAY) & (days < limit), "stale test")


def _grades(rated: Floats) -> NDArray[np.int64]:
    """Return the place of each test's class in :func:`hydrant_classes`, best first."""
    floors = [one.flow_from for one in hydrant_classes()]
    grade = np.full(len(rated), len(floors) - 1, dtype=np.int64)
    for place in reversed(range(len(floors) - 1)):
        grade[rated >= floors[place] * (1 - 1e-12)] = place
    return grade


def _place(cells: Cells) -> tuple[Floats, Floats]:
    """Return the coordinates, NaN where a row gives none."""
    names = cells.layout.place
    if names is None:
        nowhere = np.full(cells.count, np.nan)
        return nowhere, nowhere
    x, y = cells.number(names[0]), cells.number(names[1])
    half = np.isnan(x) != np.isnan(y)
    for at in np.flatnonzero(half):
        if int(at) not in cells.problems.reasons:
            cells.problems.add(at, f"only one of {names[0]} and {names[1]} is given; give both or none")
    if cells.layout.geographic:
        with np.errstate(invalid="ignore"):
            cells.problems.where(np.abs(x) > 180, "longitude: allowed: −180 to 180 degrees")
            cells.problems.where(np.abs(y) > 90, "latitude: allowed: −90 to 90 degrees; swapped?")
    return x, y


def pair_keys(hydrant: list[str], days: NDArray[np.int64]) -> NDArray[np.uint64]:
    """Return one 64-bit key for each pair of hydrant and day."""
    keys = pd.util.hash_array(np.array(hydrant, dtype=object), categorize=False)
    mixed = (days.astype(np.uint64) + np.uint64(0x9E3779B97F4A7C15)) * np.uint64(0xBF58476D1CE4E5B9)
    return np.asarray(keys ^ (mixed ^ (mixed >> np.uint64(31))), dtype=np.uint64)
