"""The parts of ``result.json`` on pumps and tanks."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any, Protocol

from supplycheck.results.records import NeededPump, PumpRecord, PumpState, TankLine, TankRecord

Record = dict[str, Any]


class Numbers(Protocol):
    """Turns SI values into plain numbers of the project's units."""

    def __call__(self, value: float | None, kind: str) -> float | None:
        """Return one value."""

    def record(self, fields: Mapping[str, tuple[float | None, str]]) -> Record:
        """Return several values by name."""


def pump_record(pump: PumpRecord, plain: Numbers) -> Record:
    """Return the facts of one pump as plain values."""
    facts = pump.facts
    rating = facts.rating
    numbers = plain.record(
        {
            "rated_flow": (None if rating is None else rating.flow, "flow"),
            "rated_pressure": (None if rating is None else rating.pressure, "pressure"),
            "churn": (facts.churn, "pressure"),
            "churn_share": (facts.churn_share, "ratio"),
            "net_at_rated_flow": (facts.net_at_rated, "pressure"),
            "net_at_150_percent": (facts.net_at_overload, "pressure"),
            "share_at_150_percent": (facts.overload_share, "ratio"),
            "curve_end": (facts.curve_end, "flow"),
            "highest_suction": (facts.highest_suction, "pressure"),
            "highest_discharge": (facts.highest_discharge, "pressure"),
            "drawn_before": (facts.drawn_before, "flow"),
        }
    )
    return {
        "tag": facts.tag,
        "title": facts.title,
        "source": facts.source,
        "pipe": facts.pipe,
        "inlet": facts.inlet,
        "outlet": facts.outlet,
        "fed_by": facts.fed_by,
        "from_tank": facts.from_tank,
        "arrangement": facts.arrangement,
        "curve_from_limits": facts.from_limits,
        **numbers,
        "states": [_state(state, plain) for state in facts.states],
        "curves": [
            {
                "name": curve.name,
                "style": curve.style,
                "flows": [plain(flow, "flow") for flow in curve.flows],
                "pressures": [plain(pressure, "pressure") for pressure in curve.pressures],
                "extrapolated_from": plain(curve.extrapolated_from, "flow"),
            }
            for curve in pump.curves
        ],
        "points": [
            {
                "name": point.name,
                "style": point.style,
                "flow": plain(point.flow, "flow"),
                "pressure": plain(point.pressure, "pressure"),
            }
            for point in pump.points
        ],
        "note": facts.note,
    }


def _state(state: PumpState, plain: Numbers) -> Record:
    numbers = plain.record(
        {
            "flow": (state.flow, "flow"),
            "suction": (state.suction, "pressure"),
            "net": (state.net, "pressure"),
            "discharge": (state.discharge, "pressure"),
            "source_pressure": (state.main, "pressure"),
            "share_of_rated_flow": (state.share, "ratio"),
            "at_test_header": (state.at_header, "pressure"),
        }
    )
    return {"name": state.name, **numbers}


def needed_record(needed: NeededPump | None, plain: Numbers) -> Record | None:
    """Return the pump that would be needed as plain values; ``None`` where none is."""
    if needed is None:
        return None
    numbers = plain.record(
        {
            "flow": (needed.flow, "flow"),
            "suction": (needed.suction, "pressure"),
            "net": (needed.net, "pressure"),
            "missing": (needed.missing, "pressure"),
            "suction_floor": (needed.floor, "pressure"),
        }
    )
    options = [
        {
            **plain.record(
                {
                    "rated_flow": (one.rating.flow, "flow"),
                    "rated_pressure": (one.rating.pressure, "pressure"),
                    "share_of_rated_flow": (one.demand_share, "ratio"),
                    "suction_at_150_percent": (one.suction_at_overload, "pressure"),
                }
            ),
            "suction_holds": one.suction_holds,
        }
        for one in needed.options
    ]
    return {"node": needed.node, "instead_of": needed.instead_of, **numbers, "options": options}


def tank_record(tank: TankRecord, plain: Numbers) -> Record:
    """Return the facts of one tank as plain values; times in minutes."""
    time = tank.time
    numbers = plain.record(
        {
            "water_level": (tank.water_level, "length"),
            "low_level": (tank.low_level, "length"),
            "volume": (time.volume, "volume"),
            "refill": (time.refill, "flow"),
            "duration": (time.duration, "time"),
            "nominal_flow": (time.nominal_flow, "flow"),
            "actual_flow": (time.actual_flow, "flow"),
            "nominal_volume": (time.nominal_volume, "volume"),
            "actual_volume": (time.actual_volume, "volume"),
            "refill_credit": (tank.credit, "volume"),
            "spare_volume": (time.spare_volume, "volume"),
            "minutes_at_nominal_flow": (time.lasts, "time"),
            "minutes_at_actual_flow": (time.actual_lasts, "time"),
            "refill_time": (time.refill_time, "time"),
        }
    )
    lines = [_line(line, plain) for line in tank.lines]
    told = {"tag": time.tag, "kind": tank.kind, "node": tank.node, **numbers}
    return {**told, "note": tank.note, "time_line": lines}


def _line(line: TankLine, plain: Numbers) -> Record:
    return {
        "name": line.name,
        "flow": plain(line.flow, "flow"),
        "times": [plain(time, "time") for time in line.times],
        "volumes": [plain(volume, "volume") for volume in line.volumes],
    }
