"""What the search for the design area hands on: the cases and how they were found."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from supplycheck.model import DemandCase
from supplycheck.model.words import Step


@dataclass(frozen=True, slots=True)
class Candidates:
    """The candidate design areas of a project, how they were found, and in words what was tried.

    ``complete`` is false where the search stopped at its cap: the hardest area is then not proven.
    """

    cases: tuple[DemandCase, ...]
    steps: tuple[Step, ...]
    statement: str
    mode: Literal["given", "search"]
    complete: bool = True
