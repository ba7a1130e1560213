"""Hydrants, standpipes, outflows: every case beside the others, a sheet for each hydrant, all outlets."""

from __future__ import annotations

import math

from supplycheck.model import Project
from supplycheck.model.duty import DutyRow, HydrantDuty, HydrantRow, OutletState, StandpipeDuty
from supplycheck.report.document import (
    Block,
    Column,
    Facts,
    Figure,
    Heading,
    Paragraph,
    Row,
    Section,
    Table,
)
from supplycheck.report.figures.graph import supply_graph
from supplycheck.report.show import Show, column, words
from supplycheck.results.records import GraphPoint, Result


def duties(result: Result, width: float) -> Section | None:
    """Return the section on the duties beside sprinklers, ``None`` where the project has none."""
    project, show = result.project, Show.of(result)
    title = duty_title(project)
    if project.outflows is not None:
        return Section(title, (_cases(result, show), _outflows(result, show)), fresh=True)
    if project.hydrants is None and project.standpipes is None:
        return None
    blocks: list[Block] = [_cases(result, show), *_graph(result, show, width)]
    if project.hydrants is not None:
        blocks += _hydrants(result, project.hydrants, show)
    if project.standpipes is not None:
        blocks += _standpipes(result, project.standpipes, show)
    return Section(title, tuple(blocks), fresh=True)


def duty_title(project: Project) -> str:
    """Return the title of the section on what is asked beside sprinklers."""
    if project.outflows is not None:
        return "Fixed outflows"
    names = ["hydrants"] if project.hydrants is not None else []
    names += ["standpipes"] if project.standpipes is not None else []
    return " and ".join(names).capitalize()


def _spare(row: DutyRow) -> OutletState | None:
    return min(row.outlets, key=lambda one: one.spare, default=None)


def _cases(result: Result, show: Show) -> Table:
    columns = (
        Column("Case", wrap=True, share=0.3),
        Column("Verdict rests on it", wrap=True, share=0.09),
        Column("Flow", show.s("flow"), right=True, share=0.09),
        Column(f"Needed at {result.demand.node}", show.s("pressure"), right=True, share=0.1),
        Column("Margin", show.s("pressure"), right=True, share=0.09),
        Column("Least to spare at", wrap=True, share=0.15),
        Column("Left there", show.s("pressure"), right=True, share=0.09),
        Column("Asked there", show.s("pressure"), right=True, share=0.09),
    )
    rows = [_case(row, show, strong=_governs(result, row.label)) for row in result.duties.rows]
    if result.project.criteria.has_sprinklers:
        rows.insert(0, _sprinklers(result, show))
    note = (
        "Every case is solved on the network; flows at outlets are fixed. Needed and margin are at "
        f"{result.demand.node} at the flow of the case; left and asked are at the outlet with the supply "
        "as it is, none where no pressure is left. The case that governs is in bold."
    )
    return Table("Cases side by side", columns, tuple(rows), note, empty="no case was solved", size=6.6)


def _graph(result: Result, show: Show, width: float) -> list[Block]:
    """Return the supply with the hardest case of each kind, where both are told at the same node."""
    sources = {test.node for test in result.project.supply.tests}
    sources |= {tank.node for tank in result.project.supply.tanks}
    if sources != {result.demand.node}:
        return []
    hardest: dict[tuple[str, str], DutyRow] = {}
    for row in result.duties.rows:
        before = hardest.get((row.duty, row.kind))
        if math.isfinite(row.margin) and (before is None or row.margin < before.margin):
            hardest[row.duty, row.kind] = row
    points = [GraphPoint(row.label, "demand", row.flow, row.required_pressure) for row in hardest.values()]
    curves = tuple(curve for curve in result.curves if curve.style != "demand")
    tested = tuple(point for point in result.points if point.style == "test")
    if result.project.criteria.has_sprinklers:
        area = result.design_area.governing
        points.append(GraphPoint(area.label, "demand with hose", area.flow, area.required_pressure))
    drawing = supply_graph(curves, (*tested, *points), show.units, (width, 250.0))
    return [Figure("Supply and the hardest case of each kind", drawing)]


def _governs(result: Result, label: str) -> bool:
    return result.governs.endswith(f" in {label}")


def _sprinklers(result: Result, show: Show) -> Row:
    hardest = result.design_area.governing
    return Row(
        (
            f"sprinklers: {hardest.label}",
            "yes",
            show.n(hardest.flow, "flow"),
            show.n(hardest.required_pressure, "pressure"),
            show.n(hardest.margin, "pressure"),
            "",
            "",
            "",
        ),
        strong=_governs(result, hardest.label),
    )


def _case(row: DutyRow, show: Show, *, strong: bool) -> Row:
    spare = _spare(row)
    notes = [row.note] if row.note else []
    notes += [f"hardest of {row.tried} choices"] if row.tried > 1 else []
    return Row(
        (
            row.label,
            "yes" if row.counts else "no, listed",
            show.n(row.flow, "flow"),
            show.n(row.required_pressure, "pressure"),
            show.n(row.margin, "pressure"),
            spare.node if spare else row.governing,
            show.left(spare.pressure if spare else None),
            show.n(spare.required if spare else None, "pressure"),
        ),
        note="; ".join(notes),
        strong=strong,
    )


def _drawn(flows: tuple[tuple[str, float], ...], show: Show) -> str:
    return ", ".join(f"{show.t(flow, 'flow')} at {node}" for node, flow in flows) or "nothing"


def _fire_flow(duty: HydrantDuty, show: Show) -> Facts:
    asked = duty.fire_flow
    pairs = [
        ("Required fire flow", show.t(asked.flow, "flow")),
        ("Duration", show.t(asked.duration, "time")),
        (
            "Shared by",
            f"{duty.at_once} hydrants at once, at most {show.t(duty.greatest_each, 'flow')} each",
        ),
        ("Pressure kept", show.t(duty.residual, "pressure")),
        ("Highest point of the main", duty.highest_point or "not named"),
        ("Maximum-day demand", _drawn(duty.maximum_day, show)),
        ("Pipes that may be shut", ", ".join(duty.valves) or "none named"),
        ("Source", asked.source),
    ]
    if asked.table_flow is not None:
        area = show.t(asked.area, "area")
        pairs.insert(1, ("Looked up for", f"{asked.construction}, {area}, {asked.edition}"))
        floor = "" if asked.floor is None else f", not below {show.t(asked.floor, 'flow')}"
        taken = f"{show.t(asked.table_flow, 'flow')}, "
        taken += f"less {show.t(asked.reduction, 'percent')}{floor}" if asked.reduction else "none"
        pairs.insert(2, ("Table, reduction for sprinklers", taken))
    return Facts(tuple(pairs), columns=2)


def _hydrants(result: Result, duty: HydrantDuty, show: Show) -> list[Block]:
    columns = (
        words("Hydrant"),
        words("Node"),
        column("Without flow", show.s("pressure")),
        column("Asked alone", show.s("flow")),
        column("Left then", show.s("pressure")),
        column("Greatest flow", show.s("flow")),
        column("On maximum day", show.s("flow")),
        words("Limited by"),
        words("Class, colour"),
    )
    rows = tuple(
        Row(
            (
                row.tag,
                row.node,
                show.n(row.static, "pressure"),
                show.n(row.alone, "flow"),
                show.left(row.residual_alone),
                show.n(row.greatest_flow, "flow"),
                show.n(row.greatest_on_maximum_day, "flow"),
                row.limited_by,
                f"{row.rank}, {row.colour}" if row.rank else "–",
            ),
            note=row.note,
        )
        for row in result.duties.hydrants
    )
    note = (
        f"The greatest flow leaves {show.t(duty.residual, 'pressure')} at the hydrant, after its lateral "
        "and body, and at the highest point of the main. Class and colour by that flow (NFPA 291)."
    )
    blocks: list[Block] = [
        Heading("Fire flow"),
        _fire_flow(duty, show),
        Table("Each hydrant by itself", columns, rows, note, size=6.6),
    ]
    for row in result.duties.hydrants:
        blocks += _sheet(result, row, show)
    return blocks


def _sheet(result: Result, hydrant: HydrantRow, show: Show) -> list[Block]:
    """Return the sheet of one hydrant: where it stands, what it gives, every case in which it flows."""
    node = next(one for one in result.nodes if one.tag == hydrant.node)
    duty = result.project.hydrants
    given = {one.tag: one.device for one in duty.hydrants}[hydrant.tag] if duty else None
    loss = f"{show.t(hydrant.device_loss, 'pressure')} alone" if given else "as drawn in the network"
    pairs = (
        ("Stands", hydrant.location or "not described"),
        ("Node, elevation", f"{hydrant.node}, {show.t(node.elevation, 'length')}"),
        ("Pressure without flow", show.t(hydrant.static, "pressure")),
        ("Share of the fire flow", show.t(hydrant.share, "flow")),
        (
            "Asked alone",
            f"{show.t(hydrant.alone, 'flow')}, {show.left_t(hydrant.residual_alone)} left",
        ),
        ("Loss of lateral and body", loss),
        ("Greatest flow", show.t(hydrant.greatest_flow, "flow")),
        ("Class by NFPA 291", f"{hydrant.rank}, {hydrant.colour}" if hydrant.rank else "–"),
    )
    flowing = [
        (row.label, one)
        for row in result.duties.rows
        for one in row.outlets
        if row.duty == "hydrants" and one.node == hydrant.node and one.flow > 0
    ]
    rows = tuple(
        Row(
            (
                label,
                show.n(one.flow, "flow"),
                show.left(one.pressure),
                show.n(one.required, "pressure"),
                show.n(one.spare, "pressure"),
            )
        )
        for label, one in flowing
    )
    columns = (
        Column("Case", wrap=True, share=0.48),
        Column("Flow", show.s("flow"), right=True, share=0.13),
        Column("Left", show.s("pressure"), right=True, share=0.13),
        Column("Asked", show.s("pressure"), right=True, share=0.13),
        Column("To spare", show.s("pressure"), right=True, share=0.13),
    )
    return [
        Heading(f"Hydrant {hydrant.tag}"),
        Facts(pairs, columns=2),
        Table(
            f"Cases with hydrant {hydrant.tag}",
            columns,
            rows,
            empty="it flows in no case that was solved",
            size=6.6,
        ),
    ]


def _outflows(result: Result, show: Show) -> Table:
    columns = (
        words("Node"),
        words("Kind"),
        column("Elevation", show.s("length")),
        column("Outflow", show.s("flow")),
        column("Left at the demand", show.s("pressure")),
        column("Left with the supply as it is", show.s("pressure")),
        column("Asked", show.s("pressure")),
        column("To spare", show.s("pressure")),
    )
    at_demand = {node.tag: node for node in result.nodes}
    duty = result.project.outflows
    unstated = set(duty.unstated) if duty else set()
    rows = tuple(
        Row(
            (
                one.node,
                at_demand[one.node].kind,
                show.n(at_demand[one.node].elevation, "length"),
                show.n(one.flow, "flow"),
                show.n(at_demand[one.node].pressure, "pressure"),
                show.left(one.pressure),
                show.n(one.required, "pressure"),
                show.n(one.spare, "pressure"),
            ),
            note="no minimum pressure is stated: 0 is taken" if one.node in unstated else "",
            strong=one.node == result.demand.governing_head,
        )
        for row in result.duties.rows
        for one in row.outlets
    )
    note = (
        "At the demand the supply is lowered until the first node is left exactly what is asked there, in "
        "bold. Outflows are fixed: they never float with the pressure."
    )
    return Table("Every node that asks for a pressure", columns, rows, note, size=6.6)


def _standpipes(result: Result, duty: StandpipeDuty, show: Show) -> list[Block]:
    protection = "sprinklered throughout" if duty.sprinklered else "not sprinklered throughout"
    pairs = (
        ("Building", protection),
        ("Flow of an outlet", show.t(duty.outlet_flow, "flow")),
        ("Greatest total", show.t(duty.greatest_flow, "flow")),
        ("Regulating device above", show.t(duty.regulating_pressure, "pressure")),
        ("Drawn at the same time", _drawn(duty.added_flows, show)),
        ("Source", duty.source),
    )
    return [
        Heading("Standpipes"),
        Facts(pairs, columns=2),
        *_connection(result, show),
        _outlets(result, show),
        *_devices(duty, show),
    ]


def _connection(result: Result, show: Show) -> list[Block]:
    row = result.duties.connection
    if row is None:
        return [Paragraph("No fire department connection is named in the project.")]
    if row.note.startswith("no solution"):
        return [Paragraph(f"Fire department connection at {row.node}: {row.note}.")]
    text = (
        f"Fire department connection at {row.node}: {show.t(row.pressure, 'pressure')} must be fed there "
        f"to give {show.t(row.flow, 'flow')} with no other supply running ({row.case}; {row.governing} "
        "governs)."
    )
    return [Paragraph(text + (f" {row.note[:1].upper()}{row.note[1:]}." if row.note else ""))]


def _outlets(result: Result, show: Show) -> Table:
    unit = show.s("pressure")
    columns = (
        words("Standpipe"),
        words("Outlet"),
        column("Size", show.s("size")),
        column("Required", unit),
        column("Needed at the node", unit),
        column("Lowest while flowing", unit),
        column("At no flow", unit),
        words("Regulating device"),
        column("Behind it", unit),
        words("Above the limit"),
    )
    rows = tuple(
        Row(
            (
                row.riser,
                row.node,
                show.n(row.size, "size", 1),
                show.n(row.required, "pressure"),
                show.n(row.needed_at_node, "pressure"),
                show.left(row.lowest_flowing),
                show.n(row.no_flow, "pressure"),
                row.device or "none",
                show.n(row.after_device, "pressure"),
                "yes" if row.over_limit else "no",
            ),
            strong=row.over_limit,
        )
        for row in result.duties.standpipes
    )
    note = (
        "Needed at the node is what leaves the required pressure behind a regulating device. At no flow: "
        "the highest measured supply with pumps at churn. A dash stands where an outlet does not flow in "
        "the cases shown, or where a device has no figure."
    )
    return Table("Every hose outlet", columns, rows, note, size=6.6)


def _devices(duty: StandpipeDuty, show: Show) -> list[Block]:
    unit = show.s("pressure")
    blocks: list[Block] = []
    for device in duty.devices:
        pairs = [
            *(("flowing", *pair) for pair in zip(device.inlet, device.outlet, strict=True)),
            *(("no flow", *pair) for pair in zip(device.static_inlet, device.static_outlet, strict=True)),
        ]
        rows = tuple(
            Row((state, show.n(inlet, "pressure"), show.n(left, "pressure")))
            for state, inlet, left in pairs
        )
        columns = (words("State"), column("Inlet", unit), column("Outlet", unit))
        blocks.append(
            Table(f"Regulating device {device.tag}", columns, rows, f"Source: {device.source}", size=6.6)
        )
    return blocks
