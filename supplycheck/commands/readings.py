"""Readings of a flow test as they are typed on the command line."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING, Any, NoReturn

import click

if TYPE_CHECKING:
    import datetime as dt

    from supplycheck.model import FlowTest, Outlet
    from supplycheck.supply import OutletFlow
    from supplycheck.units import UnitSet

OUTLET_FORM = "diameter, coefficient or shape (k 160: a diffuser), pitot reading[, pumper factor]"


def refuse(option: str, value: str, problem: str, allowed: str, remedy: str = "") -> NoReturn:
    """Raise a usage error: option, value found, problem, what is allowed, what to do."""
    tail = f". {remedy[0].upper()}{remedy[1:]}" if remedy else ""
    raise click.UsageError(f"--{option} {value!r}: {problem}; allowed: {allowed}{tail}.")


def read_si(option: str, text: str, kind: str, units: UnitSet, whole: str | None = None) -> float:
    """Return ``text`` [SI]; a usage error naming the option where it cannot be read.

    ``whole`` is the whole text of the option where ``text`` is one part of it.
    """
    from supplycheck.project.quantity import NumberError, read_number

    sign: Any = "zero or more" if option in {"residual", "point", "at-pressure", "at-flow"} else "positive"
    try:
        return read_number(text, kind, sign).si(units)
    except NumberError as fault:
        problem = str(fault) if whole is None else f"{text!r} {fault}"
        refuse(option, text if whole is None else whole, problem, fault.allowed, fault.remedy)


def read_day(option: str, text: str) -> dt.date:
    """Return the day written as YYYY-MM-DD; a usage error naming the option otherwise."""
    import datetime as dt

    try:
        return dt.date.fromisoformat(text.strip())
    except ValueError:
        refuse(option, text, "is not a day", "a day as YYYY-MM-DD")


def read_outlet(text: str, number: int, factor: str | None, units: UnitSet) -> Outlet:
    """Return the outlet written as :data:`OUTLET_FORM`; a usage error otherwise.

    Raises :class:`DomainError` for a diameter that no outlet has.

    ``factor`` is the pumper factor (a number or ``table``) for a large outlet that carries none.
    """
    from supplycheck.errors import DomainError, NotInCatalogueError
    from supplycheck.model import Outlet
    from supplycheck.project.plausible import LARGEST_OUTLET
    from supplycheck.supply.quality import LARGE_OUTLET

    parts = [part.strip() for part in text.split(",")]
    if len(parts) not in (3, 4):
        remedy = "write decimals with a point" if len(parts) > 4 else ""
        refuse("outlet", text, f"has {len(parts)} parts between commas", OUTLET_FORM, remedy)
    diameter = read_si("outlet", parts[0], "size", units, text)
    if diameter > LARGEST_OUTLET.si(units) * (1 + 1e-9):
        raise DomainError(
            f"outlet {number} of {units.text(diameter, 'size')} is larger than any outlet of a hydrant; "
            f"allowed: at most {LARGEST_OUTLET.text(units)}. Check the decimal point."
        )
    pitot = read_si("outlet", parts[2], "pressure", units, text)
    if parts[1][:2].casefold() == "k ":
        return _diffuser(text, parts, number, units)
    shape = ""
    if parts[1][:1].isdigit() or parts[1][:1] in {".", "-", "−", "+"}:
        coefficient = read_si("outlet", parts[1], "ratio", units, text)
    else:
        from supplycheck.catalogue.water import outlet_coefficient, outlet_shapes

        shape = parts[1]
        try:
            coefficient = outlet_coefficient(shape).value
        except NotInCatalogueError:
            refuse(
                "outlet", text, f"no outlet shape {shape!r}", "a number or " + ", ".join(outlet_shapes())
            )
    outlet = Outlet(diameter, coefficient, pitot, shape=shape, hydrant=f"outlet {number}")
    if len(parts) == 4:
        return replace(outlet, pumper_factor=read_si("outlet", parts[3], "ratio", units, text))
    if diameter < LARGE_OUTLET:
        return outlet
    return replace(outlet, pumper_factor=_pumper_factor(text, pitot, factor, units))


def _diffuser(text: str, parts: list[str], number: int, units: UnitSet) -> Outlet:
    """Return a diffuser by the K-factor of its maker, told as a coefficient of its opening."""
    from supplycheck.hydraulics.discharge import PITOT
    from supplycheck.model import Outlet

    if len(parts) == 4:
        refuse(
            "outlet", text, "is a diffuser with a pumper factor", "diameter, k and its K-factor, reading"
        )
    diameter = read_si("outlet", parts[0], "size", units, text)
    k_factor = read_si("outlet", parts[1][2:], "k_factor", units, text)
    pitot = read_si("outlet", parts[2], "pressure", units, text)
    coefficient = k_factor / (PITOT * diameter**2)
    return Outlet(diameter, coefficient, pitot, hydrant=f"diffuser {number}", kind="diffuser")


def read_gauge(text: str, units: UnitSet) -> tuple[float, float]:
    """Return full scale [Pa] and accuracy [-] of a gauge written as ``200 psi, 1``; a usage error else."""
    parts = [part.strip() for part in text.split(",")]
    if len(parts) != 2:
        refuse("gauge", text, f"has {len(parts)} parts between commas", "full scale, accuracy in per cent")
    accuracy = read_si("gauge", parts[1], "percent", units, text)
    return read_si("gauge", parts[0], "pressure", units, text), accuracy


def _pumper_factor(text: str, pitot: float, factor: str | None, units: UnitSet) -> float:
    if factor is None:
        refuse(
            "outlet",
            text,
            "is an outlet of 4 in or more without a pumper factor",
            "--pumper-factor with a number (1 for none), or 'table' for the published factor",
            "without it a pumper outlet is credited with about a fifth too much flow",
        )
    if factor.strip().casefold() == "table":
        from supplycheck.catalogue.water import pumper_factor

        return pumper_factor(pitot).value
    return read_si("pumper-factor", factor, "ratio", units)


def read_flow_test(given: dict[str, Any], units: UnitSet) -> tuple[FlowTest, tuple[OutletFlow, ...]]:
    """Return the test as a record and its outlets reduced."""
    import datetime as dt

    from supplycheck.model import FlowTest, TestPoint
    from supplycheck.supply import reduce_outlets

    if given["flow"] is not None and given["outlets"]:
        raise click.UsageError("Give either --flow or --outlet, not both.")
    if given["residual"] is None and (given["flow"] is not None or given["outlets"] or not given["points"]):
        raise click.UsageError("Missing --residual: the pressure at the gauge while water flows.")
    if given["residual"] is not None and given["flow"] is None and not given["outlets"]:
        raise click.UsageError("Missing --flow or --outlet: what flowed at the residual pressure.")
    static = read_si("static", given["static"], "pressure", units)
    outlets = tuple(
        read_outlet(text, number, given["pumper_factor"], units)
        for number, text in enumerate(given["outlets"], 1)
    )
    points: list[TestPoint] = []
    each: tuple[OutletFlow, ...] = ()
    if given["residual"] is not None:
        residual = read_si("residual", given["residual"], "pressure", units)
        if outlets:
            flow, each = reduce_outlets(outlets)
        else:
            flow = read_si("flow", given["flow"], "flow", units)
        points.append(TestPoint(residual, flow, outlets))
    for text in given["points"]:
        parts = text.split(",")
        if len(parts) != 2:
            refuse("point", text, f"has {len(parts)} parts between commas", "residual, flow")
        pressure = read_si("point", parts[0], "pressure", units, text)
        points.append(TestPoint(pressure, read_si("point", parts[1], "flow", units, text)))
    day = read_day("date", given["date"]) if given["date"] else dt.date.min
    test = FlowTest("of the readings", "gauge", day, static, tuple(points), 0.0)
    if given["gauge"]:
        scale, accuracy = read_gauge(given["gauge"], units)
        test = replace(test, gauge_range=scale, gauge_accuracy=accuracy)
    return test, each
