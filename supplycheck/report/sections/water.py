"""The water supply: tests, curve, what was done to it, margin, graph."""

from __future__ import annotations

from dataclasses import replace

from supplycheck.model import FlowTest, Supply
from supplycheck.report.document import Block, Facts, Figure, Heading, Paragraph, Row, Section, Table
from supplycheck.report.figures.graph import supply_graph
from supplycheck.report.show import Show, column, given, steps_table, words
from supplycheck.results.display import NONE_LEFT, available_text, demand_text, law_names, read_test_text
from supplycheck.results.records import HandStep, Result


def water(result: Result, width: float) -> Section:
    """Return the water supply analysis."""
    show = Show.of(result)
    supply = result.project.supply
    graph = supply_graph(result.curves, result.points, show.units, (width, 330.0))
    blocks: list[Block] = [
        *([Paragraph(result.supply.statement)] if result.supply.statement.strip() else []),
        Facts(_numbers(result, show), columns=2),
        Figure(
            "Supply and demand",
            graph,
            _caption(result),
            smaller=supply_graph(result.curves, result.points, show.units, (width, 250.0)),
        ),
    ]
    for test in supply.tests:
        blocks += _test(test, show)
    if supply.tanks:
        blocks.append(_tanks(supply, show))
    blocks += [
        _adjustments(supply, show),
        _curve_steps(result, show),
        Heading("Margin"),
        Paragraph(result.margin.rule + (f" ({result.margin.source})" if result.margin.source else "")),
        steps_table("The margin, step by step", result.margin.steps, show),
        *_second_law(result, show),
        Paragraph(
            "Nothing is rounded inside the calculation: a sum of printed numbers may differ from its "
            "printed result by one in the last digit.",
            "small",
        ),
    ]
    return Section("Water supply analysis", tuple(blocks), fresh=True)


def _curve_steps(result: Result, show: Show) -> Table:
    """Return the steps; past the zero of the curve no pressure is left, only a number to reckon with."""
    steps = result.supply.steps
    table = steps_table("The curve, step by step", steps, show)
    rows = tuple(
        _none_left(row) if step.kind == "pressure" and step.value < 0 and not _is_rest(step) else row
        for row, step in zip(table.rows, steps, strict=True)
    )
    return replace(table, rows=rows)


def _is_rest(step: HandStep) -> bool:
    return step.step.startswith("Left over")


def _none_left(row: Row) -> Row:
    past = f"past the zero of the curve, carried on to {row.cells[2]} for the margin"
    return Row((*row.cells[:2], NONE_LEFT), note="; ".join(text for text in (row.note, past) if text))


def _second_law(result: Result, show: Show) -> list[Block]:
    """Return demand, supply and margin by both friction laws, and which of them decides."""
    second = result.second_law
    if second is None:
        return []
    first, other = law_names(result.project.law.name, second.name)
    title = "Both friction laws"
    if second.note:
        return [Paragraph(f"{title}: by {other} {second.note}. {first} decides.")]
    demand, margin = result.demand, result.margin
    columns = (
        words("Friction law"),
        column("Demand flow", show.s("flow")),
        column(f"Demand at {demand.node}", show.s("pressure")),
        column(f"Available at {demand.node}", show.s("pressure")),
        column("Margin before the rule", show.s("pressure")),
        column("Left after the rule", show.s("pressure")),
    )
    available = result.supply.available_pressure
    rows = (
        _law_row(
            first, demand.flow, (demand.pressure, available, margin.pressure, margin.after_rule), show
        ),
        _law_row(
            other,
            second.flow,
            (second.pressure, second.available_pressure, second.margin, second.after_rule),
            show,
        ),
        Row(
            (
                f"{other} less {first}",
                show.n(second.flow - demand.flow, "flow"),
                show.n(second.pressure - demand.pressure, "pressure"),
                "",
                show.n(second.margin - margin.pressure, "pressure"),
                "",
            )
        ),
    )
    note = (
        f"The verdict rests on {first}. {other} is worked for the same heads and outlets on the same "
        "pipes; other placements of the design area are not tried by it."
    )
    return [Table(title, columns, rows, note)]


def _law_row(
    name: str, flow: float, pressures: tuple[float, float, float, float | None], show: Show
) -> Row:
    demand, available, margin, after = pressures
    return Row(
        (
            name,
            show.n(flow, "flow"),
            show.n(demand, "pressure"),
            show.left(available),
            show.n(margin, "pressure"),
            show.n(after, "pressure"),
        )
    )


def _caption(result: Result) -> str:
    """Return what the reader has to know about the graph, of several sources also how they are marked."""
    text = "The flow axis is linear in flow^1.85: a test of one point, as measured, is straight on it."
    if any(curve.extrapolated_from is not None for curve in result.curves):
        text = f"Dashed: beyond the greatest flow that was tested. {text}"
    if sum(point.style == "available" for point in result.points) > 1:
        text += (
            f" The demand line is that at {result.demand.node}; at every other source two marks "
            "stand at the flow which that source gives."
        )
    return text


def _numbers(result: Result, show: Show) -> tuple[tuple[str, str], ...]:
    supply, demand = result.supply, result.demand
    ratio = supply.tested_range_ratio
    common = (
        ("Compared at", demand.node),
        ("Static there", show.t(supply.static_at_comparison, "pressure")),
        ("Demand there", f"{show.t(demand.pressure, 'pressure')}; {demand_text(result, show.units)}"),
        ("Available there", available_text(supply.available_pressure, show.units)),
        ("Before adjustments", available_text(supply.unadjusted_pressure, show.units)),
        (
            "Flow at the demand pressure",
            _flow_there(supply.available_flow, show),
        ),
    )
    if supply.residual is None:  # a tank gives most: there is no reading
        return common
    named = read_test_text(result)
    of_which = f" ({named})" if named else ""
    residual = f"{show.t(supply.residual, 'pressure')} at {show.t(supply.test_flow, 'flow')}"
    return (
        ("Static", f"{show.t(supply.static, 'pressure')}{of_which}"),
        ("Residual", f"{residual}{of_which}"),
        *common,
        *_rated(result, show),
        ("Demand / tested flow", "–" if ratio is None else f"{ratio:.2f}"),
    )


def _rated(result: Result, show: Show) -> tuple[tuple[str, str], ...]:
    """Return the flows at 20 psi at the gauge: as measured, and adjusted where that differs."""
    supply, title = result.supply, "Flow at 20 psi (1.38 bar)"
    found = [("as measured", supply.flow_at_20_psi)]
    steps = [step for step in supply.steps if step.step.endswith("at 20 psi (1.38 bar), adjusted")]
    found += [("adjusted", step.value) for step in steps[:1]]
    return tuple((f"{title}, {how}", _rated_text(result, flow, show)) for how, flow in found)


def _rated_text(result: Result, flow: float | None, show: Show) -> str:
    text, tested = f"{show.t(flow, 'flow')} at the gauge", result.supply.test_flow
    beyond = flow is not None and tested is not None and flow > tested * (1 + 1e-9)
    return f"{text}, beyond the tested flow" if beyond else text


def _flow_there(flow: float | None, show: Show) -> str:
    """Return the flow at which the demand pressure is still there, in words where there is no such flow."""
    if flow is None:
        return "not limited: the pressure is there at every flow"
    return show.t(flow, "flow") if flow > 0.0 else "none"


def _test(test: FlowTest, show: Show) -> list[Block]:
    kind = "Model values" if test.model else "Flow test"
    measured = {True: "measured", False: "not measured", None: "not given"}[test.outlet_diameter_measured]
    calibrated = test.gauge_calibrated.isoformat() if test.gauge_calibrated else "not given"
    accuracy = "not given" if test.gauge_accuracy is None else show.t(test.gauge_accuracy, "percent")
    pairs = (
        ("Date, time", f"{test.date.isoformat()} {test.time}".strip()),
        ("Node", test.node),
        ("Static hydrant", given(test.static_hydrant)),
        ("Flowing hydrant", given(test.flow_hydrant)),
        ("Conducted by", given(test.conducted_by)),
        ("Witnessed by", given(test.witnessed_by)),
        ("Main", given(test.main)),
        ("Gauge elevation", show.t(test.gauge_elevation, "length")),
        ("Gauge range, accuracy", f"{show.t(test.gauge_range, 'pressure')}, {accuracy}"),
        ("Gauge calibrated", calibrated),
        ("Outlet diameters", measured),
        ("Source", given(test.source)),
    )
    rows = [
        Row(("static", show.n(0.0, "flow"), show.n(test.static, "pressure"), "", "", "", "")),
    ]
    for number, point in enumerate(test.points, start=1):
        rows.append(
            Row(
                (
                    f"point {number}",
                    show.n(point.flow, "flow"),
                    show.n(point.residual, "pressure"),
                    "",
                    "",
                    "",
                    "",
                )
            )
        )
        rows += [
            Row(
                (
                    "   outlet" + (f" {outlet.hydrant}" if outlet.hydrant else ""),
                    "",
                    "",
                    show.n(outlet.diameter, "size"),
                    f"{outlet.coefficient:.2f} ({outlet.kind or outlet.shape or outlet.origin})",
                    show.n(outlet.pitot, "pressure"),
                    f"{outlet.pumper_factor:.2f}",
                )
            )
            for outlet in point.outlets
        ]
    columns = (
        words("Reading"),
        column("Flow", show.s("flow")),
        column("Pressure at gauge", show.s("pressure")),
        column("Outlet diameter", show.s("size")),
        column("Coefficient"),
        column("Pitot", show.s("pressure")),
        column("Pumper factor"),
    )
    return [
        Heading(f"{kind}: {test.tag}"),
        Facts(pairs, columns=2),
        Table("Readings", columns, tuple(rows)),
    ]


def _tanks(supply: Supply, show: Show) -> Table:
    columns = (
        words("Tank"),
        words("Kind"),
        words("Node"),
        column("Water level", show.s("length")),
        column("Lowest level", show.s("length")),
        column("Volume", show.s("volume")),
        column("Refill", show.s("flow")),
    )
    rows = tuple(
        Row(
            (
                tank.tag,
                tank.kind,
                tank.node,
                show.n(tank.water_level, "length"),
                show.n(tank.low_level, "length"),
                show.n(tank.volume, "volume"),
                show.n(tank.refill, "flow"),
            )
        )
        for tank in supply.tanks
    )
    return Table("Tanks", columns, rows)


def _adjustments(supply: Supply, show: Show) -> Table:
    what = {
        "low supply": "static and residual lowered by {p}",
        "static cap": "no pressure above {p}",
        "percent": "every pressure times {f}",
    }
    rows = tuple(
        Row(
            (
                one.kind,
                what[one.kind].format(p=show.t(one.pressure, "pressure"), f=f"{one.factor:.3f}"),
                given(one.reason),
            )
        )
        for one in supply.adjustments
    )
    columns = (words("Adjustment, in the order applied"), words("What it does"), words("Reason"))
    return Table("Adjustments of the curve", columns, rows, empty="none in the project")
