"""The PDF writer: paints the laid-out pages. The only module that draws with reportlab.

The file is byte-identical for identical input: reportlab's ``invariant`` mode writes no clock and no
random identifier, and the fonts are subset in the order in which letters occur.
"""

from __future__ import annotations

import io
from importlib import resources
from typing import Any, Final

from reportlab.lib.colors import HexColor
from reportlab.pdfbase import pdfmetrics
from reportlab.pdfbase.ttfonts import TTFont
from reportlab.pdfgen.canvas import Canvas

from supplycheck.report.document import Document
from supplycheck.report.drawing import Box, Dot, Item, Label, Line
from supplycheck.report.layout import lay_out
from supplycheck.report.sheet import Sheet
from supplycheck.results.display import visible

REGULAR: Final = "SupplyCheckSans"
BOLD: Final = "SupplyCheckSans-Bold"
_STAND_INS: Final = str.maketrans({"\u00b5": "μ", "\u200b": "", "\ufeff": ""})


class FontRuler:
    """Measures in DejaVu Sans: Latin, Greek and Cyrillic letters and the signs of the trade."""

    def __init__(self) -> None:
        self.regular = _font(REGULAR, "DejaVuSans-subset.ttf").face
        self.bold = _font(BOLD, "DejaVuSans-Bold-subset.ttf").face
        self._clean: dict[str, str] = {}
        self._widths: dict[tuple[str, bool], float] = {}

    def clean(self, text: str) -> str:
        """Return ``text`` with control characters and signs that the font lacks written out."""
        found = self._clean.get(text)
        if found is None:
            found = visible(text.translate(_STAND_INS))
            glyphs = self.regular.charToGlyph
            if not all(ord(char) in glyphs for char in found):
                found = "".join(
                    char if ord(char) in glyphs else char.encode("unicode_escape").decode("ascii")
                    for char in found
                )
            self._clean[text] = found
        return found

    def width(self, text: str, size: float, bold: bool = False) -> float:
        """Return the width of ``text`` in points."""
        key = (text, bold)
        found = self._widths.get(key)
        if found is None:
            face = self.bold if bold else self.regular
            widths, other = face.charWidths, face.defaultWidth
            found = sum(widths.get(ord(char), other) for char in text) / 1000
            self._widths[key] = found
        return found * size


class _Canvas(Canvas):  # type: ignore[misc]
    """A canvas on which every text is placed by itself, so that how far it reaches need not be known."""

    def stringWidth(self, *_: object) -> float:  # noqa: N802  (reportlab's own name)
        return 0.0


def _font(name: str, file: str) -> Any:
    """Return a font of its own for one document, so that its subset starts empty."""
    content = resources.files("supplycheck.report").joinpath("fonts", file).read_bytes()
    font = TTFont(name, io.BytesIO(content))
    pdfmetrics.registerFont(font)
    return font


def pdf_bytes(document: Document) -> bytes:
    """Return ``document`` as a PDF file."""
    ruler = FontRuler()
    sheets = lay_out(document, ruler)
    out = io.BytesIO()
    canvas = _Canvas(out, invariant=1, pageCompression=1, initialFontName=REGULAR)
    canvas.setTitle(ruler.clean(document.title))
    canvas.setSubject(ruler.clean(document.subtitle))
    canvas.setAuthor("")
    canvas.setCreator(document.producer)
    canvas.setProducer(document.producer)
    for number, sheet in enumerate(sheets):
        _paint(canvas, ruler, sheet, number)
    canvas.save()
    return out.getvalue()


def _paint(canvas: Any, ruler: FontRuler, sheet: Sheet, number: int) -> None:
    canvas.setPageSize((sheet.width, sheet.height))
    for place, (title, y) in enumerate(sheet.entries):
        key = f"s{number}.{place}"
        canvas.bookmarkHorizontal(key, 0, y + 10)
        canvas.addOutlineEntry(title, key, 0, 0)
    brush = Brush(canvas, ruler)
    for item in sheet.items:
        brush.item(item)
    brush.close()
    canvas.showPage()


class Brush:
    """Paints one page; sets a colour, width or font only where it changes."""

    def __init__(self, canvas: Any, ruler: FontRuler) -> None:
        self.canvas = canvas
        self.ruler = ruler
        self.text: Any = None
        self.font: tuple[str, float] | None = None
        self.ink: str | None = None
        self.fill: str | None = None
        self.pen: tuple[str, float, tuple[float, ...]] | None = None

    def item(self, item: Item) -> None:
        """Paint ``item``."""
        if isinstance(item, Label) and not item.angle and item.behind is None:
            self._write(item)
            return
        self.close()
        match item:
            case Label():
                self._write_apart(item)
            case Line():
                self._line(item)
            case Box():
                fill, stroke = self._set(item.fill, item.stroke, item.line, item.dash)
                self.canvas.rect(item.x, item.y, item.width, item.height, stroke, fill)
            case Dot():
                fill, stroke = self._set(item.fill, item.stroke, item.line, ())
                self.canvas.circle(item.x, item.y, item.radius, stroke, fill)

    def close(self) -> None:
        """End the text that is open."""
        if self.text is not None:
            self.canvas.drawText(self.text)
            self.text = None

    def _write(self, item: Label) -> None:
        font = BOLD if item.bold else REGULAR
        if self.text is None:
            self.text = self.canvas.beginText()
            self.font = self.ink = None
        if self.font != (font, item.size):
            self.font = (font, item.size)
            self.text.setFont(font, item.size)
        if self.ink != item.colour:
            self.ink = item.colour
            self.fill = None
            self.text.setFillColor(HexColor(item.colour))
        self.text.setTextOrigin(item.x + self._shift(item), item.y)
        self.text.textOut(item.text)

    def _write_apart(self, item: Label) -> None:
        """Write text that is turned or stands on a ground of its own."""
        canvas, shift = self.canvas, self._shift(item)
        canvas.saveState()
        canvas.translate(item.x, item.y)
        canvas.rotate(item.angle)
        if item.behind is not None:
            canvas.setFillColor(HexColor(item.behind))
            width = self.ruler.width(item.text, item.size, item.bold)
            canvas.rect(shift - 1.2, -item.size * 0.24, width + 2.4, item.size * 1.12, 0, 1)
        canvas.setFillColor(HexColor(item.colour))
        canvas.setFont(BOLD if item.bold else REGULAR, item.size)
        canvas.drawString(shift, 0.0, item.text)
        canvas.restoreState()

    def _set(
        self, fill: str | None, stroke: str | None, width: float, dash: tuple[float, ...]
    ) -> tuple[int, int]:
        """Set what is needed and return whether to fill and whether to stroke."""
        if fill is not None and fill != self.fill:
            self.fill = fill
            self.canvas.setFillColor(HexColor(fill))
        if stroke is not None and self.pen != (stroke, width, dash):
            self.pen = (stroke, width, dash)
            self.canvas.setStrokeColor(HexColor(stroke))
            self.canvas.setLineWidth(width)
            self.canvas.setDash(list(dash))
        return int(fill is not None), int(stroke is not None)

    def _line(self, item: Line) -> None:
        fill, stroke = self._set(item.fill, item.stroke, item.width, item.dash)
        if item.fill is None and len(item.points) == 2:
            self.canvas.line(*item.points[0], *item.points[1])
            return
        path = self.canvas.beginPath()
        path.moveTo(*item.points[0])
        for point in item.points[1:]:
            path.lineTo(*point)
        if item.fill is not None:
            path.close()
        self.canvas.setLineJoin(1)
        self.canvas.drawPath(path, stroke, fill)

    def _shift(self, item: Label) -> float:
        """Return how far left of its anchor the text starts, as a negative number."""
        if item.anchor == "start":
            return 0.0
        width = self.ruler.width(item.text, item.size, item.bold)
        return -width / (2 if item.anchor == "middle" else 1)
