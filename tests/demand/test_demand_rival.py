"""The set of placements against every subset of heads that satisfies the rules, tried one by one."""

from __future__ import annotations

import itertools
import math

import pytest
from demand_systems import criteria, grid, project, tree

from supplycheck.demand import demand_cases

CELL = 3.0


def consecutive(numbers: list[int]) -> bool:
    return numbers == list(range(numbers[0], numbers[0] + len(numbers)))


def is_placement(cells: set[tuple[int, int]], columns: int, along: int) -> bool:
    """Rules on a full rectangle of cells: every line the same run, one outer line part of it."""
    lines = sorted({i for i, _ in cells})
    places = {i: sorted(j for k, j in cells if k == i) for i in lines}
    if not consecutive(lines) or not all(consecutive(places[i]) for i in lines):
        return False
    full = min(along, columns)
    for part in {lines[0], lines[-1]}:
        others = [places[i] for i in lines if i != part] or [places[part]]
        if all(len(run) == full and run == others[0] for run in others) and set(places[part]) <= set(
            others[0]
        ):
            return True
    return False


def brute(rows: int, columns: int, area: float) -> set[frozenset[tuple[int, int]]]:
    along = math.ceil(1.2 * math.sqrt(area) / CELL - 1e-9)
    count = max(math.ceil(area / CELL**2 - 1e-9), min(along, columns))
    cells = list(itertools.product(range(rows), range(columns)))
    subsets = (set(chosen) for chosen in itertools.combinations(cells, count))
    return {frozenset(chosen) for chosen in subsets if is_placement(chosen, columns, along)}


def made(built, area: float, standard: str = "NFPA 13") -> set[frozenset[str]]:
    found = demand_cases(project(built, criteria(base_area=area, standard=standard)))
    sets = {frozenset(case.heads) for case in found.cases}
    assert len(sets) == len(found.cases)
    return sets


SHAPES = [
    (3, 5, 4), (3, 5, 5), (3, 5, 6), (4, 4, 6), (4, 4, 7), (4, 4, 8), (5, 3, 5), (5, 3, 7), (6, 2, 5),
    (6, 2, 6), (4, 5, 6), (3, 6, 7), (2, 7, 4), (5, 4, 7), (7, 1, 4), (3, 4, 1), (3, 4, 2), (3, 4, 3),
]  # fmt: skip


@pytest.mark.parametrize(("rows", "columns", "heads"), SHAPES)
@pytest.mark.parametrize("share", [1.0, 0.6])
def test_grid_equals_every_subset_that_satisfies_the_rules(
    rows: int, columns: int, heads: int, share: float
) -> None:
    area = (heads - 1 + share) * CELL**2
    expected = {frozenset(f"H{i}.{j}" for i, j in chosen) for chosen in brute(rows, columns, area)}
    assert expected
    assert made(grid(rows, columns, along=CELL, between=CELL), area) == expected


@pytest.mark.parametrize(("rows", "columns", "heads"), SHAPES)
def test_end_fed_tree_equals_every_subset_that_satisfies_the_rules(
    rows: int, columns: int, heads: int
) -> None:
    area = (heads - 0.4) * CELL**2
    expected = {frozenset(f"E{i}.{j}" for i, j in chosen) for chosen in brute(rows, columns, area)}
    built = tree([0] * rows, [columns] * rows, along=CELL, between=CELL)
    assert made(built, area) == expected


@pytest.mark.parametrize(
    ("rows", "west", "east", "heads"), [(3, 3, 4, 6), (3, 2, 4, 6), (4, 2, 2, 6), (3, 1, 5, 5)]
)
def test_two_sided_tree_equals_every_subset_that_satisfies_the_rules(
    rows: int, west: int, east: int, heads: int
) -> None:
    """Each side for itself, and the joined lines where one side is shorter than the area asks."""
    area = (heads - 0.4) * CELL**2
    along = math.ceil(1.2 * math.sqrt(area) / CELL)

    def name(i: int, j: int) -> str:
        return f"W{i}.{west - 1 - j}" if j < west else f"E{i}.{j - west}"

    kinds = [(0, west), (west, east)] + ([(0, west + east)] if min(west, east) < along else [])
    expected = {
        frozenset(name(i, j + first) for i, j in chosen)
        for first, columns in kinds
        if rows * min(columns, along) >= heads
        for chosen in brute(rows, columns, area)
    }
    built = tree([west] * rows, [east] * rows, along=CELL, between=CELL)
    assert made(built, area) == expected


@pytest.mark.parametrize("counts", [(5, 4, 3), (2, 5, 5), (5, 3, 5), (4, 5, 2, 4), (1, 4, 4), (5, 5, 1)])
@pytest.mark.parametrize("heads", [5, 6, 7])
def test_lines_of_unequal_length_equal_every_subset_that_satisfies_the_rules(
    counts: tuple[int, ...], heads: int
) -> None:
    """A line too short is taken whole; any other has the run nearest to the first's."""
    area = (heads - 0.4) * CELL**2
    along = math.ceil(1.2 * math.sqrt(area) / CELL)

    def faces(base: tuple[int, int], count: int) -> tuple[int, int] | None:
        runs = [(j, j + along) for j in range(count - along + 1)] or [(0, count)]
        run = min(runs, key=lambda r: abs(sum(r) - sum(base)))
        return run if min(run[1], base[1]) > max(run[0], base[0]) else None

    def allowed(cells: set[tuple[int, int]]) -> bool:
        lines = sorted({i for i, _ in cells})
        runs = {i: sorted(j for k, j in cells if k == i) for i in lines}
        if not consecutive(lines) or not all(consecutive(runs[i]) for i in lines):
            return False
        for order in (lines, lines[::-1]):
            base = (runs[order[0]][0], runs[order[0]][-1] + 1)
            if base[1] - base[0] != min(along, counts[order[0]]):
                continue
            spans = [faces(base, counts[i]) for i in order]
            middle = all(
                span == (runs[i][0], runs[i][-1] + 1)
                for i, span in zip(order[:-1], spans[:-1], strict=True)
            )
            last = spans[-1]
            part = (runs[order[-1]][0], runs[order[-1]][-1] + 1)
            beside = [base] + [(runs[i][0], runs[i][-1] + 1) for i in order[-2:-1]]
            touching = any(min(part[1], run[1]) > max(part[0], run[0]) for run in beside)
            if middle and touching and last and last[0] <= part[0] and part[1] <= last[1]:
                return True
        return False

    cells = [(i, j) for i, count in enumerate(counts) for j in range(count)]
    rule_sets = {
        frozenset(f"E{i}.{j}" for i, j in chosen)
        for chosen in itertools.combinations(cells, heads)
        if allowed(set(chosen))
    }
    found = made(tree([0] * len(counts), list(counts), along=CELL, between=CELL), area)
    assert rule_sets <= found
    # whatever else there is was made up for heads that no regular placement holds
    held = frozenset().union(*rule_sets) if rule_sets else frozenset()
    assert all(extra - held for extra in found - rule_sets)
