"""A margin typed as a fraction passed in silence, a reversed pipe got another's name."""

from __future__ import annotations

import re
import shutil
from pathlib import Path

import pytest

from supplycheck.project import ProjectFaultsError, read_project

DEPOT = Path(__file__).parents[2] / "examples" / "parcel-depot"


def faults_of(tmp_path: Path, old: str, new: str) -> str:
    folder = tmp_path / "depot"
    shutil.copytree(DEPOT, folder, ignore=shutil.ignore_patterns("review"))
    path = folder / "project.toml"
    text, count = re.subn(old, new, path.read_text(encoding="utf-8"), flags=re.MULTILINE)
    assert count == 1
    path.write_text(text, encoding="utf-8")
    with pytest.raises(ProjectFaultsError) as caught:
        read_project(path)
    return "\n".join(map(str, caught.value.faults))


def test_per_cent_typed_as_a_fraction(tmp_path: Path) -> None:
    rule = 'rule = "percent"\npercent = 0.10\nreading = "static lowered"'
    text = faults_of(tmp_path, r'^rule = "fixed".*\n(?:#.*\n)*pressure = .*$', rule)
    assert "supply.margin.percent" in text and "write 10" in text


def test_a_pipe_named_the_wrong_way_round(tmp_path: Path) -> None:
    scenario = '[[scenario]]\nname = "x"\nclosed_pipes = ["M2-M3"]\n[hose]'
    text = faults_of(tmp_path, r"^\[supply\.margin\]", scenario.replace("[hose]", "[supply.margin]"))
    assert "did you mean M3-M2?" in text
