"""From a screening to the neutral document; every number comes from its statistics."""

from __future__ import annotations

from collections.abc import Sequence
from types import MappingProxyType
from typing import Final, Literal

from supplycheck import __version__
from supplycheck.catalogue.water import hydrant_classes
from supplycheck.report.document import (
    Block,
    Column,
    Document,
    Facts,
    Figure,
    Paragraph,
    Row,
    Section,
    Table,
    Tile,
    Verdict,
)
from supplycheck.screening.figures import histogram, hydrant_map
from supplycheck.screening.marks import MARKS, marks_text
from supplycheck.screening.reduce import MET, NOT_ASKED, NOT_MET
from supplycheck.screening.run import MAP, REJECTS, RESULTS, Screening
from supplycheck.screening.statistics import MOST_LISTED, MOST_POINTS, Spot
from supplycheck.screening.summary import class_limits, verdict

WIDTHS: Final = {"letter": 522.0, "a4": 505.0}
STANDING: Final = "preliminary engineering aid – not an approval"
CAUTIONS: Final = (
    "A screening sorts tests; it does not approve a hydrant, a main or a building. The authority having "
    "jurisdiction and the utility decide what flow is asked, where and for how long.",
    "Each test tells the supply of one hour of one day. Mains, valves, pumps and other users change; a "
    "test of one hydrant says little about several flowing together.",
    "Flows beyond the tested flow are extrapolated along the curve of the test. No limit of a pump, a "
    "tank or a meter behind the hydrant is known here.",
    "A rejected row is a hydrant about which nothing is known, and a check that was not run is not a pass.",
    "Flow hydrants only with the utility's permission; keep the main above 20 psi (1.4 bar), open fully, "
    "close slowly, mind traffic and where the water goes.",
)

_TITLES: Final = MappingProxyType(
    {
        "adequate": "Required flow met",
        "not adequate": "Required flow not met everywhere",
        "undetermined": "Screened, nothing judged",
    }
)


def screening_document(answer: Screening) -> Document:
    """Return the report on ``answer``, on Letter in US units and on A4 in metric ones."""
    paper: Literal["letter", "a4"] = "a4" if answer.question.units == "metric" else "letter"
    width = WIDTHS[paper]
    return Document(
        title="Screening of hydrant tests",
        subtitle=f"{answer.file} · {answer.read:,} rows · as of {answer.question.as_of.isoformat()}",
        date=answer.question.as_of.isoformat(),
        paper=paper,
        standing=STANDING,
        producer=f"supplycheck {__version__}",
        sections=(
            _front(answer, width),
            Section("Quality of the tests", (_marks(answer),)),
            _map(answer, width),
            _lists(answer),
            _basis(answer),
        ),
    )


def _front(answer: Screening, width: float) -> Section:
    statistics, units = answer.statistics, answer.question.unit_set
    short, met = statistics.by_met[NOT_MET], statistics.by_met[MET]
    word: Literal["adequate", "not adequate", "undetermined"] = "undetermined"
    if short:
        word = "not adequate"
    elif met and not statistics.rejected and not statistics.by_met[NOT_ASKED]:
        word = "adequate"
    tested = sum(1 for place in range(len(MARKS)) if statistics.by_mark[place])
    mean = statistics.total_rated / statistics.done if statistics.done else None
    least = statistics.least if statistics.done else None
    most = statistics.most if statistics.done else None
    tiles = (
        Tile(
            "Rows read", f"{answer.read:,}", f"{statistics.done:,} done + {statistics.rejected:,} rejected"
        ),
        Tile("Required flow met", f"{met:,}", f"of {met + short:,} that were judged"),
        Tile("Short of it", f"{short:,}", "listed below, the furthest first"),
        Tile(
            "Mean flow at 20 psi",
            units.text(mean, "flow", 0),
            f"from {units.number(least, 'flow', 0)} to {units.text(most, 'flow', 0)}",
        ),
        Tile("Quality findings", f"{tested}", f"kinds of {len(MARKS)}; counts below"),
    )
    blocks: list[Block] = [Verdict(word, _TITLES[word], verdict(answer), tiles)]
    if statistics.done:
        text = (
            "Bars coloured by the class of their lower end; the last holds all above. Dashed: class limits."
        )
        blocks.append(Figure("Flow at 20 psi", histogram(answer, width), text))
    blocks.append(_classes(answer))
    return Section("Answer", tuple(blocks))


def _share(count: int, whole: int) -> str:
    return f"{100 * count / whole:.1f}" if whole else "–"


def _classes(answer: Screening) -> Table:
    statistics = answer.statistics
    rows = tuple(
        Row(
            (
                row.name,
                row.colour,
                class_limits(place, answer),
                f"{statistics.by_class[place]:,}",
                _share(statistics.by_class[place], statistics.done),
            )
        )
        for place, row in enumerate(hydrant_classes())
    )
    columns = (
        Column("Class", share=0.12),
        Column("Colour", share=0.18),
        Column("Flow at 20 psi", share=0.4),
        Column("Hydrants", right=True, share=0.15),
        Column("Share", "%", right=True, share=0.15),
    )
    return Table("Classes after NFPA 291", columns, rows, note=f"Source: {hydrant_classes()[0].source}.")


def _marks(answer: Screening) -> Table:
    statistics = answer.statistics
    rows = tuple(
        Row(
            (
                mark.words,
                mark.meaning,
                mark.source,
                "not checked" if _unchecked(mark.words, answer) else f"{statistics.by_mark[place]:,}",
            )
        )
        for place, mark in enumerate(MARKS)
    )
    columns = (
        Column("Finding", wrap=True, share=0.22),
        Column("Meaning", wrap=True, share=0.43),
        Column("Source", wrap=True, share=0.23),
        Column("Tests", right=True, share=0.12),
    )
    note = (
        "A test may have several findings or none. None of them rejects a test; no finding is no approval."
    )
    return Table("", columns, rows, note=note)


def _unchecked(words: str, answer: Screening) -> bool:
    return words == "stale test" and answer.question.maximum_age is None


def _map(answer: Screening, width: float) -> Section:
    points = answer.statistics.points
    drawing = hydrant_map(answer, width, 440.0)
    if drawing is None:
        why = (
            "the file has no coordinates"
            if answer.layout.place is None
            else "no accepted row has coordinates"
        )
        return Section("Map", (Paragraph(f"There is no map: {why}."),))
    shown = len(points.points)
    caption = f"All {points.placed:,} tests with coordinates fall on {shown:,} points. "
    if shown == points.placed:
        caption = f"All {shown:,} tests with coordinates are shown. "
    else:
        unit = "degrees" if answer.layout.geographic else "units"
        caption += (
            f"Of several tests in one square of {points.size:.3g} {unit} the one with the least flow at 20 "
            f"psi is shown; the squares are the smallest, doubled from step to step, that leave at most "
            f"{MOST_POINTS:,} points. All are in {MAP}. "
        )
    if answer.statistics.without_place:
        caption += f"{answer.statistics.without_place:,} tests have no coordinates. "
    if answer.layout.geographic:
        caption += "Degrees of longitude are drawn shortened for the middle latitude."
    return Section("Map", (Figure("", drawing, caption.strip()),))


def _lists(answer: Screening) -> Section:
    statistics = answer.statistics
    blocks: list[Block] = []
    if statistics.by_met[NOT_MET]:
        note = _cut(statistics.by_met[NOT_MET], RESULTS)
        title = "Short of the required flow, the furthest first"
        blocks.append(_spots(answer, title, statistics.short, note))
    title = "Least flow at 20 psi, the poorest first"
    blocks.append(_spots(answer, title, statistics.poorest, _cut(statistics.done, RESULTS)))
    rows = tuple(Row((str(row), reason)) for row, reason in statistics.reasons)
    columns = (Column("Row", right=True, share=0.1), Column("Reason", wrap=True, share=0.9))
    note = _cut(statistics.rejected, REJECTS)
    blocks.append(Table("Rejected rows", columns, rows, note=note, empty="no row was rejected"))
    return Section("Hydrants to look at", tuple(blocks), fresh=True)


def _cut(count: int, file: str) -> str:
    return f"The first {MOST_LISTED} of {count:,}; all are in {file}." if count > MOST_LISTED else ""


def _spots(answer: Screening, title: str, spots: Sequence[Spot], note: str) -> Table:
    units = answer.question.unit_set
    flow = units.symbol("flow")
    rows = tuple(
        Row(
            (
                one.hydrant,
                one.date or "–",
                units.number(one.rated, "flow", 0),
                hydrant_classes()[one.grade].name,
                units.number(one.required, "flow", 0),
                units.number(one.available, "flow", 0) if one.required == one.required else "–",
                marks_text(one.marks) or "–",
                str(one.row),
            )
        )
        for one in spots
    )
    columns = (
        Column("Hydrant", wrap=True, share=0.15),
        Column("Date", share=0.11),
        Column("At 20 psi", flow, right=True, share=0.1),
        Column("Class", share=0.07),
        Column("Required", flow, right=True, share=0.1),
        Column("Available", flow, right=True, share=0.1),
        Column("Findings", wrap=True, share=0.29),
        Column("Row", right=True, share=0.08),
    )
    return Table(title, columns, rows, note=note, empty="none")


def _basis(answer: Screening) -> Section:
    question, units = answer.question, answer.question.unit_set
    required = "as each row states"
    if question.required_flow is not None:
        required = f"{units.text(question.required_flow, 'flow', 0)}, unless a row states another"
    limit = "not checked: no limit was given"
    if question.stale_before is not None:
        limit = f"{question.maximum_age} months: tests before {question.stale_before.isoformat()} are stale"
    if question.row_units:
        rows_in = f"{question.row_units}, unless the row, its heading or the cell states others"
    else:
        rows_in = "as each row, its heading or the cell states"
    place = "longitude and latitude, WGS 84" if answer.layout.geographic else "x and y as given, on a plane"
    others = ", ".join(one.title for one in answer.layout.others) or "none"
    pairs = (
        ("Required flow", required),
        ("Wanted at", units.text(question.at_pressure, "pressure")),
        ("Greatest age of a test", limit),
        ("Units of the rows", rows_in),
        ("Coordinates", place if answer.layout.place else "none"),
        ("Columns carried along", others),
        ("Blank lines skipped", f"{answer.blank:,}"),
        ("File", answer.file),
        ("SHA-256", answer.digest),
        ("Made by", f"supplycheck {__version__}"),
    )
    steps = (
        "Flow of an outlet: 29.84 c d² √p in gpm, in and psi, times the factor of a pumper outlet; outlets "
        "of one row are added (NFPA 291, from memory). A flow given counts where no outlet is read.",
        "Flow at a pressure P: Q ((static − P) / (static − residual)) to the power 1/1.85; nothing where "
        "the static is not above P.",
        "Required flow met: the flow at the pressure wanted is not less than the required one.",
        "A row is rejected where a number is missing, cannot be read or makes no test, and where an "
        "earlier row has the same hydrant and day. Rejected rows stand with their number and reason in "
        f"{REJECTS}.",
    )
    blocks: list[Block] = [Facts(pairs)]
    blocks += [Paragraph(text, bullet=f"{place}.") for place, text in enumerate(steps, start=1)]
    blocks += [Paragraph(text, "caution", bullet="!") for text in CAUTIONS]
    blocks += [Paragraph(note, "small") for note in answer.notes]
    return Section("Basis and cautions", tuple(blocks), fresh=False)
