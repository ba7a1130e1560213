"""Tables on sheets: column widths, repeated headers, rows broken over pages, nothing clipped."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Final

from supplycheck.report.document import Column, Row, Table, without_rows
from supplycheck.report.drawing import Box, Item, Label, Line
from supplycheck.report.sheet import Sheets
from supplycheck.report.theme import INK, MIST, PETROL, RULE, SLATE
from supplycheck.report.wrapping import Ruler, wrap

PAD: Final = 3.0
GUTTER: Final = 7.0
"""Room left of a column of words that follows a column of numbers, so that the two do not run together."""
LEAST: Final = 24.0
TOGETHER: Final = 6
"""Tables of so few rows are not broken over pages."""
KEPT: Final = 3
"""So many rows of a longer table stay with its header, and with the heading above it."""
_MEASURED: Final = 200
_SLACK: Final = 4.0
"""Room that a row must leave below it to be written on a page."""

_Laid = tuple[int, Row, list[list[str]], list[str]]


@dataclass(frozen=True, slots=True)
class _Grid:
    """Where the columns of one table lie: widths [points] and the size of its letters."""

    widths: tuple[float, ...]
    size: float
    insets: tuple[float, ...]

    @property
    def leading(self) -> float:
        return self.size * 1.3

    @property
    def total(self) -> float:
        return sum(self.widths)

    @property
    def rooms(self) -> tuple[float, ...]:
        """The width that the text of each column may take."""
        return tuple(width - inset - PAD for width, inset in zip(self.widths, self.insets, strict=True))


def opening_height(sheets: Sheets, table: Table) -> float:
    """Return the room that the start of ``table`` takes: title, header, and the rows kept with them."""
    if not table.rows:
        return 8.4 * 1.38
    grid = _grid(replace(table, rows=table.rows[:_MEASURED]), sheets.room, sheets.ruler)
    head = _header_lines(table.columns, grid, sheets.ruler)
    rows = table.rows[: TOGETHER + 1]
    laid = [_laid(number, row, grid, sheets.ruler) for number, row in enumerate(rows)]
    return _opening(table, head, grid, laid, _note_height(sheets, table))


def _opening(
    table: Table, head: list[tuple[list[str], str]], grid: _Grid, laid: list[_Laid], below: float
) -> float:
    """Return the height of title, header and the first rows, of a short table that of all of it."""
    first = laid if len(laid) <= TOGETHER else laid[:KEPT]
    rows = sum(_row_height(one, grid) for one in first) + _SLACK
    title = 17.6 if table.title else 0.0
    return title + _header_height(head, grid) + rows + (below if first is laid else 0.0)


def _note_height(sheets: Sheets, table: Table) -> float:
    lines = wrap(table.note, sheets.room, 6.6, sheets.ruler) if table.note else []
    return 4 + len(lines) * 6.6 * 1.38 if lines else 0.0


def put_table(sheets: Sheets, table: Table) -> None:
    """Write ``table`` from the cursor down; one without rows takes a line."""
    if not table.rows:
        sheets.text(without_rows(table), 8.4, colour=INK)
        sheets.y -= 8
        return
    grid = _grid(table, sheets.room, sheets.ruler)
    head = _header_lines(table.columns, grid, sheets.ruler)
    laid = [_laid(number, row, grid, sheets.ruler) for number, row in enumerate(table.rows)]
    below = _note_height(sheets, table)
    sheets.need(_opening(table, head, grid, laid, below))
    _title(sheets, table.title)
    _header(sheets, table.columns, head, grid)
    for place, one in enumerate(laid):
        if _ends_alone(sheets, laid[place:], grid, below) and not _is_below_header(sheets, head, grid):
            _go_on(sheets, table, head, grid)
        _row(sheets, table, head, grid, one)
    sheets.put(Line(((sheets.left, sheets.y), (sheets.left + grid.total, sheets.y)), SLATE, 0.6))
    sheets.y -= 4
    if table.note:
        sheets.text(table.note, 6.6, colour=SLATE)
    sheets.y -= 8


def _ends_alone(sheets: Sheets, left: list[_Laid], grid: _Grid, below: float) -> bool:
    """True where fewer than :data:`KEPT` rows, or the note, would stand alone on the next page."""
    if len(left) > KEPT:
        return False
    return sheets.y - sum(_row_height(one, grid) for one in left) - below < sheets.bottom


def _laid(number: int, row: Row, grid: _Grid, ruler: Ruler) -> _Laid:
    lines = [
        wrap(cell, room, grid.size, ruler, bold=row.strong)
        for cell, room in zip(row.cells, grid.rooms, strict=True)
    ]
    notes = wrap(row.note, grid.total - 18, grid.size - 0.4, ruler) if row.note else []
    return number, row, lines, notes


def _row_height(laid: _Laid, grid: _Grid) -> float:
    _, _, lines, notes = laid
    return (max(len(cell) for cell in lines) + len(notes)) * grid.leading + 3.4


def _title(sheets: Sheets, title: str) -> None:
    if title:
        sheets.y -= 0.0 if sheets.is_fresh else 3.0
        sheets.text(title, 8.4, bold=True, colour=PETROL)
        sheets.y -= 3


def _grid(table: Table, room: float, ruler: Ruler) -> _Grid:
    size, insets = table.size, _insets(table.columns)
    if all(column.share for column in table.columns):
        whole = sum(column.share for column in table.columns)
        return _Grid(tuple(room * column.share / whole for column in table.columns), size, insets)
    natural = _natural(table, size, ruler)
    while sum(natural) > room and size > 5.6 and not any(column.wrap for column in table.columns):
        size -= 0.2
        natural = _natural(table, size, ruler)
    over = sum(natural) - room
    if over <= 0:
        return _Grid(_stretched(table, natural, room), size, insets)
    elastic = [width if column.wrap else 0.0 for column, width in zip(table.columns, natural, strict=True)]
    widths = _shrunk(natural, elastic, over)
    over = sum(widths) - room
    if over > 0:
        widths = _shrunk(widths, widths, over)
    return _Grid(tuple(widths), size, insets)


def _insets(columns: tuple[Column, ...]) -> tuple[float, ...]:
    """Return the room left of the text of each column."""
    before = (None, *columns[:-1])
    return tuple(
        PAD + GUTTER if last is not None and last.right and not column.right else PAD
        for last, column in zip(before, columns, strict=True)
    )


def _natural(table: Table, size: float, ruler: Ruler) -> list[float]:
    widths = []
    for place, (column, inset) in enumerate(zip(table.columns, _insets(table.columns), strict=True)):
        words = [*column.title.split(" "), *column.unit.split(" ")]
        need = max((ruler.width(word, size, True) for word in words), default=0.0)
        cells = (ruler.width(ruler.clean(row.cells[place]), size, row.strong) for row in table.rows)
        widths.append(max(need, max(cells, default=0.0), LEAST - 2 * PAD) + inset + PAD + 0.5)
    return widths


def _stretched(table: Table, natural: list[float], room: float) -> tuple[float, ...]:
    """Give the room that is left to all columns alike, and to wrapped ones what is over that."""
    spare = room - sum(natural)
    share = min(spare / len(natural), 14.0)
    wide = [place for place, column in enumerate(table.columns) if column.wrap]
    more = (spare - share * len(natural)) / len(wide) if wide else 0.0
    return tuple(width + share + (more if i in wide else 0.0) for i, width in enumerate(natural))


def _shrunk(widths: list[float], elastic: list[float], over: float) -> list[float]:
    """Take ``over`` from the widest of the elastic columns, down to a least width."""
    out = list(widths)
    places = [place for place, width in enumerate(elastic) if width > 0]
    for _ in range(40):
        wide = [place for place in places if out[place] > 2 * LEAST]
        if over <= 0.01 or not wide:
            break
        level = sorted({round(out[place], 3) for place in wide}, reverse=True)
        top = [place for place in wide if out[place] >= level[0] - 0.002]
        floor = max(level[1] if len(level) > 1 else 2 * LEAST, 2 * LEAST)
        step = min(out[top[0]] - floor, over / len(top))
        for place in top:
            out[place] -= step
        over -= step * len(top)
    if over > 0.01 and places == list(range(len(out))):
        scale = (sum(out) - over) / sum(out)
        out = [width * scale for width in out]
    return out


def _header_lines(columns: tuple[Column, ...], grid: _Grid, ruler: Ruler) -> list[tuple[list[str], str]]:
    return [
        (wrap(column.title, room + 0.5, grid.size, ruler, bold=True), column.unit)
        for column, room in zip(columns, grid.rooms, strict=True)
    ]


def _header_height(head: list[tuple[list[str], str]], grid: _Grid) -> float:
    most = max(len(lines) for lines, _ in head)
    return (most + any(unit for _, unit in head)) * grid.leading + 6


def _header(
    sheets: Sheets, columns: tuple[Column, ...], head: list[tuple[list[str], str]], grid: _Grid
) -> None:
    height = _header_height(head, grid)
    sheets.y -= height
    items: list[Item] = [Box(sheets.left, sheets.y, grid.total, height, fill=MIST)]
    has_units = any(unit for _, unit in head)
    x = sheets.left
    for place, (column, (lines, unit)) in enumerate(zip(columns, head, strict=True)):
        width, inset = grid.widths[place], grid.insets[place]
        y = sheets.y + 3.5 + (grid.leading if has_units else 0.0)
        for line in reversed(lines):
            items.append(_cell(x, y, width, line, _Style(grid.size, column.right, inset, bold=True)))
            y += grid.leading
        if unit:
            items.append(
                _cell(x, sheets.y + 3.5, width, unit, _Style(grid.size, column.right, inset, colour=SLATE))
            )
        x += width
    items.append(Line(((sheets.left, sheets.y), (x, sheets.y)), SLATE, 0.8))
    sheets.put(*items)


@dataclass(frozen=True, slots=True)
class _Style:
    """How the text of a cell is written."""

    size: float
    right: bool
    inset: float = PAD
    bold: bool = False
    colour: str = INK


def _cell(left: float, y: float, width: float, text: str, style: _Style) -> Label:
    if style.right:
        return Label(left + width - PAD, y, text, style.size, "end", style.bold, style.colour)
    return Label(left + style.inset, y, text, style.size, "start", style.bold, style.colour)


def _go_on(sheets: Sheets, table: Table, head: list[tuple[list[str], str]], grid: _Grid) -> None:
    """Start a page with the title and the header of ``table``."""
    sheets.new_page()
    _title(sheets, f"{table.title} (continued)" if table.title else "")
    _header(sheets, table.columns, head, grid)


def _row(sheets: Sheets, table: Table, head: list[tuple[list[str], str]], grid: _Grid, laid: _Laid) -> None:
    """Write one row; one that is taller than a page goes on over the next."""
    number, row, lines, notes = laid
    start = 0
    left = max(len(cell) for cell in lines) + len(notes)
    while left > 0:
        room = int((sheets.y - sheets.bottom - _SLACK) / grid.leading)
        if room < left and not _is_below_header(sheets, head, grid):
            _go_on(sheets, table, head, grid)
            continue
        taken = min(left, max(room, 1))
        _part(sheets, grid, table.columns, (number, row, lines, notes), start, taken)
        start += taken
        left -= taken


def _is_below_header(sheets: Sheets, head: list[tuple[list[str], str]], grid: _Grid) -> bool:
    return sheets.y > sheets.top - _header_height(head, grid) - 40


def _part(
    sheets: Sheets, grid: _Grid, columns: tuple[Column, ...], laid: _Laid, start: int, taken: int
) -> None:
    _, row, lines, notes = laid
    deep = max(len(cell) for cell in lines)
    height = taken * grid.leading + 3.4
    top = sheets.y
    sheets.y -= height
    items: list[Item] = []
    x = sheets.left
    for number, (column, cell) in enumerate(zip(columns, lines, strict=True)):
        width = grid.widths[number]
        style = _Style(grid.size, column.right, grid.insets[number], row.strong)
        for place, line in enumerate(cell[start : start + taken]):
            y = top - (place + 1) * grid.leading + grid.size * 0.12
            if line:
                items.append(_cell(x, y, width, line, style))
        x += width
    for place, line in enumerate(notes):
        at = deep + place - start
        if 0 <= at < taken:
            y = top - (at + 1) * grid.leading + grid.size * 0.12
            items.append(Label(sheets.left + 15, y, line, grid.size - 0.4, colour=SLATE))
    items.append(Line(((sheets.left, sheets.y), (x, sheets.y)), RULE, 0.35))
    sheets.put(*items)
