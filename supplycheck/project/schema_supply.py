"""Schema of the supply: flow tests, tanks, adjustments, margin rule, hose, scenarios."""

from __future__ import annotations

from typing import Annotated, Literal

from pydantic import BeforeValidator, Field

from supplycheck.project.quantity import (
    Date,
    Elevation,
    Flow,
    FlowOrZero,
    KFactor,
    Percent,
    Pressure,
    PressureOrZero,
    Ratio,
    Size,
    Volume,
    Years,
)
from supplycheck.project.schema_parts import Name, Text, UnitTable


class OutletTable(UnitTable):
    """A flowing hydrant outlet and its pitot reading."""

    diameter: Size
    """Inside diameter of the outlet."""
    pitot: Pressure
    """Pitot reading."""
    coefficient: Ratio | None = None
    """Discharge coefficient; or give `shape`."""
    shape: Text = ""
    """Shape of the outlet as the catalogue names it, instead of `coefficient`."""
    pumper_factor: Ratio | None = None
    """Factor for a large (pumper) outlet. Default: 1 under 4 in; from 4 in up, and for a `pumper outlet`,
    the published one by the pitot reading, which is then listed. A large `hose outlet` needs it."""
    hydrant: Text = ""
    """The hydrant it is on."""
    kind: Literal["hose outlet", "pumper outlet", "diffuser"] | None = None
    """What it flowed through. Default: `pumper outlet` from 4 in up, otherwise `hose outlet`."""
    k_factor: KFactor | None = None
    """K-factor of a diffuser by its maker: flow per root of its reading, instead of `coefficient`."""


class TestPointTable(UnitTable):
    """One reading of a test: the residual while water flows."""

    __test__ = False

    residual: PressureOrZero
    """Residual pressure at the gauge."""
    flow: Flow | None = None
    """Total flow; or give `outlets`."""
    outlets: list[OutletTable] = Field(default_factory=list)
    """Outlets that flowed, from whose pitot readings the flow is computed."""


class FlowTestTable(UnitTable):
    """A hydrant flow test (or the values of a utility's model of its mains)."""

    tag: Name | None = None
    """Name of the test. Default: `test 1`, `test 2` …"""
    static: Pressure | None = None
    """Static pressure at the gauge before water flows. Needed, or `hgl_high`."""
    residual: PressureOrZero | None = None
    """Residual pressure at the gauge while water flows."""
    flow: Flow | None = None
    """Total flow at `residual`; or give `outlets`."""
    outlets: list[OutletTable] = Field(default_factory=list)
    """Outlets that flowed at `residual`."""
    points: list[TestPointTable] = Field(default_factory=list)
    """Several readings of one test, instead of `residual`."""
    hgl_high: Elevation | None = None
    """Elevation of the hydraulic grade line without flow by the model of a utility, instead of `static`."""
    hgl_low: Elevation | None = None
    """Elevation of the hydraulic grade line at `flow` by the model of a utility, instead of `residual`."""
    date: Date
    """Day of the test."""
    gauge_elevation: Elevation | None = None
    """Elevation of the gauge, from the same datum as the system. Needed, except with hydraulic grade
    lines."""
    node: Name | None = None
    """Node at which the test applies. Default: `node` of the supply."""
    time: Text = ""
    """Time of day."""
    static_hydrant: Text = ""
    """Hydrant at which static and residual were read."""
    flow_hydrant: Text = ""
    """Hydrant that flowed."""
    conducted_by: Text = ""
    """Who made the test."""
    witnessed_by: Text = ""
    """Who witnessed it."""
    main: Text = ""
    """The main that was tested."""
    gauge_range: Pressure | None = None
    """Full scale of the gauge."""
    gauge_accuracy: Percent | None = None
    """Accuracy of the gauge in per cent of full scale."""
    gauge_calibrated: Date | None = None
    """Day of the last calibration."""
    outlet_diameter_measured: bool | None = None
    """Whether the diameter of the outlets was measured."""
    model: bool = False
    """True where a utility computed the values instead of reading them."""
    source: Text = ""
    """Report or letter from which the values are taken."""


class TankTable(UnitTable):
    """A tank or reservoir."""

    tag: Name
    """Name of the tank."""
    node: Name
    """Node at which it feeds the system."""
    water_level: Elevation
    """Water level, from the same datum as the system; the lowest that counts without `low_level`."""
    low_level: Elevation | None = None
    """Level to which the usable volume draws the water down: the supply is then counted from it."""
    volume: Volume | None = None
    """Usable volume."""
    refill: FlowOrZero | None = None
    """Refill that may be counted."""
    kind: Literal["gravity", "suction", "break", "reservoir"] = "gravity"
    """Kind of tank."""


class AdjustmentTable(UnitTable):
    """A change of the measured curve before it is compared, in the order given."""

    kind: Literal["low supply", "static cap", "percent"]
    """`low supply`: pressures lowered by `pressure`; `static cap`: none above `pressure`; `percent`: all
    lowered by `percent`."""
    pressure: Pressure | None = None
    """By how much pressures are lowered, or the cap."""
    percent: Percent | None = None
    """By how many per cent every pressure is lowered."""
    reason: Text = ""
    """Who asks for it and why."""


class MarginTable(UnitTable):
    """The margin rule of the authority, in numbers."""

    rule: Literal["none", "fixed", "percent", "of demand", "larger of", "by static", "by test age"]
    """Shape of the rule. `none` says that the authority asks for no margin."""
    pressure: PressureOrZero | None = None
    """Margin of a fixed rule, or basic margin of `by test age`."""
    percent: Percent | None = None
    """Per cent of `percent` and `of demand`."""
    reading: Literal["static lowered", "pressure scaled", "flow scaled"] | None = None
    """How a percentage is read: static lowered by it, every pressure scaled, or every flow scaled."""
    minimum: Pressure | None = None
    """Lowest margin of `of demand`."""
    parts: list[MarginTable] = Field(default_factory=list)
    """Rules of `larger of`."""
    bands: list[MarginTable] = Field(default_factory=list)
    """Rules of `by static`, each with `below` but the last."""
    below: Pressure | None = None
    """In a band: static pressure below which this rule counts."""
    free_years: Years | None = None
    """In `by test age`: years without an addition."""
    per_year: Pressure | None = None
    """In `by test age`: addition for each full year beyond `free_years`."""
    source: Text = ""
    """Where the rule stands: authority, section, date."""


def _one_or_several(value: object) -> object:
    return [value] if isinstance(value, dict) else value


FlowTests = Annotated[list[FlowTestTable], BeforeValidator(_one_or_several)]


class SupplyTable(UnitTable):
    """All that feeds the system."""

    node: Name | None = None
    """Node at which the tests apply. Default: the supply node of the layout or of the table of nodes."""
    compare_at: Name | None = None
    """Node at which demand and supply are compared. Default: the supply node."""
    flow_test: FlowTests = Field(default_factory=list)
    """Flow test, `[supply.flow_test]`, or several, `[[supply.flow_test]]`."""
    tank: list[TankTable] = Field(default_factory=list)
    """Tanks and reservoirs."""
    adjustment: list[AdjustmentTable] = Field(default_factory=list)
    """Changes of the measured curve, in order."""
    margin: MarginTable | None = None
    """Margin rule. Without it the verdict cannot be "adequate"."""
    submittal_date: Date | None = None
    """Day of submittal, to which the age of the test counts. Default: the date of the project."""
    maximum_test_age_months: Ratio | None = None
    """Greatest age of the test that the authority accepts, in months."""
    main_floor_pressure: PressureOrZero | None = None
    """Lowest pressure that the utility allows in the main."""


class HoseTable(UnitTable):
    """Hose allowance, instead of that of the hazard class."""

    inside: FlowOrZero | None = None
    """Inside hose. Default: none."""
    outside: FlowOrZero | None = None
    """Outside hose. Default: the total of the hazard class."""
    inside_node: Name | None = None
    """Node at which inside hose joins. Needed with `inside`."""
    outside_node: Name | None = None
    """Node at which outside hose joins. Default: the supply node."""
    source: Text = ""
    """Where own values come from."""


class ScenarioTable(UnitTable):
    """A named question beside the design demand, solved with the actual supply.

    Its open heads, the hose, the outflows of the node table and its own `flows` all run at once. Where the
    node table draws at a node of `flows` too, both run: that is noted as an assumption unless `node_flows`
    says it. To put a flow in the place of that of the node table, set `node_flows = false` and list all
    that runs.
    """

    name: Name
    """Name of the scenario."""
    heads: list[Name] | Literal["design area"] = "design area"
    """Tags of the open heads, or those of the design area."""
    closed_pipes: list[Name] = Field(default_factory=list)
    """Tags of pipes that are shut."""
    flows: dict[str, FlowOrZero] = Field(default_factory=dict)
    """Fixed outflows by node, on top of what the node table draws there."""
    node_flows: bool | None = None
    """Whether the outflows of the node table run too. Default: they do, as in every case."""
    hose: bool = True
    """Whether the hose allowance flows too."""
