"""Tables of hydrants and standpipes: every case, every outlet of every case, hydrants, hose outlets."""

from __future__ import annotations

from collections.abc import Callable

from supplycheck.model.duty import DutyAnswer, DutyRow, HydrantRow, OutletState, StandpipeRow

Cell = str | float | int | None
Record = dict[str, Cell]
Make = Callable[[str, float | None, str], Record]


def duty_tables(answer: DutyAnswer, make: Make) -> dict[str, list[Record]]:
    """Return the rows of each table that has any; ``make`` names a column with its unit."""
    tables = {
        "cases": [_case(row, make) for row in answer.rows],
        "case_outlets": [_outlet(row, one, make) for row in answer.rows for one in row.outlets],
        "hydrants": [_hydrant(row, make) for row in answer.hydrants],
        "hose_outlets": [_hose_outlet(row, make) for row in answer.standpipes],
    }
    return {name: rows for name, rows in tables.items() if rows}


def _case(row: DutyRow, make: Make) -> Record:
    return {
        "case": row.label,
        "duty": row.duty,
        "kind": row.kind,
        "counts": "yes" if row.counts else "no",
        **make("flow", row.flow, "flow"),
        **make("required_pressure", row.required_pressure, "pressure"),
        **make("margin", row.margin, "pressure"),
        "governing": row.governing,
        "governing_by": row.governing_by,
        "tried": row.tried,
        "closed_pipes": "; ".join(row.closed_pipes),
        "note": row.note,
    }


def _outlet(row: DutyRow, one: OutletState, make: Make) -> Record:
    return {
        "case": row.label,
        "outlet": one.name,
        "node": one.node,
        **make("flow", one.flow, "flow"),
        **make("pressure", one.pressure, "pressure"),
        **make("required", one.required, "pressure"),
        **make("spare", one.spare, "pressure"),
    }


def _hydrant(row: HydrantRow, make: Make) -> Record:
    return {
        "hydrant": row.tag,
        "node": row.node,
        "location": row.location,
        **make("static", row.static, "pressure"),
        **make("alone", row.alone, "flow"),
        **make("residual_alone", row.residual_alone, "pressure"),
        **make("share", row.share, "flow"),
        **make("greatest_flow", row.greatest_flow, "flow"),
        **make("greatest_flow_on_maximum_day", row.greatest_on_maximum_day, "flow"),
        "limited_by": row.limited_by,
        "class": row.rank,
        "colour": row.colour,
        "note": row.note,
    }


def _hose_outlet(row: StandpipeRow, make: Make) -> Record:
    return {
        "standpipe": row.riser,
        "node": row.node,
        **make("size", row.size, "size"),
        **make("required", row.required, "pressure"),
        **make("needed_at_node", row.needed_at_node, "pressure"),
        **make("lowest_flowing", row.lowest_flowing, "pressure"),
        **make("no_flow", row.no_flow, "pressure"),
        "device": row.device,
        **make("after_device", row.after_device, "pressure"),
        "over_limit": "yes" if row.over_limit else "no",
    }
