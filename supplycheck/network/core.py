"""The Newton core. It knows no pipes: arrays, a loss law and a first guess in; flows and heads out.

Unknown are the flow q of every link and the head H of every free node, so that

* loss(q) = H(start) − H(end) for every link, the loss strictly increasing in q, and
* the flows at every free node add up to its outflow.

The solution is the minimum of a strictly convex function of the flows, the content Σ∫loss dq less
the work of the fixed heads [1]_; the step is Newton's on both sets of equations at once with the flows
eliminated (the global gradient of Todini and Pilati [2]_), written for the increments so that rounding is
that of the last increment. With ``damped`` the step is shortened until the slope of the content along
it has come down, which makes convergence certain wherever a solution exists.

The demand question adds one unknown for each group of nodes, the ``shift`` of its sources, and one
condition: the least slack (head less required head) of the group is zero. The step takes the shift at
which the least linearised slack is zero: a second right-hand side, no second factorisation.

References
----------
.. [1] Collins, M., Cooper, L., Helgason, R., Kennington, J. and LeBlanc, L. (1978). Solving the pipe
   network analysis problem using optimization techniques. Management Science 24, 747–760.
.. [2] Todini, E. and Pilati, S. (1988). A gradient algorithm for the analysis of pipe networks. In:
   Computer Applications in Water Supply, vol. 1, Research Studies Press, 1–20.
"""

from __future__ import annotations

from dataclasses import dataclass, field, replace
from typing import Final

import numpy as np

from supplycheck.network.links import BoolArray, Law
from supplycheck.network.nodal import Nodal
from supplycheck.network.records import FloatArray, IntArray

HEAD_TOLERANCE: Final = 1e-5
"""Largest loss residual and slack of a converged state [Pa]."""
FLOW_TOLERANCE: Final = 1e-9
"""Largest last step of a flow, as a part of the flow scale."""
COARSE_HEAD: Final = 2.0
"""Last step of the shift accepted where only the demand is asked [Pa]; the error left is far smaller."""
MASS_TOLERANCE: Final = 1e-11
"""Largest imbalance of a node, as a part of the flow scale."""
LEAST_RESPONSE: Final = 1e-9
"""Least rise of a head for a rise of the supply that is believed [-]."""
SEARCH_PART: Final = 0.5
"""Part of the first slope of the content that a damped step may leave."""
NEXT_PART: Final = 0.1
"""Part of :data:`FLOW_TOLERANCE` that the bound of the next step may reach where the last was larger."""
HIGHEST_FLOW: Final = 1e9
"""Step of a flow at which the iteration is given up [m³/s]."""
ROUGH_HEAD: Final = 1e-3
"""Loss residual accepted where rounding stops the progress [Pa]."""

_NONE: Final = np.zeros(0, dtype=np.int64)
_EMPTY: Final = np.zeros(0)


@dataclass(frozen=True, slots=True, eq=False)
class Problem:
    """Links (m,), free nodes (n,) in rows 0 … n−1 and fixed nodes (f,) in the rows behind them.

    ``outflow`` (n,) and ``fixed`` (f,) heads. ``moves`` (f,) is 1 where a fixed head rises with the
    shift of its group, else 0. ``floor_rows`` (k,), sorted by group, are free nodes that need the head
    ``floors``; none in an operating problem. ``group`` numbers the groups of all n + f nodes and
    ``groups`` counts them. The loss of ``valve_links`` (v,) is not their law but what brings the
    head at ``valve_rows`` to ``valve_heads``.
    """

    start: IntArray
    end: IntArray
    outflow: FloatArray
    fixed: FloatArray
    law: Law
    one_way: BoolArray
    moves: FloatArray
    floor_rows: IntArray
    floors: FloatArray
    nodal: Nodal
    group: IntArray
    groups: int = 1
    valve_links: IntArray = field(default_factory=lambda: _NONE)
    valve_rows: IntArray = field(default_factory=lambda: _NONE)
    valve_heads: FloatArray = field(default_factory=lambda: _EMPTY)
    closed: BoolArray | None = None
    ground: IntArray = field(default_factory=lambda: _NONE)


@dataclass(frozen=True, slots=True, eq=False)
class State:
    """Flows (m,), heads of all nodes (n + f,), shift of each group, loss of each valve link (v,)."""

    flow: FloatArray
    head: FloatArray
    shift: FloatArray
    extra: FloatArray
    iterations: int
    converged: bool
    energy: float
    mass: float


def first_state(problem: Problem, flow: FloatArray) -> State:
    """Return the state before the first step, with ``flow`` as guessed."""
    mean = float(problem.fixed.mean()) if len(problem.fixed) else 0.0
    head = np.concatenate([np.full(len(problem.outflow), mean), problem.fixed])
    extra = np.zeros(len(problem.valve_links))
    return State(flow, head, np.zeros(problem.groups), extra, 0, False, np.inf, np.inf)


def residuals(problem: Problem, state: State) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Return energy residual (m,), mass residual (n,) and the slope of each loss (m,)."""
    loss, slope = _losses(problem, state)
    energy, mass = _residuals(problem, state.head, state.flow, loss)
    return energy, mass, slope


def _losses(problem: Problem, state: State) -> tuple[FloatArray, FloatArray]:
    """Return the loss of every link and a slope above zero."""
    loss, slope = problem.law(state.flow)
    if len(problem.valve_links):
        loss[problem.valve_links] = state.extra
        slope[problem.valve_links] = np.median(slope)
    if slope.min(initial=1.0) <= 0:  # a device whose loss falls with the flow: the chord serves instead
        falling = slope <= 0
        size = np.maximum(np.abs(state.flow[falling]), 1e-9)
        slope[falling] = np.maximum(np.abs(loss[falling]) / size, 1.0)
    return loss, slope


def _residuals(
    problem: Problem, head: FloatArray, flow: FloatArray, loss: FloatArray
) -> tuple[FloatArray, FloatArray]:
    energy = head[problem.start] - head[problem.end] - loss
    mass = -(_leaving(problem, flow) + problem.outflow)
    if problem.closed is not None:
        energy[problem.closed] = 0.0
    return energy, mass


def _leaving(problem: Problem, flow: FloatArray) -> FloatArray:
    """Return what leaves every free node (n,) through links with ``flow``."""
    n = len(problem.outflow)
    nodes = n + len(problem.fixed)
    leaving = np.bincount(problem.start, flow, minlength=nodes)
    leaving -= np.bincount(problem.end, flow, minlength=nodes)
    return np.asarray(leaving[:n])


def _opening(problem: Problem, state: State) -> tuple[State, FloatArray, FloatArray, FloatArray]:
    """Return the state without flow and its residuals, with each law a straight line to its guessed flow.

    The first step then shares the flow by resistance, whichever way the links are drawn. A law without
    such a line (a pump, a valve that holds its setting) keeps its own slope at the guess.
    """
    loss, slope = _losses(problem, state)
    lined = (loss > 0) & (state.flow > 0)
    lined[problem.valve_links] = False
    np.divide(loss, state.flow, out=slope, where=lined)
    flow = np.where(lined, 0.0, state.flow)
    energy, mass = _residuals(problem, state.head, flow, np.where(lined, 0.0, loss))
    return replace(state, flow=flow), energy, mass, slope


def solve(
    problem: Problem, state: State, *, limit: int = 40, damped: bool = False, fine: bool = True
) -> State:
    """Return the converged state, or the last one with ``converged`` false after ``limit`` steps.

    Not ``fine``: it is enough that the last step moved no shift by more than :data:`COARSE_HEAD`, and that
    the content still to be gained is small; links that carry next to nothing may then be off by more.
    """
    if state.iterations:
        energy, mass, slope = residuals(problem, state)
    else:
        state, energy, mass, slope = _opening(problem, state)
    rounding = 1e-13 * _largest(problem.fixed)
    for count in range(1, limit + 1):
        before = state.shift
        try:
            step, shift, extra, head = _step(problem, state, energy, mass, slope)
        except (np.linalg.LinAlgError, RuntimeError):  # a singular matrix, dense or sparse
            break
        largest = _largest(step)
        if not largest < HIGHEST_FLOW:  # or no number at all, as where a head is none
            break
        length = 1.0
        if damped and count > 1 and _largest(mass) <= 1e-9 * _scale(state.flow):
            length = _line_search(problem, state.flow, step, head, extra)
        flow = state.flow + length * step
        head = head if length == 1.0 else _partly(problem, state.head, head, length)
        state = State(flow, head, shift, extra, state.iterations + 1, False, np.inf, np.inf)
        energy, mass, slope = residuals(problem, state)
        worst, lost, scale = _largest(energy), _largest(mass), _scale(flow)
        moved = length * largest
        good = worst <= HEAD_TOLERANCE + rounding
        if good and moved > FLOW_TOLERANCE * scale:
            good = _next_step(problem, energy, slope) <= NEXT_PART * FLOW_TOLERANCE * scale
        if not fine:
            turn = float(np.abs(shift - before).max())
            good = turn <= COARSE_HEAD and float((energy * energy / slope).sum()) <= COARSE_HEAD * scale
        good = good or (worst <= ROUGH_HEAD and count == limit)
        if good and lost <= MASS_TOLERANCE * scale and _slack(problem, head) <= HEAD_TOLERANCE + rounding:
            return replace(state, converged=True, energy=worst, mass=lost)
    return replace(state, converged=False, energy=_largest(energy), mass=_largest(mass))


def _next_step(problem: Problem, energy: FloatArray, slope: FloatArray) -> float:
    """Return a bound of the next step of any flow [m³/s] where every node is in balance.

    With all sources fixed that step is the projection of energy/slope on the flows in balance, in the norm
    weighted by the slopes, so Σ slope·step² ≤ Σ energy²/slope.
    """
    if len(problem.floor_rows) or len(problem.valve_links):
        return np.inf
    return float(np.sqrt((energy * energy / slope).sum() / slope.min()))


def _scale(flow: FloatArray) -> float:
    return max(_largest(flow), 1e-6)


def _largest(values: FloatArray) -> float:
    return float(np.abs(values).max(initial=0.0))


def _slack(problem: Problem, head: FloatArray) -> float:
    """Return by how much the least slack of any group differs from zero [Pa]."""
    if not len(problem.floor_rows):
        return 0.0
    slack = head[problem.floor_rows] - problem.floors
    return float(np.abs(np.minimum.reduceat(slack, _group_starts(problem))).max())


def _group_starts(problem: Problem) -> IntArray:
    if problem.groups == 1:
        return np.zeros(1, dtype=np.int64)
    return np.searchsorted(problem.group[problem.floor_rows], np.arange(problem.groups))


def _partly(problem: Problem, old: FloatArray, new: FloatArray, length: float) -> FloatArray:
    """Return heads ``length`` of the way; fixed heads go all the way."""
    head = old + length * (new - old)
    n = len(problem.outflow)
    head[n:] = new[n:]
    return head


def _step(
    problem: Problem, state: State, energy: FloatArray, mass: FloatArray, slope: FloatArray
) -> tuple[FloatArray, FloatArray, FloatArray, FloatArray]:
    """Return the step of the flows and the new shift, valve losses and heads."""
    n, nodes = len(problem.outflow), len(state.head)
    conductance = 1.0 / slope
    if problem.closed is not None:
        conductance[problem.closed] = 0.0
    demand = len(problem.floor_rows) > 0
    drive = [conductance * energy]
    if demand:
        moves = np.zeros(nodes)
        moves[n:] = problem.moves
        drive.append(conductance * (moves[problem.start] - moves[problem.end]))
    for link in problem.valve_links:
        pull = np.zeros(len(conductance))
        pull[link] = -conductance[link]
        drive.append(pull)
    rhs = np.empty((n, len(drive)))
    for column, push in enumerate(drive):
        rhs[:, column] = -_leaving(problem, push)
    rhs[:, 0] += mass
    answer = np.zeros((nodes, len(drive)))
    answer[:n] = problem.nodal.factorise(conductance, problem.ground)(rhs)
    change = answer[:, 0].copy()
    shift, extra = state.shift, state.extra
    step = energy
    if demand:
        answer[n:, 1] = problem.moves
        more = _shift_step(problem, state.head, answer)
        change += answer[:, 1] * more[problem.group]
        shift = shift + more
    elif len(problem.valve_links):
        hold = answer[:, 1:]
        miss = problem.valve_heads - state.head[problem.valve_rows] - answer[problem.valve_rows, 0]
        added = np.linalg.solve(hold[problem.valve_rows], miss)
        change += hold @ added
        extra = extra + added
        step = energy.copy()
        step[problem.valve_links] -= added
    step = conductance * (step + change[problem.start] - change[problem.end])
    return step, shift, extra, state.head + change


def _shift_step(problem: Problem, head: FloatArray, answer: FloatArray) -> FloatArray:
    """Return, for each group, the shift at which its least linearised slack is zero."""
    rows = problem.floor_rows
    lack = problem.floors - head[rows] - answer[rows, 0]
    response = np.maximum(answer[rows, 1], LEAST_RESPONSE)
    return np.maximum.reduceat(lack / response, _group_starts(problem))


def _line_search(
    problem: Problem, flow: FloatArray, step: FloatArray, head: FloatArray, extra: FloatArray
) -> float:
    """Return the part of ``step`` at which the content has come down enough along it.

    The slope of the convex content along the step is negative at its start; it may be positive at the
    end. The part returned leaves at most half of it, found by bisection and false position.
    """
    fall = head[problem.start] - head[problem.end]

    def slope_at(part: float) -> float:
        loss, _ = problem.law(flow + part * step)
        loss[problem.valve_links] = extra
        return float(((loss - fall) * step).sum())

    first = slope_at(0.0)
    low, high, at_low, at_high = 0.0, 1.0, first, slope_at(1.0)
    if first >= 0.0 or abs(at_high) <= abs(first) * SEARCH_PART:
        return 1.0
    if at_high < 0.0:
        return 1.0
    part = 1.0
    for turn in range(60):
        part = low - at_low * (high - low) / (at_high - at_low) if turn % 3 else 0.5 * (low + high)
        value = slope_at(part)
        if abs(value) <= SEARCH_PART * abs(first):
            break
        if value < 0.0:
            low, at_low = part, value
        else:
            high, at_high = part, value
    return part
