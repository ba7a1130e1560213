"""Sheets of paper being filled from the top: cursor, page breaks, running header and footer."""

from __future__ import annotations

from dataclasses import dataclass, field
from types import MappingProxyType
from typing import Final

from supplycheck.report.document import Document
from supplycheck.report.drawing import Box, Drawing, Item, Label, Line
from supplycheck.report.theme import PETROL, RULE, SLATE
from supplycheck.report.wrapping import Ruler, shorten, wrap

SIZES: Final = MappingProxyType({"letter": (612.0, 792.0), "a4": (595.2756, 841.8898)})
MARGIN: Final = 45.0
HEAD: Final = 40.0
FOOT: Final = 40.0


@dataclass(slots=True)
class Sheet:
    """One page: its size and everything painted on it; ``entries`` are (title, y) for the outline."""

    width: float
    height: float
    items: list[Item] = field(default_factory=list)
    entries: list[tuple[str, float]] = field(default_factory=list)


class Sheets:
    """The pages so far and the place where the next thing goes."""

    def __init__(self, document: Document, ruler: Ruler) -> None:
        self.document = document
        self.ruler = ruler
        self.sheets: list[Sheet] = []
        self.landscape = False
        self.y = 0.0

    @property
    def sheet(self) -> Sheet:
        """The page being filled."""
        return self.sheets[-1]

    @property
    def left(self) -> float:
        """The left edge of the text [points]."""
        return MARGIN

    @property
    def room(self) -> float:
        """The width of the text [points]."""
        return self.sheet.width - 2 * MARGIN

    @property
    def bottom(self) -> float:
        """The lowest place for text on a page [points]."""
        return MARGIN + 6.0

    @property
    def top(self) -> float:
        """Where text starts on a page [points]."""
        return self.sheet.height - MARGIN - 16.0

    @property
    def is_fresh(self) -> bool:
        """True where nothing stands on the page yet."""
        return self.y >= self.top - 0.01

    def turn(self, landscape: bool) -> None:
        """Start a page of the orientation asked for, unless an empty one of it is open."""
        if self.sheets and self.landscape == landscape and self.is_fresh:
            return
        self.landscape = landscape
        self.new_page()

    def new_page(self) -> None:
        """Start a new page."""
        width, height = SIZES[self.document.paper]
        if self.landscape:
            width, height = height, width
        self.sheets.append(Sheet(width, height))
        self.y = self.top

    def need(self, height: float) -> None:
        """Start a new page where less than ``height`` is left on this one."""
        if self.y - height < self.bottom and not self.is_fresh:
            self.new_page()

    def put(self, *items: Item) -> None:
        """Paint ``items`` on the page."""
        self.sheet.items.extend(items)

    def text(self, text: str, size: float, *, bold: bool = False, colour: str, indent: float = 0.0) -> None:
        """Write ``text`` from the cursor down, broken into lines and over pages."""
        leading = size * 1.38
        for line in wrap(text, self.room - indent, size, self.ruler, bold=bold):
            self.need(leading)
            self.y -= leading
            self.put(Label(self.left + indent, self.y + size * 0.3, line, size, bold=bold, colour=colour))

    def draw(self, drawing: Drawing, x: float, y: float) -> None:
        """Paint ``drawing`` with its lower left corner at (``x``, ``y``)."""
        self.put(*(moved(item, x, y, self.ruler) for item in drawing.items))

    def finish(self) -> list[Sheet]:
        """Return the pages with their headers and footers."""
        total = len(self.sheets)
        for number, sheet in enumerate(self.sheets, start=1):
            self._frame(sheet, number, total)
        return self.sheets

    def _frame(self, sheet: Sheet, number: int, total: int) -> None:
        right = sheet.width - MARGIN
        top = sheet.height - HEAD
        date = self.document.date
        room = right - MARGIN - self.ruler.width(date, 7.0) - 20
        title = shorten(self.document.title, room, 7.0, self.ruler)
        sheet.items += [
            Label(MARGIN, top + 5, title, 7.0, colour=SLATE),
            Label(right, top + 5, date, 7.0, "end", colour=SLATE),
            Line(((MARGIN, top), (right, top)), RULE, 0.6),
            Box(MARGIN, top - 1.2, 36, 2.4, fill=PETROL),
            Line(((MARGIN, FOOT), (right, FOOT)), RULE, 0.6),
            Label(MARGIN, FOOT - 10, self.document.standing, 7.0, colour=SLATE),
            Label(right, FOOT - 10, f"page {number} of {total}", 7.0, "end", colour=SLATE),
        ]


def moved(item: Item, x: float, y: float, ruler: Ruler) -> Item:
    """Return ``item`` shifted by (``x``, ``y``), its text made safe for the fonts."""
    if isinstance(item, Line):
        points = tuple((px + x, py + y) for px, py in item.points)
        return Line(points, item.stroke, item.width, item.dash, item.fill)
    if isinstance(item, Box):
        return Box(
            item.x + x, item.y + y, item.width, item.height, item.fill, item.stroke, item.line, item.dash
        )
    if isinstance(item, Label):
        text = ruler.clean(item.text)
        place = (item.x + x, item.y + y)
        return Label(*place, text, item.size, item.anchor, item.bold, item.colour, item.angle, item.behind)
    return type(item)(item.x + x, item.y + y, item.radius, item.fill, item.stroke, item.line)
