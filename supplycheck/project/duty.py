"""What the readers of standpipes and of hydrants share."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from typing import Protocol

from supplycheck.findings import Place
from supplycheck.model import Node
from supplycheck.project.drafts import Notes
from supplycheck.project.faults import FaultList, quoted
from supplycheck.project.quantity import Written
from supplycheck.units import UNIT_SETS, UnitSet


class Sheet(Protocol):
    """What is needed of the sections of the project file."""

    @property
    def units(self) -> str:
        """Name of the unit set of the file."""
        ...

    def place(self, where: str) -> Place:
        """Return the place of a key path."""
        ...


class Tags(Protocol):
    """Knows the tags of the system and notes those that do not exist."""

    nodes: dict[str, Node]

    def node(self, tag: str, where: str) -> None:
        """Note a node that does not exist."""
        ...

    def pipes_named(self, tags: Sequence[str], where: str) -> None:
        """Note the pipes that do not exist."""
        ...


class DutyReader:
    """What both readers share: units, faults, notes."""

    def __init__(self, sheet: Sheet, tags: Tags, notes: Notes, faults: FaultList) -> None:
        self.sheet, self.tags, self.notes, self.faults = sheet, tags, notes, faults
        self.base: UnitSet = UNIT_SETS[sheet.units]

    def fault(self, where: str, problem: str, found: str = "", allowed: str = "", remedy: str = "") -> None:
        """Note a fault at the key path ``where``."""
        self.faults.add(self.sheet.place(where), problem, found=found, allowed=allowed, remedy=remedy)

    def value(
        self, written: Written | None, default: float, units: UnitSet, name: tuple[str, str], source: str
    ) -> float:
        """Return the value [SI]; the default is noted under ``name`` (key, kind)."""
        if written is not None:
            return written.si(units)
        key, kind = name
        self.notes.add(key, self.base.text(default, kind), "catalogue", source)
        return default

    def flows(self, table: dict[str, Written], where: str, units: UnitSet) -> tuple[tuple[str, float], ...]:
        """Return outflows [m³/s] by node; nodes that do not exist are noted."""
        for tag in table:
            self.tags.node(tag, where)
        return tuple((tag, flow.si(units)) for tag, flow in table.items())

    def outlet(self, tag: str, where: str) -> None:
        """Note a node that does not exist, or that draws a flow of its own beside the one asked here."""
        self.tags.node(tag, where)
        node = self.tags.nodes.get(tag)
        if node is not None and node.fixed_flow > 0:
            self.fault(
                where,
                f"the node {tag} draws a flow of its own, so that water would be counted twice",
                self.base.text(node.fixed_flow, "flow"),
                remedy="leave its flow empty in the table of nodes",
            )

    def once(self, names: Iterable[str], where: str, what: str) -> None:
        """Note each of ``names`` that stands twice."""
        seen: set[str] = set()
        for name in names:
            if name in seen:
                self.fault(where, f"the same {what} stands twice", quoted(name), f"every {what} once")
            seen.add(name)
