"""Branch lines as the search sees them: heads in order along the line, lines in order across.

A line is taken from the tag given at its heads, otherwise inferred from the pipes. Lines of one direction
form a bay with axes along and across. Where a main passes between two heads of a line, its two sides are
lines of their own, and the joined line is kept as well, as it is where two lines meet end to end.
"""

from __future__ import annotations

import itertools
import math
from bisect import bisect_right
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, replace
from typing import Final

import numpy as np

from supplycheck.demand.heads import FloatArray, Heads
from supplycheck.demand.line import SAME_ROW, TOUCH, Line, Lines, same_level, steps_apart
from supplycheck.demand.piping import Link, Piping, read_piping
from supplycheck.errors import DomainError
from supplycheck.model import System

PARALLEL: Final = math.radians(10)
"""Lines within 10° of each other in plan count as parallel."""


@dataclass(frozen=True, slots=True, eq=False)
class _Plan:
    """Coordinates [m] of all heads; their own floor areas [m²] come with ``heads``."""

    heads: Heads
    xy: FloatArray
    z: FloatArray
    open_ends: tuple[bool, ...]


class _Groups:
    """Disjoint groups of row numbers that are merged pair by pair."""

    def __init__(self, count: int) -> None:
        self._parent = list(range(count))

    def find(self, row: int) -> int:
        while self._parent[row] != row:
            self._parent[row] = self._parent[self._parent[row]]
            row = self._parent[row]
        return row

    def merge(self, a: int, b: int) -> None:
        self._parent[self.find(b)] = self.find(a)

    def groups(self, rows: Iterable[int]) -> list[list[int]]:
        found: dict[int, list[int]] = {}
        for row in rows:
            found.setdefault(self.find(row), []).append(row)
        return list(found.values())


def _coordinates(heads: Heads) -> tuple[FloatArray, FloatArray]:
    missing = [node.tag for node in heads.nodes if node.x is None or node.y is None]
    if missing:
        some = ", ".join(missing[:5]) + (" …" if len(missing) > 5 else "")
        raise DomainError(
            f"{len(missing)} of {len(heads)} heads have no coordinates ({some}), so the design area cannot "
            "be searched; give x and y, or name the heads of the design area"
        )
    xy = np.array([(node.x, node.y) for node in heads.nodes], dtype=np.float64)
    z = np.array([node.elevation for node in heads.nodes], dtype=np.float64)
    return xy, z


def _angle(vector: Sequence[float] | FloatArray) -> float:
    """Direction of a vector in plan [rad], in [0, π)."""
    angle = math.atan2(float(vector[1]), float(vector[0])) % math.pi
    return 0.0 if math.isclose(angle, math.pi, abs_tol=1e-9) else angle


def _turn(a: float, b: float) -> float:
    """Angle [rad] between two directions, whichever way they point."""
    turn = abs(a - b) % math.pi
    return min(turn, math.pi - turn)


def _kept_links(links: Sequence[Link], plan: _Plan) -> list[Link]:
    """Drop links of untagged heads that turn off their line, where a head has links two ways."""
    tag = [node.branch_line for node in plan.heads.nodes]
    free = [k for k in links if tag[k.first] is None and tag[k.second] is None and not k.bent]
    angles = {k: _angle(plan.xy[k.second] - plan.xy[k.first]) for k in free}
    bins = [0] * 18
    for angle in angles.values():
        bins[int(angle / math.pi * 18) % 18] += 1
    common = (max(range(18), key=bins.__getitem__) + 0.5) * math.pi / 18
    best: dict[int, float] = {}
    for link, angle in angles.items():
        for row in (link.first, link.second):
            best[row] = min(best.get(row, math.pi), _turn(angle, common))
    kept = [k for k in links if k not in angles and tag[k.first] is not None and tag[k.second] is not None]
    for link, angle in angles.items():
        if all(_turn(angle, common) <= best[row] + PARALLEL for row in (link.first, link.second)):
            kept.append(link)
    return kept


def _order(rows: list[int], plan: _Plan) -> list[int]:
    """Sort the heads of one line along it, by their coordinate on its longest extent."""
    if len(rows) < 2:
        return rows
    points = plan.xy[rows]
    centred = points - points.mean(axis=0)
    axis = np.linalg.svd(centred, full_matrices=False)[2][0]
    angle = _angle(axis)
    along = points @ np.array([math.cos(angle), math.sin(angle)])
    return [rows[i] for i in np.lexsort((plan.z[rows], along))]


def _levels(rows: list[int], plan: _Plan) -> list[list[int]]:
    """Part one line, in order along it, where it steps from one level to another."""
    chains: list[list[int]] = []
    for row in rows:
        for chain in sorted(chains, key=lambda c: abs(float(plan.z[c[-1]] - plan.z[row]))):
            rise = float(plan.z[row] - plan.z[chain[-1]])
            if same_level(rise, float(np.hypot(*(plan.xy[row] - plan.xy[chain[-1]])))):
                chain.append(row)
                break
        else:
            chains.append([row])
    return chains


def _split(rows: list[int], crossings: set[tuple[int, int]]) -> list[list[int]]:
    """Part one line where a main passes between two consecutive heads."""
    parts = [[rows[0]]]
    for before, row in itertools.pairwise(rows):
        if (min(before, row), max(before, row)) in crossings:
            parts.append([])
        parts[-1].append(row)
    return parts


def _gather(plan: _Plan, links: Sequence[Link]) -> tuple[list[list[int]], list[tuple[int, int]]]:
    """Return the sides (rows in order) and the pairs of sides that a main parts."""
    crossings = {(link.first, link.second) for link in links if link.crossing}
    lines: dict[str, list[int]] = {}
    for row, node in enumerate(plan.heads.nodes):
        if node.branch_line is not None:
            lines.setdefault(node.branch_line, []).append(row)
    free = [row for row, node in enumerate(plan.heads.nodes) if node.branch_line is None]
    groups = _Groups(len(plan.heads))
    for link in links:
        if not link.crossing and plan.heads.nodes[link.first].branch_line is None:
            groups.merge(link.first, link.second)
    sides: list[list[int]] = []
    pairs: list[tuple[int, int]] = []
    for rows in [*lines.values(), *groups.groups(free)]:
        for chain in _levels(_order(rows, plan), plan):
            parts = _split(chain, crossings)
            pairs += [(len(sides) + i, len(sides) + i + 1) for i in range(len(parts) - 1)]
            sides += parts
    home = {row: number for number, rows in enumerate(sides) for row in rows}
    for first, second in crossings:
        rise = float(plan.z[first] - plan.z[second])
        if same_level(rise, float(np.hypot(*(plan.xy[first] - plan.xy[second])))):
            pairs.append((home[first], home[second]))
    return sides, [(a, b) for a, b in pairs if a != b]


def _bays(sides: list[list[int]], plan: _Plan, links: Sequence[Link]) -> tuple[list[int], list[float]]:
    """Return the bay of each side and the direction [rad] of each bay."""
    angles: list[float | None] = [
        _angle(plan.xy[rows[-1]] - plan.xy[rows[0]])
        if len(rows) > 1 and np.hypot(*(plan.xy[rows[-1]] - plan.xy[rows[0]])) > 1e-6
        else None
        for rows in sides
    ]
    home = {row: number for number, rows in enumerate(sides) for row in rows}
    for link in links:
        for row in (link.first, link.second):
            if angles[home[row]] is None and link.crossing:
                angles[home[row]] = _angle(plan.xy[link.second] - plan.xy[link.first])
    bays: list[float] = []
    chosen = [-1] * len(sides)
    for number in sorted(range(len(sides)), key=lambda i: (angles[i] is None, -len(sides[i]))):
        angle = angles[number]
        if angle is None:
            if not bays:
                bays.append(0.0)
            chosen[number] = 0
            continue
        near = [i for i, bay in enumerate(bays) if _turn(angle, bay) <= PARALLEL]
        if not near:
            bays.append(angle)
            near = [len(bays) - 1]
        chosen[number] = near[0]
    return chosen, bays


def _line(name: str, rows: list[int], bay: int, angle: float, plan: _Plan, sides: tuple[int, ...]) -> Line:
    """Return one line with its coordinates on the axes of its bay, heads from the low end up."""
    points = plan.xy[rows]
    along = points @ np.array([math.cos(angle), math.sin(angle)])
    order = np.lexsort((plan.z[rows], along))
    rows, along = [rows[i] for i in order], along[order]
    across = float(np.mean(points @ np.array([-math.sin(angle), math.cos(angle)])))
    area = plan.heads.area[rows]
    gaps = np.diff(along)
    if len(rows) > 1:
        share = (np.concatenate((gaps[:1], gaps)) + np.concatenate((gaps, gaps[-1:]))) / 2
    else:
        share = np.sqrt(area)
    real = share > 1e-6
    width = float(np.median(area[real] / share[real])) if real.any() else float(np.sqrt(np.median(area)))
    fed = (plan.open_ends[rows[0]], plan.open_ends[rows[-1]])
    return Line(
        name,
        tuple(rows),
        bay,
        along,
        across,
        share,
        (0.0, *np.cumsum(area).tolist()),
        (0.0, *np.cumsum(plan.z[rows]).tolist()),
        width,
        fed,
        sides,
    )


def _names(sides: list[list[int]], plan: _Plan, keys: list[tuple[int, float, float]]) -> list[str]:
    """Name the sides: the given tag, else the number of their row in order across each bay."""
    names = [""] * len(sides)
    number = 0
    last: tuple[int, float] | None = None
    for side in sorted(range(len(sides)), key=keys.__getitem__):
        tag = plan.heads.nodes[sides[side][0]].branch_line
        if tag is None and keys[side][:2] != last:
            number += 1
            last = keys[side][:2]
        names[side] = tag if tag is not None else f"{number}"
    return names


def _end_to_end(sides: Sequence[Line]) -> list[tuple[int, int]]:
    """Return the pairs of lines that meet end to end, in one row and on one level."""
    pairs = []
    order = sorted(range(len(sides)), key=lambda i: (sides[i].bay, sides[i].across))
    rows: list[list[int]] = []
    for i in order:
        last = sides[rows[-1][-1]] if rows else None
        if last and last.bay == sides[i].bay and sides[i].across - last.across <= SAME_ROW * last.width:
            rows[-1].append(i)
        else:
            rows.append([i])
    for row in rows:
        row.sort(key=lambda i: float(sides[i].along[0]))
        begins = [float(sides[i].along[0]) for i in row]
        for i in row:
            line = sides[i]
            end, reach = float(line.along[-1]), TOUCH * float(line.share[-1])
            top = line.heights[-1] - line.heights[-2]
            near = []
            for other in row[bisect_right(begins, end + 1e-6) : bisect_right(begins, end + reach)]:
                rise, gap = sides[other].heights[1] - top, float(sides[other].along[0]) - end
                if same_level(rise, gap):
                    near.append((steps_apart(rise), gap, other))
            if near:
                pairs.append((i, min(near)[2]))
    return pairs


def _over_main(made: Sequence[Line], a: int, b: int) -> bool:
    """Say whether two sides that a main parts lie in one row, so that they make one line."""
    return made[a].bay == made[b].bay and abs(made[a].across - made[b].across) < 0.5 * made[a].width


def _joined(
    made: Sequence[Line], pairs: Sequence[tuple[int, int]], plan: _Plan, bays: list[float]
) -> list[Line]:
    """Return the lines that the sides make across a main (``pairs``) or end to end."""
    groups, over_main = _Groups(len(made)), _Groups(len(made))
    for a, b in pairs:
        if _over_main(made, a, b):
            groups.merge(a, b)
            over_main.merge(a, b)
    for a, b in _end_to_end(made):
        groups.merge(a, b)
    joined = []
    for group in groups.groups(range(len(made))):
        if len(group) > 1:
            group.sort(key=lambda i: float(made[i].along[0]))
            rows = [row for side in group for row in made[side].heads]
            name = "+".join(dict.fromkeys(made[side].name for side in group))
            bay = made[group[0]].bay
            line = _line(name, rows, bay, bays[bay], plan, tuple(group))
            main = len(over_main.groups(group)) == 1
            joined.append(replace(line, joint="across the main" if main else "end to end"))
    return joined


@dataclass(frozen=True, slots=True, eq=False)
class _Sides:
    """The sides as lines, with the pairs of them that a main parts, and the plan they lie in."""

    plan: _Plan
    lines: tuple[Line, ...]
    pairs: list[tuple[int, int]]
    bays: list[float]


def _read_sides(heads: Heads, system: System) -> _Sides:
    xy, z = _coordinates(heads)
    piping: Piping = read_piping(system, heads.nodes)
    beside_main = {row for link in piping.links if link.crossing for row in (link.first, link.second)}
    ends = tuple(count > 0 or row in beside_main for row, count in enumerate(piping.open_ends))
    plan = _Plan(heads, xy, z, ends)
    links = _kept_links(piping.links, plan)
    sides, pairs = _gather(plan, links)
    bay_of, bays = _bays(sides, plan, links)
    keys = []
    for number, rows in enumerate(sides):
        angle = bays[bay_of[number]]
        centre = xy[rows].mean(axis=0)
        across = float(centre @ np.array([-math.sin(angle), math.cos(angle)]))
        along = float(centre @ np.array([math.cos(angle), math.sin(angle)]))
        keys.append((bay_of[number], round(across, 2), along))
    names = _names(sides, plan, keys)
    made = tuple(
        _line(names[i], rows, bay_of[i], bays[bay_of[i]], plan, (i,)) for i, rows in enumerate(sides)
    )
    return _Sides(plan, made, pairs, bays)


def find_lines(heads: Heads, system: System) -> Lines:
    """Return the branch lines of all heads, sides and joined ones.

    Raises
    ------
    DomainError
        Where a head has no coordinates.
    """
    sides = _read_sides(heads, system)
    joined = _joined(sides.lines, sides.pairs, sides.plan, sides.bays)
    inferred = any(node.branch_line is None for node in heads.nodes)
    return Lines(sides.lines, tuple(joined), inferred)


def inferred_lines(heads: Heads, system: System) -> dict[str, str]:
    """Return the name of the branch line, ``line H1–H4``, of each head whose line is inferred.

    The two sides of a main make one line, as they do where a table names it. A head that is alone on its
    line is left out: nothing says that it makes one.

    Raises
    ------
    DomainError
        Where a head has no coordinates.
    """
    sides = _read_sides(heads, system)
    groups = _Groups(len(sides.lines))
    for a, b in sides.pairs:
        if _over_main(sides.lines, a, b):
            groups.merge(a, b)
    found: dict[str, str] = {}
    for group in groups.groups(range(len(sides.lines))):
        group.sort(key=lambda i: float(sides.lines[i].along[0]))
        tags = [heads.tags[row] for i in group for row in sides.lines[i].heads]
        told = any(heads.nodes[row].branch_line is not None for i in group for row in sides.lines[i].heads)
        if len(tags) > 1 and not told:
            found.update(dict.fromkeys(tags, f"line {tags[0]}–{tags[-1]}"))
    return found
