"""Values of a utility's model given as hydraulic grade lines, and what a test must state."""

from __future__ import annotations

import math
from typing import Final

from supplycheck.findings import Place
from supplycheck.project.drafts import Notes
from supplycheck.project.faults import FaultList, listed
from supplycheck.project.quantity import Written
from supplycheck.project.schema_supply import FlowTestTable
from supplycheck.units import UnitSet, find_unit

_PASCAL: Final = find_unit("Pa")
_METRE: Final = find_unit("m")


class GradeReader:
    """Turns grade lines into static and residual at the node; notes what a test leaves out."""

    def __init__(self, file: str, unit_weight: float, notes: Notes, faults: FaultList) -> None:
        self.file, self.unit_weight = file, unit_weight
        self.notes, self.faults = notes, faults

    def _fault(self, where: str, problem: str, *, found: str = "", allowed: str = "") -> None:
        self.faults.add(Place(self.file, where), problem, found=found, allowed=allowed)

    def read(
        self, table: FlowTestTable, where: str, units: UnitSet, elevation: float | None
    ) -> FlowTestTable:
        """Return ``table`` with static, residual and gauge elevation; ``elevation`` [m] is of its node.

        What is missing is noted and stands as NaN.
        """
        if table.hgl_high is None and table.hgl_low is None:
            return self._stated(table, where)
        given = [key for key in ("static", "residual", "outlets", "points") if getattr(table, key)]
        for key in given:
            self._fault(
                f"{where}.{key}",
                "hydraulic grade lines and readings are both given",
                found=listed(given),
                allowed="hgl_high and hgl_low with flow, or static and residual",
            )
        questions = (
            ("hgl_high", "is missing: where does the grade line lie when nothing is drawn?"),
            ("hgl_low", "is missing: where does the grade line lie at the flow?"),
            ("flow", "is missing: at which flow does the model give hgl_low? A grade that holds at every "
             'flow is a reservoir, [[supply.tank]] with kind = "reservoir"'),
        )  # fmt: skip
        for key, problem in questions:
            if getattr(table, key) is None:
                self._fault(f"{where}.{key}", problem)
        gauge = table.gauge_elevation.si(units) if table.gauge_elevation else elevation
        gauge = math.nan if gauge is None else gauge
        static = self._pressure(table.hgl_high, units, gauge)
        residual = self._pressure(table.hgl_low, units, gauge)
        for key, value in (("hgl_high", static), ("hgl_low", residual)):
            if value < 0.0 and getattr(table, key) is not None:
                level = units.text(gauge, "length")
                self._fault(f"{where}.{key}", "lies below the node", allowed=f"an elevation above {level}")
        if residual >= static:
            self._fault(f"{where}.hgl_low", "is not below hgl_high", allowed="less than hgl_high")
            residual = math.nan
        self.notes.add(
            f"{where}.static",
            f"{units.text(static, 'pressure')}; residual {units.text(residual, 'pressure')}",
            "inferred",
            f"hydraulic grade lines of the utility's model above {units.text(gauge, 'length')}",
        )
        return table.model_copy(
            update={
                "static": Written(static, "pressure", _PASCAL),
                "residual": Written(residual, "pressure", _PASCAL),
                "gauge_elevation": Written(gauge, "length", _METRE),
                "model": True,
                "points": [],
                "outlets": [],
            }
        )

    def _pressure(self, level: Written | None, units: UnitSet, gauge: float) -> float:
        return math.nan if level is None else self.unit_weight * (level.si(units) - gauge)

    def _stated(self, table: FlowTestTable, where: str) -> FlowTestTable:
        needs = (
            ("static", "pressure", "the pressure at the gauge before water flows, or hgl_high"),
            ("gauge_elevation", "length", "the elevation of the gauge, from the same datum as the system"),
        )
        update = {}
        for key, kind, allowed in needs:
            if getattr(table, key) is None:
                self._fault(f"{where}.{key}", "is missing", allowed=allowed)
                update[key] = Written(math.nan, kind)
        return table.model_copy(update=update) if update else table
