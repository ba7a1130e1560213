"""Node, pipe, sprinkler and path tables as pandas frames, and their CSV and XLSX files.

Numbers are in the project's units, not rounded; the unit stands in the column's name. Both files are
byte-identical for identical input, and no text that a user typed can be executed by a spreadsheet.
"""

from __future__ import annotations

import datetime as dt
import io
from collections.abc import Mapping
from typing import Any, Final

import pandas as pd

from supplycheck.findings import Finding
from supplycheck.results.display import finding_text, in_order, measure_text, remedy_text, visible
from supplycheck.results.json_rows import Plain
from supplycheck.results.records import (
    FittingRow,
    NodeRow,
    PathStep,
    PipeRow,
    Placement,
    Result,
    ScenarioRow,
)
from supplycheck.results.scenario_note import scenario_note
from supplycheck.results.tables_duties import duty_tables
from supplycheck.results.tables_sources import curve_rows, source_tables
from supplycheck.units import UNIT_SETS, UnitSet

_EXECUTED: Final = ("=", "+", "-", "@", "\t", "\r", "\n")
_LONGEST: Final = 32767  # characters that a cell of a workbook holds

Cell = str | float | int | None
Record = dict[str, Cell]


class _Columns:
    """Names columns with their unit and turns SI values into plain numbers."""

    def __init__(self, units: UnitSet) -> None:
        self.units, self.plain = units, Plain(units)

    def __call__(self, name: str, value: float | None, kind: str) -> Record:
        symbol = self.units.symbol(kind)
        return {f"{name} [{symbol}]" if symbol else name: self.plain(value, kind)}


def frames(result: Result) -> dict[str, pd.DataFrame]:
    """Return every table of ``result`` by name: nodes, pipes, sprinklers (of the design area), path,
    fittings, supply (lines and points of the graph), placements, scenarios, findings; of pumps, tanks,
    hydrants and standpipes, the heads of each scenario and a second friction law where there are some.
    """
    units = UNIT_SETS[result.project.units]
    make = _Columns(units)
    area = [node for node in result.nodes if node.in_design_area]
    some = {
        "second_law": [
            _second(row, make) for row in result.pipes if row.second_law_friction_loss is not None
        ],
        "scenario_heads": [one for row in result.scenarios for one in _heads(row, make)],
        **source_tables(result.pumps, result.needed_pump, result.tanks, make),
        **duty_tables(result.duties, make),
    }
    return {
        "nodes": _frame([_node(row, make) for row in result.nodes]),
        "pipes": _frame([_pipe(row, make) for row in result.pipes]),
        "sprinklers": _frame([_sprinkler(row, make) for row in area]),
        "path": _frame([_step(number, row, make) for number, row in enumerate(result.path, start=1)]),
        "fittings": _frame([_fitting(row, make) for row in result.fittings]),
        "supply": _frame(curve_rows(result.curves, result.points, make)),
        "placements": _frame([_placement(one, result, make) for one in result.design_area.placements]),
        "scenarios": _frame([_scenario(row, make) for row in result.scenarios]),
        **{name: _frame(rows) for name, rows in some.items() if rows},
        "findings": _frame([_finding(one, units) for one in in_order(result.findings)]),
    }


def _frame(records: list[Record]) -> pd.DataFrame:
    return pd.DataFrame.from_records(records)


def _node(row: NodeRow, make: _Columns) -> Record:
    return {
        "node": row.tag,
        "kind": row.kind,
        **make("x", row.x, "length"),
        **make("y", row.y, "length"),
        **make("elevation", row.elevation, "length"),
        **make("k_factor", row.k_factor, "k_factor"),
        **make("pressure", row.pressure, "pressure"),
        **make("discharge", row.discharge, "flow"),
        **make("required_discharge", row.required_discharge, "flow"),
        **make("required_pressure", row.required_pressure, "pressure"),
        "required_by": row.required_by,
        **make("area", row.area, "area"),
        **make("velocity_pressure", row.velocity_pressure, "pressure"),
        "branch_line": row.branch_line,
        "sprinkler": row.sprinkler,
        "in_design_area": "yes" if row.in_design_area else "no",
        "note": row.note,
    }


def _sprinkler(row: NodeRow, make: _Columns) -> Record:
    return {
        "head": row.tag,
        "sprinkler": row.sprinkler,
        "branch_line": row.branch_line,
        **make("k_factor", row.k_factor, "k_factor"),
        **make("area", row.area, "area"),
        **make("required_discharge", row.required_discharge, "flow"),
        **make("discharge", row.discharge, "flow"),
        **make("required_pressure", row.required_pressure, "pressure"),
        **make("pressure", row.pressure, "pressure"),
        "required_by": row.required_by,
    }


def _pipe(row: PipeRow, make: _Columns) -> Record:
    return {
        "pipe": row.tag,
        "from": row.start,
        "to": row.end,
        "role": row.role,
        **make("flow_added", row.flow_added, "flow"),
        **make("flow", row.flow, "flow"),
        **make("velocity", row.velocity, "velocity"),
        "nominal": row.nominal,
        "material": row.material,
        **make("bore", row.bore, "size"),
        **make("c_factor", row.c_factor, "ratio"),
        **make("roughness", row.roughness, "roughness"),
        **make("friction_factor", row.friction_factor, "ratio"),
        **make("reynolds", row.reynolds, "ratio"),
        **make("length", row.length, "length"),
        **make("equivalent_length", row.equivalent_length, "length"),
        **make("total_length", row.total_length, "length"),
        "fittings": row.fittings_text,
        "devices": "; ".join(row.devices),
        "valve": row.valve,
        **make("friction_gradient", row.friction_gradient, "gradient"),
        **make("start_pressure", row.start_pressure, "pressure"),
        **make("friction_loss", row.friction_loss, "pressure"),
        **make("elevation_loss", row.elevation_loss, "pressure"),
        **make("device_loss", row.device_loss, "pressure"),
        **make("end_pressure", row.end_pressure, "pressure"),
        **make("second_law_friction_loss", row.second_law_friction_loss, "pressure"),
        "note": row.note,
    }


def _step(number: int, row: PathStep, make: _Columns) -> Record:
    return {
        "step": number,
        "from": row.start,
        "to": row.end,
        "pipe": row.pipe,
        "nominal": row.nominal,
        **make("bore", row.bore, "size"),
        **make("c_factor", row.c_factor, "ratio"),
        **make("friction_factor", row.friction_factor, "ratio"),
        **make("flow_added", row.flow_added, "flow"),
        **make("flow", row.flow, "flow"),
        **make("length", row.length, "length"),
        **make("equivalent_length", row.equivalent_length, "length"),
        **make("total_length", row.total_length, "length"),
        "fittings": row.fittings_text,
        **make("friction_gradient", row.friction_gradient, "gradient"),
        **make("pressure_start", row.pressure_start, "pressure"),
        **make("friction", row.friction, "pressure"),
        **make("fitting_friction", row.fitting_friction, "pressure"),
        **make("elevation", row.elevation, "pressure"),
        **make("device", row.device, "pressure"),
        **make("pressure_end", row.pressure_end, "pressure"),
        **make("k_at_start", row.k_at_start, "k_factor"),
        "note": row.note,
    }


def _placement(one: Placement, result: Result, make: _Columns) -> Record:
    area = result.design_area
    named = {
        "governing": area.governing.heads,
        "runner-up": area.runner_up.heads if area.runner_up else (),
        "most favourable": area.most_favourable.heads if area.most_favourable else (),
    }
    return {
        "placement": one.label,
        "place": ", ".join(word for word, heads in named.items() if heads == one.heads),
        **make("required_pressure", one.required_pressure, "pressure"),
        **make("flow", one.flow, "flow"),
        **make("margin", one.margin, "pressure"),
        **make("area", one.area, "area"),
        **make("x", one.x, "length"),
        **make("y", one.y, "length"),
        "heads": "; ".join(one.heads),
    }


def _scenario(row: ScenarioRow, make: _Columns) -> Record:
    return {
        "scenario": row.name,
        **make("total_flow", row.total_flow, "flow"),
        **make("supply_pressure", row.supply_pressure, "pressure"),
        **make("sprinkler_flow", row.sprinkler_flow, "flow"),
        "heads_open": row.heads_open,
        "lowest_head": row.lowest_head,
        **make("lowest_pressure", row.lowest_pressure, "pressure"),
        **make("lowest_ratio", row.lowest_ratio, "ratio"),
        **make("delivered_density", row.delivered_density, "density"),
        **make("over_discharge", row.over_discharge, "ratio"),
        **make("lasts", _seconds(row.minutes_of_storage), "time"),
        "note": scenario_note(row, make.units),
    }


def _seconds(minutes: float | None) -> float | None:
    return None if minutes is None else minutes * 60.0


def _heads(row: ScenarioRow, make: _Columns) -> list[Record]:
    needs = row.head_needs or (None,) * len(row.head_flows)
    return [
        {
            "scenario": row.name,
            "head": tag,
            **make("flow", flow, "flow"),
            **make("pressure", pressure, "pressure"),
            **make("required_flow", need, "flow"),
        }
        for (tag, flow, pressure), need in zip(row.head_flows, needs, strict=True)
    ]


def _second(row: PipeRow, make: _Columns) -> Record:
    return {
        "pipe": row.tag,
        "from": row.start,
        "to": row.end,
        **make("flow", row.flow, "flow"),
        **make("bore", row.bore, "size"),
        **make("roughness", row.roughness, "roughness"),
        **make("total_length", row.total_length, "length"),
        **make("friction_loss", row.friction_loss, "pressure"),
        **make("second_law_friction_loss", row.second_law_friction_loss, "pressure"),
    }


def _fitting(row: FittingRow, make: _Columns) -> Record:
    return {
        "fitting": row.name,
        "nominal": row.nominal,
        "pipe_kind": row.pipe_kind,
        "count": row.count,
        **make("bore", row.bore, "size"),
        **make("c_factor", row.c_factor, "ratio"),
        **make("table_length", row.table_length, "length"),
        **make("c_multiplier", row.c_multiplier, "ratio"),
        **make("bore_factor", row.bore_factor, "ratio"),
        **make("length", row.length, "length"),
        **make("minor_k", row.minor_k, "ratio"),
        "source": row.source,
    }


def _finding(one: Finding, units: UnitSet) -> Record:
    return {
        "check": one.check,
        "state": one.state,
        "text": finding_text(one, units),
        "measured": measure_text(one.measured, units) if one.measured else None,
        "limit": measure_text(one.limit, units) if one.limit else None,
        "source": one.source,
        "tags": "; ".join(one.tags),
        "remedy": remedy_text(one, units),
    }


def disarmed(text: str) -> str:
    """Return ``text`` so that a spreadsheet reads it as text: an apostrophe before a formula sign.

    >>> disarmed("=1+1"), disarmed("H-1")
    ("'=1+1", 'H-1')
    """
    return f"'{text}" if text.lstrip(" ").startswith(_EXECUTED) or text.startswith(_EXECUTED) else text


def csv_text(frame: pd.DataFrame) -> str:
    """Return ``frame`` as CSV with a header row and ``\\n`` line ends; empty where there is no value.

    Control characters in texts are written out, so that a row is always one line.
    """
    safe = frame.map(lambda cell: disarmed(visible(cell)) if isinstance(cell, str) else cell)
    return safe.to_csv(index=False, lineterminator="\n")


def csv_files(result: Result) -> dict[str, str]:
    """Return file name and text of the tables that are written as CSV."""
    return {f"{name}.csv": csv_text(frame) for name, frame in frames(result).items() if len(frame)}


def xlsx_bytes(tables: Mapping[str, pd.DataFrame], date: dt.date) -> bytes:
    """Return ``tables`` as a workbook, one sheet each; ``date`` stands as the time it was made.

    Text cells are stored as text, so that a leading ``=`` is shown and not executed.
    """
    from xlsxwriter import Workbook

    out = io.BytesIO()
    with Workbook(out, {"in_memory": True}) as book:
        book.set_properties({"created": dt.datetime(date.year, date.month, date.day)})
        formats = book.add_format({"bold": True}), book.add_format({"quote_prefix": True})
        for name, frame in tables.items():
            _sheet(book.add_worksheet(name[:31]), frame, *formats)
    return out.getvalue()


def xlsx_file(result: Result) -> bytes:
    """Return all tables of ``result`` as one workbook."""
    return xlsx_bytes(frames(result), result.project.facts.date)


def _sheet(sheet: Any, frame: pd.DataFrame, bold: Any, quoted: Any) -> None:
    sheet.freeze_panes(1, 1)
    for column, title in enumerate(frame.columns):
        cells = frame[title].tolist()
        widest = max((len(cell) for cell in cells if isinstance(cell, str)), default=10)
        sheet.set_column(column, column, min(max(widest, len(title), 8) + 2, 48))
        sheet.write_string(0, column, title, bold)
        for row, cell in enumerate(cells, start=1):
            if isinstance(cell, str):
                text = visible(cell)[:_LONGEST]
                sheet.write_string(row, column, text, quoted if text.startswith(_EXECUTED) else None)
            elif cell is not None and cell == cell:
                sheet.write_number(row, column, cell)
