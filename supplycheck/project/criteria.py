"""Design criteria from the hazard class, what the project overrides, and the modifiers of the area.

The modifiers are multiplied in this order: base area, quick-response reduction, dry system, slope.
"""

from __future__ import annotations

import math

from supplycheck import catalogue
from supplycheck.catalogue import HazardRow
from supplycheck.errors import DomainError, NotInCatalogueError
from supplycheck.model import (
    AreaModifier,
    Criteria,
    VelocityPolicy,
)
from supplycheck.project.drafts import Notes
from supplycheck.project.faults import FaultList, listed, quoted
from supplycheck.project.layout_parts import units_in
from supplycheck.project.plausible import check_density
from supplycheck.project.schema import CriteriaTable, VelocityTable
from supplycheck.project.sections import Sections
from supplycheck.project.standard import Standard
from supplycheck.units import BAR, UNIT_SETS, UnitSet

EN_COMPONENT_PRESSURE = 12 * BAR
NO_HAZARD = "none"
_DRY_LIKE = ("dry", "double interlock preaction")


class CriteriaReader:
    """Assembles the criteria of one project."""

    def __init__(
        self, sections: Sections, table: CriteriaTable, standard: Standard, notes: Notes, faults: FaultList
    ) -> None:
        self.sections, self.table, self.standard = sections, table, standard
        self.notes, self.faults = notes, faults
        self.units: UnitSet = units_in(table, UNIT_SETS[sections.units])

    def _fault(
        self, key: str, problem: str, *, found: str = "", allowed: str = "", remedy: str = ""
    ) -> None:
        place = self.sections.place(f"criteria.{key}")
        self.faults.add(place, problem, found=found, allowed=allowed, remedy=remedy)

    def _rule(self, name: str) -> catalogue.ValueRow:
        return catalogue.rule(name, self.standard.name)

    def _hazard(self) -> HazardRow | None:
        try:
            return catalogue.hazard_class(self.table.hazard, self.standard.text)
        except NotInCatalogueError as caught:
            names = catalogue.hazard_names(self.standard.name)
            close = f"did you mean {caught.near[0]}?" if caught.near else ""
            self._fault(
                "hazard",
                f"is not a hazard class of {self.standard.name}",
                found=quoted(self.table.hazard),
                allowed=listed(names),
                remedy=close,
            )
        except DomainError as caught:
            self.faults.add(self.sections.place("project.standard"), str(caught), found=self.standard.text)
        return None

    def _density_and_area(self, row: HazardRow) -> tuple[float, float]:
        """Return density [m/s] and base area [m²]; NaN with a fault noted."""
        table, units = self.table, self.units
        density = table.density.si(units) if table.density else None
        area = table.area.si(units) if table.area else None
        place = self.sections.place("criteria.density")
        written = table.density.units(units) if table.density else units
        check_density(density, written, place, self.faults)
        if area is None:
            area = row.area
            if area is None:
                self._fault(
                    "area", f"is missing: {row.standard} tabulates none for {row.name}", allowed="an area"
                )
                area = math.nan
            elif density is not None and len(row.points) > 1 and density != row.density:
                self._fault(
                    "area",
                    "is missing: on the curve of this edition the area goes with the density",
                    allowed="the area that belongs to the density",
                )
            else:
                self.notes.add("criteria.area", units.text(area, "area"), "catalogue", row.source)
        if density is None:
            density = self._density_at(row, area)
        return density, area

    def _density_at(self, row: HazardRow, area: float) -> float:
        if math.isnan(area):
            return math.nan
        if self.table.area is None and row.density is None:
            self._fault(
                "density", f"is missing: {row.standard} tabulates none for {row.name}", allowed="a density"
            )
            return math.nan
        try:
            density = row.density_at(area) if row.points else math.nan
        except DomainError:
            low, high = (self.units.text(row.points[end].area, "area") for end in (0, -1))
            self._fault(
                "area",
                f"{row.standard} prints no density of {row.name} for this area",
                found=self.units.text(area, "area"),
                allowed=low if low == high else f"{low} to {high}",
                remedy="correct the area, or give the density that belongs to it",
            )
            return math.nan
        if math.isfinite(density):
            self.notes.add("criteria.density", self.units.text(density, "density"), "catalogue", row.source)
        elif not self.faults.touched(self.sections.place("criteria.area")):
            self._fault(
                "density", f"is missing: {row.standard} tabulates none for {row.name}", allowed="a density"
            )
        return density

    def _quick_response(self, row: HazardRow | None) -> AreaModifier | None:
        table = self.table
        if not table.quick_response:
            return None
        if self.standard.name != "NFPA 13":
            self._fault(
                "quick_response", "EN 12845 knows no reduction for quick response", remedy="set it to false"
            )
            return None
        allowed = row is None or row.name.startswith(("light", "ordinary"))
        if table.system != "wet" or not allowed:
            self._fault(
                "quick_response",
                "the reduction is not allowed here",
                found=f"{table.system} system, {row.name if row else table.hazard}",
                allowed="wet systems in light and ordinary hazard",
                remedy="set it to false",
            )
            return None
        if table.ceiling_height is None:
            self._fault(
                "ceiling_height",
                "is missing: the quick-response reduction depends on it",
                allowed="a length",
            )
            return None
        height = table.ceiling_height.si(self.units)
        highest = self._rule("quick response reduction, highest ceiling")
        if height > highest.value * (1 + 1e-9):
            self._fault(
                "ceiling_height",
                "is too high for the quick-response reduction",
                found=self.units.text(height, "length"),
                allowed=f"at most {self.units.text(highest.value, 'length')}",
                remedy="set quick_response to false",
            )
            return None
        slope = self._rule("quick response reduction, slope")
        reduction = self._rule("quick response reduction, intercept").value + slope.value * height
        reduction = min(reduction, self._rule("quick response reduction, greatest").value)
        name = f"quick response, ceiling at {self.units.text(height, 'length')}"
        return AreaModifier(name, 1.0 - reduction, slope.source)

    def _dry(self, row: HazardRow, base: float) -> AreaModifier | None:
        table = self.table
        if self.standard.name == "NFPA 13":
            if table.system not in _DRY_LIKE:
                return None
            rule = self._rule(f"area factor, {table.system}")
            return AreaModifier(f"{table.system} system", rule.value, rule.source)
        if table.system not in (*_DRY_LIKE, "preaction"):
            return None
        if table.area is not None:
            self.notes.add(
                "criteria.area", "taken as the area of the dry system", "assumed", "own area under EN 12845"
            )
            return None
        if row.area_dry is None or row.area is None:
            self._fault(
                "area",
                f"is missing: EN 12845 tabulates no area for {row.name} in a {table.system} system",
                found=row.note,
                allowed="an own area",
            )
            return None
        return AreaModifier(f"{table.system} system, tabulated area", row.area_dry / base, row.source)

    def _slope(self) -> AreaModifier | None:
        if not self.table.slope_over_1_in_6:
            return None
        if self.standard.name != "NFPA 13":
            self._fault(
                "slope_over_1_in_6", "EN 12845 knows no such factor", remedy="set it to false, or give area"
            )
            return None
        rule = self._rule("area factor, slope over 1 in 6")
        return AreaModifier("ceiling slope over 1 in 6", rule.value, rule.source)

    def _velocity(self) -> VelocityPolicy:
        limit = self.table.velocity_limit
        if isinstance(limit, VelocityTable):
            units = units_in(limit, self.units)
            return VelocityPolicy(
                "project",
                limit.pipe.si(units) if limit.pipe else None,
                limit.valve.si(units) if limit.valve else None,
                limit.source or "given in the project",
            )
        if limit is None:
            limit = "EN 12845" if self.standard.name == "EN 12845" else "off"
            self.notes.add(
                "criteria.velocity_limit", limit, "assumed", f"practice under {self.standard.name}"
            )
        if limit == "off":
            return VelocityPolicy("off", None, None, "no limit set in the project")
        pipe = catalogue.rule("velocity limit, pipe", "EN 12845")
        valve = catalogue.rule("velocity limit, valve", "EN 12845")
        return VelocityPolicy("EN 12845", pipe.value, valve.value, f"{pipe.source}; {valve.source}")

    def _maximum_pressure(self) -> float:
        if self.table.maximum_pressure is not None:
            return self.table.maximum_pressure.si(self.units)
        if self.standard.name == "NFPA 13":
            row = self._rule("component pressure")
            value, source = row.value, row.source
        else:
            value, source = (
                EN_COMPONENT_PRESSURE,
                "from memory of EN 12845, 12 bar components, not verified",
            )
        self.notes.add("criteria.maximum_pressure", self.units.text(value, "pressure"), "assumed", source)
        return value

    def _minimum_pressure(self, row: HazardRow) -> float:
        if self.table.minimum_pressure is not None:
            return self.table.minimum_pressure.si(self.units)
        text = self.units.text(row.minimum_pressure, "pressure")
        self.notes.add("criteria.minimum_pressure", text, "catalogue", row.source)
        return row.minimum_pressure

    def _duration(self, row: HazardRow) -> float:
        if self.table.duration is not None:
            return self.table.duration.si(self.units)
        low, high = row.duration_min, row.duration_max
        text = self.units.text(high, "time")
        if low < high:
            text += f", the longer end of {self.units.text(low, 'time')} to {self.units.text(high, 'time')}"
        self.notes.add("criteria.duration", text, "catalogue", row.source)
        return high

    def _coverage(self, row: HazardRow, density: float) -> tuple[float, float]:
        if (
            row.name.startswith("extra")
            and density < self._rule("extra hazard coverage, low density limit").value
        ):
            return (
                self._rule("extra hazard coverage, low density").value,
                self._rule("extra hazard spacing, low density").value,
            )
        return row.maximum_coverage, row.maximum_spacing

    def read(self) -> tuple[Criteria | None, HazardRow | None]:
        """Return the criteria and the row of the hazard class; ``None`` with faults noted.

        With the hazard ``none`` there is no row, and the criteria say that there are no sprinklers.
        """
        if self.table.hazard.casefold() == NO_HAZARD:
            return self._without_sprinklers(), None
        row = self._hazard()
        if row is None:
            self._quick_response(None)
            self._slope()
            return None, None
        table = self.table
        density, area = self._density_and_area(row)
        quick = self._quick_response(row)
        modifiers = tuple(
            modifier for modifier in (quick, self._dry(row, area), self._slope()) if modifier is not None
        )
        required = area * math.prod(modifier.factor for modifier in modifiers)
        fewest = self._rule("quick response reduction, fewest sprinklers").value if quick else 1
        coverage, spacing = self._coverage(row, density)
        own = [
            key
            for key in ("density", "area", "duration", "minimum_pressure")
            if getattr(table, key) is not None
        ]
        source = row.source + (
            f"; {', '.join(own)}: {table.source or 'given in the project'}" if own else ""
        )
        criteria = Criteria(
            standard=self.standard.name,
            edition=self.standard.edition,
            hazard=row.name,
            density=density,
            base_area=area,
            modifiers=modifiers,
            required_area=required,
            minimum_heads=int(fewest),
            shape_factor=self._shape(),
            design_area=table.design_area if table.design_area == "search" else tuple(table.design_area),
            system=table.system or "wet",
            minimum_pressure=self._minimum_pressure(row),
            duration=self._duration(row),
            maximum_coverage=coverage,
            maximum_spacing=spacing,
            velocity=self._velocity(),
            maximum_pressure=self._maximum_pressure(),
            velocity_pressure=table.velocity_pressure,
            source=source,
            ceiling_height=table.ceiling_height.si(self.units) if table.ceiling_height else None,
        )
        return criteria, row

    def _without_sprinklers(self) -> Criteria:
        table = self.table
        return Criteria(
            standard=self.standard.name,
            edition=self.standard.edition,
            hazard="no sprinklers",
            density=0.0,
            base_area=0.0,
            modifiers=(),
            required_area=0.0,
            minimum_heads=0,
            shape_factor=1.0,
            design_area=(),
            system=table.system or "wet",
            minimum_pressure=0.0,
            duration=table.duration.si(self.units) if table.duration else None,
            maximum_coverage=None,
            maximum_spacing=None,
            velocity=self._velocity(),
            maximum_pressure=self._maximum_pressure(),
            velocity_pressure=False,
            source="no sprinklers in the project",
        )

    def _shape(self) -> float:
        if self.standard.name == "NFPA 13":
            return self._rule("shape factor").value
        self.notes.add(
            "criteria: shape of the design area",
            "√A along the lines, or whole lines and pairs of lines; the most demanding of all tried",
            "assumed",
            "from memory of EN 12845 13.4.2, not verified",
        )
        return 1.0
