"""Rules on what is possible but seldom meant: lengths, pipes and devices entered twice, odd curves."""

from __future__ import annotations

import math
from collections import defaultdict
from itertools import pairwise

from supplycheck.checks import limits
from supplycheck.checks.context import CheckContext
from supplycheck.checks.rule import About, Rule, flow, pressure, some
from supplycheck.findings import Finding, Measure, State
from supplycheck.model import Device, Pipe

SHORTEST, LONGEST = 0.9, 20.0
"""Length of a pipe over the distance of its ends: below, a fault of entry; above, to be asked about.

Common practice, no source: a tenth covers coordinates read off a drawing.
"""

LENGTH = About(
    "length against distance",
    "length of every pipe against the distance between its ends, where both have coordinates",
    ("ok", "fail", "ask authority", "not applicable"),
    "geometry; nine tenths and twenty times: reviewers' practice, no source",
    weight=3,
)
PARALLEL = About(
    "pipes side by side",
    "whether two pipes without a pump join the same two nodes",
    ("ok", "ask authority"),
    "reviewers' practice, no source: a row entered twice halves the flow in each pipe",
    weight=3,
)
TWICE = About(
    "device entered twice",
    "whether a device stands more than once in one pipe",
    ("ok", "ask authority", "not applicable"),
    "reviewers' practice, no source: its loss then counts as often",
)
DIP = About(
    "dip in a loss curve",
    "whether the loss of a device ever falls while the flow rises",
    ("ok", "ask authority", "not applicable"),
    "reviewers' practice, no source: some check valves have such a dip where they open, most have none",
)


def _distance(context: CheckContext, pipe: Pipe) -> float | None:
    """Return the distance of the ends of ``pipe`` [m], ``None`` where it is not known."""
    ends = [context.nodes[tag] for tag in (pipe.start, pipe.end)]
    if any(node.x is None or node.y is None for node in ends):
        return None
    one, two = ((node.x or 0.0, node.y or 0.0, node.elevation) for node in ends)
    return math.dist(one, two)


def length(context: CheckContext) -> Finding:
    """The pipe that falls short by most of its distance is told, then the one that is longest for it."""
    told = [(pipe, _distance(context, pipe)) for pipe in context.project.system.pipes]
    known = [(pipe, apart) for pipe, apart in told if apart is not None]
    if not known:
        return LENGTH.says("not applicable", "No pipe has coordinates at both ends.")
    short = [
        (pipe.length / apart, pipe, apart)
        for pipe, apart in known
        if apart > 0 and pipe.length < SHORTEST * apart - limits.TYPED_LENGTH
    ]
    text = "{pipe} is {{measured}} long; its ends {start} and {end} are {{limit}} apart."
    if short:
        short.sort(key=lambda one: one[0])
        do = "Correct the length or the coordinates."
        return _length_says("fail", text, short, do)
    far = [
        (apart / pipe.length, pipe, apart)
        for pipe, apart in known
        if pipe.length > LONGEST * max(apart, limits.FOOT)
    ]
    if far:
        far.sort(key=lambda one: one[0])
        ask = f"Is {far[0][1].tag} really that long, with all its turns?"
        return _length_says("ask authority", text, far, ask)
    return LENGTH.says("ok", "Every pipe is as long as its ends are apart, or reasonably longer.")


def _length_says(state: State, text: str, found: list[tuple[float, Pipe, float]], remedy: str) -> Finding:
    _, worst, apart = found[0]
    return LENGTH.says(
        state,
        text.format(pipe=worst.tag, start=worst.start, end=worst.end),
        measured=Measure(worst.length, "length"),
        limit=Measure(apart, "length"),
        tags=tuple(pipe.tag for _, pipe, _ in found),
        remedy=remedy,
    )


def parallel(context: CheckContext) -> Finding:
    """A pump and the bypass round it are no pipes side by side."""
    between: dict[frozenset[str], list[Pipe]] = defaultdict(list)
    for pipe in context.project.system.pipes:
        if not any(context.devices[tag].kind == "pump" for tag in pipe.devices):
            between[frozenset((pipe.start, pipe.end))].append(pipe)
    twins = [pipes for pipes in between.values() if len(pipes) > 1]
    if not twins:
        return PARALLEL.says("ok", "No two pipes join the same two nodes.")
    first = twins[0]
    more = f", and {len(twins) - 1} more such pairs" if len(twins) > 1 else ""
    text = f"{some(pipe.tag for pipe in first)} join {first[0].start} and {first[0].end}{more}."
    tags = tuple(pipe.tag for pipes in twins for pipe in pipes)
    ask = f"Do {some(tags)} really lie side by side, or was a pipe entered twice?"
    return PARALLEL.says("ask authority", text, tags=tags, remedy=ask)


def twice(context: CheckContext) -> Finding:
    """Two like valves in a row are possible; a slip is more likely."""
    with_devices = [pipe for pipe in context.project.system.pipes if pipe.devices]
    if not with_devices:
        return TWICE.says("not applicable", "There is no device.")
    found = [
        (tag, pipe)
        for pipe in with_devices
        for tag in dict.fromkeys(pipe.devices)
        if pipe.devices.count(tag) > 1
    ]
    if not found:
        return TWICE.says("ok", "No device stands more than once in a pipe.")
    tag, pipe = found[0]
    text = f"{tag} stands {pipe.devices.count(tag)} times in {pipe.tag}: its loss counts as often."
    ask = f"Are there really several {tag} in {pipe.tag}?"
    return TWICE.says("ask authority", text, tags=tuple(one.tag for _, one in found), remedy=ask)


def dip(context: CheckContext) -> Finding:
    """The deepest fall between two points is told; greater ones are refused when the project is read."""
    curves = [one for one in context.project.system.devices if one.kind != "pump" and len(one.flows) > 1]
    if not curves:
        return DIP.says("not applicable", "No device has a loss curve.")
    falls = [
        ((before - after) / before, device, place)
        for device in curves
        for place, (before, after) in enumerate(pairwise(device.values))
        if after < before
    ]
    if not falls:
        return DIP.says("ok", "The loss of every device rises with the flow, or stays.")
    _, device, place = max(falls, key=lambda one: one[0])
    tags = tuple(dict.fromkeys(one.tag for _, one, _ in falls))
    text = f"The loss of {device.tag} falls from {{limit}} to {{measured}} between {{low}} and {{high}}."
    return DIP.says(
        "ask authority",
        text,
        measured=pressure(device.values[place + 1]),
        limit=pressure(device.values[place]),
        tags=tags,
        remedy=f"Does the sheet of the maker show the dip of {some(tags)}?",
        values=_span(device, place),
    )


def _span(device: Device, place: int) -> dict[str, Measure]:
    return {"low": flow(device.flows[place]), "high": flow(device.flows[place + 1])}


RULES = (Rule(LENGTH, length), Rule(PARALLEL, parallel), Rule(TWICE, twice), Rule(DIP, dip))
