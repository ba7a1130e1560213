"""Fittings: written, inferred from geometry, corrected for C and bore."""

from __future__ import annotations

from pathlib import Path

import pytest
from project_texts import HEAD, NETWORK, faults, read

from supplycheck.findings import Place
from supplycheck.model import Pipe, Project
from supplycheck.project import read_project
from supplycheck.project.faults import FaultList
from supplycheck.project.fittings import WrittenFitting, parse
from supplycheck.units import FOOT, US

GEOMETRY = HEAD + NETWORK + 'fittings = "from geometry"\n'
COLUMNS = "tag,x,y,elevation,kind,sprinkler,area\n"


def project_of(folder: Path, nodes: str, pipes: str) -> Project:
    return read(folder, GEOMETRY, COLUMNS + nodes, "from,to,length,kind,size,fittings\n" + pipes)


def charges(project: Project) -> dict[str, list[str]]:
    return {pipe.tag: [f.name for f in pipe.fittings] for pipe in project.system.pipes if pipe.fittings}


def pipe_of(project: Project, tag: str) -> Pipe:
    return next(pipe for pipe in project.system.pipes if pipe.tag == tag)


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("2 elbow 90; 1 tee", [WrittenFitting(2, "elbow 90"), WrittenFitting(1, "tee")]),
        ("tee", [WrittenFitting(1, "tee")]),
        ("3 × gate valve", [WrittenFitting(3, "gate valve")]),
        ("2x tee", [WrittenFitting(2, "tee")]),
        ("strainer = 20 ft", [WrittenFitting(1, "strainer", length=20 * FOOT)]),
        ("2 entrance: k = 0.5", [WrittenFitting(2, "entrance", minor_k=0.5)]),
        ("none", []),
        (" ; ", []),
    ],
)
def test_texts_of_fittings(text: str, expected: list[WrittenFitting]) -> None:
    faults = FaultList()
    found = parse(text, US, Place("f"), faults)
    assert not faults
    assert [(each.count, each.name, each.minor_k) for each in found] == [
        (each.count, each.name, each.minor_k) for each in expected
    ]
    for each, wanted in zip(found, expected, strict=True):
        assert each.length == pytest.approx(wanted.length)


@pytest.mark.parametrize("text", ["0 tee", "12", "2 ;3", "= 4 ft", "strainer = 4 psi", "strainer = -4 ft"])
def test_texts_that_are_no_fittings(text: str) -> None:
    faults = FaultList()
    parse(text, US, Place("f"), faults)
    assert faults


def test_corrections_of_the_annex_sample(tmp_path: Path) -> None:
    """NFPA 13 annex sample calculation (from memory): 21 ft in 3 in type M at C 150 become 27.6 ft."""
    text = (HEAD + NETWORK).replace('"steel schedule 40"', '"copper type M"')
    pipes = "from,to,length,kind,size,fittings\n001,002,10,lines,1,\n002,T,10,lines,1,\n"
    pipes += "T,S,50,lines,3,1 long elbow 90; 1 gate valve; 1 tee\n"
    pipe = pipe_of(read(tmp_path, text, pipes=pipes), "T-S")
    assert [fitting.table_length / FOOT for fitting in pipe.fittings] == pytest.approx([5, 1, 15])
    assert pipe.equivalent_length / FOOT == pytest.approx(27.6, abs=0.05)


def test_a_straight_pipe_is_charged_nothing(tmp_path: Path) -> None:
    project = project_of(
        tmp_path,
        "S,0,0,0,supply,,\nA,10,0,0,,,\nH,20,0,0,sprinkler,A,100\n",
        "S,A,10,lines,2,\nA,H,10,lines,1,\n",
    )
    assert charges(project) == {}


@pytest.mark.parametrize(
    ("x", "y", "z", "expected"),
    [
        (20, 0, 0, {}),
        (20, 3, 0, {}),  # 17°
        (20, 5, 0, {"A-H": ["elbow 45"]}),  # 27°
        (20, 10, 0, {"A-H": ["elbow 45"]}),
        (12, 10, 0, {"A-H": ["elbow 90"]}),  # 79°
        (10, 10, 0, {"A-H": ["elbow 90"]}),
        (10, 0, 10, {"A-H": ["elbow 90"]}),
        (10, 0, -10, {"A-H": ["elbow 90"]}),
        (10, 10, 10, {"A-H": ["elbow 90"]}),
    ],
)
def test_a_turn_is_an_elbow_of_the_smaller_pipe(
    tmp_path: Path, x: float, y: float, z: float, expected: dict[str, list[str]]
) -> None:
    nodes = f"S,0,0,0,supply,,\nA,10,0,0,,,\nH,{x},{y},{z},sprinkler,A,100\n"
    project = project_of(tmp_path, nodes, "S,A,10,lines,2,\nA,H,30,lines,1,\n")
    assert charges(project) == expected


def test_a_reducing_elbow_goes_to_the_smaller_pipe_on_either_side(tmp_path: Path) -> None:
    nodes = "S,0,0,0,supply,,\nA,10,0,0,,,\nH,10,10,0,sprinkler,A,100\n"
    assert charges(project_of(tmp_path, nodes, "S,A,10,lines,1,\nA,H,10,lines,2,\n")) == {
        "S-A": ["elbow 90"]
    }
    assert charges(project_of(tmp_path, nodes, "S,A,10,lines,2,\nA,H,10,lines,2,\n")) == {
        "A-H": ["elbow 90"]
    }


def test_the_leg_of_a_tee_is_charged_and_the_run_is_not(tmp_path: Path) -> None:
    nodes = "S,0,0,0,supply,,\nA,10,0,0,,,\nH,20,0,0,sprinkler,A,100\nK,10,10,0,sprinkler,A,100\n"
    pipes = "S,A,10,lines,2,\nA,H,10,lines,1,\nA,K,10,lines,1 1/4,\n"
    project = project_of(tmp_path, nodes, pipes)
    assert charges(project) == {"A-K": ["tee"]}
    fitting = pipe_of(project, "A-K").fittings[0]
    assert (fitting.origin, fitting.node) == ("inferred", "A")
    assert fitting.length / FOOT == pytest.approx(6)  # 1 1/4 in, C 120, schedule 40: as tabulated


def test_water_that_comes_up_the_leg_turns_both_ways(tmp_path: Path) -> None:
    nodes = "S,10,0,-10,supply,,\nA,10,0,0,,,\nH,20,0,0,sprinkler,A,100\nK,0,0,0,sprinkler,A,100\n"
    pipes = "S,A,10,lines,2,\nA,H,10,lines,1,\nA,K,10,lines,1 1/4,\n"
    assert charges(project_of(tmp_path, nodes, pipes)) == {"A-H": ["tee"], "A-K": ["tee"]}


def test_a_cross_is_charged_to_both_legs(tmp_path: Path) -> None:
    nodes = "S,0,0,0,supply,,\nA,10,0,0,,,\nH,20,0,0,sprinkler,A,99\n"
    nodes += "K,10,10,0,sprinkler,A,99\nL,10,-10,0,sprinkler,A,99\n"
    pipes = "S,A,10,lines,2,\nA,H,10,lines,1,\nA,K,10,lines,1,\nA,L,10,lines,1,\n"
    assert charges(project_of(tmp_path, nodes, pipes)) == {"A-K": ["tee"], "A-L": ["tee"]}


def test_a_head_on_a_line_counts_as_a_way_out(tmp_path: Path) -> None:
    nodes = "S,0,0,0,supply,,\nH,10,0,0,sprinkler,A,99\nK,20,0,0,sprinkler,A,99\nL,20,10,0,sprinkler,A,99\n"
    pipes = "S,H,10,lines,2,\nH,K,10,lines,1,\nK,L,10,lines,1,\n"
    assert charges(project_of(tmp_path, nodes, pipes)) == {"K-L": ["tee"]}


def test_legs_in_a_loop_do_not_depend_on_the_direction(tmp_path: Path) -> None:
    nodes = "S,-10,0,0,supply,,\nA,0,0,0,,,\nB,20,0,0,,,\nC,20,20,0,,,\nD,0,20,0,,,\nM,10,20,0,,,\n"
    nodes += "H,10,30,0,sprinkler,A,9\n"
    pipes = "S,A,10,lines,3,\nA,B,20,lines,2,\nB,C,20,lines,2,\nC,M,10,lines,2,\n"
    pipes += "M,D,10,lines,2,\nD,A,20,lines,2,\nM,H,10,lines,1,\n"
    found = charges(project_of(tmp_path, nodes, pipes))
    assert found["M-H"] == ["tee"]
    assert found["D-A"].count("tee") == 1  # water comes from S alone: the way that turns at A
    assert sum(names.count("tee") for names in found.values()) == 2
    assert sum(names.count("elbow 90") for names in found.values()) == 3  # B, C, D


def test_written_fittings_add_to_those_from_geometry(tmp_path: Path) -> None:
    nodes = "S,0,0,0,supply,,\nA,10,0,0,,,\nH,10,10,0,sprinkler,A,100\n"
    project = project_of(tmp_path, nodes, "S,A,10,lines,2,1 gate valve\nA,H,10,lines,2,\n")
    assert charges(project) == {"S-A": ["gate valve"], "A-H": ["elbow 90"]}


def test_inferred_fittings_are_listed(tmp_path: Path) -> None:
    nodes = "S,0,0,0,supply,,\nA,10,0,0,,,\nH,10,10,0,sprinkler,A,100\n"
    project = project_of(tmp_path, nodes, "S,A,10,lines,2,\nA,H,10,lines,2,\n")
    entry = next(each for each in project.assumptions if each.key == "fittings from geometry")
    assert (entry.value, entry.origin) == ("1 elbow 90", "inferred")


def test_geometry_needs_coordinates(tmp_path: Path) -> None:
    nodes = COLUMNS + "S,0,0,0,supply,,\nA,,,0,,,\nH,10,10,0,sprinkler,A,100\n"
    found = faults(tmp_path, GEOMETRY, nodes, "from,to,length,kind,size\nS,A,10,lines,2\nA,H,10,lines,2\n")
    assert len(found) == 1
    assert "direction of a pipe is not known" in found[0].problem


@pytest.mark.parametrize(
    ("written", "told"),
    [("1 alarm valve", ["alarm valve"]), ("1 alarm valve swing", []), ("1 mushroom check valve", [])],
)
def test_a_valve_without_its_type_is_an_assumption(tmp_path: Path, written: str, told: list[str]) -> None:
    """CEA 4001 table G2, same as EN 12845 table 23: DN 100 swinging type 5.07 m, mushroom type 25 m."""
    text = Path(__file__).parents[2].joinpath("examples", "office-floor", "project.toml").read_text("utf-8")
    assert "1 alarm valve" in text
    path = tmp_path / "project.toml"
    path.write_text(text.replace("1 alarm valve", written), encoding="utf-8")
    notes = [note for note in read_project(path).assumptions if note.key.startswith("fittings: ")]
    assert [note.key for note in notes] == [f"fittings: {name}" for name in told]
    assert all((note.value, note.origin) == ("swing type", "assumed") for note in notes)
