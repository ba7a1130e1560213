"""The part of ``result.json`` on standpipes and hydrants."""

from __future__ import annotations

from supplycheck.model.duty import (
    ConnectionRow,
    DutyAnswer,
    DutyRow,
    HydrantRow,
    OutletState,
    StandpipeRow,
)
from supplycheck.results.json_rows import Plain, Record


def duties_record(answer: DutyAnswer, plain: Plain) -> Record:
    """Return every case, hydrant and hose outlet as plain values."""
    return {
        "cases": [_case(row, plain) for row in answer.rows],
        "hydrants": [_hydrant(row, plain) for row in answer.hydrants],
        "standpipe_outlets": [_standpipe(row, plain) for row in answer.standpipes],
        "fire_department_connection": _connection(answer.connection, plain),
    }


def _case(row: DutyRow, plain: Plain) -> Record:
    numbers = plain.record(
        {
            "flow": (row.flow, "flow"),
            "required_pressure": (row.required_pressure, "pressure"),
            "margin": (row.margin, "pressure"),
        }
    )
    return {
        "duty": row.duty,
        "kind": row.kind,
        "label": row.label,
        "counts": row.counts,
        **numbers,
        "governing": row.governing,
        "governing_by": row.governing_by,
        "tried": row.tried,
        "closed_pipes": list(row.closed_pipes),
        "outlets": [_outlet(one, plain) for one in row.outlets],
        "note": row.note,
    }


def _outlet(one: OutletState, plain: Plain) -> Record:
    numbers = plain.record(
        {
            "flow": (one.flow, "flow"),
            "pressure": (one.pressure, "pressure"),
            "required": (one.required, "pressure"),
            "spare": (one.spare, "pressure"),
        }
    )
    return {"name": one.name, "node": one.node, **numbers}


def _hydrant(row: HydrantRow, plain: Plain) -> Record:
    numbers = plain.record(
        {
            "static": (row.static, "pressure"),
            "alone": (row.alone, "flow"),
            "residual_alone": (row.residual_alone, "pressure"),
            "share": (row.share, "flow"),
            "greatest_flow": (row.greatest_flow, "flow"),
            "greatest_flow_on_maximum_day": (row.greatest_on_maximum_day, "flow"),
            "device_loss": (row.device_loss, "pressure"),
        }
    )
    return {
        "tag": row.tag,
        "node": row.node,
        "location": row.location,
        **numbers,
        "limited_by": row.limited_by,
        "device_in_range": row.device_in_range,
        "class": row.rank,
        "colour": row.colour,
        "source": row.source,
        "note": row.note,
    }


def _standpipe(row: StandpipeRow, plain: Plain) -> Record:
    numbers = plain.record(
        {
            "size": (row.size, "size"),
            "required": (row.required, "pressure"),
            "needed_at_node": (row.needed_at_node, "pressure"),
            "no_flow": (row.no_flow, "pressure"),
            "after_device": (row.after_device, "pressure"),
            "lowest_flowing": (row.lowest_flowing, "pressure"),
        }
    )
    return {
        "riser": row.riser,
        "node": row.node,
        **numbers,
        "device": row.device,
        "over_limit": row.over_limit,
    }


def _connection(row: ConnectionRow | None, plain: Plain) -> Record | None:
    if row is None:
        return None
    return {
        "node": row.node,
        "pressure": plain(row.pressure, "pressure"),
        "flow": plain(row.flow, "flow"),
        "case": row.case,
        "governing": row.governing,
        "note": row.note,
    }
