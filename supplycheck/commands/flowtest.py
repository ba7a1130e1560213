"""``supplycheck flowtest``: reduce a hydrant flow test."""

from __future__ import annotations

import json
import math
import textwrap
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import click

from supplycheck.commands.readings import read_day, read_flow_test, read_si

if TYPE_CHECKING:
    from supplycheck.model import FlowTest
    from supplycheck.supply import FlowTestFacts, OutletFlow, SupplyCurve
    from supplycheck.units import UnitSet


@dataclass(frozen=True, slots=True)
class Answer:
    """Everything that is printed; SI."""

    test: FlowTest
    dated: bool
    outlets: tuple[OutletFlow, ...]
    facts: FlowTestFacts
    curve: SupplyCurve
    flows_at: tuple[tuple[float, float | None], ...]
    pressures_at: tuple[tuple[float, float], ...]
    table: tuple[tuple[float, float], ...]
    rated: float | None
    rating: tuple[str, str, str] | None
    age: float | None
    remarks: tuple[str, ...]


@click.command(name="flowtest", context_settings={"help_option_names": ["-h", "--help"]})
@click.option(
    "--static", metavar="PRESSURE", required=True, help="Static pressure at the gauge, before water flows."
)
@click.option("--residual", metavar="PRESSURE", help="Residual pressure at the gauge while water flows.")
@click.option("--flow", metavar="FLOW", help="Total flow at the residual pressure, in place of outlets.")
@click.option(
    "--outlet",
    "outlets",
    metavar="READINGS",
    multiple=True,
    help="An outlet that flowed: 'diameter, coefficient, pitot reading', as in '2.5 in, 0.90, 14 psi'. The "
    "coefficient may be a shape ('smooth and rounded') or the K-factor of a diffuser ('k 160'); a fourth "
    "part is the pumper factor. Repeat for more.",
)
@click.option(
    "--point",
    "points",
    metavar="READINGS",
    multiple=True,
    help="A further reading of the same test: 'residual, flow', as in '55 psi, 800 gpm'. Repeat for more.",
)
@click.option(
    "--pumper-factor",
    metavar="NUMBER",
    help="Factor for outlets of 4 in and more that carry none: a number, or 'table' for the published one.",
)
@click.option(
    "--gauge",
    metavar="RANGE",
    help="Full scale of the gauge and its accuracy in per cent of that: '200 psi, 1'.",
)
@click.option(
    "--units",
    type=click.Choice(["us", "metric"]),
    default="us",
    show_default=True,
    help="Units of the answer and of numbers that carry none; any may carry its own ('5.5 bar').",
)
@click.option(
    "--at-pressure",
    "at_pressures",
    metavar="PRESSURE",
    multiple=True,
    help="Ask for the flow at this pressure. Repeat for more. Default: 20 psi.",
)
@click.option(
    "--at-flow",
    "at_flows",
    metavar="FLOW",
    multiple=True,
    help="Ask for the pressure at this flow. Repeat for more.",
)
@click.option("--date", "date", metavar="YYYY-MM-DD", help="Day of the test.")
@click.option(
    "--submittal", metavar="YYYY-MM-DD", help="Day of submittal, to which the age of the test counts."
)
@click.option("--json", "as_json", is_flag=True, help="Print the answer as JSON.")
def command(units: str, as_json: bool, **given: Any) -> None:
    """Turn the readings of one hydrant flow test into a supply curve.

    Prints the flow of each outlet, the curve, the flow at 20 psi with the class of the hydrant, and what a
    reviewer would ask about the test. Give the static pressure, the residual, and either --flow or every
    --outlet that flowed.

    \b
    supplycheck flowtest --static 80 --residual 47 --outlet "2.5 in, 0.90, 14 psi"
    supplycheck flowtest --units metric --static 5.4 --residual 3.6 --flow 4200 --at-flow 3000

    Exit codes: 0 done, 2 wrong usage, 3 readings that make no test.
    """
    from supplycheck.errors import DomainError
    from supplycheck.units import UNIT_SETS

    unit_set = UNIT_SETS[units]
    try:
        answer = _answer(given, unit_set)
    except DomainError as error:
        click.echo(f"The test cannot be used: {error}", err=True)
        click.get_current_context().exit(3)
    if as_json:
        click.echo(json.dumps(_plain(answer, unit_set), indent=2, ensure_ascii=False))
    else:
        click.echo(_text(answer, unit_set))


def _answer(given: dict[str, Any], units: UnitSet) -> Answer:
    """Return everything to print; raises :class:`DomainError` for readings that make no test."""
    from supplycheck.supply import flow_test_facts, gauge_curve
    from supplycheck.supply.comparison import RATING_PRESSURE
    from supplycheck.supply.margin import age_in_years

    test, each = read_flow_test(given, units)
    _check_residuals(test, units)
    _check_readings(test, units)
    curve = gauge_curve(test)
    submittal = read_day("submittal", given["submittal"]) if given["submittal"] else None
    pressures = [read_si("at-pressure", text, "pressure", units) for text in given["at_pressures"]]
    flows = [read_si("at-flow", text, "flow", units) for text in given["at_flows"]]
    dated = bool(given["date"])
    age = age_in_years(test.date, submittal) if submittal is not None and dated else None
    facts = flow_test_facts(test, submittal or test.date)
    rated = curve.flow_at(RATING_PRESSURE)
    return Answer(
        test=test,
        dated=dated,
        outlets=each,
        facts=facts,
        curve=curve,
        flows_at=tuple((pressure, curve.flow_at(pressure)) for pressure in pressures or [RATING_PRESSURE]),
        pressures_at=tuple((flow, curve.pressure_at(flow)) for flow in flows),
        table=_table(curve, units),
        rated=rated,
        rating=_rating(rated),
        age=age,
        remarks=_remarks(facts, curve, rated, units, dated=dated, age=age),
    )


def _check_residuals(test: FlowTest, units: UnitSet) -> None:
    from supplycheck.errors import DomainError

    for point in test.points:
        if point.residual >= test.static:
            residual, static = (units.text(value, "pressure") for value in (point.residual, test.static))
            raise DomainError(
                f"the residual {residual} is not below the static {static}; allowed: a residual below the "
                "static. Check that the two are not swapped and that water was flowing."
            )


def _check_readings(test: FlowTest, units: UnitSet) -> None:
    """Refuse readings that no hydrant gives; raises :class:`DomainError`."""
    from supplycheck.errors import DomainError
    from supplycheck.project.plausible import HIGHEST_STATIC

    if test.static > HIGHEST_STATIC.si(units) * (1 + 1e-9):
        raise DomainError(
            f"the static {units.text(test.static, 'pressure')} is too high for a water main; allowed: at "
            f"most {HIGHEST_STATIC.text(units)}. Check the decimal point and the units."
        )
    for outlet in (outlet for point in test.points for outlet in point.outlets):
        if outlet.pitot > test.static:
            pitot, static = (units.text(value, "pressure") for value in (outlet.pitot, test.static))
            raise DomainError(
                f"the pitot reading {pitot} of {outlet.hydrant} is above the static {static}; allowed: "
                "at most the static. Check the readings and the decimal point."
            )


def _rating(flow: float | None) -> tuple[str, str, str] | None:
    from supplycheck.catalogue.water import hydrant_class

    if flow is None:
        return None
    row = hydrant_class(flow)
    return row.name, row.colour, row.source


def _table(curve: SupplyCurve, units: UnitSet) -> tuple[tuple[float, float], ...]:
    """Return pressures at about eight round flows, up to the flow at 20 psi or at no pressure."""
    from supplycheck.supply.comparison import RATING_PRESSURE

    reach = curve.flow_at(RATING_PRESSURE) or curve.flow_at(0.0) or 1.5 * curve.tested_flow
    reach = max(reach, curve.tested_flow)
    number = units.from_si(reach, "flow")
    power = 10.0 ** math.floor(math.log10(number / 8))
    step = next(
        size for size in (power, 2 * power, 2.5 * power, 5 * power, 10 * power) if number / size <= 9
    )
    flows = [units.to_si(index * step, "flow") for index in range(math.ceil(number / step) + 1)]
    return tuple((flow, pressure) for flow in flows if (pressure := curve.pressure_at(flow)) >= 0.0)


def _remarks(
    facts: FlowTestFacts,
    curve: SupplyCurve,
    rated: float | None,
    units: UnitSet,
    *,
    dated: bool,
    age: float | None,
) -> tuple[str, ...]:
    from supplycheck.supply.sources import READING

    remarks = []
    share = 100 * facts.drop_share
    if share < 10.0:
        remarks.append(f"The pressure dropped by {share:.1f} % only; 10 % at least is asked (NFPA 291).")
    elif share < 25.0:
        remarks.append(f"The pressure dropped by {share:.1f} %; older editions of NFPA 291 ask for 25 %.")
    for fact in facts.pitots:
        reading, limit = units.text(fact.outlet.pitot, "pressure"), units.text(fact.limit, "pressure")
        if fact.state != "within":
            text = f"The pitot reading {reading} of {fact.outlet.hydrant} is {fact.state} the preferred"
            remarks.append(f"{text} {limit} (NFPA 291).")
    if facts.gauge_error is not None:
        error = units.text(facts.gauge_error, "pressure")
        share = facts.gauge_error / facts.drop
        text = f"The gauge may be off by {error}, {100 * share:.0f} % of the drop"
        remarks.append(text + (": the test proves no curve." if share > 1 - 1e-9 else "."))
    if facts.deviation > READING:
        away = units.text(facts.deviation, "pressure")
        text = (
            f"The readings do not lie on one N^1.85 line (up to {away} off): the curve is straight between"
        )
        remarks.append(text + " them, and beyond them it follows the steeper line.")
    ratio = None if rated is None else curve.tested_ratio(rated)
    if ratio is not None and ratio > 1.0:
        text = f"The flow at 20 psi is {ratio:.2f} times the tested flow: it is extrapolated."
        remarks.append(text)
    if curve.static < _rating_pressure():
        remarks.append("The static pressure is below 20 psi.")
    if not dated:
        remarks.append("No date is given (--date): a reviewer asks for the day of the test.")
    if age is not None and age < 0.0:
        remarks.append("The day of submittal lies before the day of the test.")
    return tuple(remarks)


def _rating_pressure() -> float:
    from supplycheck.supply.comparison import RATING_PRESSURE

    return RATING_PRESSURE


def _text(answer: Answer, units: UnitSet) -> str:
    """Return the answer as aligned lines."""
    day = f" of {answer.test.date.isoformat()}" if answer.dated else ""
    lines = [f"Hydrant flow test{day}", ""]
    lines.append(_line("Static", units.text(answer.test.static, "pressure")))
    for one in answer.outlets:
        outlet = one.outlet
        factor = f", pumper factor {outlet.pumper_factor:.2f}" if outlet.pumper_factor != 1.0 else ""
        read = (
            f"{units.text(outlet.diameter, 'size')}, coefficient {outlet.coefficient:.2f}, "
            f"pitot {units.text(outlet.pitot, 'pressure')}{factor}"
        )
        lines.append(_line(outlet.hydrant.capitalize(), units.text(one.flow, "flow"), read))
    lines += [
        _line("Residual", units.text(one.residual, "pressure"), f"at {units.text(one.flow, 'flow')}")
        for one in sorted(answer.test.points, key=lambda point: point.flow)
    ]
    drop = f"{100 * answer.facts.drop_share:.1f} % of static"
    lines.append(_line("Drop", units.text(answer.facts.drop, "pressure"), drop))
    lines += _rating_lines(answer, units)
    lines += ["", "Supply curve, straight in Q^1.85 (* extrapolated beyond the tested flow)"]
    for flow, pressure in answer.table:
        star = " *" if answer.curve.is_extrapolated(flow) else ""
        lines.append(f"{units.text(flow, 'flow', 0):>16}{units.text(pressure, 'pressure'):>14}{star}")
    if answer.remarks:
        lines += ["", "Remarks", *(_wrapped(remark) for remark in answer.remarks)]
    return "\n".join(lines)


def _wrapped(remark: str) -> str:
    return textwrap.fill(remark, 96, initial_indent="  - ", subsequent_indent="    ")


def _line(name: str, value: str, note: str = "") -> str:
    return f"  {name:<24}{value:>14}   {note}".rstrip()


def _rating_lines(answer: Answer, units: UnitSet) -> list[str]:
    lines = []
    for pressure, flow in answer.flows_at:
        value = "never falls" if flow is None else units.text(flow, "flow")
        ratio = None if flow is None else answer.curve.tested_ratio(flow)
        note = f"{ratio:.2f} × tested flow" if ratio is not None else ""
        lines.append(_line(f"Flow at {units.text(pressure, 'pressure')}", value, note))
    for flow, pressure in answer.pressures_at:
        mark = "extrapolated" if answer.curve.is_extrapolated(flow) else "inside the tested range"
        lines.append(
            _line(f"Pressure at {units.text(flow, 'flow')}", units.text(pressure, "pressure"), mark)
        )
    if answer.rating is not None:
        name, colour, _ = answer.rating
        lines.append(_line("NFPA 291 class", name, f"{colour}, by the flow at 20 psi"))
    if answer.age is not None:
        lines.append(_line("Age at submittal", f"{12 * answer.age:.1f} months"))
    return lines


def _plain(answer: Answer, units: UnitSet) -> dict[str, Any]:
    """Return the answer as plain numbers in the chosen units, unrounded."""

    def number(value: float | None, kind: str) -> float | None:
        return None if value is None else units.from_si(value, kind)

    rating = answer.rating
    return {
        "schema": 1,
        "units": {kind: units.symbol(kind) for kind in ("flow", "pressure", "size")} | {"age": "years"},
        "date": answer.test.date.isoformat() if answer.dated else None,
        "static": number(answer.test.static, "pressure"),
        "outlets": [
            {
                "diameter": number(one.outlet.diameter, "size"),
                "coefficient": one.outlet.coefficient,
                "pitot": number(one.outlet.pitot, "pressure"),
                "pumper_factor": one.outlet.pumper_factor,
                "flow": number(one.flow, "flow"),
            }
            for one in answer.outlets
        ],
        "readings": [
            {"residual": number(point.residual, "pressure"), "flow": number(point.flow, "flow")}
            for point in answer.test.points
        ],
        "flow": number(answer.curve.tested_flow, "flow"),
        "drop": number(answer.facts.drop, "pressure"),
        "drop_share": answer.facts.drop_share,
        "flow_at_20_psi": number(answer.rated, "flow"),
        "flow_at": [
            {"pressure": number(pressure, "pressure"), "flow": number(flow, "flow")}
            for pressure, flow in answer.flows_at
        ],
        "pressure_at": [
            {"flow": number(flow, "flow"), "pressure": number(pressure, "pressure")}
            for flow, pressure in answer.pressures_at
        ],
        "curve": [
            {
                "flow": number(flow, "flow"),
                "pressure": number(pressure, "pressure"),
                "extrapolated": answer.curve.is_extrapolated(flow),
            }
            for flow, pressure in answer.table
        ],
        "class": None if rating is None else {"name": rating[0], "colour": rating[1], "source": rating[2]},
        "age": answer.age,
        "remarks": list(answer.remarks),
    }
