"""Where the pressure goes, and the path worked by hand."""

from __future__ import annotations

from typing import Final

from supplycheck.report.document import Block, Figure, Paragraph, Row, Section, Table
from supplycheck.report.figures.bars import pressure_bars
from supplycheck.report.show import Show, column, steps_table, words
from supplycheck.results.display import available_text
from supplycheck.results.records import PathStep, Result
from supplycheck.results.totals import path_totals

ROWS: Final = 36


def pressure(result: Result, width: float) -> Section:
    """Return the bars from the remote head to the supply, and their table."""
    show = Show.of(result)
    path = result.path
    if not path:
        return Section(
            "Where the pressure goes",
            (Paragraph("No path was recorded for this calculation."),),
            fresh=True,
        )
    blocks: list[Block] = []
    for first in range(0, len(path), ROWS):
        part = path[first : first + ROWS]
        title = f"From {result.demand.governing_name} to {path[-1].end}"
        title += f", segments {first + 1} to {first + len(part)}" if len(path) > ROWS else ""
        blocks.append(Figure(title, pressure_bars(part, first, result, show.units, width)))
    blocks.append(_table(result, path, show))
    return Section("Where the pressure goes", tuple(blocks), fresh=True)


def _table(result: Result, path: tuple[PathStep, ...], show: Show) -> Table:
    unit = show.s("pressure")
    columns = (
        column("No."),
        words("From"),
        words("To"),
        column("At start", unit),
        column("Friction in pipe", unit),
        column("Fittings", unit),
        column("Elevation", unit),
        column("Devices", unit),
        column("At end", unit),
    )
    rows = [
        Row(
            (
                str(number),
                step.start,
                step.end,
                *(
                    show.n(value, "pressure", 2 if show.units.name == "us" else 3)
                    for value in (
                        step.pressure_start,
                        step.friction,
                        step.fitting_friction,
                        step.elevation,
                        step.device,
                        step.pressure_end,
                    )
                ),
            )
        )
        for number, step in enumerate(path, start=1)
    ]
    totals = path_totals(path)
    if totals is not None:
        values = (
            totals.head,
            totals.friction,
            totals.fittings,
            totals.elevation,
            totals.devices,
            totals.supply,
        )
        cells = tuple(show.n(v, "pressure", 2 if show.units.name == "us" else 3) for v in values)
        rows.append(Row(("", "whole path", "", *cells), strong=True))
    available = available_text(result.supply.available_pressure, show.units)
    note = f"Available at {result.demand.node} at the demand flow: {available}."
    return Table("Pressure by segment", columns, tuple(rows), note)


def hand_check(result: Result) -> Section:
    """Return the path worked line by line, to be followed with a pocket calculator."""
    show = Show.of(result)
    path_rows = tuple(_hand_row(number, step, show) for number, step in enumerate(result.path, start=1))
    columns = (
        column("No."),
        words("From – to"),
        words("Size"),
        column("Bore", show.s("size")),
        column("Flow added", show.s("flow")),
        column("Flow", show.s("flow")),
        column("L", show.s("length")),
        column("F", show.s("length")),
        column("T", show.s("length")),
        column("C or f"),
        column("pf, loss per length", show.s("gradient")),
        column("K at start", show.s("k_factor")),
        column("At end", show.s("pressure")),
    )
    note = (
        "L is the pipe, F the fittings as equivalent length (see the table of fittings), T both. A flow "
        "added below zero is what another way round carries to that node."
    )
    blocks: list[Block] = [
        Paragraph(
            "The governing path can be followed from here with a pocket calculator: each line holds "
            "the formula with its numbers and its result; a flow that joins or splits has a line of its "
            "own before it is counted. Nothing is rounded inside the calculation, so that a line worked "
            "from the printed numbers may differ in the last digit. q flow of an outlet, Q flow in a pipe, "
            "pf loss per length, Pf friction in the whole pipe, Pe height, Pd devices, P pressure, as in "
            "the pipe information; Q at a node is what is carried on from there."
        ),
        Table("The path", columns, path_rows, note, size=6.6),
        steps_table("Line by line", result.hand_check, show),
    ]
    return Section("Hand check of the governing path", tuple(blocks), fresh=True)


def _hand_row(number: int, step: PathStep, show: Show) -> Row:
    law = f"{step.c_factor:g}" if step.c_factor is not None else show.n(step.friction_factor, "ratio", 4)
    note = "; ".join(text for text in (step.fittings_text, step.note) if text)
    return Row(
        (
            str(number),
            f"{step.start} – {step.end}",
            show.nominal(step.nominal),
            show.n(step.bore, "size"),
            show.n(step.flow_added, "flow"),
            show.n(step.flow, "flow"),
            show.n(step.length, "length"),
            show.n(step.equivalent_length, "length"),
            show.n(step.total_length, "length"),
            law,
            show.n(step.friction_gradient, "gradient"),
            show.n(step.k_at_start, "k_factor"),
            show.n(step.pressure_end, "pressure", 2),
        ),
        note=note,
    )
