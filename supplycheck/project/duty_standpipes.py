"""Standpipes: from the user's tables to the record."""

from __future__ import annotations

from collections.abc import Sequence
from itertools import pairwise
from typing import Final

from supplycheck.model.duty import RegulatingDevice, Riser, StandpipeDuty, StandpipeOutlet
from supplycheck.project.duty import DutyReader
from supplycheck.project.faults import listed, near, quoted
from supplycheck.project.layout_parts import units_in
from supplycheck.project.quantity import Written
from supplycheck.project.schema_duty import RegulatingTable, RiserTable, StandpipeTable
from supplycheck.units import GPM, INCH, PSI, UnitSet

OUTLET_FLOW: Final = 250 * GPM
HORIZONTAL_FLOW: Final = 750 * GPM
GREATEST_SPRINKLERED, GREATEST_OTHER = 1000 * GPM, 1250 * GPM
NFPA_14_FLOWS: Final = "NFPA 14, published training notes"
OUTLET_SIZE: Final = 2.5 * INCH
SMALL_OUTLET: Final = 1.5 * INCH
PRESSURE_LARGE, PRESSURE_SMALL = 100 * PSI, 65 * PSI
NFPA_14_PRESSURES: Final = "NFPA 14, 100 psi at 2½ in and 65 psi at 1½ in (scribd 309093880)"
REGULATING: Final = 175 * PSI


class StandpipeReader(DutyReader):
    """Assembles the standpipes of one project."""

    def read(self, table: StandpipeTable) -> StandpipeDuty:
        """Return the duty. With faults noted it is not fit for use."""
        units = units_in(table, self.base)
        devices = tuple(
            self._device(one, f"standpipe.regulating[{number}]", units)
            for number, one in enumerate(table.regulating, start=1)
        )
        at = self._devices_at(table)
        risers = tuple(
            self._riser(one, f"standpipe.riser[{number}]", units, at)
            for number, one in enumerate(table.riser, start=1)
        )
        self.once((riser.tag for riser in risers), "standpipe.riser", "standpipe")
        nodes = [outlet.node for riser in risers for outlet in riser.outlets]
        self.once(nodes, "standpipe.riser", "outlet")
        for tag in at:
            if tag not in nodes:
                close = near(tag, nodes)
                remedy = f"did you mean {close}?" if close else ""
                self.fault(
                    "standpipe.regulating",
                    "is no outlet of a standpipe",
                    quoted(tag),
                    listed(nodes),
                    remedy,
                )
        if table.connection is not None:
            self.tags.node(table.connection, "standpipe.connection")
        most = GREATEST_SPRINKLERED if table.sprinklered else GREATEST_OTHER
        source = NFPA_14_FLOWS
        duty = StandpipeDuty(
            risers=risers,
            sprinklered=table.sprinklered,
            outlet_flow=self.value(
                table.outlet_flow, OUTLET_FLOW, units, ("standpipe.outlet_flow", "flow"), source
            ),
            greatest_flow=self.value(
                table.greatest_flow, most, units, ("standpipe.greatest_flow", "flow"), source
            ),
            horizontal_flow=self._horizontal_flow(table, units),
            regulating_pressure=self.value(
                table.regulating_pressure,
                REGULATING,
                units,
                ("standpipe.regulating_pressure", "pressure"),
                "NFPA 14, from memory, not verified",
            ),
            devices=devices,
            connection=table.connection,
            added_flows=self.flows(table.added_flows, "standpipe.added_flows", units),
            counts=tuple(table.counts),
            source=table.source or source,
            place=self.sheet.place("standpipe"),
        )
        self._check_least(duty)
        return duty

    def _check_least(self, duty: StandpipeDuty) -> None:
        most = max((min(2, len(riser.outlets)) for riser in duty.risers), default=1)
        least = duty.outlet_flow * most
        if duty.greatest_flow < least * (1 - 1e-9):
            self.fault(
                "standpipe.greatest_flow",
                "is less than the most remote standpipe gives by itself",
                self.base.text(duty.greatest_flow, "flow"),
                f"at least {self.base.text(least, 'flow')}",
            )

    def _horizontal_flow(self, table: StandpipeTable, units: UnitSet) -> float:
        if table.horizontal_flow is not None or not any(riser.horizontal for riser in table.riser):
            return table.horizontal_flow.si(units) if table.horizontal_flow else HORIZONTAL_FLOW
        name = ("standpipe.horizontal_flow", "flow")
        return self.value(None, HORIZONTAL_FLOW, units, name, NFPA_14_FLOWS)

    def _devices_at(self, table: StandpipeTable) -> dict[str, str]:
        self.once((one.tag for one in table.regulating), "standpipe.regulating", "device")
        pairs = [(node, one.tag) for one in table.regulating for node in one.outlets]
        self.once((node for node, _ in pairs), "standpipe.regulating", "outlet")
        return dict(pairs)

    def _device(self, table: RegulatingTable, where: str, around: UnitSet) -> RegulatingDevice:
        units = units_in(table, around)
        flowing = self._rows(table.flowing, f"{where}.flowing", units)
        static = self._rows(table.static, f"{where}.static", units)
        if not table.source.strip():
            self.fault(f"{where}.source", "is empty", allowed="the data sheet of the maker")
        return RegulatingDevice(
            table.tag, *flowing, *static, source=table.source, place=self.sheet.place(where)
        )

    def _rows(
        self, rows: Sequence[Sequence[Written]], where: str, units: UnitSet
    ) -> tuple[tuple[float, ...], tuple[float, ...]]:
        if any(len(row) != 2 for row in rows):
            self.fault(where, "a row does not hold two pressures", allowed="[inlet, outlet] in each row")
            return (), ()
        inlet = tuple(row[0].si(units) for row in rows)
        outlet = tuple(row[1].si(units) for row in rows)
        if any(after <= before for before, after in pairwise(inlet)):
            self.fault(where, "the inlet pressures do not rise", allowed="every inlet once, rising")
        if any(after < before for before, after in pairwise(outlet)):
            self.fault(where, "the outlet pressure falls", allowed="outlets that rise with the inlet")
        for before, after in zip(inlet, outlet, strict=True):
            if after > before:
                self.fault(
                    where,
                    "the outlet pressure is above its inlet pressure",
                    f"{units.text(after, 'pressure')} from {units.text(before, 'pressure')}",
                    remedy="check whether inlet and outlet are exchanged",
                )
        return inlet, outlet

    def _riser(self, table: RiserTable, where: str, around: UnitSet, at: dict[str, str]) -> Riser:
        units = units_in(table, around)
        size = OUTLET_SIZE if table.size is None else table.size.si(units)
        if table.size is None:
            self.notes.add(
                f"{where}.size", self.base.text(size, "size"), "assumed", "the usual hose outlet"
            )
        small = size <= SMALL_OUTLET * (1 + 1e-6)
        if table.pressure is None and not small and abs(size - OUTLET_SIZE) > 0.05 * OUTLET_SIZE:
            self.fault(
                f"{where}.pressure",
                "is missing: NFPA 14 names 2½ in and 1½ in outlets only",
                allowed="the pressure that an outlet of this size needs",
            )
        default = PRESSURE_SMALL if small else PRESSURE_LARGE
        pressure = self.value(
            table.pressure, default, units, (f"{where}.pressure", "pressure"), NFPA_14_PRESSURES
        )
        for tag in table.outlets:
            self.outlet(tag, f"{where}.outlets")
        outlets = tuple(StandpipeOutlet(tag, size, pressure, at.get(tag)) for tag in table.outlets)
        return Riser(table.tag, outlets, table.horizontal, self.sheet.place(where))
