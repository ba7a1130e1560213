"""The whole project as one frozen record."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass

from supplycheck.findings import Place
from supplycheck.model.criteria import Criteria, HoseAllowance
from supplycheck.model.duty import HydrantDuty, OutflowDuty, StandpipeDuty
from supplycheck.model.fluid import Fluid, FrictionLaw
from supplycheck.model.supply import Supply
from supplycheck.model.system import Origin, System


@dataclass(frozen=True, slots=True)
class ProjectFacts:
    """Facts for the title block; texts print exactly as typed."""

    title: str
    site: str
    stage: str
    date: dt.date
    standard: str
    authority: str
    owner: str = ""
    designer: str = ""
    building: str = ""
    occupancy: str = ""
    paper: str = "letter"


@dataclass(frozen=True, slots=True)
class Assumption:
    """A value that was not given in the project: its key, its text, where it came from."""

    key: str
    value: str
    origin: Origin
    source: str


@dataclass(frozen=True, slots=True)
class InputFile:
    """An input file as read, for the echo: name relative to the project, SHA-256, size, text."""

    name: str
    sha256: str
    size: int
    text: str | None


@dataclass(frozen=True, slots=True)
class Scenario:
    """A named question beside the design demand, solved with the actual supply.

    ``open_heads`` are node tags (``None``: those of the governing design area); ``closed_pipes`` are
    shut; ``flows`` are fixed outflows [m³/s] by node, on top of those of the node table, which
    ``with_node_flows`` keeps; ``with_hose`` keeps the hose allowance.
    """

    name: str
    open_heads: tuple[str, ...] | None
    closed_pipes: tuple[str, ...]
    flows: tuple[tuple[str, float], ...]
    with_hose: bool
    place: Place | None = None
    with_node_flows: bool = True


@dataclass(frozen=True, slots=True)
class Unedited:
    """A value of the project file that is still the starter's; ``figure`` where the answer rests on it."""

    key: str
    line: int
    figure: bool


@dataclass(frozen=True, slots=True)
class Project:
    """Everything that the calculation needs, read and checked. ``units`` is ``"us"`` or ``"metric"``."""

    facts: ProjectFacts
    units: str
    criteria: Criteria
    system: System
    supply: Supply
    hose: HoseAllowance
    fluid: Fluid
    law: FrictionLaw
    second_law: FrictionLaw | None
    scenarios: tuple[Scenario, ...]
    assumptions: tuple[Assumption, ...]
    files: tuple[InputFile, ...]
    origins: tuple[Assumption, ...] = ()
    standpipes: StandpipeDuty | None = None
    hydrants: HydrantDuty | None = None
    outflows: OutflowDuty | None = None
    unedited: tuple[Unedited, ...] = ()
