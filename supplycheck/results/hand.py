"""Numbers of the hand check as a reader types them into a pocket calculator.

Every line ends in ``= formula``: only numbers, ``+ − × / ^ √`` and brackets, so that it can be worked as
it stands. Bores, K-factors and points of curves are written as exactly as they were given.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from itertools import pairwise
from typing import Final

from supplycheck.hydraulics import Curve
from supplycheck.model import Device, FrictionLaw
from supplycheck.results.records import HandStep
from supplycheck.units import UnitSet

_DIGITS: Final = 6


@dataclass(frozen=True, slots=True)
class Pen:
    """Writes SI values of one unit set with the digits that a chain of hand calculations needs."""

    units: UnitSet

    @property
    def fine(self) -> int:
        """Decimals of a pressure: a thousandth of a psi, a ten-thousandth of a bar."""
        return 3 if self.units.name == "us" else 4

    def pressure(self, value: float) -> str:
        """Return a pressure."""
        return self.units.number(value, "pressure", self.fine)

    def flow(self, value: float) -> str:
        """Return a flow to two decimals."""
        return self.units.number(value, "flow", 2)

    def exact(self, value: float, kind: str) -> str:
        """Return a value as it was given: the usual decimals of its kind, more where it has more."""
        number = self.units.from_si(value, kind)
        usual = self.units.unit(kind).decimals
        if not math.isfinite(number) or number == 0:
            return self.units.number(value, kind)
        most = max(usual, _DIGITS - 1 - math.floor(math.log10(abs(number))))
        for decimals in range(usual, most + 1):
            if abs(round(number, decimals) - number) < 0.5 * 10.0**-most:
                return self.units.number(value, kind, decimals)
        return self.units.number(value, kind, most)

    def length(self, value: float) -> str:
        """Return a length to two decimals, to three where it has more."""
        number = self.units.from_si(value, "length")
        return self.units.number(value, "length", 2 if abs(round(number, 2) - number) < 5e-5 else 3)

    def significant(self, number: float, digits: int) -> str:
        """Return a plain number with so many significant digits, never with a power of ten.

        >>> from supplycheck.units import US
        >>> Pen(US).significant(0.00369617, 4)
        '0.003696'
        """
        if number == 0 or not math.isfinite(number):
            return "0"
        return f"{number:.{significant_decimals(number, digits)}f}".replace("-", "−")

    def step(self, name: str, formula: str, value: float, kind: str, note: str = "") -> HandStep:
        """Return a line with the decimals of its kind."""
        decimals = {"pressure": self.fine, "flow": 2}.get(kind)
        return HandStep(name, formula, value, kind, note, decimals)


def significant_decimals(number: float, digits: int) -> int:
    """Return the decimals that show ``number`` with ``digits`` significant digits."""
    if number == 0 or not math.isfinite(number):
        return digits
    return max(digits - 1 - math.floor(math.log10(abs(number))), 0)


def signed_sum(first: str, parts: list[tuple[float, str]]) -> str:
    """Return ``first`` and the other parts (value, text without sign) with their signs between them."""
    return first + "".join(f" {'−' if value < 0 else '+'} {text}" for value, text in parts)


def law_constant(law: FrictionLaw, units: UnitSet) -> str:
    """Return the constant of Hazen-Williams for a loss per length, flow and bore in ``units``.

    >>> from supplycheck.model import HW_METRIC, HW_US
    >>> from supplycheck.units import METRIC, US
    >>> law_constant(HW_US, US), law_constant(HW_METRIC, METRIC)
    ('4.52', '6.05e8')
    """
    flow, size = units.unit("flow").factor, units.unit("size").factor
    number = law.coefficient * flow**law.flow_exponent / size**law.bore_exponent
    text = f"{number / units.unit('gradient').factor:.6g}"
    return text.replace("e+0", "e").replace("e+", "e")


def darcy_constant(units: UnitSet, *, per_length: bool = True) -> str:
    """Return 8/π² for Q² in ``units``: with bore to the 5th and a loss per length, else to the 4th."""
    flow, size = units.unit("flow").factor, units.unit("size").factor
    density = units.unit("mass_density").factor
    number = 8 / math.pi**2 * flow**2 * density
    if per_length:
        number /= size**5 * units.unit("gradient").factor
    else:
        number /= size**4 * units.unit("pressure").factor
    return f"{number:.6g}"


def bracket(device: Device, flow: float) -> tuple[tuple[float, float], tuple[float, float]]:
    """Return the points (flow, value) of the curve of ``device`` on both sides of ``flow``.

    Beyond the last point these are the last two, whose line is carried on.
    """
    points = list(zip(device.flows, device.values, strict=True))
    for before, after in pairwise(points):
        if flow <= after[0]:
            return before, after
    return points[-2], points[-1]


def device_value(device: Device, flow: float) -> float | None:
    """Return loss (or gain of a pump) [Pa] at ``flow`` by its curve, ``None`` where it has none."""
    if not device.flows:
        return None
    return float(Curve(device.flows, device.values).carried_on(flow)[0])


def device_step(device: Device, flow: float, name: str, pen: Pen) -> HandStep:
    """Return the line that reads the loss of ``device`` from its curve at ``flow`` [m³/s]."""
    value = device_value(device, flow) or 0.0
    gain = device.kind == "pump"
    told = [device.title or f"device {device.tag}"]
    if len(device.flows) == 1:
        formula = pen.exact(device.values[0], "pressure")
        told.append("the same at every flow")
    else:
        (q0, p0), (q1, p1) = bracket(device, flow)
        formula = (
            f"{pen.exact(p0, 'pressure')} + ({pen.flow(flow)} − {pen.exact(q0, 'flow')}) × "
            f"({pen.exact(p1, 'pressure')} − {pen.exact(p0, 'pressure')}) / "
            f"({pen.exact(q1, 'flow')} − {pen.exact(q0, 'flow')})"
        )
        told.append(
            "beyond its last point, carried on"
            if flow > q1
            else "straight line between the points of its curve on both sides"
        )
    told.append(f"source: {device.source}" if device.source else "")
    symbol = "Pd = "
    if gain:
        formula, symbol = f"−({formula})", "Pd = "
        told.insert(1, "adds pressure")
    note = "; ".join(part for part in told if part)
    return pen.step(name, symbol + formula, -value if gain else value, "pressure", note)
