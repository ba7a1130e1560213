"""Why a network cannot be solved: the cause, the nodes or pipes at fault, and what to do."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from supplycheck.errors import NotConvergedError
from supplycheck.network.arrays import Network
from supplycheck.network.assemble import Assembled, Case, Feed
from supplycheck.network.core import residuals
from supplycheck.network.find import NoStateError
from supplycheck.network.graphs import one_way_graph, parts_of, spread_from
from supplycheck.network.links import Links
from supplycheck.network.records import FloatArray, IntArray
from supplycheck.network.reduce import Reduced

SHOWN = 20
"""Most tags named in one diagnosis."""


def check_structure(network: Network, links: Links, case: Case, feed: Feed) -> None:
    """Check that every outlet and outflow of ``case`` can be fed through ``links``.

    Raises
    ------
    NotConvergedError
        With cause ``"structure"`` where one cannot, ``"input"`` where two unequal fixed pressures
        are joined by pipes without resistance.
    """
    asked = np.flatnonzero(case.keep())
    reached, _ = spread_from(links.start, links.end, feed.rows, len(network.node_tags))
    fed = np.zeros(len(network.node_tags), dtype=bool)
    fed[reached] = True
    lost = asked[~fed[asked]]
    if len(lost):
        raise _error(
            "structure",
            "open outlets or outflows are not joined to any supply",
            [network.node_tags[row] for row in lost],
            "add the missing pipe, open the shut pipe that cuts them off, or name their supply",
        )
    if links.one_way.any():
        _check_one_way(network, links, asked, feed.rows)
    if int(feed.fixed.sum()) > 1:
        _check_short_circuit(network, links, feed)


def _error(cause: str, problem: str, tags: Sequence[str], remedy: str) -> NotConvergedError:
    shown = tuple(tags[:SHOWN])
    more = f" and {len(tags) - SHOWN} more" if len(tags) > SHOWN else ""
    text = f"{problem}: {', '.join(shown)}{more}" if shown else problem
    return NotConvergedError(f"{text}; {remedy}", cause=cause, tags=tags, remedy=remedy)


def _check_one_way(network: Network, links: Links, asked: IntArray, sources: IntArray) -> None:
    """Check that every node asked about can be reached from a supply without passing a valve backwards."""
    from scipy.sparse.csgraph import breadth_first_order

    nodes = len(network.node_tags)
    both = ~links.one_way
    rows = np.concatenate([links.start, links.end[both], np.full(len(sources), nodes)])
    cols = np.concatenate([links.end, links.start[both], sources])
    reached = breadth_first_order(one_way_graph(rows, cols, nodes + 1), nodes, return_predecessors=False)
    lost = asked[~np.isin(asked, reached)]
    if len(lost):
        valves = [network.pipe_tags[row] for row in np.flatnonzero(network.links.one_way)]
        raise _error(
            "structure",
            f"one-way valves (in {', '.join(valves[:SHOWN])}) let no flow reach",
            [network.node_tags[row] for row in lost],
            "turn the valve round: flow passes from the start of its pipe to the end",
        )


def _check_short_circuit(network: Network, links: Links, feed: Feed) -> None:
    """Check that no pipes without resistance join two unequal fixed pressures."""
    bare = (links.resistance == 0) & (links.minor == 0) & (links.least > 0)
    bare[[link for link, _ in links.devices]] = False
    if links.terms is not None:
        bare[links.terms.link[links.terms.length > 0]] = False
    if not bare.any():
        return
    nodes = len(network.node_tags)
    _, label = parts_of(links.start[bare], links.end[bare], nodes)
    rows = feed.rows[feed.fixed]
    head = np.array([law.static for law, held in zip(feed.laws, feed.fixed, strict=True) if held])
    head = head + network.base[rows]
    for part in np.unique(label[rows]):
        inside = label[rows] == part
        if int(inside.sum()) > 1 and float(np.ptp(head[inside])) > 0:
            raise _error(
                "input",
                "fixed pressures that differ are joined by pipes of no length",
                [network.node_tags[row] for row in rows[inside]],
                "give the pipe between them its length, or keep one supply",
            )


def check_reached(network: Network, case: Case, pressure: FloatArray) -> tuple[str, ...]:
    """Return notes on parts that shut pipes cut off from every supply.

    Raises
    ------
    NotConvergedError
        With cause ``"structure"`` where a part would have no supply even with every pipe open.
    """
    lost = np.flatnonzero(np.isnan(pressure))
    if not len(lost):
        return ()
    links, nodes = network.links, len(network.node_tags)
    _, label = parts_of(links.start, links.end, nodes)
    fed = np.unique(label[np.isfinite(pressure)])
    never = lost[~np.isin(label[lost], fed)]
    if len(never):
        raise _error(
            "structure",
            "part of the network has no supply",
            [network.node_tags[row] for row in never],
            "join it to the rest or leave it out",
        )
    shut = [network.pipe_tags[row] for row in np.flatnonzero(case.shut)]
    tags = [network.node_tags[row] for row in lost]
    return (f"cut off by shut pipes ({', '.join(shut[:SHOWN])}): {len(tags)} nodes, among them {tags[0]}",)


def explain(
    network: Network, reduced: Reduced, assembled: Assembled, failure: NoStateError
) -> NotConvergedError:
    """Return the diagnosis of a state that was not found."""
    state, tags = failure.state, network.pipe_tags
    held = [int(np.flatnonzero(reduced.part == link)[0]) for link in assembled.valve_pipes.tolist()]
    valves = [law.tag for link, law in network.links.devices if link in held and law.setting is not None]
    if failure.why == "out of reach":
        slack = state.head[assembled.problem.floor_rows] - assembled.problem.floors
        short = assembled.rows[assembled.problem.floor_rows[slack < 0]]
        lacking = [network.node_tags[row] for row in short]
        if valves:
            return _error(
                "input",
                f"no supply gives {', '.join(lacking[:SHOWN])} the required pressure: "
                "pressure-reducing valves are set too low",
                valves,
                "raise the setting or lower the requirement",
            )
        return _error(
            "structure", "no supply gives the required pressure", lacking, "check valves and shut pipes"
        )
    if failure.why == "no lowest supply":
        return _error(
            "input",
            "the requirement is met whatever the supply",
            [network.node_tags[assembled.rows[row]] for row in assembled.problem.floor_rows],
            "check pump curves, elevations and required pressures",
        )
    if failure.why == "valves":
        return _error(
            "numbers",
            "no state was found for the pressure-reducing valves",
            valves,
            "check for valves that feed one another",
        )
    energy, mass, _ = residuals(assembled.problem, state)
    worst = np.argsort(-np.abs(np.nan_to_num(energy[: assembled.pipes], nan=np.inf)))[:3]
    pipes = [tags[row] for part in worst for row in np.flatnonzero(reduced.part == part)[:2]]
    return _error(
        "numbers",
        f"the calculation did not settle (largest disagreement {np.abs(energy).max():.3g} Pa, "
        f"{np.abs(mass).max(initial=0.0):.3g} m³/s)",
        pipes,
        "check bore, length and C-factor or roughness of these pipes",
    )
