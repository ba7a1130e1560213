"""What the network solver is asked and what it answers. SI throughout."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, field
from types import MappingProxyType

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]


@dataclass(frozen=True, slots=True)
class SourceCurve:
    """A supply at a node: gauge pressure [Pa] there against the flow [m³/s] it delivers.

    Either the power form ``static − resistance · q**exponent`` or, where ``flows`` is not empty,
    the points (``flows``, ``pressures``) joined by straight lines in q**exponent, the last line
    carried on. A fixed-pressure source has resistance 0.
    """

    node: str
    static: float
    resistance: float = 0.0
    exponent: float = 1.85
    flows: tuple[float, ...] = ()
    pressures: tuple[float, ...] = ()


@dataclass(frozen=True, slots=True)
class LoadCase:
    """What is open: outlets by node tag, fixed outflows [m³/s] by node tag, pipes that are shut."""

    open_outlets: tuple[str, ...]
    fixed_flows: Mapping[str, float] = field(default_factory=lambda: MappingProxyType({}))
    closed_pipes: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True, eq=False)
class Solution:
    """A solved state of the whole network, every node and pipe of the original.

    Shapes: (n,) in the order of ``node_tags``, (m,) in the order of ``pipe_tags``. Pressures [Pa]
    are gauge; ``pipe_flow`` [m³/s] is positive from start to end as the project wrote the pipe, and so
    are the three losses: pressure(start) − pressure(end) = friction + elevation + device. A closed
    pipe has flow 0 and losses NaN. ``outflow`` is what leaves at each node (head, hose, outlet).
    ``source_flow``/``source_pressure`` follow ``source_tags``. In a demand solution ``shift`` is by
    how much every source curve could be lowered [Pa] with the demand still met (NaN in an operating
    solution) and ``governing`` is the outlet at which the requirement is met exactly.
    ``velocity_pressure`` (m,) is ½ρv² in each pipe; ``outlet_velocity_pressure`` (n,) is what was taken off
    the total pressure to get the pressure that drives an outlet (all 0 unless normal pressure is used).
    Against its direction a one-way pipe is closed: its ``device_loss`` is the difference it holds.
    ``mass_residual`` [m³/s] and ``energy_residual`` [Pa] are the largest left by the solver.
    """

    node_tags: tuple[str, ...]
    pipe_tags: tuple[str, ...]
    pressure: FloatArray
    outflow: FloatArray
    pipe_flow: FloatArray
    friction: FloatArray
    elevation_loss: FloatArray
    device_loss: FloatArray
    velocity: FloatArray
    friction_factor: FloatArray
    reynolds: FloatArray
    velocity_pressure: FloatArray
    source_tags: tuple[str, ...]
    source_flow: FloatArray
    source_pressure: FloatArray
    shift: float
    governing: str
    iterations: int
    mass_residual: float
    energy_residual: float
    notes: tuple[str, ...] = ()
    out_of_range: tuple[tuple[str, str, float], ...] = ()
    outlet_velocity_pressure: FloatArray = field(default_factory=lambda: np.zeros(0))

    def node(self, tag: str) -> int:
        """Return the row of node ``tag``."""
        return self.node_tags.index(tag)


@dataclass(frozen=True, slots=True)
class DemandSummary:
    """The short answer of one demand case in a search.

    ``source_pressure`` [Pa] at the first source, ``total_flow`` [m³/s], ``shift`` [Pa] as in
    :class:`Solution`; ``pressure_at`` [Pa] is at the node that was asked about (else at the first source),
    ``lowest`` [Pa] the least of the nodes that were to be watched.
    """

    source_pressure: float
    total_flow: float
    shift: float
    governing: str
    iterations: int
    pressure_at: float = math.nan
    lowest: float = math.inf
