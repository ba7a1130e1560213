"""From the options of ``supplycheck pipe`` to a one-pipe problem."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from typing import Any, Final

import click

from supplycheck.errors import NotInCatalogueError
from supplycheck.findings import Place
from supplycheck.hydraulics import (
    ConstantFactor,
    DarcyWeisbach,
    HazenWilliams,
    OnePipe,
    OnePipeResult,
    PipeLaw,
    solve_one_pipe,
    water_density,
    water_viscosity,
)
from supplycheck.model import HEAD_FORM, HW_METRIC, HW_US, Fitting
from supplycheck.project.quantity import NumberError, Sign, read_number
from supplycheck.units import BAR, FOOT, GRAVITY, PSI, UNIT_SETS, UnitSet

_FORMS: Final = {"us": HW_US, "metric": HW_METRIC, "head": HEAD_FORM}
_COLD: Final = 288.15
_COEFFICIENTS: Final = {
    "c_factor": "hazen-williams",
    "roughness": "darcy-weisbach",
    "friction_factor": "darcy-weisbach",
}


@dataclass(frozen=True, slots=True)
class Question:
    """A problem and how it was put: unit set, pressures at the ends [Pa], texts for the reader."""

    problem: OnePipe
    units: UnitSet
    start_pressure: float | None
    end_pressure: float | None
    law_name: str
    fluid_name: str
    weight_name: str
    material: str | None
    size_name: str
    fittings: tuple[Fitting, ...]
    assumptions: tuple[str, ...]
    sources: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class NextSize:
    """The next larger size of a material: bore [m] and what the pipe does at that bore."""

    material: str
    nominal: str
    bore: float
    source: str
    result: OnePipeResult


@dataclass(frozen=True, slots=True)
class _Options:
    """The options and the unit set in which bare numbers stand."""

    given: Mapping[str, Any]
    units: UnitSet

    def has(self, name: str) -> bool:
        return self.given[name] is not None

    def number(self, name: str, kind: str, sign: Sign = "positive") -> float | None:
        """Return option ``name`` in SI, ``None`` where it is not given."""
        text = self.given[name]
        if text is None:
            return None
        try:
            return read_number(text, kind, sign).si(self.units)
        except NumberError as fault:
            raise _bad(name, text, fault) from None

    def head(self, name: str, bare: str, weight: float) -> float | None:
        """Return a pressure [Pa] given as one or as a head; a bare number is of kind ``bare``."""
        text = self.given[name]
        if text is None:
            return None
        other = "length" if bare == "pressure" else "pressure"
        try:
            value, kind = read_number(text, bare).si(self.units), bare
        except NumberError as fault:
            try:
                value, kind = read_number(text, other).si(self.units), other
            except NumberError:
                raise _bad(name, text, fault) from None
        return value if kind == "pressure" else value * weight


def _bad(name: str, text: str, fault: NumberError) -> click.BadParameter:
    remedy = f"; {fault.remedy}" if fault.remedy else ""
    message = f"{text!r} {fault.problem}; allowed: {fault.allowed}{remedy}"
    return click.BadParameter(message, param_hint="--" + name.replace("_", "-"))


def ask(given: Mapping[str, Any]) -> Question:
    """Return the question that the options put; :class:`click.UsageError` where they do not fit."""
    options = _Options(given, UNIT_SETS[given["units"]])
    law, law_name, origins = _law(options)
    density, viscosity, fluid_name, assumptions = _fluid(options, law)
    weight, weight_name = _unit_weight(options, law, density)
    start, end = _ends(options)
    bore, nominal, bore_origin = _bore(options)
    fittings = _fittings(options, nominal, bore, law)
    if options.has("pump_power") and not options.has("efficiency"):
        raise click.UsageError(
            "--pump-power is the power at the shaft: give --efficiency too "
            "(1 where it is what the fluid gets)"
        )
    problem = OnePipe(
        law=law,
        length=options.number("length", "length", "zero or more") or 0.0,
        density=density,
        unit_weight=weight,
        viscosity=viscosity,
        flow=options.number("flow", "flow"),
        bore=bore,
        drop=None if start is None or end is None else start - end,
        loss=options.head("loss", "pressure", weight),
        rise=options.number("rise", "length", "any") or 0.0,
        minor_k=(options.number("minor_k", "ratio", "zero or more") or 0.0)
        + sum(fitting.minor_k for fitting in fittings),
        equivalent_length=(options.number("equivalent_length", "length", "zero or more") or 0.0)
        + sum(fitting.length for fitting in fittings),
        start="reservoir" if given["from_reservoir"] else "pipe",
        end="jet" if given["jet"] else "reservoir" if given["to_reservoir"] else "pipe",
        pump_pressure=options.head("pump_head", "length", weight),
        pump_power=options.number("pump_power", "power"),
        efficiency=_efficiency(options),
    )
    _check_ends(problem, start, end)
    return Question(
        problem=problem,
        units=options.units,
        start_pressure=start,
        end_pressure=end,
        law_name=law_name,
        fluid_name=fluid_name,
        weight_name=weight_name,
        material=given["material"],
        size_name=f"{nominal} {given['material']}" if nominal else "",
        fittings=fittings,
        assumptions=assumptions,
        sources=origins + bore_origin + tuple(f"{each.name}: {each.source}" for each in fittings),
    )


def _law(options: _Options) -> tuple[PipeLaw, str, tuple[str, ...]]:
    """Return the friction law that the options name, its name for the reader, and where it is from."""
    given = [name for name in _COEFFICIENTS if options.has(name)]
    if len(given) > 1:
        raise click.UsageError(
            f"give one of {' and '.join('--' + name.replace('_', '-') for name in given)}"
        )
    wanted = options.given["law"]
    if given and wanted not in (None, _COEFFICIENTS[given[0]]):
        other = given[0].replace("_", "-")
        raise click.UsageError(f"--law {wanted} does not go with --{other}")
    if options.has("system") and (given or wanted == "darcy-weisbach"):
        raise click.UsageError("--system looks up C for --material; leave it out where C is not looked up")
    number, source = _coefficient(options, given[0] if given else None)
    name = given[0] if given else "roughness" if wanted == "darcy-weisbach" else "c_factor"
    origin = (source,) if source else ()
    if name == "c_factor":
        form = _FORMS[options.given["form"] or options.units.name]
        law = HazenWilliams(number, form.coefficient, form.flow_exponent, form.bore_exponent)
        return law, f"{form.name}, C {number:g}", origin
    if options.has("form"):
        raise click.UsageError("--form belongs to Hazen-Williams (--c-factor)")
    if name == "friction_factor":
        return ConstantFactor(number), f"Darcy-Weisbach with the friction factor given, {number:g}", ()
    shown = f"{options.units.from_si(number, 'roughness'):.4g} {options.units.symbol('roughness')}"
    return DarcyWeisbach(number), f"Darcy-Weisbach, exact Colebrook factor, roughness {shown}", origin


def _coefficient(options: _Options, given: str | None) -> tuple[float, str]:
    """Return C, roughness [m] or friction factor, from the options or for the material, and a source."""
    if given == "roughness":
        return options.number("roughness", "roughness", "zero or more") or 0.0, ""
    if given is not None:
        return options.number(given, "ratio") or 0.0, ""
    material, system = options.given["material"], options.given["system"]
    darcy = options.given["law"] == "darcy-weisbach"
    if material is None or (system is None and not darcy):
        raise click.UsageError(
            "give one of --c-factor (Hazen-Williams), --roughness (Darcy-Weisbach) and --friction-factor; "
            "or let the catalogue give C (--material and --system) or "
            "roughness (--material and --law darcy-weisbach)"
        )
    from supplycheck import catalogue

    try:
        if darcy:
            row = catalogue.roughness(material)
            return row.value, f"roughness of {material}: {row.source}"
        standard = "NFPA 13" if options.units.name == "us" else "EN 12845"
        row = catalogue.c_factor(material, system, standard)
    except NotInCatalogueError as error:
        raise click.BadParameter(str(error), param_hint="--material") from None
    return row.value, f"C of {material}, {system} system: {row.source}"


def _fluid(options: _Options, law: PipeLaw) -> tuple[float, float | None, str, tuple[str, ...]]:
    """Return density [kg/m³], viscosity [Pa·s], name and assumptions."""
    density = options.number("density", "mass_density")
    viscosity = options.number("viscosity", "viscosity")
    temperature = options.number("temperature", "temperature", "any")
    if temperature is not None and (density is not None or viscosity is not None):
        raise click.UsageError(
            "--temperature is for water; a fluid of its own has --density and --viscosity"
        )
    if density is not None:
        if viscosity is None and isinstance(law, DarcyWeisbach):
            raise click.UsageError("a fluid of its own needs --viscosity as well as --density")
        return density, viscosity, "as given", ()
    if viscosity is not None:
        raise click.UsageError("a fluid of its own needs --density as well as --viscosity")
    assumptions: tuple[str, ...] = ()
    if temperature is None:
        if isinstance(law, DarcyWeisbach | ConstantFactor):
            raise click.UsageError(
                "Darcy-Weisbach depends on the fluid: give --temperature for water, "
                "or --density and --viscosity"
            )
        temperature = _COLD
        assumed = options.units.text(_COLD, "temperature")
        assumptions = (
            f"water at {assumed}, for Re, velocity pressure and losses by K; give --temperature",
        )
    try:
        rho = water_density(temperature=temperature)[0]
        mu = water_viscosity(temperature=temperature)[0]
    except ValueError:
        raise click.BadParameter(
            "water is known here from 0 to 100 °C (32 to 212 °F)", param_hint="--temperature"
        ) from None
    return rho, mu, f"water at {options.units.text(temperature, 'temperature')}", assumptions


def _unit_weight(options: _Options, law: PipeLaw, density: float) -> tuple[float, str]:
    """Return the weight [Pa/m] with which a rise is counted, and where it comes from."""
    if isinstance(law, HazenWilliams) and not options.has("density"):
        if options.units.name == "us":
            return 0.433 * PSI / FOOT, "0.433 psi/ft, as NFPA 13 prints it"
        return 0.098 * BAR, "0.098 bar/m, as EN 12845 prints it"
    weight = density * GRAVITY
    return (
        weight,
        f"{options.units.from_si(weight, 'gradient'):.4g} {options.units.symbol('gradient')}, density × g",
    )


def _ends(options: _Options) -> tuple[float | None, float | None]:
    """Return the gauge pressures at start and end [Pa], ``None`` where nothing says them."""
    given = options.given
    if given["jet"] and given["to_reservoir"]:
        raise click.UsageError(
            "the end is either a free jet or still water: give one of --jet, --to-reservoir"
        )
    if given["jet"] and options.has("end_pressure"):
        raise click.UsageError("a free jet has pressure 0: leave out --end-pressure")
    start = options.number("start_pressure", "pressure", "any")
    end = options.number("end_pressure", "pressure", "any")
    if start is None and given["from_reservoir"]:
        start = 0.0
    if end is None and (given["jet"] or given["to_reservoir"]):
        end = 0.0
    if options.has("loss") and start is not None and end is not None:
        raise click.UsageError("give either --loss or the pressures at both ends, not both")
    return start, end


def _check_ends(problem: OnePipe, start: float | None, end: float | None) -> None:
    """Refuse a question that lacks one end."""
    if problem.flow is not None and problem.bore is not None:
        return
    if problem.drop is None and problem.loss is None:
        lacking = [
            name
            for name, value in (
                ("start (--start-pressure or --from-reservoir)", start),
                ("end (--end-pressure, --to-reservoir or --jet)", end),
            )
            if value is None
        ]
        if problem.flow is None and problem.bore is None:
            raise click.UsageError("give --flow or --diameter (or --material and --size)")
        what = "flow" if problem.flow is None else "diameter"
        raise click.UsageError(
            f"to find the {what}, give --loss or the pressure at both ends; nothing is said of the "
            + " and the ".join(lacking)
        )


def _efficiency(options: _Options) -> float | None:
    """Return the efficiency as a fraction, written 0.7 or 70 %."""
    text = options.given["efficiency"]
    if text is None:
        return None
    kind = "percent" if "%" in text else "ratio"
    value = options.number("efficiency", kind)
    if value is not None and value > 1:
        raise click.BadParameter(f"{text!r} is above 1; write 0.7 or 70%", param_hint="--efficiency")
    return value


def _bore(options: _Options) -> tuple[float | None, str, tuple[str, ...]]:
    """Return the bore [m], the nominal size it came from and its source."""
    diameter = options.number("diameter", "size")
    if not options.has("size"):
        return diameter, "", ()
    if diameter is not None:
        raise click.UsageError("give either --diameter or --material and --size")
    material = options.given["material"]
    if material is None:
        raise click.UsageError("--size needs --material")
    from supplycheck import catalogue

    try:
        row = catalogue.find_bore(material, options.given["size"])
    except NotInCatalogueError as error:
        raise click.BadParameter(str(error), param_hint="--material, --size") from None
    return row.bore, row.nominal, (f"size of {row.material}: {row.source}",)


def _fittings(options: _Options, nominal: str, bore: float | None, law: PipeLaw) -> tuple[Fitting, ...]:
    """Return the fittings written as ``2 elbow 90; 1 tee``, with lengths corrected for C and bore."""
    text = options.given["fittings"]
    if text is None:
        return ()
    if bore is None:
        raise click.UsageError("--fittings needs the size of the pipe: give --material and --size")
    from supplycheck.catalogue import ExtraRows
    from supplycheck.project.faults import FaultList
    from supplycheck.project.fittings import Lengths, PipeSize, parse

    standard = "NFPA 13" if options.units.name == "us" else "EN 12845"
    faults, place = FaultList(), Place("--fittings")
    lengths = Lengths(standard, ExtraRows(), faults)
    size = PipeSize(nominal, bore, law.c_factor if isinstance(law, HazenWilliams) else None)
    written = parse(text, options.units, place, faults)
    charged = [lengths.charge(each, size, "given", place) for each in written]
    if faults:
        raise click.UsageError("\n       ".join(str(fault) for fault in faults.all()))
    return tuple(each for each in charged if each is not None)


def next_size(question: Question, result: OnePipeResult) -> NextSize | str | None:
    """Return the next larger size where a diameter was found for a material; a text where none is."""
    if result.found != "diameter" or question.material is None:
        return None
    from supplycheck import catalogue

    try:
        rows = catalogue.bores(question.material)
    except NotInCatalogueError as error:
        raise click.BadParameter(str(error), param_hint="--material") from None
    if rows[-1].bore < result.bore:
        return f"the largest size of {question.material}, {rows[-1].nominal}, is smaller"
    row = next(row for row in rows if row.bore >= result.bore)
    problem = replace(question.problem, bore=row.bore, drop=None, loss=None)
    return NextSize(row.material, row.nominal, row.bore, row.source, solve_one_pipe(problem))
