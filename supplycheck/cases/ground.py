"""What every demand case is solved on, and one case solved in full."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

from supplycheck.cases.loads import load_of, required_of, without_hose
from supplycheck.model import DemandCase, Project
from supplycheck.network import LoadCase, Network, Solution, SourceCurve, solve_demand, solve_operating
from supplycheck.supply import Comparison, NodeSupply, compare

RankOf = Callable[[float], tuple[str, str, str]]


@dataclass(frozen=True, slots=True, eq=False)
class Solved:
    """One case in full: the demand state, what really flows, and both sides compared."""

    case: DemandCase
    solution: Solution
    operating: Solution
    comparison: Comparison


@dataclass(frozen=True, slots=True, eq=False)
class Ground:
    """The project's network and supplies; ``rank_of`` tells class, colour and source of a flow [m³/s]."""

    project: Project
    network: Network
    curves: Sequence[NodeSupply]
    sources: Sequence[SourceCurve]
    rank_of: RankOf

    def operating(self, load: LoadCase) -> Solution:
        """Return what really flows under ``load``; raises :class:`NotConvergedError`."""
        policy = self.project.criteria.velocity_pressure
        return solve_operating(self.network, load, self.sources, velocity_pressure=policy)

    def solve(self, case: DemandCase) -> Solved:
        """Return ``case`` in full; raises :class:`NotConvergedError`."""
        load, policy = load_of(self.project, case), self.project.criteria.velocity_pressure
        solution = solve_demand(
            self.network, load, required_of(case), self.sources, velocity_pressure=policy
        )
        comparison = compare(without_hose(self.project, case), solution, self.curves, self.network)
        return Solved(case, solution, self.operating(load), comparison)
