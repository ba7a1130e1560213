"""The two questions: what really flows with the actual supply, and what supply a requirement needs."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import replace
from typing import Final

import numpy as np

from supplycheck.errors import NotConvergedError
from supplycheck.network.arrays import Network
from supplycheck.network.assemble import Assembled, Case, Feed, assemble, read_case, read_feed
from supplycheck.network.core import State
from supplycheck.network.diagnose import check_reached, check_structure, explain
from supplycheck.network.find import NoStateError, find_state
from supplycheck.network.records import FloatArray, IntArray, LoadCase, Solution, SourceCurve
from supplycheck.network.reduce import Reduced, reduce_links
from supplycheck.network.solution import Found, whole_solution

TURNS: Final = 100
"""Most rounds in which velocity pressures are brought up to date."""
HIGHEST_VELOCITY_PRESSURE: Final = 1e9
"""Velocity pressure at which the search is given up [Pa]."""
FULL_TURNS: Final = 10
"""Rounds after which velocity pressures go only half of the way, against swinging."""
FREE_TURNS: Final = 20
"""Rounds in which the pipe that feeds an outlet may change."""
VELOCITY_TOLERANCE: Final = 1e-6
"""Largest change of a velocity pressure in the last round [Pa]."""


def solve_operating(
    network: Network, load: LoadCase, sources: Sequence[SourceCurve], *, velocity_pressure: bool = False
) -> Solution:
    """Return what flows with the outlets of ``load`` open on the actual supply curves.

    Parameters
    ----------
    network : The network.
    load : Open outlets, fixed outflows, shut pipes.
    sources : One supply or several, each at its node.
    velocity_pressure : Whether outlets discharge by normal instead of total pressure: total less the
        velocity pressure of the pipe that feeds the outlet, except at the end of a line.

    Raises
    ------
    NotConvergedError
        Where there is no solution, with cause, tags and remedy.
    DomainError
        Where the curve of a supply rises.
    """
    case = read_case(network, load)
    feed = read_feed(network, sources, demand=False)
    return _solve(network, case, feed, sources, demand=False, normal=velocity_pressure)


def solve_demand(
    network: Network,
    load: LoadCase,
    required: Mapping[str, float],
    sources: Sequence[SourceCurve],
    *,
    velocity_pressure: bool = False,
) -> Solution:
    """Return the state at the lowest supply that gives every required pressure.

    With one supply its pressure is the unknown, whatever its curve; with several all curves are
    shifted by one unknown pressure.

    Parameters
    ----------
    network : The network.
    load : Open outlets, fixed outflows, shut pipes.
    required : Pressure needed at each of these nodes [Pa]; with ``velocity_pressure`` at an open outlet
        it is the normal pressure that is needed.
    sources : One supply or several, each at its node.
    velocity_pressure : As in :func:`solve_operating`.

    Raises
    ------
    NotConvergedError
        Where there is no solution, with cause, tags and remedy.
    DomainError
        Where the curve of a supply rises.
    """
    if not required:
        raise NotConvergedError(
            "no pressure is required anywhere",
            cause="input",
            tags=(),
            remedy="name the outlets and the pressure each needs",
        )
    case = read_case(network, load, required)
    feed = read_feed(network, sources, demand=True)
    return _solve(network, case, feed, sources, demand=True, normal=velocity_pressure)


def _solve(
    network: Network, case: Case, feed: Feed, sources: Sequence[SourceCurve], *, demand: bool, normal: bool
) -> Solution:
    keep = case.keep()
    keep[feed.rows] = True
    reduced = reduce_links(network.links, keep, case.shut)
    check_structure(network, reduced.links, case, feed)
    assembled = assemble(reduced.links, network.base, case, feed, demand=demand)
    found = Found(network, case, feed, reduced, assembled, _find(network, reduced, assembled, None))
    if normal and len(case.outlets):
        found = _with_normal_pressure(found, demand=demand)
    solution = whole_solution(found, sources, demand=demand)
    notes = check_reached(network, case, solution.pressure)
    return replace(solution, notes=(*solution.notes, *notes)) if notes else solution


def _with_normal_pressure(found: Found, *, demand: bool) -> Found:
    """Return the state in which outlets discharge by normal pressure, by bringing it up to date in turns.

    Where heads are fed from both sides the pipe that feeds one may change for ever; it is therefore kept
    as it is after :data:`FREE_TURNS`.
    """
    network, case = found.network, found.case
    feeding, offset = np.zeros(0, dtype=np.int64), case.offset
    for turn in range(TURNS):
        flow = found.pipe_flow()
        if turn < FREE_TURNS:
            feeding = _feeding_pipes(network, case, flow)
        speed = np.where(feeding >= 0, flow[feeding] / network.links.area[feeding], 0.0)
        offset = 0.5 * network.fluid.density * speed**2
        if float(np.abs(offset - case.offset).max(initial=0.0)) <= VELOCITY_TOLERANCE:
            return found
        if float(offset.max()) > HIGHEST_VELOCITY_PRESSURE:
            break
        if turn >= FULL_TURNS:
            offset = 0.5 * (offset + case.offset)
        case = _with_offset(case, offset)
        assembled = assemble(found.reduced.links, network.base, case, found.feed, demand=demand)
        state = _find(network, found.reduced, assembled, found.state)
        found = replace(found, case=case, assembled=assembled, state=state)
    worst = np.argsort(-offset)[:5]
    raise NotConvergedError(
        "the velocity pressures did not settle: at some outlets they rise as fast as the pressure",
        cause="input",
        tags=tuple(network.node_tags[row] for row in case.outlets[worst]),
        remedy="use total pressure, or larger pipes at these outlets",
    )


def _find(network: Network, reduced: Reduced, assembled: Assembled, start: State | None) -> State:
    if start is not None:
        start = replace(start, extra=start.extra[:0], converged=False)
    try:
        return find_state(assembled, start)
    except NoStateError as failure:
        raise explain(network, reduced, assembled, failure) from failure


def _with_offset(case: Case, offset: FloatArray) -> Case:
    """Return ``case`` with velocity pressures taken off, required pressures raised by as much."""
    more = dict(zip(case.outlets.tolist(), (offset - case.offset).tolist(), strict=True))
    raised = np.array([more.get(row, 0.0) for row in case.floor_rows.tolist()])
    return replace(case, offset=offset, floors=case.floors + raised)


def _feeding_pipes(network: Network, case: Case, flow: FloatArray) -> IntArray:
    """Return the pipe with the largest flow into each open outlet; −1 at the end of a line."""
    links, nodes = network.links, len(network.node_tags)
    moving = np.flatnonzero(np.abs(flow) > 0)
    into = np.where(flow[moving] > 0, links.end[moving], links.start[moving])
    out_of = np.where(flow[moving] > 0, links.start[moving], links.end[moving])
    onward = np.bincount(out_of, minlength=nodes) > 0
    order = np.argsort(np.abs(flow[moving]), kind="stable")
    feeding = np.full(nodes, -1)
    feeding[into[order]] = moving[order]
    return np.where(onward[case.outlets], feeding[case.outlets], -1)
