"""Numbers as people write them: plain, with a unit, in feet and inches, as fractions.

A number read here is a :class:`Written`: the number and the unit written behind it, if any. It turns
into SI when the unit set of its table is known.
"""

from __future__ import annotations

import datetime as dt
import math
import re
from dataclasses import dataclass
from typing import Annotated, Any, Final, Literal

from pydantic import GetCoreSchemaHandler, GetJsonSchemaHandler
from pydantic_core import CoreSchema, PydanticCustomError, core_schema

from supplycheck.project.dates import ALLOWED, date_problem, date_remedy
from supplycheck.project.faults import quoted
from supplycheck.units import METRIC, US, Unit, UnitSet, find_unit, units_of

Sign = Literal["positive", "zero or more", "any"]

_MIXED = r"\d+\s+\d+/\d+|\d+-\d+/\d+|\d+/\d+|(?:\d+(?:\.\d*)?|\.\d+)(?:[eE][+-]?\d+)?"
_NUMBER: Final = re.compile(rf"([+\-−]?)\s*({_MIXED})\s*(.*)", re.DOTALL)
_FEET: Final = re.compile(
    rf"([+\-−]?)\s*(\d+(?:\.\d+)?)\s*(?:'|′|’|ft\.?|feet|foot)\s*-?\s*({_MIXED})\s*(?:\"|″|”|''|in\.?|inch|inches)?"
)
LARGEST: Final = 1e12
"""Largest number read, in any unit: far above anything that flows in a pipe."""
_SPOKEN: Final = {
    "length": "a length",
    "size": "a size",
    "area": "an area",
    "pressure": "a pressure",
    "flow": "a flow",
    "density": "a design density",
    "k_factor": "a K-factor",
    "temperature": "a temperature",
    "viscosity": "a viscosity",
    "mass_density": "a density of a fluid",
    "velocity": "a velocity",
    "volume": "a volume",
    "time": "a time",
    "percent": "a percentage",
    "roughness": "a roughness",
    "ratio": "a plain number",
    "age": "a number of years",
    "gradient": "a pressure per length",
}
_LENGTH_LIKE: Final = ("length", "size", "roughness")


class NumberError(ValueError):
    """A number that cannot be read: what is wrong, what is allowed, what to do."""

    def __init__(self, problem: str, allowed: str, remedy: str = "") -> None:
        super().__init__(problem)
        self.problem = problem
        self.allowed = allowed
        self.remedy = remedy


@dataclass(frozen=True, slots=True)
class Written:
    """A number as written and the unit behind it (``None``: that of the table's unit set)."""

    number: float
    kind: str
    unit: Unit | None = None

    def si(self, units: UnitSet) -> float:
        """Return the SI value, a bare number being in ``units``."""
        unit = self.unit if self.unit is not None else units.unit(self.kind)
        return unit.to_si(self.number)

    def units(self, units: UnitSet) -> UnitSet:
        """Return the unit set to whose unit the number is written, ``units`` for a bare number.

        >>> Written(8.0, "k_factor", find_unit("gpm/psi½")).units(METRIC).name
        'us'
        """
        sets = (units, METRIC if units is US else US)
        return next((one for one in sets if self.unit == one.units.get(self.kind)), units)

    def text(self, units: UnitSet) -> str:
        """Return the number with its unit, as it was written."""
        unit = self.unit if self.unit is not None else units.unit(self.kind)
        return f"{self.number:g} {unit.symbol.removesuffix(' roughness')}".strip()


def _mixed(text: str) -> float:
    """Return the value of ``1 1/4``, ``1-1/4``, ``3/4`` or ``2.5``; raises ZeroDivisionError on ``1/0``."""
    whole, _, fraction = re.sub(r"(?<=\d)(?:\s+|-)(?=\d+/)", " ", text.strip()).rpartition(" ")
    if "/" not in fraction:
        return float(fraction)
    top, bottom = fraction.split("/")
    return float(whole or 0) + int(top) / int(bottom)


def allowed_units(kind: str) -> str:
    """Return the units that may stand behind a number of ``kind``, for a message.

    >>> allowed_units("area")
    'ft², m²'
    """
    kinds = ("length", "size") if kind in _LENGTH_LIKE else (kind,)
    return ", ".join(unit.symbol for each in kinds for unit in units_of(each) if unit.symbol)


def _unit_behind(text: str, kind: str) -> Unit:
    """Return the unit ``text`` for a number of ``kind``; raises :class:`NumberError`."""
    unit = find_unit(text.strip())
    spoken = _SPOKEN.get(kind, kind)
    if unit is None:
        raise NumberError(
            f"cannot be read as {spoken}",
            f"a number, or a number with one of the units {allowed_units(kind)}",
            "write decimals with a point and thousands without a separator"
            if re.match(r"[,\s]\s*\d", text)
            else "",
        )
    same = unit.kind == kind or (kind in _LENGTH_LIKE and unit.kind in _LENGTH_LIKE)
    if not same:
        raise NumberError(
            f"the unit {unit.symbol} is {_SPOKEN.get(unit.kind, unit.kind)}, not {spoken}",
            allowed_units(kind) or "a number without a unit",
        )
    return unit


def _from_text(text: str, kind: str) -> Written:
    """Read ``text``; raises :class:`NumberError`."""
    spoken = _SPOKEN.get(kind, kind)
    stripped = text.strip()
    try:
        if kind in _LENGTH_LIKE and (match := _FEET.fullmatch(stripped)):
            sign, feet, inches = match.groups()
            value = float(feet) + _mixed(inches) / 12
            return Written(-value if sign in ("-", "−") else value, kind, find_unit("ft"))
        match = _NUMBER.fullmatch(stripped)
        if not match:
            raise NumberError(
                f"cannot be read as {spoken}",
                f"a number, or a number with one of the units {allowed_units(kind)}",
            )
        sign, number, rest = match.groups()
        value = _mixed(number)
    except ZeroDivisionError:
        raise NumberError("divides by zero", "a fraction such as 1 1/4") from None
    unit = _unit_behind(rest, kind) if rest.strip() else None
    return Written(-value if sign in ("-", "−") else value, kind, unit)


def read_number(value: object, kind: str, sign: Sign = "positive") -> Written:
    """Read a number or a text of ``kind``; raises :class:`NumberError`.

    >>> round(read_number("10'-6\\"", "length").si(METRIC), 9)
    3.2004
    >>> read_number("1 1/4", "size").number
    1.25
    >>> round(read_number("5.5 bar", "pressure").si(US))
    550000
    """
    spoken = _SPOKEN.get(kind, kind)
    if isinstance(value, str):
        written = _from_text(value, kind)
    elif isinstance(value, int | float) and not isinstance(value, bool):
        try:
            written = Written(float(value), kind)
        except OverflowError:
            written = Written(math.inf, kind)
    else:
        raise NumberError(f"is not {spoken}", "a number, or a text such as " + example_of(kind))
    number = written.number
    if not math.isfinite(number):
        raise NumberError("is not a finite number", "a finite number")
    if abs(number) > LARGEST:
        raise NumberError("is too large", f"at most {LARGEST:g}")
    if (sign == "positive" and number <= 0) or (sign == "zero or more" and number < 0):
        wanted = "a number above zero" if sign == "positive" else "zero or a number above it"
        raise NumberError(
            "is negative" if number < 0 else "is zero",
            wanted,
            "correct it, or leave it out if there is none",
        )
    if kind == "temperature" and written.unit is None and number < -459.67:
        raise NumberError("is below absolute zero", "a temperature above −459.67 °F or −273.15 °C")
    return written


def example_of(kind: str) -> str:
    """Return one number with a unit as a text in quotes.

    >>> example_of("pressure")
    '"5 psi"'
    """
    if kind == "length":
        return '"10\'-6\\""'
    if kind == "ratio":
        return '"0.9"'
    return f'"5 {US.symbol(kind)}"'.replace(" %", " %")


@dataclass(frozen=True, slots=True)
class Rule:
    """Tells pydantic to read a number of ``kind``; stands in ``Annotated``."""

    kind: str
    sign: Sign = "positive"

    def read(self, value: object) -> Written:
        """Return the number; raises the pydantic error that carries the message."""
        if isinstance(value, Written):
            return value
        try:
            return read_number(value, self.kind, self.sign)
        except NumberError as fault:
            raise PydanticCustomError(
                "number",
                "{problem}",
                {
                    "problem": fault.problem,
                    "found": quoted(value),
                    "allowed": fault.allowed,
                    "remedy": fault.remedy,
                },
            ) from None

    def __get_pydantic_core_schema__(self, source: Any, handler: GetCoreSchemaHandler) -> CoreSchema:
        return core_schema.no_info_plain_validator_function(self.read)

    def __get_pydantic_json_schema__(
        self, schema: CoreSchema, handler: GetJsonSchemaHandler
    ) -> dict[str, Any]:
        number: dict[str, Any] = {"type": "number"}
        if self.sign == "positive":
            number["exclusiveMinimum"] = 0
        elif self.sign == "zero or more":
            number["minimum"] = 0
        return {
            "anyOf": [number, {"type": "string"}],
            "quantity": self.kind.replace("_", " "),
            "unit": {"us": US.symbol(self.kind), "metric": METRIC.symbol(self.kind)},
        }


@dataclass(frozen=True, slots=True)
class _CurveRule:
    """Reads points ``[flow, pressure]``, each number plain or with its unit."""

    def read(self, value: object) -> list[tuple[Written, Written]]:
        """Return the points; raises the pydantic error that carries the message."""
        allowed = "a list of points [flow, pressure], for example [[0, 2], [500, 6]]"
        if not isinstance(value, list) or not value:
            raise _custom("is not a curve", value, allowed)
        points = []
        for number, point in enumerate(value, start=1):
            if not isinstance(point, list) or len(point) != 2:
                raise _custom(f"point {number} is not a pair of numbers", point, allowed)
            try:
                flow = read_number(point[0], "flow", "zero or more")
                pressure = read_number(point[1], "pressure", "zero or more")
            except NumberError as fault:
                raise _custom(f"in point {number} a number {fault.problem}", point, fault.allowed) from None
            points.append((flow, pressure))
        return points

    def __get_pydantic_core_schema__(self, source: Any, handler: GetCoreSchemaHandler) -> CoreSchema:
        return core_schema.no_info_plain_validator_function(self.read)

    def __get_pydantic_json_schema__(
        self, schema: CoreSchema, handler: GetJsonSchemaHandler
    ) -> dict[str, Any]:
        number = {"type": ["number", "string"]}
        point = {"type": "array", "items": number, "minItems": 2, "maxItems": 2}
        units = {unit.name: f"[{unit.symbol('flow')}, {unit.symbol('pressure')}]" for unit in (US, METRIC)}
        return {"type": "array", "items": point, "minItems": 1, "quantity": "points", "unit": units}


def _custom(problem: str, value: object, allowed: str) -> PydanticCustomError:
    context = {"problem": problem, "found": quoted(value), "allowed": allowed, "remedy": ""}
    return PydanticCustomError("number", "{problem}", context)


class _DateRule:
    """Reads a TOML date or a text in ISO form."""

    def read(self, value: object) -> dt.date:
        """Return the date; raises the pydantic error that carries the message."""
        if isinstance(value, dt.datetime):
            return value.date()
        if isinstance(value, dt.date):
            return value
        try:
            return dt.date.fromisoformat(value.strip() if isinstance(value, str) else "")
        except ValueError:
            raise PydanticCustomError(
                "number",
                "{problem}",
                {
                    "problem": date_problem(str(value)),
                    "found": quoted(value),
                    "allowed": ALLOWED,
                    "remedy": date_remedy(str(value)),
                },
            ) from None

    def __get_pydantic_core_schema__(self, source: Any, handler: GetCoreSchemaHandler) -> CoreSchema:
        return core_schema.no_info_plain_validator_function(self.read)

    def __get_pydantic_json_schema__(
        self, schema: CoreSchema, handler: GetJsonSchemaHandler
    ) -> dict[str, Any]:
        return {"type": "string", "format": "date", "quantity": "date"}


Date = Annotated[dt.date, _DateRule()]
LossCurve = Annotated[list[tuple[Written, Written]], _CurveRule()]
Length = Annotated[Written, Rule("length")]
LengthOrZero = Annotated[Written, Rule("length", "zero or more")]
Elevation = Annotated[Written, Rule("length", "any")]
Size = Annotated[Written, Rule("size")]
Area = Annotated[Written, Rule("area")]
Pressure = Annotated[Written, Rule("pressure")]
PressureOrZero = Annotated[Written, Rule("pressure", "zero or more")]
Flow = Annotated[Written, Rule("flow")]
FlowOrZero = Annotated[Written, Rule("flow", "zero or more")]
Density = Annotated[Written, Rule("density")]
KFactor = Annotated[Written, Rule("k_factor")]
Temperature = Annotated[Written, Rule("temperature", "any")]
Viscosity = Annotated[Written, Rule("viscosity")]
MassDensity = Annotated[Written, Rule("mass_density")]
Velocity = Annotated[Written, Rule("velocity")]
Volume = Annotated[Written, Rule("volume")]
Duration = Annotated[Written, Rule("time")]
Percent = Annotated[Written, Rule("percent", "zero or more")]
Roughness = Annotated[Written, Rule("roughness", "zero or more")]
Ratio = Annotated[Written, Rule("ratio")]
RatioOrZero = Annotated[Written, Rule("ratio", "zero or more")]
Years = Annotated[Written, Rule("age", "zero or more")]
