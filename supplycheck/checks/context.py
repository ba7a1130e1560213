"""What the checks are given: one frozen record, complete at birth. SI throughout."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from types import MappingProxyType

from supplycheck.model import DemandCase, Device, Node, Pipe, PipeKind, Project, Sprinkler
from supplycheck.model.duty import DutyAnswer
from supplycheck.network.records import Solution
from supplycheck.supply.beyond import Beyond
from supplycheck.supply.needed import NeededPump
from supplycheck.supply.pumping import PumpAnswer


@dataclass(frozen=True, slots=True)
class ComparisonFacts:
    """Demand against supply at ``node``, as plain numbers; flows [m³/s], pressures [Pa].

    ``demand_flow`` is the total with hose, ``margin`` what is left before the margin rule and
    ``required`` what the rule asks (``None`` without a rule). ``static_at_compare`` is the greatest
    pressure at ``node`` without flow: of the measured supply, not lowered by an adjustment (a static
    cap counts). ``tested_flow_ratio`` is the demand over the largest tested flow;
    ``main_pressure_at_demand`` the pressure at the test node at the demand flow, adjusted;
    ``limited_at`` the node where lowering the supply by more than the margin leaves nothing in a main.
    """

    node: str
    demand_flow: float
    demand_pressure: float
    sprinkler_flow: float
    hose_flow: float
    available_pressure: float
    margin: float
    required: float | None
    static_at_compare: float
    tested_flow_ratio: float | None = None
    main_pressure_at_demand: float | None = None
    margin_rule: str = ""
    limited_at: str = ""


@dataclass(frozen=True, slots=True)
class ClassFigures:
    """What the adopted edition asks of the hazard class, before the project's own overrides.

    Density [m/s], area [m²], hose [m³/s] inside and outside together, duration [s]; ``None`` where the
    class has no such figure.
    """

    density: float | None
    area: float | None
    hose: float | None
    duration: float | None
    source: str


@dataclass(frozen=True, slots=True)
class PumpRating:
    """Rated flow [m³/s] and pressure gain [Pa] of a fire pump."""

    flow: float
    pressure: float


@dataclass(frozen=True, slots=True)
class ScenarioFacts:
    """What one scenario of the project leaves its open heads.

    ``share`` is the least discharge of a head over what it needs, at ``head``; ``None`` where no head is
    open in the scenario. ``dry`` are the open heads that give nothing. ``note`` says what is shut, or why
    there is no solution.
    """

    name: str
    head: str
    share: float | None
    note: str = ""
    solved: bool = True
    dry: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True, eq=False)
class CheckContext:
    """Everything that a rule may look at.

    ``case`` is the governing demand case, ``solution`` its demand state, ``operating`` the state with
    the actual supply and the same heads open. ``searched`` says that every placement of the area was
    tried, ``placements_tried`` how many; ``most_favourable_found`` that the area of the greatest flow is
    known too. ``catalogue_c`` is the catalogue's C-factor by the name of the pipe kind for the system at
    hand; ``reference_bores`` [m] by nominal size is the pipe for which the table of equivalent lengths is
    printed. ``no_flow`` [Pa] by node is the pressure with every outlet shut where it was solved. ``pumps``
    are the facts of every pump, ``needed_pump`` the one that would close a gap. ``duties`` is what was
    found for standpipes and hydrants, ``scenarios`` what each scenario of the project leaves its heads and
    ``beyond`` the flows outside the curve of a device in what really flows, each with the name of its row.
    ``inferred_lines`` names by head the branch line that was inferred where none is given; the heads here
    carry it as theirs.
    """

    project: Project
    case: DemandCase
    solution: Solution
    comparison: ComparisonFacts
    operating: Solution | None = None
    searched: bool = False
    placements_tried: int = 0
    most_favourable_found: bool = False
    class_figures: ClassFigures | None = None
    catalogue_c: Mapping[str, float] = field(default_factory=lambda: MappingProxyType({}))
    reference_bores: Mapping[str, float] = field(default_factory=lambda: MappingProxyType({}))
    no_flow: Mapping[str, float] | None = None
    pump_ratings: Mapping[str, PumpRating] = field(default_factory=lambda: MappingProxyType({}))
    pumps: tuple[PumpAnswer, ...] = ()
    needed_pump: NeededPump | None = None
    duties: DutyAnswer = field(default_factory=DutyAnswer)
    scenarios: tuple[ScenarioFacts, ...] = ()
    beyond: tuple[tuple[str, Beyond], ...] = ()
    inferred_lines: Mapping[str, str] = field(default_factory=lambda: MappingProxyType({}))
    nodes: Mapping[str, Node] = field(init=False)
    kinds: Mapping[str, PipeKind] = field(init=False)
    sprinklers: Mapping[str, Sprinkler] = field(init=False)
    devices: Mapping[str, Device] = field(init=False)
    node_rows: Mapping[str, int] = field(init=False)
    pipe_rows: Mapping[str, int] = field(init=False)

    def __post_init__(self) -> None:
        """Build the look-ups once."""
        system = self.project.system
        set_once = object.__setattr__
        lines = self.inferred_lines
        nodes = {
            node.tag: replace(node, branch_line=lines[node.tag]) if node.tag in lines else node
            for node in system.nodes
        }
        set_once(self, "nodes", MappingProxyType(nodes))
        set_once(self, "kinds", MappingProxyType({kind.name: kind for kind in system.pipe_kinds}))
        set_once(self, "sprinklers", MappingProxyType({one.tag: one for one in system.sprinklers}))
        set_once(self, "devices", MappingProxyType({one.tag: one for one in system.devices}))
        rows = {tag: row for row, tag in enumerate(self.solution.node_tags)}
        set_once(self, "node_rows", MappingProxyType(rows))
        rows = {tag: row for row, tag in enumerate(self.solution.pipe_tags)}
        set_once(self, "pipe_rows", MappingProxyType(rows))

    @property
    def european(self) -> bool:
        """True where the project is calculated to EN 12845."""
        return self.project.criteria.standard == "EN 12845"

    @property
    def hazard(self) -> str:
        """The family of the hazard class: light, ordinary, extra, high, or empty where unknown."""
        words = self.project.criteria.hazard.casefold().split()
        first = words[0] if words else ""
        short = {"lh": "light", "oh": "ordinary", "eh": "extra", "hh": "high"}
        if first in {"light", "ordinary", "extra", "high"}:
            return first
        return short.get(first[:2], "")

    @property
    def case_heads(self) -> tuple[Node, ...]:
        """The nodes of the heads in the design area."""
        return tuple(self.nodes[tag] for tag in self.case.heads)

    @property
    def all_heads(self) -> tuple[Node, ...]:
        """Every sprinkler of the layout."""
        return tuple(node for node in self.nodes.values() if node.kind == "sprinkler")

    def pressure(self, tag: str) -> float:
        """Pressure at node ``tag`` in the demand state [Pa]."""
        return float(self.solution.pressure[self.node_rows[tag]])

    def outflow(self, tag: str) -> float:
        """Outflow at node ``tag`` in the demand state [m³/s]."""
        return float(self.solution.outflow[self.node_rows[tag]])

    def flow(self, pipe: Pipe) -> float:
        """Flow in ``pipe`` from its start to its end in the demand state [m³/s]."""
        return float(self.solution.pipe_flow[self.pipe_rows[pipe.tag]])
