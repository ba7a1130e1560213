"""The search on systems that the layout generator makes from the starter project."""

from __future__ import annotations

from pathlib import Path

import pytest

from supplycheck import project as project_package
from supplycheck.demand import demand_cases
from supplycheck.demand.heads import all_heads
from supplycheck.demand.lines import find_lines
from supplycheck.model import Project
from supplycheck.project import read_project

STARTER = Path(project_package.__file__).with_name("starter.toml")


def variant(folder: Path, **changes: str) -> Project:
    """The starter with some keys of its [layout] rewritten."""
    text = STARTER.read_text(encoding="utf-8")
    for key, value in changes.items():
        lines = [line for line in text.splitlines() if line.split("=")[0].strip() == key]
        assert len(lines) == 1, key
        text = text.replace(lines[0], f"{key} = {value}")
    path = folder / "project.toml"
    path.write_text(text, encoding="utf-8")
    return read_project(path)


def found(project: Project):
    return find_lines(all_heads(project), project.system)


def test_starter_both_sides_of_the_main(tmp_path: Path) -> None:
    # Six lines, four heads a side at 10.5 ft. 1500/126 = 11.9: twelve heads; 46.5/10.5 = 4.4: five along.
    project = variant(tmp_path)
    lines = found(project)
    assert sorted(len(line) for line in lines.sides) == [4] * 12
    assert sorted(len(line) for line in lines.joined) == [8] * 6
    candidates = demand_cases(project)
    # each side is one head short of five: three whole lines of one side, or 5 + 5 + 2 across the main
    one_side = [case for case in candidates.cases if (case.lines, case.along_line) == (3, 4)]
    across = [case for case in candidates.cases if (case.lines, case.along_line) == (3, 5)]
    assert len(one_side) == 2 * 4
    assert len(across) == 4 * 4 * 4 * 2  # window × lines × place of the two left over × outer line
    assert len(candidates.cases) == len(one_side) + len(across)


def test_a_long_side_keeps_to_itself(tmp_path: Path) -> None:
    project = variant(tmp_path, heads="[6, 7]")
    candidates = demand_cases(project)
    # five along, then five, then two in four places on either outer line
    assert len(candidates.cases) == (2 + 3) * 4 * 4 * 2


FAR = 'far_main = { pipe = "mains", size = "3", distance = 60 }'
NIPPLE = '{ pipe = "lines", size = "2", length = 1 }\n'
POSITIONS = (
    5 * 4 * 4 * 2
)  # of five heads on nine × of three lines among six × of the two left over × outer line


@pytest.mark.parametrize(("kind", "lines"), [("tree", 6), ("loop", 12), ("grid", 6)])
def test_nine_heads_a_line_whatever_feeds_them(tmp_path: Path, kind: str, lines: int) -> None:
    changes = {"type": f'"{kind}"', "heads": "[9, 0]"}
    if kind == "grid":
        changes["branch"] = '{ pipe = "lines", sizes = ["1 1/2"], elevation = 15 }'
    if kind != "tree":
        changes["riser_nipple"] = NIPPLE + (FAR if kind == "loop" else FAR.replace(", distance = 60", ""))
    project = variant(tmp_path, **changes)
    assert sorted(len(line) for line in found(project).sides) == [9] * lines
    assert len(demand_cases(project).cases) == POSITIONS * lines // 6


def test_short_lines_that_meet_end_to_end_inside_a_loop(tmp_path: Path) -> None:
    # Three heads inward from either main; five are asked along the line: they lie over both dead ends.
    distance = 5.25 * 2 + 10.5 * 5
    far = FAR.replace("60", f"{distance}")
    branch = '{ pipe = "lines", sizes = ["1", "1 1/4", "1 1/2"], elevation = 15 }'
    project = variant(tmp_path, type='"loop"', heads="[0, 3]", branch=branch, riser_nipple=NIPPLE + far)
    lines = found(project)
    assert sorted(len(line) for line in lines.sides) == [3] * 12
    assert {(len(line), line.joint) for line in lines.joined} == {(6, "end to end")}
    middle = frozenset(
        f"{main}L{line}.{j}" for line in (1, 2) for main, js in (("", (1, 2, 3)), ("F", (1, 2))) for j in js
    )
    assert any(middle <= frozenset(case.heads) for case in demand_cases(project).cases)
