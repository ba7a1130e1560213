"""The fluid: water unless the project says otherwise."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Final

from supplycheck import catalogue
from supplycheck.errors import DomainError
from supplycheck.hydraulics.water import water_density, water_viscosity
from supplycheck.model import HEAD_FORM, Fluid, FrictionLaw
from supplycheck.model.fluid import HEAD_FORM_WEIGHT
from supplycheck.project.drafts import Notes
from supplycheck.project.faults import FaultList
from supplycheck.project.layout_parts import units_in
from supplycheck.project.schema import FluidTable
from supplycheck.project.sections import Sections
from supplycheck.project.standard import Standard
from supplycheck.units import GRAVITY, UNIT_SETS, UnitSet

ROOM: Final = 293.15
"""Temperature [K] at which the properties of water are taken where none is given: 20 °C."""


def _weight(law: FrictionLaw | None, units: UnitSet, standard: Standard | None, notes: Notes) -> float:
    """Return the unit weight of water [Pa/m]: that of the friction law, or as the standard rounds it."""
    if law is not None and law == HEAD_FORM:
        text = f"{units.text(HEAD_FORM_WEIGHT, 'gradient')} (9.81 kPa/m), in friction and in heights"
        notes.add("fluid: unit weight", text, "assumed", f"goes with the friction law; {law.source}")
        return HEAD_FORM_WEIGHT
    row = catalogue.rule("unit weight of water", standard.name if standard else "NFPA 13")
    text = f"{units.text(row.value, 'gradient')}, as the standard rounds it"
    notes.add("fluid: unit weight", text, "catalogue", row.source)
    return row.value


def _water(
    table: FluidTable | None,
    units: UnitSet,
    standard: Standard | None,
    laws: Sequence[FrictionLaw | None],
    notes: Notes,
) -> Fluid:
    """Return water; raises :class:`DomainError` outside 0 to 100 °C."""
    given = table.temperature.si(units) if table and table.temperature else None
    temperature = ROOM if given is None else given
    density = float(water_density(temperature=temperature)[0])
    viscosity = float(water_viscosity(temperature=temperature)[0])
    own_density = table.density.si(units) if table and table.density else None
    own_viscosity = table.viscosity.si(units) if table and table.viscosity else None
    by_viscosity = any(law is not None and law.family == "darcy-weisbach" for law in laws)
    if given is None and by_viscosity and (own_density is None or own_viscosity is None):
        text = units.text(temperature, "temperature")
        notes.add("fluid.temperature", text, "assumed", "room temperature")
    if own_density is None:
        weight = _weight(laws[0] if laws else None, units, standard, notes)
    else:
        weight = own_density * GRAVITY
    return Fluid(
        name="water",
        density=density if own_density is None else own_density,
        viscosity=viscosity if own_viscosity is None else own_viscosity,
        unit_weight=weight,
        temperature=temperature,
        source=(table.source if table else "") or "Kell (1975), IAPWS SR6-08",
    )


def read_fluid(
    sections: Sections,
    standard: Standard | None,
    laws: Sequence[FrictionLaw | None],
    notes: Notes,
    faults: FaultList,
) -> Fluid | None:
    """Return the fluid; ``None`` with faults noted."""
    table = sections.fluid
    units = units_in(table, UNIT_SETS[sections.units]) if table else UNIT_SETS[sections.units]
    name = table.name.strip() if table else "water"
    if name.casefold() == "water":
        try:
            return _water(table, units, standard, laws, notes)
        except DomainError as caught:
            faults.add(
                sections.place("fluid.temperature"), str(caught), allowed="0 to 100 °C (32 to 212 °F)"
            )
            return None
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
