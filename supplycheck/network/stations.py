"""Pressure-reducing valves as links of their own, each at the start of its pipe.

A valve is set to a pressure behind itself, not at the far end of its pipe. For the core a pipe that holds
one therefore becomes two links with a node between them, as high as the start of the pipe: the valve,
with the devices named before it, and the pipe with those named after it.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from supplycheck.network.curves import DeviceLaw
from supplycheck.network.links import LEAST_SLOPE, Links
from supplycheck.network.records import FloatArray, IntArray


@dataclass(frozen=True, slots=True, eq=False)
class Stations:
    """Links with every pressure-reducing valve set apart, and the valves (v,).

    The first links are those of the pipes, as they were but for their start; the valves come last. ``base``
    [Pa] holds the nodes behind the valves behind all others. ``valves`` are links, ``pipes`` the links of
    the pipes they stand in, ``behind`` the nodes behind them and ``heads`` [Pa] what they are set to.
    """

    links: Links
    base: FloatArray
    valves: IntArray
    pipes: IntArray
    behind: IntArray
    heads: FloatArray


def set_apart(links: Links, base: FloatArray) -> Stations:
    """Return ``links`` between nodes of ``base`` [Pa] with their pressure-reducing valves set apart."""
    places = [
        (place, link, law.setting)
        for place, (link, law) in enumerate(links.devices)
        if law.setting is not None
    ]
    nothing = np.zeros(0, dtype=np.int64)
    if not places:
        return Stations(links, base, nothing, nothing, nothing, np.zeros(0))
    count, nodes = len(links), len(base)
    pipes = np.array([link for _, link, _ in places], dtype=np.int64)
    valves, behind = count + np.arange(len(places)), nodes + np.arange(len(places))
    start = links.start.copy()
    ahead = np.empty_like(pipes)
    for row, link in enumerate(pipes):  # the second valve of a pipe stands behind the first
        ahead[row], start[link] = start[link], behind[row]
    level = base[links.start[pipes]]
    one_way = links.one_way.copy()
    one_way[pipes] = False  # the valve before it lets nothing back
    more = np.zeros(len(places))
    apart = replace(
        links,
        start=np.concatenate([start, ahead]),
        end=np.concatenate([links.end, behind]),
        resistance=np.concatenate([links.resistance, more]),
        minor=np.concatenate([links.minor, more]),
        least=np.concatenate([links.least, more + LEAST_SLOPE]),
        area=np.concatenate([links.area, links.area[pipes]]),
        one_way=np.concatenate([one_way, np.ones(len(places), dtype=bool)]),
        devices=_moved(links, [(place, link) for place, link, _ in places], count),
    )
    heads = level + np.array([setting for _, _, setting in places])
    return Stations(apart, np.concatenate([base, level]), valves, pipes, behind, heads)


def _moved(links: Links, places: list[tuple[int, int]], count: int) -> tuple[tuple[int, DeviceLaw], ...]:
    """Return every device with its link: the next valve in its pipe (place, link), else the pipe."""
    moved = []
    for place, (link, law) in enumerate(links.devices):
        onward = [row for row, (valve, pipe) in enumerate(places) if pipe == link and valve >= place]
        moved.append((count + onward[0] if onward else link, law))
    return tuple(moved)
