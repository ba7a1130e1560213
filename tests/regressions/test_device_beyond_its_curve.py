"""A flow beyond the curve of a device once left the verdict "adequate"; its loss there is not known."""

from __future__ import annotations

import shutil
from pathlib import Path

import pytest

from supplycheck.check import check_project

EXAMPLE = Path(__file__).parents[2] / "examples" / "parcel-depot"


@pytest.mark.parametrize("last", [100, 900])
def test_verdict_is_undetermined_beyond_the_curve(tmp_path: Path, last: int) -> None:
    folder = tmp_path / "depot"
    shutil.copytree(EXAMPLE, folder, ignore=shutil.ignore_patterns("review"))
    path = folder / "project.toml"
    text = path.read_text(encoding="utf-8")
    start = text.index("curve = ")
    line = text[start : text.index("\n", start)]
    path.write_text(text.replace(line, f"curve = [[0, 2], [{last}, 4]]"), encoding="utf-8")
    result = check_project(path)
    assert result.verdict == ("undetermined" if last == 100 else "adequate")
    assert ("beyond its loss curve" in result.verdict_text) == (last == 100)
