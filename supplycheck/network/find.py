"""From an assembled problem to its state: fast where that works, sure where it does not.

The fast way is Newton with full steps. Where it does not settle, the damped Newton of
:mod:`supplycheck.network.core` does, and the lowest supply is found by bracketing, because the least slack
never falls when the supply rises. One-way links that came out against their direction are then closed
exactly, and pressure-reducing valves are given their state: open, holding their setting, or shut.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import Final

import numpy as np

from supplycheck.network.assemble import Assembled
from supplycheck.network.core import FLOW_TOLERANCE, Problem, State, solve
from supplycheck.network.graphs import parts_of
from supplycheck.network.links import STEEP, BoolArray
from supplycheck.network.records import FloatArray, IntArray

FAST_LIMIT: Final = 30
SURE_LIMIT: Final = 400
ROUNDS: Final = 40
VALVE_TOLERANCE: Final = 1e-2
"""By how much a pressure-reducing valve may differ from its condition before it changes state [Pa]."""
BACKWARDS: Final = -1e-14
"""Flow at which a one-way link is taken to run backwards [m³/s]; it then holds 0.1 Pa."""
SLACK_TOLERANCE: Final = 1e-5
"""Least slack accepted as zero by bracketing [Pa]."""
HIGHEST_SHIFT: Final = 1e9
"""Highest supply pressure that is tried [Pa]."""

Solve = Callable[[Problem, State], State]


class NoStateError(Exception):
    """No state was found; ``state`` is the last one, ``why`` a word for the diagnosis."""

    def __init__(self, why: str, state: State) -> None:
        super().__init__(why)
        self.why = why
        self.state = state


def find_coarse(assembled: Assembled) -> State:
    """Return the state of ``assembled`` as far as the demand needs it; raises :class:`NoStateError`."""
    state = solve(assembled.problem, assembled.start, limit=FAST_LIMIT, fine=False)
    if not state.converged or bool((assembled.problem.one_way & (state.flow < BACKWARDS)).any()):
        raise NoStateError("numbers", state)
    return state


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
            return _lowest_with_valves(assembled, problem, begin)
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


def _lowest_with_valves(assembled: Assembled, problem: Problem, begin: State) -> State:
    """Return the state at the lowest shift with every pressure-reducing valve in its state.

    With all of them open Newton finds it at once; where none then has more behind it than its setting that
    is the answer, else the bracketing starts there, which spares it the states in which nothing flows.
    """
    count = len(assembled.valves)
    opened = solve(problem, begin, limit=FAST_LIMIT)
    if not opened.converged or bool((problem.one_way & (opened.flow < BACKWARDS)).any()):
        return _lowest(problem, begin, lambda p, s: _with_valves(assembled, p, s))
    opened = replace(opened, extra=np.zeros(count))
    wide = _Valves(assembled, np.zeros(count, dtype=bool), np.zeros(count, dtype=bool))
    if not any(wide.fault(opened, valve) for valve in range(count)):
        return opened
    return _lowest(
        problem, opened, lambda p, s: _with_valves(assembled, p, s), first=float(opened.shift[0])
    )


def _lowest(problem: Problem, begin: State, inner: Solve, first: float | None = None) -> State:
    """Return the state at the lowest shift whose least slack is zero, by bracketing from ``first`` on."""
    if problem.groups > 1:
        raise NoStateError("numbers", begin)
    bare = replace(problem, floor_rows=problem.floor_rows[:0], floors=problem.floors[:0])
    n = len(problem.outflow)
    last = begin

    def least_slack(shift: float) -> float:
        nonlocal last
        fixed = problem.fixed + problem.moves * shift
        head = last.head.copy()
        head[n:] = fixed
        state = inner(replace(bare, fixed=fixed), replace(last, head=head, shift=np.zeros(1)))
        last = replace(state, shift=np.array([shift]))
        return float((state.head[problem.floor_rows] - problem.floors).min())

    top = float(problem.floors.max())
    low = top - float((problem.fixed[problem.moves > 0]).max()) if first is None else first
    step = max(1e5, 0.1 * abs(top))
    at_low = least_slack(low)
    high, at_high = low, at_low
    while at_low > 0:
        high, at_high = low, at_low
        low -= step
        step *= 2
        if step > HIGHEST_SHIFT:
            raise NoStateError("no lowest supply", last)
        at_low = least_slack(low)
    while at_high < 0:
        low, at_low = high, at_high
        high += step
        step *= 2
        if step > HIGHEST_SHIFT:
            raise NoStateError("out of reach", last)
        at_high = least_slack(high)
    _root(least_slack, (low, at_low), (high, at_high), SLACK_TOLERANCE)
    return last


def _root(
    function: Callable[[float], float], low: tuple[float, float], high: tuple[float, float], good: float
) -> float:
    """Return where ``function``, not falling, is within ``good`` of zero; (place, value) at both ends.

    False position halving the weight of an end that stays (Illinois), bisection every fourth turn; the
    last call is at the place returned.
    """
    (a, fa), (b, fb) = low, high
    for turn in range(200):
        middle = b - fb * (b - a) / (fb - fa) if fb > fa and turn % 4 < 3 else 0.5 * (a + b)
        value = function(middle)
        if abs(value) <= good or not a < middle < b:
            break
        if value < 0:
            a, fa, fb = middle, value, 0.5 * fb
        else:
            b, fb, fa = middle, value, 0.5 * fa
    return middle


def _closed_exactly(problem: Problem, begin: State, inner: Solve) -> State:
    """Solve, then close one-way links that run backwards, and open those that would run forwards."""
    state = inner(problem, begin)
    one_way = problem.one_way.copy()
    one_way[problem.valve_links] = False  # a valve that holds its setting is shut by its state
    back = one_way & (state.flow < BACKWARDS)
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
        more = one_way & (state.flow < BACKWARDS)
        if not (reopen.any() or more.any()):
            return state
        back = (back & ~reopen) | more
    raise NoStateError("numbers", state)


def _offset(problem: Problem, fall: FloatArray) -> FloatArray:
    """Return the loss of every link at no flow [Pa]: a closed link opens above it."""
    loss, _ = problem.law(np.zeros_like(fall))
    return loss + VALVE_TOLERANCE


def _parts(problem: Problem, closed: BoolArray) -> tuple[IntArray, BoolArray]:
    """Return the part each node belongs to when ``closed`` links are cut, and which parts are held."""
    n = len(problem.outflow)
    total = n + len(problem.fixed)
    open_ = ~closed
    rows, cols = problem.start[open_], problem.end[open_]
    count, label = parts_of(rows, cols, total)
    held = np.zeros(count, dtype=bool)
    held[label[n:]] = True
    return label, held


def _floating(problem: Problem, closed: BoolArray) -> IntArray:
    """Return one free node of every part that no open link joins to a fixed node."""
    label, held = _parts(problem, closed)
    lost, first = np.unique(label[: len(problem.outflow)], return_index=True)
    return np.asarray(first[~held[lost]], dtype=np.int64)


@dataclass(frozen=True, slots=True, eq=False)
class _Valves:
    """The states of the pressure-reducing valves: ``holds`` and ``shut`` (v,); else fully open."""

    assembled: Assembled
    holds: BoolArray
    shut: BoolArray

    def put(self, valve: int, word: str) -> _Valves:
        holds, shut = self.holds.copy(), self.shut.copy()
        holds[valve], shut[valve] = word == "holds", word == "shut"
        return replace(self, holds=holds, shut=shut)

    def state(self, problem: Problem, begin: State) -> State:
        """Return the state with the valves so; ``extra`` (v,) is the loss of those that hold."""
        made, closed = self.assembled, np.zeros(len(problem.start), dtype=bool)
        closed[made.valves[self.shut]] = True
        here = replace(
            problem,
            valve_links=made.valves[self.holds],
            valve_rows=made.valve_rows[self.holds],
            valve_heads=made.valve_heads[self.holds],
            closed=closed if self.shut.any() else None,
            ground=_floating(problem, closed) if self.shut.any() else problem.ground,
        )
        flow = np.where(closed, 0.0, begin.flow)
        state = _closed_exactly(here, replace(begin, flow=flow, extra=begin.extra[self.holds]), _either)
        extra = np.zeros(len(made.valves))
        extra[self.holds] = state.extra
        return replace(state, extra=extra)

    def fault(self, state: State, valve: int) -> float:
        """Return by how much [Pa] ``valve`` contradicts its state; 0 where it does not."""
        made = self.assembled
        behind, ahead = (
            state.head[made.valve_rows[valve]],
            state.head[made.problem.start[made.valves[valve]]],
        )
        setting, flow = made.valve_heads[valve], state.flow[made.valves[valve]]
        if self.shut[valve]:
            return float(max(0.0, min(setting - behind, ahead - behind) - VALVE_TOLERANCE))
        if self.holds[valve]:
            nothing = -FLOW_TOLERANCE * float(np.abs(state.flow).max(initial=0.0)) - 1e-15
            backwards = STEEP * float(nothing - flow)
            own, _ = made.problem.law(np.maximum(state.flow, 0.0))
            least = float(own[made.valves[valve]]) - VALVE_TOLERANCE
            return max(0.0, least - float(state.extra[valve]), backwards)
        return float(max(0.0, behind - setting - VALVE_TOLERANCE))


def _with_valves(assembled: Assembled, problem: Problem, begin: State) -> State:
    """Return the state with every pressure-reducing valve open, holding or shut as it must be.

    With the others left as they are a valve's own state is certain: open where the pressure behind it
    is then at most its setting, shut where it is above the setting even so, holding in between.
    """
    count = len(assembled.valves)
    valves = _Valves(assembled, np.zeros(count, dtype=bool), np.zeros(count, dtype=bool))
    extra = begin.extra if len(begin.extra) == count else np.zeros(count)
    state = valves.state(problem, replace(begin, extra=extra))
    for _ in range(ROUNDS):
        faults = np.array([valves.fault(state, valve) for valve in range(count)])
        if not faults.any():
            return state
        valves, state = _decide(valves, problem, state, int(np.argmax(faults)))
    raise NoStateError("valves", state)


def _decide(valves: _Valves, problem: Problem, state: State, valve: int) -> tuple[_Valves, State]:
    """Return the valves with ``valve`` in the state that the others ask of it."""
    made = valves.assembled
    wide = valves.put(valve, "open")
    opened = wide.state(problem, state)
    if not wide.fault(opened, valve):
        return wide, opened
    tight = valves.put(valve, "shut")
    closed = np.zeros(len(problem.start), dtype=bool)
    closed[made.valves[tight.shut]] = True
    label, fed = _parts(problem, closed)
    if fed[label[made.valve_rows[valve]]]:
        try:
            shut = tight.state(problem, state)
        except NoStateError:
            pass
        else:
            if not tight.fault(shut, valve):
                return tight, shut
    held = valves.put(valve, "holds")
    extra = state.extra.copy()
    extra[valve] = max(float(opened.head[made.valve_rows[valve]] - made.valve_heads[valve]), 0.0)
    return held, held.state(problem, replace(opened, extra=extra))
