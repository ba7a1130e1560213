"""Heads with coordinates but without lines: rules on spacing were not run, though lines were inferred."""

from __future__ import annotations

import csv
import io
import shutil
from pathlib import Path

import pytest
from project_texts import HEAD, NETWORK, write

from supplycheck.check import check_project
from supplycheck.checks.area import SHAPE
from supplycheck.findings import Finding
from supplycheck.project import read_project
from supplycheck.results.records import Result

EXAMPLES = Path(__file__).parents[2] / "examples"
RULES = ("spacing of the class", "heads too close", "area per head")
NOTE = "Lines are inferred from pipes and coordinates."
TEXT = HEAD + NETWORK
NODES = """\
tag,x,y,elevation,kind,sprinkler,area
A1,10,0,10,sprinkler,A,120
A2,20,0,10,sprinkler,A,120
A3,30,0,10,sprinkler,A,120
B1,10,12,10,sprinkler,A,120
B2,20,12,10,sprinkler,A,120
B3,30,12,10,sprinkler,A,120
T,0,0,10,,,
U,0,12,10,,,
S,0,-20,0,supply,,
"""
PIPES = """\
from,to,length,kind,size,fittings
T,A1,10,lines,1 1/2,1 tee
A1,A2,10,lines,1 1/4,
A2,A3,10,lines,1,
U,B1,10,lines,1 1/2,1 elbow 90
B1,B2,10,lines,1 1/4,
B2,B3,10,lines,1,
T,U,12,lines,2,
S,T,30,lines,2 1/2,
"""


def told(result: Result) -> dict[str, Finding]:
    wanted = (*RULES, SHAPE.name)
    return {one.check: one for one in result.findings if one.check in wanted}


def without_lines(folder: Path, name: str) -> Result:
    shutil.copytree(EXAMPLES / name, folder, ignore=shutil.ignore_patterns("review"))
    path = folder / "nodes.csv"
    rows = list(csv.DictReader(io.StringIO(path.read_text(encoding="utf-8-sig"))))
    column = next(key for key in rows[0] if key.casefold() == "line")
    lines = [",".join(key for key in rows[0] if key != column)]
    lines += [",".join(cell for key, cell in row.items() if key != column) for row in rows]
    path.write_text("\n".join(lines) + "\n", encoding="utf-8")
    return check_project(folder)


@pytest.mark.parametrize("name", ["looped-workshop", "two-supply-campus", "spreadsheet-store"])
def test_rules_on_spacing_find_the_same_without_the_column(tmp_path: Path, name: str) -> None:
    plain, given = told(without_lines(tmp_path / name, name)), told(check_project(EXAMPLES / name))
    assert set(plain) == set(given) and len(plain) == 4
    for rule, finding in plain.items():
        assert (finding.state, finding.measured, finding.limit) == (
            given[rule].state,
            given[rule].measured,
            given[rule].limit,
        )
        if finding.state in ("ok", "fail"):
            assert NOTE in finding.text and NOTE not in given[rule].text


def test_the_inference_is_listed(tmp_path: Path) -> None:
    without_lines(tmp_path / "campus", "two-supply-campus")
    notes = [
        one for one in read_project(tmp_path / "campus").assumptions if one.key == "network.nodes.line"
    ]
    assert [(one.origin, one.value) for one in notes] == [("inferred", "branch lines of 40 sprinklers")]
    given = read_project(EXAMPLES / "two-supply-campus")
    assert not [one for one in given.assumptions if one.key == "network.nodes.line"]


def test_spacing_by_hand(tmp_path: Path) -> None:
    """10 ft along the lines, 12 ft between them; 10 × 12 = 120 ft² a head."""
    found = told(check_project(write(tmp_path, TEXT, NODES, PIPES)))
    foot = 0.3048
    spacing, close, area = (found[rule] for rule in RULES)
    assert spacing.measured is not None and spacing.measured.value == pytest.approx(12 * foot)
    assert "line A1–A3 and line B1–B3" in spacing.text
    assert close.measured is not None and close.measured.value == pytest.approx(10 * foot)
    assert area.limit is not None and area.limit.value == pytest.approx(120 * foot**2)
    assert {one.state for one in (spacing, close, area)} == {"ok"}


def test_spacing_that_is_too_wide_fails_by_inferred_lines(tmp_path: Path) -> None:
    """15 ft is the limit of ordinary hazard (NFPA 13, from memory)."""
    nodes = NODES.replace(",12,10", ",16,10")
    found = told(check_project(write(tmp_path, TEXT, nodes, PIPES.replace("T,U,12", "T,U,16"))))
    assert found[RULES[0]].state == "fail" and NOTE in found[RULES[0]].text


def test_heads_without_coordinates_are_named(tmp_path: Path) -> None:
    text = TEXT.replace(
        'system = "wet"', 'system = "wet"\ndesign_area = ["A1", "A2", "A3", "B1", "B2", "B3"]'
    )
    nodes = NODES.replace("A2,20,0", "A2,,").replace("B3,30,12", "B3,,")
    for finding in told(check_project(write(tmp_path, text, nodes, PIPES))).values():
        assert finding.state == "missing"
        assert "A2, B3" in finding.text and "x and y" in finding.remedy


def test_where_no_line_can_be_told_the_column_is_asked_for(tmp_path: Path) -> None:
    """Each head on its own stub from the main: nothing says which of them make a line."""
    nodes = "tag,x,y,elevation,kind,sprinkler,area\nS,0,-20,0,supply,,\nT0,0,0,10,,,\n"
    pipes = "from,to,length,kind,size,fittings,role\nS,T0,30,lines,3,,riser\n"
    for n in range(1, 5):
        nodes += f"T{n},0,{10 * n},10,,,\nH{n},8,{10 * n},10,sprinkler,A,120\n"
        pipes += f"T{n - 1},T{n},10,lines,2,,cross main\nT{n},H{n},8,lines,1,1 tee,branch line\n"
    for finding in told(check_project(write(tmp_path, TEXT, nodes, pipes))).values():
        assert finding.state == "missing"
        assert "could be inferred" in finding.text
        assert "line" in finding.remedy and "H1, H2, H3, H4" in finding.remedy


def test_a_head_on_no_line_is_named(tmp_path: Path) -> None:
    nodes = NODES + "Z,-8,12,10,sprinkler,A,120\n"
    pipes = PIPES.replace("U,B1,10,lines,1 1/2,1 elbow 90", "U,B1,10,lines,1 1/2,1 tee")
    lone = nodes.replace("Z,-8,12", "Z,0,20")
    pipes += "U,Z,8,lines,1,1 tee\n"
    found = told(check_project(write(tmp_path, TEXT, lone, pipes)))
    assert "Z is on none" in found[RULES[0]].text
