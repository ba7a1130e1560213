"""``supplycheck check``: the main job, and the files of the review package."""

from __future__ import annotations

import json
import sys
import time
from collections.abc import Sequence
from pathlib import Path
from typing import TYPE_CHECKING, Final

import click

if TYPE_CHECKING:
    from supplycheck.cases.placements import Progress
    from supplycheck.errors import NotConvergedError
    from supplycheck.project import ProjectFaultsError

ADEQUATE: Final = 0
NOT_ADEQUATE: Final = 1
WRONG_USAGE: Final = 2
PROJECT_FAULTS: Final = 3
NOT_CONVERGED: Final = 4
PACKAGE_FILES: Final = ("result.json", "review.pdf", "nodes.csv", "pipes.csv", "tables.xlsx", "review.html")
PAGE: Final = "review.html"
OURS: Final = b'<meta name="generator" content="supplycheck '
PATIENCE: Final = 1.0  # seconds before a progress bar appears


@click.command()
@click.argument("projects", metavar="PROJECT...", nargs=-1, required=True, type=click.Path(path_type=Path))
@click.option(
    "--out",
    type=click.Path(path_type=Path, file_okay=False),
    help="Folder for the review package; of several projects, a folder of its own for each below this one. "
    "Default: `review` beside each project file.",
)
@click.option(
    "--html",
    is_flag=True,
    help="Write review.html as well: the review package as one page for a browser, which fetches nothing.",
)
@click.option(
    "--json",
    "as_json",
    is_flag=True,
    help="Print JSON in place of the answer in words: result.json, or the table.",
)
@click.option("--no-files", is_flag=True, help="Print the answer and write no file.")
@click.option(
    "--jobs",
    metavar="NUMBER",
    type=click.IntRange(1, 64),
    default=1,
    show_default=True,
    help="How many of several projects are checked at the same time.",
)
def command(
    projects: tuple[Path, ...], out: Path | None, html: bool, as_json: bool, no_files: bool, jobs: int
) -> None:
    """Check the system in PROJECT (a project.toml, or its folder) against its water supply.

    Prints the answer on one screen and writes the review package: review.pdf for the reviewer, result.json
    with every number, and nodes.csv, pipes.csv and tables.xlsx for a spreadsheet.

    \b
    supplycheck check my-building
    supplycheck check my-building --out issued/2026-11-20 --html
    supplycheck check projects --jobs 2

    Several PROJECTs, or a folder that holds project folders, are checked each by itself, and none stops
    another: a line for each, a table portfolio.csv, and the highest exit code of them all.

    \b
    Exit codes: 0  the supply is adequate; findings that fail do not change that, and are named
                1  not adequate, or undetermined: no margin rule, or a device beyond its curve
                2  wrong usage, or files that cannot be written
                3  the project has faults: all are listed, and nothing is written
                4  the calculation did not converge: nodes or pipes at fault are named
    """
    from supplycheck.commands.portfolio import is_portfolio, run_portfolio

    if html and no_files:
        raise click.UsageError("--html writes a file and --no-files none; leave out one of them.")
    if is_portfolio(projects):
        options = [name for name, on in (("--no-files", no_files), ("--html", html)) if on]
        sys.exit(run_portfolio(projects, out, jobs=jobs, as_json=as_json, options=options))
    sys.exit(run(projects[0], out, as_json=as_json, no_files=no_files, html=html))


def run(project: Path, out: Path | None, *, as_json: bool, no_files: bool, html: bool = False) -> int:
    """Do the job and return the exit code; ``html`` writes the page for a browser as well."""
    from supplycheck.check import check_project
    from supplycheck.errors import DomainError, NotConvergedError
    from supplycheck.project import ProjectFaultsError
    from supplycheck.report.package import package_files, write_files
    from supplycheck.results.json import result_json
    from supplycheck.results.screen import screen_text

    path = project / "project.toml" if project.is_dir() else project
    folder = out or path.parent / "review"
    page = folder / PAGE
    if html and page.exists() and not _ours(page):
        raise click.UsageError(
            f"--html: {page} was not written by supplycheck and would be overwritten; rename it, or choose "
            "another folder with --out."
        )
    html = html or (not no_files and _ours(page))
    files = [name for name in PACKAGE_FILES if html or name != PAGE]
    spoiled = None if no_files else _own_file(path, folder, files)
    if spoiled is not None:
        option = "--out" if out else "review package"
        raise click.UsageError(
            f"{option}: {spoiled} there is a file of the project, which would be overwritten; choose "
            "another folder with --out."
        )
    try:
        with _Bar() as progress:
            result = check_project(path, progress)
    except ProjectFaultsError as error:
        _faults(error, as_json)
        return PROJECT_FAULTS
    except NotConvergedError as error:
        _not_converged(error, as_json)
        return NOT_CONVERGED
    except DomainError as error:
        _one_fault(str(error), as_json)
        return PROJECT_FAULTS
    if not no_files:
        try:
            write_files(folder, package_files(result, html=html))
        except OSError as error:
            click.echo(f"The review package could not be written to {folder}: {error.strerror}", err=True)
            return WRONG_USAGE
    if as_json:
        click.echo(result_json(result), nl=False)
    else:
        click.echo(screen_text(result, "" if no_files else str(folder)))
    return ADEQUATE if result.verdict == "adequate" else NOT_ADEQUATE


def _ours(page: Path) -> bool:
    """Return whether ``page`` is one of an earlier check, which must not be left behind out of date."""
    try:
        with page.open("rb") as file:
            return OURS in file.read(300)
    except OSError:
        return False


def _own_file(path: Path, folder: Path, names: Sequence[str]) -> str | None:
    """Return the file of the package that would overwrite a file which the project at ``path`` reads."""
    from supplycheck.project.files import files_named

    own = [file for file in files_named(path) if file.exists()]
    for target in (folder / name for name in names):
        if target.exists() and any(target.samefile(file) for file in own):
            return target.name
    return None


class _Bar:
    """A progress bar that appears only when the search takes longer than :data:`PATIENCE`."""

    def __init__(self) -> None:
        self._begun = time.monotonic()
        self._shown = False

    def __enter__(self) -> Progress:
        return self._step

    def __exit__(self, *_: object) -> None:
        if self._shown:
            click.echo(err=True)

    def _step(self, done: int, total: int) -> None:
        if not sys.stderr.isatty() or time.monotonic() - self._begun < PATIENCE:
            return
        self._shown = True
        filled = 30 * done // max(total, 1)
        bar = "#" * filled + "." * (30 - filled)
        click.echo(f"\rplacements of the design area [{bar}] {done}/{total}", err=True, nl=False)


def _faults(error: ProjectFaultsError, as_json: bool) -> None:
    if as_json:
        rows = [
            {
                "file": fault.place.file,
                "where": fault.place.where,
                "problem": fault.problem,
                "found": fault.found,
                "allowed": fault.allowed,
                "remedy": fault.remedy,
            }
            for fault in error.faults
        ]
        click.echo(json.dumps({"error": "project faults", "faults": rows}, indent=2, ensure_ascii=False))
        return
    from supplycheck.project.faults import MOST_SHOWN, grouped

    count = len(error.faults)
    click.echo(f"The project has {count} fault{'s' if count > 1 else ''}; nothing was written.", err=True)
    groups = grouped(error.faults)
    for group in groups[:MOST_SHOWN]:
        fault = group.fault
        click.echo(f"\n{fault.place}", err=True)
        click.echo(f"  {fault.problem}", err=True)
        told = (
            ("found", fault.found),
            ("allowed", fault.allowed),
            ("do", fault.remedy),
            ("also in", group.also),
        )
        for name, text in told:
            if text:
                click.echo(f"  {name + ':':<9}{text}", err=True)
    if len(groups) > MOST_SHOWN:
        more = sum(1 + len(group.rows) for group in groups[MOST_SHOWN:])
        click.echo(f"\n… and {more} more faults; --json prints all of them.", err=True)


def _not_converged(error: NotConvergedError, as_json: bool) -> None:
    if as_json:
        record = {
            "error": "not converged",
            "cause": error.cause,
            "message": str(error),
            "tags": list(error.tags),
            "remedy": error.remedy,
        }
        click.echo(json.dumps(record, indent=2, ensure_ascii=False))
        return
    click.echo(f"The calculation has no result; nothing was written.\n  {error}", err=True)
    if error.tags:
        more = len(error.tags) - 12
        tags = ", ".join(error.tags[:12]) + (f" and {more} more" if more > 0 else "")
        click.echo(f"  {'at:':<9}{tags}", err=True)
    click.echo(f"  {'cause:':<9}{error.cause}\n  {'do:':<9}{error.remedy}", err=True)


def _one_fault(text: str, as_json: bool) -> None:
    if as_json:
        click.echo(json.dumps({"error": "project faults", "faults": [{"problem": text}]}, indent=2))
    else:
        click.echo(f"The project cannot be calculated; nothing was written.\n  {text}", err=True)
