"""The two questions: what really flows with the actual supply, and what supply a requirement needs."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import replace

import numpy as np

from supplycheck.errors import NotConvergedError
from supplycheck.network.arrays import Network
from supplycheck.network.assemble import Assembled, Case, Feed, assemble, read_case, read_feed
from supplycheck.network.core import Problem, State, solve
from supplycheck.network.records import LoadCase, Solution, SourceCurve
from supplycheck.network.reduce import reduce_links
from supplycheck.network.solution import whole_solution

FAST_LIMIT = 30
SURE_LIMIT = 200


def solve_operating(
    network: Network, load: LoadCase, sources: Sequence[SourceCurve], *, velocity_pressure: bool = False
) -> Solution:
    """Return what flows with the outlets of ``load`` open on the actual supply curves.

    Parameters
    ----------
    network : The network.
    load : Open outlets, fixed outflows, shut pipes.
    sources : One supply or several, each at its node.
    velocity_pressure : Whether outlets discharge by normal instead of total pressure.

    Raises
    ------
    NotConvergedError
        Where there is no solution, with cause, tags and remedy.
    DomainError
        Where the curve of a supply rises.
    """
    case = read_case(network, load)
    feed = read_feed(network, sources, demand=False)
    return _solve(network, case, feed, sources, demand=False)


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
    required : Pressure needed at each of these nodes [Pa].
    sources : One supply or several, each at its node.
    velocity_pressure : Whether outlets discharge by normal instead of total pressure.

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
    return _solve(network, case, feed, sources, demand=True)


def _solve(
    network: Network, case: Case, feed: Feed, sources: Sequence[SourceCurve], *, demand: bool
) -> Solution:
    keep = case.keep(len(network.node_tags))
    keep[feed.rows] = True
    reduced = reduce_links(network.links, keep, case.shut)
    assembled = assemble(reduced.links, network.base, case, feed, demand=demand)
    state = find_state(assembled)
    return whole_solution(network, case, feed, sources, reduced, assembled, state, demand=demand)


def find_state(assembled: Assembled) -> State:
    """Return the converged state of an assembled problem."""
    state = solve(assembled.problem, assembled.start, limit=FAST_LIMIT)
    if not state.converged:
        raise NotConvergedError(
            "the network did not converge", cause="numbers", tags=(), remedy="check resistances"
        )
    return state
