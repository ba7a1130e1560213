"""Sprinkler types, kinds of pipe and devices: from the user's tables to records."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from itertools import pairwise

from supplycheck import catalogue
from supplycheck.catalogue import BoreRow, CFactorRow, ExtraRows, FittingRow
from supplycheck.errors import DomainError, NotInCatalogueError
from supplycheck.findings import Place
from supplycheck.model import Device, FrictionLaw, PipeKind, Sprinkler
from supplycheck.project.drafts import Notes
from supplycheck.project.faults import FaultList, listed, near, quoted
from supplycheck.project.layout_parts import units_in
from supplycheck.project.plausible import LARGEST_DIP, check_k_factor, check_roughness
from supplycheck.project.pumps import PUMP_KEYS, PumpReader
from supplycheck.project.schema_system import DeviceTable, PipeTable, SprinklerTable
from supplycheck.project.sections import Sections
from supplycheck.units import UNIT_SETS, UnitSet

OWN = "given in the project"


def read_extra(sections: Sections) -> ExtraRows:
    """Return the rows that the project adds to the catalogue."""
    table = sections.catalogue
    if table is None:
        return ExtraRows()
    around = units_in(table, UNIT_SETS[sections.units])
    return ExtraRows(
        bores=tuple(
            BoreRow(row.material, row.nominal, row.bore.si(units_in(row, around)), source=row.source)
            for row in table.bore
        ),
        c_factors=tuple(
            CFactorRow(row.material, row.c_factor.number, row.source) for row in table.c_factor
        ),
        fittings=tuple(
            FittingRow(row.fitting, row.nominal, row.length.si(units_in(row, around)), None, row.source)
            for row in table.fitting
        ),
    )


def _sprinkler(tag: str, table: SprinklerTable, units: UnitSet, notes: Notes) -> Sprinkler:
    area = table.coverage_area.si(units) if table.coverage_area else None
    if area is None and table.coverage:
        area = table.coverage[0].si(units) * table.coverage[1].si(units)
    if table.minimum_pressure is None:
        notes.add(
            f"sprinkler.{tag}.minimum_pressure",
            "none: only the lowest pressure of the standard counts",
            "assumed",
            "no pressure of the listing is given",
        )
    return Sprinkler(
        tag=tag,
        k_factor=table.k_factor.si(units),
        minimum_pressure=table.minimum_pressure.si(units) if table.minimum_pressure else 0.0,
        coverage_area=area,
        maximum_pressure=table.maximum_pressure.si(units) if table.maximum_pressure else None,
        response=table.response,
        temperature=table.temperature.si(units) if table.temperature else None,
        listing=table.listing,
    )


def read_sprinklers(sections: Sections, notes: Notes, faults: FaultList) -> dict[str, Sprinkler]:
    """Return the sprinkler types by name."""
    around = UNIT_SETS[sections.units]
    found = {}
    for tag, table in sections.sprinklers.items():
        if table.coverage and table.coverage_area:
            faults.add(
                sections.place(f"sprinkler.{tag}.coverage_area"),
                "coverage and coverage_area are both given",
                allowed="one of them",
            )
        units = units_in(table, around)
        found[tag] = _sprinkler(tag, table, units, notes)
        place = sections.place(f"sprinkler.{tag}.k_factor")
        check_k_factor(found[tag].k_factor, table.k_factor.units(units), place, faults)
    return found


@dataclass(frozen=True, slots=True)
class KindOfPipe:
    """A kind of pipe with the catalogue rows that hold for it; ``unknown`` with a fault noted."""

    record: PipeKind
    extra: ExtraRows
    unknown: bool = False


class KindReader:
    """Reads kinds of pipe under one standard, kind of system and choice of friction laws."""

    def __init__(
        self,
        sections: Sections,
        laws: tuple[FrictionLaw, ...],
        standard: str,
        extra: ExtraRows,
        notes: Notes,
        faults: FaultList,
    ) -> None:
        self.sections, self.standard, self.extra = sections, standard, extra
        self.notes, self.faults = notes, faults
        told = sections.criteria.system if sections.criteria else None
        self.system = told or "wet"
        self.untold = "" if told else ", that of wet pipes: no kind of system is given"
        families = {law.family for law in laws}
        self.needs_c = "hazen-williams" in families
        self.needs_roughness = "darcy-weisbach" in families

    def _c_factor(self, name: str, table: PipeTable) -> tuple[float | None, str]:
        if table.c_factor is not None:
            return table.c_factor.number, table.source or OWN
        try:
            row = catalogue.c_factor(table.material, self.system, self.standard, self.extra)
        except (NotInCatalogueError, DomainError) as caught:
            if self.needs_c and self.standard:
                self.faults.add(
                    self.sections.place(f"pipe.{name}.c_factor"),
                    str(caught),
                    found=f"material {quoted(table.material)}",
                    remedy="correct the material, or give c_factor",
                )
            return None, ""
        self.notes.add(f"pipe.{name}.c_factor", f"C {row.value:g}{self.untold}", "catalogue", row.source)
        return row.value, row.source

    def _roughness(self, name: str, table: PipeTable, units: UnitSet) -> tuple[float | None, str]:
        if table.roughness is not None:
            try:
                typical = catalogue.roughness(table.material).value
            except (NotInCatalogueError, DomainError):
                typical = None
            place = self.sections.place(f"pipe.{name}.roughness")
            check_roughness(table.roughness, units, typical, place, self.faults)
            return table.roughness.si(units), table.source or OWN
        if not self.needs_roughness:
            return None, ""
        try:
            row = catalogue.roughness(table.material)
        except (NotInCatalogueError, DomainError) as caught:
            self.faults.add(
                self.sections.place(f"pipe.{name}.roughness"),
                str(caught),
                found=f"material {quoted(table.material)}",
            )
            return None, ""
        text = units.text(row.value, "roughness")
        self.notes.add(f"pipe.{name}.roughness", text, "catalogue", row.source)
        return row.value, row.source

    def _own_rows(self, table: PipeTable, units: UnitSet) -> ExtraRows:
        own = tuple(
            BoreRow(table.material, nominal, bore.si(units), source=table.source or OWN)
            for nominal, bore in table.bores.items()
        )
        replaced = {catalogue.in_dn(row.nominal) for row in own}
        kept = tuple(
            row
            for row in self.extra.bores
            if catalogue.fold(row.material) != catalogue.fold(table.material)
            or catalogue.in_dn(row.nominal) not in replaced
        )
        return ExtraRows((*own, *kept), self.extra.c_factors, self.extra.fittings)

    def _is_unknown(self, name: str, table: PipeTable) -> bool:
        """Return whether the material says nothing: neither the catalogue nor the project knows it."""
        known = [text for row in catalogue.materials() for text in (row.name, *row.aliases)]
        wanted = catalogue.fold(table.material)
        if any(catalogue.fold(text) == wanted for text in known) or table.c_factor or table.roughness:
            return False
        names = list(dict.fromkeys(row.name for row in catalogue.materials() if row.size_unit))
        close = near(table.material, known)
        self.faults.add(
            self.sections.place(f"pipe.{name}.material"),
            "is not a material of the catalogue",
            found=quoted(table.material),
            allowed=listed(names, 40),
            remedy=f"did you mean {close}?" if close else "or give bores and c_factor",
        )
        return True

    def read(self, name: str, table: PipeTable) -> KindOfPipe:
        """Return the kind of pipe ``name``; a material without bores is noted where a size is asked."""
        units = units_in(table, UNIT_SETS[self.sections.units])
        extra = self._own_rows(table, units) if table.bores else self.extra
        try:
            rows = catalogue.bores(table.material, extra)
        except NotInCatalogueError:
            rows = ()
        if not rows and self._is_unknown(name, table):
            record = PipeKind(name, table.material, (), None, None, "", "", "")
            return KindOfPipe(record, extra, unknown=True)
        c_factor, c_source = self._c_factor(name, table)
        roughness, roughness_source = self._roughness(name, table, units)
        record = PipeKind(
            name=name,
            material=table.material,
            bores=tuple((row.nominal, row.bore) for row in rows),
            c_factor=c_factor,
            roughness=roughness,
            bore_source="; ".join(dict.fromkeys(row.source for row in rows)),
            c_source=c_source,
            roughness_source=roughness_source,
        )
        return KindOfPipe(record, extra)


@dataclass(frozen=True, slots=True)
class DeviceOrLength:
    """A device; ``equivalent_length`` [m] where it counts as length of pipe instead."""

    device: Device | None
    equivalent_length: float | None
    title: str
    source: str


def _curve(
    table: DeviceTable, units: UnitSet, place: Place, faults: FaultList
) -> tuple[tuple[float, ...], tuple[float, ...]]:
    points = table.curve or []
    flows = tuple(flow.si(units) for flow, _ in points)
    values = tuple(pressure.si(units) for _, pressure in points)
    if points and len(points) < 2:
        fixed = "" if table.kind == "pump" else "; a fixed loss is written loss = …"
        faults.add(place, "has one point", allowed=f"two points or more{fixed}")
    elif any(after <= before for before, after in pairwise(flows)):
        faults.add(
            place,
            "flows do not rise from point to point",
            found=_told(flows, "flow", units),
            allowed="each flow once, the smallest first",
        )
    elif table.kind == "pump" and any(after > before for before, after in pairwise(values)):
        faults.add(
            place,
            "the pressure of a pump rises with the flow",
            found=_told(values, "pressure", units),
            allowed="a pressure that falls or stays",
        )
    elif table.kind != "pump":
        _check_loss(values, units, place, faults)
    return flows, values


def _told(numbers: Sequence[float], kind: str, units: UnitSet) -> str:
    """Return the numbers of a curve [SI] in a row."""
    return f"{', '.join(units.number(number, kind) for number in numbers)} {units.symbol(kind)}"


def _check_loss(values: Sequence[float], units: UnitSet, place: Place, faults: FaultList) -> None:
    """Note a curve without any loss, and one whose loss falls by more than a valve's opening explains."""
    if values and not any(values):
        faults.add(
            place,
            "the loss is zero at every point",
            found=_told(values, "pressure", units),
            allowed="the losses of the maker",
            remedy="a device without loss is written loss = 0",
        )
    highest = 0.0
    for value in values:
        if value < (1 - LARGEST_DIP) * highest * (1 - 1e-9):
            faults.add(
                place,
                "the loss falls while the flow rises",
                found=_told(values, "pressure", units),
                allowed=f"no fall by more than {LARGEST_DIP:.0%} of the highest loss before it",
                remedy="check the points against the sheet of the maker",
            )
            return
        highest = max(highest, value)


def _device(
    tag: str, table: DeviceTable, units: UnitSet, sections: Sections, notes: Notes, faults: FaultList
) -> DeviceOrLength:
    place = sections.place(f"device.{tag}")
    ways = [key for key in ("curve", "loss", "equivalent_length") if getattr(table, key) is not None]
    if len(ways) > 1:
        faults.add(place, "its loss is given more than once", found=listed(ways), allowed="one of them")
    if not ways and table.kind in ("loss", "check valve") and not faults.touched(place):
        faults.add(place, "has no loss", allowed="one of curve, loss, equivalent_length")
    if table.kind == "pump" and ways and ways != ["curve"]:
        faults.add(place, "a pump has no loss", found=listed(ways), allowed="the curve of its gain")
    for key in PUMP_KEYS:
        if table.kind != "pump" and getattr(table, key) not in (None, False, 1):
            faults.add(
                sections.place(f"device.{tag}.{key}"),
                f"a {table.kind} is no pump",
                remedy="take the key out",
            )
    if table.kind == "pressure-reducing valve" and table.setting is None:
        faults.add(
            sections.place(f"device.{tag}.setting"),
            "is missing",
            allowed="the outlet pressure of the valve",
            remedy='give the pressure it is set to leave behind it, such as setting = "60 psi"',
        )
    if table.kind != "pressure-reducing valve" and table.setting is not None:
        faults.add(
            sections.place(f"device.{tag}.setting"),
            f"a {table.kind} has no setting",
            remedy="take the key out",
        )
    flows, values = _curve(table, units, sections.place(f"device.{tag}.curve"), faults)
    if table.loss is not None:
        flows, values = (0.0,), (table.loss.si(units),)
    if not ways and table.kind == "pressure-reducing valve":
        flows, values = (0.0,), (0.0,)
        notes.add(f"device.{tag}.loss", "no loss when fully open", "assumed", "no loss is given")
    if table.equivalent_length is not None:
        length = table.equivalent_length.si(units)
        if table.kind != "loss":
            faults.add(
                place,
                f"a {table.kind} needs a curve or a loss",
                found="equivalent_length",
                allowed="curve, loss",
            )
        return DeviceOrLength(None, length, table.title or tag, table.source)
    pump = None
    if table.kind == "pump":
        curve, pump = PumpReader(tag, table, units, sections, notes, faults).read((flows, values))
        flows, values = curve.flows, curve.values
    device = Device(
        tag=tag,
        kind=table.kind,
        flows=flows,
        values=values,
        source=table.source,
        setting=table.setting.si(units) if table.setting else None,
        one_way=table.kind == "check valve",
        title=table.title,
        place=place,
        pump=pump,
    )
    return DeviceOrLength(device, None, table.title or tag, table.source)


def read_devices(sections: Sections, notes: Notes, faults: FaultList) -> dict[str, DeviceOrLength]:
    """Return the devices by tag."""
    around = UNIT_SETS[sections.units]
    return {
        tag: _device(tag, table, units_in(table, around), sections, notes, faults)
        for tag, table in sections.devices.items()
    }


def kinds_by_name(reader: KindReader, tables: Mapping[str, PipeTable]) -> dict[str, KindOfPipe]:
    """Return the kinds of pipe by name."""
    return {name: reader.read(name, table) for name, table in tables.items()}
