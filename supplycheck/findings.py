"""Places in the user's files, faults found there, and findings of the checks."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from types import MappingProxyType
from typing import Literal

State = Literal["ok", "fail", "missing", "not applicable", "ask authority"]


@dataclass(frozen=True, slots=True)
class Place:
    """Where a value stands: a file and a key path (``supply.flow_test.date``) or a table row."""

    file: str
    where: str = ""

    def __str__(self) -> str:
        return f"{self.file}: {self.where}" if self.where else self.file


@dataclass(frozen=True, slots=True)
class Fault:
    """One fault in the user's files: where, what was found, what is allowed, what to do."""

    place: Place
    problem: str
    found: str = ""
    allowed: str = ""
    remedy: str = ""

    def __str__(self) -> str:
        parts = [f"{self.place}: {self.problem}"]
        parts += [f"found {self.found}"] if self.found else []
        parts += [f"allowed: {self.allowed}"] if self.allowed else []
        parts += [self.remedy] if self.remedy else []
        return "; ".join(parts)


@dataclass(frozen=True, slots=True)
class Measure:
    """A value [SI] and its kind of quantity, so that display can choose the unit."""

    value: float
    kind: str


@dataclass(frozen=True, slots=True)
class Finding:
    """What one check reports.

    ``text`` may hold ``{measured}``, ``{limit}`` and any key of ``values`` in braces; display fills
    them with numbers in the project's units. ``remedy`` says what the reader can do about it.
    """

    check: str
    state: State
    text: str
    measured: Measure | None = None
    limit: Measure | None = None
    source: str = ""
    tags: tuple[str, ...] = ()
    remedy: str = ""
    values: Mapping[str, Measure] = field(default_factory=lambda: MappingProxyType({}))
