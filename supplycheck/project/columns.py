"""The columns that tables of nodes and of pipes may have."""

from __future__ import annotations

from typing import Final

from supplycheck.project.tables import Column

NODE_COLUMNS: Final = (
    Column("tag", "Name of the node, unique. `001` stays `001`.", required=True),
    Column("x", "Coordinate on the plan. May be empty.", "length"),
    Column("y", "Coordinate on the plan. May be empty.", "length"),
    Column("elevation", "Elevation from the datum of the project.", "length", required=True),
    Column(
        "kind",
        "`junction`, `sprinkler`, `supply`, `hose`, `hydrant` or `outlet`. "
        "Default: `sprinkler` where a sprinkler or a K-factor is given, `outlet` where a flow is, "
        "otherwise `junction`.",
    ),
    Column("sprinkler", "Sprinkler type, `[sprinkler.NAME]`."),
    Column("k_factor", "K-factor of this outlet, instead of that of its type.", "k_factor"),
    Column("area", "Floor area of this head. Default: the coverage of its type.", "area"),
    Column(
        "line",
        "Branch line on which the head sits, the same text for all its heads. Default: inferred from "
        "straight runs of pipe and coordinates.",
    ),
    Column(
        "flow",
        "Fixed outflow of a hose, hydrant or outlet. It runs in every case and every scenario.",
        "flow",
    ),
    Column(
        "minimum_pressure",
        "Lowest pressure at this node, asked in every case; at a sprinkler where it is open.",
        "pressure",
    ),
)
PIPE_COLUMNS: Final = (
    Column("tag", "Name of the pipe, unique. Default: its two nodes, `A-B`."),
    Column("from", "Node at one end.", required=True),
    Column("to", "Node at the other end.", required=True),
    Column(
        "length",
        "Length from centre to centre. Default: the distance between its nodes, where both have "
        "coordinates; less than that, beyond rounding, is a fault.",
        "length",
    ),
    Column("kind", "Kind of pipe, `[pipe.NAME]`.", required=True),
    Column("size", "Nominal size, from which the bore is looked up."),
    Column("bore", "Inside diameter, instead of that of the size.", "size"),
    Column("c_factor", "Hazen-Williams C of this pipe, instead of that of its kind.", "ratio"),
    Column("fittings", "Fittings, `2 elbow 90; 1 tee`."),
    Column("devices", "Tags of devices, separated by `;`."),
    Column("valve", "`open` (default), `closed`, or `check` (flow passes from `from` to `to` only)."),
    Column(
        "role",
        "`branch line`, `drop`, `riser nipple`, `cross main`, `feed main`, `riser`, `underground` "
        "or `pipe` (default).",
    ),
)
