"""From the file of tests to the files of the answer, block by block."""

from __future__ import annotations

import json
import tempfile
from collections import deque
from collections.abc import Callable, Iterator
from concurrent.futures import Executor, Future, ProcessPoolExecutor
from contextlib import ExitStack
from dataclasses import dataclass, field, replace
from multiprocessing import get_context
from pathlib import Path
from typing import BinaryIO, Final

from supplycheck.results.display import visible
from supplycheck.screening.columns import read_layout
from supplycheck.screening.lines import TestFile, block_of
from supplycheck.screening.records import Layout, Question, ScreeningError
from supplycheck.screening.rows import csv_cell, titles
from supplycheck.screening.seen import SeenPairs
from supplycheck.screening.statistics import Statistics
from supplycheck.screening.work import Done, Task, work
from supplycheck.screening.workbook import MOST_ROWS, Workbook
from supplycheck.units import GPM, LPM

RESULTS: Final = "results.csv"
REJECTS: Final = "rejects.csv"
WORKBOOK: Final = "results.xlsx"
MAP: Final = "results.geojson"
REPORT: Final = "report.pdf"
_STEPS: Final = {"us": 250 * GPM, "metric": 1000 * LPM}

Progress = Callable[[int, int], None]


@dataclass(frozen=True, slots=True)
class Screening:
    """The whole answer: ``read`` = ``statistics.done`` + ``statistics.rejected``, files as written."""

    file: str
    digest: str
    question: Question
    layout: Layout
    read: int
    blank: int
    statistics: Statistics
    folder: Path
    files: tuple[str, ...]
    notes: tuple[str, ...]


@dataclass(slots=True)
class _Files:
    """The files that are written as rows come."""

    held: Path
    results: BinaryIO
    rejects: BinaryIO
    map: BinaryIO | None
    workbook: Workbook | None
    features: int = 0
    rows: int = 0
    notes: list[str] = field(default_factory=list)

    def add(self, done: Done) -> None:
        """Write what became of one block."""
        self.results.write(done.csv)
        for one in done.rejects:
            cells = (str(one.row), csv_cell(visible(one.reason)), csv_cell(visible(one.text)))
            self.rejects.write((",".join(cells) + "\n").encode())
        if self.map is not None and done.features:
            self.map.write(done.features if self.features else done.features.removeprefix(b","))
            self.features += len(done.kept.rows)
        self.rows += len(done.kept.rows)
        if self.workbook is not None:
            if self.rows > MOST_ROWS:
                self.leave_out_workbook()
            else:
                self.workbook.add(done.sheet)

    def leave_out_workbook(self) -> None:
        """Drop the workbook: a sheet cannot hold that many rows."""
        if self.workbook is not None:
            self.workbook.close()
            (self.held / WORKBOOK).unlink()
            self.workbook = None
        self.notes.append(
            f"No {WORKBOOK}: a sheet holds {MOST_ROWS:,} rows below its heading, the file has more."
        )


def screen(
    path: Path, folder: Path, question: Question, *, jobs: int = 1, progress: Progress | None = None
) -> Screening:
    """Screen the tests in ``path`` and write the answer's files, but for the report, into ``folder``.

    The files are made beside their places and moved there at the end, whole or not at all.

    Raises :class:`ScreeningError` for a file that cannot be screened, :class:`OSError` for a folder that
    cannot be written.
    """
    source = TestFile(path)
    blocks = source.rows()
    first = next(blocks, None)
    if first is None or not any(row.strip() for row in first[0]):
        raise ScreeningError((f"{path}: the file is empty; allowed: a heading and one row a test.",))
    layout = read_layout(first[0][0], source.delimiter, str(path))
    question = _with_units(question, layout, first[0], str(path))
    if path.resolve().parent == folder.resolve() and path.name in (RESULTS, REJECTS):
        raise ScreeningError(
            (f"{path}: would be overwritten by the results; name another folder with --out.",)
        )
    folder.mkdir(parents=True, exist_ok=True)
    with ExitStack() as stack:
        held = Path(stack.enter_context(tempfile.TemporaryDirectory(dir=folder, prefix=".unfinished-")))
        files = _open(stack, held, layout, question)
        statistics = Statistics(_STEPS[question.units])
        seen = SeenPairs(held)
        read = blank = 0
        tasks = _tasks(first, blocks, layout, question, files)
        for task, done in _results(stack, tasks, jobs):
            again = seen.add(done.keys, done.kept.rows)
            whole = work(replace(task, again=again)) if again else done
            files.add(whole)
            statistics.add(whole.kept)
            for one in whole.rejects:
                statistics.reject(one.row, one.reason)
            read, blank = read + whole.read, blank + whole.blank
            if progress is not None:
                progress(whole.end, source.size)
        if read == 0:
            raise ScreeningError((f"{path}: there is no row below the heading; allowed: one row a test.",))
        names = _close(files)
        for name in names:
            (held / name).replace(folder / name)
        for name in {WORKBOOK, MAP, REPORT}.difference(names):  # of an earlier screening, now untrue
            (folder / name).unlink(missing_ok=True)
    return Screening(
        path.name,
        source.digest,
        question,
        layout,
        read,
        blank,
        statistics,
        folder,
        names,
        tuple(files.notes),
    )


def _with_units(question: Question, layout: Layout, rows: list[bytes], file: str) -> Question:
    """Return the question with the units of the answer: as asked for, or of the first row with any."""
    if question.units:
        return question
    if layout.has("units"):
        import csv

        place = next(at for at, one in enumerate(layout.headings) if one.known and one.name == "units")
        for row in rows[1:]:
            cells = next(csv.reader([row.decode("utf-8", "replace")], delimiter=layout.delimiter), [])
            word = cells[place].strip().casefold() if place < len(cells) else ""
            if word in _STEPS:
                return replace(question, units=word)
        return replace(question, units="us")
    bare = [one.name for one in layout.headings if one.known and one.unit is None]
    if any(name in bare for name in ("static", "residual", "flow", "pitot", "diameter", "required_flow")):
        raise ScreeningError(
            (
                f"{file}: nothing tells the units of its numbers; give --units us or metric, a column "
                "'units', or units in the headings such as 'static [psi]'.",
            )
        )
    unit = layout.unit("static")
    metric = unit is not None and unit.symbol != "psi"
    return replace(question, units="metric" if metric else "us")


def _open(stack: ExitStack, held: Path, layout: Layout, question: Question) -> _Files:
    results = stack.enter_context((held / RESULTS).open("wb"))
    rejects = stack.enter_context((held / REJECTS).open("wb"))
    heads = titles(layout, question)
    results.write((",".join(map(csv_cell, heads)) + "\n").encode())
    rejects.write(b"row,reason,text\n")
    notes: list[str] = []
    place = None
    if layout.place is None:
        notes.append(f"No {MAP}: the file has no columns longitude and latitude, or x and y.")
    else:
        place = stack.enter_context((held / MAP).open("wb"))
        units = question.unit_set
        head = {"flow": units.symbol("flow"), "pressure": units.symbol("pressure")}
        about = "WGS 84" if layout.geographic else "x and y as given, on a plane; not WGS 84"
        start = (
            f'{{"type":"FeatureCollection","units":{json.dumps(head)},"coordinates":{json.dumps(about)},'
        )
        place.write(f'{start}"features":['.encode())
    workbook = Workbook(held / WORKBOOK, heads)
    stack.callback(workbook.abandon)
    return _Files(held, results, rejects, place, workbook, notes=notes)


def _close(files: _Files) -> tuple[str, ...]:
    """Finish the files and return their names."""
    files.results.close()
    files.rejects.close()
    names = [RESULTS, REJECTS]
    if files.map is not None:
        files.map.write(b"\n]}\n")
        files.map.close()
        names.append(MAP)
    if files.workbook is not None:
        files.workbook.close()
        names.append(WORKBOOK)
    return tuple(names)


def _tasks(
    first: tuple[list[bytes], bool, int],
    rest: Iterator[tuple[list[bytes], bool, int]],
    layout: Layout,
    question: Question,
    files: _Files,
) -> Iterator[Task]:
    """Yield the blocks below the heading with the numbers of their rows."""
    rows, cut, end = first
    start, count = 2, len(layout.headings)
    rows = rows[1:]
    while True:
        block = block_of(rows, start, count, layout.delimiter, end, cut)
        start += len(rows)
        yield Task(block, layout, question, files.workbook is not None, {})
        following = next(rest, None)
        if following is None:
            return
        rows, cut, end = following


def _results(stack: ExitStack, tasks: Iterator[Task], jobs: int) -> Iterator[tuple[Task, Done]]:
    """Yield every task with its result, in the order of the file."""
    if jobs <= 1:
        for task in tasks:
            yield task, work(task)
        return
    pool: Executor = stack.enter_context(ProcessPoolExecutor(jobs, mp_context=get_context("spawn")))
    waiting: deque[tuple[Task, Future[Done]]] = deque()
    for task in tasks:
        waiting.append((task, pool.submit(work, task)))
        if len(waiting) > jobs:
            done, future = waiting.popleft()
            yield done, future.result()
    while waiting:
        done, future = waiting.popleft()
        yield done, future.result()
