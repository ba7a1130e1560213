"""Published loops of fixed outflows, whole: from tables of nodes and pipes to ``result.json``.

No sprinkler, standpipe or hydrant is part of them. Alperovits and Shamir (1977), Water Resour. Res. 13,
885, with the diameters of Savic and Walters (1997), J. Water Resour. Plann. Manage. 123, 67 (both from
memory); and two parallel paths whose split follows from the law in closed form.
"""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import pytest

from supplycheck.check import check_project
from supplycheck.results.json import result_json

TWO_LOOPS = """\
units = "metric"
[project]
title = "two loops"
date = 2026-11-20
standard = "EN 12845 (2015)"
[criteria]
hazard = "none"
friction_law = "hazen-williams 10.67 head"
[pipe.main]
material = "cast iron"
c_factor = 130
[network]
nodes = "nodes.csv"
pipes = "pipes.csv"
[supply]
node = "1"
[[supply.tank]]
tag = "source"
node = "1"
water_level = 210
volume = "10000 m³"
[supply.margin]
rule = "none"
"""
PRINTED = {"2": 53.25, "3": 30.46, "4": 43.45, "5": 33.80, "6": 30.45, "7": 30.55}
HEIGHTS = {"2": 150.0, "3": 160.0, "4": 155.0, "5": 150.0, "6": 165.0, "7": 160.0}
DRAWN = {"2": 100, "3": 100, "4": 120, "5": 270, "6": 330, "7": 200}
BORES = "1-2 457.2, 2-3 254, 2-4 406.4, 4-5 101.6, 4-6 406.4, 6-7 254, 3-5 254, 5-7 25.4"
METRE = 0.0981
"""Bar in a metre of water at 9.81 kPa/m, the unit weight of the head form."""
PRINTED_CONSTANT = 10.667

TWO_PATHS = """\
units = "us"
[project]
title = "two paths"
date = 2026-11-20
standard = "NFPA 13 (2022)"
[pipe.steel]
material = "steel schedule 40"
c_factor = 120
[network]
nodes = "nodes.csv"
pipes = "pipes.csv"
[supply.flow_test]
static = 90
residual = 60
flow = 1000
date = 2026-11-02
gauge_elevation = 0
[supply.margin]
rule = "none"
"""


def record(folder: Path, text: str, nodes: list[str], pipes: list[str]) -> dict[str, Any]:
    """Write the project into ``folder`` and return what ``result.json`` holds."""
    for name, lines in (("project.toml", [text]), ("nodes.csv", nodes), ("pipes.csv", pipes)):
        (folder / name).write_text("\n".join(lines) + "\n", encoding="utf-8")
    found: dict[str, Any] = json.loads(result_json(check_project(folder)))
    return found


def two_loops(folder: Path, text: str = TWO_LOOPS) -> dict[str, Any]:
    nodes = ["tag,elevation,kind,flow,minimum_pressure", "1,210,supply,,"]
    nodes += [f"{tag},{HEIGHTS[tag]},outlet,{flow} m³/h,294.3 kPa" for tag, flow in DRAWN.items()]
    pipes = ["tag,from,to,length,kind,bore"]
    for line in BORES.split(", "):
        ends, bore = line.split()
        pipes.append(f"{ends},{ends[0]},{ends[2]},1000,main,{bore}")
    return record(folder, text, nodes, pipes)


def tolerance(tag: str) -> float:
    """Return by how much [m] a printed pressure may be off.

    One unit of the last printed digit, as the authors stop their own iterations there; and the heads are
    printed with the constant 10.667, here 10.67, so that every loss is larger by the ratio of the two.
    """
    loss = 210.0 - HEIGHTS[tag] - PRINTED[tag]
    return 0.01 + (10.67 / PRINTED_CONSTANT - 1) * loss


def test_two_loops_from_tables_to_the_record(tmp_path: Path) -> None:
    """The pressures with the supply as it is; the outlets ask 30 m each (from memory)."""
    found = two_loops(tmp_path)
    (case,) = found["duties"]["cases"]
    left = {one["node"]: one["pressure"] / METRE for one in case["outlets"]}
    assert set(left) == set(PRINTED)
    for tag, metres in PRINTED.items():
        assert left[tag] == pytest.approx(metres, abs=tolerance(tag)), tag
    flows = {one["node"]: one["flow"] * 60 / 1000 for one in case["outlets"]}
    assert flows == pytest.approx(DRAWN, rel=1e-9)
    assert case["flow"] * 60 / 1000 == pytest.approx(1120.0, rel=1e-9)
    last = next(pipe for pipe in found["pipes"] if pipe["tag"] == "5-7")
    assert (last["from"], last["to"]) == ("7", "5"), "the last pipe runs against the drawing"


def test_two_loops_leave_what_the_printed_pressures_leave(tmp_path: Path) -> None:
    """Node 6 has least to spare of 30 m: 30.45 − 30 = 0.45 m; at the demand all lie lower by as much."""
    found = two_loops(tmp_path)
    assert found["verdict"] == "adequate"
    assert found["demand"]["governing_head"] == "6"
    margin = found["margin"]["pressure"] / METRE
    assert margin == pytest.approx(0.45, abs=tolerance("6"))
    for node in found["nodes"]:
        if node["tag"] in PRINTED:
            lowered = PRINTED[node["tag"]] - 0.45
            off = tolerance(node["tag"]) + tolerance("6")
            assert node["pressure"] / METRE == pytest.approx(lowered, abs=off)


def test_two_loops_are_told_where_the_source_falls_short(tmp_path: Path) -> None:
    """Half a metre less at the source than 30.45 − 30 allows."""
    found = two_loops(tmp_path, TWO_LOOPS.replace("water_level = 210", "water_level = 209.5"))
    assert found["verdict"] == "not adequate"
    assert found["margin"]["pressure"] / METRE == pytest.approx(-0.05, abs=tolerance("6"))
    judged = next(one for one in found["findings"] if one["check"] == "pressure asked at nodes")
    assert (judged["state"], judged["tags"]) == ("fail", ["6"])


def test_two_paths_from_tables_to_the_record(tmp_path: Path) -> None:
    """Q1/Q2 = [(L2/L1)(d1/d2)^4.87]^(1/1.85): 159.29 and 240.71 gpm, 6.498 psi, printed so; no criteria.

    Tolerances are half a unit of the last digit printed.
    """
    nodes = ["tag,elevation,kind,flow,minimum_pressure", "S,0,supply,,", "B,0,outlet,400,20"]
    pipes = ["tag,from,to,length,kind,size", "three,S,B,200,steel,3", "four,S,B,350,steel,4"]
    found = record(tmp_path, TWO_PATHS, nodes, pipes)
    flows = {pipe["tag"]: pipe["flow"] for pipe in found["pipes"]}
    assert flows == pytest.approx({"three": 159.29, "four": 240.71}, abs=0.005)
    for pipe in found["pipes"]:
        assert pipe["friction_loss"] == pytest.approx(6.498, abs=0.0005)
    assert found["demand"]["pressure"] == pytest.approx(26.498, abs=0.0005)
    assert found["demand"]["flow"] == pytest.approx(400.0, rel=1e-9)
    assert found["governs"].startswith("outlet B (400.0 gpm at 20.0 psi)")
    available = 90 - 30 * (400 / 1000) ** 1.85
    assert found["margin"]["pressure"] == pytest.approx(available - 26.498, abs=0.0005)


def test_without_a_stated_pressure_none_is_taken_and_asked(tmp_path: Path) -> None:
    """The demand is then the loss alone, 6.498 psi, and that nothing is left at the outlet is said."""
    nodes = ["tag,elevation,kind,flow", "S,0,supply,", "B,0,outlet,400"]
    pipes = ["tag,from,to,length,kind,size", "three,S,B,200,steel,3", "four,S,B,350,steel,4"]
    found = record(tmp_path, TWO_PATHS, nodes, pipes)
    assert found["demand"]["pressure"] == pytest.approx(6.498, abs=0.0005)
    assumed = {one["key"]: one["value"] for one in found["assumptions"]}
    assert assumed["network.nodes.minimum_pressure"] == "0.0 psi at B"
    assert "Which pressure must be left at B?" in found["open_questions"]
