"""The fluid: water unless the project says otherwise."""

from __future__ import annotations

from typing import Final

from supplycheck import catalogue
from supplycheck.errors import DomainError
from supplycheck.hydraulics.water import water_density, water_viscosity
from supplycheck.model import Fluid
from supplycheck.project.criteria import Standard
from supplycheck.project.drafts import Notes
from supplycheck.project.faults import FaultList
from supplycheck.project.layout_parts import units_in
from supplycheck.project.schema import FluidTable
from supplycheck.project.sections import Sections
from supplycheck.units import GRAVITY, UNIT_SETS, UnitSet

ROOM: Final = 293.15
"""Temperature [K] at which the properties of water are taken where none is given: 20 °C."""


def _water(table: FluidTable | None, units: UnitSet, notes: Notes) -> tuple[float, float, float]:
    """Return temperature [K], density [kg/m³] and viscosity [Pa·s] of water."""
    given = table.temperature.si(units) if table and table.temperature else None
    temperature = ROOM if given is None else given
    density = float(water_density(temperature=temperature)[0])
    viscosity = float(water_viscosity(temperature=temperature)[0])
    if given is None:
        notes.add(
            "fluid.temperature", units.text(temperature, "temperature"), "assumed", "room temperature"
        )
    return temperature, density, viscosity


def read_fluid(
    sections: Sections, standard: Standard | None, notes: Notes, faults: FaultList
) -> Fluid | None:
    """Return the fluid; ``None`` with faults noted."""
    table = sections.fluid
    units = units_in(table, UNIT_SETS[sections.units]) if table else UNIT_SETS[sections.units]
    name = table.name.strip() if table else "water"
    if name.casefold() == "water":
        try:
            temperature, density, viscosity = _water(table, units, notes)
        except DomainError as caught:
            faults.add(
                sections.place("fluid.temperature"), str(caught), allowed="0 to 100 °C (32 to 212 °F)"
            )
            return None
        row = catalogue.rule("unit weight of water", standard.name if standard else "NFPA 13")
        notes.add(
            "fluid: unit weight",
            f"{units.text(row.value, 'gradient')}, as the standard rounds it",
            "catalogue",
            row.source,
        )
        density = table.density.si(units) if table and table.density else density
        viscosity = table.viscosity.si(units) if table and table.viscosity else viscosity
        weight = density * GRAVITY if table and table.density else row.value
        own = (table.source if table else "") or "Kell (1975), IAPWS SR6-08"
        return Fluid("water", density, viscosity, weight, temperature, own)
    for key in ("density", "viscosity"):
        if table is not None and getattr(table, key) is None:
            faults.add(
                sections.place(f"fluid.{key}"),
                "is missing: the catalogue holds the properties of water only",
                allowed="the value from the maker of the fluid",
            )
    if table is None or table.density is None or table.viscosity is None:
        return None
    density = table.density.si(units)
    warmth = table.temperature.si(units) if table.temperature else None
    source = table.source or "given in the project"
    return Fluid(name, density, table.viscosity.si(units), density * GRAVITY, warmth, source)
