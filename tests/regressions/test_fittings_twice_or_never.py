"""Turns written beside those from geometry counted twice; a cross in a loop of mains never."""

from __future__ import annotations

from pathlib import Path

import pytest
from project_texts import TABLE_PROJECT, read, write

from supplycheck.check import check_project
from supplycheck.findings import Finding

FROM_GEOMETRY = TABLE_PROJECT.replace("[network]\n", '[network]\nfittings = "from geometry"\n')
NODES = """\
tag,x,y,elevation,kind,sprinkler,area,line
H1,20,0,10,sprinkler,A,100,1
H2,10,0,10,sprinkler,A,100,1
T,0,0,10,,,,
H3,0,10,10,sprinkler,A,100,2
R,0,-10,10,,,,
S,0,-10,0,supply,,,
"""
PIPES = """\
tag,from,to,length,kind,size,fittings
P1,H2,H1,10,lines,1,{end}
P2,T,H2,10,lines,1 1/4,{line}
P3,T,H3,10,lines,1,
P4,R,T,10,lines,2 1/2,{main}
P5,S,R,{length},lines,2,{riser}
"""
PLAIN = {"end": "", "line": "", "riser": "", "main": "", "length": "10"}
TWICE = "fitting charged twice"
TEES = "tee where flow turns"


def found_in(folder: Path, rule: str, text: str, nodes: str, pipes: str) -> Finding:
    result = check_project(write(folder, text, nodes, pipes))
    return next(one for one in result.findings if one.check == rule)


@pytest.mark.parametrize(
    ("changes", "state", "tag", "says"),
    [
        ({}, "not applicable", "", ""),
        ({"riser": "1 gate valve"}, "ok", "", ""),
        ({"end": "1 tee"}, "not applicable", "", ""),
        ({"line": "1 tee"}, "ask authority", "P2", "tee as written; geometry charges it 1 tee at T"),
        ({"line": "1 cross"}, "ask authority", "P2", "tee as written; geometry charges it 1 tee at T"),
        ({"line": "1 elbow 90"}, "ok", "", ""),
        (
            {"riser": "1 elbow 90"},
            "ask authority",
            "P5",
            "elbow 90 as written; geometry charges it 1 elbow 90 at R.",
        ),
        ({"riser": "2 long elbow 90; 1 gate valve"}, "ask authority", "P5", "2 long elbow 90 as written"),
        ({"riser": "2 elbow 90", "length": "15"}, "ok", "", ""),
        ({"main": "1 elbow 90"}, "not applicable", "", ""),
        ({"main": "1 tee"}, "not applicable", "", ""),
        ({"riser": "flanged elbow = 4 ft"}, "ask authority", "P5", "1 flanged elbow as written"),
    ],
)
def test_a_turn_that_is_written_and_inferred(
    tmp_path: Path, changes: dict[str, str], state: str, tag: str, says: str
) -> None:
    """Of two branches of T, P2 turns and P3 runs on from P4; R is an elbow of the riser, the
    smaller pipe.

    A pipe that is longer than its ends are apart has turns of its own.
    """
    found = found_in(tmp_path, TWICE, FROM_GEOMETRY, NODES, PIPES.format(**PLAIN | changes))
    assert found.state == state
    assert found.tags == ((tag,) if tag else ())
    assert says in found.text
    if tag:
        assert "column fittings" in found.remedy and tag in found.text


def test_as_written_nothing_is_twice(tmp_path: Path) -> None:
    pipes = PIPES.format(**PLAIN | {"line": "1 tee", "riser": "1 elbow 90"})
    assert found_in(tmp_path, TWICE, TABLE_PROJECT, NODES, pipes).state == "not applicable"


MAINS = TABLE_PROJECT.replace('"ordinary hazard group 1"', '"none"\nduration = 60')
MAINS = MAINS.replace("[sprinkler.A]\nk_factor = 5.6\nminimum_pressure = 7\n", "")
MAINS_GEOMETRY = MAINS.replace("[network]\n", '[network]\nfittings = "from geometry"\n')


def street_grid(cross: str = "6") -> tuple[str, str]:
    """Nine crossings of streets 100 ft apart, fed at a corner; pipes of the middle street are ``cross``."""
    flows = {(2, 2): "500", (1, 2): "250"}
    nodes = ["tag,x,y,elevation,kind,flow", "S,-100,0,0,supply,"]
    pipes = ["tag,from,to,length,kind,size,fittings", "U,S,00,100,lines,8,"]
    for i in range(3):
        for j in range(3):
            flow = flows.get((i, j), "")
            nodes.append(f"{i}{j},{100 * i},{100 * j},0,{'hydrant' if flow else ''},{flow}")
            if i < 2:
                size = cross if j == 1 else "6"
                pipes.append(f"E{i}{j},{i}{j},{i + 1}{j},100,lines,{size},")
            if j < 2:
                pipes.append(f"N{i}{j},{i}{j},{i}{j + 1},100,lines,6,")
    return "\n".join(nodes) + "\n", "\n".join(pipes) + "\n"


def test_mains_that_cross_are_charged_where_the_flow_turns(tmp_path: Path) -> None:
    found = found_in(tmp_path, TEES, MAINS_GEOMETRY, *street_grid())
    assert found.state == "ok", found.text


@pytest.mark.parametrize(("cross", "charged"), [("4", {"E01", "E11"}), ("8", {"N10", "N11"})])
def test_the_smaller_run_of_a_cross_is_charged(tmp_path: Path, cross: str, charged: set[str]) -> None:
    """At node 11 four pipes cross; water turns from one run into the other, which is charged its tees."""
    project = read(tmp_path, MAINS_GEOMETRY, *street_grid(cross))
    at = {pipe.tag for pipe in project.system.pipes for one in pipe.fittings if one.node == "11"}
    assert at == charged


def test_of_two_branches_nearly_straight_on_one_is_charged(tmp_path: Path) -> None:
    """A fork of 40°: neither branch turns by 22.5°, but only one can be the run."""
    nodes = "tag,x,y,elevation,kind,flow\nS,-100,0,0,supply,\nF,0,0,0,,\nA,94,30,0,hydrant,250\n"
    nodes += "B,94,-34.2,0,hydrant,250\n"
    pipes = "tag,from,to,length,kind,size\nP,S,F,100,lines,8\nPA,F,A,99,lines,6\nPB,F,B,100.1,lines,6\n"
    assert found_in(tmp_path, TEES, MAINS_GEOMETRY, nodes, pipes).state == "ok"
    project = read(tmp_path, MAINS_GEOMETRY, nodes, pipes)
    assert [pipe.tag for pipe in project.system.pipes if pipe.fittings] == ["PB"]


def test_mains_without_any_fitting_are_asked_about(tmp_path: Path) -> None:
    """In mains of a utility the fittings are often part of the C-factor; nobody knows but who chose it."""
    nodes, pipes = street_grid()
    found = found_in(tmp_path, TEES, MAINS, nodes, pipes)
    assert found.state == "ask authority"
    assert "no fitting is charged" in found.text.casefold() and "C-factor" in found.remedy
    assert "nipple" not in found.remedy
    one = found_in(
        tmp_path, TEES, MAINS, nodes, pipes.replace("U,S,00,100,lines,8,", "U,S,00,100,lines,8,1 tee")
    )
    assert one.state == "fail" and "nipple" not in one.remedy and "from geometry" in one.remedy
