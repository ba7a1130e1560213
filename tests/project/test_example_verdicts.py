"""Each example answers what its first lines say it does."""

from __future__ import annotations

from pathlib import Path

import pytest

from supplycheck.check import check_project

ROOT = Path(__file__).parents[2]
ADEQUATE = (
    "boosted-warehouse",
    "gridded-cold-store",
    "looped-workshop",
    "office-floor",
    "parcel-depot",
    "spreadsheet-store",
    "tank-and-pump",
    "tower-standpipe",
    "two-supply-campus",
    "yard-main",
)


@pytest.mark.parametrize("name", ADEQUATE)
def test_the_supply_is_adequate(name: str) -> None:
    result = check_project(ROOT / "examples" / name)
    assert result.verdict == "adequate"
    assert not [finding for finding in result.findings if finding.state == "fail"]


def test_the_workshop_falls_short() -> None:
    result = check_project(ROOT / "examples" / "short-workshop")
    assert result.verdict == "not adequate"
    assert result.margin.pressure < 0


def test_the_starter_passes_as_it_stands(tmp_path: Path) -> None:
    text = (ROOT / "supplycheck" / "project" / "starter.toml").read_text(encoding="utf-8")
    (tmp_path / "project.toml").write_text(text, encoding="utf-8")
    result = check_project(tmp_path)
    assert result.verdict == "adequate"
    assert not [finding for finding in result.findings if finding.state == "fail"]
