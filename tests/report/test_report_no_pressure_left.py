"""A supply that cannot give the flow: no negative pressure is printed as available anywhere."""

from __future__ import annotations

import re
from dataclasses import replace
from pathlib import Path

import pytest
from duty_projects import supply, written

from supplycheck.check import check_project
from supplycheck.commands.portfolio import Job, Outcome, _line
from supplycheck.report.build import build_document
from supplycheck.report.document import Facts, Figure, Table
from supplycheck.report.drawing import Box, Dot, Label
from supplycheck.report.figures.graph import supply_graph
from supplycheck.results.display import NOT_AT_ALL, finding_text
from supplycheck.results.records import Result
from supplycheck.results.screen import screen_text
from supplycheck.units import US

RULE = '[[supply.adjustment]]\nkind = "low supply"\npressure = 3\nreason = "invented"\n'


@pytest.fixture(scope="module")
def result(tmp_path_factory: pytest.TempPathFactory) -> Result:
    """A main that gives 300 gpm at 30 psi, and an outlet that draws 900 gpm."""
    folder = tmp_path_factory.mktemp("site")
    nodes = ["S,0,supply", "B,0,outlet,,900"]
    return check_project(written(folder, RULE, nodes, ["x,S,B,100,6"], test=supply(60, 30, 300)))


def test_the_case_is_one(result: Result) -> None:
    assert result.supply.available_pressure < 0
    assert result.supply.unadjusted_pressure < 0
    assert result.verdict == "not adequate"


def test_the_graph_says_none_and_stays_above_zero(result: Result) -> None:
    drawing = supply_graph(result.curves, result.points, US, (522.0, 330.0))
    labels = [item for item in drawing.items if isinstance(item, Label)]
    assert any(label.text == "available: none at 900.0 gpm" for label in labels)
    assert not any("−" in label.text for label in labels)
    frame = next(item for item in drawing.items if isinstance(item, Box) and item.fill is None)
    marks = [item for item in drawing.items if isinstance(item, Dot) and item.y > frame.y - 1]
    assert marks
    for mark in marks:
        assert frame.y <= mark.y <= frame.y + frame.height
        assert frame.x <= mark.x <= frame.x + frame.width


def test_the_water_supply_says_none(result: Result) -> None:
    section = next(one for one in build_document(result).sections if one.title == "Water supply analysis")
    facts = dict(pair for one in section.blocks if isinstance(one, Facts) for pair in one.pairs)
    assert facts["Available there"] == facts["Before adjustments"] == NOT_AT_ALL
    tables = {one.title: one for one in section.blocks if isinstance(one, Table)}
    steps = tables["The curve, step by step"].rows
    last = next(row for row in steps if row.cells[0].startswith("Available at"))
    assert last.cells[2] == "none"
    assert "past the zero of the curve" in last.note
    assert not any(row.cells[2].startswith("−") for row in steps)


def test_the_pump_that_is_needed_has_no_suction(result: Result) -> None:
    assert result.needed_pump is not None
    assert result.needed_pump.suction < 0
    text = repr(next(one for one in build_document(result).sections if one.title == "Pumps and tanks"))
    assert "no pressure left for its suction" in text
    assert not re.search(r"on −|'−", text)


def test_no_text_of_the_first_page_and_the_screen_holds_a_negative_available(result: Result) -> None:
    first = build_document(result).sections[0]
    below = US.number(result.supply.available_pressure, "pressure")
    assert below.startswith("−")
    for text in (repr(first), screen_text(result)):
        assert below not in text
    figures = [one for one in first.blocks if isinstance(one, Figure)]
    assert figures


def test_the_finding_on_the_main_says_that_nothing_is_left(result: Result) -> None:
    found = next(one for one in result.findings if one.check == "pressure left in the main")
    assert found.measured is None
    assert finding_text(found, US).startswith("No pressure is left in the main")


def test_the_line_of_a_portfolio_says_none() -> None:
    job = Job("weak", Path("project.toml"), Path("review"))
    units = {"flow": "gpm", "pressure": "psi"}
    told = Outcome(
        job, 1, "not adequate", "weak", units=units, demand_flow=900.0, demand=40.0, available=-160.2,
        margin=-200.2, required=0.0, fails=2,
    )  # fmt: skip
    assert re.search(r"900 gpm at 40\.0 psi\s+none\s+−200\.2 psi", _line(told, 8))
    assert re.search(r"at 40\.0 psi\s+–\s", _line(replace(told, available=None), 8))
