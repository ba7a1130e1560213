"""Many demand cases of one network: the reduction is shared, and cases are solved side by side.

What no case asks about is reduced once; the cases are divided again and again, each part reduced further
for what it asks, until few are left. Those few are laid side by side as separate copies and solved as
one system with a shift for each copy.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from typing import Final

import numpy as np

from supplycheck.network.arrays import Network
from supplycheck.network.assemble import Assembled, Case, Feed, assemble, read_case, read_feed
from supplycheck.network.core import State
from supplycheck.network.find import NoStateError, find_coarse
from supplycheck.network.links import BoolArray, Links
from supplycheck.network.records import DemandSummary, IntArray, LoadCase, SourceCurve
from supplycheck.network.reduce import reduce_links
from supplycheck.network.solve import solve_demand

SIDE_BY_SIDE: Final = 25
"""Most cases solved as one system."""

BRANCHES: Final = 5
"""Parts into which too many cases are divided."""

Progress = Callable[[int, int], None]
Question = tuple[LoadCase, Mapping[str, float]]


def demand_many(
    network: Network,
    cases: Sequence[Question],
    sources: Sequence[SourceCurve],
    progress: Progress | None = None,
    *,
    velocity_pressure: bool = False,
    at: str | None = None,
    watch: Sequence[str] = (),
) -> list[DemandSummary]:
    """Return the short answer of :func:`solve_demand` for each of ``cases``, in their order.

    Parameters
    ----------
    network : The network.
    cases : Pairs of load case and required pressures [Pa].
    sources : One supply or several, each at its node.
    progress : Called with (cases done, cases in all).
    velocity_pressure : As in :func:`solve_demand`; cases are then solved one by one.
    at : Node whose pressure is wanted in every answer; the first source where it is not given.
    watch : Nodes whose lowest pressure is wanted in every answer.

    Raises
    ------
    NotConvergedError
        Where a case has no solution, with cause, tags and remedy.
    DomainError
        Where the curve of a supply rises.
    """
    search = _Search(network, cases, sources, progress, velocity_pressure, at, watch)
    alone = velocity_pressure or any(law.setting is not None for _, law in network.links.devices)
    if alone:
        search.one_by_one(range(len(cases)))
        return search.answers()
    together: dict[tuple[str, ...], list[int]] = {}
    for number, (load, _) in enumerate(cases):
        together.setdefault(tuple(sorted(load.closed_pipes)), []).append(number)
    for numbers in together.values():
        shut = read_case(network, cases[numbers[0]][0], cases[numbers[0]][1]).shut
        search.split(network.links, shut, numbers)
    return search.answers()


class _Search:
    """The cases, and the answers found so far."""

    def __init__(
        self,
        network: Network,
        cases: Sequence[Question],
        sources: Sequence[SourceCurve],
        progress: Progress | None,
        velocity_pressure: bool,
        at: str | None,
        watch: Sequence[str],
    ) -> None:
        self.network, self.cases, self.sources = network, cases, sources
        self.progress, self.velocity_pressure = progress, velocity_pressure
        self.feed = read_feed(network, sources, demand=True)
        self.at = int(self.feed.rows[0]) if at is None else network.node_rows[at]
        self.watch = np.array([network.node_rows[tag] for tag in watch], dtype=np.int64)
        self.asked = [self._rows_asked(load, required) for load, required in cases]
        self.done: dict[int, DemandSummary] = {}

    def _rows_asked(self, load: LoadCase, required: Mapping[str, float]) -> IntArray:
        rows = self.network.node_rows
        tags = (*load.open_outlets, *load.fixed_flows, *required)
        return np.array([rows[tag] for tag in tags if tag in rows], dtype=np.int64)

    def answers(self) -> list[DemandSummary]:
        return [self.done[number] for number in range(len(self.cases))]

    def report(self) -> None:
        if self.progress is not None:
            self.progress(len(self.done), len(self.cases))

    def one_by_one(self, numbers: Sequence[int]) -> None:
        for number in numbers:
            load, required = self.cases[number]
            solution = solve_demand(
                self.network, load, required, self.sources, velocity_pressure=self.velocity_pressure
            )
            self.done[number] = DemandSummary(
                float(solution.source_pressure[0]),
                float(solution.source_flow.sum()),
                solution.shift,
                solution.governing,
                solution.iterations,
                float(solution.pressure[self.at]),
                float(solution.pressure[self.watch].min(initial=np.inf)),
            )
            self.report()

    def split(self, links: Links, shut: BoolArray | None, numbers: Sequence[int]) -> None:
        """Reduce ``links`` to what the cases ``numbers`` ask; solve them, or each part of them so."""
        keep = np.zeros(len(self.network.node_tags), dtype=bool)
        keep[self.feed.rows] = keep[self.at] = keep[self.watch] = True
        for number in numbers:
            keep[self.asked[number]] = True
        reduced = reduce_links(links, keep, shut).links
        if len(numbers) > SIDE_BY_SIDE:
            leaves = -(-len(numbers) // SIDE_BY_SIDE)
            step = -(-leaves // BRANCHES) * SIDE_BY_SIDE
            for first in range(0, len(numbers), step):
                self.split(reduced, None, numbers[first : first + step])
            return
        self.side_by_side(reduced, numbers)
        self.report()

    def side_by_side(self, links: Links, numbers: Sequence[int]) -> None:
        """Solve the cases ``numbers`` as copies of ``links``; one by one where that fails."""
        cases = [read_case(self.network, *self.cases[number]) for number in numbers]
        if not all(len(case.floor_rows) for case in cases):
            self.one_by_one(numbers)  # which says what is wrong
            return
        try:
            bundle = _Bundle.of(self.network, links, cases, self.feed, (self.at, *self.watch.tolist()))
            state = find_coarse(bundle.assembled)
        except NoStateError:
            self.one_by_one(numbers)
            return
        self.done.update(zip(numbers, bundle.summaries(self.network, self.feed, state), strict=True))


@dataclass(frozen=True, slots=True, eq=False)
class _Bundle:
    """Cases as separate copies of one network, side by side; node row r of copy i is index[r] + i·size."""

    cases: Sequence[Case]
    assembled: Assembled
    index: IntArray
    size: int
    told: tuple[int, ...]

    @classmethod
    def of(
        cls, network: Network, links: Links, cases: Sequence[Case], feed: Feed, told: tuple[int, ...]
    ) -> _Bundle:
        count, nodes = len(cases), len(network.node_tags)
        used = np.zeros(nodes, dtype=bool)
        used[links.start] = used[links.end] = used[feed.rows] = used[list(told)] = True
        for case in cases:
            used |= case.keep()
        rows = np.flatnonzero(used)
        size = len(rows)
        index = np.full(nodes, -1)
        index[rows] = np.arange(size)
        offsets = np.arange(count) * size
        whole = Case(
            outlets=np.concatenate(
                [index[case.outlets] + i for i, case in zip(offsets, cases, strict=True)]
            ),
            k_factor=np.concatenate([case.k_factor for case in cases]),
            offset=np.concatenate([case.offset for case in cases]),
            outflow=np.concatenate([case.outflow[rows] for case in cases]),
            shut=np.zeros(0, dtype=bool),
            floor_rows=np.concatenate(
                [index[c.floor_rows] + i for i, c in zip(offsets, cases, strict=True)]
            ),
            floors=np.concatenate([case.floors for case in cases]),
        )
        feeds = Feed(
            (index[feed.rows][None, :] + offsets[:, None]).reshape(-1),
            feed.laws * count,
            np.tile(feed.fixed, count),
        )
        tiled = links.copies(count, index, size)
        keep = whole.keep()
        keep[feeds.rows] = True
        for row in told:
            keep[index[row] + offsets] = True
        reduced = reduce_links(tiled, keep)
        base = np.tile(network.base[rows], count)
        assembled = assemble(reduced.links, base, whole, feeds, demand=True, size=size)
        return cls(cases, assembled, index, size, told)

    def summaries(self, network: Network, feed: Feed, state: State) -> list[DemandSummary]:
        """Return the answer of every case."""
        head, _ = self.assembled.heads(state, self.size * len(self.cases))
        out = self.assembled.outlet_flow(state)
        source = self.index[feed.rows[0]] + self.size * np.arange(len(self.cases))
        pressure = head[source] - network.base[feed.rows[0]]
        copies = self.size * np.arange(len(self.cases))
        there, *watched = (head[self.index[row] + copies] - network.base[row] for row in self.told)
        lowest = np.minimum.reduce(watched) if watched else np.full(len(self.cases), np.inf)
        ends = np.cumsum([len(case.outlets) for case in self.cases])
        drawn = np.array([case.outflow.sum() for case in self.cases])
        total = drawn + np.diff(np.concatenate([[0.0], np.cumsum(out)])[np.concatenate([[0], ends])])
        shift = -state.shift
        if len(feed.rows) == 1:
            shift = feed.laws[0].static - feed.laws[0].fall(total)[0] - pressure
        answers = []
        for place, case in enumerate(self.cases):
            rows = self.index[case.floor_rows] + place * self.size
            slack = head[rows] - network.base[case.floor_rows] - case.floors
            governing = network.node_tags[case.floor_rows[int(np.argmin(slack))]]
            numbers = (float(pressure[place]), float(total[place]), float(shift[place]))
            told = float(there[place]), float(lowest[place])
            answers.append(DemandSummary(*numbers, governing, state.iterations, *told))
        return answers
