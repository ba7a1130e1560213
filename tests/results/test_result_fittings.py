"""The table of equivalent lengths: every length of the project can be derived from it by hand."""

from __future__ import annotations

from pathlib import Path

import pytest

from supplycheck.check import check_project
from supplycheck.report.document import Table
from supplycheck.report.sections.rows import pipe_information
from supplycheck.results.json import result_record
from supplycheck.results.records import Result

FOLDER = Path(__file__).parents[2] / "examples"
PRINTED = {100.0: 0.713, 120.0: 1.0, 130.0: 1.16, 140.0: 1.33, 150.0: 1.51}
"""Multipliers for C as NFPA 13 prints them (from memory), to three digits: half a unit is 0.005."""
ORIGINS = {"loss coefficient as written", "length as written"}


@pytest.fixture(scope="module", params=["parcel-depot", "office-floor", "yard-main", "spreadsheet-store"])
def result(request: pytest.FixtureRequest) -> Result:
    return check_project(FOLDER / request.param / "project.toml")


def test_the_rows_add_up_to_every_equivalent_length(result: Result) -> None:
    rows = {(row.name, row.pipe_kind, row.bore, row.c_factor, row.source): row for row in result.fittings}
    assert rows
    for pipe in result.project.system.pipes:
        total = 0.0
        for one in pipe.fittings:
            row = rows[(one.name, pipe.kind, pipe.bore, pipe.c_factor, one.source)]
            total += one.count * row.table_length * row.c_multiplier * row.bore_factor
        assert total == pytest.approx(pipe.equivalent_length, rel=1e-12, abs=1e-12)
    fittings = [one for pipe in result.project.system.pipes for one in pipe.fittings]
    assert sum(row.count for row in result.fittings) == sum(one.count for one in fittings)


def test_the_multiplier_for_c_is_the_published_one(result: Result) -> None:
    for row in result.fittings:
        if row.c_factor in PRINTED and row.source not in ORIGINS:
            assert row.c_multiplier == pytest.approx(PRINTED[row.c_factor], abs=0.005)


def test_schedule_40_pipe_has_the_bore_of_the_table(result: Result) -> None:
    """NFPA 13 prints its lengths for Schedule 40 steel: there the factor is one."""
    materials = {kind.name: kind.material for kind in result.project.system.pipe_kinds}
    for row in result.fittings:
        if materials[row.pipe_kind] == "steel schedule 40" and row.source not in ORIGINS:
            assert row.bore_factor == pytest.approx(1.0, rel=1e-12)


def test_the_report_and_the_file_show_each_row(result: Result) -> None:
    tables = {one.title: one for one in pipe_information(result).blocks if isinstance(one, Table)}
    assert len(tables["Equivalent lengths"].rows) == len(result.fittings)
    record = result_record(result)["fittings"]
    assert len(record) == len(result.fittings)
    for one in record:
        product = one["table_length"] * one["c_multiplier"] * one["bore_factor"]
        assert one["length"] == pytest.approx(product, rel=1e-12)
        assert one["source"]


def test_devices_are_printed_with_their_points() -> None:
    """The invented meter of the office: 0.03 bar at 400 L/min, as the project file has it."""
    result = check_project(FOLDER / "office-floor" / "project.toml")
    tables = {one.title: one for one in pipe_information(result).blocks if isinstance(one, Table)}
    row = next(row for row in tables["Devices"].rows if row.cells[0] == "meter")
    assert "0.0: 0.00; 400.0: 0.03" in row.cells[3]
    assert "invented" in row.cells[4]
