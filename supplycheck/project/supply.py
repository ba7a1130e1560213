"""Flow tests, tanks, adjustments and the margin rule: from the user's tables to records."""

from __future__ import annotations

import datetime as dt
import math

from supplycheck.model import Adjustment, FlowTest, Supply, Tank, TestPoint
from supplycheck.project.drafts import Notes
from supplycheck.project.faults import FaultList, listed, quoted
from supplycheck.project.grade import GradeReader
from supplycheck.project.layout_parts import units_in
from supplycheck.project.margin import read_margin
from supplycheck.project.outlets import OutletReader, discharge
from supplycheck.project.plausible import (
    FARTHEST_GAUGE,
    FARTHEST_WATER,
    check_height,
    check_static,
    check_test_date,
)
from supplycheck.project.schema_supply import (
    FlowTestTable,
    SupplyTable,
    TankTable,
    TestPointTable,
)
from supplycheck.project.sections import Sections
from supplycheck.project.tags import TagCheck
from supplycheck.units import UNIT_SETS, UnitSet


class SupplyReader:
    """Assembles the supply of one project."""

    def __init__(
        self,
        sections: Sections,
        table: SupplyTable,
        tags: TagCheck,
        notes: Notes,
        faults: FaultList,
        unit_weight: float,
    ) -> None:
        self.sections, self.table, self.tags = sections, table, tags
        self.notes, self.faults = notes, faults
        self.outlets = OutletReader(sections, notes, faults)
        self.grade = GradeReader(sections.file, unit_weight, notes, faults)
        self.units = units_in(table, UNIT_SETS[sections.units])
        self.supply_nodes = [node.tag for node in tags.nodes.values() if node.kind == "supply"]

    def _fault(
        self, where: str, problem: str, *, found: str = "", allowed: str = "", remedy: str = ""
    ) -> None:
        self.faults.add(self.sections.place(where), problem, found=found, allowed=allowed, remedy=remedy)

    def _node(self, given: str | None, where: str) -> str:
        """Return the node at which a test applies."""
        tag = given or self.table.node
        if tag is not None:
            self.tags.node(tag, where if given else "supply.node")
            node = self.tags.nodes.get(tag)
            if node is not None and node.kind != "supply":
                self._fault(
                    where if given else "supply.node",
                    "is not a supply node",
                    found=f"{tag}, a {node.kind}",
                    allowed=listed(self.supply_nodes) or "a node of kind supply",
                )
            return tag
        if len(self.supply_nodes) > 1:
            self._fault(
                where, "is missing: there are several supply nodes", allowed=listed(self.supply_nodes)
            )
        return self.supply_nodes[0] if self.supply_nodes else ""

    def _point(self, table: TestPointTable | FlowTestTable, where: str, units: UnitSet) -> TestPoint | None:
        units = units_in(table, units)
        if table.residual is None:
            return None
        if (table.flow is None) == (not table.outlets):
            both = table.flow is not None
            self._fault(
                f"{where}.flow",
                "flow and outlets are both given" if both else "is missing",
                allowed="either flow, or outlets with their pitot readings",
            )
            return None
        outlets = [
            self.outlets.read(outlet, f"{where}.outlets[{number}]", units)
            for number, outlet in enumerate(table.outlets, start=1)
        ]
        sound = tuple(outlet for outlet in outlets if outlet is not None)
        flow = (
            table.flow.si(units) if table.flow is not None else sum(discharge(outlet) for outlet in sound)
        )
        return TestPoint(table.residual.si(units), flow, sound)

    def _points(self, table: FlowTestTable, where: str, units: UnitSet) -> tuple[TestPoint, ...]:
        if table.points and (table.residual is not None or table.flow is not None or table.outlets):
            self._fault(
                f"{where}.points",
                "points and a single reading are both given",
                allowed="either residual with flow or outlets, or points",
            )
        elif not table.points and table.residual is None:
            self._fault(
                f"{where}.residual", "is missing", allowed="the pressure at the gauge while water flows"
            )
        if table.points:
            found = [
                self._point(point, f"{where}.points[{number}]", units)
                for number, point in enumerate(table.points, start=1)
            ]
        else:
            found = [self._point(table, where, units)]
        return tuple(sorted((point for point in found if point is not None), key=lambda point: point.flow))

    def _check_drop(self, table: FlowTestTable, where: str, units: UnitSet) -> None:
        static = table.static.si(units) if table.static else math.nan
        readings = [(f"{where}.residual", table.residual, units)] + [
            (f"{where}.points[{number}].residual", point.residual, units_in(point, units))
            for number, point in enumerate(table.points, start=1)
        ]
        for place, residual, local in readings:
            if residual is not None and residual.si(local) >= static:
                self._fault(
                    place,
                    "is not below the static pressure",
                    found=units.text(residual.si(local), "pressure"),
                    allowed=f"less than the static of {units.text(static, 'pressure')}",
                    remedy="check whether static and residual are exchanged",
                )

    def _check_pitots(self, table: FlowTestTable, where: str, units: UnitSet) -> None:
        """Note pitot readings above the static pressure: no stream is stronger than the main at rest."""
        static = table.static.si(units) if table.static else math.nan
        lists = [(where, table.outlets, units)] + [
            (f"{where}.points[{number}]", point.outlets, units_in(point, units))
            for number, point in enumerate(table.points, start=1)
        ]
        for base, outlets, local in lists:
            for number, outlet in enumerate(outlets, start=1):
                pitot = outlet.pitot.si(units_in(outlet, local))
                if pitot > static:
                    self._fault(
                        f"{base}.outlets[{number}].pitot",
                        "is above the static pressure",
                        found=units.text(pitot, "pressure"),
                        allowed=f"at most the static of {units.text(static, 'pressure')}",
                        remedy="check the readings, the decimal point and the units",
                    )

    def _check_plausible(
        self, table: FlowTestTable, where: str, units: UnitSet, elevation: float | None
    ) -> None:
        """Note a static, a gauge or a date that no test has; ``elevation`` [m] is that of its node."""
        place = self.sections.place
        key = "static" if table.hgl_high is None else "hgl_high"
        if table.static is not None:
            check_static(table.static.si(units), units, place(f"{where}.{key}"), self.faults)
        if table.gauge_elevation is not None and elevation is not None:
            height = table.gauge_elevation.si(units) - elevation
            gauge = place(f"{where}.gauge_elevation")
            check_height(height, FARTHEST_GAUGE, "its node", units, gauge, self.faults)
        check_test_date(table.date, self._latest(), place(f"{where}.date"), self.faults)

    def _latest(self) -> dt.date | None:
        """Return the later of the date of the project and the day of submittal, where both can be read."""
        facts, days = self.sections.project, [self.table.submittal_date]
        keys = ("project", "project.date", "supply.submittal_date")
        if facts is None or any(self.faults.sealed(self.sections.place(key)) for key in keys):
            return None
        return max(day for day in (facts.date, *days) if day is not None)

    def _test(self, number: int, table: FlowTestTable) -> FlowTest:
        where = f"supply.flow_test[{number}]" if self.sections.tests_listed else "supply.flow_test"
        units = units_in(table, self.units)
        node = self._node(table.node, f"{where}.node")
        at = self.tags.nodes.get(node)
        table = self.grade.read(table, where, units, None if at is None else at.elevation)
        static, gauge = table.static, table.gauge_elevation
        if static is None or gauge is None:  # the grade reader has filled both
            raise AssertionError
        self._check_drop(table, where, units)
        self._check_pitots(table, where, units)
        self._check_plausible(table, where, units, None if at is None else at.elevation)
        points = self._points(table, where, units)
        return FlowTest(
            tag=table.tag or f"test {number}",
            node=node,
            date=table.date,
            static=static.si(units),
            points=points,
            gauge_elevation=gauge.si(units),
            time=table.time,
            static_hydrant=table.static_hydrant,
            flow_hydrant=table.flow_hydrant,
            conducted_by=table.conducted_by,
            witnessed_by=table.witnessed_by,
            main=table.main,
            gauge_range=table.gauge_range.si(units) if table.gauge_range else None,
            gauge_accuracy=table.gauge_accuracy.si(units) if table.gauge_accuracy else None,
            gauge_calibrated=table.gauge_calibrated,
            outlet_diameter_measured=table.outlet_diameter_measured,
            model=table.model,
            source=table.source,
            place=self.sections.place(where),
        )

    def _tank(self, number: int, table: TankTable) -> Tank:
        where = f"supply.tank[{number}]"
        units = units_in(table, self.units)
        level = table.water_level.si(units)
        node = self._node(table.node, f"{where}.node")
        at = self.tags.nodes.get(node)
        if at is not None:
            height, place = level - at.elevation, self.sections.place(f"{where}.water_level")
            check_height(height, FARTHEST_WATER, "its node", units, place, self.faults)
        low = table.low_level.si(units) if table.low_level else None
        if low is not None and low > level:
            self._fault(
                f"{where}.low_level",
                "lies above the water level",
                found=units.text(low, "length"),
                allowed=f"at most {units.text(level, 'length')}",
            )
        if low is None and table.kind in ("suction", "break"):
            self.notes.add(
                f"{where}.low_level", units.text(level, "length"), "assumed", "water_level is the lowest"
            )
        return Tank(
            tag=table.tag,
            node=node,
            water_level=level,
            volume=table.volume.si(units) if table.volume else None,
            refill=table.refill.si(units) if table.refill else 0.0,
            kind=table.kind,
            place=self.sections.place(where),
            low_level=low,
        )

    def _adjustments(self) -> tuple[Adjustment, ...]:
        found = []
        for number, table in enumerate(self.table.adjustment, start=1):
            where = f"supply.adjustment[{number}]"
            units = units_in(table, self.units)
            key = "percent" if table.kind == "percent" else "pressure"
            other = "pressure" if key == "percent" else "percent"
            if getattr(table, key) is None:
                self._fault(f"{where}.{key}", f"is missing: the kind {quoted(table.kind)} needs it")
            if getattr(table, other) is not None:
                self._fault(
                    f"{where}.{other}",
                    f"the kind {quoted(table.kind)} does not use it",
                    remedy="take it out",
                )
            percent = table.percent.si(units) if table.percent else 0.0
            if percent >= 1:
                self._fault(
                    f"{where}.percent",
                    "is 100 or more",
                    found=f"{percent * 100:g}",
                    allowed="less than 100",
                )
            pressure = table.pressure.si(units) if table.pressure else 0.0
            found.append(Adjustment(table.kind, pressure, 1.0 - percent, table.reason))
        return tuple(found)

    def read(self) -> Supply:
        """Return the supply. With faults noted it is not fit for use."""
        table = self.table
        if (
            not table.flow_test
            and not table.tank
            and not self.faults.touched(self.sections.place("supply.flow_test"))
        ):
            self._fault(
                "supply.flow_test",
                "there is neither a flow test nor a tank",
                allowed="a table [supply.flow_test] with static, residual, flow, date and gauge_elevation",
            )
        tests = tuple(self._test(number, test) for number, test in enumerate(table.flow_test, start=1))
        tanks = tuple(self._tank(number, tank) for number, tank in enumerate(table.tank, start=1))
        for what, tags in (
            ("flow_test", [test.tag for test in tests]),
            ("tank", [tank.tag for tank in tanks]),
        ):
            for tag in {tag for tag in tags if tags.count(tag) > 1}:
                self._fault(
                    f"supply.{what}", "a tag stands twice", found=quoted(tag), allowed="every tag once"
                )
        margin = read_margin(table.margin, "supply.margin", self.sections, self.units, self.faults)
        return Supply(
            tests=tests,
            tanks=tanks,
            adjustments=self._adjustments(),
            margin=margin,
            compare_at=self._compare_at(),
            maximum_test_age_months=table.maximum_test_age_months.number
            if table.maximum_test_age_months
            else None,
            submittal_date=table.submittal_date,
            main_floor_pressure=table.main_floor_pressure.si(self.units)
            if table.main_floor_pressure
            else None,
        )

    def _compare_at(self) -> str:
        tag = self.table.compare_at
        if tag is not None:
            self.tags.node(tag, "supply.compare_at")
            return tag
        tag = self.table.node or (self.supply_nodes[0] if self.supply_nodes else "")
        self.notes.add("supply.compare_at", tag, "assumed", "the supply node")
        return tag
