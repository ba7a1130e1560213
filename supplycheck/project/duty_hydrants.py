"""Fire flow and private hydrants: from the user's tables to the record."""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import Final

from supplycheck import catalogue
from supplycheck.catalogue import ReductionRow
from supplycheck.errors import DomainError, NotInCatalogueError
from supplycheck.model import System
from supplycheck.model.duty import FireFlow, Hydrant, HydrantDuty
from supplycheck.project.duty import DutyReader
from supplycheck.project.faults import listed, quoted
from supplycheck.project.layout_parts import units_in
from supplycheck.project.schema_duty import FireFlowTable, HydrantTable
from supplycheck.units import PSI, UnitSet

RESIDUAL: Final = 20 * PSI


class HydrantReader(DutyReader):
    """Assembles the private hydrants of one project."""

    def read(
        self,
        table: FireFlowTable,
        hydrants: Sequence[tuple[int, HydrantTable]],
        system: System | None,
        *,
        sprinklers: bool,
    ) -> HydrantDuty | None:
        """Return the duty; ``None`` with faults noted. ``sprinklers``: the project has some."""
        units = units_in(table, self.base)
        found = tuple(self._hydrant(one, f"hydrant[{number}]", system) for number, one in hydrants)
        self.once((one.tag for one in found), "hydrant", "hydrant")
        self.once((one.node for one in found), "hydrant", "node of a hydrant")
        if not found:
            self.fault("hydrant", "there is no hydrant", allowed="at least one table [[hydrant]]")
        fire_flow = self._fire_flow(table, units)
        self.tags.pipes_named(table.valves, "fire_flow.valves")
        self.once(table.valves, "fire_flow.valves", "pipe")
        maximum_day = self.flows(table.maximum_day, "fire_flow.maximum_day", units)
        if fire_flow is None or not found:
            return None
        each = table.greatest_each.si(units) if table.greatest_each else fire_flow.flow
        if table.greatest_each is None:
            self.notes.add(
                "fire_flow.greatest_each", self.base.text(each, "flow"), "assumed", "the whole fire flow"
            )
        at_once = self._at_once(table, fire_flow, len(found))
        if at_once * each < fire_flow.flow * (1 - 1e-9):
            self.fault(
                "fire_flow.greatest_each",
                f"{at_once} hydrants of so much do not make up the fire flow",
                self.base.text(each, "flow"),
                f"at least {self.base.text(fire_flow.flow / at_once, 'flow')}",
                "raise it, or hydrants_at_once",
            )
        self._check_curves(hydrants, system, min(fire_flow.flow / at_once, each))
        self._note_counts(table, sprinklers=sprinklers)
        asked = catalogue.hydrant_spacing(fire_flow.flow)
        name = ("fire_flow.residual", "pressure")
        source = "IFC appendix B (2012): flow at 20 psi residual; practice of utilities"
        return HydrantDuty(
            hydrants=found,
            fire_flow=fire_flow,
            at_once=at_once,
            greatest_each=each,
            residual=self.value(table.residual, RESIDUAL, units, name, source),
            highest_point=self._highest(table, system),
            valves=tuple(table.valves),
            maximum_day=maximum_day,
            counts=tuple(table.counts),
            place=self.sheet.place("fire_flow"),
            hydrants_asked=asked.hydrants,
            asked_source=asked.source,
        )

    def _hydrant(self, table: HydrantTable, where: str, system: System | None) -> Hydrant:
        self.outlet(table.node, f"{where}.node")
        known = {device.tag: device for device in system.devices} if system else {}
        if table.device is not None and system is not None:
            device = known.get(table.device)
            if device is None or device.kind != "loss" or not device.flows:
                self.fault(
                    f"{where}.device",
                    "is not a device with a loss",
                    quoted(table.device),
                    listed(tag for tag, one in known.items() if one.kind == "loss")
                    or "a table [device.NAME] with curve or loss",
                )
        return Hydrant(table.tag, table.node, table.device, table.location, self.sheet.place(where))

    def _check_curves(
        self, hydrants: Sequence[tuple[int, HydrantTable]], system: System | None, share: float
    ) -> None:
        """Note devices whose curve ends before the ``share`` of a hydrant [m³/s]."""
        known = {device.tag: device for device in system.devices} if system else {}
        for number, table in hydrants:
            device = known.get(table.device or "")
            if device is not None and len(device.flows) > 1 and share > device.flows[-1] * (1 + 1e-9):
                self.fault(
                    f"hydrant[{number}].device",
                    f"the curve of {device.tag} ends before the share of this hydrant in the fire flow",
                    self.base.text(device.flows[-1], "flow"),
                    f"a curve up to {self.base.text(share, 'flow')}",
                )

    def _note_counts(self, table: FireFlowTable, *, sprinklers: bool) -> None:
        if "counts" in table.model_fields_set:
            return
        left = [
            kind
            for kind, there in (("with sprinklers", sprinklers), ("valve shut", bool(table.valves)))
            if there
        ]
        if left:
            text = f"cases {' and '.join(left)} are listed, the verdict does not rest on them"
            self.notes.add("fire_flow.counts", text, "assumed", "common practice, no source")

    def _at_once(self, table: FireFlowTable, fire_flow: FireFlow, there: int) -> int:
        if table.hydrants_at_once is not None:
            if table.hydrants_at_once > there:
                self.fault(
                    "fire_flow.hydrants_at_once",
                    "is more than there are hydrants",
                    str(table.hydrants_at_once),
                    f"at most {there}",
                )
            return min(table.hydrants_at_once, there)
        row = catalogue.hydrant_spacing(fire_flow.flow)
        number = min(row.hydrants, there)
        text = str(number) if number == row.hydrants else f"{number}, all there are of {row.hydrants} asked"
        self.notes.add("fire_flow.hydrants_at_once", text, "catalogue", row.source)
        return number

    def _highest(self, table: FireFlowTable, system: System | None) -> str | None:
        if table.highest_point is not None:
            self.tags.node(table.highest_point, "fire_flow.highest_point")
            return table.highest_point
        if system is None:
            return None
        buried = {
            tag for pipe in system.pipes if pipe.role == "underground" for tag in (pipe.start, pipe.end)
        }
        nodes = [
            node
            for node in system.nodes
            if node.kind != "supply" and node.tag in buried and math.isfinite(node.elevation)
        ]
        if not nodes:
            self.notes.add("fire_flow.highest_point", "none", "assumed", "no pipe has the role underground")
            return None
        top = max(nodes, key=lambda node: node.elevation)
        text = f"{top.tag}, at {self.base.text(top.elevation, 'length')}"
        self.notes.add("fire_flow.highest_point", text, "assumed", "highest node of the underground pipes")
        return top.tag

    def _fire_flow(self, table: FireFlowTable, units: UnitSet) -> FireFlow | None:
        duration = table.duration.si(units) if table.duration else None
        if table.flow is not None:
            own = [
                key
                for key in ("construction", "area", "edition", "sprinklered", "reduction")
                if key in table.model_fields_set
            ]
            if own:
                self.fault(
                    f"fire_flow.{own[0]}",
                    "stands beside a flow that is given",
                    allowed="either flow, or construction and area with what belongs to them",
                )
            return FireFlow(table.flow.si(units), duration, "given", table.source or "given in the project")
        missing = [
            key
            for key in ("area", "edition", "sprinklered")
            if getattr(table, key) is None and not self.faults.touched(self.sheet.place(f"fire_flow.{key}"))
        ]
        if not table.construction.strip() and not table.dwelling:
            missing.insert(0, "construction")
        for key in missing:
            self.fault(
                f"fire_flow.{key}",
                "is missing",
                allowed="flow; or construction, area, edition, sprinklered",
            )
        if missing or table.area is None or table.edition is None:
            return None
        area = table.area.si(units)
        return None if math.isnan(area) else self._from_table(table, area, table.edition, duration, units)

    def _from_table(
        self, table: FireFlowTable, area: float, edition: int, duration: float | None, units: UnitSet
    ) -> FireFlow | None:
        """Return the flow of the table, less the reduction of the edition for sprinklers."""
        try:
            flow, hours, source = self._row(table, area)
        except NotInCatalogueError as caught:
            beyond = str(caught).startswith("fire flow:")
            self.fault(
                "fire_flow.area" if beyond else "fire_flow.construction",
                str(caught),
                self.base.text(area, "area") if beyond else quoted(table.construction),
                "" if beyond else listed(catalogue.construction_types()),
            )
            return None
        share, floor, asked = 0.0, None, flow
        if table.sprinklered:
            try:
                row = catalogue.fire_flow_reduction(edition, dwelling=table.dwelling)
            except (DomainError, NotInCatalogueError) as caught:
                self.fault("fire_flow.edition", str(caught), str(edition), "up to 2012, or 2015 and later")
                return None
            share, floor = self._reduction(table, row, units), row.floor
            asked = min(flow, max(flow * (1 - share), floor or 0.0))
            source = f"{source}; reduction: {row.source}"
        if duration is None:
            duration = hours
            self.notes.add("fire_flow.duration", self.base.text(hours, "time"), "catalogue", source)
        self.notes.add("fire_flow.flow", self.base.text(asked, "flow"), "catalogue", source)
        return FireFlow(
            flow=asked,
            duration=duration,
            origin="catalogue",
            source=source,
            construction=table.construction or "dwelling",
            area=area,
            edition=f"IFC ({edition})",
            table_flow=flow,
            reduction=share,
            floor=floor,
        )

    def _row(self, table: FireFlowTable, area: float) -> tuple[float, float, str]:
        """Return flow [m³/s], duration [s] and source before any reduction."""
        if table.dwelling and area <= catalogue.rule("fire flow, dwelling area", "IFC").value * (1 + 1e-9):
            flow = catalogue.rule("fire flow, dwelling", "IFC")
            return flow.value, catalogue.rule("fire flow duration, dwelling", "IFC").value, flow.source
        if not table.construction.strip():
            raise NotInCatalogueError("is missing: a dwelling so large is looked up by its construction")
        row = catalogue.fire_flow(area, table.construction)
        return row.flow, row.duration, row.source

    def _reduction(self, table: FireFlowTable, row: ReductionRow, units: UnitSet) -> float:
        if table.reduction is None:
            note = f"the most that the edition allows; {row.source}"
            self.notes.add("fire_flow.reduction", self.base.text(row.share, "percent"), "assumed", note)
            return row.share
        share = table.reduction.si(units)
        if share > row.share * (1 + 1e-9):
            self.fault(
                "fire_flow.reduction",
                "is more than the edition allows",
                self.base.text(share, "percent"),
                f"at most {self.base.text(row.share, 'percent')} ({row.source})",
            )
        return share
