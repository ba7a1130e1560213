"""Supply curves: pressure against flow, made of straight pieces in q^1.85.

On N^1.85 paper the pressure left in a main falls on a straight line from static. A reading, a cap, a
percentage, a change of height and the lower envelope of several tests all keep the pieces straight,
so one form holds every curve of this package exactly.

References
----------
.. [1] P = Ps − (Ps − Pr)(Q/Qt)^1.85, NFPA 291 / training literature on hydrant tests.
"""

from __future__ import annotations

import bisect
import math
from collections.abc import Sequence
from dataclasses import dataclass, replace
from itertools import accumulate, pairwise
from typing import Final

from supplycheck.errors import DomainError
from supplycheck.network.records import SourceCurve

EXPONENT: Final = 1.85


@dataclass(frozen=True, slots=True)
class SupplyCurve:
    """Gauge pressure [Pa] against flow [m³/s] at one point of the supply.

    (``flows``, ``pressures``) are joined by straight lines in q**exponent; ``flows`` starts at 0 and
    rises. Beyond the last point the curve goes on with slope ``tail`` [Pa/(m³/s)**exponent], never
    rising. ``members`` names, for each piece and for the tail, the test that governs there.
    Beyond ``tested_flow`` [m³/s] the curve is extrapolated. ``offset`` [Pa] is what was added for
    height since the gauge was read.
    """

    name: str
    node: str
    flows: tuple[float, ...]
    pressures: tuple[float, ...]
    tail: float
    members: tuple[str, ...]
    tested_flow: float
    exponent: float = EXPONENT
    offset: float = 0.0

    def __post_init__(self) -> None:
        if not (len(self.flows) == len(self.pressures) == len(self.members)) or not self.flows:
            raise DomainError("a supply curve needs as many flows as pressures and members, at least one")
        rising = all(low < high for low, high in pairwise(self.flows))
        if self.flows[0] != 0.0 or not rising:
            raise DomainError("the flows of a supply curve start at 0 and rise")
        if not all(math.isfinite(value) for value in (*self.flows, *self.pressures, self.tail)):
            raise DomainError("a supply curve holds a number that is not finite")
        if self.tail > 0.0:
            raise DomainError("a supply curve cannot rise without end")

    @property
    def static(self) -> float:
        """Pressure with nothing flowing [Pa]."""
        return self.pressures[0]

    @property
    def powers(self) -> tuple[float, ...]:
        """The flows raised to the exponent."""
        return tuple(flow**self.exponent for flow in self.flows)

    @property
    def gauge_static(self) -> float:
        """Pressure with nothing flowing at the height of the gauge [Pa]."""
        return self.static - self.offset

    def _piece(self, flow: float) -> int:
        return max(bisect.bisect_left(self.flows, flow) - 1, 0)

    def pressure_at(self, flow: float) -> float:
        """Return the pressure [Pa] at ``flow`` [m³/s]; :class:`DomainError` for a negative flow."""
        if not flow >= 0.0:
            raise DomainError(f"a supply curve is read at a flow of 0 or more, not at {flow:g} m³/s")
        piece = self._piece(flow)
        return self._at(flow**self.exponent, piece)

    def either_way(self, flow: float) -> float:
        """Return the pressure [Pa] at ``flow`` [m³/s]; negative where water runs into the source.

        The curve then rises above static as far as it falls below it at the same flow drawn, as the
        network solver reads it: an assumption, since no test tells how a main takes water.
        """
        if flow >= 0.0:
            return self.pressure_at(flow)
        return 2.0 * self.static - self.pressure_at(-flow)

    def _at(self, power: float, piece: int) -> float:
        powers = self.powers
        start, pressure = powers[piece], self.pressures[piece]
        if piece + 1 == len(powers):
            return pressure + self.tail * (power - start)
        share = (power - start) / (powers[piece + 1] - start)
        return pressure + (self.pressures[piece + 1] - pressure) * share

    def member_at(self, flow: float) -> str:
        """Return the name of the test that governs at ``flow`` [m³/s]."""
        return self.members[self._piece(flow)]

    def flow_at(self, pressure: float) -> float | None:
        """Return the largest flow [m³/s] at which ``pressure`` [Pa] is still there.

        0 where not even the static reaches it; ``None`` where the curve never falls to it.
        """
        powers = self.powers
        if self.pressures[-1] >= pressure:
            if self.tail == 0.0:
                return None
            power = powers[-1] + (pressure - self.pressures[-1]) / self.tail
            return float(power ** (1 / self.exponent))
        for piece in range(len(powers) - 2, -1, -1):
            high, low = self.pressures[piece], self.pressures[piece + 1]
            if high >= pressure > low:
                share = (high - pressure) / (high - low)
                power = powers[piece] + (powers[piece + 1] - powers[piece]) * share
                return float(power ** (1 / self.exponent))
        return 0.0

    def is_extrapolated(self, flow: float) -> bool:
        """Return whether ``flow`` [m³/s] lies beyond what was measured."""
        return flow > self.tested_flow * (1 + 1e-12)

    def tested_ratio(self, flow: float) -> float | None:
        """Return ``flow`` over the largest tested flow; ``None`` where nothing limits the range."""
        if not 0.0 < self.tested_flow < math.inf:
            return None
        return flow / self.tested_flow

    def lowered(self, pressure: float) -> SupplyCurve:
        """Return the curve with every pressure lowered by ``pressure`` [Pa] (raised if negative)."""
        return replace(self, pressures=tuple(value - pressure for value in self.pressures))

    def at_height(self, gain: float, node: str) -> SupplyCurve:
        """Return the curve ``gain`` [Pa] higher because it is read lower down, at ``node``."""
        return replace(self.lowered(-gain), node=node, offset=self.offset + gain)

    def pressure_scaled(self, factor: float) -> SupplyCurve:
        """Return the curve with every pressure at the gauge multiplied by ``factor``."""
        scaled = tuple((value - self.offset) * factor + self.offset for value in self.pressures)
        return replace(self, pressures=scaled, tail=self.tail * factor)

    def flow_scaled(self, factor: float) -> SupplyCurve:
        """Return the curve with every flow multiplied by ``factor`` (above 0)."""
        return replace(
            self,
            flows=tuple(flow * factor for flow in self.flows),
            tail=self.tail / factor**self.exponent,
            tested_flow=self.tested_flow * factor,
        )

    def capped(self, pressure: float) -> SupplyCurve:
        """Return the curve held at ``pressure`` [Pa] wherever it would lie above."""
        if self.static <= pressure:
            return self
        flow = self.flow_at(pressure)
        if flow is None:
            return replace(self, flows=(0.0,), pressures=(pressure,), tail=0.0, members=self.members[-1:])
        kept = [index for index, value in enumerate(self.flows) if value > flow * (1 + 1e-12)]
        first = self.members[self._piece(flow)]
        return replace(
            self,
            flows=(0.0, flow, *(self.flows[index] for index in kept)),
            pressures=(pressure, pressure, *(self.pressures[index] for index in kept)),
            members=(first, first, *(self.members[index] for index in kept)),
        )

    def to_source(self) -> SourceCurve:
        """Return the same curve for the network solver: power form where it is one line, else points."""
        powers = self.powers
        if len(powers) == 1:
            return SourceCurve(self.node, self.static, -self.tail, self.exponent)
        slope = (self.pressures[1] - self.pressures[0]) / powers[1]
        if len(powers) == 2 and math.isclose(slope, self.tail, rel_tol=1e-12):
            return SourceCurve(self.node, self.static, -self.tail, self.exponent)
        last = (self.pressures[-1] - self.pressures[-2]) / (powers[-1] - powers[-2])
        flows, pressures = self.flows, self.pressures
        if not math.isclose(last, self.tail, rel_tol=1e-12):
            beyond = 2.0 * powers[-1]
            flows = (*flows, float(beyond ** (1 / self.exponent)))
            pressures = (*pressures, self._at(beyond, len(powers) - 1))
        return SourceCurve(self.node, self.static, 0.0, self.exponent, flows, pressures)


def curve_through(
    name: str, node: str, static: float, readings: Sequence[tuple[float, float]]
) -> SupplyCurve:
    """Return the curve from ``static`` [Pa] through the (flow [m³/s], residual [Pa]) ``readings``.

    Inside the tested range it passes through the readings; a reading that lies above one at a smaller
    flow is held down to it. Beyond the last reading it follows the steeper of the last piece and the
    line from static to the last reading.

    Raises :class:`DomainError` where a flow is not above 0 or a residual is not below static.
    """
    if not readings:
        raise DomainError("a flow test needs at least one residual pressure with its flow")
    flows, pressures = [0.0], [static]
    for flow, residual in sorted(readings, key=lambda reading: (reading[0], -reading[1])):
        if not (math.isfinite(flow) and flow > 0.0):
            raise DomainError(f"the flow of a test reading must be above 0, found {flow:g} m³/s")
        if not residual < static:
            raise DomainError("the residual pressure of a flow test must be below its static pressure")
        if flow == flows[-1]:
            pressures[-1] = min(pressures[-1], residual)
            continue
        flows.append(flow)
        pressures.append(min(residual, pressures[-1]))
    powers = [flow**EXPONENT for flow in flows]
    piece = (pressures[-1] - pressures[-2]) / (powers[-1] - powers[-2])
    chord = (pressures[-1] - static) / powers[-1]
    return SupplyCurve(
        name, node, tuple(flows), tuple(pressures), min(piece, chord), (name,) * len(flows), flows[-1]
    )


def constant_curve(name: str, node: str, pressure: float) -> SupplyCurve:
    """Return a supply that holds ``pressure`` [Pa] at every flow, such as a large tank."""
    return SupplyCurve(name, node, (0.0,), (pressure,), 0.0, (name,), math.inf)


def lower_envelope(name: str, curves: Sequence[SupplyCurve]) -> SupplyCurve:
    """Return the lowest of ``curves`` at every flow; all are at one node and share the exponent."""
    if not curves:
        raise DomainError("a lower envelope needs at least one curve")
    if len(curves) == 1:
        return curves[0]
    if len({(curve.node, curve.exponent) for curve in curves}) > 1:
        raise DomainError("curves are compared at one node and with one exponent")
    breaks = _breaks(curves)
    exponent = curves[0].exponent
    flows = [float(power ** (1 / exponent)) for power in breaks]
    middles = [(low + high) / 2 for low, high in pairwise(breaks)] + [2 * breaks[-1] + 1e-6]
    lowest = [min(curves, key=lambda curve: _at_power(curve, power)) for power in middles]
    lows = (min(curve.pressure_at(flow) for curve in curves) for flow in flows)
    pressures = list(accumulate(lows, min))
    return SupplyCurve(
        name,
        curves[0].node,
        tuple(flows),
        tuple(pressures),
        lowest[-1].tail,
        tuple(
            curve.member_at(power ** (1 / exponent)) for curve, power in zip(lowest, middles, strict=True)
        ),
        _tested(lowest, flows),
        exponent,
        lowest[0].offset,
    )


def _at_power(curve: SupplyCurve, power: float) -> float:
    return curve.pressure_at(float(power ** (1 / curve.exponent)))


def _member_at(curve: SupplyCurve, power: float) -> str:
    return curve.member_at(float(power ** (1 / curve.exponent)))


def _breaks(curves: Sequence[SupplyCurve]) -> list[float]:
    """Return the powers at which a curve bends or two curves cross, in rising order."""
    bends = sorted({power for curve in curves for power in curve.powers})
    found = set(bends)
    for start, end in [*pairwise(bends), (bends[-1], math.inf)]:
        probe = end if math.isfinite(end) else 2 * start + 1.0
        lines = [(_at_power(one, start), _at_power(one, probe)) for one in curves]
        for index, (low, high) in enumerate(lines):
            for other_low, other_high in lines[index + 1 :]:
                gap, change = low - other_low, (high - other_high) - (low - other_low)
                if change != 0.0:
                    crossing = start - gap / change * (probe - start)
                    if start + 1e-9 * probe < crossing < end * (1 - 1e-9):
                        found.add(crossing)
    return sorted(found)


def _tested(lowest: Sequence[SupplyCurve], flows: Sequence[float]) -> float:
    """Return the flow beyond which the governing curve is first outside its own readings."""
    ends = [*flows[1:], math.inf]
    for curve, start, end in zip(lowest, flows, ends, strict=True):
        if curve.tested_flow < end * (1 - 1e-12):
            return max(curve.tested_flow, start)
    return math.inf
