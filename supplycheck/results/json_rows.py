"""Rows of ``result.json``: nodes, pipes, path, scenarios and findings as plain dictionaries."""

from __future__ import annotations

import math
from collections.abc import Iterable, Mapping
from typing import Any

from supplycheck.findings import Finding, Measure
from supplycheck.results.display import finding_text, remedy_text
from supplycheck.results.records import FittingRow, HandStep, NodeRow, PathStep, PipeRow, ScenarioRow
from supplycheck.results.scenario_note import scenario_note
from supplycheck.units import UnitSet

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


def step_records(steps: Iterable[HandStep], plain: Plain) -> list[Record]:
    """Return steps with their formula, value and unit."""
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


def node_record(row: NodeRow, plain: Plain) -> Record:
    """Return one node."""
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


def pipe_record(row: PipeRow, plain: Plain) -> Record:
    """Return one pipe."""
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


def fitting_record(row: FittingRow, plain: Plain) -> Record:
    """Return how one equivalent length comes about."""
    numbers = plain.record(
        {
            "bore": (row.bore, "size"),
            "c_factor": (row.c_factor, "ratio"),
            "table_length": (row.table_length, "length"),
            "c_multiplier": (row.c_multiplier, "ratio"),
            "bore_factor": (row.bore_factor, "ratio"),
            "length": (row.length, "length"),
            "minor_k": (row.minor_k, "ratio"),
        }
    )
    return {
        "name": row.name,
        "nominal": row.nominal,
        "pipe_kind": row.pipe_kind,
        "count": row.count,
        **numbers,
        "source": row.source,
    }


def path_record(step: PathStep, plain: Plain) -> Record:
    """Return one segment of the path."""
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


def scenario_record(row: ScenarioRow, plain: Plain) -> Record:
    """Return one scenario."""
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
    needs = row.head_needs or (None,) * len(row.head_flows)
    heads = [
        {
            "tag": tag,
            **plain.record(
                {
                    "flow": (flow, "flow"),
                    "pressure": (pressure, "pressure"),
                    "required_flow": (need, "flow"),
                }
            ),
        }
        for (tag, flow, pressure), need in zip(row.head_flows, needs, strict=True)
    ]
    beyond = [
        {
            "device": one.device,
            "pipe": one.pipe,
            **plain.record({"flow": (one.flow, "flow"), "curve_end": (one.end, "flow")}),
        }
        for one in row.beyond
    ]
    return {
        "name": row.name,
        "heads_open": row.heads_open,
        "lowest_head": row.lowest_head,
        **numbers,
        "note": scenario_note(row, plain.units),
        "dry_heads": list(row.dry),
        "beyond_curves": beyond,
        "heads": heads,
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
