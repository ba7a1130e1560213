"""Rules on what is possible but seldom meant: lengths, pipes and devices entered twice, odd curves."""

from __future__ import annotations

from collections import defaultdict
from itertools import pairwise
from typing import Final

from supplycheck.checks import limits
from supplycheck.checks.context import CheckContext
from supplycheck.checks.geometry import distance
from supplycheck.checks.rule import About, Rule, flow, pressure, some
from supplycheck.findings import Finding, Measure, State
from supplycheck.model import Device, Pipe
from supplycheck.model.slips import likely_slip

SHORTEST: Final = 0.9
"""Length of a pipe over the distance of its ends: below, a fault of entry. Tables are refused before that.

Common practice, no source: a tenth covers coordinates read off a drawing.
"""
STRAIGHT: Final = 1.5
"""The same for a piece of a branch line or a cross main: longer is to be asked about.

Two legs square to each other are at most √2 = 1.41 times as long as the straight line, so that a piece
may turn a corner; a metre for a foot makes 3.28, a decimal place 10.
"""
WANDERING: Final = 5.0
"""The same for risers, feeds, underground and unnamed pipes: round three sides of a square makes 3."""
OFFSET: Final = limits.FOOT
"""An offset of a straight piece, whatever its length [m] (common practice, no source)."""
NEAREST: Final = 1.0
"""Ends of a wandering pipe nearer than this count as this far apart [m] (common practice, no source)."""

LENGTH = About(
    "length against distance",
    "length of every pipe against the distance between its ends, where both have coordinates",
    ("ok", "fail", "ask authority", "not applicable"),
    "geometry; straight pieces of lines and mains at most 1.5 times, others 5 times: reviewers' practice",
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


def _longest(context: CheckContext, pipe: Pipe, apart: float) -> float:
    """Return the greatest length [m] of ``pipe`` that needs no question."""
    ends = (context.nodes[pipe.start], context.nodes[pipe.end])
    neighbours = pipe.role == "pipe" and all(node.kind == "sprinkler" for node in ends)
    if pipe.role in ("branch line", "cross main") or neighbours:
        return STRAIGHT * apart + OFFSET
    return WANDERING * max(apart, NEAREST)


def length(context: CheckContext) -> Finding:
    """The pipe that falls short by most of its distance is told, then the one that is longest for it."""
    nodes, pipes = context.nodes, context.project.system.pipes
    told = [(pipe, distance(nodes[pipe.start], nodes[pipe.end])) for pipe in pipes]
    known = [(pipe, apart) for pipe, apart in told if apart is not None]
    if not known:
        return LENGTH.says("not applicable", "No pipe has coordinates at both ends.")
    short = [
        (pipe.length / apart, pipe, apart)
        for pipe, apart in known
        if apart > 0 and pipe.length < SHORTEST * apart - limits.TYPED_LENGTH
    ]
    if short:
        short.sort(key=lambda one: one[0])
        return _length_says("fail", short, "Correct the length or the coordinates.")
    far = [
        (_longest(context, pipe, apart) / pipe.length, pipe, apart)
        for pipe, apart in known
        if pipe.length > _longest(context, pipe, apart)
    ]
    if far:
        far.sort(key=lambda one: one[0])
        ask = f"Is {some(pipe.tag for _, pipe, _ in far)} really that long, with all its turns?"
        return _length_says("ask authority", far, ask)
    return LENGTH.says("ok", "Every pipe is as long as its ends are apart, or reasonably longer.")


def _length_says(state: State, found: list[tuple[float, Pipe, float]], remedy: str) -> Finding:
    _, worst, apart = found[0]
    text = f"{worst.tag} is {{measured}} long; its ends {worst.start} and {worst.end} are {{limit}} apart"
    values = {}
    if apart > 0:
        slip = likely_slip(worst.length / apart)
        text += ", {times} times" + (f": {slip}" if slip else ".")
        values = {"times": Measure(worst.length / apart, "ratio")}
    else:
        text += "."
    return LENGTH.says(
        state,
        text,
        measured=Measure(worst.length, "length"),
        limit=Measure(apart, "length"),
        tags=tuple(pipe.tag for _, pipe, _ in found),
        remedy=remedy,
        values=values,
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
