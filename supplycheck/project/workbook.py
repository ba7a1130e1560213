"""One sheet of a workbook as rows of texts; formulas are never run."""

from __future__ import annotations

import io
from collections.abc import Iterator
from typing import Any, Final

from supplycheck.findings import Place
from supplycheck.project.faults import FaultList, listed, near, quoted

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
    import warnings
    import zipfile

    import openpyxl

    try:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")  # styles and extensions that the reader does not need
            book = openpyxl.load_workbook(io.BytesIO(data), read_only=True, data_only=True)
    except (zipfile.BadZipFile, KeyError, ValueError, OSError, TypeError, SyntaxError, EOFError):
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
    except (zipfile.BadZipFile, KeyError, ValueError, OSError, TypeError, SyntaxError, EOFError) as caught:
        faults.add(place, f"the sheet cannot be read ({type(caught).__name__})", found=quoted(name))
    finally:
        book.close()


def _holds(data: bytes, marks: tuple[bytes, ...]) -> bool:
    """Return whether a sheet of the workbook holds one of ``marks``, read piece by piece."""
    import zipfile

    with zipfile.ZipFile(io.BytesIO(data)) as archive:
        for entry in archive.namelist():
            if not (entry.startswith("xl/worksheets/") and entry.endswith(".xml")):
                continue
            with archive.open(entry) as stream:
                kept = b""
                while piece := stream.read(1 << 20):
                    if any(mark in kept + piece for mark in marks):
                        return True
                    kept = piece[-16:]
    return False


def _marked(data: bytes, sheet: str) -> dict[int, list[tuple[int, str]]]:
    """Return by row the positions, from 0, of cells that may be empty for a reason, with a mark of it.

    These are formulas (empty where no result is stored) and cells that are merged into another one. The
    workbook is read a second time for them only where it holds any at all.
    """
    import warnings
    import zipfile

    import openpyxl

    found: dict[int, list[tuple[int, str]]] = {}
    try:
        if not _holds(data, (b"<f>", b"<f ", b"<f/", b"mergeCell ")):
            return found
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")
            page = openpyxl.load_workbook(io.BytesIO(data))[sheet]
    except (zipfile.BadZipFile, KeyError, ValueError, OSError, TypeError, SyntaxError, EOFError):
        return found  # the reading of the values says so
    for row in page.iter_rows():
        for cell in row:
            if cell.data_type == "f":
                found.setdefault(cell.row, []).append((cell.column - 1, UNSTORED))
    for merged in page.merged_cells.ranges:
        for number, column in list(merged.cells)[1:]:
            found.setdefault(number, []).append((column - 1, f"{MERGED}{merged}"))
    return found
