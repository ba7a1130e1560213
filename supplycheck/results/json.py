"""``result.json``: the result as plain numbers in the project's units.

Numbers are not rounded: rounding belongs to display. A value that does not exist or is not finite is
``null``; NaN is never written. Keys beyond those documented may be added, none is taken away without a
new ``schema``.
"""

from __future__ import annotations

import json
import math
from collections.abc import Iterable, Mapping
from typing import Any, Final

from supplycheck.findings import Finding, Measure
from supplycheck.model import Assumption
from supplycheck.results.display import finding_text, remedy_text
from supplycheck.results.records import (
    DesignAreaRecord,
    HandStep,
    NodeRow,
    PathStep,
    PipeRow,
    Placement,
    Result,
    ScenarioRow,
)
from supplycheck.results.totals import path_totals
from supplycheck.units import UNIT_SETS, UnitSet

SCHEMA: Final = "supplycheck/result/1"

Record = dict[str, Any]


class Plain:
    """Turns SI values into plain numbers of one unit set."""

    def __init__(self, units: UnitSet) -> None:
        self.units = units

    def __call__(self, value: float | None, kind: str) -> float | None:
        """Return ``value`` [SI] in the unit of ``kind``; ``None`` where it is not finite."""
        if value is None or not math.isfinite(value):
            return None
        number = self.units.from_si(value, kind) if kind in self.units.units else float(value)
        return number if number else 0.0

    def record(self, fields: Mapping[str, tuple[float | None, str]]) -> Record:
        """Return (value, kind) pairs as numbers."""
        return {name: self(value, kind) for name, (value, kind) in fields.items()}

    def measure(self, measure: Measure | None) -> float | None:
        """Return the number of ``measure``."""
        return None if measure is None else self(measure.value, measure.kind)

    def unit(self, measure: Measure | None) -> str | None:
        """Return the unit symbol of ``measure``."""
        if measure is None:
            return None
        return self.units.symbol(measure.kind) if measure.kind in self.units.units else ""


def result_json(result: Result) -> str:
    """Return the text of ``result.json``: two-space indent, keys in documented order, final newline."""
    return json.dumps(result_record(result), indent=2, ensure_ascii=False, allow_nan=False) + "\n"


def result_record(result: Result) -> Record:
    """Return ``result`` as plain dictionaries and lists in the project's units."""
    units = UNIT_SETS[result.project.units]
    plain = Plain(units)
    facts = result.project.facts
    return {
        "schema": SCHEMA,
        "version": result.version,
        "units": {kind: units.symbol(kind) for kind in units.units},
        "project": {
            "title": facts.title,
            "site": facts.site,
            "stage": facts.stage,
            "date": facts.date.isoformat(),
            "standard": facts.standard,
            "authority": facts.authority,
            "hazard": result.project.criteria.hazard,
            "system": result.project.criteria.system,
        },
        "verdict": result.verdict,
        "verdict_text": result.verdict_text,
        "governs": result.governs,
        "demand": _demand(result, plain),
        "supply": _supply(result, plain),
        "margin": _margin(result, plain),
        "design_area": _design_area(result.design_area, plain),
        "nodes": [_node(row, plain) for row in result.nodes],
        "pipes": [_pipe(row, plain) for row in result.pipes],
        "path": [_path_step(step, plain) for step in result.path],
        "path_totals": _path_totals(result, plain),
        "hand_check": _steps(result.hand_check, plain),
        "scenarios": [_scenario(row, plain) for row in result.scenarios],
        "balance": _balance(result, plain),
        "findings": [finding_record(finding, units) for finding in result.findings],
        "open_questions": list(result.open_questions),
        "assumptions": [_assumption(one) for one in result.project.assumptions],
        "files": [
            {"name": one.name, "sha256": one.sha256, "size": one.size} for one in result.project.files
        ],
        "versions": dict(result.library_versions),
    }


def _demand(result: Result, plain: Plain) -> Record:
    demand = result.demand
    numbers = plain.record(
        {
            "flow": (demand.flow, "flow"),
            "pressure": (demand.pressure, "pressure"),
            "sprinkler_flow": (demand.sprinkler_flow, "flow"),
            "hose_flow": (demand.hose_flow, "flow"),
        }
    )
    return {
        **numbers,
        "node": demand.node,
        "heads": demand.heads,
        "governing_head": demand.governing_head,
        "governing_by": demand.governing_by,
    }


def _supply(result: Result, plain: Plain) -> Record:
    supply = result.supply
    numbers = plain.record(
        {
            "static": (supply.static, "pressure"),
            "residual": (supply.residual, "pressure"),
            "test_flow": (supply.test_flow, "flow"),
            "available_pressure": (supply.available_pressure, "pressure"),
            "available_flow": (supply.available_flow, "flow"),
            "unadjusted_pressure": (supply.unadjusted_pressure, "pressure"),
            "static_at_comparison": (supply.static_at_comparison, "pressure"),
            "flow_at_20_psi": (supply.flow_at_20_psi, "flow"),
            "tested_range_ratio": (supply.tested_range_ratio, "ratio"),
        }
    )
    curves = [
        {
            "name": curve.name,
            "style": curve.style,
            "flows": [plain(flow, "flow") for flow in curve.flows],
            "pressures": [plain(pressure, "pressure") for pressure in curve.pressures],
            "extrapolated_from": plain(curve.extrapolated_from, "flow"),
        }
        for curve in result.curves
    ]
    points = [
        {
            "name": point.name,
            "style": point.style,
            "flow": plain(point.flow, "flow"),
            "pressure": plain(point.pressure, "pressure"),
        }
        for point in result.points
    ]
    return {
        **numbers,
        "statement": supply.statement,
        "steps": _steps(supply.steps, plain),
        "tests": [_test(test, plain) for test in result.project.supply.tests],
        "curves": curves,
        "points": points,
    }


def _test(test: Any, plain: Plain) -> Record:
    points = [
        {
            "residual": plain(point.residual, "pressure"),
            "flow": plain(point.flow, "flow"),
            "outlets": [
                {
                    "diameter": plain(outlet.diameter, "size"),
                    "coefficient": plain(outlet.coefficient, "ratio"),
                    "pitot": plain(outlet.pitot, "pressure"),
                    "pumper_factor": plain(outlet.pumper_factor, "ratio"),
                }
                for outlet in point.outlets
            ],
        }
        for point in test.points
    ]
    return {
        "tag": test.tag,
        "node": test.node,
        "date": test.date.isoformat(),
        "static": plain(test.static, "pressure"),
        "gauge_elevation": plain(test.gauge_elevation, "length"),
        "points": points,
    }


def _margin(result: Result, plain: Plain) -> Record:
    margin = result.margin
    numbers = plain.record(
        {
            "pressure": (margin.pressure, "pressure"),
            "required": (margin.required, "pressure"),
            "after_rule": (margin.after_rule, "pressure"),
        }
    )
    return {
        **numbers,
        "rule": margin.rule,
        "source": margin.source,
        "steps": _steps(margin.steps, plain),
    }


def _design_area(area: DesignAreaRecord, plain: Plain) -> Record:
    def placement(one: Placement | None) -> Record | None:
        if one is None:
            return None
        numbers = plain.record(
            {
                "required_pressure": (one.required_pressure, "pressure"),
                "flow": (one.flow, "flow"),
                "margin": (one.margin, "pressure"),
                "area": (one.area, "area"),
                "x": (one.x, "length"),
                "y": (one.y, "length"),
            }
        )
        return {"label": one.label, **numbers, "heads": list(one.heads)}

    return {
        "mode": area.mode,
        "statement": area.statement,
        "tried": area.tried,
        "governing": placement(area.governing),
        "runner_up": placement(area.runner_up),
        "most_favourable": placement(area.most_favourable),
        "placements": [placement(one) for one in area.placements],
        "steps": _steps(area.steps, plain),
    }


def _steps(steps: Iterable[HandStep], plain: Plain) -> list[Record]:
    return [
        {
            "step": step.step,
            "formula": step.formula,
            "value": plain(step.value, step.kind),
            "unit": plain.unit(Measure(step.value, step.kind)),
            "note": step.note,
        }
        for step in steps
    ]


def _node(row: NodeRow, plain: Plain) -> Record:
    numbers = plain.record(
        {
            "x": (row.x, "length"),
            "y": (row.y, "length"),
            "elevation": (row.elevation, "length"),
            "pressure": (row.pressure, "pressure"),
            "discharge": (row.discharge, "flow"),
            "k_factor": (row.k_factor, "k_factor"),
            "required_discharge": (row.required_discharge, "flow"),
            "required_pressure": (row.required_pressure, "pressure"),
            "area": (row.area, "area"),
            "velocity_pressure": (row.velocity_pressure, "pressure"),
        }
    )
    return {
        "tag": row.tag,
        "kind": row.kind,
        **numbers,
        "required_by": row.required_by,
        "branch_line": row.branch_line,
        "sprinkler": row.sprinkler,
        "in_design_area": row.in_design_area,
        "note": row.note,
    }


def _pipe(row: PipeRow, plain: Plain) -> Record:
    numbers = plain.record(
        {
            "flow": (row.flow, "flow"),
            "flow_added": (row.flow_added, "flow"),
            "velocity": (row.velocity, "velocity"),
            "bore": (row.bore, "size"),
            "c_factor": (row.c_factor, "ratio"),
            "roughness": (row.roughness, "roughness"),
            "friction_factor": (row.friction_factor, "ratio"),
            "reynolds": (row.reynolds, "ratio"),
            "length": (row.length, "length"),
            "equivalent_length": (row.equivalent_length, "length"),
            "total_length": (row.total_length, "length"),
            "friction_gradient": (row.friction_gradient, "gradient"),
            "friction_loss": (row.friction_loss, "pressure"),
            "elevation_loss": (row.elevation_loss, "pressure"),
            "device_loss": (row.device_loss, "pressure"),
            "second_law_friction_loss": (row.second_law_friction_loss, "pressure"),
            "start_pressure": (row.start_pressure, "pressure"),
            "end_pressure": (row.end_pressure, "pressure"),
        }
    )
    fittings = [
        {
            "name": one.name,
            "count": one.count,
            "length": plain(one.length, "length"),
            "table_length": plain(one.table_length, "length"),
            "minor_k": plain(one.minor_k, "ratio"),
            "origin": one.origin,
            "source": one.source,
        }
        for one in row.fittings
    ]
    return {
        "tag": row.tag,
        "from": row.start,
        "to": row.end,
        "role": row.role,
        **numbers,
        "nominal": row.nominal,
        "material": row.material,
        "fittings": fittings,
        "fittings_text": row.fittings_text,
        "devices": list(row.devices),
        "valve": row.valve,
        "note": row.note,
    }


def _path_step(step: PathStep, plain: Plain) -> Record:
    numbers = plain.record(
        {
            "bore": (step.bore, "size"),
            "c_factor": (step.c_factor, "ratio"),
            "friction_factor": (step.friction_factor, "ratio"),
            "flow_added": (step.flow_added, "flow"),
            "flow": (step.flow, "flow"),
            "length": (step.length, "length"),
            "equivalent_length": (step.equivalent_length, "length"),
            "total_length": (step.total_length, "length"),
            "friction_gradient": (step.friction_gradient, "gradient"),
            "pressure_start": (step.pressure_start, "pressure"),
            "friction": (step.friction, "pressure"),
            "fitting_friction": (step.fitting_friction, "pressure"),
            "elevation": (step.elevation, "pressure"),
            "device": (step.device, "pressure"),
            "pressure_end": (step.pressure_end, "pressure"),
            "k_at_start": (step.k_at_start, "k_factor"),
        }
    )
    return {
        "from": step.start,
        "to": step.end,
        "pipe": step.pipe,
        "nominal": step.nominal,
        **numbers,
        "fittings_text": step.fittings_text,
        "note": step.note,
    }


def _path_totals(result: Result, plain: Plain) -> Record | None:
    totals = path_totals(result.path)
    if totals is None:
        return None
    names = ("head", "friction", "fittings", "elevation", "devices", "supply")
    return {name: plain(getattr(totals, name), "pressure") for name in names}


def _scenario(row: ScenarioRow, plain: Plain) -> Record:
    numbers = plain.record(
        {
            "total_flow": (row.total_flow, "flow"),
            "supply_pressure": (row.supply_pressure, "pressure"),
            "sprinkler_flow": (row.sprinkler_flow, "flow"),
            "lowest_pressure": (row.lowest_pressure, "pressure"),
            "lowest_ratio": (row.lowest_ratio, "ratio"),
            "delivered_density": (row.delivered_density, "density"),
            "over_discharge": (row.over_discharge, "ratio"),
            "minutes_of_storage": (row.minutes_of_storage, "plain"),
        }
    )
    heads = [
        {"tag": tag, "flow": plain(flow, "flow"), "pressure": plain(pressure, "pressure")}
        for tag, flow, pressure in row.head_flows
    ]
    return {
        "name": row.name,
        "heads_open": row.heads_open,
        "lowest_head": row.lowest_head,
        **numbers,
        "note": row.note,
        "heads": heads,
    }


def _balance(result: Result, plain: Plain) -> Record:
    balance = result.balance
    numbers = plain.record(
        {
            "largest_flow_imbalance": (balance.largest_flow_imbalance, "flow"),
            "largest_pressure_imbalance": (balance.largest_pressure_imbalance, "pressure"),
            "total_flow": (balance.total_flow, "flow"),
        }
    )
    return {
        **numbers,
        "flow_node": balance.flow_node,
        "pressure_pipe": balance.pressure_pipe,
        "iterations": balance.iterations,
    }


def finding_record(finding: Finding, units: UnitSet) -> Record:
    """Return ``finding`` as plain values, its text filled in with the numbers of ``units``."""
    plain = Plain(units)
    return {
        "check": finding.check,
        "state": finding.state,
        "measured": plain.measure(finding.measured),
        "measured_unit": plain.unit(finding.measured),
        "limit": plain.measure(finding.limit),
        "limit_unit": plain.unit(finding.limit),
        "source": finding.source,
        "text": finding_text(finding, units),
        "tags": list(finding.tags),
        "remedy": remedy_text(finding, units),
    }


def _assumption(one: Assumption) -> Record:
    return {"key": one.key, "value": one.value, "origin": one.origin, "source": one.source}
