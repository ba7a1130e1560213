"""The pages on pumps and tanks: every number is the result's own, figures draw what they say."""

from __future__ import annotations

import json
import re
from functools import cache
from pathlib import Path
from typing import Any

import pytest

from supplycheck.check import check_project
from supplycheck.report.build import build_document
from supplycheck.report.document import Figure, Heading, Section, Table
from supplycheck.report.drawing import Dot, Label, Line
from supplycheck.report.figures.timeline import tank_time_line
from supplycheck.report.sections.sources import sources
from supplycheck.results.json import result_json
from supplycheck.results.records import Result
from supplycheck.results.screen import screen_text
from supplycheck.units import METRIC

EXAMPLES = Path(__file__).parents[2] / "examples"


@cache
def result_of(name: str) -> Result:
    return check_project(EXAMPLES / name)


def section_of(name: str) -> Section:
    found = sources(result_of(name), 500.0)
    assert found is not None
    return found


def record_of(name: str) -> dict[str, Any]:
    found: dict[str, Any] = json.loads(result_json(result_of(name)))
    return found


def test_only_where_there_is_something_to_tell() -> None:
    assert sources(result_of("parcel-depot"), 500.0) is None
    titles = [section.title for section in build_document(result_of("parcel-depot")).sections]
    assert "Pumps and tanks" not in titles
    titles = [section.title for section in build_document(result_of("tank-and-pump")).sections]
    assert titles.index("Pumps and tanks") == titles.index("Water supply analysis") + 1


def test_states_of_the_pump_are_the_numbers_of_the_record() -> None:
    table = next(block for block in section_of("boosted-warehouse").blocks if isinstance(block, Table))
    states = record_of("boosted-warehouse")["pumps"][0]["states"]
    assert len(states) == len(table.rows) == 3
    keys = ("source_pressure", "suction", "net", "discharge", "at_test_header")
    for state, row in zip(states, table.rows, strict=True):
        assert row.cells[1] == f"{state['flow']:.1f}"
        assert row.cells[2] == f"{100 * state['share_of_rated_flow']:.1f}"
        assert row.cells[3:] == tuple(f"{state[key]:.1f}" for key in keys)


def test_graph_at_the_pump_shows_supply_pump_and_both() -> None:
    pump = result_of("boosted-warehouse").pumps[0]
    assert [curve.style for curve in pump.curves] == ["measured", "pump", "combined"]
    names = {point.name for point in pump.points}
    assert names == {"rated", "150 %", "demand", "available", "operating"}
    figures = [block for block in section_of("boosted-warehouse").blocks if isinstance(block, Figure)]
    texts = {item.text for item in figures[0].drawing.items if isinstance(item, Label)}
    assert {"main at the suction", "pump", "both together"} <= texts


def test_time_line_of_the_tank() -> None:
    tank = result_of("tank-and-pump").tanks[0]
    drawing = tank_time_line(tank, METRIC, (400.0, 200.0))
    assert drawing is not None
    texts = " ".join(item.text for item in drawing.items if isinstance(item, Label))
    record = record_of("tank-and-pump")["tanks"][0]
    assert f"empty after {record['minutes_at_nominal_flow']:.0f} min" in texts
    assert f"empty after {record['minutes_at_actual_flow']:.0f} min" in texts
    assert "must last 60 min" in texts
    dots = [item for item in drawing.items if isinstance(item, Dot)]
    assert len(dots) == 2 and all(dot.y == pytest.approx(52.0) for dot in dots)
    inside = [item for item in drawing.items if isinstance(item, Line)]
    assert all(0 <= x <= 400 and 0 <= y <= 200 for line in inside for x, y in line.points)


def test_the_needed_pump_is_told_where_the_supply_falls_short() -> None:
    blocks = section_of("short-workshop").blocks
    assert any(isinstance(block, Heading) and "needed" in block.text for block in blocks)
    table = next(block for block in blocks if isinstance(block, Table))
    record = record_of("short-workshop")["needed_pump"]
    assert record["missing"] == pytest.approx(-record_of("short-workshop")["margin"]["after_rule"])
    for option, row in zip(record["options"], table.rows, strict=True):
        assert row.cells[0] == f"{option['rated_flow']:.1f}"
        assert row.cells[1] == f"{option['rated_pressure']:.1f}"
    assert record_of("parcel-depot")["needed_pump"] is None


def test_the_screen_speaks_of_a_test_only_where_there_is_one() -> None:
    assert "(tank)" in screen_text(result_of("tank-and-pump"), "")
    assert re.search(r"\(test: static 40\.0 psi", screen_text(result_of("boosted-warehouse"), ""))
