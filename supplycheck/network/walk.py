"""The trade's own way on a tree: from the remote head back to the supply, branch by branch.

Start at the remote head with its required pressure, add friction and elevation pipe by pipe, add the
discharge of each head that is passed, and bring in a side branch with its equivalent K-factor,
K = Q/√P, taken where the branch joins. The K of a branch holds exactly only at the pressure at which it
was worked out, so each branch is worked out again from its own remote head until it arrives at the
pressure of the junction. Nothing here uses the Newton core: it is its rival, and the path can be
followed by hand.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from supplycheck.errors import NoSolutionError, SupplyCheckError
from supplycheck.hydraulics import darcy_weisbach_gradient, smooth_power
from supplycheck.network.arrays import Network
from supplycheck.network.assemble import Case, read_case
from supplycheck.network.records import LoadCase

SWEEPS = 200
DRY = 1.0
"""Pressure below which a side branch is taken to run dry [Pa]."""
BALANCE = 1e-12
"""Largest difference of pressure left at a junction, as a part of that pressure."""


class NotApplicableError(SupplyCheckError):
    """The method does not apply: the open pipes hold a loop, or a valve sets a pressure."""


@dataclass(frozen=True, slots=True)
class WalkStep:
    """One pipe of the path, in walking order; pressures and losses [Pa], flows [m³/s].

    ``flow_added`` joins at ``start`` (the head there, side branches, fixed outflow); ``branch_k``
    [m³/s/√Pa] is the equivalent K of the side branches there (``None``: no side branch).
    pressure_end = pressure_start + friction + elevation + device.
    """

    pipe: str
    start: str
    end: str
    flow_added: float
    flow: float
    pressure_start: float
    friction: float
    elevation: float
    device: float
    pressure_end: float
    branch_k: float | None


@dataclass(frozen=True, slots=True)
class WalkBack:
    """The path from the remote head to the supply and what the supply must give [Pa], [m³/s].

    ``head_pressures`` pairs every open outlet with its pressure [Pa]; ``sweeps`` counts how often the
    side branches were balanced.
    """

    steps: tuple[WalkStep, ...]
    remote: str
    supply_pressure: float
    supply_flow: float
    head_pressures: tuple[tuple[str, float], ...]
    sweeps: int


def walk_back(network: Network, load: LoadCase, required: Mapping[str, float], source: str) -> WalkBack:
    """Return the walk from the governing outlet back to the supply at node ``source``.

    Parameters
    ----------
    network : The network; its open pipes between supply and outlets must form a tree.
    load : Open outlets, fixed outflows, shut pipes.
    required : Pressure needed at open outlets [Pa].
    source : Node of the supply.

    Raises
    ------
    NotApplicableError
        Where the pipes hold a loop, a part is not joined to the supply, or a valve sets a pressure.
    NoSolutionError
        Where a head would run dry or the branches do not balance.
    """
    case = read_case(network, load, required)
    tree = _Tree.of(network, case, network.node_rows[source])
    needed = dict(zip(case.floor_rows.tolist(), case.floors.tolist(), strict=True))
    heads = [row for row in case.outlets.tolist() if row in needed]
    if not heads:
        raise NotApplicableError("no open outlet has a required pressure")
    remote = max(heads, key=lambda row: needed[row] + network.base[row] + 1e-9 * tree.depth[row])
    for _ in range(len(heads) + 1):
        walk = _Balance(network, case, tree, remote, needed[remote])
        balanced, pressures = walk.settle(), walk.pressures
        worst = min(heads, key=lambda row: pressures[row] - needed[row])
        met = pressures[worst] >= needed[worst] - 1e-9 * max(needed[worst], 1.0)
        if worst == remote and not balanced:
            raise NoSolutionError("the side branches did not balance")
        if worst == remote or (balanced and met):
            walk.check_wet()
            return walk.report()
        remote = worst
    raise NoSolutionError("the walk back found no head that governs")


@dataclass(frozen=True, slots=True, eq=False)
class _Tree:
    """The open pipes as a tree: for each node the pipe and node next towards the supply."""

    root: int
    order: list[int]
    parent: dict[int, int]
    pipe: dict[int, int]
    depth: dict[int, int]

    @classmethod
    def of(cls, network: Network, case: Case, root: int) -> _Tree:
        links = network.links
        joined: dict[int, list[tuple[int, int]]] = {}
        for row in np.flatnonzero(~case.shut).tolist():
            a, b = int(links.start[row]), int(links.end[row])
            joined.setdefault(a, []).append((b, row))
            joined.setdefault(b, []).append((a, row))
        order, parent, pipe, depth = [root], {root: -1}, {root: -1}, {root: 0}
        for node in order:
            for other, row in joined.get(node, ()):
                if row == pipe[node]:
                    continue
                if other in parent:
                    tags = f"{network.pipe_tags[row]}"
                    raise NotApplicableError(f"the open pipes hold a loop, through pipe {tags}")
                parent[other], pipe[other], depth[other] = node, row, depth[node] + 1
                order.append(other)
        asked = [*case.outlets.tolist(), *np.flatnonzero(case.outflow).tolist()]
        lost = [network.node_tags[row] for row in asked if row not in parent]
        if lost:
            raise NotApplicableError(f"not joined to the supply: {', '.join(lost[:5])}")
        return cls(root, order, parent, pipe, depth)


@dataclass(slots=True, eq=False)
class _Path:
    """A walk from the outlet ``head`` to where it joins another path (``nodes[-1]``)."""

    nodes: list[int]
    pressure: float
    arrives: float = 0.0
    flow: float = 0.0
    last: tuple[float, float] | None = None


class _Balance:
    """Side branches brought to the pressures of their junctions, by sweeps."""

    def __init__(self, network: Network, case: Case, tree: _Tree, remote: int, start: float) -> None:
        self.network, self.case, self.tree = network, case, tree
        self.k = dict(zip(case.outlets.tolist(), case.k_factor.tolist(), strict=True))
        self.fixed = self._fixed_flows()
        self.paths = self._paths(remote, start)
        self.joins: dict[int, list[_Path]] = {}
        for path in self.paths[1:]:
            self.joins.setdefault(path.nodes[-1], []).append(path)
        self.pressures: dict[int, float] = {}
        self.sweeps = 0

    def _fixed_flows(self) -> dict[int, float]:
        """Return the fixed outflow to be added at each node, with that of branches without a head."""
        drawn = {row: float(self.case.outflow[row]) for row in self.tree.order}
        live = dict.fromkeys(self.tree.order, False)
        for row in reversed(self.tree.order):
            live[row] = live[row] or row in self.k
            up = self.tree.parent[row]
            if up >= 0 and live[row]:
                live[up] = True
            elif up >= 0:
                drawn[up] += drawn[row]
        return drawn

    def _paths(self, remote: int, start: float) -> list[_Path]:
        """Return the main path and then side paths, each joining an earlier one, deepest heads first."""
        taken: set[int] = set()
        heads = sorted(self.k, key=lambda row: -self.tree.depth[row])
        paths = []
        for head in [remote, *heads]:
            if head in taken:
                continue
            nodes = [head]
            while nodes[-1] not in taken and nodes[-1] != self.tree.root:
                taken.add(nodes[-1])
                nodes.append(self.tree.parent[nodes[-1]])
            paths.append(_Path(nodes, start))
        return paths

    def settle(self) -> bool:
        """Balance all side branches; return whether they did, with the pressures at every node walked."""
        for self.sweeps in range(1, SWEEPS + 1):
            for path in reversed(self.paths):
                self._walk(path)
            worst = 0.0
            for path in self.paths[1:]:
                wanted = self.pressures[path.nodes[-1]]
                miss = wanted - path.arrives
                worst = max(worst, abs(miss) / max(abs(wanted), 1.0))
                self._aim(path, miss)
            if worst <= BALANCE:
                return True
            if any(path.pressure < DRY for path in self.paths):
                break  # its head would run dry: it is more remote than the one the walk began at
        return False

    def check_wet(self) -> None:
        """Raise :class:`NoSolutionError` where an open head has no pressure."""
        dry = [self.network.node_tags[row] for row in self.k if self.pressures[row] <= 0]
        if dry:
            raise NoSolutionError(f"on the walk back these heads run dry: {', '.join(dry)}")

    def _aim(self, path: _Path, miss: float) -> None:
        """Set the start pressure at which the branch should arrive at the wanted pressure."""
        here = (path.pressure, path.arrives)
        slope = path.pressure / path.arrives if path.arrives > 0 else 1.0
        if path.last is not None and here[1] != path.last[1]:
            secant = (here[0] - path.last[0]) / (here[1] - path.last[1])
            slope = secant if 0 < secant < 1.5 else slope
        if abs(miss) > 1e-3 or path.last is None:
            path.last = here
        path.pressure = max(path.pressure + slope * miss, 0.02 * path.pressure)

    def _added(self, node: int, pressure: float) -> tuple[float, float | None]:
        """Return the flow that joins at ``node`` and the equivalent K of side branches there."""
        own = self.fixed[node] + self.k.get(node, 0.0) * math.sqrt(max(pressure, 0.0))
        joining = self.joins.get(node, ())
        if not joining:
            return own, None
        if pressure <= 0 or any(path.arrives <= 0 for path in joining):
            return own + sum(path.flow for path in joining), None  # no K-factor without a pressure
        side = sum(path.flow / math.sqrt(path.arrives) for path in joining)
        return own + side * math.sqrt(pressure), side

    def _walk(self, path: _Path) -> list[WalkStep]:
        """Walk one path; record node pressures, where it arrives and with what flow."""
        steps = []
        pressure, flow = path.pressure, 0.0
        for node, above in zip(path.nodes, path.nodes[1:], strict=False):
            self.pressures[node] = pressure
            added, branch_k = self._added(node, pressure)
            flow += added
            pipe = self.tree.pipe[node]
            friction, device = self._loss(pipe, node, flow)
            lift = float(self.network.base[node] - self.network.base[above])
            end = pressure + friction + lift + device
            tags = self.network.node_tags
            steps.append(
                WalkStep(
                    self.network.pipe_tags[pipe],
                    tags[node],
                    tags[above],
                    added,
                    flow,
                    pressure,
                    friction,
                    lift,
                    device,
                    end,
                    branch_k,
                )
            )
            pressure = end
        path.arrives, path.flow = pressure, flow
        if path is self.paths[0]:
            self.pressures[path.nodes[-1]] = pressure
        return steps

    def _loss(self, pipe: int, node: int, flow: float) -> tuple[float, float]:
        """Return friction and device loss [Pa] of ``pipe`` carrying ``flow`` to ``node``."""
        links = self.network.links
        towards = 1.0 if int(links.end[pipe]) == node else -1.0
        if links.one_way[pipe] and towards < 0 and flow > 0:
            raise NoSolutionError(
                f"pipe {self.network.pipe_tags[pipe]} lets no flow pass towards the heads"
            )
        square, _ = smooth_power(flow, 2.0)
        friction = float(links.minor[pipe] * square + links.least[pipe] * flow)
        if links.terms is None:
            power, _ = smooth_power(flow, links.exponent)
            friction += float(links.resistance[pipe]) * power
        else:
            gradient, _ = darcy_weisbach_gradient(
                flow=flow,
                bore=float(self.network.bore[pipe]),
                roughness=float(self.network.roughness[pipe]),
                density=self.network.fluid.density,
                viscosity=self.network.fluid.viscosity,
            )
            friction += gradient * float(links.terms.length[pipe])
        device = 0.0
        for link, law in links.devices:
            if link == pipe:
                if law.setting is not None:
                    raise NotApplicableError(f"{law.tag} sets a pressure")
                device += towards * float(law.drop(np.array([towards * flow]))[0][0])
        return friction, device

    def report(self) -> WalkBack:
        """Return the record of the balanced walk."""
        main = self.paths[0]
        steps = self._walk(main)
        root_flow, _ = self._added(self.tree.root, main.arrives)
        tags = self.network.node_tags
        return WalkBack(
            steps=tuple(steps),
            remote=tags[main.nodes[0]],
            supply_pressure=main.arrives,
            supply_flow=main.flow + root_flow,
            head_pressures=tuple((tags[row], self.pressures[row]) for row in self.k),
            sweeps=self.sweeps,
        )
