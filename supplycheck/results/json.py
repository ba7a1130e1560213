"""``result.json``: the result as plain numbers in the project's units.

Numbers are not rounded: rounding belongs to display. A value that does not exist or is not finite is
``null``; NaN is never written. Keys beyond those documented may be added, none is taken away without a
new ``schema``.
"""

from __future__ import annotations

import json
from typing import Final

from supplycheck.model import Assumption, FlowTest
from supplycheck.results.json_duties import duties_record
from supplycheck.results.json_rows import (
    Plain,
    Record,
    finding_record,
    fitting_record,
    node_record,
    path_record,
    pipe_record,
    scenario_record,
    step_records,
)
from supplycheck.results.json_sources import needed_record, pump_record, tank_record
from supplycheck.results.records import DesignAreaRecord, Favourable, Placement, Result
from supplycheck.results.totals import path_totals
from supplycheck.units import UNIT_SETS

SCHEMA: Final = "supplycheck/result/1"


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
        "second_law": _second_law(result, plain),
        "design_area": _design_area(result.design_area, plain),
        "nodes": [node_record(row, plain) for row in result.nodes],
        "pipes": [pipe_record(row, plain) for row in result.pipes],
        "fittings": [fitting_record(row, plain) for row in result.fittings],
        "path": [path_record(step, plain) for step in result.path],
        "path_totals": _path_totals(result, plain),
        "hand_check": step_records(result.hand_check, plain),
        "scenarios": [scenario_record(row, plain) for row in result.scenarios],
        "pumps": [pump_record(pump, plain) for pump in result.pumps],
        "needed_pump": needed_record(result.needed_pump, plain),
        "tanks": [tank_record(tank, plain) for tank in result.tanks],
        "duties": duties_record(result.duties, plain),
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
            "outlet_flow": (demand.outlet_flow, "flow"),
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
        "governing": supply.governing,
        "statement": supply.statement,
        "steps": step_records(supply.steps, plain),
        "tests": [_test(test, plain) for test in result.project.supply.tests],
        "curves": curves,
        "points": points,
    }


def _test(test: FlowTest, plain: Plain) -> Record:
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
        "limited_at": margin.limited_at,
        "rule": margin.rule,
        "source": margin.source,
        "steps": step_records(margin.steps, plain),
    }


def _second_law(result: Result, plain: Plain) -> Record | None:
    """Return the governing case by the second friction law, and the difference second less first."""
    second = result.second_law
    if second is None:
        return None
    numbers = plain.record(
        {
            "flow": (second.flow, "flow"),
            "pressure": (second.pressure, "pressure"),
            "available_pressure": (second.available_pressure, "pressure"),
            "margin": (second.margin, "pressure"),
            "required": (second.required, "pressure"),
            "after_rule": (second.after_rule, "pressure"),
        }
    )
    difference = {
        "flow": (second.flow - result.demand.flow, "flow"),
        "pressure": (second.pressure - result.demand.pressure, "pressure"),
        "margin": (second.margin - result.margin.pressure, "pressure"),
    }
    return {
        "name": second.name,
        "decides": result.project.law.name,
        **numbers,
        "difference": plain.record(difference),
        "note": second.note,
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
        "equal_to_governing": area.equal,
        "most_favourable": _favourable(area.most_favourable, plain),
        "placements": [placement(one) for one in area.placements],
        "steps": step_records(area.steps, plain),
    }


def _favourable(best: Favourable | None, plain: Plain) -> Record | None:
    if best is None:
        return None
    numbers = plain.record({"flow": (best.flow, "flow"), "pressure": (best.pressure, "pressure")})
    return {"label": best.label, **numbers, "heads": list(best.heads), "solved": best.solved}


def _path_totals(result: Result, plain: Plain) -> Record | None:
    totals = path_totals(result.path)
    if totals is None:
        return None
    names = ("head", "friction", "fittings", "elevation", "devices", "supply")
    return {name: plain(getattr(totals, name), "pressure") for name in names}


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


def _assumption(one: Assumption) -> Record:
    return {"key": one.key, "value": one.value, "origin": one.origin, "source": one.source}
