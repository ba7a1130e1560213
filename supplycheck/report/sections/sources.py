"""Pumps and tanks: what each gives in every state, how long the water lasts, what pump is wanted."""

from __future__ import annotations

from supplycheck.report.document import Block, Facts, Figure, Heading, Paragraph, Row, Section, Table
from supplycheck.report.figures.graph import supply_graph
from supplycheck.report.figures.timeline import tank_time_line
from supplycheck.report.show import Show, column, given, words
from supplycheck.results.records import NeededPump, PumpRecord, PumpState, Result, TankRecord

_WHEN = {
    "demand": "demand",
    "actual supply": "what really flows",
    "150 % of rated flow": "150 % of the rated flow, nothing else open",
}


def sources(result: Result, width: float) -> Section | None:
    """Return the section on pumps and tanks; ``None`` where the project has none and wants none."""
    show = Show.of(result)
    blocks: list[Block] = []
    for pump in result.pumps:
        blocks += _pump(pump, show, width)
    if result.needed_pump is not None:
        blocks += _needed(result.needed_pump, show)
    if result.tanks:
        blocks += _tanks(result.tanks, show, width)
    whole = bool(result.pumps or result.tanks)
    return Section("Pumps and tanks", tuple(blocks), fresh=whole) if blocks else None


def _pump(pump: PumpRecord, show: Show, width: float) -> list[Block]:
    facts, rating = pump.facts, pump.facts.rating
    rated = "not given"
    if rating is not None:
        rated = f"{show.t(rating.flow, 'flow')} at {show.t(rating.pressure, 'pressure')}"
    churn = f"{show.t(facts.churn, 'pressure')}{_share(facts.churn_share, show)}"
    far = f"{show.t(facts.net_at_overload, 'pressure')}{_share(facts.overload_share, show)}"
    total = f"{show.t(facts.churn, 'pressure')} + {show.t(facts.highest_suction, 'pressure')}"
    pairs = (
        ("Pump", f"{facts.title} ({facts.arrangement})"),
        ("Stands in", f"pipe {facts.pipe}, from {facts.inlet} to {facts.outlet}; fed by {facts.fed_by}"),
        ("Rated", rated),
        ("No flow (churn)", churn),
        ("150 % of rated flow", far),
        ("End of the curve", show.t(facts.curve_end, "flow")),
        ("Highest pressure without flow", f"{show.t(facts.highest_discharge, 'pressure')} = {total}"),
        ("Curve from", given(facts.source)),
    )
    blocks: list[Block] = [Heading(f"Pump {facts.tag}"), Facts(pairs, columns=2)]
    if facts.from_limits:
        blocks.append(
            Paragraph(
                "The curve is not that of a pump: it is the weakest that the pump standard allows for the "
                "rating. A stated curve replaces it before anything is ordered.",
                "caution",
            )
        )
    if facts.note:
        blocks.append(Paragraph(facts.note))
    blocks.append(_states(pump, show))
    if pump.curves:
        drawn = ""
        if facts.drawn_before > 0.0:
            drawn = f" {show.t(facts.drawn_before, 'flow')} is drawn before the pump at every point."
        carried = any(curve.extrapolated_from is not None for curve in pump.curves)
        beyond = " Dashed: beyond the tested flow." if carried else ""
        blocks.append(
            Figure(
                f"Supply, pump and both together at {facts.tag}",
                supply_graph(pump.curves, pump.points, show.units, (width, 300.0)),
                f"Against the flow through the pump.{drawn}{beyond}",
                smaller=supply_graph(pump.curves, pump.points, show.units, (width, 220.0)),
            )
        )
    return blocks


def _share(share: float | None, show: Show) -> str:
    return "" if share is None else f", {show.t(share, 'percent')} of rated"


def _states(pump: PumpRecord, show: Show) -> Table:
    header = any(state.at_header is not None for state in pump.facts.states)
    source = "At the tank" if pump.facts.from_tank else "In the main"
    columns = [
        words("State"),
        column("Flow", show.s("flow")),
        column("Of rated", show.s("percent")),
        column(source, show.s("pressure")),
        column("Suction", show.s("pressure")),
        column("Adds", show.s("pressure")),
        column("Discharge", show.s("pressure")),
    ]
    columns += [column("Test header", show.s("pressure"))] if header else []
    rows = tuple(Row(_state_cells(state, show, header=header)) for state in pump.facts.states)
    note = (
        "Suction is read at the start of the pipe in which the pump stands, behind the devices before it. "
        "At the demand it is what the supply gives at that flow."
    )
    return Table("The pump in each state", tuple(columns), rows, note, empty="the pump does not run")


def _state_cells(state: PumpState, show: Show, *, header: bool) -> tuple[str, ...]:
    cells = (
        _WHEN[state.name],
        show.n(state.flow, "flow"),
        show.n(state.share, "percent"),
        *(show.left(value) for value in (state.main, state.suction, state.net, state.discharge)),
    )
    return (*cells, show.left(state.at_header)) if header else cells


def _needed(needed: NeededPump, show: Show) -> list[Block]:
    where = f"in place of pump {needed.instead_of}" if needed.instead_of else f"behind {needed.node}"
    text = (
        f"The supply falls short by {show.t(needed.missing, 'pressure')}, the margin rule included. A pump "
        f"{where} would have to add {show.t(needed.net, 'pressure')} at {show.t(needed.flow, 'flow')}, "
        f"{_on_suction(needed.suction, show)}. Of each size below, every pump within the "
        "limits of the pump standard is strong enough. The floor is that of a main, or the authority's own."
    )
    columns = (
        column("Rated flow", show.s("flow")),
        column("Rated pressure", show.s("pressure")),
        column("Demand of rated", show.s("percent")),
        column("Suction at 150 %", show.s("pressure")),
        words(f"Floor of {show.t(needed.floor, 'pressure')} at the suction"),
    )
    rows = tuple(
        Row(
            (
                show.n(one.rating.flow, "flow"),
                show.n(one.rating.pressure, "pressure"),
                show.n(one.demand_share, "percent"),
                show.left(one.suction_at_overload),
                "holds" if one.suction_holds else "does not hold",
            )
        )
        for one in needed.options
    )
    return [
        Heading("The pump that would be needed"),
        Paragraph(text),
        Table("Sizes that would do", columns, rows, empty="no size reaches"),
    ]


def _on_suction(suction: float, show: Show) -> str:
    if suction < 0:
        return "though at that flow the supply has no pressure left for its suction"
    return f"on {show.t(suction, 'pressure')} of suction"


def _tanks(tanks: tuple[TankRecord, ...], show: Show, width: float) -> list[Block]:
    blocks: list[Block] = []
    for tank in tanks:
        time = tank.time
        actual = tank.time.actual_flow
        pairs = (
            ("Kind, node", f"{tank.kind}, {tank.node}"),
            ("Water level", show.t(tank.water_level, "length")),
            ("Lowest level", show.t(tank.low_level, "length")),
            ("Usable volume", show.t(time.volume, "volume")),
            ("Must last", show.t(time.duration, "time")),
            ("Refill", f"{show.t(time.refill, 'flow')}; brings {show.t(tank.credit, 'volume')} meanwhile"),
            ("Demand", show.t(time.nominal_flow, "flow")),
            ("What really flows", show.t(actual, "flow")),
            ("Needed for the demand", show.t(time.nominal_volume, "volume")),
            ("Needed for what really flows", show.t(time.actual_volume, "volume")),
            ("Lasts at the demand", show.t(time.lasts, "time")),
            ("Lasts with what really flows", show.t(time.actual_lasts, "time")),
            ("To spare", show.t(time.spare_volume, "volume")),
            ("Time of refill", show.t(time.refill_time, "time")),
        )
        blocks += [Heading(f"Tank {time.tag}"), Facts(pairs, columns=2)]
        blocks += [Paragraph(tank.note)] if tank.note else []
        drawing = tank_time_line(tank, show.units, (width, 210.0))
        if drawing is not None:
            caption = "The volume needed is what is drawn beyond the refill over the time it must last."
            blocks.append(Figure(f"Time line of {time.tag}", drawing, caption))
    return blocks
