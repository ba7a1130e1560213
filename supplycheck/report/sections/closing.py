"""Assumptions, cautions, lines for the review, and the echo of the input."""

from __future__ import annotations

from typing import Final

from supplycheck.model import InputFile
from supplycheck.report.document import (
    BlankLines,
    Block,
    Column,
    Listing,
    Paragraph,
    Row,
    Section,
    Table,
)
from supplycheck.report.show import words
from supplycheck.results.records import Result

MOST_LINES: Final = 160
MOST_LETTERS: Final = 400

CAUTIONS: Final = (
    "This is a preliminary engineering aid. It is not a design, an approval, a listing or a "
    "certificate, and it "
    "must not be presented as one.",
    "A licensed or certified person checks the inputs, the layout and the calculation, and takes "
    "responsibility under their own name.",
    "The authority having jurisdiction decides, under the edition that it has adopted and with its "
    "amendments. "
    "Ask it before relying on any figure here; an insurer may ask for more.",
    "The supply is described as it was at the hour of the test. Mains, pumps and other users change: "
    "test again "
    "when the test is old or something has been altered.",
    "Values that were assumed are listed with their origin. Each of them is a question until somebody has "
    "answered it.",
    "Outside this report: special hazards and storage that were not entered, obstructions, freezing, "
    "corrosion, "
    "earthquake bracing, water quality.",
    "A check that was not run is shown as not run. The absence of a failure is not conformity.",
    "Flow testing is done only with the utility's permission and, where it asks, its operator. Keep "
    "people clear "
    "of caps and streams, mind the traffic, and know where the water will go: erosion, ice, chlorine "
    "reaching a "
    "stream.",
    "Open hydrants fully, close them slowly, drain dry barrels. Stop before the main falls below 20 psi "
    "(1.4 bar): below that, contaminated water may be drawn in.",
    "A test can discolour the water downstream; warn hospitals, dialysis rooms and laundries beforehand.",
)


def assumptions(result: Result) -> Section:
    """Return what was assumed or inferred, then where the other values come from."""
    columns = (
        Column("Value", wrap=True, share=0.35),
        Column("Taken as", wrap=True, share=0.5),
        Column("Origin", wrap=True, share=0.15),
    )
    project = result.project
    rows = tuple(Row((one.key, one.value, one.origin), note=one.source) for one in project.assumptions)
    origins = tuple(Row((one.key, one.value, one.origin), note=one.source) for one in project.origins)
    blocks: list[Block] = [
        Table(
            "Assumed, inferred or taken from a catalogue without being given",
            columns,
            rows,
            empty="nothing was assumed",
        )
    ]
    if origins:
        blocks.append(Table("Where the other values come from", columns, origins))
    return Section("Assumptions and origins", tuple(blocks))


def cautions(result: Result) -> Section:
    """Return the cautions and blank lines for those who review the report."""
    authority = result.project.facts.authority.strip()
    named = f" Named in the project as the authority: {authority}." if authority else ""
    blocks: list[Block] = [
        Paragraph(text, bullet=f"{place}.") for place, text in enumerate(CAUTIONS, start=1)
    ]
    blocks += [
        Paragraph(
            "Before anything is built or relied on, take this report to the local authority having "
            f"jurisdiction and to a licensed fire protection designer.{named}",
            "lead",
        ),
        BlankLines(
            "For the licensed designer's review",
            ("Name", "Licence no. and place", "Date", "Remarks"),
            remarks=2,
        ),
        BlankLines("For the authority's review", ("Name and office", "Date", "Remarks"), remarks=2),
    ]
    return Section("Cautions and review", tuple(blocks), fresh=True)


def echo(result: Result) -> Section:
    """Return the input files with their SHA-256, their text, and the versions that made the report."""
    files = result.project.files
    rows = tuple(Row((one.name, str(one.size), one.sha256)) for one in files)
    columns = (words("File"), Column("Bytes", right=True), words("SHA-256"))
    versions = [Row(("supplycheck", result.version))]
    versions += [Row((name, version)) for name, version in sorted(result.library_versions.items())]
    blocks: list[Block] = [
        Table("Input files", columns, rows, empty="no file was read", size=6.6),
        Table("Made with", (words("Program or library"), words("Version")), tuple(versions), size=6.6),
    ]
    blocks += [_listing(one) for one in files if one.text is not None]
    return Section("Input as read", tuple(blocks))


def _listing(file: InputFile) -> Listing:
    lines = (file.text or "").removeprefix("\ufeff").expandtabs(4).splitlines()
    note = ""
    if len(lines) > MOST_LINES or any(len(line) > MOST_LETTERS for line in lines[:MOST_LINES]):
        note = (
            f"Shortened: the first {min(len(lines), MOST_LINES)} of {len(lines)} lines, each up to "
            f"{MOST_LETTERS} letters. The SHA-256 above identifies the whole file."
        )
    shown = tuple(
        line if len(line) <= MOST_LETTERS else line[:MOST_LETTERS] + " …" for line in lines[:MOST_LINES]
    )
    return Listing(file.name, shown, note)
