"""Exact unit factors and the two unit sets, US and metric.

Everything inside the package is SI: Pa, m³/s, m, kg/m³, Pa·s, K. A number is converted only where it
comes in (project reader, catalogue) or goes out (display). Factors are built from definitions.

References
----------
.. [1] NIST SP 811 (2008): inch 0.0254 m, pound 0.453 592 37 kg, US gallon 231 in³, g_n 9.806 65 m/s².
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from types import MappingProxyType
from typing import Final

INCH: Final = 0.0254
FOOT: Final = 12 * INCH
POUND: Final = 0.45359237
GRAVITY: Final = 9.80665
GALLON: Final = 231 * INCH**3
PSI: Final = POUND * GRAVITY / INCH**2
BAR: Final = 1e5
GPM: Final = GALLON / 60
LPM: Final = 1e-3 / 60


@dataclass(frozen=True, slots=True)
class Unit:
    """A unit: SI value = ``factor`` × number + ``offset``; ``decimals`` shown by default."""

    symbol: str
    kind: str
    factor: float
    decimals: int
    offset: float = 0.0
    spellings: tuple[str, ...] = ()

    def to_si(self, number: float) -> float:
        """Return the SI value of ``number`` in this unit."""
        return number * self.factor + self.offset

    def from_si(self, value: float) -> float:
        """Return the number in this unit of the SI ``value``."""
        return (value - self.offset) / self.factor


_ALL: Final = (
    Unit("gpm", "flow", GPM, 1, spellings=("gal/min", "usgpm")),
    Unit("L/min", "flow", LPM, 1, spellings=("l/min", "lpm", "lit/min", "dm³/min", "dm3/min")),
    Unit("L/s", "flow", 1e-3, 2, spellings=("l/s", "lps")),
    Unit("m³/h", "flow", 1 / 3600, 2, spellings=("m3/h",)),
    Unit("m³/s", "flow", 1.0, 5, spellings=("m3/s",)),
    Unit("ft³/s", "flow", FOOT**3, 4, spellings=("cfs", "ft3/s")),
    Unit("psi", "pressure", PSI, 1, spellings=("lbf/in²", "psig")),
    Unit("bar", "pressure", BAR, 2),
    Unit("mbar", "pressure", 100.0, 0),
    Unit("kPa", "pressure", 1e3, 1, spellings=("kpa",)),
    Unit("Pa", "pressure", 1.0, 0, spellings=("pa",)),
    Unit("psi imbalance", "imbalance", PSI, 3),
    Unit("mbar imbalance", "imbalance", 100.0, 1),
    Unit("ft", "length", FOOT, 2, spellings=("feet", "foot", "'")),
    Unit("m", "length", 1.0, 2, spellings=("metre", "meter")),
    Unit("in", "size", INCH, 3, spellings=("inch", "inches", '"', "″")),
    Unit("mm", "size", 1e-3, 1),
    Unit("ft²", "area", FOOT**2, 1, spellings=("ft2", "sqft", "sq ft")),
    Unit("m²", "area", 1.0, 1, spellings=("m2",)),
    Unit("gpm/ft²", "density", GPM / FOOT**2, 3, spellings=("gpm/ft2",)),
    Unit("mm/min", "density", 1e-3 / 60, 2, spellings=("l/min/m2", "l/min/m²", "L/min/m²")),
    Unit("ft/s", "velocity", FOOT, 1, spellings=("fps",)),
    Unit("m/s", "velocity", 1.0, 2),
    Unit("gpm/psi½", "k_factor", GPM / math.sqrt(PSI), 2, spellings=("gpm/psi^0.5",)),
    Unit("L/min/bar½", "k_factor", LPM / math.sqrt(BAR), 1, spellings=("L/min/bar^0.5",)),
    Unit("psi/ft", "gradient", PSI / FOOT, 4),
    Unit("mbar/m", "gradient", 100.0, 2),
    Unit("bar/m", "gradient", BAR, 4),
    Unit("gal", "volume", GALLON, 0, spellings=("gallon", "gallons")),
    Unit("m³", "volume", 1.0, 1, spellings=("m3",)),
    Unit("L", "volume", 1e-3, 0, spellings=("l", "litre", "liter")),
    Unit("lb/ft³", "mass_density", POUND / FOOT**3, 2, spellings=("lb/ft3",)),
    Unit("kg/m³", "mass_density", 1.0, 1, spellings=("kg/m3",)),
    Unit("cP", "viscosity", 1e-3, 3, spellings=("mPa·s", "mPa s")),
    Unit("Pa·s", "viscosity", 1.0, 6, spellings=("Pa s",)),
    Unit("°F", "temperature", 5 / 9, 0, 459.67 * 5 / 9, spellings=("F", "degF")),
    Unit("°C", "temperature", 1.0, 1, 273.15, spellings=("C", "degC")),
    Unit("hp", "power", 550 * FOOT * POUND * GRAVITY, 2),
    Unit("kW", "power", 1e3, 2, spellings=("kw",)),
    Unit("W", "power", 1.0, 0),
    Unit("s", "time", 1.0, 0),
    Unit("min", "time", 60.0, 0),
    Unit("h", "time", 3600.0, 1),
    Unit("ft roughness", "roughness", FOOT, 6),
    Unit("mm roughness", "roughness", 1e-3, 4),
    Unit("", "ratio", 1.0, 3),
    Unit("%", "percent", 0.01, 1),
    Unit("years", "age", 1.0, 2),
    Unit("months", "months", 1 / 12, 1),
)


@dataclass(frozen=True, slots=True)
class UnitSet:
    """The unit used for each kind of quantity."""

    name: str
    units: MappingProxyType[str, Unit]

    def unit(self, kind: str) -> Unit:
        """Return the unit of ``kind``; :class:`KeyError` for a kind that does not exist."""
        return self.units[kind]

    def to_si(self, number: float, kind: str) -> float:
        """Return the SI value of ``number`` given in this set's unit of ``kind``.

        >>> round(US.to_si(1.0, "pressure"), 3)
        6894.757
        """
        return self.units[kind].to_si(number)

    def from_si(self, value: float, kind: str) -> float:
        """Return ``value`` [SI] as a number in this set's unit of ``kind``.

        >>> round(METRIC.from_si(8e-5 / 60 / 1e5**0.5 * 1e3, "k_factor"), 3)
        80.0
        """
        return self.units[kind].from_si(value)

    def symbol(self, kind: str) -> str:
        """Return the printed symbol of the unit of ``kind`` (empty for a ratio)."""
        return self.units[kind].symbol.removesuffix(" roughness").removesuffix(" imbalance")

    def number(self, value: float | None, kind: str, decimals: int | None = None) -> str:
        """Return ``value`` [SI] as displayed text without its unit; a dash for ``None``.

        >>> US.number(PSI * 12.34, "pressure")
        '12.3'
        """
        if value is None:
            return "–"
        if not math.isfinite(value):
            return "∞" if value > 0 else "–"
        places = self.units[kind].decimals if decimals is None else decimals
        text = f"{self.from_si(value, kind):.{places}f}"
        return text.lstrip("-") if float(text) == 0 else text.replace("-", "−")

    def text(self, value: float | None, kind: str, decimals: int | None = None) -> str:
        """Return ``value`` [SI] as displayed text with its unit.

        >>> METRIC.text(3.5e5, "pressure")
        '3.50 bar'
        """
        symbol = self.symbol(kind)
        number = self.number(value, kind, decimals)
        if kind == "percent":
            return number + symbol
        return f"{number} {symbol}" if symbol and number != "–" else number


def _unit_set(name: str, symbols: str) -> UnitSet:
    by_symbol = {unit.symbol: unit for unit in _ALL}
    chosen = [by_symbol[symbol] for symbol in symbols.split("|")]
    return UnitSet(name, MappingProxyType({unit.kind: unit for unit in chosen}))


US: Final = _unit_set(
    "us",
    "gpm|psi|ft|in|ft²|gpm/ft²|ft/s|gpm/psi½|psi/ft|gal|lb/ft³|cP|°F|hp"
    "|min|ft roughness||%|years|months|psi imbalance",
)
METRIC: Final = _unit_set(
    "metric",
    "L/min|bar|m|mm|m²|mm/min|m/s|L/min/bar½|mbar/m|m³|kg/m³|cP|°C|kW"
    "|min|mm roughness||%|years|months|mbar imbalance",
)
UNIT_SETS: Final = MappingProxyType({"us": US, "metric": METRIC})


def units_of(kind: str) -> tuple[Unit, ...]:
    """Return every unit of ``kind`` that may be written behind a number."""
    return tuple(unit for unit in _ALL if unit.kind == kind)


def find_unit(text: str) -> Unit | None:
    """Return the unit written as ``text``, or ``None``; length and size share ``in``, ``ft``, ``m``.

    >>> find_unit("psi").kind
    'pressure'
    """
    folded = text.strip()
    for unit in _ALL:
        if folded and (folded == unit.symbol or folded in unit.spellings):
            return unit
    return None
