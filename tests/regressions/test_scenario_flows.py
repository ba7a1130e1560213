"""Scenarios once left out what nodes draw; dry heads and curves read past their end once passed unsaid.

The projects are small enough for a balance by hand: all water comes from the one supply, whose pressure is
static − (static − residual)(Q/Q_test)^1.85 (NFPA 291, the usual form of a test curve), and still water
stands 62.4/144 psi lower for each foot of height (weight of water, handbooks).
"""

from __future__ import annotations

import json
from pathlib import Path

import pytest
from duty_projects import supply, written

from supplycheck.check import check_project
from supplycheck.findings import Finding
from supplycheck.project import ProjectFaultsError
from supplycheck.report.document import Table
from supplycheck.report.sections.judged import flows as flows_section
from supplycheck.results.json import result_record
from supplycheck.results.records import Result, ScenarioRow
from supplycheck.results.screen import screen_text
from supplycheck.units import GPM, PSI

TOP = """\
units = "us"
[project]
title = "small"
date = 2026-11-20
standard = "NFPA 13 (2022)"
authority = "fire marshal"
[criteria]
hazard = "ordinary hazard group 1"
system = "wet"
design_area = ["h1", "h2"]
[sprinkler.A]
k_factor = 5.6
minimum_pressure = 7
coverage_area = 130
[pipe.steel]
material = "steel schedule 40"
[network]
nodes = "nodes.csv"
pipes = "pipes.csv"
"""
NODES = ["S,0,supply", "A,0,junction", "h1,10,sprinkler,A", "h2,10,sprinkler,A"]
PIPES = ["u,S,A,100,6", "l1,A,h1,30,2", "l2,h1,h2,10,2"]
TEST = supply(110, 95, 800)
NO_HOSE = "[hose]\noutside = 0\n"


def scenario(name: str, text: str = "") -> str:
    return f'[[scenario]]\nname = "{name}"\n{text}\n'


def solved(folder: Path, text: str, nodes: list[str], pipes: list[str]) -> Result:
    return check_project(written(folder, text, nodes, pipes, top=TOP, test=TEST))


def row(result: Result, name: str) -> ScenarioRow:
    return next(one for one in result.scenarios if one.name == name)


def finding(result: Result, name: str) -> Finding:
    return next(one for one in result.findings if one.check == name)


def told(result: Result, name: str) -> str:
    """Return the note of one scenario as other programs read it."""
    record = json.loads(json.dumps(result_record(result)))
    return str(next(one["note"] for one in record["scenarios"] if one["name"] == name))


def printed(result: Result) -> dict[str, str]:
    """Return the note of every scenario as the report prints it."""
    table = next(block for block in flows_section(result).blocks if isinstance(block, Table))
    return {line.cells[0]: line.note for line in table.rows}


@pytest.fixture(scope="module")
def drawn(tmp_path_factory: pytest.TempPathFactory) -> Result:
    """400 gpm at a hydrant, 35 at a domestic branch, 120 of outside hose at A."""
    text = '[hose]\noutside = 120\noutside_node = "A"\nsource = "authority"\n' + "".join(
        (
            scenario("all of it"),
            scenario("no hose", "hose = false"),
            scenario("more at A", "flows = { A = 65 }"),
            scenario("more at DOM", "flows = { DOM = 65 }"),
            scenario("in their place", "flows = { DOM = 65 }\nnode_flows = false"),
            scenario("said to add", "flows = { DOM = 65 }\nnode_flows = true"),
            scenario("heads alone", "hose = false\nnode_flows = false"),
        )
    )
    nodes = [*NODES, "HY,0,hydrant,,400", "DOM,5,outlet,,35"]
    return solved(tmp_path_factory.mktemp("drawn"), text, nodes, [*PIPES, "hy,A,HY,20,6", "dm,A,DOM,30,2"])


@pytest.mark.parametrize(
    ("name", "beside_heads"),
    [
        ("design area, actual supply", 400 + 35 + 120),
        ("all of it", 400 + 35 + 120),
        ("no hose", 400 + 35),
        ("more at A", 400 + 35 + 120 + 65),
        ("more at DOM", 400 + 35 + 120 + 65),
        ("in their place", 120 + 65),
        ("said to add", 400 + 35 + 120 + 65),
        ("heads alone", 0),
    ],
)
def test_what_nodes_draw_runs_in_every_scenario(drawn: Result, name: str, beside_heads: float) -> None:
    one = row(drawn, name)
    total, heads = one.total_flow / GPM, one.sprinkler_flow / GPM
    assert total - heads == pytest.approx(beside_heads, abs=1e-6)
    assert one.supply_pressure / PSI == pytest.approx(110 - 15 * (total / 800) ** 1.85, rel=1e-6)
    assert sum(flow for _, flow, _ in one.head_flows) / GPM == pytest.approx(heads, rel=1e-12)


def test_a_flow_beside_that_of_its_node_is_said(drawn: Result) -> None:
    note = told(drawn, "more at DOM")
    assert "65.0 gpm at DOM besides the 35.0 gpm of the node table" in note
    assert printed(drawn)["more at DOM"] == note
    assert "besides" not in told(drawn, "more at A")
    assert "without the flows of the node table" in told(drawn, "in their place")


def test_that_it_adds_is_an_assumption_unless_said(drawn: Result) -> None:
    notes = [one for one in drawn.project.assumptions if one.key.startswith("scenario")]
    assert [one.key for one in notes] == ["scenario[4].flows.DOM"]
    assert notes[0].origin == "assumed"
    assert "65.0 gpm" in notes[0].value and "35.0 gpm" in notes[0].value
    assert any("scenario[4]" in tag for tag in finding(drawn, "assumed values").tags)


def test_node_flows_is_yes_or_no(tmp_path: Path) -> None:
    with pytest.raises(ProjectFaultsError, match="node_flows"):
        solved(tmp_path, NO_HOSE + scenario("x", 'node_flows = "some"'), NODES, PIPES)


# ---------------------------------------------------------------- curves read past their end

CURVE = '[device.c]\ncurve = [[0, 2], [50, 4], [{end}, 8]]\nsource = "maker"\n'


def with_curve(folder: Path, end: int, more: str = "", top: str = TOP) -> Result:
    pipes = ["u,S,A,100,6,,c", *PIPES[1:]]
    text = NO_HOSE + CURVE.format(end=end) + more
    return check_project(written(folder, text, NODES, pipes, top=top, test=TEST))


@pytest.fixture(scope="module")
def past_end(tmp_path_factory: pytest.TempPathFactory) -> Result:
    more = scenario("one head", 'heads = ["h1"]') + scenario("more", "flows = { A = 30 }")
    return with_curve(tmp_path_factory.mktemp("past"), 60, more)


def test_the_demand_stays_on_the_curve_and_what_really_flows_does_not(past_end: Result) -> None:
    """Two heads need 0.15 × 130 = 19.5 gpm at least; at 80 psi or more they give 5.6 √80 = 50 gpm each."""
    assert past_end.verdict == "adequate"
    assert finding(past_end, "device curve range").state == "ok"
    real = row(past_end, "design area, actual supply")
    assert real.total_flow / GPM > 90.0
    (beyond,) = real.beyond
    assert (beyond.device, beyond.pipe) == ("c", "u")
    assert beyond.end / GPM == pytest.approx(60.0, rel=1e-12)
    assert beyond.flow == pytest.approx(real.total_flow, rel=1e-9)


def test_the_row_names_device_flow_and_end(past_end: Result) -> None:
    real = row(past_end, "design area, actual supply")
    note = told(past_end, real.name)
    assert f"{real.total_flow / GPM:.1f} gpm pass c, whose curve ends at 60.0 gpm" in note
    assert "not to be relied on" in note
    assert printed(past_end)[real.name] == note
    more = told(past_end, "more")
    assert f"{row(past_end, 'more').total_flow / GPM:.1f} gpm pass c" in more and "drawn at A" in more
    assert told(past_end, "one head") == ""


def test_the_record_holds_the_numbers(past_end: Result) -> None:
    rows = {one["name"]: one for one in result_record(past_end)["scenarios"]}
    (told_there,) = rows["more"]["beyond_curves"]
    assert told_there["device"] == "c" and told_there["pipe"] == "u"
    assert told_there["curve_end"] == pytest.approx(60.0)
    assert told_there["flow"] == pytest.approx(rows["more"]["total_flow"])
    assert rows["one head"]["beyond_curves"] == []


def test_a_finding_fails_and_screen_and_verdict_name_it(past_end: Result) -> None:
    found = finding(past_end, "device curve range in real flow")
    assert found.state == "fail" and found.tags == ("c",)
    assert found.measured is not None and found.limit is not None
    greatest = row(past_end, "more").total_flow
    assert found.measured.value == pytest.approx(greatest) and found.limit.value == pytest.approx(60 * GPM)
    assert found.check in past_end.verdict_text
    assert found.check in " ".join(screen_text(past_end).split())


def test_a_curve_that_reaches_far_enough_says_nothing(tmp_path: Path) -> None:
    result = with_curve(tmp_path, 400, scenario("more", "flows = { A = 30 }"))
    assert finding(result, "device curve range in real flow").state == "ok"
    assert all(not one.beyond for one in result.scenarios)
    assert told(result, "design area, actual supply") == ""


TANK = """
[[supply.tank]]
tag = "T"
node = "S"
water_level = 200
volume = 6000
[supply.margin]
rule = "none"
"""


def test_how_long_a_tank_lasts_carries_the_remark(tmp_path: Path) -> None:
    text = NO_HOSE + CURVE.format(end=60)
    pipes = ["u,S,A,100,6,,c", *PIPES[1:]]
    top = TOP.replace('system = "wet"', 'system = "wet"\nduration = 60')
    result = check_project(written(tmp_path, text, NODES, pipes, top=top, test=TANK))
    (tank,) = result.tanks
    assert "beyond the curve of c" in tank.note
    assert "beyond the curve of c" in result_record(result)["tanks"][0]["note"]
    assert "beyond the curve of c" in finding(result, "water storage").text


# ---------------------------------------------------------------- dry heads

HIGH = [*NODES, "t1,200,sprinkler,A", "t2,300,sprinkler,A"]
UP = [*PIPES, "z1,h2,t1,200,2", "z2,t1,t2,110,2"]


@pytest.fixture(scope="module")
def high(tmp_path_factory: pytest.TempPathFactory) -> Result:
    """110 psi carry a still column 110 × 144 / 62.4 = 253.8 ft up: t2 at 300 ft can never flow."""
    more = scenario("top", 'heads = ["t1", "t2"]') + scenario("only t2", 'heads = ["t2"]')
    more += scenario("near", 'heads = ["h1"]') + scenario("low and high", 'heads = ["h1", "t1"]')
    return solved(tmp_path_factory.mktemp("high"), NO_HOSE + more, HIGH, UP)


def test_dry_heads_are_named(high: Result) -> None:
    assert 110 * 144 / 62.4 < 300
    assert row(high, "top").dry == ("t2",) and row(high, "only t2").dry == ("t2",)
    for name in ("top", "only t2"):
        assert "t2 runs dry" in told(high, name) and "t2 runs dry" in printed(high)[name]
    assert "nothing flows" in told(high, "only t2")
    assert row(high, "near").dry == () and told(high, "near") == ""


def test_nothing_is_nought(high: Result) -> None:
    still = row(high, "only t2")
    assert (still.total_flow, still.sprinkler_flow, still.lowest_ratio) == (0.0, 0.0, 0.0)
    assert still.over_discharge is None
    assert not str(still.total_flow).startswith("-")


def test_dry_heads_fail(high: Result) -> None:
    found = finding(high, "scenarios")
    assert found.state == "fail" and found.tags == ("t2",)
    assert "t2 runs dry in top, only t2" in found.text
    assert found.check in high.verdict_text


def test_heads_of_their_own_are_judged_by_what_each_needs(high: Result) -> None:
    """0.15 gpm/ft² × 130 ft² = 19.5 gpm needs (19.5/5.6)² = 12.1 psi, more than the listed 7 psi."""
    one = row(high, "top")
    given = {tag: flow / GPM for tag, flow, _ in one.head_flows}
    assert one.lowest_ratio == 0.0
    assert row(high, "near").lowest_ratio == pytest.approx(
        row(high, "near").sprinkler_flow / GPM / 19.5, rel=1e-9
    )
    needs = dict(zip((tag for tag, *_ in one.head_flows), one.head_needs, strict=True))
    assert {tag: (need or 0.0) / GPM for tag, need in needs.items()} == pytest.approx(
        {"t1": 19.5, "t2": 19.5}
    )
    assert given["t1"] > 0.0


def test_short_heads_outside_the_area_are_asked_about(tmp_path: Path) -> None:
    """At 230 ft no more than 110 − 99.7 = 10.3 psi is left, less than the 12.1 psi that 19.5 gpm need."""
    assert 110 - 230 * 62.4 / 144 < (19.5 / 5.6) ** 2
    nodes = [*NODES, "t1,230,sprinkler,A"]
    text = NO_HOSE + scenario("top", 'heads = ["t1"]')
    result = solved(tmp_path, text, nodes, [*PIPES, "z1,h2,t1,230,2"])
    found = finding(result, "scenarios")
    assert found.state == "ask authority" and found.tags == ("t1",)
    assert found.measured is not None and 0.0 < found.measured.value < 1.0


def test_what_is_drawn_beside_a_head_is_not_its_discharge(tmp_path: Path) -> None:
    """60 gpm drawn where h2 hangs: the head itself gives K√P of the pressure there and no more."""
    text = NO_HOSE + scenario("drawn at a head", "flows = { h2 = 60 }")
    result = solved(tmp_path, text, NODES, PIPES)
    told_of = row(result, "drawn at a head")
    for _, flow, pressure in told_of.head_flows:
        assert flow / GPM == pytest.approx(5.6 * (pressure / PSI) ** 0.5, rel=1e-6)
    heads = sum(flow for _, flow, _ in told_of.head_flows)
    assert told_of.sprinkler_flow == pytest.approx(heads)
    assert told_of.total_flow == pytest.approx(heads + 60 * GPM, rel=1e-6)
