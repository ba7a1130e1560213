"""A tank that was empty before the duration was over once left the verdict "adequate"."""

from __future__ import annotations

import re
import shutil
from pathlib import Path

from supplycheck.check import check_project

EXAMPLE = Path(__file__).parents[2] / "examples" / "tank-and-pump"


def test_a_tank_too_small_is_not_adequate(tmp_path: Path) -> None:
    folder = tmp_path / "tank"
    shutil.copytree(EXAMPLE, folder, ignore=shutil.ignore_patterns("review"))
    path = folder / "project.toml"
    text = path.read_text(encoding="utf-8")
    path.write_text(re.sub(r"(?m)^volume = .*$", "volume = 5", text), encoding="utf-8")
    result = check_project(path)
    assert result.margin.after_rule is not None and result.margin.after_rule > 0
    assert result.verdict == "not adequate"
    assert "does not last" in result.verdict_text


def test_a_fail_stands_beside_an_adequate_supply(tmp_path: Path) -> None:
    folder = tmp_path / "depot"
    shutil.copytree(EXAMPLE.parent / "parcel-depot", folder, ignore=shutil.ignore_patterns("review"))
    path = folder / "project.toml"
    text = path.read_text(encoding="utf-8")
    path.write_text(text.replace('design_area = "search"', 'design_area = ["L1.1"]'), encoding="utf-8")
    result = check_project(path)
    assert result.verdict == "adequate"
    assert "outside a limit" in result.verdict_text
