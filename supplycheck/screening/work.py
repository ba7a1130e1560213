"""One block of rows from bytes to results: all that a process of its own can do without the others."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from supplycheck.screening.cells import Cells, Problems
from supplycheck.screening.lines import Block, Reject, shown
from supplycheck.screening.records import Layout, Question
from supplycheck.screening.reduce import pair_keys, reduce_cells
from supplycheck.screening.rows import columns, csv_rows, features, sheet_rows, titles, typed_column
from supplycheck.screening.statistics import Kept

if TYPE_CHECKING:
    from numpy.typing import NDArray


@dataclass(frozen=True, slots=True)
class Task:
    """A block with all that is needed to work on it; ``again`` names rows whose test was met before."""

    block: Block
    layout: Layout
    question: Question
    with_sheet: bool
    again: Mapping[int, int]


@dataclass(frozen=True, slots=True)
class Done:
    """What became of a block: texts of the files, rejected rows, numbers for the report."""

    read: int
    blank: int
    end: int
    kept: Kept
    keys: NDArray[np.uint64]
    rejects: list[Reject]
    csv: bytes
    sheet: bytes
    features: bytes


def work(task: Task) -> Done:
    """Return the results of one block."""
    block, layout = task.block, task.layout
    problems = Problems()
    cells = Cells(block.rows, layout, task.question.row_units, problems)
    reduced = reduce_cells(cells, task.question, block.cut_short is not None)
    numbers = np.array(block.numbers, dtype=np.int64)
    if task.again:
        for at, row in enumerate(block.numbers):
            if row in task.again:
                problems.add(at, _again(reduced.hydrant[at], reduced.date[at], task.again[row]))
    good = np.ones(len(numbers), dtype=bool)
    good[list(problems.reasons)] = False
    keep = np.flatnonzero(good)
    rows = numbers[keep]
    found = columns(reduced, keep, rows, task.question, layout)
    others = [place for place, one in enumerate(layout.headings) if not one.known]
    heads = titles(layout, task.question)[len(found) :]
    for place, title in zip(others, heads, strict=True):
        texts = cells.text_at(place)
        found.append(typed_column(title, [texts[at] for at in keep.tolist()]))
    rejects = block.rejects + [
        Reject(block.numbers[at], "; ".join(reasons), shown(block.rows[at]))
        for at, reasons in problems.reasons.items()
    ]
    places = keep.tolist()
    kept = Kept(
        rows,
        [reduced.hydrant[at] for at in places],
        [reduced.date[at] for at in places],
        reduced.flow[keep],
        reduced.rated[keep],
        reduced.required[keep],
        reduced.available[keep],
        reduced.grade[keep],
        reduced.met[keep],
        reduced.marks[keep],
        reduced.x[keep],
        reduced.y[keep],
    )
    return Done(
        read=block.read,
        blank=block.blank,
        end=block.end,
        kept=kept,
        keys=pair_keys(kept.hydrant, reduced.days[keep]),
        rejects=sorted(rejects, key=lambda one: one.row),
        csv=csv_rows(found),
        sheet=sheet_rows(found) if task.with_sheet else b"",
        features=features(found, layout) if layout.place else b"",
    )


def _again(hydrant: str, date: str, first: int) -> str:
    day = f"of {date}" if date else "without a date"
    return (
        f"the same hydrant and day as row {first}: {hydrant!r} {day}; remove one of them, or give a second "
        "test of the day a tag of its own"
    )
