"""Sizes that a layout never uses, and sizes that fall toward the supply, once passed in silence."""

from __future__ import annotations

from pathlib import Path

import pytest
from project_texts import LAYOUT_PROJECT, TABLE_PROJECT, faults, write

from supplycheck.check import check_project
from supplycheck.findings import Fault, Finding

RULE = "size toward the supply"
BRANCH = 'sizes = ["1", "1 1/4"]'
MAIN = 'sizes = ["2"], feed = "end"'
NODES = """\
tag,x,y,elevation,kind,sprinkler,area,line
H1,30,0,10,sprinkler,A,100,1
H2,20,0,10,sprinkler,A,100,1
H3,10,0,10,sprinkler,A,100,1
N,0,0,10,,,,
T,0,0,9,,,,
R,0,-10,9,,,,
S,0,-10,0,supply,,,
"""
PIPES = """\
from,to,length,kind,size,fittings,devices,role
H2,H1,10,lines,{end},,,branch line
H3,H2,10,lines,{middle},,,branch line
N,H3,10,lines,{first},1 tee,,branch line
T,N,1,lines,{nipple},,,riser nipple
R,T,10,lines,{main},1 tee,,cross main
S,R,9,lines,{riser},1 elbow 90,,riser
"""
SOUND = {"end": "1", "middle": "1 1/4", "first": "1 1/2", "nipple": "2", "main": "2 1/2", "riser": "3"}


def only(found: list[Fault]) -> Fault:
    assert len(found) == 1, "\n".join(map(str, found))
    return found[0]


def layout(old: str, new: str, text: str = LAYOUT_PROJECT) -> str:
    assert old in text
    return text.replace(old, new)


def found_in(folder: Path, text: str = TABLE_PROJECT, nodes: str = NODES, pipes: str = "") -> Finding:
    result = check_project(write(folder, text, nodes, pipes or PIPES.format(**SOUND)))
    return next(one for one in result.findings if one.check == RULE)


def test_more_sizes_than_pieces_on_a_line(tmp_path: Path) -> None:
    """Two heads on each side: two pieces."""
    fault = only(faults(tmp_path, layout(BRANCH, 'sizes = ["1", "1 1/4", "1 1/2", "2"]')))
    assert fault.place.where == "layout.branch.sizes"
    assert fault.found == "4 sizes: 1, 1 1/4, 1 1/2, 2"
    assert "at most 2" in fault.allowed and "2 pieces" in fault.allowed
    assert "1 1/2, 2 would not be used" in fault.remedy
    uneven = layout("heads = [2, 2]", "heads = [4, 1]")
    assert faults(tmp_path, layout(BRANCH, 'sizes = ["1", "1 1/4", "1 1/2", "2"]', uneven)) == []


@pytest.mark.parametrize(
    ("lines", "feed", "most"),
    [(3, "end", 2), (3, "centre", 2), (4, "centre", 2), (5, "centre", 3), (1, "end", 1)],
)
def test_more_sizes_than_pieces_on_the_cross_main(tmp_path: Path, lines: int, feed: str, most: int) -> None:
    """Fed at its end the main has a piece less than lines; fed in the middle, the longer half counts.

    Five lines fed midway between the third and the fourth: M1-M2, M2-M3, M3-MC.
    """
    sizes = ["2", "2 1/2", "3", "3", "3"]
    text = layout("lines = 3", f"lines = {lines}")
    for count in (most, most + 1):
        told = ", ".join(f'"{size}"' for size in sizes[:count])
        found = faults(tmp_path, layout(MAIN, f'sizes = [{told}], feed = "{feed}"', text))
        if count == most:
            assert found == []
        else:
            fault = only(found)
            assert fault.place.where == "layout.cross_main.sizes"
            assert f"at most {most}" in fault.allowed


def test_branch_sizes_from_the_main_outward(tmp_path: Path) -> None:
    found = found_in(tmp_path, layout(BRANCH, 'sizes = ["1 1/4", "1"]'))
    assert found.state == "ask authority"
    assert set(found.tags) == {f"M{line}-L{line}.{head}" for line in (1, 2, 3) for head in (2, 3)}
    assert "layout.branch.sizes" in found.remedy and "end head" in found.remedy
    assert found_in(tmp_path, LAYOUT_PROJECT).state == "ok"


@pytest.mark.parametrize("kind", ["tree", "grid", "loop"])
def test_main_sizes_from_the_feed_outward(tmp_path: Path, kind: str) -> None:
    text = layout("lines = 3", f'type = "{kind}"\nlines = 4')
    if kind != "tree":
        text = layout(BRANCH, 'sizes = ["1 1/4"]', text) + 'far_main = { pipe = "lines", size = "3" }\n'
    if kind == "grid":
        text = layout("heads = [2, 2]", "heads = [4]", text)
    rising = layout(MAIN, 'sizes = ["2", "2 1/2", "3"]', text)
    falling = layout(MAIN, 'sizes = ["3", "2 1/2", "2"]', text)
    assert found_in(tmp_path, rising).state == "ok"
    found = found_in(tmp_path, falling)
    assert found.state == "ask authority"
    assert {"M4-M3", "M3-M2"} <= set(found.tags)
    assert "layout.cross_main.sizes" in found.remedy


@pytest.mark.parametrize(
    ("changes", "tags"),
    [
        ({}, ()),
        ({"first": "1"}, ("N-H3",)),
        ({"middle": "1", "end": "1"}, ()),
        ({"nipple": "1 1/4"}, ()),
        ({"nipple": "3"}, ()),
        ({"main": "1 1/4"}, ("R-T",)),
        ({"main": "2", "riser": "1 1/2"}, ("S-R",)),
        ({"end": "2", "middle": "1"}, ("H3-H2",)),
    ],
)
def test_a_pipe_smaller_than_the_one_it_feeds(
    tmp_path: Path, changes: dict[str, str], tags: tuple[str, ...]
) -> None:
    """A riser nipple may be of any size: what is before and behind it is compared."""
    found = found_in(tmp_path, pipes=PIPES.format(**SOUND | changes))
    assert found.state == ("ask authority" if tags else "ok")
    assert found.tags == tags
    if tags:
        assert tags[0] in found.text and "toward the supply" in found.text


def test_a_short_piece_with_a_device_may_be_smaller(tmp_path: Path) -> None:
    text = layout(
        "[network]",
        '[device.meter]\ncurve = [[0, 1], [500, 6]]\nsource = "sheet"\n[network]',
        TABLE_PROJECT,
    )
    rows = PIPES.format(**SOUND).replace(
        "S,R,9,lines,3,1 elbow 90,,riser", "S,R,9,lines,2,1 elbow 90,meter,riser"
    )
    assert found_in(tmp_path, text, pipes=rows).state == "ok"
    long = rows.replace("S,R,9", "S,R,90")
    assert found_in(tmp_path, text, pipes=long).tags == ("S-R",)


def test_one_nominal_size_of_two_materials_is_no_fall(tmp_path: Path) -> None:
    """Schedule 40 of 2 in has 2.067 in, schedule 10 has 2.157 in: the same nominal size."""
    text = layout(
        "[supply.flow_test]",
        '[pipe.thin]\nmaterial = "steel schedule 10"\n[supply.flow_test]',
        TABLE_PROJECT,
    )
    rows = PIPES.format(**SOUND | {"first": "2", "main": "2"}).replace("N,H3,10,lines", "N,H3,10,thin")
    assert found_in(tmp_path, text, pipes=rows).state == "ok"


def test_a_ring_may_be_larger_than_its_lead(tmp_path: Path) -> None:
    nodes = (
        "tag,x,y,elevation,kind,flow\nS,0,-50,0,supply,\nA,0,0,0,,\nB,50,50,0,hydrant,500\nC,-50,50,0,,\n"
    )
    rows = "from,to,length,kind,size,fittings\nS,A,50,lines,4,\nA,B,75,lines,6,1 tee\n"
    rows += "B,C,100,lines,6,1 tee\nC,A,75,lines,6,1 tee\n"
    text = TABLE_PROJECT.replace('hazard = "ordinary hazard group 1"', 'hazard = "none"\nduration = 60')
    text = text.replace("[sprinkler.A]\nk_factor = 5.6\nminimum_pressure = 7\n", "")
    assert found_in(tmp_path, text, nodes, rows).state == "not applicable"


def test_the_finding_reads_well(tmp_path: Path) -> None:
    found = found_in(tmp_path, pipes=PIPES.format(**SOUND | {"first": "1"}))
    assert "{" not in found.text
    assert found.text == "N-H3, size 1, feeds H3-H2, size 1 1/4: the size falls toward the supply."
