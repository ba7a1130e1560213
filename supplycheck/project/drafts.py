"""The system between the user's tables or layout and the finished records."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Literal

from supplycheck.findings import Place
from supplycheck.model import Assumption, Node
from supplycheck.model.system import Origin, PipeRole


@dataclass(frozen=True, slots=True)
class DraftPipe:
    """A pipe before its bore, C and fittings are looked up; lengths and bore [m].

    ``fittings`` is the text as written, ``None`` where nothing is written. ``infer`` says whether
    turns and tees are taken from geometry.
    """

    tag: str
    start: str
    end: str
    length: float
    kind: str
    size: str
    place: Place
    bore: float | None = None
    c_factor: float | None = None
    fittings: str | None = None
    devices: tuple[str, ...] = ()
    valve: Literal["open", "closed", "check"] = "open"
    role: PipeRole = "pipe"
    infer: bool = False


@dataclass(frozen=True, slots=True)
class DraftSystem:
    """Nodes and pipes; not ``complete`` where some could not be read."""

    nodes: tuple[Node, ...]
    pipes: tuple[DraftPipe, ...]
    complete: bool = True


@dataclass(slots=True)
class Notes:
    """Values that were not given, collected for the list of assumptions."""

    entries: list[Assumption] = field(default_factory=list)

    def add(self, key: str, value: str, origin: Origin, source: str) -> None:
        """Note one value."""
        self.entries.append(Assumption(key, value, origin, source))
