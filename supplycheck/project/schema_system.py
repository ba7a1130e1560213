"""Schema of the system: sprinklers, pipe kinds, own catalogue rows, layout, tables, devices."""

from __future__ import annotations

from typing import Annotated, Literal

from pydantic import Field

from supplycheck.project.quantity import (
    Area,
    Elevation,
    Flow,
    KFactor,
    Length,
    LengthOrZero,
    LossCurve,
    Pressure,
    PressureOrZero,
    Ratio,
    Roughness,
    Size,
    Temperature,
)
from supplycheck.project.schema_parts import (
    Count,
    CountOrZero,
    Name,
    NominalSize,
    Text,
    UnitTable,
)


class SprinklerTable(UnitTable):
    """A sprinkler type, named by the last part of the table's name: `[sprinkler.A]`."""

    k_factor: KFactor
    """K-factor of the outlet: flow = K √pressure."""
    minimum_pressure: Pressure | None = None
    """Lowest pressure of the listing or data sheet. Without it the standard's minimum alone counts."""
    maximum_pressure: Pressure | None = None
    """Highest working pressure of the listing."""
    coverage: Annotated[list[Length], Field(min_length=2, max_length=2)] | None = None
    """Two lengths, along the line and between lines: the largest spacing for which the type is listed or
    used. Their product is the area of a head where a table gives none; in a layout the spacing counts."""
    coverage_area: Area | None = None
    """The same as a floor area, instead of `coverage`."""
    response: Literal["standard", "quick"] | None = None
    """Speed of the heat-responsive element."""
    temperature: Temperature | None = None
    """Temperature rating."""
    listing: Text = ""
    """Model, listing or approval, for the report."""


class PipeTable(UnitTable):
    """A kind of pipe, named by the last part of the table's name: `[pipe.branch]`."""

    material: Name
    """Material and wall as the catalogue names it, for example `steel schedule 40`."""
    c_factor: Ratio | None = None
    """Hazen-Williams C. Default: from the catalogue by material, kind of system and standard."""
    roughness: Roughness | None = None
    """Absolute roughness for Darcy-Weisbach. Default: from the catalogue by material."""
    bores: dict[str, Size] = Field(default_factory=dict)
    """Own inside diameters by nominal size, `{ "2" = 2.067 }`; they come before those of the catalogue."""
    source: Text = ""
    """Where own bores, C or roughness come from."""


class CatalogueBore(UnitTable):
    """An own catalogue row for an inside diameter."""

    material: Name
    """Material and wall, as the `material` key of a kind of pipe."""
    nominal: NominalSize
    """Nominal size."""
    bore: Size
    """Inside diameter."""
    source: Text
    """Where the number comes from."""


class CatalogueFitting(UnitTable):
    """An own catalogue row for the equivalent length of a fitting at C 120."""

    fitting: Name
    """Name of the fitting."""
    nominal: NominalSize
    """Nominal size."""
    length: LengthOrZero
    """Equivalent length at C 120 in pipe of this size; it is corrected for C, not for the bore."""
    source: Text
    """Where the number comes from."""


class CatalogueC(UnitTable):
    """An own catalogue row for a Hazen-Williams C."""

    material: Name
    """Material, as the `material` key of a kind of pipe."""
    c_factor: Ratio
    """Hazen-Williams C."""
    source: Text
    """Where the number comes from."""


class CatalogueTable(UnitTable):
    """Rows that the project adds to the catalogue; they come before the catalogue's own."""

    bore: list[CatalogueBore] = Field(default_factory=list)
    """Inside diameters."""
    fitting: list[CatalogueFitting] = Field(default_factory=list)
    """Equivalent lengths."""
    c_factor: list[CatalogueC] = Field(default_factory=list)
    """C-factors."""


class LinePiece(UnitTable):
    """The branch lines of a layout."""

    pipe: Name
    """Kind of pipe."""
    sizes: Annotated[list[NominalSize], Field(min_length=1)]
    """Nominal sizes from the end head inward, one for each piece; the last one repeats, more than
    there are pieces are a fault."""
    elevation: Elevation | None = None
    """Elevation of the lines. Default: that of the heads where there is no drop."""


class DropPiece(UnitTable):
    """A drop below the line, or a sprig above it, to each head."""

    pipe: Name
    """Kind of pipe."""
    size: NominalSize
    """Nominal size."""
    length: Length | None = None
    """Length of pipe. Default: the difference of elevation between line and head."""


class NipplePiece(UnitTable):
    """The riser nipples between cross main and branch lines."""

    pipe: Name
    """Kind of pipe."""
    size: NominalSize
    """Nominal size."""
    length: Length | None = None
    """Length of pipe. Default: the difference of elevation between cross main and lines."""


class CrossMainPiece(UnitTable):
    """The cross main (the near main of a loop or a grid)."""

    pipe: Name
    """Kind of pipe."""
    sizes: Annotated[list[NominalSize], Field(min_length=1)]
    """Nominal sizes from the far end towards the feed, one for each piece; the last one repeats, more than
    there are pieces are a fault."""
    elevation: Elevation | None = None
    """Elevation. Default: that of the lines, less the length of the riser nipples."""
    feed: Literal["end", "centre"] = "end"
    """Where the feed main joins: at the last line, or midway between the two middle lines."""


class FarMainPiece(UnitTable):
    """The far main of a loop or a grid, parallel to the cross main."""

    pipe: Name
    """Kind of pipe."""
    size: NominalSize
    """Nominal size."""
    distance: Length | None = None
    """Distance from the cross main. Default: what the heads between the mains need."""


class MainPiece(UnitTable):
    """The feed main, or the underground main, of a layout."""

    pipe: Name
    """Kind of pipe."""
    size: NominalSize
    """Nominal size."""
    length: Length
    """Length of pipe."""
    elevation: Elevation | None = None
    """Elevation of its end on the supply side. Default: that of its other end."""
    fittings: Text | None = None
    """Fittings written out: `2 elbow 90; 1 gate valve`. Without this key they follow from geometry."""
    devices: list[Name] = Field(default_factory=list)
    """Tags of the devices in this piece."""


class RiserPiece(UnitTable):
    """The riser of a layout."""

    pipe: Name
    """Kind of pipe."""
    size: NominalSize
    """Nominal size."""
    bottom_elevation: Elevation
    """Elevation of the base of the riser."""
    length: Length | None = None
    """Length of pipe. Default: the difference of elevation between its ends."""
    fittings: Text | None = None
    """Fittings written out. Without this key they are inferred from geometry."""
    devices: list[Name] = Field(default_factory=list)
    """Tags of the devices in the riser."""


class LayoutTable(UnitTable):
    """A regular array of branch lines, from which all nodes and pipes are generated."""

    type: Literal["tree", "loop", "grid"] = "tree"
    """`tree`: dead-end lines on one cross main; `loop`: two mains joined at both ends, with dead-end lines;
    `grid`: lines between two mains."""
    lines: Count
    """Number of branch lines."""
    line_spacing: Length
    """Distance between lines."""
    heads: Annotated[list[CountOrZero], Field(min_length=1, max_length=2)]
    """Heads on each side of the cross main, `[8, 0]` for one side. In a loop: heads outside and inside each
    main. In a grid, `[12]`: heads on each line."""
    head_spacing: Length
    """Distance between heads on a line."""
    first_head: Length
    """Distance from the cross main to the nearest head."""
    sprinkler: Name
    """Sprinkler type of all heads."""
    head_elevation: Elevation
    """Elevation of the heads."""
    branch: LinePiece
    """Branch lines."""
    drop: DropPiece | None = None
    """Drops, or sprigs where the heads are above the lines."""
    riser_nipple: NipplePiece | None = None
    """Riser nipples."""
    cross_main: CrossMainPiece
    """Cross main."""
    far_main: FarMainPiece | None = None
    """Far main; needed for a loop and for a grid."""
    feed_main: MainPiece | None = None
    """Feed main from the cross main to the top of the riser."""
    riser: RiserPiece | None = None
    """Riser."""
    underground: MainPiece | None = None
    """Underground main from the base of the riser to the point where the supply is known."""


class NetworkTable(UnitTable):
    """Nodes and pipes from tables, CSV or XLSX (`book.xlsx#Sheet`), in the folder of the project."""

    nodes: Text
    """File of the nodes."""
    pipes: Text
    """File of the pipes."""
    fittings: Literal["as written", "from geometry"] = "as written"
    """`as written`: the column `fittings` alone counts. `from geometry`: turns and tees are added to it."""


class DeviceTable(UnitTable):
    """A device in a pipe, named by the last part of the table's name: `[device.backflow]`."""

    title: Text = ""
    """What it is, for the report."""
    kind: Literal["loss", "check valve", "pressure-reducing valve", "pump"] = "loss"
    """What it does."""
    curve: LossCurve | None = None
    """Points `[flow, pressure]` of its loss (of its gain for a pump), by rising flow."""
    loss: PressureOrZero | None = None
    """A fixed loss, where no curve is known."""
    equivalent_length: LengthOrZero | None = None
    """Equivalent length at C 120 in pipe of the size in which it stands, instead of a loss."""
    setting: Pressure | None = None
    """Outlet pressure of a pressure-reducing valve, which stands at the start of its pipe."""
    rated_flow: Flow | None = None
    """Rated flow of one pump."""
    rated_pressure: Pressure | None = None
    """Rated net pressure of one pump. A rating bounds a curve, it gives none."""
    churn_pressure: Pressure | None = None
    """Net pressure of one pump at no flow, with `pressure_at_150`, instead of `curve`."""
    pressure_at_150: Pressure | None = None
    """Net pressure of one pump at 150 % of its rated flow."""
    curve_from_limits: bool = False
    """Before a pump is chosen: take the weakest curve that the pump standard allows for the rating (140 %
    at no flow, 65 % at 150 % flow). Printed as an assumption."""
    speed: Ratio | None = None
    """Speed at which the pump runs; curve and rating are turned to it by the affinity laws."""
    rated_speed: Ratio | None = None
    """Speed for which curve and rating are given."""
    count: Annotated[int, Field(ge=1, le=20)] = 1
    """Like pumps that run together; curve and rating are those of one."""
    arrangement: Literal["parallel", "series"] | None = None
    """How several pumps stand. Needed with `count` of 2 or more."""
    test_header: (
        Annotated[list[Annotated[list[float], Field(min_length=2, max_length=2)]], Field(min_length=2)]
        | None
    ) = None
    """Points `[flow, loss]` of the way from the pump to the end of its test header."""
    source: Text
    """Where the figures come from: maker, data sheet, date."""
