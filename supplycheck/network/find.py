"""From an assembled problem to its state: fast where that works, sure where it does not.

The fast way is Newton with full steps. Where it does not settle, the damped Newton of
:mod:`supplycheck.network.core` does, and the lowest supply is found by bracketing, because the least slack
never falls when the supply rises. One-way links that came out against their direction are then closed
exactly, and pressure-reducing valves are given their state: open, holding their setting, or shut.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from typing import Final

import numpy as np
from scipy.sparse import csr_array
from scipy.sparse.csgraph import connected_components

from supplycheck.network.assemble import Assembled
from supplycheck.network.core import Problem, State, solve
from supplycheck.network.links import BoolArray
from supplycheck.network.records import FloatArray, IntArray

FAST_LIMIT: Final = 30
SURE_LIMIT: Final = 400
ROUNDS: Final = 40
VALVE_TOLERANCE: Final = 1e-2
"""By how much a pressure-reducing valve may differ from its condition before it changes state [Pa]."""
HIGHEST_SHIFT: Final = 1e9
"""Highest supply pressure that is tried [Pa]."""

Solve = Callable[[Problem, State], State]


class NoStateError(Exception):
    """No state was found; ``state`` is the last one, ``why`` a word for the diagnosis."""

    def __init__(self, why: str, state: State) -> None:
        super().__init__(why)
        self.why = why
        self.state = state


def find_state(assembled: Assembled, start: State | None = None) -> State:
    """Return the state of ``assembled``, from ``start`` where one is known.

    Raises
    ------
    NoStateError
        Where none is found.
    """
    problem = assembled.problem
    begin = assembled.start if start is None else start
    if len(assembled.valves):
        if len(problem.floor_rows):
            return _lowest(problem, begin, lambda p, s: _with_valves(assembled, p, s))
        return _with_valves(assembled, problem, begin)
    return _closed_exactly(problem, begin, _either)


def _either(problem: Problem, begin: State) -> State:
    """Return the state by the fast way, else by the sure one."""
    state = solve(problem, begin, limit=FAST_LIMIT)
    if state.converged:
        return state
    if len(problem.floor_rows):
        return _lowest(problem, begin, _sure)
    return _sure(problem, begin)


def _sure(problem: Problem, begin: State) -> State:
    state = solve(problem, begin, limit=SURE_LIMIT, damped=True)
    if not state.converged:
        raise NoStateError("numbers", state)
    return state


def _lowest(problem: Problem, begin: State, inner: Solve) -> State:
    """Return the state at the lowest shift whose least slack is zero, by bracketing."""
    from scipy.optimize import brentq

    if problem.groups > 1:
        raise NoStateError("numbers", begin)
    last: dict[str, State] = {"state": begin}
    bare = replace(problem, floor_rows=problem.floor_rows[:0], floors=problem.floors[:0])
    n = len(problem.outflow)

    def least_slack(shift: float) -> float:
        fixed = problem.fixed + problem.moves * shift
        old = last["state"]
        head = old.head.copy()
        head[n:] = fixed
        state = inner(replace(bare, fixed=fixed), replace(old, head=head, shift=np.zeros(1)))
        last["state"] = replace(state, shift=np.array([shift]))
        return float((state.head[problem.floor_rows] - problem.floors).min())

    supply = float((problem.fixed[problem.moves > 0]).max())
    low = float(problem.floors.max()) - supply
    step = max(1e5, abs(float(problem.floors.max())) * 0.1)
    while least_slack(low) > 0:
        low -= step
        step *= 2
        if step > HIGHEST_SHIFT:
            raise NoStateError("no lowest supply", last["state"])
    high = low + step
    while least_slack(high) < 0:
        low, step = high, 2 * step
        high = low + step
        if step > HIGHEST_SHIFT:
            raise NoStateError("out of reach", last["state"])
    shift = brentq(least_slack, low, high, xtol=1e-7, rtol=1e-14, maxiter=200)
    least_slack(float(shift))
    return last["state"]


def _closed_exactly(problem: Problem, begin: State, inner: Solve) -> State:
    """Solve, then close one-way links that run backwards, and open those that would run forwards."""
    state = inner(problem, begin)
    back = problem.one_way & (state.flow < 0)
    if not back.any():
        return state
    if problem.closed is not None:
        back |= problem.closed
    for _ in range(ROUNDS):
        closed = replace(problem, closed=back, ground=_floating(problem, back))
        flow = np.where(back, 0.0, state.flow)
        state = inner(closed, replace(state, flow=flow))
        fall = state.head[problem.start] - state.head[problem.end]
        reopen = back & (fall > _offset(problem, fall))
        if problem.closed is not None:
            reopen &= ~problem.closed
        more = problem.one_way & (state.flow < 0)
        if not (reopen.any() or more.any()):
            return state
        back = (back & ~reopen) | more
    raise NoStateError("numbers", state)


def _offset(problem: Problem, fall: FloatArray) -> FloatArray:
    """Return the loss of every link at no flow [Pa]: a closed link opens above it."""
    loss, _ = problem.law(np.zeros_like(fall))
    return loss + VALVE_TOLERANCE


def _floating(problem: Problem, closed: BoolArray) -> IntArray:
    """Return one free node of every part that no open link joins to a fixed node."""
    n = len(problem.outflow)
    total = n + len(problem.fixed)
    open_ = ~closed
    rows, cols = problem.start[open_], problem.end[open_]
    graph = csr_array((np.ones(len(rows), dtype=np.int8), (rows, cols)), (total, total))
    count, label = connected_components(graph, directed=False)
    held = np.zeros(count, dtype=bool)
    held[label[n:]] = True
    lost, first = np.unique(label[:n], return_index=True)
    return np.asarray(first[~held[lost]], dtype=np.int64)


def _with_valves(assembled: Assembled, problem: Problem, begin: State) -> State:
    """Return the state with every pressure-reducing valve open, holding or shut as it must be."""
    valves, rows, heads = assembled.valves, assembled.valve_rows, assembled.valve_heads
    holds, shut = np.zeros(len(valves), dtype=bool), np.zeros(len(valves), dtype=bool)
    state = replace(begin, extra=np.zeros(0))
    tried: set[bytes] = set()
    for _ in range(ROUNDS + 4 * len(valves)):
        closed = np.zeros(len(problem.start), dtype=bool)
        closed[valves[shut]] = True
        here = replace(
            problem,
            valve_links=valves[holds],
            valve_rows=rows[holds],
            valve_heads=heads[holds],
            closed=closed if shut.any() else None,
            ground=_floating(problem, closed) if shut.any() else problem.ground,
        )
        extra = np.zeros(int(holds.sum()))
        state = _closed_exactly(here, replace(state, extra=extra, flow=_still(state.flow, closed)), _either)
        want_hold, want_shut = _wanted(assembled, problem, state, holds, shut)
        change = (want_hold != holds) | (want_shut != shut)
        if not change.any():
            full = np.zeros(len(valves))
            full[holds] = state.extra
            return replace(state, extra=full)
        key = holds.tobytes() + shut.tobytes()
        if key in tried:
            change &= np.arange(len(valves)) == int(np.argmax(change))
        tried.add(key)
        holds, shut = np.where(change, want_hold, holds), np.where(change, want_shut, shut)
    raise NoStateError("valves", state)


def _still(flow: FloatArray, closed: BoolArray) -> FloatArray:
    return np.where(closed, 0.0, flow)


def _wanted(
    assembled: Assembled, problem: Problem, state: State, holds: BoolArray, shut: BoolArray
) -> tuple[BoolArray, BoolArray]:
    """Return which valves should hold their setting and which should be shut, in this state."""
    valves, heads = assembled.valves, assembled.valve_heads
    behind = state.head[assembled.valve_rows]
    before = state.head[problem.start[valves]]
    flow = state.flow[valves]
    extra = np.zeros(len(valves))
    extra[holds] = state.extra
    nothing = -1e-9 * max(float(np.abs(state.flow).max(initial=0.0)), 1e-9)
    above = behind > heads + VALVE_TOLERANCE
    reopen = shut & (behind < heads - VALVE_TOLERANCE) & (before > behind + VALVE_TOLERANCE)
    backwards = holds & (flow < nothing)
    want_shut = (shut & ~reopen) | backwards
    want_hold = (holds & (extra >= -VALVE_TOLERANCE) & ~backwards) | (
        ~holds & ~shut & above & (flow >= nothing)
    )
    want_hold |= reopen & (before > heads)
    return want_hold, want_shut
