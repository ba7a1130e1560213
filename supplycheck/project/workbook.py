"""One sheet of a workbook as rows of texts; formulas are never run."""

from __future__ import annotations

import io
import re
import warnings
import zipfile
from collections.abc import Iterator
from typing import Any, Final
from xml.etree import ElementTree

from supplycheck.findings import Place
from supplycheck.project.faults import FaultList, listed, near, quoted

_MAIN: Final = "{http://schemas.openxmlformats.org/spreadsheetml/2006/main}"
_LINK: Final = "{http://schemas.openxmlformats.org/officeDocument/2006/relationships}id"
_REFERENCE: Final = re.compile(r"\$?([A-Z]{1,3})\$?(\d{1,7})")
UNREADABLE: Final = (KeyError, ValueError, OSError, TypeError, SyntaxError, EOFError)
MOST_COLUMNS: Final = 100
UNSTORED: Final = "\0formula"
MERGED: Final = "\0merged "
"""Stand for cells without a value of their own; no cell of a workbook holds a zero byte."""


def _cell_text(value: Any) -> str:
    """Return a spreadsheet cell as the text that the sheet shows for it."""
    if value is None:
        return ""
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, float) and value.is_integer() and abs(value) < 1e15:
        return str(int(value))
    return str(value)


def sheet_rows(
    data: bytes, name: str, sheet: str, place: Place, faults: FaultList
) -> Iterator[tuple[int, list[str]]]:
    """Yield number and texts of each row of ``sheet`` (the first one where empty), faults noted.

    A cell without a value of its own holds :data:`UNSTORED`, or :data:`MERGED` and its range.
    """
    import openpyxl

    try:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")  # styles and extensions that the reader does not need
            book = openpyxl.load_workbook(io.BytesIO(data), read_only=True, data_only=True)
    except (zipfile.BadZipFile, *UNREADABLE):
        faults.add(
            place,
            "cannot be read as XLSX",
            found=quoted(name),
            allowed="a workbook saved as .xlsx, not protected by a password",
            remedy="open it in the spreadsheet program and save it again, or export the sheet as CSV",
        )
        return
    names = list(book.sheetnames)
    if sheet and sheet not in names:
        close = near(sheet, names)
        faults.add(
            place,
            "the workbook has no such sheet",
            found=quoted(sheet),
            allowed=listed(names),
            remedy=f'did you mean "{close}"?' if close else "",
        )
        return
    marked = _marked(data, sheet or names[0])
    try:
        for number, cells in enumerate(book[sheet or names[0]].iter_rows(values_only=True), start=1):
            texts = [_cell_text(cell) for cell in cells]
            for column, mark in marked.get(number, ()):
                texts += [""] * (column + 1 - len(texts))
                texts[column] = texts[column] or mark
            yield number, texts
    except (zipfile.BadZipFile, *UNREADABLE) as caught:
        faults.add(place, f"the sheet cannot be read ({type(caught).__name__})", found=quoted(name))
    finally:
        book.close()


def _part_of(archive: zipfile.ZipFile, sheet: str) -> str:
    """Return the part of the workbook that holds ``sheet``; raises :class:`KeyError` without one."""
    book = ElementTree.fromstring(archive.read("xl/workbook.xml"))
    links = ElementTree.fromstring(archive.read("xl/_rels/workbook.xml.rels"))
    targets = {link.get("Id"): link.get("Target", "") for link in links}
    for entry in book.iter(f"{_MAIN}sheet"):
        if entry.get("name") == sheet:
            target = targets[entry.get(_LINK)]
            return target.lstrip("/") if target.startswith("/") else f"xl/{target}"
    raise KeyError(sheet)


def _marked(data: bytes, sheet: str) -> dict[int, list[tuple[int, str]]]:
    """Return by row the positions, from 0, of cells that are empty for a reason, with a mark of it.

    These are formulas without a stored result (an empty text is one) and cells that are merged into
    another one; of a merged range, those of its first two rows.
    """
    found: dict[int, list[tuple[int, str]]] = {}
    try:
        with zipfile.ZipFile(io.BytesIO(data)) as archive, archive.open(_part_of(archive, sheet)) as stream:
            for _, element in ElementTree.iterparse(stream):
                if element.tag == f"{_MAIN}c":
                    if element.find(f"{_MAIN}f") is not None and _is_bare(element):
                        _add(found, element.get("r", ""), UNSTORED)
                elif element.tag == f"{_MAIN}row":
                    element.clear()
                elif element.tag == f"{_MAIN}mergeCell":
                    _add_merged(found, element.get("ref", ""))
    except (zipfile.BadZipFile, *UNREADABLE):
        return found  # the reading of the values says so
    return found


def _is_bare(cell: ElementTree.Element) -> bool:
    """Return whether a cell with a formula stores no result."""
    return cell.get("t") != "str" and not cell.findtext(f"{_MAIN}v")


def _add(found: dict[int, list[tuple[int, str]]], reference: str, mark: str) -> None:
    match = _REFERENCE.fullmatch(reference)
    if match:
        found.setdefault(int(match[2]), []).append((_position(match[1]), mark))


def _add_merged(found: dict[int, list[tuple[int, str]]], reference: str) -> None:
    first, _, last = reference.partition(":")
    start, end = _REFERENCE.fullmatch(first), _REFERENCE.fullmatch(last)
    if start is None or end is None:
        return
    left, top = _position(start[1]), int(start[2])
    right, bottom = min(_position(end[1]), left + MOST_COLUMNS), min(int(end[2]), top + 1)
    for number in range(top, bottom + 1):
        columns = range(left + (number == top), right + 1)
        found.setdefault(number, []).extend((column, f"{MERGED}{reference}") for column in columns)


def _position(letters: str) -> int:
    """Return the position, from 0, of a column.

    >>> _position("A"), _position("AB")
    (0, 27)
    """
    number = 0
    for letter in letters:
        number = 26 * number + ord(letter) - ord("A") + 1
    return number - 1
