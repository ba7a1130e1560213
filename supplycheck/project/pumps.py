"""Fire pumps: from the keys of a device of kind ``pump`` to the curve of the whole set and its rating.

A rating is no curve. Points make one; so do the rated point with churn and the point at 150 % flow. The
limits of the pump standard bound a curve: they are used only where the project says so, and then listed.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from itertools import pairwise
from typing import Final, Literal

from supplycheck.errors import DomainError
from supplycheck.hydraulics import Curve
from supplycheck.hydraulics.pump import (
    HIGHEST_CHURN,
    LOWEST_OVERLOAD,
    OVERLOAD_FLOW,
    at_speed,
    limiting_pump_curve,
    rated_pump_curve,
)
from supplycheck.model import PumpData
from supplycheck.project.drafts import Notes
from supplycheck.project.faults import FaultList, listed
from supplycheck.project.schema_system import DeviceTable
from supplycheck.project.sections import Sections
from supplycheck.units import UnitSet

PUMP_KEYS: Final = (
    "rated_flow",
    "rated_pressure",
    "churn_pressure",
    "pressure_at_150",
    "curve_from_limits",
    "speed",
    "rated_speed",
    "count",
    "arrangement",
    "test_header",
)
_WAYS: Final = "curve; or rated_flow, rated_pressure, churn_pressure and pressure_at_150"
_NO_CURVE: Final = (Curve((0.0, 1.0), (1.0, 1.0)), PumpData())


class PumpReader:
    """Reads one pump device; what is wrong is noted as a fault."""

    def __init__(
        self,
        tag: str,
        table: DeviceTable,
        units: UnitSet,
        sections: Sections,
        notes: Notes,
        faults: FaultList,
    ) -> None:
        self.tag, self.table, self.units = tag, table, units
        self.sections, self.notes, self.faults = sections, notes, faults

    def _fault(
        self, key: str, problem: str, *, found: str = "", allowed: str = "", remedy: str = ""
    ) -> None:
        where = f"device.{self.tag}.{key}" if key else f"device.{self.tag}"
        self.faults.add(self.sections.place(where), problem, found=found, allowed=allowed, remedy=remedy)

    def _si(self, key: str) -> float | None:
        written = getattr(self.table, key)
        return None if written is None else float(written.si(self.units))

    def read(self, points: tuple[Sequence[float], Sequence[float]]) -> tuple[Curve, PumpData]:
        """Return the curve of the set and what is told of it; ``points`` are those of the key ``curve``."""
        flow, pressure = self._si("rated_flow"), self._si("rated_pressure")
        for key, other in (("rated_flow", "rated_pressure"), ("rated_pressure", "rated_flow")):
            if getattr(self.table, key) is not None and getattr(self.table, other) is None:
                self._fault(other, f"is missing: {key} is given")
        curve = self._curve(points, flow, pressure)
        if curve is None:
            return _NO_CURVE
        ratio, count, arrangement = self._speed(), self.table.count, self._arrangement()
        along = count if arrangement == "parallel" else 1
        above = count if arrangement == "series" else 1
        curve = at_speed(curve=curve, ratio=ratio) if ratio != 1.0 else curve
        whole = Curve(tuple(along * q for q in curve.flows), tuple(above * p for p in curve.values))
        header = self._header()
        return whole, PumpData(
            rated_flow=None if flow is None else along * ratio * flow,
            rated_pressure=None if pressure is None else above * ratio**2 * pressure,
            count=count,
            arrangement=arrangement,
            speed_ratio=ratio,
            from_limits=self.table.curve_from_limits,
            test_flows=header[0],
            test_losses=header[1],
        )

    def _curve(
        self, points: tuple[Sequence[float], Sequence[float]], flow: float | None, pressure: float | None
    ) -> Curve | None:
        churn, overload = self._si("churn_pressure"), self._si("pressure_at_150")
        stated = churn is not None or overload is not None
        ways = [
            name
            for name, used in (
                ("curve", self.table.curve is not None),
                ("churn_pressure, pressure_at_150", stated),
                ("curve_from_limits", self.table.curve_from_limits),
            )
            if used
        ]
        if len(ways) > 1:
            self._fault("", "its curve is given more than once", found=listed(ways), allowed="one of them")
            return None
        if points[0]:
            return self._through(points)
        if self.table.curve is not None or flow is None or pressure is None:
            self._fault("curve", "is missing: a pump needs its curve", allowed=_WAYS)
            return None
        if self.table.curve_from_limits:
            return self._limits(flow, pressure)
        if churn is None or overload is None:
            self._unbounded(stated)
            return None
        if not churn >= pressure >= overload:
            self._fault(
                "churn_pressure",
                "the pressure of a pump rises with the flow",
                found=f"{self._text(churn)} at no flow, {self._text(pressure)} at rated flow, "
                f"{self._text(overload)} at 150 %",
                allowed="pressures that fall or stay",
            )
            return None
        return rated_pump_curve(flow=flow, pressure=pressure, churn=churn, overload=overload)

    def _text(self, pressure: float) -> str:
        return self.units.text(pressure, "pressure")

    def _unbounded(self, stated: bool) -> None:
        if stated:
            missing = "pressure_at_150" if self.table.pressure_at_150 is None else "churn_pressure"
            self._fault(missing, "is missing: the curve needs churn and the point at 150 % flow")
            return
        self._fault(
            "curve",
            "is missing: a rated point with the limits of the standard bounds a curve, it is none",
            allowed=_WAYS,
            remedy="what does the pump give at no flow and at 150 % of rated flow? Before a pump is "
            "chosen, curve_from_limits = true takes the weakest one that the rating allows",
        )

    def _limits(self, flow: float, pressure: float) -> Curve:
        self.notes.add(
            f"device.{self.tag}.curve",
            f"{self._text(HIGHEST_CHURN * pressure)} at no flow, {self._text(pressure)} at "
            f"{self.units.text(flow, 'flow')}, {self._text(LOWEST_OVERLOAD * pressure)} at "
            f"{self.units.text(OVERLOAD_FLOW * flow, 'flow')}",
            "assumed",
            "limits of NFPA 20 (140 % at no flow, 65 % at 150 % flow); not the curve of a pump",
        )
        return limiting_pump_curve(flow=flow, pressure=pressure)

    def _through(self, points: tuple[Sequence[float], Sequence[float]]) -> Curve | None:
        flows, values = points
        wrong = (
            len(flows) < 2
            or any(after <= before for before, after in pairwise(flows))
            or any(after > before for before, after in pairwise(values))
            or not all(math.isfinite(number) and number >= 0.0 for number in (*flows, *values))
        )
        if wrong:  # noted where the points were read
            return None
        if flows[0] != 0.0:
            self._fault(
                "curve",
                "does not start at no flow: churn, the highest pressure of the pump, is not known",
                found=self.units.text(flows[0], "flow"),
                allowed="a first point [0, churn]",
            )
            return None
        return Curve(tuple(flows), tuple(values))

    def _speed(self) -> float:
        speed, rated = self._si("speed"), self._si("rated_speed")
        if (speed is None) != (rated is None):
            missing = "rated_speed" if rated is None else "speed"
            self._fault(missing, "is missing: a change of speed needs both speed and rated_speed")
        if speed is None or rated is None or speed == rated:
            return 1.0
        self.notes.add(
            f"device.{self.tag}.speed",
            f"{speed:g} for a curve at {rated:g}: flows × {speed / rated:.4f}, "
            f"pressures × {(speed / rated) ** 2:.4f}",
            "inferred",
            "affinity laws",
        )
        return speed / rated

    def _arrangement(self) -> Literal["single", "parallel", "series"]:
        if self.table.count > 1 and self.table.arrangement is None:
            self._fault(
                "arrangement",
                "is missing: there is more than one pump",
                found=f"count = {self.table.count}",
                allowed="parallel, series",
            )
        if self.table.count == 1 and self.table.arrangement is not None:
            self._fault("count", "is missing: one pump has no arrangement", allowed="2 or more")
        return self.table.arrangement or "single"

    def _header(self) -> tuple[tuple[float, ...], tuple[float, ...]]:
        points = self.table.test_header or []
        flows = tuple(self.units.to_si(point[0], "flow") for point in points)
        losses = tuple(self.units.to_si(point[1], "pressure") for point in points)
        try:
            if points:
                Curve(flows, losses)
            if any(number < 0.0 for number in (*flows, *losses)):
                raise DomainError("a flow or a loss is negative")
        except DomainError as caught:
            self._fault(
                "test_header", str(caught), allowed="points [flow, loss], flows rising from zero up"
            )
            return (), ()
        return flows, losses
