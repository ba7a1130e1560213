"""Fixed outflows as the only demand, and pressures that nodes ask for beside sprinklers and hydrants.

Networks are invented. Losses by hand: 4.52 Q^1.85 / (C^1.85 d^4.87) psi/ft, elevation 0.433 psi/ft; the
tolerance is round-off alone, as test and program use the same law.
"""

from __future__ import annotations

from pathlib import Path

import pytest
from duty_projects import HEAD

from supplycheck.check import check_project
from supplycheck.project import read_project
from supplycheck.project.faults import ProjectFaultsError
from supplycheck.results.records import Result
from supplycheck.results.screen import screen_text
from supplycheck.units import GPM, PSI

SUPPLY = """
[supply.flow_test]
static = 100
residual = 80
flow = 1500
date = 2026-06-01
gauge_elevation = 0
[supply.margin]
rule = "none"
"""
HEADS = """
[criteria]
hazard = "light hazard"
system = "wet"
design_area = ["H1", "H2"]
[sprinkler.K]
k_factor = 5.6
coverage_area = 100
"""
BRANCH = ["H1,10,sprinkler,K,,", "H2,10,sprinkler,K,,"]
LINES = ["p,S,A,50,4", "q,A,H1,20,1", "r,H1,H2,10,1"]


def written(folder: Path, text: str, nodes: list[str], pipes: list[str]) -> Path:
    top = HEAD.replace('"steel schedule 40"', '"steel schedule 40"\nc_factor = 120')
    (folder / "project.toml").write_text(top + text + SUPPLY, encoding="utf-8")
    rows = ["tag,elevation,kind,sprinkler,flow,minimum_pressure", "S,0,supply,,,", *nodes]
    (folder / "nodes.csv").write_text("\n".join(rows) + "\n", encoding="utf-8")
    rows = ["tag,from,to,length,size,kind", *(f"{row},steel" for row in pipes)]
    (folder / "pipes.csv").write_text("\n".join(rows) + "\n", encoding="utf-8")
    return folder


def check(folder: Path, text: str, nodes: list[str], pipes: list[str]) -> Result:
    return check_project(written(folder, text, nodes, pipes))


def lost(flow: float, length: float, bore: float) -> float:
    return float(length * 4.52 * flow**1.85 / (120**1.85 * bore**4.87))


def test_the_node_with_least_to_spare_sets_the_demand(tmp_path: Path) -> None:
    """B, 10 psi, then C up 20 ft, 15 psi: each asked with its own flow, counted once."""
    nodes = ["B,0,hose,,100,10", "C,20,hydrant,,50,15"]
    result = check(tmp_path, "", nodes, ["x,S,B,100,2", "y,B,C,80,2"])
    trunk, branch = lost(150, 100, 2.067), lost(50, 80, 2.067)
    needed = max(10 + trunk, 15 + 20 * 0.433 + branch + trunk)
    assert result.demand.flow / GPM == pytest.approx(150, rel=1e-9)
    assert result.demand.outlet_flow / GPM == pytest.approx(150, rel=1e-9)
    assert result.demand.pressure / PSI == pytest.approx(needed, rel=1e-6)
    assert result.demand.governing_head == "C"
    available = 100 - 20 * (150 / 1500) ** 1.85
    assert result.margin.pressure / PSI == pytest.approx(available - needed, rel=1e-6)
    (row,) = result.duties.rows
    assert row.duty == "outflows" and row.counts
    assert {one.node: one.flow / GPM for one in row.outlets} == pytest.approx({"B": 100, "C": 50})
    asked = {one.tag: one.required_discharge for one in result.nodes if one.required_discharge is not None}
    assert {tag: flow / GPM for tag, flow in asked.items()} == pytest.approx({"B": 100, "C": 50})


def test_only_the_outflow_that_states_no_pressure_is_asked_for_zero(tmp_path: Path) -> None:
    nodes = ["B,0,outlet,,100,10", "C,0,,,50,"]
    result = check(tmp_path, '[criteria]\nhazard = "none"\n', nodes, ["x,S,B,100,2", "y,B,C,80,2"])
    asked = {one.node: one.required / PSI for one in result.duties.rows[0].outlets}
    assert asked == pytest.approx({"B": 10, "C": 0})
    assert result.project.outflows is not None and result.project.outflows.unstated == ("C",)
    states = {one.check: one.state for one in result.findings}
    assert states["minimum pressure of outflows"] == "missing"
    assert states["pressure asked at nodes"] == "ok"
    assert "All fixed outflows at once; a pressure is asked at 2 nodes." in screen_text(result)


def test_a_hose_allowance_that_is_written_flows_too(tmp_path: Path) -> None:
    result = check(tmp_path, "[hose]\noutside = 200\n", ["B,0,outlet,,100,10"], ["x,S,B,100,2"])
    assert result.demand.flow / GPM == pytest.approx(300, rel=1e-9)
    assert result.demand.hose_flow / GPM == pytest.approx(200, rel=1e-9)


@pytest.mark.parametrize(("asked", "governing"), [(70.0, "A"), (5.0, "H2")])
def test_a_node_of_a_sprinkler_system_is_left_what_it_asks(
    tmp_path: Path, asked: float, governing: str
) -> None:
    """A draws nothing; where it asks for more than the heads leave there, it sets the demand."""
    result = check(tmp_path, HEADS, [f"A,0,junction,,,{asked:g}", *BRANCH], LINES)
    assert result.demand.governing_head == governing
    left = {node.tag: node.pressure / PSI for node in result.nodes}
    assert left["A"] >= asked * (1 - 1e-9)
    assert left["H2"] >= 7 * (1 - 1e-9), "NFPA 13: 7 psi at every open head"
    assert min(left["A"] - asked, left["H2"] - 7) == pytest.approx(0, abs=1e-6)


def test_an_outflow_beside_sprinklers_flows_and_keeps_its_pressure(tmp_path: Path) -> None:
    nodes = ["A,0,junction,,,", *BRANCH, "X,0,outlet,,100,60"]
    result = check(tmp_path, HEADS, nodes, [*LINES, "x,A,X,100,2"])
    assert result.demand.governing_head == "X"
    assert result.demand.outlet_flow / GPM == pytest.approx(100, rel=1e-9)
    assert result.duties.rows == () and result.project.outflows is None
    main = result.demand.sprinkler_flow / GPM + 100  # the hose of the class joins at S, before the main
    needed = 60 + lost(100, 100, 2.067) + lost(main, 50, 4.026)
    assert result.demand.pressure / PSI == pytest.approx(needed, rel=1e-6)


def test_an_outflow_beside_hydrants_keeps_its_pressure_in_every_case(tmp_path: Path) -> None:
    text = '[fire_flow]\nflow = 500\nvalves = ["z"]\nhydrants_at_once = 1\n'
    text += '[[hydrant]]\ntag = "H"\nnode = "H"\n'
    nodes = ["B,0,outlet,,100,70", "H,0,hydrant,,,"]
    result = check(tmp_path, text, nodes, ["x,S,B,100,6", "z,S,H,100,6", "y,B,H,100,4"])
    assert len(result.duties.rows) == 2
    for row in result.duties.rows:
        assert {one.node: one.flow / GPM for one in row.outlets} == pytest.approx({"B": 100, "H": 500})
        assert {one.node: one.required / PSI for one in row.outlets} == pytest.approx({"B": 70, "H": 20})
    shut = next(row for row in result.duties.rows if row.closed_pipes)
    assert shut.required_pressure / PSI == pytest.approx(70 + lost(600, 100, 6.065), rel=1e-6)


def faults(folder: Path, text: str, nodes: list[str], pipes: list[str]) -> list[str]:
    with pytest.raises(ProjectFaultsError) as caught:
        read_project(written(folder, text, nodes, pipes))
    return [str(fault) for fault in caught.value.faults]


def test_where_nothing_flows_there_is_nothing_to_check(tmp_path: Path) -> None:
    (fault,) = faults(tmp_path, "", ["B,0,junction,,,10"], ["x,S,B,100,2"])
    assert "there is nothing to check" in fault and "nodes with a flow" in fault


def test_sprinklers_need_criteria_and_the_kind_of_system(tmp_path: Path) -> None:
    nodes = ["A,0,junction,,,", *BRANCH]
    (fault,) = faults(tmp_path, HEADS.replace('system = "wet"\n', ""), nodes, LINES)
    assert "criteria.system: is missing" in fault
    (fault,) = faults(tmp_path, HEADS[HEADS.index("[sprinkler") :], nodes, LINES)
    assert "criteria: the table is missing" in fault


def test_a_hazard_class_without_sprinklers_is_told_what_to_write(tmp_path: Path) -> None:
    (fault,) = faults(
        tmp_path, HEADS[: HEADS.index("design_area")], ["B,0,outlet,,100,10"], ["x,S,B,100,2"]
    )
    assert "there is no sprinkler" in fault and 'hazard = "none"' in fault
