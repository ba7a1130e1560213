"""The `Result` and its parts, all SI. Report writers read these and compute nothing.

Every number that is printed anywhere is a field here, so that screen, PDF, CSV and ``result.json``
show the same value after display rounding.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from types import MappingProxyType
from typing import Literal

from supplycheck.findings import Finding
from supplycheck.model import Project
from supplycheck.model.duty import DutyAnswer
from supplycheck.model.system import Fitting
from supplycheck.supply.beyond import Beyond
from supplycheck.supply.needed import NeededPump as NeededPump
from supplycheck.supply.pumping import PumpAnswer as PumpAnswer
from supplycheck.supply.pumping import PumpState as PumpState
from supplycheck.supply.storage import TankAnswer
from supplycheck.supply.storage import TankLine as TankLine

TankRecord = TankAnswer
"""A tank or reservoir: what it must hold, how long it lasts, its time line."""

Verdict = Literal["adequate", "not adequate", "undetermined"]


@dataclass(frozen=True, slots=True)
class NodeRow:
    """One node in the demand solution; pressures [Pa], flows [m³/s]."""

    tag: str
    kind: str
    x: float | None
    y: float | None
    elevation: float
    pressure: float
    discharge: float
    k_factor: float | None
    required_discharge: float | None
    required_pressure: float | None
    required_by: str
    area: float | None
    branch_line: str | None
    sprinkler: str | None
    in_design_area: bool
    velocity_pressure: float | None
    note: str = ""


@dataclass(frozen=True, slots=True)
class PipeRow:
    """One pipe in the demand solution, in the direction of flow (``flow`` ≥ 0).

    Losses [Pa] are signed from ``start`` to ``end``:
    pressure(start) − pressure(end) = friction + elevation + device loss.
    """

    tag: str
    start: str
    end: str
    role: str
    flow: float
    flow_added: float
    velocity: float
    nominal: str
    material: str
    bore: float
    c_factor: float | None
    roughness: float | None
    friction_factor: float | None
    reynolds: float | None
    length: float
    equivalent_length: float
    total_length: float
    fittings: tuple[Fitting, ...]
    devices: tuple[str, ...]
    friction_gradient: float
    friction_loss: float
    elevation_loss: float
    device_loss: float
    second_law_friction_loss: float | None
    start_pressure: float
    end_pressure: float
    valve: str
    fittings_text: str = ""
    note: str = ""


@dataclass(frozen=True, slots=True)
class FittingRow:
    """How the equivalent length of one kind of fitting in one kind and size of pipe comes about.

    ``length`` [m] of one fitting = ``table_length`` [m] × ``c_multiplier`` × ``bore_factor``; ``minor_k``
    [-] of one fitting where a loss coefficient is given instead; ``count`` is how many the system has.
    """

    name: str
    nominal: str
    pipe_kind: str
    bore: float
    c_factor: float | None
    table_length: float
    c_multiplier: float
    bore_factor: float
    length: float
    minor_k: float
    count: int
    source: str


@dataclass(frozen=True, slots=True)
class PathStep:
    """One segment of the walk from the remote head to the supply.

    ``pressure_start`` and ``pressure_end`` [Pa] are at the ends of the segment in walking order (from
    head towards supply); losses are positive where the pressure needed rises.
    """

    start: str
    end: str
    pipe: str
    nominal: str
    bore: float
    c_factor: float | None
    friction_factor: float | None
    flow_added: float
    flow: float
    length: float
    equivalent_length: float
    total_length: float
    fittings_text: str
    friction_gradient: float
    pressure_start: float
    friction: float
    fitting_friction: float
    elevation: float
    device: float
    pressure_end: float
    k_at_start: float | None
    note: str = ""


@dataclass(frozen=True, slots=True)
class HandStep:
    """One line of the hand-check: a formula with its numbers already filled in and its result.

    ``decimals`` is how many the result is printed with, ``None`` for the usual number of its kind.
    """

    step: str
    formula: str
    value: float
    kind: str
    note: str = ""
    decimals: int | None = None


@dataclass(frozen=True, slots=True)
class CurvePoints:
    """A line for the supply graph: flows [m³/s] and pressures [Pa] of equal length."""

    name: str
    style: Literal["measured", "adjusted", "demand", "combined", "tank", "pump"]
    flows: tuple[float, ...]
    pressures: tuple[float, ...]
    extrapolated_from: float | None = None


@dataclass(frozen=True, slots=True)
class GraphPoint:
    """A marked point of the supply graph."""

    name: str
    style: Literal["test", "demand", "demand with hose", "available", "operating"]
    flow: float
    pressure: float


@dataclass(frozen=True, slots=True)
class Placement:
    """One placement of the design area that was tried, and what it needs.

    ``required_pressure`` [Pa] and ``flow`` [m³/s] are at the point of comparison; ``margin`` [Pa] is
    what is left against the supply; ``x``/``y`` the centre of the heads.
    """

    label: str
    heads: tuple[str, ...]
    required_pressure: float
    flow: float
    margin: float
    area: float
    x: float | None
    y: float | None


@dataclass(frozen=True, slots=True)
class Favourable:
    """The area through which most water flows on the actual supply.

    ``flow`` [m³/s] in all and ``pressure`` [Pa] at the point of comparison then; ``solved`` counts the
    placements that were solved to find it, those that resist least.
    """

    label: str
    heads: tuple[str, ...]
    flow: float
    pressure: float
    solved: int


@dataclass(frozen=True, slots=True)
class DesignAreaRecord:
    """How the design area was found. Steps are (text, value, kind) and print in order.

    ``equal`` counts placements that ask the same as the governing one, mirror images mostly;
    ``runner_up`` is the next one that differs.
    """

    mode: Literal["given", "search"]
    steps: tuple[HandStep, ...]
    placements: tuple[Placement, ...]
    governing: Placement
    runner_up: Placement | None
    most_favourable: Favourable | None
    tried: int
    statement: str
    equal: int = 0


@dataclass(frozen=True, slots=True)
class DemandRecord:
    """The demand at the point of comparison; ``outlet_flow`` is neither sprinklers nor hose."""

    node: str
    flow: float
    pressure: float
    sprinkler_flow: float
    hose_flow: float
    heads: int
    governing_head: str
    governing_by: str
    outlet_flow: float = 0.0
    governing_is_head: bool = True

    @property
    def governing_name(self) -> str:
        """The governing head or outlet as a label."""
        return f"head {self.governing_head}" if self.governing_is_head else self.governing_head


@dataclass(frozen=True, slots=True)
class SupplyRecord:
    """The supply at the point of comparison; ``available_pressure`` at the total demand flow.

    ``unadjusted_pressure`` is the same before the adjustments of the project. ``available_flow`` is the
    flow available at the demand pressure (``None`` where the curve never falls to it);
    ``flow_at_20_psi`` is read at the gauge of the test. ``governing`` names the test or tank whose curve
    is the lowest at the demand; ``static``, ``residual`` and ``test_flow`` are its readings.
    """

    static: float
    residual: float | None
    test_flow: float | None
    available_pressure: float
    available_flow: float | None
    unadjusted_pressure: float
    flow_at_20_psi: float | None
    static_at_comparison: float
    tested_range_ratio: float | None
    steps: tuple[HandStep, ...]
    statement: str
    governing: str = ""


@dataclass(frozen=True, slots=True)
class MarginRecord:
    """Margin before the rule (``pressure``), what the rule asks (``required``), what is left.

    ``limited_at`` is the node where nothing would be left in a main if the supply were lowered further than
    the margin, though a pump could carry the demand by its numbers.
    """

    pressure: float
    required: float | None
    after_rule: float | None
    rule: str
    steps: tuple[HandStep, ...]
    source: str
    limited_at: str | None = None


@dataclass(frozen=True, slots=True)
class SecondLaw:
    """The governing case by the second friction law ``name``: flow [m³/s], pressures [Pa].

    As in the demand, supply and margin records. The verdict rests on the first law; not finite, with a
    ``note``, where the case has no solution by this one.
    """

    name: str
    flow: float
    pressure: float
    available_pressure: float
    margin: float
    required: float | None
    after_rule: float | None
    note: str = ""


@dataclass(frozen=True, slots=True)
class BalanceRecord:
    """Recomputed from the reported rows: largest imbalances, and the flow they are measured against."""

    largest_flow_imbalance: float
    largest_pressure_imbalance: float
    total_flow: float
    flow_node: str
    pressure_pipe: str
    iterations: int


@dataclass(frozen=True, slots=True)
class ScenarioRow:
    """What really flows in one scenario, with the actual supply; flows [m³/s], pressures [Pa].

    ``head_flows`` are tag, flow and pressure of every open head, ``head_needs`` the flow each needs in the
    same order (``None``: not known); ``lowest_ratio`` and ``over_discharge`` compare the two, the latter
    only where no head is dry. ``dry`` are the open heads that give nothing, ``beyond`` the flows outside
    the curve of a device, ``besides`` the nodes at which both the scenario and the node table draw: node,
    flow of the one, flow of the other; ``shares`` what each of several supplies gives, negative where water
    runs into it.
    """

    name: str
    total_flow: float
    supply_pressure: float
    sprinkler_flow: float
    heads_open: int
    lowest_head: str
    lowest_pressure: float
    lowest_ratio: float | None
    delivered_density: float | None
    over_discharge: float | None
    minutes_of_storage: float | None
    note: str
    head_flows: tuple[tuple[str, float, float], ...] = ()
    head_needs: tuple[float | None, ...] = ()
    dry: tuple[str, ...] = ()
    beyond: tuple[Beyond, ...] = ()
    besides: tuple[tuple[str, float, float], ...] = ()
    shares: tuple[tuple[str, float], ...] = ()


@dataclass(frozen=True, slots=True)
class PumpRecord:
    """A fire pump: its facts in every state, and the lines and points of the graph at the pump."""

    facts: PumpAnswer
    curves: tuple[CurvePoints, ...]
    points: tuple[GraphPoint, ...]


@dataclass(frozen=True, slots=True)
class Result:
    """The complete answer for one project."""

    project: Project
    version: str
    verdict: Verdict
    verdict_text: str
    governs: str
    demand: DemandRecord
    supply: SupplyRecord
    margin: MarginRecord
    balance: BalanceRecord
    design_area: DesignAreaRecord
    nodes: tuple[NodeRow, ...]
    pipes: tuple[PipeRow, ...]
    path: tuple[PathStep, ...]
    hand_check: tuple[HandStep, ...]
    curves: tuple[CurvePoints, ...]
    points: tuple[GraphPoint, ...]
    scenarios: tuple[ScenarioRow, ...]
    findings: tuple[Finding, ...]
    open_questions: tuple[str, ...]
    library_versions: Mapping[str, str] = field(default_factory=lambda: MappingProxyType({}))
    pumps: tuple[PumpRecord, ...] = ()
    tanks: tuple[TankRecord, ...] = ()
    needed_pump: NeededPump | None = None
    duties: DutyAnswer = field(default_factory=DutyAnswer)
    fittings: tuple[FittingRow, ...] = ()
    second_law: SecondLaw | None = None
