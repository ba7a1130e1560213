"""Files of tests for the tests, and the files of the answer read back."""

from __future__ import annotations

import csv
import json
from pathlib import Path
from typing import Any

from click.testing import CliRunner, Result

from supplycheck.cli import main

HEAD = "hydrant,date,static,residual,diameter,coefficient,pitot"
# Training slides: static 80, residual 47, pitot 14, c 0.90, 2½ in.
SLIDE = "H-1,2026-06-01,80,47,2.5,0.90,14"


def run(*arguments: str) -> Result:
    return CliRunner().invoke(main, ["hydrants", *arguments], catch_exceptions=False)


def screened(folder: Path, text: str | bytes, *options: str) -> tuple[Result, list[dict[str, str]]]:
    """Screen ``text`` with day and units given; return what was printed and the rows of the results."""
    tests = folder / "tests.csv"
    tests.write_bytes(text.encode() if isinstance(text, str) else text)
    units = () if "--units" in options else ("--units", "us")
    usual = ("--as-of", "2026-11-20", "--no-pdf", "--out", str(folder / "out"))
    result = run(str(tests), *units, *usual, *options)
    return result, rows(folder / "out" / "results.csv")


def rows(path: Path) -> list[dict[str, str]]:
    if not path.exists():
        return []
    with path.open(encoding="utf-8", newline="") as file:
        return list(csv.DictReader(file, strict=True))


def rejects(folder: Path) -> dict[int, str]:
    """Return the reason by row number, as written to the rejects file."""
    return {int(row["row"]): row["reason"] for row in rows(folder / "out" / "rejects.csv")}


def summary(*arguments: str) -> dict[str, Any]:
    return dict(json.loads(run(*arguments, "--json").output))
