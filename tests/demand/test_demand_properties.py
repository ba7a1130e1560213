"""What holds for the placements of any system: enough area, contiguous, none twice, every head tried."""

from __future__ import annotations

import itertools
import math
import random
from dataclasses import replace

import pytest
from demand_systems import criteria, head, pipe, point, project, system
from hypothesis import given, settings
from hypothesis import strategies as st

from supplycheck import model
from supplycheck.demand import demand_cases

GAPS = st.sampled_from([2.4, 3.0, 3.3, 3.9])


@st.composite
def trees(draw: st.DrawFn) -> model.System:
    """Lines of unequal length and spacing on both sides of a main, tagged or not, with or without roles."""
    tagged, roles = draw(st.booleans()), draw(st.booleans())
    nodes, pipes = [point("S", 0.0, -4.0)], []
    before, y = "S", 0.0
    for i in range(draw(st.integers(1, 6))):
        nodes.append(point(f"M{i}", 0.0, y))
        pipes.append(pipe(before, f"M{i}", "cross main" if roles else "pipe"))
        before = f"M{i}"
        width = draw(GAPS)
        for side, sign in (("W", -1.0), ("E", 1.0)):
            inner, x = f"M{i}", 0.0
            for j in range(draw(st.integers(0, 6))):
                gap = draw(GAPS)
                x += gap / 2 if j == 0 else gap
                line = f"L{i}{side}" if tagged else None
                nodes.append(head(f"{side}{i}.{j}", sign * x, y, gap * width, line))
                pipes.append(pipe(inner, f"{side}{i}.{j}", "branch line" if roles else "pipe"))
                inner = f"{side}{i}.{j}"
        y += width
    if not any(node.kind == "sprinkler" for node in nodes):
        nodes.append(head("E0.0", 1.5, 0.0, 9.0, "L0E" if tagged else None))
        pipes.append(pipe("M0", "E0.0", "branch line" if roles else "pipe"))
    return system(nodes, pipes)


AREAS = st.floats(4.0, 160.0)
LEAST = st.integers(1, 6)
STANDARDS = st.sampled_from(["NFPA 13", "EN 12845"])


def search(built: model.System, area: float, least: int = 1, standard: str = "NFPA 13"):
    asked = criteria(base_area=area, minimum_heads=least, standard=standard)
    return demand_cases(project(built, asked))


@settings(max_examples=150, deadline=None)
@given(trees(), AREAS, LEAST, STANDARDS)
def test_every_placement_is_large_enough_and_every_head_is_tried(built, area, least, standard) -> None:
    found = search(built, area, least, standard)
    own = {node.tag: node.area for node in built.nodes if node.kind == "sprinkler"}
    sets = [frozenset(case.heads) for case in found.cases]
    assert len(set(sets)) == len(sets)
    assert len({case.label for case in found.cases}) == len(sets)
    assert frozenset().union(*sets) == frozenset(own)
    for case in found.cases:
        assert len(set(case.heads)) == len(case.heads)
        assert case.area == pytest.approx(math.fsum(own[tag] for tag in case.heads), rel=1e-12)
        enough = case.area >= area * (1 - 1e-9) and len(case.heads) >= least
        assert enough != ("all heads" in case.note)


@settings(max_examples=150, deadline=None)
@given(trees(), AREAS)
def test_no_placement_holds_a_head_it_does_not_need(built, area) -> None:
    """Some end head of some line carries the area: without it the placement falls short, or is one run."""
    own = {node.tag: node.area for node in built.nodes if node.kind == "sprinkler"}
    for case in search(built, area).cases:
        if case.lines > 1 and not case.note and "nearest" not in case.label:
            assert any(case.area - own[tag] < area for tag in case.heads)


def floor_length(xs: list[float], members: list[int]) -> float:
    """Length of floor that a run covers: half the larger spacing beyond each of its outer heads."""
    first, last = members[0], members[-1]
    if len(xs) == 1:
        return 4.0
    gaps = [b - a for a, b in itertools.pairwise(xs)]
    before = max(gaps[max(first - 1, 0) : first + 1])
    after = max(gaps[max(last - 1, 0) : last + 1])
    return xs[last] - xs[first] + (before + after) / 2


@settings(max_examples=150, deadline=None)
@given(trees(), AREAS)
def test_heads_follow_one_another_and_reach_far_enough(built, area) -> None:
    where = {node.tag: (round(node.y, 6), node.x) for node in built.nodes if node.kind == "sprinkler"}
    rows: dict[float, list[str]] = {}
    for tag, (y, _) in sorted(where.items(), key=lambda item: item[1][1]):
        rows.setdefault(y, []).append(tag)
    length = 1.2 * math.sqrt(area)
    for case in search(built, area).cases:
        if "nearest" in case.label or case.note:
            continue
        longest, whole = 0.0, False
        for row in rows.values():
            members = [i for i, tag in enumerate(row) if tag in case.heads]
            if not members:
                continue
            assert members == list(range(members[0], members[-1] + 1))
            run = [row[i] for i in members]
            longest = max(longest, floor_length([where[tag][1] for tag in row], members))
            sides = [{tag for tag in row if tag[0] == side} for side in "WE"]
            whole = whole or any(side and side <= set(run) for side in sides)
        assert whole or longest >= length * (1 - 1e-9)


@settings(max_examples=60, deadline=None)
@given(trees(), AREAS, STANDARDS, st.randoms(use_true_random=False))
def test_order_names_and_the_compass_change_nothing(built, area, standard, rng: random.Random) -> None:
    before = {frozenset(case.heads) for case in search(built, area, standard=standard).cases}
    turn, dx, dy = rng.uniform(0.0, math.tau), rng.uniform(-50, 50), rng.uniform(-50, 50)
    cos, sin = math.cos(turn), math.sin(turn)
    nodes = [
        replace(
            node, tag="x" + node.tag, x=node.x * cos - node.y * sin + dx, y=node.x * sin + node.y * cos + dy
        )
        for node in built.nodes
    ]
    pipes = [
        replace(p, start="x" + a, end="x" + b)
        for p in built.pipes
        for a, b in [rng.choice([(p.start, p.end), (p.end, p.start)])]
    ]
    rng.shuffle(nodes)
    rng.shuffle(pipes)
    after = search(system(nodes, pipes), area, standard=standard).cases
    assert {frozenset(tag[1:] for tag in case.heads) for case in after} == before
