"""What does not fit together in a layout: names that do not exist, counts, parts that its type has not."""

from __future__ import annotations

import math
import statistics
from typing import Final

from supplycheck.findings import Place
from supplycheck.project.faults import FaultList, listed, near, quoted
from supplycheck.project.layout_parts import units_in
from supplycheck.project.plausible import FARTHEST_HEAD, check_spacing
from supplycheck.project.schema_system import LayoutTable
from supplycheck.project.sections import Sections
from supplycheck.units import UnitSet

MOST_HEADS: Final = 200_000
_PIECES: Final = (
    "branch",
    "drop",
    "riser_nipple",
    "cross_main",
    "far_main",
    "feed_main",
    "riser",
    "underground",
)
_WITH_DEVICES: Final = ("feed_main", "riser", "underground")


def count_heads(layout: LayoutTable) -> int:
    """Return the number of heads of ``layout``."""
    return sum(layout.heads) * layout.lines * (2 if layout.type == "loop" else 1)


def _known(name: str, what: str, problem: str, place: Place, sections: Sections, faults: FaultList) -> None:
    declared = sections.declared[what]
    if name not in declared:
        close = near(name, declared)
        faults.add(
            place,
            problem,
            found=quoted(name),
            allowed=listed(sorted(declared)) or f"a table [{what}.NAME]",
            remedy=f"did you mean {close}?" if close else f"add a table [{what}.{name}]",
        )


def _check_names(layout: LayoutTable, sections: Sections, faults: FaultList) -> None:
    for key in _PIECES:
        piece = getattr(layout, key)
        if piece is not None:
            place = sections.place(f"layout.{key}.pipe")
            _known(piece.pipe, "pipe", "there is no such kind of pipe", place, sections, faults)
    place = sections.place("layout.sprinkler")
    _known(layout.sprinkler, "sprinkler", "there is no such sprinkler type", place, sections, faults)
    for key in _WITH_DEVICES:
        piece = getattr(layout, key)
        for device in piece.devices if piece is not None else ():
            place = sections.place(f"layout.{key}.devices")
            _known(device, "device", "there is no such device", place, sections, faults)


def _check_counts(layout: LayoutTable, sections: Sections, faults: FaultList) -> None:
    heads = count_heads(layout)
    if heads == 0:
        faults.add(
            sections.place("layout.heads"), "there are no heads", found="0", allowed="at least one head"
        )
    if heads > MOST_HEADS:
        faults.add(
            sections.place("layout"),
            "the layout is too large",
            found=f"{heads} heads",
            allowed=f"at most {MOST_HEADS} heads",
        )
    if layout.type != "tree" and layout.lines < 2:
        faults.add(
            sections.place("layout.lines"),
            f"a {layout.type} needs two lines",
            found="1",
            allowed="2 or more",
        )


def _check_grid(layout: LayoutTable, sections: Sections, faults: FaultList) -> None:
    if len(layout.heads) > 1 and min(layout.heads) > 0:
        faults.add(
            sections.place("layout.heads"),
            "a grid has its heads between the mains",
            found=str(layout.heads),
            allowed="one number, the heads on each line",
        )
    if len(layout.branch.sizes) > 1:
        faults.add(
            sections.place("layout.branch.sizes"),
            "the lines of a grid have no end head",
            found=listed(layout.branch.sizes),
            allowed="one size",
        )


def _check_sizes(layout: LayoutTable, sections: Sections, faults: FaultList) -> None:
    """Note sizes of lines and cross main for which there is no piece."""
    heads, lines = max(layout.heads), layout.lines
    of_main = (lines + 1) // 2 if layout.cross_main.feed == "centre" else lines - 1
    counted = [
        ("cross_main", layout.cross_main.sizes, of_main, f"{lines} lines, {layout.cross_main.feed} feed")
    ]
    if layout.type != "grid":
        counted.append(
            ("branch", layout.branch.sizes, heads, f"{heads} heads on the longer side of a line")
        )
    for key, sizes, pieces, why in counted:
        most = max(pieces, 1)
        given = "heads" if key == "branch" else "lines"
        if len(sizes) > most and not faults.touched(sections.place(f"layout.{given}")):
            what = "a line" if key == "branch" else "the cross main"
            faults.add(
                sections.place(f"layout.{key}.sizes"),
                f"lists more sizes than {what} has pieces",
                found=f"{len(sizes)} sizes: {listed(sizes)}",
                allowed=f"at most {most}: {what} has {most} piece{'s' if most > 1 else ''} ({why})",
                remedy=f"{listed(sizes[most:])} would not be used: take out what is too much",
            )


def _check_spacing(layout: LayoutTable, units: UnitSet, sections: Sections, faults: FaultList) -> None:
    for key in ("line_spacing", "head_spacing"):
        written = getattr(layout, key)
        place = sections.place(f"layout.{key}")
        check_spacing(written.si(units), written.units(units), place, faults)


def elevations_agree(layout: LayoutTable, units: UnitSet, sections: Sections, faults: FaultList) -> bool:
    """Return whether the elevations of ``layout`` lie within one building; the odd one out is noted."""
    told = [("head_elevation", layout.head_elevation.si(units))]
    for key in _PIECES:
        piece = getattr(layout, key)
        for name in ("elevation", "bottom_elevation"):
            written = getattr(piece, name, None)
            if written is not None:
                told.append((f"{key}.{name}", written.si(units_in(piece, units))))
    levels = [level for _, level in told if math.isfinite(level)]
    if not levels or max(levels) - min(levels) <= FARTHEST_HEAD.si(units):
        return True
    middle = statistics.median(levels)
    where, level = max(told, key=lambda one: abs(one[1] - middle) if math.isfinite(one[1]) else -1.0)
    others = [one for one in levels if one != level]
    faults.add(
        sections.place(f"layout.{where}"),
        "lies too far from the other elevations",
        found=f"{units.text(level, 'length')}; the others are "
        f"{units.text(min(others), 'length')} to {units.text(max(others), 'length')}",
        allowed=f"at most {FARTHEST_HEAD.text(units)} apart",
        remedy="check the decimal point: all elevations count from the same datum",
    )
    return False


def check_layout(layout: LayoutTable, units: UnitSet, sections: Sections, faults: FaultList) -> None:
    """Note what does not fit together in ``layout``."""
    _check_names(layout, sections, faults)
    _check_spacing(layout, units, sections, faults)
    _check_counts(layout, sections, faults)
    _check_sizes(layout, sections, faults)
    if layout.type == "grid":
        _check_grid(layout, sections, faults)
    if layout.type == "tree" and layout.far_main is not None:
        faults.add(
            sections.place("layout.far_main"),
            "a tree has no far main",
            remedy='set type to "loop" or "grid"',
        )
    if layout.type != "tree" and layout.far_main is None:
        faults.add(sections.place("layout.far_main"), f"is missing: a {layout.type} has a far main")
