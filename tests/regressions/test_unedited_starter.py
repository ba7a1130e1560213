"""The starter's invented site, authority, people, test and dates were once printed as facts."""

from __future__ import annotations

import json
import re
from pathlib import Path
from typing import Any

import pytest
from click.testing import CliRunner

from supplycheck.check import check_project
from supplycheck.cli import main
from supplycheck.findings import Finding
from supplycheck.project import read_project
from supplycheck.project.starter import MARK, key_lines, starter_text
from supplycheck.report.build import build_document
from supplycheck.report.html import html_text
from supplycheck.results.display import finding_text
from supplycheck.units import US

EXAMPLES = Path(__file__).parents[2] / "examples"
CHECK = "values of the starter"
OWN_TEST = {
    "static = 58 ": "static = 71 ",
    "residual = 48\n": "residual = 55\n",
    "date = 2026-06-01": "date = 2026-08-14",
    "pitot = 30": "pitot = 24",
}


def edited(folder: Path, changes: dict[str, str]) -> Path:
    text = starter_text()
    for old, new in changes.items():
        assert text.count(old) == 1, old
        text = text.replace(old, new)
    folder.mkdir(exist_ok=True)
    (folder / "project.toml").write_text(text, encoding="utf-8")
    return folder


def told(folder: Path) -> tuple[Finding, str]:
    result = check_project(folder)
    finding = next(one for one in result.findings if one.check == CHECK)
    return finding, finding_text(finding, US)


def line(folder: Path, start: str) -> int:
    lines = (folder / "project.toml").read_text(encoding="utf-8").splitlines()
    found = [number for number, text in enumerate(lines, start=1) if text.startswith(start)]
    assert len(found) == 1, (start, found)
    return found[0]


def replaced() -> dict[str, str]:
    """Return the change of every marked text into one of the user's own."""
    return {f'"{text}"': '"own"' for text in re.findall(rf'= "({MARK}[^"]*)"', starter_text())}


def test_the_starter_runs_and_says_what_it_is_on_every_page(tmp_path: Path) -> None:
    folder = tmp_path / "new"
    made = CliRunner().invoke(main, ["new", str(folder)])
    assert made.exit_code == 0 and "invented" in made.output and MARK in made.output
    printed = CliRunner().invoke(main, ["check", str(folder)])
    assert printed.exit_code == 0
    assert printed.output.startswith(f"{MARK}: unedited starter, every figure is invented")
    first = next(text for text in printed.output.splitlines() if text.startswith("Open"))
    assert "starter" in first
    answer = json.loads((folder / "review" / "result.json").read_text(encoding="utf-8"))
    assert "starter" in answer["open_questions"][0]
    finding, text = told(folder)
    assert finding.state == "missing"
    assert text.startswith("Not run: this is the unedited starter: ") and "invented" in text
    for key, start in (
        ("project.title", 'title = "REPLACE'),
        ("project.site", "site = "),
        ("project.date", "date = 2026-11-20"),
        ("device.backflow.curve", "curve = "),
        ("layout", "[layout]"),
        ("supply.submittal_date", "submittal_date"),
        ("supply.flow_test.static", "static = "),
        ("supply.flow_test.residual", "residual = "),
        ("supply.flow_test.date", "date = 2026-06-01"),
        ("supply.flow_test.outlets[1].pitot", "pitot = "),
        ("supply.margin.source", 'source = "REPLACE: authority'),
    ):
        assert f"{key} (line {line(folder, start)})" in finding.remedy


def test_the_starter_names_nobody(tmp_path: Path) -> None:
    """Who reviews, who tested and on which main are facts; nothing stands where nobody has given them."""
    project = read_project(edited(tmp_path / "p", {}))
    test = project.supply.tests[0]
    for name in (project.facts.authority, project.facts.designer, project.facts.owner):
        assert name == ""
    assert (test.conducted_by, test.witnessed_by, test.main) == ("", "", "")
    page = html_text(build_document(check_project(tmp_path / "p")))
    for word in ("Street and town", "Water company", "Authority having jurisdiction"):
        assert word not in page


@pytest.mark.parametrize("ending", ["Depot", "Depot 2"])
def test_a_test_of_the_starter_under_a_title_of_ones_own_is_a_failure(tmp_path: Path, ending: str) -> None:
    changes = dict.fromkeys(replaced(), f'"{ending}"') | {"lines = 6": "lines = 5"}
    finding, text = told(edited(tmp_path / "p", changes))
    assert finding.state == "fail"
    assert "nobody's test" in text
    assert "supply.flow_test.static (line " in finding.remedy and "layout (" not in finding.remedy


def test_a_text_left_beside_a_test_of_ones_own_is_missing(tmp_path: Path) -> None:
    changes = replaced() | OWN_TEST | {"lines = 6": "lines = 5", "[150, 3.0]": "[150, 3.2]"}
    changes |= {
        "date = 2026-11-20": "date = 2026-11-21",
        "submittal_date = 2026-11-27": "submittal_date = 2026-11-28",
    }
    finding, text = told(edited(tmp_path / "whole", changes))
    assert (finding.state, text) == ("ok", "Nothing of the starter is left.")
    del changes['"REPLACE: street and town"']
    folder = edited(tmp_path / "one", changes)
    finding, text = told(folder)
    assert finding.state == "missing"
    assert text == "Not run: texts of the starter that are not replaced yet: 1."
    assert finding.remedy.endswith(f": project.site (line {line(folder, 'site')})?")


def test_one_reading_that_agrees_is_chance_and_two_are_not(tmp_path: Path) -> None:
    changes = replaced() | OWN_TEST | {"lines = 6": "lines = 5", "[150, 3.0]": "[150, 3.2]"}
    del changes["static = 58 "]
    assert told(edited(tmp_path / "chance", changes))[0].state == "ok"
    del changes["pitot = 30"]
    finding, _ = told(edited(tmp_path / "left", changes))
    assert finding.state == "fail"
    assert "supply.flow_test.static" in finding.remedy and "outlets[1].pitot" in finding.remedy
    assert "residual" not in finding.remedy


@pytest.mark.parametrize("path", sorted(EXAMPLES.glob("*/project.toml")), ids=lambda path: path.parent.name)
def test_no_example_is_taken_for_the_starter(path: Path) -> None:
    assert read_project(path).unedited == ()


def test_every_marked_text_says_what_belongs_there() -> None:
    texts: list[str] = re.findall(rf'"({MARK}[^"]*)"', starter_text())
    assert len(texts) == 5
    assert all(re.fullmatch(rf"{MARK}: \w.{{8,}}", text) for text in texts)


KEYS: tuple[tuple[str, dict[str, Any]], ...] = (
    ('a = """\nb = 1\n"""\nc = 2\n', {"a": 1, "c": 4}),
    ("[[t]]\nx = 1\n[t.u]\ny = 2\n[[t]]\n[t.u]\ny = 3\n", {"t[1].u.y": 4, "t[2].u.y": 7}),
    ('[device."a b"]\ncurve = [\n  [0, 1],\n]\n', {"device.a b.curve": 2}),
)


@pytest.mark.parametrize("text, wanted", KEYS)
def test_lines_of_keys(text: str, wanted: dict[str, int]) -> None:
    found = key_lines(text)
    assert {key: found.get(key) for key in wanted} == wanted
    assert "b" not in found
