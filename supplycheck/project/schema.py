"""The schema of the project file. It drives the reader, the JSON Schema and the input page."""

from __future__ import annotations

from typing import Annotated, Literal

from pydantic import Field

from supplycheck.project.quantity import (
    Area,
    Date,
    Density,
    Duration,
    Length,
    MassDensity,
    Pressure,
    Temperature,
    Velocity,
    Viscosity,
)
from supplycheck.project.schema_duty import FireFlowTable, HydrantTable, StandpipeTable
from supplycheck.project.schema_parts import LawName, Name, Table, Text, UnitsName, UnitTable
from supplycheck.project.schema_supply import HoseTable, ScenarioTable, SupplyTable
from supplycheck.project.schema_system import (
    CatalogueTable,
    DeviceTable,
    LayoutTable,
    NetworkTable,
    PipeTable,
    SprinklerTable,
)


class FactsTable(Table):
    """Facts for the title block. Texts print exactly as typed."""

    title: Text
    """Title of the project."""
    site: Text = ""
    """Address or place."""
    stage: Text = "preliminary"
    """Stage of the design."""
    date: Date
    """Date of the calculation."""
    standard: Text
    """Standard and edition: `NFPA 13 (2022)` or `EN 12845 (2015)`."""
    authority: Text = ""
    """Authority having jurisdiction."""
    owner: Text = ""
    """Owner or occupant."""
    designer: Text = ""
    """Designer or contractor."""
    building: Text = ""
    """Building, part of the building, or drawing number."""
    occupancy: Text = ""
    """Occupancy in words."""
    paper: Literal["letter", "a4"] | None = None
    """Paper of the report. Default: `letter` with US units, `a4` with metric units."""


class VelocityTable(UnitTable):
    """Own limits on velocity."""

    pipe: Velocity | None = None
    """Limit in pipes."""
    valve: Velocity | None = None
    """Limit in pipes that hold valves or flow switches."""
    source: Text = ""
    """Who asks for it."""


class CriteriaTable(UnitTable):
    """Design criteria. What is not given comes from the hazard class of the standard."""

    hazard: Name
    """Hazard class, for example `ordinary hazard group 2`; `none` where there are no sprinklers."""
    system: Literal["wet", "dry", "preaction", "double interlock preaction", "deluge"] | None = None
    """Kind of system. Needed with sprinklers."""
    density: Density | None = None
    """Design density, instead of that of the hazard class."""
    area: Area | None = None
    """Design area before its modifiers, instead of that of the hazard class."""
    duration: Duration | None = None
    """Duration of the supply, instead of that of the hazard class."""
    minimum_pressure: Pressure | None = None
    """Lowest pressure at any open head, instead of that of the standard."""
    source: Text = ""
    """Where own values come from."""
    design_area: list[Name] | Literal["search"] = "search"
    """`search` tries every placement; or the tags of the heads."""
    quick_response: bool = False
    """Take the reduction of the area for quick-response sprinklers. Needs `ceiling_height`."""
    ceiling_height: Length | None = None
    """Greatest ceiling height in the design area."""
    slope_over_1_in_6: bool = False
    """The ceiling slopes by more than 1 in 6: the area grows by 30 per cent."""
    friction_law: LawName = "hazen-williams"
    """Friction law. `hazen-williams` alone is the form that the standard prints; a longer name is that
    published form: 4.52 with 1.85 and 4.87 (psi/ft), 6.05e5 with the same (bar/m), 10.67 with 1.852 and
    4.871 (m/m). The head form takes water at 9.81 kPa/m, heights too."""
    second_law: LawName | None = None
    """A second friction law, printed side by side."""
    velocity_pressure: bool = False
    """Take velocity pressure into account."""
    velocity_limit: Literal["off", "EN 12845"] | VelocityTable | None = None
    """`off`, `EN 12845`, or own limits. Default: those of EN 12845 under that standard, otherwise off."""
    maximum_pressure: Pressure | None = None
    """Pressure rating of the components. Default: 175 psi under NFPA 13, 12 bar under EN 12845."""


class FluidTable(UnitTable):
    """The fluid, where it is not water."""

    name: Text = "water"
    """Name of the fluid."""
    density: MassDensity | None = None
    """Density."""
    viscosity: Viscosity | None = None
    """Dynamic viscosity."""
    temperature: Temperature | None = None
    """Temperature at which they hold."""
    source: Text = ""
    """Where they come from."""


class ProjectFile(Table):
    """The whole project file."""

    units: UnitsName
    """Unit set of all numbers: `us` (gpm, psi, ft, in, ft², gpm/ft²) or `metric` (L/min, bar, m, mm, m²,
    mm/min)."""
    project: FactsTable
    """Facts for the title block."""
    criteria: CriteriaTable | None = None
    """Design criteria. Needed with sprinklers."""
    fluid: FluidTable | None = None
    """Fluid. Default: water."""
    sprinkler: Annotated[dict[str, SprinklerTable], Field(default_factory=dict)]
    """Sprinkler types, `[sprinkler.A]`."""
    pipe: Annotated[dict[str, PipeTable], Field(default_factory=dict)]
    """Kinds of pipe, `[pipe.branch]`."""
    catalogue: CatalogueTable | None = None
    """Own rows for the catalogue."""
    layout: LayoutTable | None = None
    """A regular layout; either this or `network`."""
    network: NetworkTable | None = None
    """Tables of nodes and pipes; either this or `layout`."""
    device: Annotated[dict[str, DeviceTable], Field(default_factory=dict)]
    """Devices, `[device.backflow]`."""
    supply: SupplyTable
    """Supply."""
    hose: HoseTable | None = None
    """Hose allowance. Default: from the hazard class."""
    standpipe: StandpipeTable | None = None
    """Standpipes."""
    fire_flow: FireFlowTable | None = None
    """Fire flow of private hydrants."""
    hydrant: Annotated[list[HydrantTable], Field(default_factory=list)]
    """Private hydrants, `[[hydrant]]`. They need `fire_flow`."""
    scenario: Annotated[list[ScenarioTable], Field(default_factory=list)]
    """Scenarios, `[[scenario]]`."""
