"""Nodes and pipes from the user's tables."""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import Final, get_args

from supplycheck.findings import Place
from supplycheck.model import Node, Sprinkler
from supplycheck.model.system import NodeKind, PipeRole
from supplycheck.project.columns import NODE_COLUMNS, PIPE_COLUMNS
from supplycheck.project.drafts import DraftPipe, DraftSystem, Notes
from supplycheck.project.faults import FaultList, listed, near, quoted
from supplycheck.project.files import Folder
from supplycheck.project.lengths import GivenLength, Rounding, check_length, distance, read_rounding
from supplycheck.project.plausible import check_k_factor
from supplycheck.project.schema_parts import LONGEST_TAG
from supplycheck.project.sections import Sections
from supplycheck.project.tables import Row, RowTable, read_table
from supplycheck.units import UNIT_SETS, UnitSet

_KINDS: Final = get_args(NodeKind)
_ROLES: Final = get_args(PipeRole)
_VALVES: Final = ("open", "closed", "check")


def _choice(row: Row, column: str, choices: tuple[str, ...], default: str, faults: FaultList) -> str:
    text = row.get(column).casefold()
    if not text:
        return default
    if text not in choices:
        close = near(text, choices)
        faults.add(
            row.place(column),
            "is not one of the choices",
            found=quoted(row.get(column)),
            allowed=listed(choices),
            remedy=f"did you mean {close}?" if close else "",
        )
        return default
    return text


def _tag(row: Row, column: str, faults: FaultList) -> str | None:
    text = row.get(column)
    if not text:
        faults.add(row.place(column), "is empty", allowed="a tag")
        return None
    if len(text) > LONGEST_TAG or not text.isprintable() or ";" in text:
        faults.add(
            row.place(column),
            "is not a usable tag",
            found=quoted(text),
            allowed=f"at most {LONGEST_TAG} characters, none of them a ; or a control character",
        )
        return None
    return text


class _NodeReader:
    """Reads rows of the table of nodes."""

    def __init__(
        self,
        table: RowTable,
        units: UnitSet,
        sections: Sections,
        sprinklers: Mapping[str, Sprinkler],
        faults: FaultList,
    ) -> None:
        self.table, self.units, self.faults = table, units, faults
        self.sections, self.sprinklers = sections, sprinklers

    def _sprinkler(self, row: Row) -> str | None:
        name = row.get("sprinkler")
        declared = self.sections.declared["sprinkler"]
        if name and name not in declared:
            close = near(name, declared)
            self.faults.add(
                row.place("sprinkler"),
                "there is no such sprinkler type",
                found=quoted(name),
                allowed=listed(sorted(declared)) or "a table [sprinkler.NAME]",
                remedy=f"did you mean {close}?" if close else "add a table for it",
            )
        return name or None

    def node(self, row: Row) -> Node | None:
        """Return the node of ``row``; ``None`` where it has no usable tag."""
        table, units, faults = self.table, self.units, self.faults
        tag = _tag(row, "tag", faults)
        elevation = table.number(row, "elevation", "length", units, faults, "any")
        if elevation is None:
            faults.add(
                row.place("elevation"), "is empty", allowed="an elevation from the datum of the project"
            )
        sprinkler = self._sprinkler(row)
        k_factor = table.number(row, "k_factor", "k_factor", units, faults)
        flow = table.number(row, "flow", "flow", units, faults, "zero or more")
        default = "sprinkler" if sprinkler or k_factor is not None else "outlet" if flow else "junction"
        kind = _choice(row, "kind", _KINDS, default, faults)
        area = table.number(row, "area", "area", units, faults)
        if tag is None:
            return None
        if kind == "sprinkler":
            k_factor, area = self._head(row, tag, sprinkler, k_factor, area)
        elif row.get("kind"):
            self._no_head(row, kind)
        if flow and kind in ("junction", "sprinkler", "supply"):
            faults.add(
                row.place("flow"),
                f"a {kind} takes no fixed flow",
                found=row.get("flow"),
                allowed="a flow at a hose, hydrant or outlet",
                remedy="set the kind of this node, or leave the cell empty",
            )
        return Node(
            tag=tag,
            elevation=math.nan if elevation is None else elevation,
            x=table.number(row, "x", "length", units, faults, "any"),
            y=table.number(row, "y", "length", units, faults, "any"),
            kind=kind,  # type: ignore[arg-type]
            sprinkler=sprinkler,
            k_factor=k_factor,
            area=area,
            branch_line=row.get("line") or None,
            fixed_flow=flow or 0.0,
            minimum_pressure=table.number(
                row, "minimum_pressure", "pressure", units, faults, "zero or more"
            ),
            place=row.place(),
        )

    def _no_head(self, row: Row, kind: str) -> None:
        """Note what only a sprinkler has at a node of another ``kind``."""
        columns = ("sprinkler", "k_factor") if kind in ("supply", "junction", "hose") else ("sprinkler",)
        for column in columns:
            if row.get(column):
                self.faults.add(
                    row.place(column),
                    f"a {kind} is no sprinkler",
                    found=quoted(row.get(column)),
                    allowed="an empty cell, or kind sprinkler",
                    remedy="set the kind of this node, or leave the cell empty",
                )

    def _head(
        self, row: Row, tag: str, sprinkler: str | None, k_factor: float | None, area: float | None
    ) -> tuple[float | None, float | None]:
        """Return K-factor and area of a head, from its type where the row gives none."""
        kind = self.sprinklers.get(sprinkler) if sprinkler else None
        unread = sprinkler is not None and (kind is None or math.isnan(kind.k_factor))
        if k_factor is not None:
            unit = self.table.unit_set("k_factor", self.units)
            check_k_factor(k_factor, unit, row.place("k_factor"), self.faults)
        if k_factor is None and kind is not None and math.isfinite(kind.k_factor):
            k_factor = kind.k_factor
        if k_factor is None and not unread:
            self.faults.add(
                row.place("k_factor"),
                f"the sprinkler {tag} has no K-factor",
                allowed="a K-factor here, or in its sprinkler type",
                remedy="fill the column sprinkler with the name of a type that has k_factor",
            )
        if area is None and kind is not None:
            area = kind.coverage_area
        if area is None and not unread:
            self.faults.add(
                row.place("area"),
                f"the sprinkler {tag} has no floor area",
                allowed="an area here, or coverage in its sprinkler type",
            )
        return k_factor, area


class _PipeReader:
    """Reads rows of the table of pipes."""

    def __init__(
        self,
        table: RowTable,
        units: UnitSet,
        sections: Sections,
        nodes: Mapping[str, Node],
        rounding: Rounding,
        faults: FaultList,
    ) -> None:
        self.rounding = rounding
        self.table, self.units, self.sections, self.nodes, self.faults = (
            table,
            units,
            sections,
            nodes,
            faults,
        )
        self.infer = sections.network is not None and sections.network.fittings == "from geometry"
        self.from_coordinates = 0
        self._automatic: dict[str, int] = {}

    def _end(self, row: Row, column: str) -> str | None:
        tag = _tag(row, column, self.faults)
        if tag is not None and tag not in self.nodes:
            close = near(tag, self.nodes) if len(self.nodes) < 2000 and len(self.faults) < 20 else ""
            self.faults.add(
                row.place(column),
                "there is no such node",
                found=quoted(tag),
                allowed="a tag of the table of nodes",
                remedy=f"did you mean {close}?" if close else "add the node, or correct the tag",
            )
            return None
        return tag

    def _names(self, row: Row, column: str, what: str) -> tuple[str, ...]:
        declared = self.sections.declared[what]
        names = tuple(part.strip() for part in row.get(column).split(";") if part.strip())
        for name in names:
            if name not in declared:
                close = near(name, declared)
                self.faults.add(
                    row.place(column),
                    "there is no such device" if what == "device" else "there is no such kind of pipe",
                    found=quoted(name),
                    allowed=listed(sorted(declared)) or f"a table [{what}.NAME]",
                    remedy=f"did you mean {close}?" if close else f"add a table [{what}.{name}]",
                )
        return names

    def _own_tag(self, row: Row, start: str, end: str) -> str:
        if row.get("tag"):
            return _tag(row, "tag", self.faults) or f"{start}-{end}"
        plain = f"{start}-{end}"
        count = self._automatic[plain] = self._automatic.get(plain, 0) + 1
        return plain if count == 1 else f"{plain} ({count})"

    def pipe(self, row: Row) -> DraftPipe | None:
        """Return the pipe of ``row``; ``None`` where its ends are not known."""
        table, units, faults = self.table, self.units, self.faults
        start, end = self._end(row, "from"), self._end(row, "to")
        length = table.number(row, "length", "length", units, faults)
        bore = table.number(row, "bore", "size", units, faults)
        c_factor = table.number(row, "c_factor", "ratio", units, faults)
        kinds = self._names(row, "kind", "pipe")
        if not kinds:
            faults.add(
                row.place("kind"), "is empty", allowed=listed(sorted(self.sections.declared["pipe"]))
            )
        if not row.get("size") and bore is None:
            faults.add(
                row.place("size"), "is empty", allowed="a nominal size here, or an inside diameter in bore"
            )
        devices = self._names(row, "devices", "device")
        valve = _choice(row, "valve", _VALVES, "open", faults)
        role = _choice(row, "role", _ROLES, "pipe", faults)
        if start is None or end is None:
            return None
        if start == end:
            faults.add(
                row.place("to"),
                "a pipe joins a node to itself",
                found=quoted(end),
                allowed="two nodes",
                remedy="correct one of the two tags, or take the pipe out",
            )
            return None
        length = self._length(row, start, end, length)
        return DraftPipe(
            tag=self._own_tag(row, start, end),
            start=start,
            end=end,
            length=length,
            kind=kinds[0] if kinds else "",
            size=row.get("size"),
            place=row.place(),
            bore=bore,
            c_factor=c_factor,
            fittings=row.get("fittings") or None,
            devices=devices,
            valve=valve,  # type: ignore[arg-type]
            role=role,  # type: ignore[arg-type]
            infer=self.infer,
        )

    def _length(self, row: Row, start: str, end: str, given: float | None) -> float:
        a, b = self.nodes[start], self.nodes[end]
        if given is not None:
            check_length(
                GivenLength(given, a, b, row.place("length")), self.rounding, self.units, self.faults
            )
            return given
        length = distance(a, b)
        if length is None:
            self.faults.add(
                row.place("length"),
                "has no length",
                allowed="a length here, or coordinates x and y at both nodes",
            )
            return math.nan
        self.from_coordinates += 1
        if length == 0:
            self.faults.add(
                row.place("length"),
                f"{start} and {end} stand at the same point",
                allowed="a length above zero",
                remedy="give the pipe's length, or use one tag for both nodes",
            )
        return length


def _without_twins(tagged: list[tuple[str, Place]], what: str, faults: FaultList) -> None:
    first: dict[str, Place] = {}
    for tag, place in tagged:
        if tag in first:
            faults.add(
                place,
                f"the {what} tag stands twice",
                found=quoted(tag),
                allowed="every tag once",
                remedy=f"it stands first in {first[tag].where}",
            )
        first.setdefault(tag, place)


def read_network(
    sections: Sections, folder: Folder, sprinklers: Mapping[str, Sprinkler], notes: Notes, faults: FaultList
) -> DraftSystem | None:
    """Return the system of the tables named in ``[network]``; ``None`` with faults noted."""
    network = sections.network
    if network is None:
        return None
    units = UNIT_SETS[network.units or sections.units]
    before = len(faults)
    node_table = read_table(folder, network.nodes, sections.place("network.nodes"), NODE_COLUMNS, faults)
    pipe_table = read_table(folder, network.pipes, sections.place("network.pipes"), PIPE_COLUMNS, faults)
    if node_table is None or pipe_table is None or not (node_table.whole and pipe_table.whole):
        return None
    for table, key in ((node_table, "nodes"), (pipe_table, "pipes")):
        if table.comma_read:
            notes.add(f"network.{key}", "decimal commas", "inferred", "cells are separated by semicolons")
    complete = len(faults) == before
    node_reader = _NodeReader(node_table, units, sections, sprinklers, faults)
    nodes = [node for node in map(node_reader.node, node_table.rows) if node is not None]
    _without_twins([(node.tag, node.place or Place("")) for node in nodes], "node", faults)
    by_tag = {node.tag: node for node in nodes}
    rounding = read_rounding(node_table, pipe_table, units)
    pipe_reader = _PipeReader(pipe_table, units, sections, by_tag, rounding, faults)
    pipes = [pipe for pipe in map(pipe_reader.pipe, pipe_table.rows) if pipe is not None]
    _without_twins([(pipe.tag, pipe.place) for pipe in pipes], "pipe", faults)
    if "fittings" not in network.model_fields_set:
        notes.add("network.fittings", "as written", "assumed", "only the fittings in the table count")
    if pipe_reader.from_coordinates:
        notes.add(
            "network.pipes.length",
            f"{pipe_reader.from_coordinates} lengths are the distances between coordinates",
            "inferred",
            "coordinates and elevations of the nodes",
        )
    untold = [node for node in nodes if node.kind == "sprinkler" and node.branch_line is None]
    if untold and all(node.x is not None and node.y is not None for node in untold):
        told = f"branch lines of {len(untold)} sprinklers"
        notes.add("network.nodes.line", told, "inferred", "straight runs of pipe and coordinates")
    complete &= len(by_tag) == len(node_table.rows) and len(pipes) == len(pipe_table.rows)
    return DraftSystem(tuple(nodes), tuple(pipes), complete)
