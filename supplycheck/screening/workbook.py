"""A workbook of one sheet written as a stream: rows go to the file as they come.

The parts are the smallest set that ECMA-376 (Office Open XML) asks for. Texts are inline strings, which a
spreadsheet never executes; those that begin like a formula are marked as quoted text as well.
"""

from __future__ import annotations

import zipfile
from collections.abc import Iterable
from concurrent.futures import Future, ThreadPoolExecutor
from contextlib import suppress
from pathlib import Path
from typing import IO, Final
from xml.sax.saxutils import escape

from supplycheck.results.tables import disarmed

MOST_ROWS: Final = 1_048_575
"""Rows below the heading that a sheet holds (1,048,576 with it)."""
_TIME: Final = (1980, 1, 1, 0, 0, 0)
_HEAD: Final = '<?xml version="1.0" encoding="UTF-8" standalone="yes"?>\n'
_MAIN: Final = "http://schemas.openxmlformats.org/spreadsheetml/2006/main"
_OFFICE: Final = "http://schemas.openxmlformats.org/officeDocument/2006/relationships"
_PACKAGE: Final = "http://schemas.openxmlformats.org/package/2006"
_TYPE: Final = "application/vnd.openxmlformats-officedocument.spreadsheetml"
_PARTS: Final = {
    "[Content_Types].xml": f'<Types xmlns="{_PACKAGE}/content-types">'
    '<Default Extension="rels" ContentType="application/vnd.openxmlformats-package.relationships+xml"/>'
    f'<Override PartName="/xl/workbook.xml" ContentType="{_TYPE}.sheet.main+xml"/>'
    f'<Override PartName="/xl/styles.xml" ContentType="{_TYPE}.styles+xml"/>'
    f'<Override PartName="/xl/worksheets/sheet1.xml" ContentType="{_TYPE}.worksheet+xml"/></Types>',
    "_rels/.rels": f'<Relationships xmlns="{_PACKAGE}/relationships">'
    f'<Relationship Id="rId1" Type="{_OFFICE}/officeDocument" Target="xl/workbook.xml"/></Relationships>',
    "xl/workbook.xml": f'<workbook xmlns="{_MAIN}" xmlns:r="{_OFFICE}">'
    '<sheets><sheet name="results" sheetId="1" r:id="rId1"/></sheets></workbook>',
    "xl/_rels/workbook.xml.rels": f'<Relationships xmlns="{_PACKAGE}/relationships">'
    f'<Relationship Id="rId1" Type="{_OFFICE}/worksheet" Target="worksheets/sheet1.xml"/>'
    f'<Relationship Id="rId2" Type="{_OFFICE}/styles" Target="styles.xml"/></Relationships>',
    "xl/styles.xml": f'<styleSheet xmlns="{_MAIN}"><fonts count="2"><font><sz val="11"/>'
    '<name val="Calibri"/></font><font><b/><sz val="11"/><name val="Calibri"/></font></fonts>'
    '<fills count="2"><fill><patternFill patternType="none"/></fill>'
    '<fill><patternFill patternType="gray125"/></fill></fills>'
    '<borders count="1"><border><left/><right/><top/><bottom/><diagonal/></border></borders>'
    '<cellStyleXfs count="1"><xf numFmtId="0" fontId="0" fillId="0" borderId="0"/></cellStyleXfs>'
    '<cellXfs count="3"><xf numFmtId="0" fontId="0" fillId="0" borderId="0" xfId="0"/>'
    '<xf numFmtId="0" fontId="1" fillId="0" borderId="0" xfId="0" applyFont="1"/>'
    '<xf numFmtId="49" fontId="0" fillId="0" borderId="0" xfId="0" quotePrefix="1"/></cellXfs>'
    '<cellStyles count="1"><cellStyle name="Normal" xfId="0" builtinId="0"/></cellStyles>'
    "</styleSheet>",
}


class Workbook:
    """The workbook at ``path``; rows are added as XML of :func:`text_cells` and :func:`number_cells`."""

    def __init__(self, path: Path, titles: Iterable[str]) -> None:
        self._zip = zipfile.ZipFile(path, "w", zipfile.ZIP_DEFLATED, compresslevel=1)
        for name, part in _PARTS.items():
            self._zip.writestr(zipfile.ZipInfo(name, _TIME), _HEAD + part)
        info = zipfile.ZipInfo("xl/worksheets/sheet1.xml", _TIME)
        info.compress_type = zipfile.ZIP_DEFLATED
        self._sheet: IO[bytes] = self._zip.open(info, "w", force_zip64=True)
        cells = "".join(f'<c t="inlineStr" s="1"><is><t>{escape(title)}</t></is></c>' for title in titles)
        pane = '<pane xSplit="1" ySplit="1" topLeftCell="B2" activePane="bottomRight" state="frozen"/>'
        self._sheet.write(
            f'{_HEAD}<worksheet xmlns="{_MAIN}"><sheetViews><sheetView workbookViewId="0">{pane}'
            f'</sheetView></sheetViews><cols><col min="1" max="60" width="16" customWidth="1"/></cols>'
            f"<sheetData><row>{cells}</row>".encode()
        )

        self._packer = ThreadPoolExecutor(1)
        self._packed: Future[int] | None = None

    def add(self, rows: bytes) -> None:
        """Add rows as XML; they are packed while the caller goes on, at most one block at a time."""
        self._wait()
        self._packed = self._packer.submit(self._sheet.write, rows)

    def _wait(self) -> None:
        if self._packed is not None:
            self._packed.result()

    def close(self) -> None:
        """Finish the file; nothing happens where it is finished already."""
        if self._sheet.closed:
            return
        self._wait()
        self._packer.shutdown()
        self._sheet.write(b"</sheetData></worksheet>")
        self._sheet.close()
        self._zip.close()

    def abandon(self) -> None:
        """Let go of an unfinished file, which is of no use; nothing happens where it is finished."""
        self._packer.shutdown()
        with suppress(OSError):
            self._sheet.close()
            self._zip.close()


def number_cells(texts: list[str]) -> list[str]:
    """Return a column of numbers (empty where there is none) as cells."""
    return [f"<c><v>{text}</v></c>" if text else "<c/>" for text in texts]


def text_cells(texts: list[str], *, plain: bool) -> list[str]:
    """Return a column of texts as cells; ``plain`` where no text of it needs care."""
    if plain:
        return [f'<c t="inlineStr"><is><t>{text}</t></is></c>' for text in texts]
    return [_text_cell(text) for text in texts]


def _text_cell(text: str) -> str:
    style = ' s="2"' if disarmed(text) != text else ""
    return f'<c t="inlineStr"{style}><is><t xml:space="preserve">{escape(text[:32767])}</t></is></c>'
