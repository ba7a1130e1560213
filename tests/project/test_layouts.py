"""Generated layouts: counts, coordinates, lengths, sizes, and what is charged for fittings."""

from __future__ import annotations

import math
from collections import Counter
from pathlib import Path

import pytest
from project_texts import HEAD, LAYOUT, faults, read

from supplycheck.model import Node, Pipe, Project
from supplycheck.units import FOOT

GRID = """\
[layout]
type = "grid"
lines = 4
line_spacing = 10
heads = [6]
head_spacing = 12
first_head = 8
sprinkler = "A"
head_elevation = 20
branch = { pipe = "lines", sizes = ["1 1/4"] }
riser_nipple = { pipe = "lines", size = "1 1/2", length = 1 }
cross_main = { pipe = "lines", sizes = ["4"] }
far_main = { pipe = "lines", size = "3" }
riser = { pipe = "lines", size = "4", bottom_elevation = 0 }
"""
LOOP = GRID.replace('"grid"', '"loop"').replace("[6]", "[3, 2]")
DROPS = LAYOUT.replace('sizes = ["1", "1 1/4"] }', 'sizes = ["1", "1 1/4"], elevation = 16 }').replace(
    "cross_main", 'drop = { pipe = "lines", size = "1" }\ncross_main'
)


def node(project: Project, tag: str) -> Node:
    return project.system.node(tag)


def pipe(project: Project, tag: str) -> Pipe:
    return next(pipe for pipe in project.system.pipes if pipe.tag == tag)


def charged(project: Project, tag: str) -> list[tuple[str, str | None]]:
    return [
        (fitting.name, fitting.node)
        for fitting in pipe(project, tag).fittings
        for _ in range(fitting.count)
    ]


def feet(*lengths: float | None) -> tuple[float, ...]:
    return tuple(round((length or 0.0) / FOOT, 9) + 0.0 for length in lengths)


def test_tree_has_every_head_at_its_place(tmp_path: Path) -> None:
    project = read(tmp_path)
    heads = [each for each in project.system.nodes if each.kind == "sprinkler"]
    assert len(heads) == 3 * 4
    place = {each.tag: feet(each.x, each.y, each.elevation) for each in heads}
    assert place["L1.1"] == (
        -19.5,
        20.0,
        15.0,
    )  # 6.5 + 13 ft from the main, two line spacings from the feed
    assert place["L1.2"] == (-6.5, 20.0, 15.0)
    assert place["L1.3"] == (6.5, 20.0, 15.0)
    assert place["L3.4"] == (19.5, 0.0, 15.0)
    assert {each.branch_line for each in heads} == {"L1", "L2", "L3"}
    assert {round(each.area or 0, 9) for each in heads} == {round(130 * FOOT**2, 9)}


def test_every_pipe_is_as_long_as_its_nodes_are_apart(tmp_path: Path) -> None:
    for text in (LAYOUT, DROPS, GRID, LOOP):
        project = read(tmp_path, HEAD + text)
        for each in project.system.pipes:
            a, b = node(project, each.start), node(project, each.end)
            apart = math.dist((a.x or 0, a.y or 0, a.elevation), (b.x or 0, b.y or 0, b.elevation))
            assert each.length == pytest.approx(apart, abs=1e-9), each.tag


def test_sizes_run_from_the_end_head_inward(tmp_path: Path) -> None:
    project = read(tmp_path)
    assert pipe(project, "L1.2-L1.1").nominal == "1"
    assert pipe(project, "M1-L1.2").nominal == "1 1/4"
    assert pipe(project, "L1.3-L1.4").nominal == "1"


def test_pipes_point_away_from_the_supply(tmp_path: Path) -> None:
    project = read(tmp_path)
    assert (pipe(project, "S-BOR").start, pipe(project, "BOR-TOR").end) == ("S", "TOR")
    assert pipe(project, "BOR-TOR").devices == ("backflow",)


def test_end_fed_tree_is_charged_what_turns(tmp_path: Path) -> None:
    """Tees where water turns, nothing for the run and the head's own fitting (NFPA 13, from memory)."""
    project = read(tmp_path)
    assert charged(project, "M1-L1.2") == [("tee", "M1")]  # the last line: the main ends in its tee
    assert charged(project, "M3-M2") == []  # straight on
    assert charged(project, "M2-L2.3") == [("tee", "M2")]
    assert charged(project, "L1.2-L1.1") == []
    assert charged(project, "TOR-M3") == [("elbow 90", "TOR")]
    assert charged(project, "BOR-TOR") == [("elbow 90", "BOR")]  # the smaller of riser and underground


def test_riser_nipples_take_the_lower_tee_and_lines_the_upper_one(tmp_path: Path) -> None:
    text = LAYOUT.replace(
        "cross_main", 'riser_nipple = { pipe = "lines", size = "2", length = 1 }\ncross_main'
    )
    project = read(tmp_path, HEAD + text)
    assert charged(project, "M2-N2") == [("tee", "M2")]
    assert charged(project, "M1-N1") == [("elbow 90", "M1")]
    assert charged(project, "N2-L2.2") == [("tee", "N2")]
    assert feet(node(project, "M2").elevation, pipe(project, "M2-N2").length) == (14.0, 1.0)


def test_centre_feed_is_charged_to_the_cross_main(tmp_path: Path) -> None:
    project = read(tmp_path, HEAD + LAYOUT.replace('"end"', '"centre"').replace("lines = 3", "lines = 4"))
    assert charged(project, "MC-M2") == [("tee", "MC")]
    assert charged(project, "MC-M3") == [("tee", "MC")]
    assert charged(project, "TOR-MC") == [("elbow 90", "TOR")]
    assert feet(node(project, "MC").y) == (15.0,)


def test_drops_take_their_tee_and_the_last_one_an_elbow(tmp_path: Path) -> None:
    project = read(tmp_path, HEAD + DROPS)
    assert charged(project, "L1.2T-L1.2") == [("tee", "L1.2T")]
    assert charged(project, "L1.1T-L1.1") == [("elbow 90", "L1.1T")]
    assert charged(project, "L1.2T-L1.1T") == []
    assert feet(node(project, "L1.1T").elevation, node(project, "L1.1").elevation) == (16.0, 15.0)
    assert pipe(project, "L1.1T-L1.1").role == "drop"


def test_grid_joins_both_mains_by_every_line(tmp_path: Path) -> None:
    project = read(tmp_path, HEAD + GRID)
    roles = Counter(each.role for each in project.system.pipes)
    assert roles == {"branch line": 4 * 7, "riser nipple": 8, "cross main": 6, "riser": 1}
    assert len([each for each in project.system.nodes if each.kind == "sprinkler"]) == 24
    assert feet(node(project, "FM1").x) == (76.0,)  # 8 + 5 × 12 + 8 ft
    loops = len(project.system.pipes) - len(project.system.nodes) + 1
    assert loops == 3
    assert charged(project, "M2-N2") == [("tee", "M2")]
    assert charged(project, "FM2-FN2") == [("tee", "FM2")]
    assert charged(project, "N2-L2.1") == [("elbow 90", "N2")]
    assert charged(project, "L2.6-FN2") == [("elbow 90", "FN2")]
    assert charged(project, "FM3-FM2") == []


def test_loop_ties_two_mains_at_both_ends(tmp_path: Path) -> None:
    project = read(tmp_path, HEAD + LOOP)
    assert len([each for each in project.system.nodes if each.kind == "sprinkler"]) == 4 * 2 * 5
    assert len(project.system.pipes) - len(project.system.nodes) + 1 == 1
    assert feet(node(project, "FM1").x) == (52.0,)  # 2 × (8 + 12) + 12 ft
    assert {each.branch_line for each in project.system.nodes if each.branch_line} == {
        f"{side}{number}" for side in ("L", "FL") for number in (1, 2, 3, 4)
    }
    assert charged(project, "M2-N2") == [("tee", "M2")]
    assert charged(project, "M3-M2") == []


def test_mixed_units_in_one_layout(tmp_path: Path) -> None:
    text = LAYOUT.replace("head_spacing = 13", 'head_spacing = "3.9624 m"').replace(
        "length = 20 }", 'length = 6.096, units = "metric" }'
    )
    metric, plain = read(tmp_path, HEAD + text), read(tmp_path)
    for a, b in zip(metric.system.pipes, plain.system.pipes, strict=True):
        assert a.length == pytest.approx(b.length, rel=1e-12)


@pytest.mark.parametrize(
    ("old", "new", "where"),
    [
        ('type = "grid"', 'type = "tree"', "layout.far_main"),
        ("far_main = ", "# ", "layout.far_main"),
        ('["1 1/4"]', '["1", "1 1/4"]', "layout.branch.sizes"),
        ("heads = [6]", "heads = [3, 3]", "layout.heads"),
        ("lines = 4", "lines = 1", "layout.lines"),
        ('size = "3" }', 'size = "3", distance = 60 }', "layout.far_main.distance"),
        ("riser_nipple = ", "# ", None),
        ('size = "1 1/2", length = 1', 'size = "1 1/2"', "layout.riser_nipple"),
        ("riser = {", "# {", "layout"),
    ],
)
def test_a_grid_that_does_not_fit_together(tmp_path: Path, old: str, new: str, where: str | None) -> None:
    assert old in GRID
    found = [fault.place.where for fault in faults(tmp_path, HEAD + GRID.replace(old, new))]
    assert found == ([] if where is None else [where])
