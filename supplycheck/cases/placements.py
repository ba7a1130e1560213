"""Every placement of the design area solved: the hardest, the runner-up, the most favourable."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping, Sequence
from typing import Final

import numpy as np

from supplycheck.cases.floors import counted, watched
from supplycheck.cases.ground import Ground
from supplycheck.cases.loads import Draws, required_of
from supplycheck.demand import Candidates
from supplycheck.model import DemandCase, Project
from supplycheck.network import DemandSummary, Network, SourceCurve, demand_many, solve_operating
from supplycheck.results.assemble import TIE, Tried
from supplycheck.results.records import Favourable, Placement

Progress = Callable[[int, int], None]
Spots = Mapping[str, tuple[float | None, float | None]]

FAVOURABLE: Final = 200
"""Most placements whose real flow is solved to find the most favourable one."""


def try_all(ground: Ground, candidates: Candidates, progress: Progress | None) -> Tried:
    """Return every placement of ``candidates`` solved; the first of equals counts as the hardest.

    Raises :class:`NotConvergedError` where a placement has no solution.
    """
    project, network, sources = ground.project, ground.network, ground.sources
    cases = candidates.cases
    if not cases:
        return Tried((), None, None, 0, None)
    draws = Draws.of(project)
    loads = [(draws.load(case), required_of(case)) for case in cases]
    policy, at = project.criteria.velocity_pressure, project.supply.compare_at
    watch = watched(ground)
    summaries = counted(
        ground,
        cases,
        demand_many(network, loads, sources, progress, velocity_pressure=policy, at=at, watch=watch),
    )
    spots = spots_of(project)
    placements = tuple(
        placement(case, summary, spots) for case, summary in zip(cases, summaries, strict=True)
    )
    margins = np.array([one.margin for one in placements])
    order = np.argsort(margins, kind="stable")
    ties = np.flatnonzero(margins <= margins[order[0]] + TIE)
    others = order[margins[order] > margins[order[0]] + TIE]
    return Tried(
        placements=placements,
        hardest=int(ties[0]),
        runner_up=int(others[0]) if len(others) else None,
        equal=len(ties) - 1,
        favourable=_favourable(project, network, candidates, summaries, sources),
    )


def spots_of(project: Project) -> Spots:
    """Return the coordinates of every node [m]."""
    return {node.tag: (node.x, node.y) for node in project.system.nodes}


def only(case: DemandCase, summary: DemandSummary | None, project: Project) -> Tried:
    """Return the one case of a project without sprinklers as the placement that governs."""
    return Tried((placement(case, summary, spots_of(project)),), 0, None, 0, None)


def placement(case: DemandCase, summary: DemandSummary | None, spots: Spots) -> Placement:
    """Return the row of ``case``; without a ``summary`` its numbers are unknown."""
    outlets = () if case.duty == "sprinklers" else case.outlets
    tags = (*case.heads, *(outlet.node for outlet in outlets))
    xs = [x for x, _ in map(spots.__getitem__, tags) if x is not None]
    ys = [y for _, y in map(spots.__getitem__, tags) if y is not None]
    return Placement(
        label=case.label,
        heads=case.heads,
        required_pressure=summary.pressure_at if summary else math.nan,
        flow=summary.total_flow if summary else math.nan,
        margin=summary.shift if summary else math.nan,
        area=case.area,
        x=sum(xs) / len(xs) if xs else None,
        y=sum(ys) / len(ys) if ys else None,
    )


def _favourable(
    project: Project,
    network: Network,
    candidates: Candidates,
    summaries: Sequence[DemandSummary],
    sources: Sequence[SourceCurve],
) -> Favourable | None:
    """Return the area through which most water flows on the actual supply (asked by EN 12845).

    Those that resist least, by pressure over flow squared at their demand, are solved with the actual
    supply, :data:`FAVOURABLE` of them at most.
    """
    if project.criteria.standard != "EN 12845" or candidates.mode != "search":
        return None
    resistance = [one.source_pressure / one.total_flow**2 for one in summaries]
    rows = np.argsort(resistance, kind="stable")[:FAVOURABLE].tolist()
    best: Favourable | None = None
    draws = Draws.of(project)
    for row in rows:
        case = candidates.cases[row]
        state = solve_operating(
            network,
            draws.load(case),
            sources,
            velocity_pressure=project.criteria.velocity_pressure,
        )
        flow = float(np.sum(state.source_flow))
        if best is None or flow > best.flow * (1 + 1e-9):
            at = float(state.pressure[state.node(project.supply.compare_at)])
            best = Favourable(case.label, case.heads, flow, at, len(rows))
    return best
