"""The PDF writer: paints the laid-out pages. The only module that draws with reportlab.

The file is byte-identical for identical input: reportlab's ``invariant`` mode writes no clock and no
random identifier, and the fonts are subset in the order in which letters occur.
"""

from __future__ import annotations

import io
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
_STAND_INS: Final = str.maketrans(
    {"′": "'", "″": '"', "‐": "-", "‑": "-", "‒": "–", "→": ">", "←": "<", "μ": "µ", "⁄": "/", "\u200b": ""}
)


class FontRuler:
    """Measures in Bitstream Vera Sans, which reportlab carries and the file embeds."""

    def __init__(self) -> None:
        self.regular = _font(REGULAR, "Vera.ttf").face
        self.bold = _font(BOLD, "VeraBd.ttf").face
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


def _font(name: str, file: str) -> Any:
    """Return a font of its own for one document, so that its subset starts empty."""
    font = TTFont(name, file)
    pdfmetrics.registerFont(font)
    return font


def pdf_bytes(document: Document) -> bytes:
    """Return ``document`` as a PDF file."""
    ruler = FontRuler()
    sheets = lay_out(document, ruler)
    out = io.BytesIO()
    canvas = Canvas(out, invariant=1, pageCompression=1, initialFontName=REGULAR)
    canvas.setTitle(ruler.clean(document.title))
    canvas.setSubject(ruler.clean(document.subtitle))
    canvas.setAuthor("")
    canvas.setCreator(document.producer)
    canvas.setProducer(document.producer)
    for number, sheet in enumerate(sheets):
        _paint(canvas, sheet, number)
    canvas.save()
    return out.getvalue()


def _paint(canvas: Any, sheet: Sheet, number: int) -> None:
    canvas.setPageSize((sheet.width, sheet.height))
    for place, (title, y) in enumerate(sheet.entries):
        key = f"s{number}.{place}"
        canvas.bookmarkHorizontal(key, 0, y + 10)
        canvas.addOutlineEntry(title, key, 0, 0)
    for item in sheet.items:
        _item(canvas, item)
    canvas.showPage()


def _item(canvas: Any, item: Item) -> None:
    match item:
        case Label():
            _text(canvas, item)
        case Line():
            _line(canvas, item)
        case Box():
            _pen(canvas, item.fill, item.stroke, item.line, item.dash)
            fill, stroke = int(item.fill is not None), int(item.stroke is not None)
            canvas.rect(item.x, item.y, item.width, item.height, stroke, fill)
        case Dot():
            _pen(canvas, item.fill, item.stroke, item.line, ())
            fill, stroke = int(item.fill is not None), int(item.stroke is not None)
            canvas.circle(item.x, item.y, item.radius, stroke, fill)


def _pen(canvas: Any, fill: str | None, stroke: str | None, width: float, dash: tuple[float, ...]) -> None:
    if fill is not None:
        canvas.setFillColor(HexColor(fill))
    if stroke is not None:
        canvas.setStrokeColor(HexColor(stroke))
        canvas.setLineWidth(width)
        canvas.setDash(list(dash))


def _line(canvas: Any, item: Line) -> None:
    _pen(canvas, item.fill, item.stroke, item.width, item.dash)
    if item.fill is None and len(item.points) == 2:
        canvas.line(*item.points[0], *item.points[1])
        return
    path = canvas.beginPath()
    path.moveTo(*item.points[0])
    for point in item.points[1:]:
        path.lineTo(*point)
    if item.fill is not None:
        path.close()
    canvas.setLineJoin(1)
    canvas.drawPath(path, int(item.stroke is not None), int(item.fill is not None))


def _text(canvas: Any, item: Label) -> None:
    font = BOLD if item.bold else REGULAR
    width = 0.0
    if item.anchor != "start" or item.behind is not None:
        width = pdfmetrics.stringWidth(item.text, font, item.size)
    shift = {"start": 0.0, "middle": -width / 2, "end": -width}[item.anchor]
    if item.angle:
        canvas.saveState()
        canvas.translate(item.x, item.y)
        canvas.rotate(item.angle)
        x, y = shift, 0.0
    else:
        x, y = item.x + shift, item.y
    if item.behind is not None:
        canvas.setFillColor(HexColor(item.behind))
        canvas.rect(x - 1.2, y - item.size * 0.24, width + 2.4, item.size * 1.12, 0, 1)
    canvas.setFillColor(HexColor(item.colour))
    canvas.setFont(font, item.size)
    canvas.drawString(x, y, item.text)
    if item.angle:
        canvas.restoreState()
