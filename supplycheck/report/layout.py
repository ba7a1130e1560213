"""From the neutral document to pages: places everything, breaks lines and pages, computes nothing."""

from __future__ import annotations

from collections.abc import Sequence
from itertools import takewhile, zip_longest
from typing import Final

from supplycheck.report.document import (
    BlankLines,
    Block,
    Document,
    Facts,
    Figure,
    Heading,
    Listing,
    Paragraph,
    Section,
    Table,
    Verdict,
)
from supplycheck.report.drawing import Box, Drawing, Item, Label, Line
from supplycheck.report.sheet import Sheet, Sheets
from supplycheck.report.sheet_table import opening_height, put_table
from supplycheck.report.theme import CLAY, INK, MIST, PAPER, PETROL, RULE, SLATE, VERDICT_COLOURS
from supplycheck.report.wrapping import Ruler, wrap

_SIZES: Final = {"body": 8.4, "lead": 9.6, "small": 7.0, "caution": 8.4}
_LITTLE: Final = 0.36
"""A section that wants a new page goes on below the last one where that took no more of the page."""


def lay_out(document: Document, ruler: Ruler) -> list[Sheet]:
    """Return the pages of ``document`` as primitives, ready to be painted."""
    sheets = Sheets(document, ruler)
    sheets.turn(False)
    _front(sheets, document)
    for number, section in enumerate(document.sections):
        _section(sheets, section, number)
    return sheets.finish()


def _front(sheets: Sheets, document: Document) -> None:
    size = 17.0 if len(document.title) <= 90 else 11.0
    sheets.text(document.title, size, bold=True, colour=INK)
    if document.subtitle:
        sheets.text(document.subtitle, 8.6, colour=SLATE)
    sheets.y -= 6


def _section(sheets: Sheets, section: Section, number: int) -> None:
    used = (sheets.top - sheets.y) / (sheets.top - sheets.bottom)
    if section.landscape != sheets.landscape or (section.fresh and used > _LITTLE):
        sheets.turn(section.landscape)
    if number > 0:
        sheets.need(max(96.0, 42.0 + _opening_height(sheets, section.blocks, figure=True)))
        if not sheets.is_fresh:
            sheets.y -= 14
        sheets.sheet.entries.append((section.title, sheets.y))
        sheets.text(section.title, 13.0, bold=True, colour=PETROL)
        sheets.put(Line(((sheets.left, sheets.y), (sheets.left + sheets.room, sheets.y)), PETROL, 1.1))
        sheets.y -= 7
    else:
        sheets.sheet.entries.append((section.title, sheets.top))
    for place, block in enumerate(section.blocks):
        if isinstance(block, Heading):
            sheets.need(_opening_height(sheets, section.blocks[place:]))
        if isinstance(block, BlankLines) and not isinstance(section.blocks[place - 1], BlankLines):
            sheets.need(_blanks_height(section.blocks[place:]))
        _block(sheets, block)


_MOST_KEPT: Final = 0.9
"""Share of a page that is kept together at most, from a heading to the first rows below it."""


def _opening_height(sheets: Sheets, blocks: Sequence[Block], *, figure: bool = False) -> float:
    """Return the room that ``blocks`` take down to the first rows, figure or item of a list.

    A heading, and the sentences between it and what it heads, are never parted from it; facts stay with
    the rows that follow them, and where ``figure`` says so with the figure.
    """
    height = 0.0
    for block, after in zip_longest(blocks, blocks[1:]):
        match block:
            case Heading():
                height += 4 + 9.4 * 1.38 + 2
            case Paragraph():
                size = _SIZES[block.tone]
                height += len(wrap(block.text, sheets.room, size, sheets.ruler)) * size * 1.38 + 3
                if block.bullet:
                    break
            case Facts():
                height += min(_facts_height(sheets, block), 200.0)
                if not (isinstance(after, Table) or (figure and isinstance(after, Figure))):
                    break
            case Table():
                height += opening_height(sheets, block)
                break
            case Figure():
                height += (
                    0.0 if block.if_room else _figure_height(sheets, block, block.smaller or block.drawing)
                )
                break
            case _:
                height += 40.0
                break
    return min(height, _MOST_KEPT * (sheets.top - sheets.bottom))


def _block(sheets: Sheets, block: Block) -> None:
    match block:
        case Heading():
            sheets.y -= 4
            sheets.text(block.text, 9.4, bold=True, colour=PETROL)
            sheets.y -= 2
        case Paragraph():
            _paragraph(sheets, block)
        case Facts():
            _facts(sheets, block)
        case Table():
            put_table(sheets, block)
        case Figure():
            _figure(sheets, block)
        case Verdict():
            _verdict(sheets, block)
        case BlankLines():
            _blank_lines(sheets, block)
        case Listing():
            _listing(sheets, block)


def _paragraph(sheets: Sheets, block: Paragraph) -> None:
    size = _SIZES[block.tone]
    indent = 0.0
    if block.bullet:
        indent = max(14.0, sheets.ruler.width(block.bullet, size, True) + 5)
        sheets.need(size * 1.38)
        y = sheets.y - size * 1.38 + size * 0.3
        sheets.put(Label(sheets.left, y, sheets.ruler.clean(block.bullet), size, bold=True, colour=CLAY))
    colour = SLATE if block.tone == "small" else INK
    sheets.text(block.text, size, bold=block.tone == "lead", colour=colour, indent=indent)
    sheets.y -= 3


_FACT_SIZE: Final = 8.0
_FACT_LEADING: Final = 10.8
_FACT_GAP: Final = 1.6

_Cell = tuple[list[str], list[str]]


def _fact_rows(sheets: Sheets, block: Facts) -> tuple[float, list[list[_Cell]]]:
    """Return the room of the labels and, row by row, the broken lines of each label and value."""
    size, columns, ruler = _FACT_SIZE, block.columns, sheets.ruler
    share = sheets.room / columns
    widest = max((ruler.width(label, size) for label, _ in block.pairs), default=0.0)
    room = min(widest + 10, share * 0.42)
    cells = [
        (wrap(label, room - 6, size, ruler), wrap(value, share - room - 10, size, ruler))
        for label, value in block.pairs
    ]
    return room, [cells[first : first + columns] for first in range(0, len(cells), columns)]


def _deep(row: list[_Cell]) -> int:
    return max(len(lines) for cell in row for lines in cell)


def _facts_height(sheets: Sheets, block: Facts) -> float:
    _, rows = _fact_rows(sheets, block)
    return sum(_deep(row) * _FACT_LEADING + _FACT_GAP for row in rows)


def _facts(sheets: Sheets, block: Facts) -> None:
    """Labels and values in columns, read along the rows."""
    share = sheets.room / block.columns
    room, rows = _fact_rows(sheets, block)
    if len(rows) <= 10:
        sheets.need(_facts_height(sheets, block))
    for row in rows:
        for place in range(_deep(row)):
            sheets.need(_FACT_LEADING)
            sheets.y -= _FACT_LEADING
            for column, (label, value) in enumerate(row):
                x, y = sheets.left + column * share, sheets.y + 2.6
                if place < len(label):
                    sheets.put(Label(x, y, label[place], _FACT_SIZE, colour=SLATE))
                if place < len(value):
                    sheets.put(Label(x + room, y, value[place], _FACT_SIZE))
        y = sheets.y - 0.6
        sheets.put(Line(((sheets.left, y), (sheets.left + sheets.room, y)), RULE, 0.3))
        sheets.y -= _FACT_GAP
    sheets.y -= 6


def _figure_height(sheets: Sheets, block: Figure, drawing: Drawing) -> float:
    caption = wrap(block.caption, sheets.room, 7.0, sheets.ruler) if block.caption else []
    return drawing.height + 18 + len(caption) * 9.7


def _figure(sheets: Sheets, block: Figure) -> None:
    drawing = block.drawing
    height = _figure_height(sheets, block, drawing)
    if block.smaller is not None and sheets.y - height < sheets.bottom:
        height -= drawing.height - block.smaller.height
        drawing = block.smaller
    if block.if_room and sheets.y - height < sheets.bottom:
        return
    sheets.need(height)
    if block.title:
        sheets.text(block.title, 9.4, bold=True, colour=PETROL)
        sheets.y -= 3
    sheets.y -= drawing.height
    sheets.draw(drawing, sheets.left + max(0.0, (sheets.room - drawing.width) / 2), sheets.y)
    sheets.y -= 3
    if block.caption:
        sheets.text(block.caption, 7.0, colour=SLATE)
    sheets.y -= 7


def _verdict(sheets: Sheets, block: Verdict) -> None:
    colour = VERDICT_COLOURS[block.word]
    sentence = wrap(block.sentence, sheets.room - 28, 8.8, sheets.ruler)
    height = 40 + len(sentence) * 12.2
    sheets.need(height + 66)
    sheets.y -= height
    x, y = sheets.left, sheets.y
    items: list[Item] = [Box(x, y, sheets.room, height, fill=colour)]
    items.append(_label(x + 14, y + height - 26, block.title, 16.0, colour=PAPER, bold=True))
    for place, line in enumerate(sentence):
        items.append(_label(x + 14, y + height - 42 - place * 12.2, line, 8.8, colour=PAPER))
    if block.word == "not adequate":
        items.append(Box(x, y, 5, height, fill=INK))
    sheets.put(*items)
    _tiles(sheets, block, colour)


def _label(x: float, y: float, text: str, size: float, *, colour: str = INK, bold: bool = False) -> Label:
    return Label(x, y, text, size, "start", bold, colour)


def _tiles(sheets: Sheets, block: Verdict, colour: str) -> None:
    share = sheets.room / max(len(block.tiles), 1)
    details = [wrap(tile.detail, share - 14, 7.0, sheets.ruler) for tile in block.tiles]
    height = 42 + max((len(lines) for lines in details), default=0) * 9.2
    sheets.y -= height
    items: list[Item] = [Box(sheets.left, sheets.y, sheets.room, height, fill=MIST)]
    for place, (tile, detail) in enumerate(zip(block.tiles, details, strict=True)):
        x = sheets.left + place * share + 8
        items.append(_label(x, sheets.y + height - 13, tile.label, 7.4, colour=SLATE))
        size = 13.5
        value = sheets.ruler.clean(tile.value)
        while sheets.ruler.width(value, size, True) > share - 12 and size > 7:
            size -= 0.5
        items.append(_label(x, sheets.y + height - 30, value, size, bold=True))
        for row, line in enumerate(detail):
            items.append(_label(x, sheets.y + height - 42 - row * 9.2, line, 7.0, colour=SLATE))
        if place:
            rule = ((x - 8, sheets.y + 6), (x - 8, sheets.y + height - 6))
            items.append(Line(rule, RULE, 0.6))
    items.append(Line(((sheets.left, sheets.y), (sheets.left + sheets.room, sheets.y)), colour, 1.6))
    sheets.put(*items)
    sheets.y -= 10


def _blanks_height(blocks: Sequence[Block]) -> float:
    """Return the room of the blank lines that ``blocks`` begin with; all who sign do so on one page."""
    signed = takewhile(lambda block: isinstance(block, BlankLines), blocks)
    return sum(_blank_height(block) for block in signed if isinstance(block, BlankLines))


def _blank_height(block: BlankLines) -> float:
    return 9.4 * 1.38 + 24 * len(block.labels) + 22 * block.remarks + 14


def _blank_lines(sheets: Sheets, block: BlankLines) -> None:
    sheets.need(_blank_height(block))
    sheets.text(block.title, 9.4, bold=True, colour=PETROL)
    right = sheets.left + sheets.room
    for label in block.labels:
        sheets.y -= 24
        x = sheets.left + 150
        sheets.put(Label(sheets.left, sheets.y, label, 8.0, colour=SLATE))
        sheets.put(Line(((x, sheets.y - 1), (right, sheets.y - 1)), SLATE, 0.5))
    for _ in range(block.remarks):
        sheets.y -= 22
        sheets.put(Line(((sheets.left, sheets.y - 1), (right, sheets.y - 1)), SLATE, 0.5))
    sheets.y -= 14


_LISTED: Final = 6.4
_TAIL: Final = 10
"""The last page of a listing holds so many lines at least."""


def _listing(sheets: Sheets, block: Listing) -> None:
    sheets.need(40)
    sheets.text(block.title, 8.4, bold=True, colour=PETROL)
    if block.note:
        sheets.text(block.note, 7.0, colour=SLATE)
    sheets.y -= 2
    leading, indent = _LISTED * 1.38, 6.0
    lines = [
        part for line in block.lines for part in wrap(line, sheets.room - indent, _LISTED, sheets.ruler)
    ]
    here = int((sheets.y - sheets.bottom) / leading)
    page = int((sheets.top - sheets.bottom) / leading)
    alone = 0 < (len(lines) - here) % page < _TAIL if len(lines) > here else False
    for place, line in enumerate(lines):
        if alone and place == len(lines) - _TAIL:
            sheets.need(_TAIL * leading)
        sheets.text(line, _LISTED, colour=INK, indent=indent)
    sheets.y -= 8
