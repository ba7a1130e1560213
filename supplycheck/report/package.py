"""The files of the review package: made in memory, then written whole or not at all."""

from __future__ import annotations

import errno
import tempfile
from collections.abc import Mapping
from pathlib import Path
from typing import Final

from supplycheck.report.build import build_document
from supplycheck.report.html import html_text
from supplycheck.report.pdf import pdf_bytes
from supplycheck.results.json import result_json
from supplycheck.results.records import Result
from supplycheck.results.tables import csv_text, frames, xlsx_bytes

HTML: Final = "review.html"
"""The file of the package that is written only where it is asked for."""


def package_files(result: Result, *, html: bool = False) -> Mapping[str, bytes]:
    """Return name → content of every file of the review package; ``html`` adds the page for a browser."""
    tables = frames(result)
    document = build_document(result)
    return {
        "result.json": result_json(result).encode(),
        "review.pdf": pdf_bytes(document),
        **({HTML: html_text(document).encode()} if html else {}),
        "nodes.csv": csv_text(tables["nodes"]).encode(),
        "pipes.csv": csv_text(tables["pipes"]).encode(),
        "tables.xlsx": xlsx_bytes(tables, result.project.facts.date),
    }


def write_files(folder: Path, files: Mapping[str, bytes]) -> None:
    """Write ``files`` into ``folder``, making it if need be.

    All contents are first written beside their places and then moved there, so that a full disk or a lost
    right leaves the old files as they were. Raises :class:`OSError`.
    """
    folder.mkdir(parents=True, exist_ok=True)
    for name in files:
        if (folder / name).is_dir():
            raise IsADirectoryError(
                errno.EISDIR, f"{name} is a folder there; move it or choose another --out"
            )
    with tempfile.TemporaryDirectory(dir=folder, prefix=".unfinished-") as held:
        for name, content in files.items():
            (Path(held) / name).write_bytes(content)
        for name in files:
            (Path(held) / name).replace(folder / name)
