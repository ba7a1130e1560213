"""The input page of the documentation, made from the schema: every table, key, unit and default."""

from __future__ import annotations

from typing import Any

from supplycheck.project.columns import NODE_COLUMNS, PIPE_COLUMNS
from supplycheck.project.describe import descriptions, json_schema, tables
from supplycheck.project.plausible import LIMITS
from supplycheck.project.schema import ProjectFile
from supplycheck.project.schema_parts import Table
from supplycheck.project.tables import LONGEST_CELL, MOST_ROWS, Column
from supplycheck.units import METRIC, US

_INTRO = f"""\
# The project file

This page is made from the schema that reads the file (`supplycheck schema` prints it as JSON Schema,
from which editors complete keys). A project is a folder with a `project.toml` and, where it uses them,
tables in CSV or XLSX. `supplycheck new DIR` writes a commented starter.

## How values are written

- **Units.** `units = "us"` or `units = "metric"` at the top of the file holds for every number; a table may
  carry its own `units`, which also holds for the tables inside it. Any number may instead be a text with a
  unit: `"80 psi"`, `"5.5 bar"`, `"1000 gpm"`.
- **Feet, inches, fractions.** Lengths and sizes may be written `"10'-6\\""`, `"10 ft 6 in"`, `"1 1/4 in"`,
  `"1-1/4"`.
- **Nominal sizes** are `"1 1/4"`, `2`, `"DN 50"`, `50`; a bare number is in the unit in which the material
  is sold.
- **Dates** are written `2026-06-01`, without quotes.
- **Fittings** are written `2 elbow 90; 1 tee`; one of known length or loss `strainer = 20 ft`,
  `entrance: k = 0.5`; `none` says that there are none.
- **Paths** are file names inside the folder of the project; nothing outside it is read.
- What is left out and follows from the catalogue, from geometry, or is assumed, is listed in the report.
- All faults of a project are shown at once, each with file, key or row, value found, what is allowed and
  what to do. An unknown key is a fault.

## What a layout is made of

The cross main runs along y at x = 0, the lines along x; line 1 is the most remote. Other tables name nodes
and pipes by these tags; a pipe is named by its two nodes from the supply outward, `M2-M1`.

| tag | point |
|---|---|
| `L3.4` | head 4 of line 3, counted along x (`FL3.4` on the far main of a loop) |
| `L3.4T` | the point on the line from which the drop or sprig of that head leaves |
| `M3`, `N3` | line 3 at the cross main, and at the top of its riser nipple |
| `FM3`, `FN3` | the same at the far main |
| `MC` | where a feed main joins between two lines |
| `TOR`, `BOR` | top and base of the riser |
| `S` | the supply: always the last point |

## Fittings from geometry

Layouts, and tables with `fittings = "from geometry"`, are charged what follows from the coordinates; each
fitting is listed as inferred, with its node.

- Where two pipes meet, a turn of 22.5° to 67.5° is a 45° elbow and a sharper one a 90° elbow, charged to
  the smaller pipe, between equal ones to the one farther from the supply.
- Where three or more meet, or two and an outlet, it is a tee or cross. Where all water for the point comes
  through one pipe, each other pipe that does not lead straight on is charged the tee at its own size: the
  tee on top of a riser nipple goes to the branch lines, that at its bottom to the riser nipple, that of a
  feed main to the cross main. In a loop, where water may come from more than one side, the straight run is
  not charged and each leg is charged the tee at its own size; where two runs cross, the smaller one is.
- The fitting into which a head screws is not charged, nor a change of size on a straight run.
- A piece of a layout with its own `fittings` is charged those and nothing from geometry. In a table, those
  written on a pipe are added to those from geometry: valves are written there, and turns inside a pipe that
  is longer than its ends are apart. An elbow or a tee that is both written and inferred counts twice, and
  is asked about.

Equivalent lengths are those of the standard at C 120, times (C/120)^1.85 and, under NFPA 13, times
(bore / schedule 40 bore)^4.87.

## Tables of nodes and pipes

CSV (separated by comma, semicolon or tab; UTF-8, with or without byte-order mark) or one sheet of a
workbook, `"book.xlsx#Sheet"`. The first row holds the names of the columns, in any order and case; a unit
in brackets behind a name, `Length (ft)`, holds for that column. Tags are texts: `001` stays `001`, and hold
no `;`. A cell holds at most {LONGEST_CELL} characters, a table at most {MOST_ROWS} rows.

Where semicolons separate the cells, a comma in a number is the decimal comma, `10,5`, and never separates
thousands; this is then listed in the report. In all other files decimals are written with a point. No
formula of a workbook is run: its stored result counts. A formula without one and merged cells are faults.
"""


def _limit_table() -> list[str]:
    lines = [
        "## What no project has",
        "",
        "A number outside these limits is a slip of the decimal point, of a unit or a datum, and a fault.",
        "The limits lie far outside what is built (common practice, no source); metric ones in brackets.",
        "",
        "| value | limit |",
        "|---|---|",
    ]
    return [*lines, *(f"| {name} | {limit} |" for name, limit in LIMITS), ""]


def _column_table(title: str, columns: tuple[Column, ...]) -> list[str]:
    lines = [f"### {title}", "", "| column | what it holds | unit: us, metric |", "|---|---|---|"]
    for column in columns:
        name = f"`{column.name}`" + (" (needed)" if column.required else "")
        unit = f"{US.symbol(column.kind)}, {METRIC.symbol(column.kind)}" if column.kind else ""
        lines.append(f"| {name} | {column.description} | {unit.strip(', ')} |")
    return [*lines, ""]


def _quantity(entry: dict[str, Any]) -> tuple[str, str]:
    """Return the kind of value of a key and its units."""
    for option in (entry, *entry.get("anyOf", ())):
        if "quantity" in option:
            unit = option.get("unit", {})
            units = f"{unit.get('us', '')}, {unit.get('metric', '')}".strip(", ")
            return option["quantity"], units
    options = [
        option for option in (entry, *entry.get("anyOf", ())) if "enum" in option or "const" in option
    ]
    if options:
        words = [word for option in options for word in option.get("enum", [option.get("const")])]
        lists = ["list of text" for option in entry.get("anyOf", ()) if option.get("type") == "array"]
        return " · ".join([f"`{word}`" for word in words] + lists), ""
    if "items" in entry:
        kind, units = _quantity(entry["items"])
        return f"list of {kind}", units
    if "$ref" in entry:
        return "table", ""
    if "additionalProperties" in entry:
        return "names and values", ""
    return {"string": "text", "boolean": "`true` · `false`", "integer": "whole number"}.get(
        entry.get("type", ""), entry.get("type", "value")
    ), ""


def _default(entry: dict[str, Any], *, needed: bool) -> str:
    if needed:
        return "needed"
    value = entry.get("default")
    if value is None or value == "" or value == [] or value == {}:
        return ""
    return f"`{str(value).lower()}`" if isinstance(value, bool) else f"`{value}`"


def _key_table(name: str, table: type[Table], schema: dict[str, Any]) -> list[str]:
    block = schema if table is ProjectFile else schema["$defs"][table.__name__]
    needed = set(block.get("required", ()))
    heading = f"## `[{name}]`" if name else "## Top of the file"
    intro = " ".join((table.__doc__ or "").split())
    lines = [
        heading,
        "",
        intro,
        "",
        "| key | value | unit: us, metric | default | what it means |",
        "|---|---|---|---|---|",
    ]
    texts = descriptions(table)
    for key, entry in block["properties"].items():
        kind, units = _quantity(entry)
        default = _default(entry, needed=key in needed)
        lines.append(f"| `{key}` | {kind} | {units} | {default} | {texts[key].replace('|', '·')} |")
    return [*lines, ""]


def input_page() -> str:
    """Return the page as Markdown."""
    schema = json_schema()
    lines = [_INTRO]
    lines += _column_table("Columns of nodes", NODE_COLUMNS)
    lines += _column_table("Columns of pipes", PIPE_COLUMNS)
    lines += _limit_table()
    seen: set[type[Table]] = set()
    for name, table in tables():
        if table in seen:
            continue
        seen.add(table)
        lines += _key_table(name, table, schema)
    return "\n".join(lines).rstrip() + "\n"
