"""From a load case to the arrays of the Newton core, and back."""

from __future__ import annotations

import math
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass

import numpy as np

from supplycheck.errors import NotConvergedError
from supplycheck.hydraulics import smooth_power
from supplycheck.network.arrays import Network
from supplycheck.network.core import Problem, State, first_state
from supplycheck.network.curves import SourceLaw
from supplycheck.network.links import STEEP, BoolArray, Law, Links
from supplycheck.network.nodal import Nodal
from supplycheck.network.records import FloatArray, IntArray, LoadCase, SourceCurve
from supplycheck.network.stations import set_apart

GUESS_VELOCITY = 0.3
"""Velocity of the first guess in every pipe [m/s]."""


@dataclass(frozen=True, slots=True, eq=False)
class Case:
    """A load case in node rows: open outlets with K [m³/s/√Pa], fixed outflows (n,) [m³/s], shut pipes.

    ``floor_rows``/``floors`` are the nodes with a required pressure and that pressure [Pa];
    ``offset`` [Pa] is taken off the pressure that drives each outlet.
    """

    outlets: IntArray
    k_factor: FloatArray
    offset: FloatArray
    outflow: FloatArray
    shut: BoolArray
    floor_rows: IntArray
    floors: FloatArray

    def keep(self) -> BoolArray:
        """Return which nodes (n,) this case asks about, supplies apart."""
        mask: BoolArray = self.outflow != 0
        mask[self.outlets] = True
        mask[self.floor_rows] = True
        return mask


@dataclass(frozen=True, slots=True, eq=False)
class Feed:
    """The supplies: node rows, laws, and whether each is held as a fixed head at its node."""

    rows: IntArray
    laws: tuple[SourceLaw, ...]
    fixed: BoolArray


def read_case(network: Network, load: LoadCase, required: Mapping[str, float] | None = None) -> Case:
    """Return ``load`` in rows of ``network``.

    Raises
    ------
    NotConvergedError
        With cause ``"input"`` where a tag does not exist, an open outlet has no K-factor, an outflow
        is negative or not finite, or nothing is asked.
    """
    required = required or {}
    outlets = _rows(network.node_rows, dict.fromkeys(load.open_outlets))
    drawn = _rows(network.node_rows, load.fixed_flows)
    floor_rows = _rows(network.node_rows, required)
    closed = _rows(network.pipe_rows, load.closed_pipes)
    k_factor = network.k_factor[outlets]
    if not (k_factor > 0).all():
        bare = [network.node_tags[row] for row in outlets[~(k_factor > 0)]]
        raise _input_error(
            "open outlets have no K-factor", bare, "give their sprinkler type or their own K"
        )
    outflow = np.zeros(len(network.node_tags))
    for row, (tag, flow) in zip(drawn.tolist(), load.fixed_flows.items(), strict=True):
        if not (flow >= 0 and math.isfinite(flow)):
            raise _input_error(f"fixed outflow of {flow} m³/s", [tag], "give a flow of zero or more")
        outflow[row] += flow
    shut = network.closed
    if len(closed):
        shut = shut.copy()
        shut[closed] = True
    return Case(
        outlets=outlets,
        k_factor=k_factor,
        offset=np.zeros(len(outlets)),
        outflow=outflow,
        shut=shut,
        floor_rows=floor_rows,
        floors=np.array(list(required.values()), dtype=np.float64),
    )


def _rows(known: Mapping[str, int], tags: Iterable[str]) -> IntArray:
    tags = tuple(tags)
    rows = list(map(known.get, tags))
    if None in rows:
        lost = [tag for tag in tags if tag not in known]
        raise _input_error("the load case names nodes or pipes that do not exist", lost, "correct the tags")
    return np.array(rows, dtype=np.int64)


def read_feed(network: Network, sources: Sequence[SourceCurve], *, demand: bool) -> Feed:
    """Return the supplies in rows of ``network``; in a demand problem a single one is a fixed head."""
    if not sources:
        raise NotConvergedError(
            "there is no supply", cause="structure", tags=(), remedy="name the node that is supplied"
        )
    lost = [source.node for source in sources if source.node not in network.node_rows]
    if lost:
        raise _input_error("supplies stand at nodes that do not exist", lost, "correct the node")
    tags = [source.node for source in sources]
    if len(set(tags)) < len(tags):
        twice = [tag for tag in dict.fromkeys(tags) if tags.count(tag) > 1]
        raise _input_error("two supplies stand at one node", twice, "combine their curves")
    laws = tuple(SourceLaw.of(source) for source in sources)
    alone = demand and len(sources) == 1
    return Feed(
        np.array([network.node_rows[tag] for tag in tags], dtype=np.int64),
        laws,
        np.array([alone or law.is_fixed for law in laws], dtype=bool),
    )


def _input_error(problem: str, tags: Sequence[str], remedy: str) -> NotConvergedError:
    return NotConvergedError(problem, cause="input", tags=tags, remedy=remedy)


@dataclass(frozen=True, slots=True, eq=False)
class Assembled:
    """A problem for the core and where its rows come from.

    ``rows`` are the node rows of the network for the core's free nodes and then its fixed source nodes
    (beyond those of the network: nodes behind a valve); core links are the reduced links, the valves, the
    ``piped`` supplies, the outlets. ``valves`` (v,) are the core links with a pressure-reducing valve,
    ``valve_pipes`` the reduced links in which they stand, ``valve_rows`` the core nodes behind them and
    ``valve_heads`` [Pa] the heads they are set to.
    """

    problem: Problem
    rows: IntArray
    pipes: int
    piped: IntArray
    start: State
    valves: IntArray
    valve_pipes: IntArray
    valve_rows: IntArray
    valve_heads: FloatArray

    def outlet_flow(self, state: State) -> FloatArray:
        """Return the flow from each open outlet [m³/s], never negative."""
        return np.maximum(state.flow[self.pipes + len(self.piped) :], 0.0)

    def heads(self, state: State, nodes: int) -> tuple[FloatArray, BoolArray]:
        """Return heads (n,) [Pa] where known, and where they are."""
        head, known = np.full(nodes, np.nan), np.zeros(nodes, dtype=bool)
        own = self.rows < nodes
        head[self.rows[own]] = state.head[: len(self.rows)][own]
        known[self.rows[own]] = True
        return head, known


def assemble(
    links: Links, base: FloatArray, case: Case, feed: Feed, *, demand: bool, size: int | None = None
) -> Assembled:
    """Return the core's problem for ``case`` on the (reduced) ``links``.

    ``size`` is the number of node rows of each copy where several lie side by side.
    """
    apart = set_apart(links, base)
    links, base = apart.links, apart.base
    outflow = np.concatenate([case.outflow, np.zeros(len(base) - len(case.outflow))])
    size = size or len(base)
    held = feed.rows[feed.fixed]
    used = np.zeros(len(base), dtype=bool)
    for rows in (
        links.start,
        links.end,
        case.outlets,
        case.floor_rows,
        np.flatnonzero(outflow),
        feed.rows,
    ):
        used[rows] = True
    used[held] = False
    rows = np.concatenate([np.flatnonzero(used), held])
    free = len(rows) - len(held)
    index = np.full(len(base), -1)
    index[rows] = np.arange(len(rows))
    piped = np.flatnonzero(~feed.fixed)
    tanks = len(rows) + np.arange(len(piped))
    airs = len(rows) + len(piped) + np.arange(len(case.outlets))
    static = np.array([law.static for law in feed.laws]) + base[feed.rows]
    fixed = np.concatenate([static[feed.fixed], static[piped], base[case.outlets]])
    start = np.concatenate([index[links.start], tanks, index[case.outlets]])
    end = np.concatenate([index[links.end], index[feed.rows[piped]], airs])
    one_way = np.concatenate(
        [links.one_way, np.zeros(len(piped), dtype=bool), np.ones(len(case.outlets), dtype=bool)]
    )
    moves = np.zeros(len(fixed))
    if demand:
        moves[: len(held) + len(piped)] = 1.0
    floor_rows = index[case.floor_rows] if demand else np.zeros(0, dtype=np.int64)
    problem = Problem(
        start=start,
        end=end,
        outflow=outflow[rows[:free]],
        fixed=fixed,
        law=_law(links, [feed.laws[i] for i in piped], case),
        one_way=one_way,
        moves=moves,
        floor_rows=floor_rows,
        floors=base[case.floor_rows] + case.floors if demand else np.zeros(0),
        nodal=Nodal(start, end, free, copies=len(base) // size),
        group=np.concatenate([rows, feed.rows[piped], case.outlets]) // size,
        groups=len(base) // size,
    )
    guess = _guess(links, case, len(piped), static - base[feed.rows])
    return Assembled(
        problem,
        rows,
        len(links),
        piped,
        first_state(problem, guess),
        apart.valves,
        apart.pipes,
        index[apart.behind],
        apart.heads,
    )


def _law(links: Links, sources: Sequence[SourceLaw], case: Case) -> Law:
    pipes, behind = len(links), len(links) + len(sources)
    of_pipes = links.law()
    if not (sources or len(case.outlets)):
        return of_pipes
    per_k = case.k_factor**-2.0

    def law(flow: FloatArray) -> tuple[FloatArray, FloatArray]:
        value, slope = np.empty_like(flow), np.empty_like(flow)
        value[:pipes], slope[:pipes] = of_pipes(flow[:pipes])
        for row, source in enumerate(sources, start=pipes):
            value[row : row + 1], slope[row : row + 1] = source.fall(flow[row : row + 1])
        out = flow[behind:]
        square, dsquare = smooth_power(out, 2.0)
        back = out < 0
        value[behind:] = per_k * square + case.offset + np.where(back, STEEP * out, 0.0)
        slope[behind:] = per_k * dsquare + np.where(back, STEEP, 0.0)
        return value, slope

    return law


def _guess(links: Links, case: Case, piped: int, static: FloatArray) -> FloatArray:
    """Return a first guess of the flows: a usual velocity in pipes, outlets at what they need."""
    drive = np.full(len(case.outflow), max(0.3 * float(static.max()), 5e4))
    drive[case.floor_rows] = case.floors
    out = case.k_factor * np.sqrt(np.maximum(drive[case.outlets], 1e3))
    total = float(out.sum() + case.outflow.sum())
    inflow = np.full(piped, max(total, 1e-4) / max(piped, 1))
    return np.concatenate([np.minimum(links.area * GUESS_VELOCITY, max(total, 1e-5)), inflow, out])
