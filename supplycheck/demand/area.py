"""From the criteria and the system to the candidate design areas, with the derivation in steps."""

from __future__ import annotations

import math
from collections import Counter
from collections.abc import Mapping, Sequence
from dataclasses import replace
from operator import itemgetter
from typing import TypeVar

from supplycheck.demand.derivation import area_steps, shape_steps, statement_of
from supplycheck.demand.heads import Heads, all_heads
from supplycheck.demand.labels import Labels, unique
from supplycheck.demand.line import Line
from supplycheck.demand.lines import find_lines
from supplycheck.demand.outflows import asked_at_nodes, with_asked
from supplycheck.demand.placement import Placement, Rule
from supplycheck.demand.records import Candidates
from supplycheck.demand.runs import ROUND
from supplycheck.demand.search import CAP, search
from supplycheck.errors import DomainError
from supplycheck.model import Criteria, DemandCase, Project
from supplycheck.model.words import Step, Words

EUROPEAN = "EN 12845"
_T = TypeVar("_T")


def demand_cases(project: Project, *, cap: int = CAP) -> Candidates:
    """Return the candidate design areas of a project: the heads named in it, or every placement.

    Parameters
    ----------
    project
        The project; its criteria say whether the heads are given or searched.
    cap
        Number of placements after which a search stops and says so.

    Raises
    ------
    DomainError
        Where no candidate can be formed: no sprinkler, a head without floor area or K-factor, heads without
        coordinates in a search, an unknown tag among the given heads, criteria that contradict themselves.
    """
    _check(project.criteria)
    heads = all_heads(project)
    if project.criteria.design_area != "search":
        found = _given(project, heads, project.criteria.design_area)
    elif project.criteria.system == "deluge":
        found = _whole_system(project, heads)
    else:
        found = _searched(project, heads, cap)
    asked = asked_at_nodes(project.system.nodes)
    if not asked:
        return found
    return replace(found, cases=tuple(with_asked(case, asked) for case in found.cases))


def _check(criteria: Criteria) -> None:
    for name, value in (
        ("density", criteria.density),
        ("required area", criteria.required_area),
        ("base area", criteria.base_area),
        ("shape factor", criteria.shape_factor),
    ):
        if not (math.isfinite(value) and value > 0):
            raise DomainError(f"criteria: the {name} must be a number greater than zero")
    factors = math.prod(modifier.factor for modifier in criteria.modifiers)
    if not math.isclose(criteria.base_area * factors, criteria.required_area, rel_tol=1e-6):
        raise DomainError(
            "criteria: the required area is not the base area times its modifiers "
            f"(product of the modifiers {factors:g}, ratio of the areas "
            f"{criteria.required_area / criteria.base_area:g})"
        )


def _rule(criteria: Criteria) -> Rule:
    length = criteria.shape_factor * math.sqrt(criteria.required_area)
    return Rule(criteria.required_area, length, max(1, criteria.minimum_heads))


def _case(heads: Heads, rows: Sequence[int], text: str, lines: int, along: int, note: str) -> DemandCase:
    pick = itemgetter(*rows) if len(rows) > 1 else None

    def of(values: Sequence[_T]) -> tuple[_T, ...]:
        return tuple(pick(values)) if pick else (values[rows[0]],)

    return DemandCase(
        text,
        of(heads.tags),
        of(heads.flow),
        of(heads.pressure),
        of(heads.by),
        math.fsum(of(heads.areas)),
        lines,
        along,
        note,
    )


def _given(project: Project, heads: Heads, tags: Sequence[str]) -> Candidates:
    """Return the one case of the heads named in the project, with a note where they fall short."""
    rows = _rows_of(project, heads, tags)
    criteria = project.criteria
    rule = _rule(criteria)
    notes = []
    area = float(heads.area[rows].sum())
    if not rule.reached(area, rule.heads):
        notes.append(f"area short: the heads cover {area / rule.area:.1%} of the required area")
    if len(rows) < rule.heads:
        notes.append(f"{len(rows)} heads, fewer than the {rule.heads} that the criteria ask at least")
    lines, along, extent = _shape_of(project, heads, rows)
    if extent is not None and extent < rule.length * (1 - ROUND):
        notes.append(
            f"shape: along the lines the heads reach {extent / rule.length:.1%} of the length that "
            "the area asks"
        )
    text = f"the {len(rows)} heads given in the project"
    case = _case(heads, rows, text, lines, along, "; ".join(notes))
    steps = area_steps(criteria)
    values = (("count", float(len(rows)), "count"), ("area", criteria.required_area, "area"))
    formula = Words("sum of the areas of the {count} heads given; required {area}", values)
    steps.append(Step("Area covered", formula, area, "area"))
    statement = (
        f"The {len(rows)} heads of the design area are given in the project. Other placements were not "
        "tried: that this one is the most demanding is not shown."
    )
    return Candidates((case,), tuple(steps), statement, "given")


def _rows_of(project: Project, heads: Heads, tags: Sequence[str]) -> list[int]:
    """Return the row numbers of the given heads; every wrong tag is named at once."""
    if not tags:
        raise DomainError('the design area is an empty list; name its heads, or write "search"')
    known = {node.tag: node.kind for node in project.system.nodes}
    faults = []
    if unknown := [tag for tag in tags if tag not in known]:
        faults.append("no such node: " + ", ".join(unknown))
    if others := [tag for tag in tags if known.get(tag, "sprinkler") != "sprinkler"]:
        faults.append("not a sprinkler: " + ", ".join(f"{tag} ({known[tag]})" for tag in others))
    if doubled := [tag for tag, times in Counter(tags).items() if times > 1]:
        faults.append("named twice: " + ", ".join(doubled))
    if faults:
        raise DomainError(
            "design area: " + "; ".join(faults) + "; name each head of the area once by its tag"
        )
    row_of = {tag: row for row, tag in enumerate(heads.tags)}
    return [row_of[tag] for tag in tags]


def _shape_of(project: Project, heads: Heads, rows: list[int]) -> tuple[int, int, float | None]:
    """Return lines, most heads on a line, and the longest reach along a line [m] (None where unknown).

    A line of which every head is in the area reaches as far as it can: its length is not judged.
    """
    try:
        found = find_lines(heads, project.system)
    except DomainError:
        tags = Counter(heads.nodes[row].branch_line for row in rows)
        named = Counter({tag: count for tag, count in tags.items() if tag is not None})
        return (len(named), max(named.values()), None) if None not in tags else (0, 0, None)
    taken = {side for line in found.joined for side in line.sides}
    whole: list[Line] = [*found.joined, *(side for i, side in enumerate(found.sides) if i not in taken)]
    chosen = set(rows)
    used = along = 0
    reach: float | None = 0.0
    for line in whole:
        members = [i for i, row in enumerate(line.heads) if row in chosen]
        if not members:
            continue
        used += 1
        along = max(along, len(members))
        sides = [found.sides[side] for side in line.sides] if len(line.sides) > 1 else [line]
        if any(chosen.issuperset(side.heads) for side in sides):
            reach = None
        elif reach is not None:
            reach = max(reach, float(line.share[members].sum()))
    return used, along, reach


def _whole_system(project: Project, heads: Heads) -> Candidates:
    rows = list(range(len(heads)))
    lines, along, _ = _shape_of(project, heads, rows)
    note = "deluge: every head flows"
    case = _case(heads, rows, f"all {len(rows)} heads of the deluge system", lines, along, note)
    area = float(heads.area.sum())
    formula = Words("sum of the areas of all {count} heads", (("count", float(len(rows)), "count"),))
    steps = [
        Step("Density", Words("from the criteria"), project.criteria.density, "density"),
        Step("Area covered", formula, area, "area"),
    ]
    statement = f"A deluge system: all {len(rows)} heads flow at the same time, so there is one placement."
    return Candidates((case,), tuple(steps), statement, "search")


def _searched(project: Project, heads: Heads, cap: int) -> Candidates:
    criteria = project.criteria
    lines = find_lines(heads, project.system)
    european = criteria.standard == EUROPEAN
    rule = _rule(criteria)
    found = search(heads, lines, rule, european=european, cap=cap)
    name = Labels(heads.tags)
    texts = unique([name.of(placement) for placement in found.placements])
    side_of = {row: number for number, line in enumerate(lines.sides) for row in line.heads}
    cases = tuple(
        _placed(heads, side_of, placement, text)
        for placement, text in zip(found.placements, texts, strict=True)
    )
    steps = area_steps(criteria) + shape_steps(criteria, rule.length, heads, lines)
    whole = sum(bool(placement.note) for placement in found.placements)
    statement = statement_of(len(cases), found.complete, lines, european, whole)
    return Candidates(cases, tuple(steps), statement, "search", found.complete)


def _placed(heads: Heads, side_of: Mapping[int, int], placement: Placement, text: str) -> DemandCase:
    rows, note = placement.heads, placement.note
    if placement.extra:
        counts = Counter(side_of[row] for row in rows)
        return _case(heads, rows, text, len(counts), max(counts.values()), note)
    along = max(row.high - row.low for row in placement.rows)
    return _case(heads, rows, text, len(placement.rows), along, note)
