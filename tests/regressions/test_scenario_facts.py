"""Scenarios that leave heads short or have no solution are told once, with the head that is worst off."""

from __future__ import annotations

from pathlib import Path

import pytest

import supplycheck.check as pipeline
from supplycheck.check import check
from supplycheck.context import scenario_facts
from supplycheck.errors import NotConvergedError
from supplycheck.project import read_project
from supplycheck.results.records import Result
from supplycheck.results.scenario_note import scenario_note
from supplycheck.units import US

EXAMPLES = Path(__file__).parents[2] / "examples"


@pytest.fixture(scope="module")
def shut_line() -> Result:
    return check(read_project(EXAMPLES / "spreadsheet-store" / "project.toml"))


@pytest.fixture(scope="module")
def campus() -> Result:
    return check(read_project(EXAMPLES / "two-supply-campus" / "project.toml"))


def test_a_failure_tells_its_remedy_once(shut_line: Result) -> None:
    note = shut_line.scenarios[1].note
    assert note.startswith("no solution: ")
    assert note.count("open the shut pipe") == 1


def test_a_remedy_that_the_message_lacks_is_added(monkeypatch: pytest.MonkeyPatch) -> None:
    def fail(*args: object, **names: object) -> None:
        raise NotConvergedError("stuck", cause="numbers", tags=(), remedy="give larger pipes")

    project = read_project(EXAMPLES / "two-supply-campus" / "project.toml")
    rows = vars(pipeline)["scenario_rows"]
    monkeypatch.setitem(rows.__globals__, "solve_operating", fail)
    row = check(project).scenarios[1]
    assert row.note == "no solution: stuck; give larger pipes"


def test_a_scenario_without_solution_is_a_question(shut_line: Result) -> None:
    found = next(one for one in shut_line.findings if one.check == "scenarios")
    assert found.state == "ask authority" and "one line shut" in found.remedy


def test_the_worst_head_is_the_least_share_of_its_own_need(campus: Result) -> None:
    """Recomputed from the rows: what really flows at each head over what that head needs."""
    needs = {node.tag: node.required_discharge for node in campus.nodes if node.in_design_area}
    found = next(one for one in campus.findings if one.check == "scenarios")
    row = campus.scenarios[1]
    shares = {tag: flow / need for tag, flow, _ in row.head_flows if (need := needs[tag])}
    worst = min(shares, key=lambda tag: shares[tag])
    assert found.measured is not None and found.measured.value == pytest.approx(shares[worst], rel=1e-9)
    assert found.tags == (worst,) and row.name in found.text


def test_a_scenario_tells_what_each_supply_gives(campus: Result) -> None:
    """All that is drawn comes from the supplies, and the note names each of them."""
    row = campus.scenarios[0]
    assert sum(flow for _, flow in row.shares) == pytest.approx(row.total_flow, rel=1e-9)
    note = scenario_note(row, US)
    assert all(f"{US.text(abs(flow), 'flow')} " in note and tag in note for tag, flow in row.shares if flow)
    assert {tag for tag, _ in row.shares} == {test.node for test in campus.project.supply.tests}


def test_the_question_tells_how_short_the_worst_head_is() -> None:
    result = check(read_project(EXAMPLES / "gridded-cold-store" / "project.toml"))
    found = next(one for one in result.findings if one.check == "scenarios")
    assert found.measured is not None and found.measured.value < 1
    share = f"{found.measured.value * 100:.1f}%"
    asked = [one for one in result.open_questions if one.startswith("Must the open heads")]
    assert len(asked) == 1 and f"{found.tags[0]} gets {share} of it" in asked[0]


def test_the_design_area_itself_is_no_scenario(campus: Result) -> None:
    assert [one.name for one in scenario_facts(campus.scenarios)] == ["Mill Lane shut"]
