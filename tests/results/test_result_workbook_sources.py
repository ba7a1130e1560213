"""The workbook of real projects, read back by a general reader and compared with `result.json`."""

from __future__ import annotations

import io
import json
import math
import re
from pathlib import Path
from typing import Any

import openpyxl
import pandas as pd
import pytest

from supplycheck.check import check_project
from supplycheck.report.package import package_files

EXAMPLES = Path(__file__).parents[2] / "examples"
Record = dict[str, Any]

STATES = ("flow", "suction", "net", "discharge", "source_pressure", "share_of_rated_flow", "at_test_header")
TANK = {
    "volume": "volume",
    "nominal_volume": "nominal_volume",
    "actual_volume": "actual_volume",
    "refill_credit": "refill_credit",
    "spare_volume": "spare_volume",
    "lasts_at_nominal_flow": "minutes_at_nominal_flow",
    "lasts_at_actual_flow": "minutes_at_actual_flow",
    "refill_time": "refill_time",
    "duration": "duration",
    "actual_flow": "actual_flow",
    "water_level": "water_level",
}


def package(path: Path) -> tuple[Record, dict[str, pd.DataFrame]]:
    """Return `result.json` and the sheets of `tables.xlsx` of a project."""
    files = package_files(check_project(path))
    sheets = pd.read_excel(io.BytesIO(files["tables.xlsx"]), sheet_name=None, keep_default_na=False)
    return json.loads(files["result.json"]), sheets


@pytest.fixture(scope="module")
def tank_house() -> tuple[Record, dict[str, pd.DataFrame]]:
    return package(EXAMPLES / "tank-and-pump" / "project.toml")


def column(frame: pd.DataFrame, name: str) -> list[Any]:
    """Return the column ``name`` whatever its unit; an empty cell is ``None``."""
    found = [title for title in frame.columns if re.sub(r" \[.*\]$", "", title) == name]
    assert len(found) == 1, (name, list(frame.columns))
    return [None if cell == "" else cell for cell in frame[found[0]].tolist()]


def same(cells: list[Any], wanted: list[Any]) -> None:
    assert len(cells) == len(wanted)
    for cell, value in zip(cells, wanted, strict=True):
        if isinstance(value, float):
            assert math.isclose(cell, value, rel_tol=1e-12, abs_tol=1e-12)
        else:
            assert (cell or "") == (value or "")


def test_operating_points_of_a_pump(tank_house: tuple[Record, dict[str, pd.DataFrame]]) -> None:
    record, sheets = tank_house
    pump = record["pumps"][0]
    rows = sheets["pumps"]
    assert list(rows["pump"]) == [pump["tag"]]
    for name in ("rated_flow", "rated_pressure", "churn", "net_at_150_percent", "highest_discharge"):
        same(column(rows, name), [pump[name]])
    states = sheets["pump_states"]
    same(column(states, "state"), [one["name"] for one in pump["states"]])
    for name in STATES:
        same(column(states, name), [one[name] for one in pump["states"]])
    assert {"flow [L/min]", "suction [bar]", "net [bar]", "discharge [bar]"} <= set(states.columns)
    curves = sheets["pump_curves"]
    flows = [flow for curve in pump["curves"] for flow in curve["flows"]]
    same(column(curves, "flow"), flows + [point["flow"] for point in pump["points"]])


def test_stored_water_and_how_long_it_lasts(tank_house: tuple[Record, dict[str, pd.DataFrame]]) -> None:
    record, sheets = tank_house
    tank, rows = record["tanks"][0], sheets["tanks"]
    for name, key in TANK.items():
        same(column(rows, name), [tank[key]])
    assert {"volume [m³]", "lasts_at_actual_flow [min]", "refill [L/min]"} <= set(rows.columns)
    # 95 m³ less the flow of a tank that gains 60 L/min: V = (Q - refill) t, common arithmetic
    taken = (tank["actual_flow"] - 60.0) * rows["lasts_at_actual_flow [min]"][0] / 1000.0
    assert taken == pytest.approx(95.0, rel=1e-9)
    times = sheets["tank_times"]
    same(column(times, "time"), [time for line in tank["time_line"] for time in line["times"]])
    same(column(times, "volume_left"), [left for line in tank["time_line"] for left in line["volumes"]])


def test_a_pump_that_would_be_needed() -> None:
    record, sheets = package(EXAMPLES / "short-workshop" / "project.toml")
    needed, rows = record["needed_pump"], sheets["needed_pump"]
    assert needed["options"]
    same(column(rows, "rated_flow"), [one["rated_flow"] for one in needed["options"]])
    same(column(rows, "rated_pressure"), [one["rated_pressure"] for one in needed["options"]])
    same(column(rows, "missing"), [needed["missing"]] * len(rows))
    assert "pumps" not in sheets and "tanks" not in sheets


def test_second_law_scenarios_fittings_and_supply() -> None:
    record, sheets = package(EXAMPLES / "office-floor" / "project.toml")
    pipes = [one for one in record["pipes"] if one["second_law_friction_loss"] is not None]
    assert pipes
    same(column(sheets["second_law"], "pipe"), [one["tag"] for one in pipes])
    for name in ("friction_loss", "second_law_friction_loss"):
        same(column(sheets["second_law"], name), [one[name] for one in pipes])
    heads = [(one["name"], head["tag"]) for one in record["scenarios"] for head in one["heads"]]
    told = sheets["scenario_heads"]
    assert list(zip(told["scenario"], told["head"], strict=True)) == heads
    same(column(sheets["fittings"], "length"), [one["length"] for one in record["fittings"]])
    curve = record["supply"]["curves"][0]
    line = sheets["supply"][sheets["supply"]["line"] == curve["name"]]
    same(column(line, "pressure")[: len(curve["pressures"])], curve["pressures"])


def test_every_column_of_numbers_says_its_unit(tank_house: tuple[Record, dict[str, pd.DataFrame]]) -> None:
    """A heading without a unit belongs to a text, a count or a plain ratio."""
    plain = {
        "c_factor", "friction_factor", "reynolds", "step", "count", "c_multiplier", "bore_factor",
        "minor_k", "lowest_ratio", "over_discharge", "heads_open", "churn_share", "share_at_150_percent",
        "share_of_rated_flow", "tried", "measured", "limit",
    }  # fmt: skip
    for name, frame in tank_house[1].items():
        for title in frame.columns:
            numbers = [cell for cell in frame[title] if isinstance(cell, int | float)]
            if numbers and len(numbers) == sum(cell != "" for cell in frame[title]):
                assert "[" in title or title in plain or _tags(name, title), (name, title)


def _tags(sheet: str, title: str) -> bool:
    """Return whether a column that reads as numbers holds names, such as node 10 or nominal size 50."""
    return title in {"node", "from", "to", "pipe", "nominal", "branch_line", "head", "placement"}


def test_water_that_never_ends_leaves_an_empty_cell(tmp_path: Path) -> None:
    """A refill above the demand lasts without end; a workbook has no number for that."""
    text = (EXAMPLES / "tank-and-pump" / "project.toml").read_text(encoding="utf-8")
    assert text.count("refill = ") == 1
    text = re.sub(r"refill = \S+", "refill = 5000", text)
    (tmp_path / "project.toml").write_text(text, encoding="utf-8")
    record, sheets = package(tmp_path / "project.toml")
    assert record["tanks"][0]["minutes_at_actual_flow"] is None
    assert column(sheets["tanks"], "lasts_at_actual_flow") == [None]
    assert "refill keeps up" in sheets["tanks"]["note"][0]
    assert all(cell is None for cell in column(sheets["scenarios"], "lasts"))


def test_the_workbook_opens_with_its_headings_frozen() -> None:
    files = package_files(check_project(EXAMPLES / "boosted-warehouse" / "project.toml"))
    book = openpyxl.load_workbook(io.BytesIO(files["tables.xlsx"]))
    assert {"pumps", "pump_states", "pump_curves"} <= set(book.sheetnames)
    for sheet in book.worksheets:
        if sheet.max_row > 1:
            assert sheet.freeze_panes == "B2" and sheet["A1"].font.bold


@pytest.mark.parametrize("name", ["tank-and-pump", "office-floor", "yard-main", "short-workshop"])
def test_every_sheet_is_described(name: str) -> None:
    page = (EXAMPLES.parent / "docs" / "report.md").read_text(encoding="utf-8")
    _, sheets = package(EXAMPLES / name / "project.toml")
    for sheet in sheets:
        assert re.search(rf"\b{sheet}\b", page), sheet
