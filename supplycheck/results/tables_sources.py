"""Tables of pumps and tanks: facts, operating points, curves, the pump that is needed, stored water."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence

from supplycheck.results.records import (
    CurvePoints,
    GraphPoint,
    NeededPump,
    PumpRecord,
    PumpState,
    TankRecord,
)

Cell = str | float | int | None
Record = dict[str, Cell]
Make = Callable[[str, float | None, str], Record]

_KEEPS_UP = "The refill keeps up with the flow: it does not run empty."


def source_tables(
    pumps: Sequence[PumpRecord], needed: NeededPump | None, tanks: Sequence[TankRecord], make: Make
) -> dict[str, list[Record]]:
    """Return the rows of each table that has any; ``make`` names a column with its unit."""
    tables = {
        "pumps": [_pump(pump, make) for pump in pumps],
        "pump_states": [_state(pump, state, make) for pump in pumps for state in pump.facts.states],
        "pump_curves": [row for pump in pumps for row in _graph(pump, make)],
        "needed_pump": [] if needed is None else _needed(needed, make),
        "tanks": [_tank(tank, make) for tank in tanks],
        "tank_times": [row for tank in tanks for row in _time_line(tank, make)],
    }
    return {name: rows for name, rows in tables.items() if rows}


def curve_rows(curves: Sequence[CurvePoints], points: Sequence[GraphPoint], make: Make) -> list[Record]:
    """Return the points of ``curves`` in order, then the marked ``points``; all at one place."""
    rows: list[Record] = []
    for curve in curves:
        for flow, pressure in zip(curve.flows, curve.pressures, strict=True):
            beyond = curve.extrapolated_from is not None and flow > curve.extrapolated_from
            rows.append(
                {
                    "line": curve.name,
                    "style": curve.style,
                    **make("flow", flow, "flow"),
                    **make("pressure", pressure, "pressure"),
                    "beyond_what_is_known": "yes" if beyond else "no",
                }
            )
    rows.extend(
        {
            "line": f"point: {point.name}",
            "style": point.style,
            **make("flow", point.flow, "flow"),
            **make("pressure", point.pressure, "pressure"),
            "beyond_what_is_known": None,
        }
        for point in points
    )
    return rows


def _pump(pump: PumpRecord, make: Make) -> Record:
    facts = pump.facts
    rating = facts.rating
    return {
        "pump": facts.tag,
        "title": facts.title,
        "pipe": facts.pipe,
        "inlet": facts.inlet,
        "outlet": facts.outlet,
        "fed_by": facts.fed_by,
        "from_tank": "yes" if facts.from_tank else "no",
        "arrangement": facts.arrangement,
        "curve_from_limits": "yes" if facts.from_limits else "no",
        **make("rated_flow", None if rating is None else rating.flow, "flow"),
        **make("rated_pressure", None if rating is None else rating.pressure, "pressure"),
        **make("churn", facts.churn, "pressure"),
        **make("churn_share", facts.churn_share, "ratio"),
        **make("net_at_rated_flow", facts.net_at_rated, "pressure"),
        **make("net_at_150_percent", facts.net_at_overload, "pressure"),
        **make("share_at_150_percent", facts.overload_share, "ratio"),
        **make("curve_end", facts.curve_end, "flow"),
        **make("highest_suction", facts.highest_suction, "pressure"),
        **make("highest_discharge", facts.highest_discharge, "pressure"),
        **make("drawn_before", facts.drawn_before, "flow"),
        "source": facts.source,
        "note": facts.note,
    }


def _state(pump: PumpRecord, state: PumpState, make: Make) -> Record:
    return {
        "pump": pump.facts.tag,
        "state": state.name,
        **make("flow", state.flow, "flow"),
        **make("suction", state.suction, "pressure"),
        **make("net", state.net, "pressure"),
        **make("discharge", state.discharge, "pressure"),
        **make("source_pressure", state.main, "pressure"),
        **make("share_of_rated_flow", state.share, "ratio"),
        **make("at_test_header", state.at_header, "pressure"),
    }


def _graph(pump: PumpRecord, make: Make) -> list[Record]:
    return [{"pump": pump.facts.tag, **row} for row in curve_rows(pump.curves, pump.points, make)]


def _needed(needed: NeededPump, make: Make) -> list[Record]:
    """Return a row for each size that would do; one with the gap alone where none is listed."""
    gap: Record = {
        "behind_node": needed.node,
        "instead_of": needed.instead_of,
        **make("flow", needed.flow, "flow"),
        **make("suction", needed.suction, "pressure"),
        **make("net", needed.net, "pressure"),
        **make("missing", needed.missing, "pressure"),
        **make("suction_floor", needed.floor, "pressure"),
    }
    rows: list[Record] = [
        {
            **gap,
            **make("rated_flow", one.rating.flow, "flow"),
            **make("rated_pressure", one.rating.pressure, "pressure"),
            **make("share_of_rated_flow", one.demand_share, "ratio"),
            **make("suction_at_150_percent", one.suction_at_overload, "pressure"),
            "suction_holds": "yes" if one.suction_holds else "no",
        }
        for one in needed.options
    ]
    return rows or [gap]


def _tank(tank: TankRecord, make: Make) -> Record:
    time = tank.time
    endless = [one for one in (time.lasts, time.actual_lasts) if one is not None and math.isinf(one)]
    return {
        "tank": time.tag,
        "kind": tank.kind,
        "node": tank.node,
        **make("water_level", tank.water_level, "length"),
        **make("low_level", tank.low_level, "length"),
        **make("volume", time.volume, "volume"),
        **make("refill", time.refill, "flow"),
        **make("duration", time.duration, "time"),
        **make("nominal_flow", time.nominal_flow, "flow"),
        **make("actual_flow", time.actual_flow, "flow"),
        **make("nominal_volume", time.nominal_volume, "volume"),
        **make("actual_volume", time.actual_volume, "volume"),
        **make("refill_credit", tank.credit, "volume"),
        **make("spare_volume", time.spare_volume, "volume"),
        **make("lasts_at_nominal_flow", time.lasts, "time"),
        **make("lasts_at_actual_flow", time.actual_lasts, "time"),
        **make("refill_time", time.refill_time, "time"),
        "note": "; ".join(text for text in (_KEEPS_UP if endless else "", tank.note) if text),
    }


def _time_line(tank: TankRecord, make: Make) -> list[Record]:
    return [
        {
            "tank": tank.time.tag,
            "line": line.name,
            **make("flow", line.flow, "flow"),
            **make("time", time, "time"),
            **make("volume_left", volume, "volume"),
        }
        for line in tank.lines
        for time, volume in zip(line.times, line.volumes, strict=True)
    ]
