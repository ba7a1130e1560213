"""Findings by state, scenarios, and the balance of the calculation."""

from __future__ import annotations

from typing import Final

from supplycheck.report.document import Block, Column, Facts, Heading, Paragraph, Row, Section, Table
from supplycheck.report.show import Show, column, without_empty, words
from supplycheck.results.display import (
    STATE_TITLES,
    STATES,
    finding_text,
    measure_text,
    remedy_text,
    tags_text,
)
from supplycheck.results.records import Result, ScenarioRow
from supplycheck.results.scenario_note import scenario_note


def findings(result: Result) -> Section:
    """Return the findings, what needs action first."""
    show = Show.of(result)
    columns = (
        Column("Check", wrap=True, share=0.2),
        Column("What was found", wrap=True, share=0.54),
        Column("Measured", right=True, share=0.13),
        Column("Limit", right=True, share=0.13),
    )
    blocks: list[Block] = [
        Paragraph(
            "Each check reports what it measured, the limit and where the limit comes from. Checks "
            "that were "
            "not run are shown as not run. That no check is outside a limit says nothing about what "
            "was not "
            "checked."
        )
    ]
    for state in STATES:
        rows = []
        for one in result.findings:
            if one.state != state:
                continue
            remedy = remedy_text(one, show.units)
            notes = [f"What to do: {remedy}"] if remedy else []
            notes += [f"at {tags_text(one.tags, 30)}"] if one.tags else []
            notes += [f"source: {one.source}"] if one.source else []
            measured, limit = measure_text(one.measured, show.units), measure_text(one.limit, show.units)
            rows.append(
                Row(
                    (one.check, finding_text(one, show.units), measured, limit),
                    note="  ·  ".join(notes),
                )
            )
        if rows:
            table = Table(f"{STATE_TITLES[state]} ({len(rows)})", columns, tuple(rows))
            blocks.append(without_empty(table, "Measured", "Limit"))
    if len(blocks) == 1:
        blocks.append(Paragraph("No check was run."))
    if result.open_questions:
        blocks.append(Heading("Open questions"))
        blocks += [
            Paragraph(question, bullet=f"{place}.")
            for place, question in enumerate(result.open_questions, start=1)
        ]
    return Section("Findings", tuple(blocks), fresh=True)


def flows(result: Result) -> Section:
    """Return what really flows in each scenario, and how well the calculation balances."""
    show = Show.of(result)
    balance = result.balance
    blocks: list[Block] = [_scenarios(result, show)]
    blocks += [_head_table(row, show) for row in result.scenarios if row.head_flows]
    pairs = (
        (
            "Largest flow imbalance",
            f"{show.small(balance.largest_flow_imbalance, 'flow')} at {balance.flow_node or '–'}, of "
            f"{show.t(balance.total_flow, 'flow')}",
        ),
        (
            "Largest pressure imbalance",
            f"{show.small(balance.largest_pressure_imbalance, 'pressure')} at "
            f"{balance.pressure_pipe or '–'}",
        ),
        ("Iterations", str(balance.iterations)),
    )
    blocks += [
        Heading("Balance"),
        Paragraph(
            "Recomputed from the unrounded numbers of result.json: the flows at every node, and the "
            "pressures along every pipe."
        ),
        Facts(pairs),
    ]
    return Section("What really flows, and the balance", tuple(blocks))


_WHERE_THERE: Final = (
    "Heads",
    "Open",
    "Lowest head",
    "There",
    "Of its required flow",
    "Average density",
    "Over-discharge",
    "Storage lasts",
)
"""Columns of the scenarios that are printed only where one of them holds a value."""


def _scenarios(result: Result, show: Show) -> Table:
    columns = (
        words("Scenario"),
        column("Total flow", show.s("flow")),
        column("At the supply", show.s("pressure")),
        column("Heads", show.s("flow")),
        column("Open"),
        words("Lowest head"),
        column("There", show.s("pressure")),
        column("Of its required flow"),
        column("Average density", show.s("density")),
        column("Over-discharge"),
        column("Storage lasts", "min"),
    )
    rows = tuple(
        Row(
            (
                row.name,
                show.n(row.total_flow, "flow"),
                show.left(row.supply_pressure),
                show.n(row.sprinkler_flow, "flow") if row.heads_open else "–",
                str(row.heads_open) if row.heads_open else "–",
                row.lowest_head or "–",
                show.left(row.lowest_pressure),
                show.n(row.lowest_ratio, "ratio", 2),
                show.n(row.delivered_density, "density"),
                "–" if row.over_discharge is None else show.t(row.over_discharge, "percent", 0),
                "–" if row.minutes_of_storage is None else f"{row.minutes_of_storage:.0f}",
            ),
            note=scenario_note(row, show.units),
        )
        for row in result.scenarios
    )
    note = "With the supply as it is, which may give more than is required."
    if any(row.heads_open for row in result.scenarios):
        note = "With the supply as it is: heads give what the pressure makes them give, not only what is "
        note += "required."
    if any(row.over_discharge is not None for row in result.scenarios):
        note += " Over-discharge: total flow of the heads in the area ÷ sum of their required flows − 1."
    if any(row.delivered_density is not None for row in result.scenarios):
        note += " Average density: the same total flow ÷ the area of these heads."
    table = Table("Scenarios", columns, rows, note, empty="no scenario was calculated", size=6.6)
    return without_empty(table, *_WHERE_THERE) if rows else table


def _head_table(row: ScenarioRow, show: Show) -> Table:
    columns = (words("Head"), column("Flow", show.s("flow")), column("Pressure", show.s("pressure")))
    three: list[Row] = []
    cells = [(tag, show.n(flow, "flow"), show.left(pressure)) for tag, flow, pressure in row.head_flows]
    for first in range(0, len(cells), 3):
        group = cells[first : first + 3]
        group += [("", "", "")] * (3 - len(group))
        three.append(Row(tuple(text for cell in group for text in cell)))
    return Table(f"Heads in {row.name}", columns * 3, tuple(three), size=6.6)
