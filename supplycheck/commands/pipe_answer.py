"""The answer of ``supplycheck pipe`` as text and as JSON."""

from __future__ import annotations

import json
import textwrap
from typing import Any

from supplycheck.commands.pipe_question import NextSize, Question
from supplycheck.hydraulics import OnePipeResult
from supplycheck.units import UnitSet

_KINDS = (
    "flow",
    "pressure",
    "length",
    "size",
    "velocity",
    "gradient",
    "power",
    "roughness",
    "mass_density",
    "viscosity",
)
_FOUND = {"loss": "Loss", "flow": "Flow", "diameter": "Diameter", "pump": "Pump"}


def digits(number: float, significant: int = 4) -> str:
    """Return ``number`` with so many significant digits, grouped, never in powers of ten near 1.

    >>> digits(0.0172345), digits(141689.9), digits(-12.3456), digits(2.5e-7)
    ('0.01723', '141,700', '−12.35', '2.500e-07')
    """
    if number == 0:
        return "0"
    size = abs(number)
    if size < 1e-4 or size >= 1e9:
        text = f"{number:.{significant - 1}e}"
    else:
        places = significant - 1 - _order(size, significant)
        text = f"{round(number, places):,.{max(places, 0)}f}"
    return text.replace("-", "−", 1) if number < 0 else text


def _wrapped(text: str) -> str:
    """Return a long line in lines of a screen, the further ones indented."""
    return textwrap.fill(text, 96, subsequent_indent="    ", break_long_words=False)


def _order(size: float, significant: int = 4) -> int:
    """Return the power of ten of ``size`` after rounding, so that 9.99999 counts as 10."""
    return int(f"{size:.{significant - 1}e}".partition("e")[2])


def _quantity(units: UnitSet, value: float, kind: str) -> str:
    return f"{digits(units.from_si(value, kind))} {units.symbol(kind)}"


def _table(rows: list[tuple[str, ...]], gap: str = "  ") -> list[str]:
    """Return the rows with the first column to the left and the others to the right."""
    widths = [max(len(row[i]) for row in rows if i < len(row)) for i in range(max(map(len, rows)))]
    lines = []
    for row in rows:
        cells = [cell.ljust(widths[0]) if i == 0 else cell.rjust(widths[i]) for i, cell in enumerate(row)]
        lines.append(gap + gap.join(cells).rstrip())
    return lines


def as_text(
    question: Question, result: OnePipeResult, next_size: NextSize | str | None, *, steps: bool
) -> str:
    """Return the answer for the screen."""
    lines = [f"{_FOUND[result.found]}: {_answer(question, result)}", "", question.law_name]
    lines += _pipe_lines(question, result)
    lines += ["", "Where the pressure goes, start to end"]
    lines += _table(_pressure_rows(question, result))
    if next_size is not None:
        lines += ["", *_next_lines(question, next_size)]
    if steps:
        lines += ["", *_step_lines(question, result)]
    notes = [f"Assumed: {text}" for text in question.assumptions]
    notes += [f"Remark: {text}" for text in result.remarks]
    notes += [f"Source: {text}" for text in question.sources]
    lines += ["", *(_wrapped(note) for note in notes)]
    return "\n".join(lines).rstrip()


def _answer(question: Question, result: OnePipeResult) -> str:
    units = question.units
    if result.found == "flow":
        return _quantity(units, result.flow, "flow")
    if result.found == "diameter":
        return _quantity(units, result.bore, "size")
    value = result.pump_pressure if result.found == "pump" else result.loss
    head = digits(units.from_si(value / question.problem.unit_weight, "length"))
    text = f"{_quantity(units, value, 'pressure')} ({head} {units.symbol('length')} of the fluid)"
    if result.found == "pump":
        text += f", {_quantity(units, result.fluid_power, 'power')} to the fluid"
    return text


def _pipe_rows(question: Question, result: OnePipeResult) -> list[tuple[str, str, str]]:
    """Return name, value and unit of what describes the flow in the pipe."""
    units, problem = question.units, question.problem

    def row(name: str, value: float, kind: str) -> tuple[str, str, str]:
        return name, digits(units.from_si(value, kind)), units.symbol(kind)

    rows = [
        row("flow", result.flow, "flow"),
        row("inside diameter", result.bore, "size"),
        row("length", problem.length, "length"),
        row("velocity", result.velocity, "velocity"),
        row("loss per length", result.gradient, "gradient"),
        ("friction factor f", digits(result.friction_factor), _factor_note(result)),
    ]
    if result.reynolds is not None:
        rows.append(("Reynolds number", digits(result.reynolds), result.regime or ""))
    if result.relative_roughness is not None:
        rows.append(("relative roughness", digits(result.relative_roughness, 3), ""))
    if result.pump_pressure:
        rows.append(row("power to the fluid", result.fluid_power, "power"))
    if result.pump_pressure and result.pump_power is not None:
        rows.append(row("power at the shaft", result.pump_power, "power"))
    return rows


def _pipe_lines(question: Question, result: OnePipeResult) -> list[str]:
    """Return name, value and unit in columns, then what is said in words."""
    rows = _pipe_rows(question, result)
    words = [("fluid", question.fluid_name), ("weight for the rise", question.weight_name)]
    words += [("size", question.size_name)] if question.size_name else []
    for fitting in question.fittings:
        text = f"{fitting.count} {fitting.name}, "
        if fitting.minor_k:
            text += f"K {fitting.minor_k:g}"
        else:
            text += f"equivalent length {_quantity(question.units, fitting.length, 'length')}"
        words.append(("fittings", text))
    wide = max(len(row[0]) for row in rows + words)
    long = max(len(row[1]) for row in rows)
    lines = [f"  {name:<{wide}}  {value:>{long}} {unit}".rstrip() for name, value, unit in rows]
    return lines + [f"  {name:<{wide}}  {text}" for name, text in words]


def _factor_note(result: OnePipeResult) -> str:
    from supplycheck.hydraulics import HazenWilliams

    return "computed back from the loss" if isinstance(result.problem.law, HazenWilliams) else ""


def _pressure_terms(question: Question, result: OnePipeResult) -> list[tuple[str, float]]:
    """Return name and pressure [Pa] of every term of the balance, from start to end."""
    problem = question.problem
    ends = question.start_pressure is not None or question.end_pressure is not None
    start = start_pressure(question, result)
    terms = [("  pressure at the start", start)] if ends else []
    if result.pump_pressure:
        terms.append(("+ pump", result.pump_pressure))
    terms.append(("− friction in the pipe", result.pipe_loss))
    if problem.equivalent_length:
        terms.append(("− fittings, by equivalent length", result.fitting_loss))
    if problem.minor_k:
        terms.append(("− fittings, by K", result.minor_loss))
    if problem.rise:
        terms.append(("− rise" if problem.rise > 0 else "+ fall", abs(result.elevation)))
    if problem.kinetic:
        name = "− velocity pressure" if problem.kinetic > 0 else "+ velocity pressure"
        terms.append((name, abs(result.kinetic)))
    if ends:
        return [*terms, ("= pressure at the end", start - result.drop)]
    return [*terms, ("= pressure drop from start to end", result.drop)]


def _pressure_rows(question: Question, result: OnePipeResult) -> list[tuple[str, ...]]:
    """Return the balance as pressure and as head of the fluid, each column with its own decimals."""
    units = question.units
    terms = _pressure_terms(question, result)
    pressures = _column([units.from_si(value, "pressure") for _, value in terms])
    weight = question.problem.unit_weight
    heads = _column([units.from_si(value / weight, "length") for _, value in terms])
    title = ("", units.symbol("pressure"), f"{units.symbol('length')} of the fluid")
    return [title, *((name, p, h) for (name, _), p, h in zip(terms, pressures, heads, strict=True))]


def _column(numbers: list[float]) -> list[str]:
    """Return numbers with the decimals that give the largest four significant digits."""
    largest = max(abs(number) for number in numbers)
    places = min(max(3 - _order(largest), 0), 12) if largest > 0 else 0
    texts = [f"{number:,.{places}f}" for number in numbers]
    return [
        text.lstrip("-") if float(text.replace(",", "")) == 0 else text.replace("-", "−") for text in texts
    ]


def start_pressure(question: Question, result: OnePipeResult) -> float:
    """Return the gauge pressure at the start [Pa]: given, or from the end and the drop."""
    if question.start_pressure is not None:
        return question.start_pressure
    return (question.end_pressure or 0.0) + result.drop


def _next_lines(question: Question, size: NextSize | str) -> list[str]:
    if isinstance(size, str):
        return [f"Next larger size: none; {size}"]
    units = question.units
    bore = _quantity(units, size.bore, "size")
    return [
        f"Next larger size: {size.nominal} {size.material}, inside diameter {bore}",
        f"  there: loss {_quantity(units, size.result.loss, 'pressure')}, "
        f"velocity {_quantity(units, size.result.velocity, 'velocity')}",
        _wrapped(f"  source: {size.source}"),
    ]


def _step_lines(question: Question, result: OnePipeResult) -> list[str]:
    if not result.steps:
        return ["No search was needed."]
    units = question.units
    kind = "flow" if result.found == "flow" else "size"
    rows: list[tuple[str, ...]] = [
        (
            "",
            "step",
            f"{result.found} [{units.symbol(kind)}]",
            f"taken less available [{units.symbol('pressure')}]",
        )
    ]
    largest = max(abs(step.imbalance) for step in result.steps)
    for number, step in enumerate(result.steps, 1):
        trial = f"{units.from_si(step.trial, kind):.8g}"
        over_text = f"{units.from_si(step.imbalance, 'pressure'):+.3e}".replace("-", "−")
        if abs(step.imbalance) < 1e-7 * largest:
            over_text = "0"  # rounding of the last digits, which differs between machines
        rows.append((step.phase, str(number), trial, over_text))
    return ["Search: enclose the answer, then narrow (method of Brent)", *_table(rows)]


def _units_block(units: UnitSet) -> dict[str, str]:
    return {kind: units.symbol(kind) for kind in _KINDS}


def as_json(question: Question, result: OnePipeResult, next_size: NextSize | str | None) -> str:
    """Return the answer as JSON: plain numbers in the unit set named on top."""
    units, problem = question.units, question.problem

    def number(value: float | None, kind: str) -> float | None:
        return None if value is None else units.from_si(value, kind)

    ends = question.start_pressure is not None or question.end_pressure is not None
    start = start_pressure(question, result) if ends else None
    answer: dict[str, Any] = {
        "schema": 1,
        "units": _units_block(units),
        "found": result.found,
        "law": question.law_name,
        "fluid": {
            "name": question.fluid_name,
            "density": number(problem.density, "mass_density"),
            "viscosity": number(problem.viscosity, "viscosity"),
            "unit_weight": number(problem.unit_weight, "gradient"),
        },
        "flow": number(result.flow, "flow"),
        "diameter": number(result.bore, "size"),
        "length": number(problem.length, "length"),
        "equivalent_length": number(problem.equivalent_length, "length"),
        "minor_k": problem.minor_k,
        "fittings": [
            {
                "name": fitting.name,
                "count": fitting.count,
                "equivalent_length": number(fitting.length, "length"),
                "minor_k": fitting.minor_k,
            }
            for fitting in question.fittings
        ],
        "rise": number(problem.rise, "length"),
        "velocity": number(result.velocity, "velocity"),
        "reynolds": result.reynolds,
        "regime": result.regime,
        "relative_roughness": result.relative_roughness,
        "friction_factor": result.friction_factor,
        "gradient": number(result.gradient, "gradient"),
        "loss": {
            "total": number(result.loss, "pressure"),
            "pipe": number(result.pipe_loss, "pressure"),
            "equivalent_length": number(result.fitting_loss, "pressure"),
            "minor": number(result.minor_loss, "pressure"),
            "head": number(result.loss / problem.unit_weight, "length"),
        },
        "elevation": number(result.elevation, "pressure"),
        "velocity_pressure": number(result.velocity_pressure, "pressure"),
        "velocity_pressure_lost": number(result.kinetic, "pressure"),
        "pressure_drop": number(result.drop, "pressure"),
        "start_pressure": number(start, "pressure"),
        "end_pressure": None if start is None else number(start - result.drop, "pressure"),
        "pump": {
            "pressure": number(result.pump_pressure, "pressure"),
            "head": number(result.pump_pressure / problem.unit_weight, "length"),
            "fluid_power": number(result.fluid_power, "power"),
            "shaft_power": number(result.pump_power, "power"),
        },
        "next_size": _next_json(next_size, units),
        "steps": [
            {
                "phase": step.phase,
                "trial": number(step.trial, "flow" if result.found == "flow" else "size"),
                "imbalance": number(step.imbalance, "pressure"),
            }
            for step in result.steps
        ],
        "assumptions": list(question.assumptions),
        "sources": list(question.sources),
        "remarks": list(result.remarks),
    }
    return json.dumps(answer, indent=2, ensure_ascii=False)


def _next_json(size: NextSize | str | None, units: UnitSet) -> dict[str, Any] | None:
    if size is None or isinstance(size, str):
        return None if size is None else {"none": size}
    return {
        "material": size.material,
        "nominal": size.nominal,
        "diameter": units.from_si(size.bore, "size"),
        "source": size.source,
        "loss": units.from_si(size.result.loss, "pressure"),
        "velocity": units.from_si(size.result.velocity, "velocity"),
    }


def no_solution_text(question: Question, reason: str) -> str:
    """Return why there is no solution, with the balance of pressures that shows it."""
    problem, units = question.problem, question.units
    lines = [_wrapped(f"No solution: {reason}.")]
    if problem.loss is None and problem.drop is not None:
        drop = _quantity(units, problem.drop, "pressure")
        rise = _quantity(units, problem.rise * problem.unit_weight, "pressure")
        lines.append(f"  pressure at the start less pressure at the end {drop}; the rise takes {rise}")
        if problem.pump_pressure is not None:
            lines.append(f"  the pump adds {_quantity(units, problem.pump_pressure, 'pressure')}")
    return "\n".join(lines)


def no_solution_json(question: Question, reason: str) -> str:
    """Return the same as JSON."""
    block = {"schema": 1, "units": _units_block(question.units), "found": None, "error": reason}
    return json.dumps(block, indent=2, ensure_ascii=False)
