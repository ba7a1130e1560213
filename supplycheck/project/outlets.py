"""Flowing hydrant outlets: from the user's tables to records."""

from __future__ import annotations

import math
from typing import Final

from supplycheck import catalogue
from supplycheck.errors import DomainError, NotInCatalogueError
from supplycheck.hydraulics.discharge import PITOT, pitot_discharge
from supplycheck.model import Outlet
from supplycheck.model.system import Origin
from supplycheck.project.drafts import Notes
from supplycheck.project.faults import FaultList, listed, quoted
from supplycheck.project.layout_parts import units_in
from supplycheck.project.plausible import LARGEST_OUTLET
from supplycheck.project.schema_supply import OutletTable
from supplycheck.project.sections import Sections
from supplycheck.units import INCH, UnitSet

PUMPER_SIZE: Final = 4 * INCH
"""Outlets from this diameter [m] up are pumper outlets, whose stream is not full."""


class OutletReader:
    """Reads outlets and their pitot readings; what is not given comes from the catalogue and is listed."""

    def __init__(self, sections: Sections, notes: Notes, faults: FaultList) -> None:
        self.sections, self.notes, self.faults = sections, notes, faults

    def _fault(
        self, where: str, problem: str, *, found: str = "", allowed: str = "", remedy: str = ""
    ) -> None:
        self.faults.add(self.sections.place(where), problem, found=found, allowed=allowed, remedy=remedy)

    def read(self, table: OutletTable, where: str, units: UnitSet) -> Outlet | None:
        """Return the outlet [SI]; ``None`` with a fault noted at ``where``."""
        units = units_in(table, units)
        diameter, pitot = table.diameter.si(units), table.pitot.si(units)
        if diameter > LARGEST_OUTLET.si(units) * (1 + 1e-9):
            self._fault(
                f"{where}.diameter",
                "is larger than any outlet of a hydrant",
                found=units.text(diameter, "size"),
                allowed=f"at most {LARGEST_OUTLET.text(units)}",
                remedy="check the decimal point and the units",
            )
            return None
        if table.kind == "diffuser" or table.k_factor is not None:
            return self._diffuser(table, where, units)
        coefficient, origin = self._coefficient(table, where)
        if not (math.isfinite(diameter) and math.isfinite(pitot)):
            return None
        factor = table.pumper_factor.number if table.pumper_factor else 1.0
        large = diameter >= PUMPER_SIZE * (1 - 1e-9)
        if table.pumper_factor is None and large and table.kind == "hose outlet":
            self._fault(
                f"{where}.pumper_factor",
                "is missing: a hose outlet of 4 in or more",
                found=units.text(diameter, "size"),
                allowed="a factor above 0, at most 1",
                remedy="without it the outlet is credited with about a fifth too much flow",
            )
            return None
        if table.pumper_factor is None and (large or table.kind == "pumper outlet"):
            try:
                row = catalogue.pumper_factor(pitot)
            except DomainError as caught:
                self._fault(
                    f"{where}.pumper_factor", f"is missing: {caught}", allowed="a factor above 0, at most 1"
                )
                return None
            factor = row.value
            self.notes.add(f"{where}.pumper_factor", f"{factor:g}", "catalogue", row.source)
        for key, value in (("coefficient", coefficient), ("pumper_factor", factor)):
            if value is not None and value > 1:
                self._fault(
                    f"{where}.{key}",
                    "is above 1",
                    found=f"{value:g}",
                    allowed="a number above 0, at most 1",
                )
        if coefficient is None:
            return None
        kind = table.kind or ""
        return Outlet(diameter, coefficient, pitot, factor, table.shape, origin, table.hydrant, kind)

    def _diffuser(self, table: OutletTable, where: str, units: UnitSet) -> Outlet | None:
        """Return a diffuser by its maker's figure, told as a coefficient of its opening."""
        if table.kind != "diffuser":
            self._fault(
                f"{where}.k_factor", "is for a diffuser", allowed='kind = "diffuser", or a coefficient'
            )
        if table.shape or table.pumper_factor:
            key = "shape" if table.shape else "pumper_factor"
            self._fault(f"{where}.{key}", "a diffuser does not use it", remedy="take it out")
        if (table.k_factor is None) == (table.coefficient is None):
            self._fault(
                f"{where}.k_factor",
                "a diffuser needs the figure of its maker",
                allowed="k_factor or coefficient, one of them",
            )
            return None
        diameter, pitot = table.diameter.si(units), table.pitot.si(units)
        if table.coefficient is not None:
            coefficient = table.coefficient.number
        elif table.k_factor is not None:
            coefficient = table.k_factor.si(units) / (PITOT * diameter**2)
        return Outlet(diameter, coefficient, pitot, 1.0, "", "given", table.hydrant, "diffuser")

    def _coefficient(self, table: OutletTable, where: str) -> tuple[float | None, Origin]:
        if table.coefficient is not None:
            return table.coefficient.number, "given"
        shapes = listed(catalogue.outlet_shapes())
        if not table.shape:
            self._fault(f"{where}.coefficient", "is missing", allowed=f"a coefficient, or shape: {shapes}")
            return None, "given"
        try:
            row = catalogue.outlet_coefficient(table.shape)
        except NotInCatalogueError:
            self._fault(
                f"{where}.shape",
                "is not a shape of the catalogue",
                found=quoted(table.shape),
                allowed=shapes,
                remedy="or give coefficient",
            )
            return None, "given"
        self.notes.add(f"{where}.coefficient", f"{row.value:g}, {table.shape}", "catalogue", row.source)
        return row.value, "catalogue"


def discharge(outlet: Outlet) -> float:
    """Return the flow of an outlet [m³/s] by the pitot law, its pumper factor included."""
    flow, _ = pitot_discharge(coefficient=outlet.coefficient, diameter=outlet.diameter, pitot=outlet.pitot)
    return float(flow) * outlet.pumper_factor
