"""The catalogue's page of the documentation, made from the tables.

``python -m supplycheck.catalogue.page docs/catalogue.md`` writes it.
"""

from __future__ import annotations

import sys
from collections.abc import Iterable, Mapping, Sequence
from pathlib import Path
from types import MappingProxyType
from typing import Final

from supplycheck.catalogue.rules import margin_shapes
from supplycheck.catalogue.tables import Row, table

_TITLES: Final = (
    ("Pipe bores, inch sizes", "bores_in"),
    ("Pipe bores, metric sizes", "bores_mm"),
    ("Nominal sizes", "nominal_sizes"),
    ("Materials and their families", "materials"),
    ("Other names", "aliases"),
    ("C-factors", "c_factors"),
    ("Multipliers on equivalent lengths for C", "c_multipliers"),
    ("Roughness", "roughness"),
    ("Equivalent lengths, NFPA (C 120, steel schedule 40)", "fittings_nfpa"),
    ("Equivalent lengths, EN 12845 (C 120, no bore correction)", "fittings_en"),
    ("Tees of EN 12845 as published elsewhere", "fittings_check_en"),
    ("Hazard classes, NFPA 13", "hazards_nfpa"),
    ("Density and area, NFPA 13", "density_points_nfpa"),
    ("Hazard classes, EN 12845", "hazards_en"),
    ("K-factors in both unit sets", "k_factors"),
    ("Early suppression (verify before use)", "esfr"),
    ("Hydrant outlet coefficients", "outlet_coefficients"),
    ("Factors for pumper outlets", "pumper_factors"),
    ("Hydrant classes (flow at 20 psi)", "hydrant_classes"),
    ("Required fire flow, IFC table B105.1", "fire_flow"),
    ("Hydrants for a fire flow, IFC appendix C", "hydrant_spacing"),
    ("Fire pump ratings", "pump_ratings"),
    ("Pre-calculated pump duties, EN 12845", "pump_duties_en"),
    ("Antifreeze", "fluids"),
    ("Single figures by standard and edition", "rules"),
)
_CROSSED: Final = MappingProxyType(
    {
        "fittings_nfpa": ("fitting", "nominal", "length_ft"),
        "fittings_en": ("fitting", "nominal", "length_m"),
        "fire_flow": ("flow_gpm duration_h", "construction", "area_up_to_ft2"),
    }
)
_INTRO: Final = """# Catalogue

Every published number that the program takes from a table, in the unit in which its source prints it (the
unit closes the column name), with its source. *From memory, not verified* says that the figure was not
read in the publication named: check it against the adopted edition before you rely on it. A project may
override any of them and add rows of its own.

This page is made from `supplycheck/catalogue/data/` by
`python -m supplycheck.catalogue.page docs/catalogue.md`.

How the tables are read:

- Sizes may be written `1 1/4`, `1¼`, `1.25`, `1-1/4 in` or `DN 32`; a bare number is inches
  for materials sold in inches and DN for those sold in DN.
- Names do not depend on case, order of words or punctuation: `Sch. 40 steel` is `steel schedule 40`.
- Density on a curve (NFPA 13 up to 2019) is taken straight between its two end points, never
  beyond them.
- The factor of a pumper outlet is taken straight between the printed readings, constant from 7 psi on, and
  refused below the first.
- Where sources disagree, each figure is a choice with a name of its own, or the note of the row tells it.
"""


def _cell(text: str) -> str:
    return text.replace("|", "\\|").replace("<", "&lt;")


def _grid(header: Sequence[str], rows: Iterable[Sequence[str]]) -> list[str]:
    lines = ["| " + " | ".join(header) + " |", "|" + "---|" * len(header)]
    return lines + ["| " + " | ".join(map(_cell, row)) + " |" for row in rows]


def _section(title: str, name: str) -> list[str]:
    rows = table(name)
    sources = list(dict.fromkeys(row["source"] for row in rows))
    mark = {source: f"[{number}]" for number, source in enumerate(sources, start=1)}
    lines = _crossed(rows, *_CROSSED[name], mark) if name in _CROSSED else _plain(rows, mark)
    notes = [f"- {number} {_cell(source)}" for source, number in mark.items()]
    return [f"## {title}", "", *lines, "", *notes, ""]


def _plain(rows: Sequence[Row], mark: Mapping[str, str]) -> list[str]:
    used = [column for column in rows[0] if column != "source" and any(row[column] for row in rows)]
    return _grid(
        [*used, "source"], ([*(row[column] for column in used), mark[row["source"]]] for row in rows)
    )


def _crossed(rows: Sequence[Row], down: str, across: str, value: str, mark: Mapping[str, str]) -> list[str]:
    """Lay the rows out as the publication prints them, one fitting or flow a line."""

    def label(row: Row) -> str:
        return " / ".join(row[column] for column in down.split())

    def cell(row: Row) -> str:
        return f"{row[value]} {mark[row['source']]}" if len(mark) > 1 else row[value]

    order = [
        size for row in table("nominal_sizes") for size in (row["nominal_in"], f"DN {row['nominal_dn']}")
    ]
    tops = list(dict.fromkeys(row[across] for row in rows))
    if across == "nominal":
        tops.sort(key=order.index)
    cells = {(label(row), row[across]): cell(row) for row in rows}
    names = dict.fromkeys(label(row) for row in rows)
    header = [f"{value} by {down.replace(' ', ' / ')}", *tops]
    lines = _grid(header, ([name, *(cells.get((name, top), "–") for top in tops)] for name in names))
    told: dict[tuple[str, str], list[str]] = {}
    for row in rows:
        if row["note"]:
            told.setdefault((label(row), row["note"]), []).append(row[across])
    for (name, note), places in told.items():
        where = f" in {places[0]}" if len(places) == 1 else ""
        lines += ["", f"{name}{where}: {_cell(note)}."]
    return lines


def _margins() -> list[str]:
    shapes = margin_shapes()
    rows = [[shape.place, shape.applies_to, shape.text, shape.published, shape.source] for shape in shapes]
    lines = _grid(["place", "applies to", "rule as written", "published", "source"], rows)
    status = f"Each is an {shapes[0].note}: ask the authority."
    return ["## Margin rules as authorities have written them", "", status, "", *lines, ""]


def catalogue_page() -> str:
    """Return the page as Markdown."""
    lines = [_INTRO]
    for title, name in _TITLES:
        lines += _section(title, name)
    return "\n".join([*lines, *_margins()])


def table_names() -> tuple[str, ...]:
    """Return the names of the tables on the page."""
    return tuple(name for _, name in _TITLES)


def main(arguments: Sequence[str]) -> int:
    """Write the page to the path given; return the exit code."""
    if len(arguments) != 1:
        sys.stderr.write("usage: python -m supplycheck.catalogue.page PATH\n")
        return 2
    Path(arguments[0]).write_text(catalogue_page(), encoding="utf-8", newline="\n")
    return 0


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
