"""The file of tests as a stream of blocks of rows, whatever its size; no byte of it is lost.

A row is a line, or several where a quoted cell holds line ends. Rows that cannot be split into cells are
set apart here, each with its reason.
"""

from __future__ import annotations

import codecs
import csv
import hashlib
from collections.abc import Iterator
from dataclasses import dataclass, field
from pathlib import Path
from typing import BinaryIO, Final

from supplycheck.screening.records import ScreeningError

BLOCK: Final = 1 << 20
"""Bytes read at a time; some ten thousand rows."""
MOST_LINES: Final = 50
"""Lines that one row may fill."""
LONGEST_ROW: Final = 100_000
"""Longest row [bytes]."""


@dataclass(frozen=True, slots=True)
class Reject:
    """A row that cannot be used: its number in the file (the heading is row 1), why, and its text."""

    row: int
    reason: str
    text: str


@dataclass(frozen=True, slots=True)
class Block:
    """Rows that have the right number of cells, with their numbers, and those that have not."""

    rows: list[bytes]
    numbers: list[int]
    rejects: list[Reject]
    read: int
    blank: int
    end: int
    cut_short: int | None = None


@dataclass(slots=True)
class TestFile:
    """The file, read once from the first byte to the last; ``digest`` is its SHA-256 when done."""

    path: Path
    size: int = 0
    title: bytes = b""
    delimiter: str = ","
    cells: int = 0
    hash: hashlib._Hash = field(default_factory=hashlib.sha256)

    def rows(self) -> Iterator[tuple[list[bytes], bool, int]]:
        """Yield lists of whole rows, whether the last one lacks its line end, and the bytes read so far.

        Raises :class:`ScreeningError` for a file that is missing, locked or not a text of bytes.
        """
        rest, end, first = b"", 0, True
        with self._open() as file:
            while data := file.read(BLOCK):
                self.hash.update(data)
                end += len(data)
                if first:
                    data, first = self._start(data), False
                rest += data
                cut = rest.rfind(b"\n") + 1
                if not cut:
                    if len(rest) > 2 * BLOCK:
                        yield [rest], False, end
                        rest = b""
                    continue
                lines = _lines(rest[:cut])
                rows, held = _joined(lines, self.delimiter, self.cells, last=False)
                rest = (b"\n".join(held) + b"\n" if held else b"") + rest[cut:]
                yield rows, False, end
        if rest:
            rows, _ = _joined(_lines(rest), self.delimiter, self.cells, last=True)
            yield rows, not rest.endswith(b"\n"), end

    @property
    def digest(self) -> str:
        """The SHA-256 of what was read so far."""
        return self.hash.hexdigest()

    def _open(self) -> BinaryIO:
        try:
            self.size = self.path.stat().st_size
            return self.path.open("rb")
        except IsADirectoryError:
            problem = "is a folder; name the file of tests in it"
        except FileNotFoundError:
            problem = "there is no such file"
        except PermissionError:
            problem = "may not be read with your rights; ask for the right to read it or copy it"
        except OSError as error:
            problem = f"cannot be read ({error.strerror})"
        raise ScreeningError((f"{self.path}: {problem}.",))

    def _start(self, data: bytes) -> bytes:
        """Return the first block without its byte order mark, noting the sign between cells."""
        if data.startswith((codecs.BOM_UTF16_LE, codecs.BOM_UTF16_BE)):
            raise ScreeningError(
                (f"{self.path}: is written in UTF-16; allowed: UTF-8. Save it as CSV UTF-8.",)
            )
        if data.startswith(b"PK\x03\x04"):
            raise ScreeningError(
                (f"{self.path}: is a workbook or an archive; allowed: CSV. Save the sheet as CSV UTF-8.",)
            )
        data = data.removeprefix(codecs.BOM_UTF8)
        if b"\n" not in data and b"\r" in data:
            raise ScreeningError(
                (f"{self.path}: its lines end with a bare carriage return; allowed: LF or CR LF.",)
            )
        head = data.split(b"\n", 1)[0]
        self.delimiter = max(",;\t", key=lambda sign: head.count(sign.encode()))
        text = head.decode("utf-8", "replace")
        self.cells = len(next(csv.reader([text.rstrip("\r")], delimiter=self.delimiter), []))
        return data


def _lines(data: bytes) -> list[bytes]:
    if b"\r\n" in data:
        data = data.replace(b"\r\n", b"\n")
    lines = data.split(b"\n")
    if not lines[-1]:
        lines.pop()
    return lines


def _is_open(line: bytes, delimiter: str) -> bool:
    """Return whether ``line`` ends inside a quoted cell (a lone inch sign in a plain cell opens none)."""
    text = line.decode("latin-1")
    try:
        list(csv.reader([text], delimiter=delimiter, strict=True))
    except csv.Error as error:
        return "unexpected end" in str(error)
    return False


def _is_whole(row: bytes, delimiter: str, cells: int) -> bool:
    """Return whether lines joined make a row of its ``cells``: a stray quote must not swallow rows."""
    text = row.decode("utf-8", "replace")
    try:
        (found,) = csv.reader([text], delimiter=delimiter, strict=True)
    except (csv.Error, ValueError):
        return False
    return len(found) == cells


def _joined(
    lines: list[bytes], delimiter: str, cells: int, *, last: bool
) -> tuple[list[bytes], list[bytes]]:
    """Return rows, lines of one quoted cell joined, and the lines held back for the next block."""
    odd = [place for place, line in enumerate(lines) if b'"' in line and line.count(b'"') % 2]
    if not odd:
        return lines, []
    rows, done = [], 0
    for place in odd:
        if place < done or not _is_open(lines[place], delimiter):
            continue
        until = min(place + MOST_LINES, len(lines))
        close = next((one for one in range(place + 1, until) if lines[one].count(b'"') % 2), None)
        if close is None and until == len(lines) and not last:
            rows += lines[done:place]
            return rows, lines[place:]
        if close is not None:
            whole = b"\n".join(lines[place : close + 1])
            if _is_whole(whole, delimiter, cells):
                rows += [*lines[done:place], whole]
                done = close + 1
    return rows + lines[done:], []


def shown(row: bytes) -> str:
    """Return the text of a row for the rejects file, wrong bytes written out, cut where it is endless."""
    return row[:LONGEST_ROW].decode("utf-8", "backslashreplace")


def block_of(rows: list[bytes], start: int, cells: int, delimiter: str, end: int, cut_short: bool) -> Block:
    """Return ``rows``, the first of which has the number ``start``, sorted into good and bad ones."""
    sign = delimiter.encode()
    good: list[bytes] = []
    numbers: list[int] = []
    rejects: list[Reject] = []
    blank = 0
    ascii_only = b"".join(rows).isascii()
    for number, row in enumerate(rows, start):
        if row.count(sign) == cells - 1 and b'"' not in row and b"\0" not in row and len(row) < LONGEST_ROW:
            if ascii_only or _is_text(row):
                good.append(row)
                numbers.append(number)
                continue
        elif not row.strip():
            blank += 1
            continue
        reason = _reason(row, cells, delimiter, last=cut_short and number == start + len(rows) - 1)
        if reason:
            rejects.append(Reject(number, reason, shown(row)))
        else:
            good.append(row)
            numbers.append(number)
    last = start + len(rows) - 1
    short = last if cut_short and numbers and numbers[-1] == last else None
    return Block(good, numbers, rejects, len(rows) - blank, blank, end, short)


def _is_text(row: bytes) -> bool:
    try:
        row.decode("utf-8")
    except UnicodeDecodeError:
        return False
    return True


def _reason(row: bytes, cells: int, delimiter: str, *, last: bool) -> str:
    """Return why ``row`` cannot be split into its cells; empty where it can."""
    if len(row) >= LONGEST_ROW:
        return (
            f"the row has {len(row)} bytes; allowed: fewer than {LONGEST_ROW}; look for a missing line end"
        )
    try:
        text = row.decode("utf-8")
    except UnicodeDecodeError as error:
        return (
            f"byte 0x{row[error.start]:02X} at place {error.start + 1} is not UTF-8; "
            "save the file as CSV UTF-8 or correct this row"
        )
    if "\0" in text:
        return "holds a NUL byte: the file is damaged here; copy the row anew from its source"
    try:
        count = len(next(csv.reader([text], delimiter=delimiter, strict=True)))
    except csv.Error:
        return "a quote is opened and not closed, or text follows a closed quote; close it or double it"
    if count == cells:
        return ""
    if count < cells and last:
        return f"the last row is half written: {count} of {cells} cells; copy it anew from its source"
    return f"{count} cells where the heading has {cells}; quote cells that hold {delimiter!r}"
