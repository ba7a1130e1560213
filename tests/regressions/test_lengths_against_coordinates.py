"""A length of pipe in the wrong unit, or off by a decimal place, passed where coordinates belied it."""

from __future__ import annotations

from pathlib import Path

import pytest
from project_texts import HEAD, NETWORK, faults, write

from supplycheck.check import check_project
from supplycheck.findings import Fault, Finding
from supplycheck.project import ProjectFaultsError

RULE = "length against distance"
TEXT = HEAD + NETWORK
NODES = """\
tag,x,y,elevation,kind,sprinkler,area,line
H1,30.5,0,10.25,sprinkler,A,100,1
H2,20.5,0,10.25,sprinkler,A,100,1
H3,10.5,0,10.25,sprinkler,A,100,1
T,0,0,10.25,,,,
R,0,-12,10.25,,,,
S,0,-40,0,supply,,,
"""
PIPES = """\
tag,from,to,length,kind,size,fittings,role
P1,H2,H1,{end},lines,1,,{role}
P2,H3,H2,10.0,lines,1 1/4,,{role}
P3,T,H3,10.5,lines,1 1/2,1 tee,{role}
M,R,T,{main},lines,2,1 tee,cross main
F,S,R,{feed},lines,2,1 elbow 90,{way}
"""
SOUND = {"end": "10.0", "main": "12.0", "feed": "30", "role": "branch line", "way": "feed main"}


def only(found: list[Fault]) -> Fault:
    assert len(found) == 1, "\n".join(map(str, found))
    return found[0]


def shortened(folder: Path, nodes: str = NODES, text: str = TEXT, **changes: str) -> list[Fault]:
    return faults(folder, text, nodes, PIPES.format(**SOUND | changes))


def found_in(folder: Path, **changes: str) -> Finding:
    result = check_project(write(folder, TEXT, NODES, PIPES.format(**SOUND | changes)))
    return next(one for one in result.findings if one.check == RULE)


@pytest.mark.parametrize(
    ("length", "hint"),
    [
        ("3.05", "0.305 times as long: the length in metres, the coordinates in feet?"),
        ("1.00", "0.1 times as long: a slip of the decimal point?"),
        ("0.1", "0.01 times as long: a slip of the decimal point?"),
        ("0.83", "0.083 times as long: the length in feet, the coordinates in inches?"),
        ("9.5", "0.95 times as long"),
        ("9.8", "0.98 times as long"),
    ],
)
def test_a_pipe_shorter_than_its_ends_are_apart(tmp_path: Path, length: str, hint: str) -> None:
    """10 ft are 3.048 m and 120 in (exact); nothing is shorter than the straight line."""
    fault = only(shortened(tmp_path, end=length))
    assert (fault.place.file, fault.place.where) == ("pipes.csv", "row 2, column length")
    assert fault.problem == "is shorter than the distance between its ends"
    assert f"{float(length):.2f} ft" in fault.found and "H2 and H1 are 10.00 ft apart" in fault.found
    assert hint in fault.found
    assert "empty" in fault.allowed


def test_metres_throughout_a_table_are_told_once(tmp_path: Path) -> None:
    pipes = PIPES.format(**SOUND | {"end": "3.05", "main": "3.66", "feed": "8.6"})
    pipes = pipes.replace(",10.0,", ",3.05,").replace(",10.5,", ",3.20,")
    with pytest.raises(ProjectFaultsError) as caught:
        check_project(write(tmp_path, TEXT, NODES.replace("S,0,-40,0", "S,0,-40,9"), pipes))
    told = str(caught.value)
    assert told.count("is shorter than the distance") == 1
    assert "also in 4 more rows: 3, 4, 5, 6" in told and "in metres" in told


@pytest.mark.parametrize(
    ("x", "length", "good"),
    [
        ("30.5", "9.9", True),  # ends 9.9 to 10.1 apart, length 9.85 to 9.95
        ("30.5", "9.8", False),
        ("30.50", "9.9", False),  # written to the hundredth: 9.98 to 10.02 apart
        ("30.50", "9.95", False),
        ("30.50", "9.99", True),
    ],
)
def test_what_rounding_explains_is_no_fault(tmp_path: Path, x: str, length: str, good: bool) -> None:
    """A coordinate to the tenth is off by 0.05 ft at most, so two of them by 0.1 ft."""
    nodes = NODES.replace("H1,30.5", f"H1,{x}")
    found = shortened(tmp_path, nodes, end=length)
    assert (found == []) == good


def test_whole_feet_are_rounded_to_the_foot(tmp_path: Path) -> None:
    nodes = NODES.replace("30.5", "31").replace("20.5", "20").replace("10.5", "10")
    assert shortened(tmp_path, nodes) == []  # 11 apart by coordinates that are off by half a foot each
    assert only(shortened(tmp_path, nodes, end="9.4")).place.where == "row 2, column length"


def test_feet_and_inches_are_rounded_to_the_inch(tmp_path: Path) -> None:
    nodes = NODES.replace("30.5", "30'-6\"").replace("20.5", "20'-6\"").replace("10.5", "10'-6\"")
    nodes = nodes.replace("T,0,", "T,0'-0\",").replace("R,0,", "R,0'-0\",").replace("S,0,", "S,0'-0\",")
    assert shortened(tmp_path, nodes, end="9'-11\"") == []
    assert only(shortened(tmp_path, nodes, end="9'-9\"")).place.where == "row 2, column length"


@pytest.mark.parametrize(
    ("key", "length", "hint"),
    [
        ("end", "32.81", "the length in feet, the coordinates in metres?"),
        ("end", "100", "a slip of the decimal point?"),
        ("end", "120", "the length in inches, the coordinates in feet?"),
        ("end", "17", ""),
        ("main", "39.4", "the length in feet, the coordinates in metres?"),
        ("main", "120", "a slip of the decimal point?"),
    ],
)
def test_a_straight_piece_that_is_too_long(tmp_path: Path, key: str, length: str, hint: str) -> None:
    found = found_in(tmp_path, **{key: length})
    assert found.state == "ask authority"
    assert found.tags == (("P1",) if key == "end" else ("M",))
    assert found.text.endswith(hint) if hint else "?" not in found.text
    assert found.measured is not None and found.measured.value == pytest.approx(float(length) * 0.3048)
    assert found.limit is not None and found.limit.value == pytest.approx(
        (10 if key == "end" else 12) * 0.3048
    )


@pytest.mark.parametrize(
    "changes",
    [
        {},
        {"end": "14.14"},  # round a corner: √2 times the distance
        {"main": "17"},
        {"feed": "90"},
        {"feed": "98", "way": "riser"},
        {"feed": "98", "way": "underground"},
    ],
)
def test_pieces_that_may_go_round_something(tmp_path: Path, changes: dict[str, str]) -> None:
    """Two legs square to each other are at most √2 times as long as the straight line."""
    assert found_in(tmp_path, **changes).state == "ok"


@pytest.mark.parametrize("way", ["riser", "underground", "feed main", "pipe"])
def test_ten_times_the_way_is_asked_of_every_pipe(tmp_path: Path, way: str) -> None:
    found = found_in(tmp_path, feed="298", way=way)
    assert (found.state, found.tags) == ("ask authority", ("F",))
    assert "decimal point" in found.text


def test_heads_that_follow_one_another_are_a_straight_piece_without_a_role(tmp_path: Path) -> None:
    assert found_in(tmp_path, role="", end="32.81").tags == ("P1",)
    assert found_in(tmp_path, role="", end="10").state == "ok"
