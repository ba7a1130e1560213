"""``supplycheck hydrants``: screen a file of hydrant tests."""

from __future__ import annotations

import json
import sys
import textwrap
import time
from pathlib import Path
from typing import TYPE_CHECKING, Any, Final

import click

if TYPE_CHECKING:
    from supplycheck.screening.records import Question
    from supplycheck.screening.run import Screening

ALL_MET: Final = 0
SOME_NOT: Final = 1
WRONG_USAGE: Final = 2
NO_SCREENING: Final = 3
PATIENCE: Final = 1.0  # seconds before a progress bar appears


@click.command(name="hydrants", context_settings={"help_option_names": ["-h", "--help"]})
@click.argument("tests", type=click.Path(path_type=Path))
@click.option(
    "--units",
    type=click.Choice(["us", "metric"]),
    help="Units of the answer, and of rows that name none. Default: as the file says.",
)
@click.option(
    "--required-flow",
    metavar="FLOW",
    help="Flow that every hydrant must give ('1000 gpm'), unless its row states another.",
)
@click.option(
    "--at-pressure",
    metavar="PRESSURE",
    default="20 psi",
    show_default=True,
    help="Residual pressure at which the required flow is asked.",
)
@click.option(
    "--maximum-age",
    metavar="MONTHS",
    type=click.IntRange(1, 1200),
    help="Age from which a test is called stale.",
)
@click.option(
    "--as-of", metavar="YYYY-MM-DD", help="Day to which the age of the tests counts. Default: today."
)
@click.option(
    "--out",
    type=click.Path(path_type=Path, file_okay=False),
    help="Folder for the answer (default: `screening` beside TESTS).",
)
@click.option("--json", "as_json", is_flag=True, help="Print the summary as JSON.")
@click.option(
    "--jobs",
    metavar="NUMBER",
    type=click.IntRange(1, 64),
    default=1,
    show_default=True,
    help="How many processes share the rows.",
)
@click.option("--no-pdf", is_flag=True, help="Write no report.pdf.")
def command(tests: Path, out: Path | None, as_json: bool, jobs: int, no_pdf: bool, **given: Any) -> None:
    """Screen the hydrant tests in TESTS (CSV, one row a test): flow, class, quality, requirement.

    The first row names the columns: hydrant, static and residual, and either flow or diameter, coefficient
    and pitot (diameter_2 … for further outlets). Others that are understood: date, units, pumper_factor,
    required_flow, longitude and latitude, or x and y. A heading may state its unit: static (psi).

    Writes results.csv, results.xlsx, results.geojson (with coordinates), report.pdf, and rejects.csv with
    the rows that cannot be used and why.

    \b
    supplycheck hydrants tests.csv --units us --required-flow "1000 gpm" --maximum-age 60

    \b
    Exit codes: 0  every hydrant gives its required flow, or none is required
                1  some do not, or could not be judged
                2  wrong usage
                3  the file cannot be screened
    """
    from supplycheck.screening.records import ScreeningError

    question = _question(given)
    folder = out or tests.parent / "screening"
    try:
        with _Bar() as bar:
            answer, files = _screen(tests, folder, question, jobs, bar, pdf=not no_pdf)
    except ScreeningError as error:
        _refused(error.problems, as_json)
        sys.exit(NO_SCREENING)
    except OSError as error:
        _refused((f"{folder}: the answer cannot be written ({error.strerror or error}).",), as_json)
        sys.exit(NO_SCREENING)
    from supplycheck.screening.summary import plain_summary, summary_text

    if as_json:
        click.echo(json.dumps(plain_summary(answer, files), indent=2, ensure_ascii=False))
    else:
        click.echo(summary_text(answer, files))
    sys.exit(_code(answer))


def _screen(
    tests: Path, folder: Path, question: Question, jobs: int, bar: Any, *, pdf: bool
) -> tuple[Screening, tuple[str, ...]]:
    from supplycheck.screening.run import REPORT, screen

    answer = screen(tests, folder, question, jobs=jobs, progress=bar)
    if not pdf:
        return answer, answer.files
    from supplycheck.report.package import write_files
    from supplycheck.report.pdf import pdf_bytes
    from supplycheck.screening.document import screening_document

    write_files(folder, {REPORT: pdf_bytes(screening_document(answer))})
    return answer, (*answer.files, REPORT)


def _code(answer: Screening) -> int:
    """Return the exit code: no hydrant passes that was not judged."""
    from supplycheck.screening.reduce import MET, NOT_MET

    statistics = answer.statistics
    if statistics.done == 0:
        return NO_SCREENING
    asked = statistics.by_met[MET] + statistics.by_met[NOT_MET] > 0
    return SOME_NOT if statistics.by_met[NOT_MET] or (asked and statistics.rejected) else ALL_MET


def _question(given: dict[str, Any]) -> Question:
    import datetime as dt

    from supplycheck.commands.readings import read_day, read_si
    from supplycheck.screening.records import Question
    from supplycheck.units import UNIT_SETS

    units = given["units"] or ""

    def value(option: str, kind: str) -> float:
        text = given[option.replace("-", "_")]
        if not units and text.strip().replace(".", "", 1).isdigit():
            example = "1000 gpm" if kind == "flow" else "20 psi"
            raise click.UsageError(f"--{option} {text!r}: has no unit; write '{example}', or give --units.")
        return read_si(option, text, kind, UNIT_SETS[units or "us"])

    required = None if given["required_flow"] is None else value("required-flow", "flow")
    return Question(
        row_units=units,
        units=units,
        as_of=read_day("as-of", given["as_of"]) if given["as_of"] else dt.date.today(),
        required_flow=required,
        at_pressure=value("at-pressure", "pressure"),
        maximum_age=given["maximum_age"],
    )


def _refused(problems: tuple[str, ...], as_json: bool) -> None:
    if as_json:
        click.echo(
            json.dumps({"error": "no screening", "problems": problems}, indent=2, ensure_ascii=False)
        )
        return
    click.echo("The tests cannot be screened; nothing was written.", err=True)
    for problem in problems:
        click.echo(textwrap.fill(problem, 100, initial_indent="  ", subsequent_indent="    "), err=True)


class _Bar:
    """A progress bar that appears only when the screening takes longer than :data:`PATIENCE`."""

    def __init__(self) -> None:
        self._begun = time.monotonic()
        self._shown = False

    def __enter__(self) -> _Bar:
        return self

    def __exit__(self, *_: object) -> None:
        if self._shown:
            click.echo(err=True)

    def __call__(self, done: int, total: int) -> None:
        """Show that ``done`` of ``total`` bytes are read."""
        spent = time.monotonic() - self._begun
        if not sys.stderr.isatty() or spent < PATIENCE:
            return
        self._shown = True
        share = min(done / max(total, 1), 1.0)
        filled = int(30 * share)
        left = spent / share - spent if share > 0 else 0.0
        bar = "#" * filled + "." * (30 - filled)
        text = f"\rhydrant tests [{bar}] {100 * share:3.0f} %, about {left:.0f} s left   "
        click.echo(text, err=True, nl=False)
