"""What all layouts share: elevations, and the builder that collects nodes and pipes."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, field
from types import MappingProxyType
from typing import Final

from supplycheck.findings import Place
from supplycheck.model import Node, Sprinkler
from supplycheck.model.system import NodeKind, PipeRole
from supplycheck.project.drafts import DraftPipe, Notes
from supplycheck.project.faults import FaultList
from supplycheck.project.schema_parts import UnitTable
from supplycheck.project.schema_system import LayoutTable
from supplycheck.project.sections import Sections
from supplycheck.units import UNIT_SETS, UnitSet

_KEYS: Final = MappingProxyType(
    {"branch line": "branch", "drop": "drop", "riser nipple": "riser_nipple", "cross main": "cross_main"}
)
SAME = 1e-6
"""Two elevations [m] closer than this are one."""


def repeated(sizes: Sequence[str], index: int) -> str:
    """Return the size at ``index``; the last one repeats.

    >>> repeated(["1", "2"], 7)
    '2'
    """
    return sizes[min(index, len(sizes) - 1)]


def units_in(table: UnitTable, around: UnitSet) -> UnitSet:
    """Return the unit set of ``table``: its own, or that of the table around it."""
    return around if table.units is None else UNIT_SETS[table.units]


@dataclass(frozen=True, slots=True)
class Levels:
    """Elevations of heads, lines and mains, lengths of drops and riser nipples, all [m]."""

    head: float
    line: float
    main: float
    drop: float
    nipple: float


def _drop_length(
    layout: LayoutTable, units: UnitSet, head: float, line: float, sections: Sections, faults: FaultList
) -> float:
    drop, rise = layout.drop, abs(line - head)
    if drop is None:
        if rise > SAME:
            faults.add(
                sections.place("layout.drop"),
                "is missing: heads and lines stand at different elevations",
                found=f"heads at {units.text(head, 'length')}, lines at {units.text(line, 'length')}",
                remedy="describe the drop or sprig, or give both one elevation",
            )
        return 0.0
    if rise <= SAME:
        faults.add(
            sections.place("layout.branch.elevation"),
            "is that of the heads, so that there is no drop",
            found=units.text(line, "length"),
            allowed="the elevation of the lines",
            remedy="give branch its elevation, or take the drop out",
        )
        return 1.0
    return _at_least(
        drop.length.si(units_in(drop, units)) if drop.length else None,
        rise,
        "layout.drop.length",
        units,
        sections,
        faults,
    )


def _at_least(
    given: float | None, rise: float, where: str, units: UnitSet, sections: Sections, faults: FaultList
) -> float:
    """Return the length ``given``, or ``rise``; a length shorter than the rise is a fault."""
    if given is None:
        return rise
    if given < rise - SAME:
        faults.add(
            sections.place(where),
            "is shorter than the difference of elevation between its ends",
            found=units.text(given, "length"),
            allowed=f"at least {units.text(rise, 'length')}",
            remedy="correct the length or the elevations",
        )
    return given


def read_levels(
    layout: LayoutTable, units: UnitSet, sections: Sections, notes: Notes, faults: FaultList
) -> Levels:
    """Return the elevations of a layout, those that follow from others included."""
    head = layout.head_elevation.si(units)
    line = (
        head
        if layout.branch.elevation is None
        else layout.branch.elevation.si(units_in(layout.branch, units))
    )
    if layout.branch.elevation is None:
        notes.add(
            "layout.branch.elevation", units.text(line, "length"), "inferred", "elevation of the heads"
        )
    drop = _drop_length(layout, units, head, line, sections, faults)
    nipple = layout.riser_nipple
    nipple_length = nipple.length.si(units_in(nipple, units)) if nipple and nipple.length else None
    if layout.cross_main.elevation is not None:
        main = layout.cross_main.elevation.si(units_in(layout.cross_main, units))
    else:
        main = line - (nipple_length or 0.0)
        source = (
            "elevation of the lines less the riser nipples" if nipple_length else "elevation of the lines"
        )
        notes.add("layout.cross_main.elevation", units.text(main, "length"), "inferred", source)
    rise = abs(line - main)
    if nipple is None and rise > SAME:
        faults.add(
            sections.place("layout.riser_nipple"),
            "is missing: cross main and lines stand at different elevations",
            found=f"cross main at {units.text(main, 'length')}, lines at {units.text(line, 'length')}",
            remedy="describe the riser nipple, or give both one elevation",
        )
    elif nipple is not None and rise <= SAME:
        faults.add(
            sections.place("layout.riser_nipple"),
            "has no length: cross main and lines stand at one elevation",
            allowed="a length here, or an elevation for the cross main",
            remedy="take the riser nipple out if the lines leave the main at its own height",
        )
    else:
        nipple_length = _at_least(
            nipple_length, rise, "layout.riser_nipple.length", units, sections, faults
        )
    return Levels(head, line, main, drop, nipple_length or 0.0)


@dataclass(slots=True)
class Builder:
    """Collects the nodes and pipes of one layout."""

    layout: LayoutTable
    units: UnitSet
    levels: Levels
    place: Place
    sprinkler: Sprinkler | None
    area: float
    nodes: list[Node] = field(default_factory=list)
    pipes: list[DraftPipe] = field(default_factory=list)

    def node(self, tag: str, x: float, y: float, elevation: float, kind: NodeKind = "junction") -> str:
        """Add a node and return its tag."""
        self.nodes.append(Node(tag, elevation, x, y, kind, place=self.place))
        return tag

    def head(self, tag: str, x: float, y: float, line: str) -> str:
        """Add a head, with its drop if there is one; return the point on the line."""
        k_factor = self.sprinkler.k_factor if self.sprinkler else math.nan
        elevation = self.levels.head
        node = Node(
            tag,
            elevation,
            x,
            y,
            "sprinkler",
            self.layout.sprinkler,
            k_factor,
            self.area,
            line,
            place=self.place,
        )
        self.nodes.append(node)
        drop = self.layout.drop
        if drop is None:
            return tag
        point = f"{tag}T"
        self.nodes.append(Node(point, self.levels.line, x, y, branch_line=line, place=self.place))
        self.pipe(point, tag, self.levels.drop, drop.pipe, drop.size, "drop")
        return point

    def pipe(
        self, start: str, end: str, length: float, kind: str, size: str, role: PipeRole, key: str = ""
    ) -> None:
        """Add a pipe with fittings from geometry; ``key`` names its table where the role does not."""
        place = Place(self.place.file, f"{self.place.where}.{key or _KEYS[role]}")
        self.pipes.append(
            DraftPipe(f"{start}-{end}", start, end, length, kind, size, place, role=role, infer=True)
        )
