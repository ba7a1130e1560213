"""Schema of the duties beside sprinklers: standpipes, fire flow, hydrants."""

from __future__ import annotations

from pydantic import Field

from supplycheck.model.duty import HydrantKind, StandpipeKind
from supplycheck.project.quantity import (
    Area,
    Duration,
    Flow,
    FlowOrZero,
    Percent,
    Pressure,
    PressureOrZero,
    Size,
)
from supplycheck.project.schema_parts import Count, Name, Text, UnitTable

PressurePair = list[PressureOrZero]


class RiserTable(UnitTable):
    """A standpipe."""

    tag: Name
    """Name of the standpipe."""
    outlets: list[Name] = Field(min_length=1)
    """Nodes of its hose outlets, those of a vertical standpipe from the top down, those of a horizontal
    one from the most remote."""
    size: Size | None = None
    """Size of the outlets. Default: 2½ in."""
    pressure: Pressure | None = None
    """Pressure that an outlet needs. Default: 100 psi at 2½ in, 65 psi at 1½ in (NFPA 14)."""
    horizontal: bool = False
    """True for a horizontal standpipe."""


class RegulatingTable(UnitTable):
    """A pressure-regulating device at hose outlets, with its maker's table."""

    tag: Name
    """Name of the device."""
    outlets: list[Name] = Field(min_length=1)
    """Nodes of the hose outlets that have it."""
    flowing: list[PressurePair] = Field(min_length=2)
    """Rows of inlet and outlet pressure while water flows, `[[100, 90], [200, 120]]`, inlet rising."""
    static: list[PressurePair] = Field(default_factory=list)
    """Rows of inlet and outlet pressure at no flow."""
    source: Text
    """Data sheet."""


class StandpipeTable(UnitTable):
    """Standpipes: what they must give (NFPA 14 unless stated otherwise)."""

    sprinklered: bool
    """Whether the building is sprinklered throughout: it sets the greatest flow, 1000 or 1250 gpm."""
    riser: list[RiserTable] = Field(min_length=1)
    """Standpipes, `[[standpipe.riser]]`."""
    outlet_flow: Flow | None = None
    """Flow of a hose outlet. Default: 250 gpm."""
    greatest_flow: Flow | None = None
    """Greatest total, instead of 1000 or 1250 gpm."""
    horizontal_flow: Flow | None = None
    """Flow of a horizontal standpipe with three or more outlets. Default: 750 gpm."""
    regulating_pressure: Pressure | None = None
    """Pressure at an outlet above which a regulating device is needed. Default: 175 psi."""
    regulating: list[RegulatingTable] = Field(default_factory=list)
    """Pressure-regulating devices, `[[standpipe.regulating]]`."""
    connection: Name | None = None
    """Node of the fire department connection."""
    added_flows: dict[str, FlowOrZero] = Field(default_factory=dict)
    """Further outflows by node at the same time, such as sprinklers of a partly sprinklered building."""
    counts: list[StandpipeKind] = Field(default=["risers", "horizontal"])
    """Kinds of case on which the verdict rests; the others are listed beside them."""
    source: Text = ""
    """Where own values come from."""


class FireFlowTable(UnitTable):
    """The fire flow that private hydrants must give."""

    flow: Flow | None = None
    """Required fire flow; or give `construction` and `area`."""
    construction: Text = ""
    """Type of construction, `IIB` or `V-B`, from which the flow is looked up (IFC table B105.1)."""
    area: Area | None = None
    """Fire-flow calculation area."""
    edition: Count | None = None
    """Edition of the IFC, a year. Needed with `construction`."""
    sprinklered: bool | None = None
    """Whether the building is sprinklered throughout. Needed with `construction`."""
    dwelling: bool = False
    """True for one- and two-family dwellings."""
    reduction: Percent | None = None
    """Reduction for sprinklers that the authority grants. Default: the most that the edition allows."""
    duration: Duration | None = None
    """Duration. Default: that of the table."""
    hydrants_at_once: Count | None = None
    """Number of hydrants that share the flow. Default: the number of IFC appendix C for the flow."""
    greatest_each: Flow | None = None
    """Most that is asked of one hydrant. Default: the whole fire flow."""
    residual: Pressure | None = None
    """Pressure kept at every flowing hydrant and at the highest point. Default: 20 psi."""
    highest_point: Name | None = None
    """Highest point of the main. Default: the highest node of the underground pipes."""
    valves: list[Name] = Field(default_factory=list)
    """Pipes that may be shut, one at a time."""
    maximum_day: dict[str, FlowOrZero] = Field(default_factory=dict)
    """Outflows by node on the day of greatest use."""
    counts: list[HydrantKind] = Field(default=["hydrants", "maximum day"])
    """Kinds of case on which the verdict rests; the others are listed beside them."""
    source: Text = ""
    """Where own values come from."""


class HydrantTable(UnitTable):
    """A private hydrant."""

    tag: Name
    """Name of the hydrant."""
    node: Name
    """Its node: the hydrant itself where its lateral is drawn, otherwise the tee in the main."""
    device: Name | None = None
    """Device with the loss of lateral and body, where they are not drawn as pipes."""
    location: Text = ""
    """Where it stands."""
