"""The neutral document: what the report says, before any writer decides how it looks.

Every number is already text with its unit. A writer lays this out and cannot compute anything.
Texts are plain: a writer escapes them, they never hold markup.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from supplycheck.report.drawing import Drawing

Tone = Literal["body", "lead", "small", "caution"]


@dataclass(frozen=True, slots=True)
class Heading:
    """A heading inside a section."""

    text: str


@dataclass(frozen=True, slots=True)
class Paragraph:
    """Running text; ``indent`` in steps, ``bullet`` is printed before it."""

    text: str
    tone: Tone = "body"
    bullet: str = ""


@dataclass(frozen=True, slots=True)
class Facts:
    """Pairs of label and value, printed in ``columns`` columns."""

    pairs: tuple[tuple[str, str], ...]
    columns: int = 1


@dataclass(frozen=True, slots=True)
class Column:
    """A column: title, unit row, ``right`` for numbers, ``wrap`` where the text may be broken.

    ``share`` is its part of the width; tables whose columns all have one line up under each other.
    """

    title: str
    unit: str = ""
    right: bool = False
    wrap: bool = False
    share: float = 0.0


@dataclass(frozen=True, slots=True)
class Row:
    """A row of cells; ``note`` runs under it across the whole table; ``strong`` sets it in bold."""

    cells: tuple[str, ...]
    note: str = ""
    strong: bool = False


@dataclass(frozen=True, slots=True)
class Table:
    """A table whose header repeats on each page; without rows it is a line, ``empty`` behind its title."""

    title: str
    columns: tuple[Column, ...]
    rows: tuple[Row, ...]
    note: str = ""
    empty: str = "none"
    size: float = 7.0


def without_rows(table: Table) -> str:
    """Return the one line that stands for a table without rows.

    >>> without_rows(Table("Adjustments", (), (), empty="none in the project"))
    'Adjustments: none in the project.'
    """
    return (
        f"{table.title}: {table.empty}." if table.title else f"{table.empty[:1].upper()}{table.empty[1:]}."
    )


@dataclass(frozen=True, slots=True)
class Figure:
    """A drawing with its title and a caption; ``if_room`` leaves it out where the page is full.

    ``smaller`` is drawn instead where only that has room.
    """

    title: str
    drawing: Drawing
    caption: str = ""
    if_room: bool = False
    smaller: Drawing | None = None


@dataclass(frozen=True, slots=True)
class Tile:
    """One large number of the first page."""

    label: str
    value: str
    detail: str = ""


@dataclass(frozen=True, slots=True)
class Verdict:
    """The answer in one look: the title (``word`` gives its colour), the sentence, the large numbers."""

    word: Literal["adequate", "not adequate", "undetermined"]
    title: str
    sentence: str
    tiles: tuple[Tile, ...]


@dataclass(frozen=True, slots=True)
class BlankLines:
    """Lines to be filled in by hand."""

    title: str
    labels: tuple[str, ...]
    remarks: int = 0


@dataclass(frozen=True, slots=True)
class Listing:
    """Lines of a file, printed as typed."""

    title: str
    lines: tuple[str, ...]
    note: str = ""


Block = Heading | Paragraph | Facts | Table | Figure | Verdict | BlankLines | Listing


@dataclass(frozen=True, slots=True)
class Section:
    """A section; ``landscape`` turns its pages, ``fresh`` starts on a new page, if not nearly empty."""

    title: str
    blocks: tuple[Block, ...]
    landscape: bool = False
    fresh: bool = False


@dataclass(frozen=True, slots=True)
class Document:
    """The whole report; ``title`` and ``date`` stand in the header, ``standing`` in the footer."""

    title: str
    subtitle: str
    date: str
    paper: Literal["letter", "a4"]
    standing: str
    producer: str
    sections: tuple[Section, ...]
