"""The physical system: sprinklers, nodes, pipes, fittings, devices."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from supplycheck.findings import Place

Origin = Literal["given", "catalogue", "inferred", "assumed"]
NodeKind = Literal["junction", "sprinkler", "supply", "hose", "hydrant", "outlet"]
PipeRole = Literal[
    "branch line",
    "drop",
    "riser nipple",
    "cross main",
    "feed main",
    "riser",
    "underground",
    "pipe",
]


@dataclass(frozen=True, slots=True)
class Sprinkler:
    """A sprinkler type. K-factor [m³/s/√Pa], pressures [Pa], coverage [m²], temperature [K]."""

    tag: str
    k_factor: float
    minimum_pressure: float
    coverage_area: float | None = None
    maximum_pressure: float | None = None
    response: Literal["standard", "quick"] | None = None
    temperature: float | None = None
    listing: str = ""


@dataclass(frozen=True, slots=True)
class PipeKind:
    """A kind of pipe: bores [m] by nominal size (as written), C-factor, roughness [m]."""

    name: str
    material: str
    bores: tuple[tuple[str, float], ...]
    c_factor: float | None
    roughness: float | None
    bore_source: str
    c_source: str
    roughness_source: str


@dataclass(frozen=True, slots=True)
class Fitting:
    """Fittings of one type on a pipe.

    ``table_length`` [m] is one fitting as the table prints it (C 120, reference bore);
    ``length`` [m] is all ``count`` of them after the C and bore corrections; ``minor_k`` [-] is the
    loss coefficient of all of them where it is given instead of a length. ``c_multiplier`` and
    ``bore_factor`` [-] are the corrections: length = count × table length × both.
    """

    name: str
    count: int
    table_length: float
    length: float
    minor_k: float
    origin: Origin
    source: str
    node: str | None = None
    c_multiplier: float = 1.0
    bore_factor: float = 1.0


@dataclass(frozen=True, slots=True)
class Node:
    """A point of the network; lengths [m], area [m²], K-factor [m³/s/√Pa], flow [m³/s].

    ``k_factor`` is the outlet's own (from its sprinkler type unless overridden), ``area`` the floor
    area that this head covers, ``branch_line`` the tag of the line it sits on, ``fixed_flow`` an
    outflow that never floats (hose, hydrant, standpipe outlet).
    """

    tag: str
    elevation: float
    x: float | None = None
    y: float | None = None
    kind: NodeKind = "junction"
    sprinkler: str | None = None
    k_factor: float | None = None
    area: float | None = None
    branch_line: str | None = None
    fixed_flow: float = 0.0
    minimum_pressure: float | None = None
    place: Place | None = None


@dataclass(frozen=True, slots=True)
class PumpData:
    """What is told of the fire pumps that stand behind one device of kind ``pump``.

    ``rated_flow`` [m³/s] and ``rated_pressure`` [Pa] are those of the whole set at the speed at which it
    runs, ``None`` where they are not told. ``speed_ratio`` is that speed over the one of the curve;
    ``from_limits`` says that the curve is the weakest one which the pump standard allows for the rating.
    ``test_flows``/``test_losses`` [m³/s, Pa] are the loss from the pump to the end of its test header.
    """

    rated_flow: float | None = None
    rated_pressure: float | None = None
    count: int = 1
    arrangement: Literal["single", "parallel", "series"] = "single"
    speed_ratio: float = 1.0
    from_limits: bool = False
    test_flows: tuple[float, ...] = ()
    test_losses: tuple[float, ...] = ()


@dataclass(frozen=True, slots=True)
class Device:
    """A device in a pipe: its pressure loss [Pa] against flow [m³/s], or what it does.

    ``flows``/``values`` are the points of the loss curve (kind ``loss``) or of the pressure gain
    curve (kind ``pump``); one point with flow 0 is a fixed loss. ``setting`` [Pa] is the outlet
    pressure of a pressure-reducing valve. ``one_way`` stops reverse flow. ``pump`` holds what is told of
    the pumps behind a pump device; its curve is that of the whole set.
    """

    tag: str
    kind: Literal["loss", "check valve", "pressure-reducing valve", "pump"]
    flows: tuple[float, ...]
    values: tuple[float, ...]
    source: str
    setting: float | None = None
    one_way: bool = False
    title: str = ""
    place: Place | None = None
    pump: PumpData | None = None

    @property
    def is_fixed_loss(self) -> bool:
        """True where the loss does not depend on the flow."""
        return self.kind == "loss" and len(self.flows) == 1


@dataclass(frozen=True, slots=True)
class Pipe:
    """A pipe between two nodes; lengths and bore [m].

    ``devices`` are device tags passed from ``start`` to ``end``; ``valve`` ``"check"`` lets flow
    pass from ``start`` to ``end`` only, ``"closed"`` not at all.
    """

    tag: str
    start: str
    end: str
    length: float
    bore: float
    nominal: str
    kind: str
    c_factor: float | None
    roughness: float | None
    fittings: tuple[Fitting, ...] = ()
    devices: tuple[str, ...] = ()
    valve: Literal["open", "closed", "check"] = "open"
    role: PipeRole = "pipe"
    place: Place | None = None

    @property
    def equivalent_length(self) -> float:
        """Equivalent length of all fittings [m]."""
        return sum(fitting.length for fitting in self.fittings)

    @property
    def minor_k(self) -> float:
        """Sum of the loss coefficients given instead of lengths [-]."""
        return sum(fitting.minor_k for fitting in self.fittings)


@dataclass(frozen=True, slots=True)
class System:
    """All nodes, pipes, sprinkler types, pipe kinds and devices of a project."""

    nodes: tuple[Node, ...]
    pipes: tuple[Pipe, ...]
    sprinklers: tuple[Sprinkler, ...]
    pipe_kinds: tuple[PipeKind, ...]
    devices: tuple[Device, ...]

    def node(self, tag: str) -> Node:
        """Return the node named ``tag``; :class:`KeyError` where there is none (linear search)."""
        for node in self.nodes:
            if node.tag == tag:
                return node
        raise KeyError(tag)

    def device(self, tag: str) -> Device:
        """Return the device named ``tag``; :class:`KeyError` where there is none."""
        for device in self.devices:
            if device.tag == tag:
                return device
        raise KeyError(tag)
