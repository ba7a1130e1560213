"""Rule on sizes: along the way from the supply no pipe should be smaller than the one it feeds.

Looked at is where one pipe alone leads water on: trees that hang on the system, the way from a single
supply to the first loop, and the cross main of a layout, whose sizes are listed towards the feed. In a
ring, and between supplies, water comes from more than one side, and a lead may be smaller than the ring.
"""

from __future__ import annotations

import math
from collections import defaultdict
from collections.abc import Iterable, Mapping, Sequence
from typing import Final

from supplycheck.checks import limits
from supplycheck.checks.context import CheckContext
from supplycheck.checks.pipes import nominal_size
from supplycheck.checks.rule import About, Rule, some
from supplycheck.findings import Finding
from supplycheck.model import Pipe, System

SMALLER: Final = 0.93
"""Nominal sizes nearer than this are one: 3 in is DN 80, 95 %; neighbours lie at 90 % or farther apart."""

SMALLER_BORE: Final = 0.85
"""The same for bores where a nominal size is not given: walls of one size differ less (common practice)."""

CONNECTION: Final = 10 * limits.FOOT
"""Longest piece that is no more than the connection of a device, reducers included (common practice)."""

_ANY_SIZE: Final = ("riser nipple", "drop")
_KEYS: Final = {
    "layout.branch": "layout.branch.sizes listed from the end head inward, its own piece first",
    "layout.cross_main": "layout.cross_main.sizes listed from the far end towards the feed",
}

SIZES = About(
    "size toward the supply",
    "size of every pipe against that of the pipe that it alone feeds; riser nipples, drops and connections "
    "of devices may be smaller",
    ("ok", "ask authority", "not applicable"),
    "reviewers' practice, no source: sizes listed the wrong way round put the smallest pipe at the main",
)


def _at_nodes(pipes: Iterable[Pipe]) -> dict[str, dict[str, Pipe]]:
    """Return the pipes at each node by tag."""
    at: dict[str, dict[str, Pipe]] = defaultdict(dict)
    for pipe in pipes:
        at[pipe.start][pipe.tag] = pipe
        at[pipe.end][pipe.tag] = pipe
    return at


def _far(pipe: Pipe, node: str) -> str:
    return pipe.end if pipe.start == node else pipe.start


class _Loose:
    """The pipes that are still joined at each node, as their number and the exclusive or of their rows.

    Where one is left, the latter is its row: enough to take leaves off a tree of any size.
    """

    def __init__(self, pipes: Sequence[Pipe]) -> None:
        self.pipes = pipes
        self.count: dict[str, int] = defaultdict(int)
        self._rows: dict[str, int] = defaultdict(int)
        for row, pipe in enumerate(pipes):
            for tag in (pipe.start, pipe.end):
                self.count[tag] += 1
                self._rows[tag] ^= row

    def take(self, node: str) -> Pipe:
        """Take off and return the only pipe that is left at ``node``."""
        row = self._rows[node]
        pipe = self.pipes[row]
        for tag in (pipe.start, pipe.end):
            self.count[tag] -= 1
            self._rows[tag] ^= row
        return pipe


def sole_feeds(system: System) -> dict[str, Pipe]:
    """Return the one pipe through which all water comes, for each node that has one."""
    loose = _Loose([pipe for pipe in system.pipes if pipe.valve != "closed"])
    supplies = [node.tag for node in system.nodes if node.kind == "supply"]
    found: dict[str, Pipe] = {}
    leaves = [tag for tag, count in loose.count.items() if count == 1 and tag not in supplies]
    while leaves:
        leaf = leaves.pop()
        if loose.count[leaf] != 1:
            continue
        found[leaf] = pipe = loose.take(leaf)
        inward = _far(pipe, leaf)
        if loose.count[inward] == 1 and inward not in supplies:
            leaves.append(inward)
    here = supplies[0] if len(supplies) == 1 else ""
    while loose.count[here] == 1:
        pipe = loose.take(here)
        here = _far(pipe, here)
        found[here] = pipe
    return found


def _ring_mains(system: System, feeds: Mapping[str, Pipe]) -> list[tuple[Pipe, Pipe]]:
    """Return neighbours on the looped cross main of a layout, the one nearer to the supply first."""
    alone = {pipe.tag for pipe in feeds.values()}
    mains = [pipe for pipe in system.pipes if pipe.place and pipe.place.where == "layout.cross_main"]
    mains = [pipe for pipe in mains if pipe.tag not in alone]
    if not mains:
        return []
    at = _at_nodes(system.pipes)
    depth = {node.tag: 0 for node in system.nodes if node.kind == "supply"}
    ring = list(depth)
    while ring:
        beyond = {_far(pipe, tag): depth[tag] + 1 for tag in ring for pipe in at[tag].values()}
        ring = [tag for tag in beyond if tag not in depth]
        depth.update({tag: beyond[tag] for tag in ring})
    pairs = []
    for tag, pipes in _at_nodes(mains).items():
        around = sorted(pipes.values(), key=lambda pipe: depth.get(_far(pipe, tag), math.inf))
        if len(around) == 2 and depth.get(_far(around[0], tag), math.inf) < depth.get(tag, 0):
            pairs.append((around[0], around[1]))
    return pairs


def _passes(pipe: Pipe) -> bool:
    """Say whether ``pipe`` may be of any size: what lies before and behind it is compared."""
    return pipe.role in _ANY_SIZE or (bool(pipe.devices) and pipe.length <= CONNECTION)


def _pairs(system: System, feeds: Mapping[str, Pipe]) -> list[tuple[Pipe, Pipe]]:
    """Return each pipe that alone feeds another, and the other, riser nipples and the like left out."""
    pairs = []
    for node, pipe in feeds.items():
        if _passes(pipe):
            continue
        here = _far(pipe, node)
        while here in feeds and _passes(feeds[here]):
            here = _far(feeds[here], here)
        if here in feeds:
            pairs.append((feeds[here], pipe))
    return list(dict.fromkeys([*pairs, *_ring_mains(system, feeds)]))


def _nominal(pipe: Pipe) -> float | None:
    """Return the nominal size [m]; a bare number is in the unit in which it comes nearest to the bore."""
    sizes = [nominal_size(pipe.nominal, metric=metric) for metric in (False, True)]
    known = [size for size in sizes if size is not None and size > 0]
    return min(known, key=lambda size: abs(math.log(size / pipe.bore)), default=None)


def _smaller(one: Pipe, other: Pipe) -> bool:
    first, second = _nominal(one), _nominal(other)
    if first is None or second is None:
        return one.bore < SMALLER_BORE * other.bore
    return first < SMALLER * second and one.bore < other.bore


def toward_supply(context: CheckContext) -> Finding:
    """Pipes of one place in the file, as a list of sizes in a layout, make one question."""
    system = context.project.system
    pairs = _pairs(system, sole_feeds(system))
    if not pairs:
        return SIZES.says("not applicable", "No pipe alone feeds another.")
    falls = [(one, other) for one, other in pairs if _smaller(one, other)]
    if not falls:
        return SIZES.says("ok", "No pipe is smaller than the one it feeds.")
    order = {pipe.tag: number for number, pipe in enumerate(system.pipes)}
    falls.sort(key=lambda pair: order[pair[0].tag])
    one, other = falls[0]
    tags = tuple(dict.fromkeys(pipe.tag for pipe, _ in falls))
    text = f"{one.tag}, {_named(one)}, feeds {other.tag}, {_named(other)}: "
    text += "the size falls toward the supply"
    text += f"; so it does at {len(tags) - 1} more." if len(tags) > 1 else "."
    places = [pipe.place.where for pipe, _ in falls if pipe.place]
    listed = [words for key, words in _KEYS.items() if key in places]
    ask = f"Is {some(tags)} really smaller than the pipe it feeds?"
    if listed:
        ask = f"Are {', and '.join(listed)}?"
    return SIZES.says("ask authority", text, tags=tags, remedy=ask)


def _named(pipe: Pipe) -> str:
    return f"size {pipe.nominal}" if pipe.nominal else "without a nominal size"


RULES = (Rule(SIZES, toward_supply),)
