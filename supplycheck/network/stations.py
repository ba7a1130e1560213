"""Pressure-reducing valves as links of their own, each at the start of its pipe.

A valve is set to a pressure behind itself, not at the far end of its pipe. For the core a pipe that holds
one therefore becomes links one behind the other, with nodes between them as high as the start of the
pipe: the devices named before the valve, where there are any, the valve, and the pipe with those named
after it. The valve's own link holds nothing else, so that what stands before it and behind it are heads
of the core.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from supplycheck.network.links import LEAST_SLOPE, Links
from supplycheck.network.records import FloatArray, IntArray


@dataclass(frozen=True, slots=True, eq=False)
class Stations:
    """Links with every pressure-reducing valve set apart, and the valves (v,).

    The first links are those of the pipes, as they were but for their start; the others come last. ``base``
    [Pa] holds the nodes between them behind all others. ``valves`` are links, ``pipes`` the links of
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
    builder = _Builder(links, base)
    for place, link, _ in places:
        builder.valve(place, link)
    pipes = np.array([link for _, link, _ in places], dtype=np.int64)
    heads = base[links.start[pipes]] + np.array([setting for _, _, setting in places])
    return Stations(
        builder.links(),
        np.concatenate([base, builder.level]),
        np.array(builder.valves, dtype=np.int64),
        pipes,
        np.array(builder.behind, dtype=np.int64),
        heads,
    )


class _Builder:
    """Puts further links and nodes behind those of ``links`` and ``base``."""

    def __init__(self, links: Links, base: FloatArray) -> None:
        self.old, self.base = links, base
        self.start = links.start.copy()
        self.home = [link for link, _ in links.devices]
        self.one_way = links.one_way.copy()
        self.further: list[tuple[int, int, int, bool]] = []  # start, end, pipe, one-way
        self.level: list[float] = []
        self.valves: list[int] = []
        self.behind: list[int] = []

    def valve(self, place: int, link: int) -> None:
        """Set the valve ``place`` of the devices, in the pipe ``link``, behind what is set already."""
        before = [row for row in range(place) if self.home[row] == link]
        if before:
            self._step(link, before, any(self.old.devices[row][1].one_way for row in before))
        self.valves.append(self._step(link, [place], True))
        self.behind.append(int(self.start[link]))
        self.one_way[link] = False  # the valve before it lets nothing back

    def _step(self, link: int, devices: list[int], one_way: bool) -> int:
        """Return a new link at the start of what is left of ``link``, with ``devices``."""
        number, node = len(self.old) + len(self.further), len(self.base) + len(self.level)
        self.further.append((int(self.start[link]), node, link, one_way))
        self.level.append(float(self.base[self.old.start[link]]))
        self.start[link] = node
        for row in devices:
            self.home[row] = number
        return number

    def links(self) -> Links:
        """Return all links, the further ones last."""
        old, further = self.old, self.further
        none = np.zeros(len(further))
        return replace(
            old,
            start=np.concatenate([self.start, [one[0] for one in further]]),
            end=np.concatenate([old.end, [one[1] for one in further]]),
            resistance=np.concatenate([old.resistance, none]),
            minor=np.concatenate([old.minor, none]),
            least=np.concatenate([old.least, none + LEAST_SLOPE]),
            area=np.concatenate([old.area, old.area[[one[2] for one in further]]]),
            one_way=np.concatenate([self.one_way, [one[3] for one in further]]),
            devices=tuple((home, law) for home, (_, law) in zip(self.home, old.devices, strict=True)),
        )
