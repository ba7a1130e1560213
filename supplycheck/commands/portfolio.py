"""``supplycheck check`` on many projects: each in a process of its own, one line each, one table of all."""

from __future__ import annotations

import json
import os
import subprocess
import sys
from collections import Counter
from collections.abc import Iterator, Sequence
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any, Final

import click

TABLE: Final = "portfolio.csv"
PROJECT: Final = "project.toml"
CRASHED: Final = 4
WRONG_USAGE: Final = 2
_WORDS: Final = {2: "wrong usage", 3: "project faults", 4: "no result"}
_OURS: Final = b"project,title,verdict,exit_code,"
_COUNTED: Final = {
    "adequate": "adequate",
    "not adequate": "not adequate",
    "undetermined": "undetermined",
    "project faults": "with project faults",
    "no result": "without a result",
    "wrong usage": "not checked (wrong usage)",
}
"""Outcomes in the order in which the last line counts them, and the words that follow each number."""


@dataclass(frozen=True, slots=True)
class Job:
    """A project file, its name in the portfolio and the folder of its package."""

    name: str
    path: Path
    folder: Path


@dataclass(frozen=True, slots=True)
class Outcome:
    """What became of a project: its exit code, the verdict or the problem, and its figures.

    ``fails`` counts findings outside a limit, which do not change the verdict; ``written`` tells a package.
    """

    job: Job
    code: int
    verdict: str
    problem: str = ""
    title: str = ""
    units: dict[str, str] = field(default_factory=dict)
    demand_flow: float | None = None
    demand: float | None = None
    available: float | None = None
    margin: float | None = None
    required: float | None = None
    fails: int | None = None
    written: bool = False


def is_portfolio(projects: Sequence[Path]) -> bool:
    """Return whether ``projects`` are several, or one folder that holds project folders but no project."""
    if len(projects) != 1:
        return True
    only = projects[0]
    return only.is_dir() and not (only / PROJECT).exists() and bool(_inside(only))


def _inside(folder: Path) -> list[Path]:
    """Return the project files below ``folder``, hidden folders left out, in the order of their paths."""
    found = folder.rglob(PROJECT)
    return sorted(
        path
        for path in found
        if not any(part.startswith(".") for part in path.relative_to(folder).parts) and path.is_file()
    )


def jobs_of(projects: Sequence[Path], out: Path | None) -> list[Job]:
    """Return what is to be checked, each project once, no two in one package folder."""
    named: list[tuple[str, Path]] = []
    for project in projects:
        if project.is_dir() and not (project / PROJECT).exists():
            inside = _inside(project)
            named += [(str(path.parent.relative_to(project)), path) for path in inside]
            if not inside:
                named.append((project.name, project / PROJECT))
        elif project.is_dir():
            named.append((project.resolve().name, project / PROJECT))
        elif project.name == PROJECT:
            named.append((project.resolve().parent.name, project))
        else:
            named.append((project.stem, project))
    once = {path.resolve(): (name, path) for name, path in reversed(named)}
    unique = [once[key] for key in reversed(once)]
    shared = Counter(path.resolve().parent for _, path in unique)
    jobs: list[Job] = []
    taken: set[Path] = set()
    for name, path in unique:
        alone = shared[path.resolve().parent] == 1
        folder = out / name if out else path.parent / ("review" if alone else f"review-{path.stem}")
        wanted, number = folder, 2
        while folder in taken:
            folder, number = wanted.with_name(f"{wanted.name}-{number}"), number + 1
        taken.add(folder)
        jobs.append(Job(name, path, folder))
    return jobs


def run_portfolio(
    projects: Sequence[Path], out: Path | None, *, jobs: int, as_json: bool, options: Sequence[str] = ()
) -> int:
    """Check every project, print one line each, write the table and return the worst exit code.

    ``options`` are handed to the check of each project. Raises :class:`click.UsageError`, before any work,
    where the table would overwrite a file that is not its own.
    """
    work = jobs_of(projects, out)
    home = out or (projects[0] if len(projects) == 1 else Path())
    files = "--no-files" not in options
    if files:
        _guard(home / TABLE, work)
    wide = min(max((len(job.name) for job in work), default=0), 40)
    outcomes: list[Outcome] = []
    if not as_json:
        head = (
            f"{'project':<{wide}}  {'verdict':<16}{'demand':>24}{'available':>14}{'margin':>12}{'fails':>7}"
        )
        click.echo(head)
    for outcome in _outcomes(work, jobs, options):
        outcomes.append(outcome)
        if not as_json:
            click.echo(_line(outcome, wide))
    worst = max((outcome.code for outcome in outcomes), default=WRONG_USAGE)
    if files:
        try:
            _write(home, outcomes)
        except OSError as error:
            click.echo(f"{TABLE} could not be written to {home}: {error.strerror}", err=True)
            files, worst = False, max(worst, WRONG_USAGE)
    if as_json:
        record = {"schema": 1, "worst": worst, "projects": [_plain(one) for one in outcomes]}
        click.echo(json.dumps(record, indent=2, ensure_ascii=False))
    else:
        click.echo("\n".join(["", *_closing(outcomes, home / TABLE if files else None)]))
    return worst


def _guard(table: Path, work: Sequence[Job]) -> None:
    """Raise :class:`click.UsageError` where ``table`` is there and is not a table of an earlier check."""
    from supplycheck.project.files import files_named

    choose = "choose another folder with --out."
    if table.is_dir():
        raise click.UsageError(f"{table} is a folder, where a table is to be written; {choose}")
    if not table.exists():
        return
    for job in work:
        if any(file.exists() and table.samefile(file) for file in files_named(job.path)):
            raise click.UsageError(
                f"{table} is a file of the project {job.name}, which would be overwritten; {choose}"
            )
    try:
        with table.open("rb") as file:
            ours = file.read(len(_OURS)) == _OURS
    except OSError as error:
        raise click.UsageError(f"{table} cannot be read ({error.strerror}); {choose}") from None
    if not ours:
        raise click.UsageError(
            f"{table} was not written by supplycheck and would be overwritten; rename it, or {choose}"
        )


def _outcomes(work: Sequence[Job], jobs: int, options: Sequence[str]) -> Iterator[Outcome]:
    """Yield the outcomes in the order of ``work``, ``jobs`` processes at a time."""
    with ThreadPoolExecutor(jobs) as pool:
        yield from pool.map(lambda job: check_one(job, options), work)


def check_one(job: Job, options: Sequence[str] = ()) -> Outcome:
    """Check one project in a process of its own, which no fault of another can reach."""
    code = "from supplycheck.cli import run; run()"
    arguments = ["check", str(job.path), "--out", str(job.folder), "--json", *options]
    safe = {**os.environ, "PYTHONIOENCODING": "utf-8"}
    done = subprocess.run(
        [sys.executable, "-P", "-c", code, *arguments], capture_output=True, env=safe, check=False
    )
    said = done.stderr.decode("utf-8", "replace").strip()
    try:
        record = json.loads(done.stdout.decode("utf-8"))
    except ValueError:
        record = None
    if not isinstance(record, dict) or "verdict" not in record:
        known = done.returncode in _WORDS
        problem = _problem(record, said) or f"the process ended with code {done.returncode}"
        code_of = done.returncode if known else CRASHED
        return Outcome(job, code_of, _WORDS[code_of], problem)
    return _judged(job, done.returncode, record, written="--no-files" not in options)


def _judged(job: Job, code: int, record: dict[str, Any], *, written: bool) -> Outcome:
    demand, supply, margin = record["demand"], record["supply"], record["margin"]
    return Outcome(
        job,
        code,
        str(record["verdict"]),
        title=str(record["project"]["title"]),
        units={kind: record["units"][kind] for kind in ("flow", "pressure")},
        demand_flow=demand["flow"],
        demand=demand["pressure"],
        available=supply["available_pressure"],
        margin=margin["pressure"],
        required=margin["required"],
        fails=sum(finding["state"] == "fail" for finding in record["findings"]),
        written=written,
    )


def _problem(record: Any, said: str) -> str:
    """Return the problem of a project without a verdict in one sentence."""
    if isinstance(record, dict):
        faults = record.get("faults") or []
        if faults:
            first = faults[0]
            place = ": ".join(part for part in (first.get("file"), first.get("where")) if part)
            more = f" (and {len(faults) - 1} more)" if len(faults) > 1 else ""
            return f"{place + ': ' if place else ''}{first['problem']}{more}"
        if record.get("message"):
            return str(record["message"])
    return " ".join(said.rpartition("Error: ")[2].split())[:400]


def _line(outcome: Outcome, wide: int) -> str:
    """Return the line of one project."""
    from supplycheck.results.display import NONE_LEFT, visible

    name = visible(outcome.job.name)
    name = name if len(name) <= wide else name[: wide - 1] + "…"
    if not outcome.units:
        text = visible(outcome.problem)
        return f"{name:<{wide}}  {outcome.verdict:<16}{text if len(text) <= 90 else text[:89] + '…'}"
    flow, pressure = outcome.units["flow"], outcome.units["pressure"]
    places = 1 if pressure == "psi" else 2

    def number(value: float | None, symbol: str, decimals: int) -> str:
        return "–" if value is None else f"{value:.{decimals}f} {symbol}".replace("-", "−")

    demand = f"{number(outcome.demand_flow, flow, 0)} at {number(outcome.demand, pressure, places)}"
    short = outcome.available is not None and outcome.available < 0
    available = NONE_LEFT if short else number(outcome.available, pressure, places)
    margin = number(outcome.margin, pressure, places)
    return f"{name:<{wide}}  {outcome.verdict:<16}{demand:>24}{available:>14}{margin:>12}{outcome.fails:>7}"


def _closing(outcomes: Sequence[Outcome], table: Path | None) -> list[str]:
    """Return what stands below the lines: what the counts mean, the table, and how many of each."""
    lines = []
    if any(outcome.fails for outcome in outcomes):
        lines.append("Fails: findings outside a limit; the verdict speaks of pressure and flow alone.")
    faulty = next((outcome for outcome in outcomes if not outcome.units), None)
    if faulty is not None:
        lines.append(
            f"For all faults of a project check it alone: supplycheck check {_quoted(faulty.job.path)}"
        )
    if table is not None:
        lines.append(f"Table: {table}")
    counts = Counter(outcome.verdict for outcome in outcomes)
    told = [f"{counts[verdict]} {words}" for verdict, words in _COUNTED.items() if counts[verdict]]
    number = "1 project" if len(outcomes) == 1 else f"{len(outcomes)} projects"
    return [*lines, f"{number}: {', '.join(told)}."]


def _quoted(path: Path) -> str:
    text = str(path)
    return f'"{text}"' if " " in text else text


def _plain(outcome: Outcome) -> dict[str, Any]:
    """Return the outcome as one row of plain values."""
    return {
        "project": outcome.job.name,
        "title": outcome.title,
        "verdict": outcome.verdict,
        "exit_code": outcome.code,
        "demand_flow": outcome.demand_flow,
        "flow_unit": outcome.units.get("flow"),
        "demand_pressure": outcome.demand,
        "available_pressure": outcome.available,
        "margin": outcome.margin,
        "margin_required": outcome.required,
        "findings_failed": outcome.fails,
        "pressure_unit": outcome.units.get("pressure"),
        "problem": outcome.problem,
        "file": str(outcome.job.path),
        "package": str(outcome.job.folder) if outcome.written else "",
    }


def _write(home: Path, outcomes: Sequence[Outcome]) -> None:
    import pandas as pd

    from supplycheck.report.package import write_files
    from supplycheck.results.tables import csv_text

    table = pd.DataFrame.from_records([_plain(outcome) for outcome in outcomes])
    table["findings_failed"] = table["findings_failed"].astype("Int64")
    write_files(home, {TABLE: csv_text(table).encode()})
