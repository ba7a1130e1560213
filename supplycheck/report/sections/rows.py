"""Node analysis and pipe information."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Final, TypeVar

from supplycheck.model import Device
from supplycheck.report.document import Block, Column, Paragraph, Row, Section, Table
from supplycheck.report.show import Show, column, without_empty, words
from supplycheck.results.hand import Pen
from supplycheck.results.records import NodeRow, PipeRow, Result

MOST_ROWS: Final = 4000
STILL: Final = 1e-9  # m³/s: below this a pipe carries nothing
_Item = TypeVar("_Item")


def node_analysis(result: Result) -> Section:
    """Return every node with its elevation, K-factor, pressure and discharge."""
    show = Show.of(result)
    with_velocity = any(node.velocity_pressure for node in result.nodes)
    columns = [
        words("Node"),
        words("Kind"),
        column("Elevation", show.s("length")),
        column("K-factor", show.s("k_factor")),
        column("Pressure", show.s("pressure")),
        column("Discharge", show.s("flow")),
        column("Required flow", show.s("flow")),
        column("Required pressure", show.s("pressure")),
        words("Required by"),
        column("Area", show.s("area")),
        words("Branch line"),
    ]
    if with_velocity:
        columns.insert(5, column("Velocity pressure", show.s("pressure")))
    nodes = _printed(result.nodes, [n.in_design_area or n.discharge > 0 for n in result.nodes])
    rows = tuple(_node(node, show, with_velocity=with_velocity) for node in nodes)
    note = "Pressures are gauge pressures in the demand solution."
    if any(node.in_design_area for node in result.nodes):
        note = f"Heads in the design area are in bold. {note}"
    note += _left_out(len(result.nodes) - len(nodes), "nodes", "nodes.csv")
    table = without_empty(
        Table("Nodes", tuple(columns), rows, note, size=6.6),
        "K-factor",
        "Area",
        "Branch line",
        "Required flow",
        "Required pressure",
        "Required by",
    )
    return Section("Node analysis", (table,), fresh=True)


def _printed(rows: Sequence[_Item], wanted: Sequence[bool]) -> Sequence[_Item]:
    """Return all ``rows``, or of too many those that are ``wanted``, up to the most that are printed."""
    if len(rows) <= MOST_ROWS:
        return rows
    return [row for row, keep in zip(rows, wanted, strict=True) if keep][:MOST_ROWS]


def _left_out(count: int, what: str, file: str) -> str:
    return f" {count} further {what} are not printed here; {file} holds every one." if count else ""


def _node(node: NodeRow, show: Show, *, with_velocity: bool) -> Row:
    cells = [
        node.tag,
        f"{node.kind} {node.sprinkler}" if node.sprinkler else node.kind,
        show.n(node.elevation, "length"),
        show.n(node.k_factor, "k_factor"),
        show.n(node.pressure, "pressure", 3 if show.units.name == "us" else 4),
        show.n(node.discharge, "flow", 2) if node.discharge else "–",
        show.n(node.required_discharge, "flow"),
        show.n(node.required_pressure, "pressure"),
        node.required_by,
        show.n(node.area, "area"),
        node.branch_line or "",
    ]
    if with_velocity:
        cells.insert(5, show.n(node.velocity_pressure, "pressure"))
    return Row(tuple(cells), note=node.note, strong=node.in_design_area)


def pipe_information(result: Result) -> Section:
    """Return every pipe with what the standard asks a report to carry; those without flow in brief."""
    show = Show.of(result)
    darcy = any(pipe.roughness is not None and pipe.c_factor is None for pipe in result.pipes)
    second = any(pipe.second_law_friction_loss is not None for pipe in result.pipes)
    flowing = [pipe for pipe in result.pipes if pipe.flow > STILL]
    still = [pipe for pipe in result.pipes if not pipe.flow > STILL]
    shown, brief = flowing[:MOST_ROWS], still[: max(MOST_ROWS - len(flowing), 0)]
    left_out = len(result.pipes) - len(shown) - len(brief)
    rows = tuple(_pipe(pipe, show, darcy=darcy, second=second) for pipe in shown)
    blocks: list[Block] = [
        Paragraph(
            "Written in the direction of flow. L pipe, F fittings as equivalent length, T both; pf "
            "loss per length; Pt pressure at the start and the end, Pe change by elevation, Pf friction in "
            "the whole pipe with fittings, Pd devices: Pt start − Pt end = Pf + Pe + Pd.",
            "small",
        ),
        Table("Pipes with flow", _pipe_columns(show, darcy=darcy, second=second), rows, size=6.3),
    ]
    if second and result.project.second_law is not None:
        blocks.insert(
            1,
            Paragraph(
                f"The second law, beside it at the flows of the first: {result.project.second_law.name}.",
                "small",
            ),
        )
    if brief:
        blocks.append(_still_pipes(brief, show))
    if left_out:
        blocks.append(Paragraph(_left_out(left_out, "pipes", "pipes.csv").strip()))
    blocks.append(_fittings(result, show))
    if result.project.system.devices:
        blocks.append(_devices(result, show))
    return Section("Pipe information", tuple(blocks), landscape=True, fresh=True)


def _fittings(result: Result, show: Show) -> Table:
    """Return how each equivalent length comes about, a line for each fitting, size, pipe and C."""
    columns = (
        words("Fitting"),
        words("Nominal"),
        words("Pipe"),
        column("Bore", show.s("size")),
        column("C"),
        column("Table length", show.s("length")),
        column("× for C"),
        column("× for bore"),
        column("= length", show.s("length")),
        column("Number"),
        words("Source"),
    )
    rows = tuple(
        Row(
            (
                one.name,
                show.nominal(one.nominal),
                one.pipe_kind,
                show.n(one.bore, "size"),
                "–" if one.c_factor is None else f"{one.c_factor:g}",
                show.n(one.table_length, "length") if not one.minor_k else f"K = {one.minor_k:g}",
                f"{one.c_multiplier:.4f}",
                f"{one.bore_factor:.4f}",
                show.n(one.length, "length"),
                str(one.count),
                one.source,
            )
        )
        for one in result.fittings
    )
    note = (
        "Length of one fitting: that of the table, times (C / 120)^1.85, times (bore / bore of the table's "
        "pipe)^4.87 where the standard corrects for it. 1.0000 where a correction does not apply."
    )
    return Table("Equivalent lengths", columns, rows, note, empty="no fittings", size=6.0)


def _devices(result: Result, show: Show) -> Table:
    """Return every device with the points of its curve as given."""
    columns = (
        words("Device"),
        words("Title"),
        words("Kind"),
        words(f"Points, {show.s('flow')}: {show.s('pressure')}"),
        words("Source"),
    )
    rows = tuple(
        Row((one.tag, one.title, one.kind, _points(one, show), one.source))
        for one in result.project.system.devices
    )
    note = (
        "Between two points the loss is read on the straight line that joins them; for a pump the points "
        "are the pressure that it adds."
    )
    return Table("Devices", columns, rows, note, size=6.0)


def _points(device: Device, show: Show) -> str:
    pen = Pen(show.units)
    points = [
        f"{pen.exact(flow, 'flow')}: {pen.exact(value, 'pressure')}"
        for flow, value in zip(device.flows, device.values, strict=True)
    ]
    if device.is_fixed_loss:
        points = [f"{show.t(device.values[0], 'pressure')} at every flow"]
    if device.setting is not None:
        points.append(f"set to {show.t(device.setting, 'pressure')}")
    return "; ".join(points) or "none"


def _still_pipes(pipes: Sequence[PipeRow], show: Show) -> Table:
    """Return the pipes that carry nothing in this solution, a line each."""
    columns = (
        words("From"),
        words("To"),
        words("Nominal"),
        column("Bore", show.s("size")),
        column("L", show.s("length")),
        column("F", show.s("length")),
        column("C or roughness"),
        column("Pt", show.s("pressure")),
        words("Pipe, role, material, fittings"),
    )
    rows = tuple(
        Row(
            (
                pipe.start,
                pipe.end,
                show.nominal(pipe.nominal),
                show.n(pipe.bore, "size"),
                show.n(pipe.length, "length"),
                show.n(pipe.equivalent_length, "length"),
                f"{pipe.c_factor:g}" if pipe.c_factor is not None else show.t(pipe.roughness, "roughness"),
                show.n(pipe.end_pressure, "pressure"),
                _pipe_note(pipe),
            )
        )
        for pipe in pipes
    )
    note = "Pt is the pressure at the second node. Without flow there is no friction."
    return Table("Pipes without flow in this solution", columns, rows, note, size=6.0)


def _pipe_columns(show: Show, *, darcy: bool, second: bool) -> tuple[Column, ...]:
    flow, pressure, length = show.s("flow"), show.s("pressure"), show.s("length")
    law = [column("ε", show.s("roughness")), column("f")] if darcy else [column("C")]
    law = [Column("Rough- ness", show.s("roughness"), right=True), column("f")] if darcy else law
    columns = [
        words("From"),
        words("To"),
        column("Q added", flow),
        column("Q total", flow),
        words("Nominal"),
        column("Bore", show.s("size")),
        column("L", length),
        column("F", length),
        column("T", length),
        *law,
        column("pf, loss per length", show.s("gradient")),
        column("Pt start", pressure),
        column("Pf", pressure),
        column("Pe", pressure),
        column("Pd", pressure),
        column("Pt end", pressure),
        column("Velocity", show.s("velocity")),
    ]
    if second:
        columns.append(column("Pf by the second law", pressure))
    return tuple(columns)


def _pipe(pipe: PipeRow, show: Show, *, darcy: bool, second: bool) -> Row:
    fine = 2 if show.units.name == "us" else 3
    law = [f"{pipe.c_factor:g}" if pipe.c_factor is not None else "–"]
    if darcy:
        law = [show.n(pipe.roughness, "roughness"), show.n(pipe.friction_factor, "ratio", 4)]
    cells = [
        pipe.start,
        pipe.end,
        show.n(pipe.flow_added, "flow"),
        show.n(pipe.flow, "flow"),
        show.nominal(pipe.nominal),
        show.n(pipe.bore, "size"),
        show.n(pipe.length, "length"),
        show.n(pipe.equivalent_length, "length"),
        show.n(pipe.total_length, "length"),
        *law,
        show.n(pipe.friction_gradient, "gradient"),
        show.n(pipe.start_pressure, "pressure", fine),
        show.n(pipe.friction_loss, "pressure", fine),
        show.n(pipe.elevation_loss, "pressure", fine),
        show.n(pipe.device_loss, "pressure", fine),
        show.n(pipe.end_pressure, "pressure", fine),
        show.n(pipe.velocity, "velocity"),
    ]
    if second:
        cells.append(show.n(pipe.second_law_friction_loss, "pressure", fine))
    return Row(tuple(cells), note=_pipe_note(pipe))


def _pipe_note(pipe: PipeRow) -> str:
    parts = [pipe.tag, pipe.role, pipe.material]
    if pipe.fittings_text:
        parts.append(f"fittings: {pipe.fittings_text}")
    if pipe.devices:
        parts.append(f"devices: {', '.join(pipe.devices)}")
    if pipe.valve != "open":
        parts.append("closed" if pipe.valve == "closed" else "check valve")
    if pipe.note:
        parts.append(pipe.note)
    return " · ".join(part for part in parts if part)
