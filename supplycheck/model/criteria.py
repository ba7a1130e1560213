"""Design criteria and the demand cases that follow from them."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from supplycheck.model.system import Origin


@dataclass(frozen=True, slots=True)
class AreaModifier:
    """A factor on the design area, in the order in which it is applied."""

    name: str
    factor: float
    source: str


@dataclass(frozen=True, slots=True)
class VelocityPolicy:
    """Limits on velocity [m/s]; ``None`` where the project sets none."""

    name: str
    pipe_limit: float | None
    valve_limit: float | None
    source: str


@dataclass(frozen=True, slots=True)
class HoseAllowance:
    """Hose streams [m³/s] and the nodes at which they join; ``None`` where the node is not given."""

    inside: float
    inside_node: str | None
    outside: float
    outside_node: str | None
    source: str
    origin: Origin


@dataclass(frozen=True, slots=True)
class Criteria:
    """Design criteria; density [m/s], areas [m²], duration [s], pressures [Pa].

    ``design_area`` is ``"search"`` or the tags of the heads. ``required_area`` is the base area
    after ``modifiers``. ``maximum_coverage`` [m²] and ``maximum_spacing`` [m] are the limits of the
    class. ``shape_factor`` is the 1.2 of 1.2√A.
    """

    standard: Literal["NFPA 13", "EN 12845"]
    edition: str
    hazard: str
    density: float
    base_area: float
    modifiers: tuple[AreaModifier, ...]
    required_area: float
    minimum_heads: int
    shape_factor: float
    design_area: Literal["search"] | tuple[str, ...]
    system: str
    minimum_pressure: float
    duration: float | None
    maximum_coverage: float | None
    maximum_spacing: float | None
    velocity: VelocityPolicy
    maximum_pressure: float | None
    velocity_pressure: bool
    source: str
    ceiling_height: float | None = None

    @property
    def has_sprinklers(self) -> bool:
        """False where the project has no sprinklers: its density and area are then zero."""
        return self.density > 0


@dataclass(frozen=True, slots=True)
class FixedOutlet:
    """An outlet whose flow never floats: a standpipe valve, a hydrant, an outflow.

    It must give ``flow`` [m³/s] with at least ``minimum_pressure`` [Pa] left at its node; with flow 0 it
    only asks for the pressure (the highest point of a main, say, or a node whose own
    outflow flows anyway). ``what`` says what it is.
    """

    node: str
    flow: float
    minimum_pressure: float
    what: str


@dataclass(frozen=True, slots=True)
class DemandCase:
    """One placement of the design area and what it asks of each head.

    ``heads`` are node tags; ``required_flow`` [m³/s] and ``required_pressure`` [Pa] stand in the
    same order (the larger of what density, listing and the general minimum ask); ``required_by`` says
    which of them governs. ``area`` [m²] is the floor area covered by the heads.

    ``outlets`` ask for a fixed flow and a pressure beside the heads; ``flows`` are further fixed
    outflows [m³/s] by node that ask for nothing; ``closed_pipes`` are shut in this case; ``with_hose``
    says that the hose allowance flows too. ``duty`` names what the case serves.
    """

    label: str
    heads: tuple[str, ...]
    required_flow: tuple[float, ...]
    required_pressure: tuple[float, ...]
    required_by: tuple[str, ...]
    area: float
    lines: int
    along_line: int
    note: str = ""
    outlets: tuple[FixedOutlet, ...] = ()
    flows: tuple[tuple[str, float], ...] = ()
    closed_pipes: tuple[str, ...] = ()
    with_hose: bool = True
    duty: Literal["sprinklers", "standpipes", "hydrants", "outflows"] = "sprinklers"
